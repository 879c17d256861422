"""No number never passes for a small one: not in the control of a step, nor in the sums at a node."""

from __future__ import annotations

import math
from types import SimpleNamespace

import pytest

from simcore.solve.solution import Solution


@pytest.mark.parametrize("order", [0, 1])
def test_a_sum_that_is_no_number_is_the_worst(order: int) -> None:
    """In whichever stretch and at whichever node it stands."""
    found = [{"a": (math.nan, 1.0), "b": (0.0, 1.0)}, {"a": (1e-9, 1.0), "b": (0.5, 1.0)}]
    stretches = [SimpleNamespace(kirchhoff=lambda sums=sums: sums) for sums in (found if order else found[::-1])]
    share, node = Solution.worst_node.func(SimpleNamespace(stretches=stretches))
    assert math.isnan(share) and node == "a"
