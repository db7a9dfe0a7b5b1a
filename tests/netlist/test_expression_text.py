"""What we write for ngspice has the value that the expression has."""

from __future__ import annotations

import math
from collections.abc import Callable

import pytest

from stress.netlist.evaluate import evaluate
from stress.netlist.expression import (
    Binary,
    Call,
    Conditional,
    Expression,
    Name,
    Number,
    Unary,
    Voltage,
)
from stress.netlist.expression_text import expression_text
from stress.netlist.read import read_text

VOLTS = {"n1": -2.0, "n2": 0.0, "n3": 0.7, "n4": 3.0, "n5": -0.3, "n6": 1e-3}
ONE = [
    "abs",
    "sgn",
    "sqrt",
    "exp",
    "ln",
    "log10",
    "sin",
    "cos",
    "tan",
    "asin",
    "acos",
    "atan",
    "sinh",
    "cosh",
    "tanh",
    "floor",
    "ceil",
]
TWO = ["atan2", "min", "max", "pow", "pows", "power"]
POWERS = (0.5, 1.0, 1.5, 2.0, 3.0, -1.0, -0.5, -2.0, 0.0)


def every_function() -> list[Expression]:
    nodes = [Voltage(node) for node in VOLTS]
    found: list[Expression] = []
    for x in nodes:
        found += [Call(name, (x,)) for name in (*ONE, "round", "step", "ramp", "ddt")]
        found += [Call(name, (x, y)) for name in TWO for y in nodes if y.plus not in ("n2", "n6")]
        found += [Call(name, (x, Number(y))) for name in TWO[3:] for y in POWERS]
        found.append(Call("limit", (x, Number(-1.0), Number(1.0))))
        points = tuple(Number(value) for value in (-1.0, 5.0, 0.0, 1.0, 2.0, 7.0))
        found.append(Call("table", (x, *points)))
        found.append(Call("table", (x, Number(-1.0), Voltage("n3"), Number(2.0), Number(7.0))))
        found.append(Binary("%", x, Number(0.37)))
        found += [Binary(o, x, Voltage("n3")) for o in ("<", "<=", ">", ">=", "==", "!=")]
        found += [Binary(o, x, Voltage("n3")) for o in ("&&", "||", "+", "-", "*", "/")]
        found += [Unary("!", x), Unary("-", x), Conditional(x, Number(5.0), Number(-6.0))]
    return found


@pytest.mark.program
def test_every_function_has_its_value_in_ngspice(
    operating_point: Callable[[str], dict[str, float]],
):
    """All in one deck, at negative, zero, small and large arguments."""
    expressions = every_function()
    sources = [f"V{node} {node} 0 {value}" for node, value in VOLTS.items()]
    cards = [f"B{k} b{k} 0 V={expression_text(e)}" for k, e in enumerate(expressions)]

    solved = operating_point("\n".join(["title", *sources, *cards]))

    assert len(expressions) > 400
    for number, expression in enumerate(expressions):
        value = evaluate(expression, voltages=VOLTS)
        if math.isinf(value):  # 0 to a negative power; ngspice gives a large number
            continue
        assert solved[f"b{number}"] == pytest.approx(value, rel=1e-6, abs=1e-9), expression


@pytest.mark.parametrize("expression", every_function(), ids=lambda e: expression_text(e)[:40])
def test_text_reads_back_to_the_same_text(expression: Expression):
    text = expression_text(expression)

    law = read_text(f"t\nB1 a 0 V={text}\n").elements[0].law

    assert law is not None
    assert expression_text(law.expression) == text


def test_names_stand_as_they_are():
    part = Binary("+", Name("time"), Binary("*", Number(-1.0), Voltage("x3.7", "0")))

    assert expression_text(part) == "(time + ((-1.0) * v(x3.7)))"


@pytest.mark.parametrize(
    ("text", "value"),
    [
        # ngspice 39, measured: powers go from left to right, minus binds less, size of the base
        ("-2^2", -4.0),
        ("2^3^2", 64.0),
        ("2**3**2", 64.0),
        ("(-2)^3", 8.0),
        ("(-8)**(1/3)", 2.0),
        ("pwr(-2,3)", 8.0),
        ("pow(-2,3)", -8.0),
        ("log(100)", 4.605170185988092),
        ("int(-2.5)", -2.0),
        ("nint(2.5)", 2.0),
        ("sgn(-3)", -1.0),
        ("1?2:3", 2.0),
        ("7/2*2", 7.0),
        ("1 > 2 ? 3 : 4", 4.0),
        ("2*-3", -6.0),
        ("!0 + ~1", 1.0),
        ("10a", 10.0),
        ("1k + 1meg + 1m", 1001000.001),
        ("min(3,1,2) + max(1,5,2)", 6.0),
        ("2e-3*1k", 2.0),
        ("pi", 3.141592653589793),
    ],
)
def test_numeric_expression(text: str, value: float):
    element = read_text(f"t\n.param p={{{text}}}\nV1 a 0 {{p}}\n").elements[0]

    assert element.value == pytest.approx(value, rel=1e-12)
