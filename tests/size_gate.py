"""The size gate: no module over 400 lines, no function body over 60 lines. Prints what is too long, exit status 1 then.

Knows the tree of Python files and nothing of what they do.
"""

from __future__ import annotations

import ast
import sys
from collections.abc import Iterator
from pathlib import Path

MODULE_LINES = 400
BODY_LINES = 60
ROOMS = ("grammar", "simcore", "tests", "circuits")


def too_long(path: Path) -> Iterator[str]:
    """What is too long in a module, one line each."""
    text = path.read_text(encoding="utf-8")
    lines = len(text.splitlines())
    if lines > MODULE_LINES:
        yield f"{path}: {lines} lines, allowed are {MODULE_LINES}"
    for node in ast.walk(ast.parse(text)):
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef):
            length = _body_lines(node)
            if length > BODY_LINES:
                yield f"{path}:{node.lineno}: {node.name} has {length} lines, allowed are {BODY_LINES}"


def _body_lines(function: ast.FunctionDef | ast.AsyncFunctionDef) -> int:
    """Lines from the first statement to the last, a docstring not counted."""
    body = function.body[1:] if ast.get_docstring(function, clean=False) is not None else function.body
    if not body:
        return 0
    return (body[-1].end_lineno or body[-1].lineno) - body[0].lineno + 1


def main(root: Path) -> int:
    """Check every module of the rooms; returns the exit status."""
    modules = [path for room in ROOMS for path in sorted((root / room).rglob("*.py"))]
    found = [line for path in modules for line in too_long(path)]
    print("\n".join(found) if found else f"{len(modules)} modules, none too long")
    return 1 if found or not modules else 0


if __name__ == "__main__":
    sys.exit(main(Path(__file__).resolve().parent.parent))
