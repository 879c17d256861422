"""The examples in the docstrings of sweeps from Python."""

from __future__ import annotations

import doctest

import pytest

import simcore


@pytest.mark.parametrize("function", [simcore.Design.sweep, simcore.Design.sweep_rows])
def test_the_example_runs(function) -> None:
    (example,) = doctest.DocTestFinder(recurse=False).find(function, function.__name__, globs={})
    result = doctest.DocTestRunner().run(example)
    assert result.attempted > 2 and result.failed == 0
