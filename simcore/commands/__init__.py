"""The verbs of the `bulkrail` command, one module each: their options, and whom they hand the work to.

A module adds its verb with `add`; it imports nothing heavy before its verb is asked for.
"""
