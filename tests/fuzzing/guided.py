"""Coverage-guided fuzzing of the whole command, by hand and for as long as one likes: needs `pip install atheris`.

    python -m tests.fuzzing.guided FOLDER [-max_total_time=3600] [further options of libFuzzer]

What it finds interesting is kept in FOLDER, which starts as the worked circuits, the bad files of tests/mistakes and the
corpus beside this file. A text that breaks something, takes longer than 5 s of processor time or more than 500 MB is written to the working
folder; mended, it goes to the corpus, which the tests read.
"""

from __future__ import annotations

import os
import shutil
import sys
import tempfile
import time
from pathlib import Path

HERE = Path(__file__).parent
SECONDS = 5.0
"""Of processor time, instrumented: on a machine with other work to do the clock says nothing."""
VERBS = (("run",), ("look",), ("tidy",))


def seeded(folder: Path) -> None:
    """Start a folder of texts to grow from."""
    folder.mkdir(parents=True, exist_ok=True)
    checkout = HERE.parent.parent
    for path in [*(checkout / "circuits").rglob("*.rect"), *(HERE / "corpus").iterdir()]:
        (folder / path.name).write_bytes(path.read_bytes())
    for path in (HERE.parent / "mistakes" / "cases").glob("*.case"):
        (folder / path.name).write_bytes(path.read_bytes().partition(b"==== messages ====")[0])


def words(path: Path) -> None:
    """The words and marks of the language, for the fuzzer to put in."""
    from grammar.scanner import tokens_of

    texts = [path.read_text("utf-8") for path in (HERE.parent.parent / "circuits").rglob("*.rect")]
    found = {token.text for text in texts for token in tokens_of(text) if token.kind in ("word", "mark", "unit")}
    path.write_text("".join(f'"{word}"\n' for word in sorted(found) if word.isascii() and '"' not in word))


def main() -> None:
    import atheris

    with atheris.instrument_imports(include=["grammar", "simcore"]):
        import simcore  # noqa: F401
        import simcore.report.look
        import simcore.report.session
        import simcore.report.tidying  # noqa: F401
        from tests.fuzzing.whole_command import bounded, ends

    folder = Path(sys.argv[1])
    seeded(folder)
    dictionary = Path(tempfile.mkdtemp()) / "words"
    words(dictionary)

    def one(data: bytes) -> None:
        place, began = Path(tempfile.mkdtemp()), time.process_time()
        try:
            with bounded():
                ends(data, place, *VERBS[len(data) % len(VERBS)])
        finally:
            shutil.rmtree(place)
        assert time.process_time() - began < SECONDS, "it takes too long"

    limits = ["-timeout=120", "-rss_limit_mb=500", "-max_len=6000", f"-dict={dictionary}"]
    atheris.Setup([sys.argv[0], str(folder), *limits, *sys.argv[2:]], one)
    atheris.Fuzz()


if __name__ == "__main__":
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
    main()
