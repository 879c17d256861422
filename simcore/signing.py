"""Sign-off of a design from Python: what `look`, `size`, `run --bill`, `run --page`, `draw`, `keep` and `compare` do.

It hands on to the rooms that do it and works nothing out; everything is imported where it is used.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from grammar.mistakes import DescriptionError, Mistake

if TYPE_CHECKING:
    from simcore.design.files import Project
    from simcore.judge.bill import BillLine
    from simcore.opening import Opened
    from simcore.proof import Proof
    from simcore.report.baseline import Drift
    from simcore.sized import Sized, Sizer


@dataclass(frozen=True)
class Comparison:
    """Kept figures beside today's: those beyond what both bounds allow, those that are gone, and new ones."""

    drifted: Sequence[Drift]
    missing: Sequence[Drift]
    new: Sequence[Drift]

    @property
    def same(self) -> bool:
        """Whether every kept figure is as it was."""
        return not self.drifted and not self.missing


class SignOff:
    """What a design can be asked for besides its figures. Each raises DescriptionError for what is wrong with it or
    with what it is given, NoSolution where a study can't be solved, OSError where a file can't be written."""

    project: Project
    settings: Mapping[str, str]

    if TYPE_CHECKING:

        @property
        def _opened(self) -> Opened: ...

        def prove(self) -> Proof: ...

    def look(self) -> str:
        """The circuit as understood, as text; nothing is solved."""
        from simcore.design.overview import describe
        from simcore.report.look import look

        return look(describe(self._opened.circuit), self.project.top.name)

    def bill(self) -> list[BillLine]:
        """What each element has to stand in the worst of all studies, beside its ratings, with what to buy."""
        from simcore.judge.bill import bill_of

        return bill_of(self.prove())

    def size(
        self, let: str, claim: str, *, first: str | None = None, last: str | None = None, series: str = "E12"
    ) -> Sized:
        """The values of a let at which a claim begins to be met, and the next preferred ones.

        claim: as behind `require`; first, last: the range as text, by default around the let's own value; series: of
        IEC 60063

        >>> import simcore
        >>> bridge = simcore.read(simcore.library_folder() / "bench_supply.rect")
        >>> (turn,) = bridge.size("C_res", "full_load: ripple(u_out) <= 1 V", first="1 mF", last="22 mF").sizing.turns
        >>> f"{turn.value:.4f}", turn.above, turn.preferred.value
        ('0.0056', True, 0.0068)
        """
        return self._sizer(claim, series).size(let, first, last)

    def trade(
        self,
        outer: str,
        inner: str,
        claim: str,
        *,
        first: str | None = None,
        last: str | None = None,
        series: str = "E12",
    ) -> list[tuple[float, Sized]]:
        """The same of a let `inner` at values of another, `outer`, between first and last: pairs of its value in SI
        units and what came out."""
        return self._sizer(claim, series).trade(outer, inner, first, last)

    def _sizer(self, claim: str, series: str) -> Sizer:
        from simcore.judge.preferred import SERIES
        from simcore.sized import Sizer, with_claim

        if series not in SERIES:
            raise DescriptionError([Mistake(f"there is no series {series}", f"Known are {', '.join(SERIES)}.")])
        project, mistakes = with_claim(self.project, claim)
        if mistakes:
            raise DescriptionError(mistakes)
        return Sizer(project, self.settings, SERIES[series])

    def page(self, path: str | Path) -> None:
        """Write the whole report as one HTML page."""
        from simcore.report.page import write_page

        write_page(Path(path), self.prove(), self.project)

    def draw(self, folder: str | Path, form: str = "png") -> list[Path]:
        """Draw the circuit, each study and each table of harmonics into a folder; form: "png" or "svg". Needs the
        extra `view`."""
        from simcore.report.pictures import drawn
        from simcore.report.writing import whole_bytes

        pictures = {Path(folder) / f"{name}.{form}": content for name, content in drawn(self.prove(), form).items()}
        for path, content in pictures.items():
            whole_bytes(path, content)
        return list(pictures)

    def keep(self, path: str | Path) -> int:
        """Keep today's figures in a CSV file; how many they are."""
        from simcore.report.baseline import figures_to_keep, write_kept

        figures = figures_to_keep(self.prove())
        write_kept(Path(path), figures)
        return len(figures)

    def compare(self, path: str | Path) -> Comparison:
        """Today's figures beside those of a file that `keep` wrote."""
        from simcore.report.baseline import KeptFileError, compared, figures_to_keep, read_kept

        try:
            kept = read_kept(Path(path))
        except KeptFileError as error:
            raise DescriptionError([Mistake(str(error), "Call `keep` first.", file=str(path))]) from None
        return Comparison(*compared(kept, figures_to_keep(self.prove())))
