"""later"""


def add(commands):
    pass
