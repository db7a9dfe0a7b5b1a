"""What an expression is never below, by its form alone."""

from __future__ import annotations

import math

from stress.netlist.expression import Binary, Call, Expression, Number


def least(expression: Expression) -> float:
    """Return a value that an expression is never below, whatever the circuit does; maybe -inf."""
    match expression:
        case Number(value):
            return value
        case Call("sqrt", (of,)):
            return math.sqrt(max(least(of), 0.0))
        case Call("abs" | "exp" | "pow" | "ramp" | "step", _):
            return 0.0
        case Call("max", arguments):
            return max(least(part) for part in arguments)
        case Call("min", arguments):
            return min(least(part) for part in arguments)
        case Call("ln", (of,)):
            low = least(of)
            return math.log(low) if low > 0.0 else -math.inf
        case Binary("+", left, right):
            return least(left) + least(right)
        case Binary("*", left, right) if left == right:
            return 0.0
        case Binary("*", left, right):
            low, other = least(left), least(right)
            return low * other if low >= 0.0 and other >= 0.0 else -math.inf
        case Binary("/", left, right) if least(left) >= 0.0 and least(right) >= 0.0:
            return 0.0
        case _:
            return -math.inf
