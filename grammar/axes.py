"""The axes of a sweep as written: what varies, and over what. Plain frozen data, as in the description."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from grammar.description import Expression, Listed, Name


@dataclass(frozen=True)
class RangeAxis:
    let: Name
    first: Expression
    last: Expression
    count: Expression
    logarithmic: bool


@dataclass(frozen=True)
class OverAxis:
    let: Name
    values: Listed


@dataclass(frozen=True)
class ExtremesAxis:
    """names is () for `each let`."""

    names: tuple[Name, ...]


@dataclass(frozen=True)
class SamplesAxis:
    """names is () for `each let`."""

    count: Expression
    names: tuple[Name, ...]


@dataclass(frozen=True)
class FaultsAxis:
    """faults holds "open", "short" or both; each is a kind or "element", else names are listed."""

    faults: tuple[str, ...]
    names: tuple[Name, ...]
    each: str | None = None
