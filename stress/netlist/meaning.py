"""What the names in an expression stand for, and what can be wrong with one."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Protocol

from stress.netlist.expression import Expression

CONSTANTS = {
    "pi": math.pi,
    "e": math.e,
    "true": 1.0,
    "false": 0.0,
    "yes": 1.0,
    "no": 0.0,
    "c": 299792458.0,
    "kelvin": -273.15,
    "echarge": 1.602176634e-19,
    "boltz": 1.380649e-23,
    "planck": 6.62607015e-34,
}


class FormulaError(Exception):
    """What is wrong in an expression and where in its text.

    `obstacle` is true where the text is right but cannot be simulated.
    """

    def __init__(
        self, message: str, start: int, end: int, hint: str = "", *, obstacle: bool = False
    ) -> None:
        super().__init__(message)
        self.message, self.start, self.end, self.hint = message, start, end, hint
        self.obstacle = obstacle


class Names(Protocol):
    """What the names in an expression stand for."""

    def value(self, name: str) -> float | str | None:
        """Return a parameter's number, or the text of a macro, or None."""
        ...

    def function(self, name: str) -> tuple[tuple[str, ...], str] | None:
        """Return the formal names and the body of a `.func`, or None."""
        ...

    def node(self, name: str) -> str:
        """Return the flat name of a node."""
        ...

    def element(self, name: str) -> str:
        """Return the full name of an element."""
        ...

    def similar(self, name: str, *, functions: bool = False) -> str:
        """Return a hint with parameters or functions of a name like this one, or ""."""
        ...


@dataclass(frozen=True, slots=True)
class Formals:
    """The formal names of a function while its body is read."""

    outer: Names
    trees: dict[str, Expression | FormulaError]
    texts: dict[str, str]

    def value(self, name: str) -> float | str | None:
        """A parameter of the scope around."""
        return self.outer.value(name)

    def function(self, name: str) -> tuple[tuple[str, ...], str] | None:
        """A function of the scope around."""
        return self.outer.function(name)

    def node(self, name: str) -> str:
        """The node that an argument names, or one of the scope around."""
        return self.outer.node(self.texts.get(name.lower(), name))

    def element(self, name: str) -> str:
        """The element that an argument names, or one of the scope around."""
        return self.outer.element(self.texts.get(name.lower(), name))

    def similar(self, name: str, *, functions: bool = False) -> str:
        """Names of the scope around."""
        return self.outer.similar(name, functions=functions)


class Sizes:
    """How large each part of an expression is, so that no expression grows without bound."""

    def __init__(self) -> None:
        self.known: dict[int, tuple[Expression, int, int]] = {}
        self.depth = 0
        self.spread = False

    def of(self, part: Expression) -> tuple[int, int]:
        """Return the number of parts below and the depth."""
        held = self.known.get(id(part))
        return (1, 1) if held is None else (held[1], held[2])
