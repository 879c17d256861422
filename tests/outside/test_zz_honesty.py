"""Last of the folder: of all comparisons with outside values, how many did the printed bounds cover?"""

from __future__ import annotations

import pytest
from checking import LEDGER


def test_bounds_cover_the_true_error() -> None:
    """At least 95 % of all comparisons whose outside value is exact for the circuit solved."""
    if LEDGER.compared < 50:
        pytest.skip(f"only {LEDGER.compared} comparisons were made: run the whole folder")
    share = LEDGER.covered / LEDGER.compared
    assert share >= 0.95, f"{LEDGER.covered} of {LEDGER.compared} covered; missed: " + "; ".join(LEDGER.missed)
