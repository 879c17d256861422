"""Tables of limits on harmonic currents: the published ones, and a user's own as a CSV file gives it.

Every table checks itself when it is made. It knows no circuits and opens no files.
"""

from __future__ import annotations

import csv
import math
from collections.abc import Mapping
from dataclasses import dataclass, field

COLUMNS = ("order", "limit [A]")
HIGHEST_ORDER = 1000


@dataclass(frozen=True)
class LimitTable:
    """Limits on the rms values of harmonics.

    ampere: order -> limit in A; per_watt: order -> limit in A for each W of active input power, never above the one in
    A where that order has one
    scope: what the reader must know of where it applies
    power: least and largest active input power in W that it is made for, None where power does not matter
    Raises ValueError for a table that can't be right.
    """

    name: str
    ampere: Mapping[int, float]
    per_watt: Mapping[int, float] = field(default_factory=dict)
    scope: str = ""
    power: tuple[float, float] | None = None

    def __post_init__(self) -> None:
        for limits in (self.ampere, self.per_watt):
            orders = list(limits)
            if orders != sorted(orders) or any(not 2 <= order <= HIGHEST_ORDER for order in orders):
                raise ValueError(f"the orders of a table rise, and lie from 2 to {HIGHEST_ORDER}")
            if not all(math.isfinite(limit) and limit > 0.0 for limit in limits.values()):
                raise ValueError("a limit is a number above zero")
        if not self.ampere and not self.per_watt:
            raise ValueError("a table has one limit at least")

    def at(self, power: float) -> dict[int, float]:
        """Order -> limit in A at an active input power in W."""
        if not self.per_watt:
            return dict(self.ampere)
        return {order: min(each * power, self.ampere.get(order, math.inf)) for order, each in self.per_watt.items()}


def read_limits(name: str, text: str) -> LimitTable:
    """A user's table: a CSV text with the columns `order` and `limit [A]`, any others passed over.

    Raises ValueError, with the line at fault, where it is no such table.
    """
    rows = csv.reader(text.splitlines())
    head = [cell.strip() for cell in next(rows, [])]
    if any(column not in head for column in COLUMNS):
        raise ValueError(f"its first line must name the columns {' and '.join(COLUMNS)}")
    places = [head.index(column) for column in COLUMNS]
    found: dict[int, float] = {}
    for line, row in enumerate(rows, start=2):
        if not any(cell.strip() for cell in row):
            continue
        try:
            order, limit = (row[place].strip() for place in places)
            if int(order) in found:
                raise ValueError(f"order {order} stands twice")
            found[int(order)] = float(limit)
        except (ValueError, IndexError) as fault:
            raise ValueError(f"line {line} holds no order and limit that can be taken: {fault}") from None
    return LimitTable(name, dict(sorted(found.items())))


# --- IEC 61000-3-2 ---------------------------------------------------------------------------------------------------

_SCOPE = "the edition of the standard in force decides, with its scope and exclusions"
_CLASS_A_FIRST = {3: 2.30, 5: 1.14, 7: 0.77, 9: 0.40, 11: 0.33, 13: 0.21, 2: 1.08, 4: 0.43, 6: 0.30}
_CLASS_D_FIRST = {3: 3.4e-3, 5: 1.9e-3, 7: 1.0e-3, 9: 0.5e-3, 11: 0.35e-3}


def _class_a() -> dict[int, float]:
    """Table 1: the first orders are listed, odd ones from 15 on fall as 0.15 x 15/n, even ones from 8 on as 0.23 x
    8/n."""
    rest = {order: 0.15 * 15.0 / order if order % 2 else 0.23 * 8.0 / order for order in range(8, 41)}
    return dict(sorted({**rest, **_CLASS_A_FIRST}.items()))


def _class_d() -> dict[int, float]:
    """Table 3: odd orders only; from 13 on 3.85 mA/W over the order."""
    return {order: _CLASS_D_FIRST.get(order, 3.85e-3 / order) for order in range(3, 40, 2)}


def _published(name: str, per_watt: Mapping[int, float], power: tuple[float, float] | None) -> LimitTable:
    """A table of the standard: among odd and among even orders a limit never rises, and no order is missing."""
    table = LimitTable(name, _class_a(), per_watt, _SCOPE, power)
    for limits in (table.ampere, table.per_watt):
        for order, limit in limits.items():
            if limit > limits.get(order - 2, math.inf):
                raise ValueError(f"{name}: the limit of order {order} is above that of order {order - 2}")
    if len(table.ampere) != 39 or (per_watt and set(per_watt) - set(table.ampere)):
        raise ValueError(f"{name}: an order is missing")
    return table


PUBLISHED: dict[str, LimitTable] = {
    table.name: table
    for table in (
        _published("IEC 61000-3-2 class A", {}, None),
        _published("IEC 61000-3-2 class D", _class_d(), (75.0, 600.0)),
    )
}
"""Name -> table. Source: IEC 61000-3-2, tables 1 and 3 (confirmed in a published test report and a public summary)."""
