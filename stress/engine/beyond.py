"""Whether a solution lies where a law has left the range of its exponentials.

ngspice bends exp beyond `MOST_EXPONENT` instead of stopping, and then finds "solutions" of circuits that have
none. Such an operating point is refused.
"""

from __future__ import annotations

from collections.abc import Iterable

from stress.engine.case import Waves
from stress.engine.tree import inner
from stress.netlist.evaluate import FUNCTIONS, MOST_EXPONENT, OPERATORS
from stress.netlist.expression import (
    Binary,
    Call,
    Conditional,
    Current,
    Expression,
    Name,
    Number,
    Unary,
    Voltage,
)
from stress.netlist.flat import Element


def bent(elements: Iterable[Element], waves: Waves) -> tuple[str, ...]:
    """Return the elements whose laws are past the range of exp at the first sample of a solution.

    A law that reads what the waves do not hold, or time, is passed over.
    """
    rows = dict(zip(waves.names, waves.values[:, 0].tolist(), strict=True))
    found = []
    for element in elements:
        if element.law is None:
            continue
        try:
            _value(element.law.expression, rows)
        except OverflowError:
            found.append(element.inside or element.name)
        except (KeyError, ArithmeticError, ValueError):
            continue
    return tuple(dict.fromkeys(found))


def _value(part: Expression, rows: dict[str, float]) -> float:
    if isinstance(part, Number):
        return part.value
    if isinstance(part, Voltage):
        return _node(part.plus, rows) - _node(part.minus, rows)
    if isinstance(part, Current):
        return rows[f"i({part.element.lower()})"]
    if isinstance(part, Name):
        raise KeyError(part.name)
    if isinstance(part, Conditional):
        return _value(part.yes if _value(part.test, rows) else part.no, rows)
    values = [_value(each, rows) for each in inner(part)]
    if isinstance(part, Unary):
        return -values[0] if part.operator == "-" else float(not values[0])
    if isinstance(part, Binary):
        return OPERATORS[part.operator](*values)
    assert isinstance(part, Call)
    if part.function == "exp" and values[0] > MOST_EXPONENT:
        raise OverflowError
    return FUNCTIONS[part.function](*values)


def _node(name: str, rows: dict[str, float]) -> float:
    return 0.0 if name == "0" else rows[f"v({name.lower()})"]
