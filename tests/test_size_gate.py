"""The size gate sees what is too long and passes what is not."""

from __future__ import annotations

from pathlib import Path

from tests.size_gate import BODY_LINES, MODULE_LINES, too_long


def _module(folder: Path, statements: int, after: int = 0) -> Path:
    path = folder / "module.py"
    body = '    """A docstring."""\n' + "    x = 1\n" * statements
    path.write_text(f"def long_one():\n{body}" + "y = 2\n" * after, encoding="utf-8")
    return path


def test_a_body_at_the_limit_passes_and_one_line_more_does_not(tmp_path: Path) -> None:
    assert list(too_long(_module(tmp_path, BODY_LINES))) == []
    (message,) = too_long(_module(tmp_path, BODY_LINES + 1))
    assert message.endswith(f"long_one has {BODY_LINES + 1} lines, allowed are {BODY_LINES}")


def test_a_module_at_the_limit_passes_and_one_line_more_does_not(tmp_path: Path) -> None:
    assert list(too_long(_module(tmp_path, 1, MODULE_LINES - 3))) == []
    (message,) = too_long(_module(tmp_path, 1, MODULE_LINES - 2))
    assert message.endswith(f"{MODULE_LINES + 1} lines, allowed are {MODULE_LINES}")
