"""The parser of the grammar, from tables that are kept beside it: making them takes longer than most runs.

`python -m grammar.tables` writes them anew, as JSON, the same bytes each time. They are used where they were made from
this grammar by this version of lark; where not, the parser is made from the grammar.
"""

from __future__ import annotations

import json
import sys
from collections.abc import Sequence
from hashlib import sha256
from pathlib import Path
from typing import TYPE_CHECKING, Any

from grammar.wording import FORMS

if TYPE_CHECKING:
    from lark import Lark

GRAMMAR = Path(__file__).with_name("bulkrail.lark")
TABLES = Path(__file__).with_name("bulkrail.tables.json")
_SHIFT, _REDUCE = 0, 1


def parser() -> Lark:
    """The parser of statements, with a start for each of their forms."""
    import lark

    rules = GRAMMAR.read_text("utf-8")
    kept = _kept()
    if kept is None or kept["made from"] != _origin(rules, lark.__version__):
        return _made(rules)
    memo = {int(number): each for number, each in kept["memo"].items()}
    # Lark.load takes what Lark.save had written, as a file or already read.
    return lark.Lark.load({"data": _full(kept["data"]), "memo": memo})


def tables_of(rules: str) -> str:
    """The tables of a grammar as text."""
    import lark

    data, memo = _saved(_made(rules))
    content = {
        "made from": _origin(rules, lark.__version__),
        "data": _short(data),
        "memo": {str(number): each for number, each in memo.items()},
    }
    lines = json.dumps(content, ensure_ascii=True, separators=(",", ":")).replace('"memo":', '\n"memo":')
    return lines.replace("],[", "],\n[") + "\n"


def _made(rules: str) -> Lark:
    from lark import Lark

    return Lark(rules, parser="lalr", lexer="basic", start=list(FORMS), propagate_positions=True)


def _kept() -> dict[str, Any] | None:
    try:
        return json.loads(TABLES.read_text("ascii"))
    except (OSError, ValueError):
        return None


def _origin(rules: str, version: str) -> dict[str, str]:
    """What tables depend on."""
    forms = "\n".join(FORMS)
    return {"lark": version, "grammar": sha256(f"{rules}\n{forms}".encode()).hexdigest()}


def _saved(made: Lark) -> tuple[dict[str, Any], dict[int, Any]]:
    """What lark keeps of a parser: its data, and the terminals and rules that they name by number."""
    import io
    import pickle

    file = io.BytesIO()
    made.save(file)
    content = pickle.loads(file.getvalue())
    return content["data"], content["memo"]


def _short(data: dict[str, Any]) -> dict[str, Any]:
    """The data with a state as one row of numbers: a symbol, then the state to go to or, below zero, the rule to reduce
    by. Symbols and states are numbered by name and by their distance from the starts, not by chance."""
    table = data["parser"]["parser"]
    symbols = sorted(table["tokens"].values())
    rank = {number: symbols.index(name) for number, name in table["tokens"].items()}
    moves = {state: sorted((rank[each], move) for each, move in row.items()) for state, row in table["states"].items()}
    number = _numbered([table["start_states"][form] for form in FORMS], moves)
    rows = [
        [part for symbol, (way, to) in moves[state] for part in (symbol, number[to] if way == _SHIFT else ~to["@"])]
        for state in number
    ]
    starts, ends = ({form: number[table[key][form]] for form in FORMS} for key in ("start_states", "end_states"))
    short = {**table, "tokens": symbols, "states": rows, "start_states": starts, "end_states": ends}
    return {**data, "parser": {**data["parser"], "parser": short}}


def _numbered(starts: Sequence[int], moves: dict[int, list[tuple[int, Any]]]) -> dict[int, int]:
    """States in the order in which they are reached from the starts."""
    number = {state: index for index, state in enumerate(dict.fromkeys(starts))}
    queue = list(number)
    for state in queue:
        for _, (way, to) in moves[state]:
            if way == _SHIFT and to not in number:
                number[to] = len(number)
                queue.append(to)
    return number


def _full(data: dict[str, Any]) -> dict[str, Any]:
    """The data as lark keeps them; undoes _short."""
    table = data["parser"]["parser"]
    states = {
        index: {
            symbol: (_SHIFT, to) if to >= 0 else (_REDUCE, {"@": ~to})
            for symbol, to in zip(row[::2], row[1::2], strict=True)
        }
        for index, row in enumerate(table["states"])
    }
    full = {**table, "tokens": dict(enumerate(table["tokens"])), "states": states}
    return {**data, "parser": {**data["parser"], "parser": full}}


def main() -> int:
    """Write the tables beside the grammar; whoever reads meanwhile finds the old ones or the new."""
    fresh = TABLES.with_suffix(".fresh")
    fresh.write_text(tables_of(GRAMMAR.read_text("utf-8")), "ascii", newline="\n")
    fresh.replace(TABLES)
    return 0


if __name__ == "__main__":
    sys.exit(main())
