"""A design built from Python, without a file: each call adds a statement, checked at once; it can be written as text.

It knows the language's statements and nothing of circuits.
"""

from __future__ import annotations

from grammar.description import Description, Statement
from grammar.layout import write
from grammar.mistakes import DescriptionError
from grammar.reader import read_text
from simcore.face import Design
from simcore.face import read_text as read_design


class Builder:
    """Collects statements. Values are written as in a description: "4700 uF", "0.6 Ohm", "230 : 12".

    >>> divider = Builder("a divider")
    >>> divider.element("a -> b", "source", "cell", constant="9 V")
    >>> divider.element("a -> mid", "resistor", "R_top", "2 kOhm")
    >>> divider.element("mid -> b", "resistor", "R_bottom", "1 kOhm")
    >>> divider.reference("b")
    >>> divider.study("rest", "operating_point")
    >>> print(divider.design().run("rest").figure("mean(voltage(mid))"))
    3 V ± 6 pV
    >>> print(divider.text.splitlines()[2])
    a -> b:   source cell, constant = 9 V
    """

    def __init__(self, purpose: str = ""):
        self._statements: list[Statement] = []
        if purpose:
            self._add(f'purpose "{purpose}"')

    def use(self, path: str) -> None:
        """Bring in the data sheets and blocks of a file of the library."""
        self._add(f'use "{path}"')

    def let(self, name: str, value: str, tolerance: str = "") -> None:
        """Name a value, with its tolerance if it has one."""
        self._add(f"let {name} = {value}" + (f" tolerance {tolerance}" if tolerance else ""))

    def element(self, terminals: str, kind: str, name: str, value: str = "", **keys: str) -> None:
        """Add an element between terminals, such as "a -> b" or "(p -> q) : (s -> t)"."""
        parts = [f"{terminals}: {kind} {name}", *([value] if value else [])]
        self._add(", ".join([*parts, *(f"{key} = {given}" for key, given in keys.items())]))

    def reference(self, *nodes: str) -> None:
        """Say which nodes count as 0 V."""
        self._add(f"reference {', '.join(nodes)}")

    def observe(self, name: str, signal: str) -> None:
        """Name a signal."""
        self._add(f"observe {name} = {signal}")

    def study(self, name: str, kind: str, *actions: str, events: tuple[str, ...] = (), **keys: str) -> None:
        """Add a study; actions such as "open winding", events such as "at 5 ms: open winding"."""
        parts = [kind, *(f"{key} = {given}" for key, given in keys.items()), *actions]
        body = " {\n" + "\n".join(events) + "\n}" if events else ""
        self._add(f"study {name}: {', '.join(parts)}{body}")

    def require(self, study: str, claim: str) -> None:
        """Add a requirement, such as "mean(u) >= 12 V"."""
        self._add(f"require {study}: {claim}")

    @property
    def description(self) -> Description:
        """What has been built so far."""
        return Description(tuple(self._statements))

    @property
    def text(self) -> str:
        """The design as canonical text."""
        return write(self.description)

    def design(self) -> Design:
        """The design, ready to run. Raises DescriptionError with all that is wrong with it as a whole."""
        return read_design(self.text, "built design")

    def _add(self, text: str) -> None:
        description, mistakes = read_text(text, "statement")
        if mistakes:
            raise DescriptionError(mistakes)
        self._statements += description.statements
