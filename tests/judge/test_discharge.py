"""What is left after disconnection: the table, and a capacitor that discharges through a resistor as the exponential has it."""

import math

import pytest

import simcore
from simcore.design.accessible import DISCHARGE, DischargeTable
from simcore.judge.outcome import State
from simcore.judge.verdict import Verdict

ES1, ES2 = DISCHARGE["IEC 62368-1 ES1"], DISCHARGE["IEC 62368-1 ES2"]


def test_limits_by_capacitance() -> None:
    """IEC 62368-1:2018, table 5, from memory; what lies between two rows has the limit of the larger."""
    for table, factor in ((ES1, 1.0), (ES2, 2.0)):
        listed = {1e-3: 60.0, 300e-9: 60.0, 299e-9: 60.0, 170e-9: 75.0, 91e-9: 100.0, 8e-9: 500.0, 0.1e-9: 25e3, 0.0: 25e3}
        assert {farad: table.at(farad) / factor for farad in listed} == listed
        assert table.after == 2.0 and "memory" in table.scope


@pytest.mark.parametrize("rows", [{}, {1e-9: 10.0, 2e-9: 10.0}, {2e-9: 10.0, 1e-9: 20.0}, {1e-9: 20.0, 2e-9: 5.0}, {0.0: 1.0}])
def test_a_table_that_cannot_be_right_is_not_made(rows: dict[float, float]) -> None:
    with pytest.raises(ValueError, match="limit|charge|numbers"):
        DischargeTable("made up", 2.0, rows, "")


def judged(bleeder: str, more: str = "", table: str = "IEC 62368-1 ES1", duration: str = "4 s") -> Verdict:
    design = simcore.read_text(f"""
    a -> g: source mains, constant = 325 V, series_resistance = 1 mOhm
    a -> g: capacitor C_X, 330 nF
    a -> g: resistor R_bleed, {bleeder}
    {more}
    reference g
    study rest: operating_point
    study unplugged: transient, duration = {duration}, angle = 0 deg {{
        at 0.5 s: open mains
    }}
    require unplugged: discharge(C_X) within "{table}"
    """)
    (verdict,) = design.prove().verdicts
    return verdict


@pytest.mark.parametrize(("bleeder", "state"), [("3.3 MOhm", State.HOLDS), ("3.9 MOhm", State.FAILS)])
def test_a_capacitor_discharges_through_its_bleeder(bleeder: str, state: State) -> None:
    """u = 325 V exp(-t / RC): 60 V after 2 s need R <= 2 s / (C ln(325 / 60)) = 3.587 MOhm."""
    assert 2.0 / (330e-9 * math.log(325.0 / 60.0)) == pytest.approx(3.587e6, rel=1e-3)
    verdict = judged(bleeder)
    ohms = float(bleeder.split()[0]) * 1e6
    assert verdict.state is state and verdict.figure is not None and verdict.limit is not None
    assert verdict.limit.value == 60.0
    assert verdict.figure.value == pytest.approx(325.0 * math.exp(-2.0 / (ohms * 330e-9)), rel=2e-3)
    seconds = ohms * 330e-9 * math.log(325.0 / 60.0)
    assert f"60 V are reached after {seconds:.3g} s" in verdict.reason and "330 nF across it" in verdict.reason
    assert "from memory" in verdict.reason


def test_capacitors_across_each_other_add_and_a_small_one_may_have_more() -> None:
    assert "1.33 uF across it" in judged("100 kOhm", "g -> a: capacitor C_more, 1 uF").reason
    less = judged("100 kOhm", table="IEC 62368-1 ES2")
    assert less.limit is not None and less.limit.value == 120.0


def test_what_shows_no_discharge_is_not_judged() -> None:
    short = judged("100 kOhm", duration="2.4 s")
    assert short.state is State.NOT_JUDGED and "2 s beyond its first event" in short.reason
