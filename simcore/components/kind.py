"""How a component kind declares itself: its terminals, its keys and how its physics enters the equations.

One declaration a key serves the checker, the messages and the language reference. A kind knows its own physics and the
`Frame` it stamps into, and nothing of text, graphs or solvers.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from grammar.quantities import Dimension

if TYPE_CHECKING:
    from simcore.components.frame import Frame
    from simcore.components.part import Part


@dataclass(frozen=True)
class Key:
    """One key of a kind.

    form: scalar, timed (a scalar or a list over time), point (a @ b), ratio (a : b : c), amplitude, list (plain
          values), series (key: value), curve (a @ b), harmonics (order: share @ angle), text, word (one of `words`),
          expression (a signal)
    dimension: of the value; at: of what stands behind @ (point, curve) or of a series' key
    default: SI value where the key is left out; None means absent
    low, high: allowed range in SI units, ends included unless `open_low`
    whole: the value is a whole number; bare: a point's `@` may be left out, which then is None
    alternatives: further dimensions that may be given; all such keys of an element agree, and Element.unit says which
    """

    name: str
    meaning: str
    dimension: Dimension
    form: str = "scalar"
    at: Dimension | None = None
    default: float | str | None = None
    low: float | None = None
    high: float | None = None
    open_low: bool = False
    words: tuple[str, ...] = ()
    required: bool = False
    rating: bool = False
    whole: bool = False
    bare: bool = False
    alternatives: tuple[Dimension, ...] = ()


@dataclass(frozen=True)
class Kind:
    """A component kind.

    form: which terminals it takes: "branch", "set" or "windings"
    value_key: the key that the unnamed value stands for; sheet: whether a data sheet may (or must) stand there
    check: further rules over several keys; gets the given keys, returns (key at fault or None, what, cure) triples
    build: adds the component's equations to a frame
    instants: from the given keys, the times of a study in s at which the component changes by itself
    describe: from the given keys, what was worked out from them, in words, a line each
    warn: from the given keys, what a reader must be warned of, in words
    """

    name: str
    meaning: str
    form: str
    keys: tuple[Key, ...]
    build: Callable[[Frame, Part], None]
    value_key: str | None = None
    check: Callable[[dict[str, object]], list[tuple[str | None, str, str]]] | None = None
    instants: Callable[[dict[str, object]], list[float]] | None = None
    describe: Callable[[dict[str, object]], list[str]] | None = None
    warn: Callable[[dict[str, object]], list[str]] | None = None
    key: dict[str, Key] = field(init=False, repr=False, compare=False)

    def __post_init__(self) -> None:
        object.__setattr__(self, "key", {key.name: key for key in self.keys})
        if len(self.key) != len(self.keys):
            raise ValueError(f"{self.name}: a key is declared twice")
