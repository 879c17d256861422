"""The examples in docstrings run, each module's that has some."""

from __future__ import annotations

import doctest
import importlib
from pathlib import Path

import pytest

import simcore

ROOT = Path(simcore.__file__).parent.parent
MODULES = [
    ".".join(path.relative_to(ROOT).with_suffix("").parts).removesuffix(".__init__")
    for room in ("grammar", "simcore")
    for path in sorted((ROOT / room).rglob("*.py"))
    if ">>> " in path.read_text("utf-8")
]


def test_the_public_faces_have_examples() -> None:
    assert {"simcore", "simcore.building", "simcore.face"} <= set(MODULES)


@pytest.mark.parametrize("name", MODULES)
def test_docstring_examples(name: str) -> None:
    result = doctest.testmod(importlib.import_module(name))
    assert result.failed == 0 and result.attempted > 0
