"""Expressions as data: what a behavioural element or a parameter computes.

The functions that may stand in a `Call` have one meaning each, whatever dialect the text
came from; the reader rewrites every dialect to them:

    abs sgn sqrt exp ln log10 sin cos tan asin acos atan sinh cosh tanh atan2
    floor ceil round min max
    pow(x, y)      |x| to the y
    pows(x, y)     sign(x) times |x| to the y
    power(x, y)    x to the y where that is real, else 0 (x < 0 with y not an integer)
    step(x)        1 for x > 0, else 0
    ramp(x)        x for x > 0, else 0
    limit(x, low, high)
    table(x, x1, y1, x2, y2, ...)   straight lines between the points, held at the ends
    ddt(x)         the time derivative
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TypeAlias


@dataclass(frozen=True, slots=True)
class Number:
    """A plain number."""

    value: float


@dataclass(frozen=True, slots=True)
class Name:
    """A parameter, or `time` or `temper` once everything else has been replaced."""

    name: str


@dataclass(frozen=True, slots=True)
class Voltage:
    """The voltage of a node against ground, or between two nodes."""

    plus: str
    minus: str = "0"


@dataclass(frozen=True, slots=True)
class Current:
    """The current through an element, into its first node."""

    element: str


@dataclass(frozen=True, slots=True)
class Call:
    """A function of this module's list, applied."""

    function: str
    arguments: tuple[Expression, ...]


@dataclass(frozen=True, slots=True)
class Unary:
    """`-` or `!`."""

    operator: str
    operand: Expression


@dataclass(frozen=True, slots=True)
class Binary:
    """`+ - * / % < <= > >= == != && ||`; the comparisons give 1 or 0."""

    operator: str
    left: Expression
    right: Expression


@dataclass(frozen=True, slots=True)
class Conditional:
    """`yes` where `test` is not 0, else `no`."""

    test: Expression
    yes: Expression
    no: Expression


Expression: TypeAlias = Number | Name | Voltage | Current | Call | Unary | Binary | Conditional
