"""What a report says of the worst case is pasted into the file and run: it gives the same worst case, to the last bit."""

from __future__ import annotations

from pathlib import Path

import pytest
from pasted_text import pasted
from small_design import DESIGN

import simcore
from simcore.campaign.rows import found_of

EXTRA = """
sweep line:   V from 6 V to 20 V in 3 steps, studies = [work]
study later:  transient, after = start, duration = 20 ms
study opened: transient, duration = 30 ms {
    at 5 ms: open e
}
require later: peak(u_out) <= 12 V
require opened: valley(u_out) <= 12 V
"""
COPIES = """
repeat k from 1 to 2 {
    let I[k] = 1 mA tolerance 50 %
    p -> g: source s[k], constant = I[k]
}
sweep copies: extremes of I[1..2], studies = [work]
"""


@pytest.mark.parametrize("name", ["loads", "corners", "spread", "broken", "line"])
def test_pasted_worst_cases_come_out_the_same(name: str) -> None:
    text = DESIGN + EXTRA
    results = simcore.read_text(text).sweep(name, workers=1)
    seen = set()
    for worst in results.worst:
        if worst.row is None or worst.claim.study in seen:
            continue
        seen.add(worst.claim.study)
        new = pasted(text, results.pasted(worst.row))
        described = worst.row.number == 1 and name in ("corners", "broken")
        assert (new == pasted(text, [])) == described
        design = simcore.read_text(new, "pasted.rect")
        found = [found_of(verdict) for verdict in design.run(worst.claim.study).verdicts]
        assert worst.found in found
        assert design.circuit.sweeps[0].name == "loads", "its sweeps can still be made"
    assert seen


def test_a_let_without_a_line_says_how_it_is_set(tmp_path: Path) -> None:
    design = simcore.read_text(DESIGN + COPIES)
    results = design.sweep("copies", workers=1)
    lines = results.pasted(results.rows[-1])
    assert lines == ['# bulkrail run --set "I[1]=1.5 mA"', '# bulkrail run --set "I[2]=1.5 mA"']
    settings = {line.split('"')[1].split("=")[0]: line.split('"')[1].split("=")[1] for line in lines}
    assert tuple(map(found_of, design.variant(**settings).run("work").verdicts)) == results.rows[-1].found


def test_what_a_design_was_opened_with_is_pasted_too() -> None:
    results = simcore.read_text(DESIGN).variant(R_load="80 Ohm").sweep("corners", workers=1)
    assert "let R_load = 80 Ohm tolerance 76 Ohm .. 84 Ohm normal" in results.pasted(results.rows[1])
