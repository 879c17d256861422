"""The emitted run compiled to machine code by numba, where that is installed: the same source, the same bits.

What Python's arithmetic raises, the compiled code raises too, so that a lost pivot is seen in both. The machine code is
kept for the next call (see kept_code).
"""

from __future__ import annotations

import inspect
import math
from collections.abc import Callable
from importlib.util import find_spec
from typing import Any

import numpy as np

from simcore.equations import kept_code
from simcore.equations.run_interface import CONTROLS

_CASTS = tuple(int if name in ("order", "limit", "room", "attempts") else float for name in CONTROLS)
SECONDS_A_LINE, SECONDS_A_PAIR = 0.014, 1e-5
"""What compiling takes by the lines of the emitted source and their square: 10 s for 531 lines, 35 s for 1428, 89 s for
2312."""
LINES_AT_MOST = 2400
"""Lines beyond which nothing is compiled: for 2312, a settled ladder of five stages, numba holds 0.9 GB, and for 5300
more than 1.3 GB, many minutes long."""


def available() -> bool:
    """Whether numba is installed."""
    return find_spec("numba") is not None


SECONDS_KEPT = 1.5
"""What loading numba and the machine code of a source takes that was compiled before."""


def seconds_for(source: str) -> float:
    """About how long compiling a source will take; endless for one that is too long to be compiled."""
    lines = source.count("\n")
    if lines > LINES_AT_MOST:
        return math.inf
    return SECONDS_KEPT if kept_code.is_kept(_name(source)) else (SECONDS_A_LINE + SECONDS_A_PAIR * lines) * lines


def _name(source: str) -> str:
    return kept_code.name_of(inspect.getsource(_functions), source)


class CompiledRun:
    """An emitted run as machine code; call it like the emitted function, with an array for what it records.

    responses: the source is of the run that carries derivatives, which then serves for both
    """

    def __init__(self, source: str, responses: bool):
        from numba import njit, types

        numbers = types.Array(types.float64, 1, "C")
        controls = types.Tuple([types.int64 if cast is int else types.float64 for cast in _CASTS])
        signature = (numbers, numbers, numbers, controls, *([numbers] if responses else []))
        name = _name(source)

        def compiled(path: str | None) -> Callable:
            names = {"__name__": __name__, **_functions()}
            exec(compile(source, path or "<emitted>", "exec"), names)  # noqa: S102
            return njit(signature, error_model="python", cache=path is not None)(names["run"])

        try:
            self._run = compiled(kept_code.place_for(name, source))
        except Exception:  # whatever a damaged file or a full disk leads to
            kept_code.forget(name)
            self._run = compiled(None)
        self._responses = responses

    def __call__(
        self, p: list[float], s: list[float], out: np.ndarray, c: tuple[float, ...], m: list[float] | None = None
    ) -> tuple[int, ...]:
        saved = np.array(s)
        controls = tuple(cast(number) for cast, number in zip(_CASTS, c, strict=True))
        responses = [np.array(m or [], dtype=float)] if self._responses else []
        result = self._run(np.array(p), saved, out, controls, *responses)
        s[:] = saved.tolist()
        if m:
            m[:] = responses[0].tolist()
        return result


def _functions() -> dict[str, Any]:
    """The functions that a source may call; exp raises OverflowError as Python's does."""
    from numba import njit

    @njit(error_model="python")
    def exp(x: float) -> float:
        result = math.exp(x)
        if result == math.inf and x < math.inf:
            raise OverflowError
        return result

    plain: list[Callable] = [math.log, math.sqrt, math.sin, math.cos]
    return {"exp": exp, **{function.__name__: function for function in plain}}
