"""What `bulkrail size` says and writes: where a requirement begins to be met, and the next preferred value.

Knows sizings and how tables line up; works nothing out.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path

from grammar.mistakes import DescriptionError
from grammar.quantities import PREFIXES, Dimension, show, unit_of
from simcore.design.files import load
from simcore.judge.outcome import Outcome
from simcore.judge.preferred import SERIES
from simcore.judge.sizing import Judged
from simcore.report import words
from simcore.report.files import write_table
from simcore.report.panels import prefix_of
from simcore.report.screen import present_screen
from simcore.report.session import Say, rendered, written
from simcore.report.svg import Trade, trade_svg
from simcore.report.tables import INDENT, table
from simcore.report.traces import heading
from simcore.report.writing import whole_file
from simcore.sized import Sized, Sizer, with_claim

_DIGITS = 4
"""A turn is narrowed down to about as many."""


def size_file(
    file: str,
    lets: Sequence[str],
    claim: str,
    series: str,
    ends: tuple[str | None, str | None],
    settings: Mapping[str, str],
    folder: Path,
    say: Say,
    complain: Say,
) -> Outcome:
    """Size one let, or the second of two at values of the first, and write what was tried to size.csv, of two also as a
    picture."""
    project, mistakes = load(file)
    if not mistakes:
        project, mistakes = with_claim(project, claim)
    if mistakes:
        complain(rendered(mistakes))
        return Outcome.INPUT_WRONG
    sizer = Sizer(project, settings, SERIES[series])
    path = folder / "size.csv"
    try:
        if len(lets) == 1:
            return _one(sizer.size(lets[0], *ends), claim, series, path, say, complain)
        outer = sizer.quantity(lets[0], ends[0] or ends[1]).dimension
        traded = sizer.trade(lets[0], lets[1], *ends)
        return _two(lets[0], outer, traded, claim, series, path, say, complain)
    except DescriptionError as error:
        complain(rendered(error.mistakes))
        return Outcome.INPUT_WRONG


def _one(sized: Sized, claim: str, series: str, path: Path, say: Say, complain: Say) -> Outcome:
    columns = (heading(sized.let, sized.dimension), "verdict", "share of the limit left", "reason")
    rows = [(each.value, _state(each), each.share, each.failure) for each in sized.sizing.tried]
    if not written(lambda: write_table(path, columns, rows), path, complain):
        return Outcome.INPUT_WRONG
    screen = present_screen()
    span = f"{show(sized.low, sized.dimension)} to {show(sized.high, sized.dimension)}"
    lines = [f"{sized.let} from {span}, so that {claim}", *_found(sized, series, screen.width)]
    lines.append(f"All {len(rows)} values that were tried: {path}")
    say("\n".join(screen.painted(screen.fitted(lines))))
    return Outcome.ALL_HOLD if sized.sizing.solved else Outcome.NOT_ALL_HOLD


def _found(sized: Sized, series: str, width: int | None) -> list[str]:
    sizing = sized.sizing
    if sizing.met_throughout:
        return [f"{INDENT}met at every value that was tried"]
    if not sizing.turns:
        nearest = max(sizing.tried, key=lambda each: each.share)
        at = show(nearest.value, sized.dimension)
        return [f"{INDENT}no value in this range meets it; nearest is {at}", *_verdicts(nearest, width)]
    lines = []
    for turn in sizing.turns:
        where = "above" if turn.above else "below"
        lines.append(f"{INDENT}met {where} {show(turn.value, sized.dimension, _DIGITS)}")
        if turn.preferred is None:
            lines.append(f"{INDENT}no {series} value {where} it in this range holds for certain")
        else:
            lines.append(f"{INDENT}next {series} value (IEC 60063): {show(turn.preferred.value, sized.dimension)}")
            lines += _verdicts(turn.preferred, width)
    return lines


def _verdicts(judged: Judged, width: int | None) -> list[str]:
    if judged.failure:
        return [INDENT + judged.failure]
    cells = [words.verdict_cells(verdict) for verdict in judged.verdicts]
    return table(words.VERDICT_HEADINGS, cells, 3, width) + [INDENT + each for each in words.reasons(judged.verdicts)]


def _state(judged: Judged) -> str:
    if judged.failure:
        return "no solution"
    return "holds" if judged.holds else ("met" if judged.share >= 0.0 else "fails")


def _two(
    outer: str,
    dimension: Dimension,
    traded: Sequence[tuple[float, Sized]],
    claim: str,
    series: str,
    path: Path,
    say: Say,
    complain: Say,
) -> Outcome:
    """The trade-off between two lets: where the second just meets the requirement at each value of the first."""
    inner = traded[0][1]
    columns = (
        heading(outer, dimension),
        heading(inner.let, inner.dimension),
        "met",
        heading(f"{inner.let} in {series}", inner.dimension),
    )
    rows = [row for value, sized in traded for row in _trade_rows(value, sized)]
    trade = _trade(outer, dimension, inner, rows, f"{claim}; hollow: the next {series} value")
    picture = path.with_suffix(".svg")

    def write() -> None:
        write_table(path, columns, rows)
        if trade is not None:
            with whole_file(picture) as file:
                file.write(trade_svg(trade) + "\n")

    if not written(write, path, complain):
        return Outcome.INPUT_WRONG
    units = (dimension, inner.dimension, None, inner.dimension)
    cells = [[_cell(each, unit) for each, unit in zip(row, units, strict=True)] for row in rows]
    screen = present_screen()
    names = (outer, inner.let, "met", f"{inner.let} in {series}")
    places = f"{path}, {picture}" if trade is not None else str(path)
    lines = [f"{inner.let} over {outer}, so that {claim}", *table(names, cells, 0, screen.width)]
    lines.append(f"Written to {places}")
    say("\n".join(screen.fitted(lines)))
    return Outcome.ALL_HOLD if any(sized.sizing.solved for _, sized in traded) else Outcome.NOT_ALL_HOLD


Traded = tuple[float, float | None, str, float | None]


def _trade(outer: str, dimension: Dimension, inner: Sized, rows: Sequence[Traded], title: str) -> Trade | None:
    """The trade-off as it is drawn, a curve for each side on which it is met; None where no value was found."""
    found = [(first, second) for first, second, _, _ in rows if second is not None]
    if not found:
        return None
    names, factors = [], []
    for let, unit, place in ((outer, dimension, 0), (inner.let, inner.dimension, 1)):
        prefix = prefix_of(max(point[place] for point in found), unit)
        symbol = prefix + unit_of(unit)
        names.append(f"{let} in {symbol}" if symbol else let)
        factors.append(1.0 / PREFIXES[prefix])
    curves: dict[str, list[tuple[float, float]]] = {}
    made = []
    for first, second, side, preferred in rows:
        if second is not None:
            curves.setdefault(side, []).append((factors[0] * first, factors[1] * second))
        if preferred is not None:
            made.append((factors[0] * first, factors[1] * preferred))
    return Trade(title, names[0], names[1], curves, made)


def _trade_rows(value: float, sized: Sized) -> list[Traded]:
    if not sized.sizing.turns:
        return [(value, None, "everywhere" if sized.sizing.met_throughout else "nowhere", None)]
    return [
        (value, turn.value, "above" if turn.above else "below", turn.preferred.value if turn.preferred else None)
        for turn in sized.sizing.turns
    ]


def _cell(value: float | str | None, dimension: Dimension | None) -> str:
    if value is None:
        return "-"
    return show(value, dimension) if isinstance(value, float) and dimension is not None else str(value)
