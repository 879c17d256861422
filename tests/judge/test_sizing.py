"""The search for the value that just meets a requirement, on functions and designs whose answer is known."""

import math
from collections.abc import Callable

import pytest

import simcore
from grammar.quantities import OHM
from simcore.design.circuit import Requirement
from simcore.figures.figure import Figure
from simcore.judge.held import Verdict
from simcore.judge.outcome import State
from simcore.judge.preferred import SERIES
from simcore.judge.sizing import POINTS, Judge, Judged, Sizing, Turn, size
from simcore.sized import Sizer, with_claim, written

REQUIREMENT = Requirement("s", "<=", None, None, None, "made up")
UNSURE = 1e-3


def judge(margin: Callable[[float], float]) -> Judge:
    """Judges a limit of 1 ohm by a margin; within UNSURE of it nothing is decided."""

    def at(value: float, sure: bool) -> Judged:
        left = margin(value)
        state = State.UNDECIDED if abs(left) <= UNSURE else (State.HOLDS if left > 0.0 else State.FAILS)
        limit, found = Figure(1.0, OHM), Figure(left, OHM, UNSURE)
        return Judged(value, [Verdict(REQUIREMENT, state, limit, limit, margin=found)])

    return at


def sized(margin: Callable[[float], float], low: float = 0.01, high: float = 100.0) -> Sizing:
    return size(judge(margin), low, high, SERIES["E12"])


def test_a_requirement_that_is_met_from_a_value_up() -> None:
    (turn,) = sized(lambda value: math.log(value / 5.0)).turns
    assert turn.value == pytest.approx(5.0, rel=2e-4) and turn.above
    assert turn.preferred is not None and turn.preferred.value == 5.6 and turn.preferred.holds


def test_one_that_is_met_up_to_a_value() -> None:
    (turn,) = sized(lambda value: 5.0 - value).turns
    assert not turn.above and turn.preferred is not None and turn.preferred.value == 4.7


def test_one_that_is_met_in_the_middle_only() -> None:
    low, high = sized(lambda value: 1.0 - abs(math.log(value / 2.0))).turns
    assert (low.above, high.above) == (True, False)
    assert low.value == pytest.approx(2.0 / math.e, rel=2e-4) and high.value == pytest.approx(2.0 * math.e, rel=2e-4)
    assert low.preferred is not None and low.preferred.value == 0.82
    assert high.preferred is not None and high.preferred.value == 4.7


def test_a_verdict_that_jumps_is_found_like_any_other() -> None:
    (turn,) = sized(lambda value: 1.0 if value > 7.0 else -1.0).turns
    assert turn.value == pytest.approx(7.0, rel=2e-4) and turn.preferred is not None and turn.preferred.value == 8.2


def test_a_preferred_value_within_the_bound_is_passed_over() -> None:
    (turn,) = sized(lambda value: math.log(value / 4.7) + 0.5 * UNSURE).turns
    assert turn.preferred is not None and turn.preferred.value == 5.6


def test_no_value_and_every_value() -> None:
    nowhere, everywhere = sized(lambda value: -value), sized(lambda value: value)
    assert not nowhere.turns and not nowhere.solved and not nowhere.met_throughout
    assert not everywhere.turns and everywhere.solved and everywhere.met_throughout


def test_a_preferred_value_beyond_the_range_is_none() -> None:
    (turn,) = sized(lambda value: value - 95.0, 1.0, 99.0).turns
    assert turn.preferred is None


def test_a_turn_that_is_expected_is_found_without_a_scan() -> None:
    """And one that is not where it is expected, or turns the other way, is found by one."""
    asked: list[tuple[float, bool]] = []

    def at(value: float, sure: bool) -> Judged:
        asked.append((value, sure))
        return judge(lambda value: math.log(value / 5.0))(value, sure)

    for expected, above, scanned in ((4.9, True, False), (4.0, True, False), (0.1, True, True), (4.9, False, True)):
        asked.clear()
        found = size(at, 0.01, 100.0, SERIES["E12"], [Turn(expected, above, None)])
        assert [turn.value for turn in found.turns] == pytest.approx([5.0], rel=2e-4) and found.turns[0].above
        assert (len(asked) > POINTS) == scanned, (expected, len(asked))
        # Only a preferred value has to be sure.
        assert [value for value, sure in asked if sure] == [5.6]


def test_a_trade_off_of_a_divider_is_a_straight_line() -> None:
    """u = 10 V R_low / (R_low + R_top) = 4 V at R_low = 2/3 R_top, whatever the top."""
    traded = sizer("s: mean(u) >= 4 V").trade("R_top", "R_low", "100 Ohm", "10 kOhm")
    assert len(traded) == POINTS and traded[0][0] == 100.0 and traded[-1][0] == pytest.approx(10e3)
    for top, found in traded:
        (turn,) = found.sizing.turns
        assert turn.value == pytest.approx(2.0 / 3.0 * top, rel=2e-4) and turn.above


def test_a_value_without_solution_does_not_hold() -> None:
    def at(value: float, sure: bool) -> Judged:
        return Judged(value, [], "no solution") if value < 3.0 else judge(lambda _: 1.0)(value, sure)

    (turn,) = size(at, 0.01, 100.0, SERIES["E12"]).turns
    assert turn.value == pytest.approx(3.0, rel=2e-4) and turn.above


DIVIDER = """
let R_low = 1 kOhm
let R_top = 1 kOhm
let nothing = 0 Ohm
a -> g: source e, constant = 10 V
a -> m: resistor R1, R_top
m -> g: resistor R2, R_low
reference g
observe u = voltage(m)
study s: operating_point
require s: mean(u) >= 9.9 V
"""


def sizer(claim: str, series: str = "E24") -> Sizer:
    project, mistakes = with_claim(simcore.read_text(DIVIDER).project, claim)
    assert not mistakes
    return Sizer(project, {}, SERIES[series])


def test_a_divider_is_sized_by_ohms_law() -> None:
    # u = 10 V R_low / (R_low + 1 kOhm) = 4 V at R_low = 2/3 kOhm; the design's own requirement is left out.
    (turn,) = sizer("s: mean(u) >= 4 V").size("R_low").sizing.turns
    assert turn.value == pytest.approx(2000.0 / 3.0, rel=2e-4)
    assert turn.preferred is not None and turn.preferred.value == 680.0


@pytest.mark.parametrize(
    ("let", "first", "last", "why"),
    [
        ("R_lo", None, None, "Did you mean R_low?"),
        ("nothing", None, None, "not above zero"),
        ("R_low", "2 kOhm", "1 kOhm", "range is empty"),
        ("R_low", "2 V", None, "V"),
        ("R_low", "-1 Ohm", "1 kOhm", "below|not above zero|least|range"),
    ],
)
def test_what_cannot_be_sized_is_a_message(let: str, first: str | None, last: str | None, why: str) -> None:
    with pytest.raises(simcore.DescriptionError, match=why):
        sizer("s: mean(u) >= 4 V").size(let, first, last)


@pytest.mark.parametrize("claim", ["s mean(u) >= 4 V", "s: mean(u) >= 4 V\nreference a", "s: mean(u)"])
def test_a_claim_that_is_not_one_requirement_is_a_mistake(claim: str) -> None:
    assert with_claim(simcore.read_text(DIVIDER).project, claim)[1]


def test_values_are_written_without_loss() -> None:
    assert written(0.1 + 0.2, OHM) == "0.30000000000000004 Ohm"
