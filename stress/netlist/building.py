"""Parts of an expression as they are put together: folded where numeric, bounded in size."""

from __future__ import annotations

import math

from stress.netlist.evaluate import OPERATORS
from stress.netlist.expression import Binary, Call, Conditional, Expression, Number, Unary
from stress.netlist.function import folded
from stress.netlist.meaning import FormulaError, Sizes
from stress.netlist.token import Tokens

DEEPEST = 60  # nesting of the text of an expression, functions and macros put in
DEEPEST_TREE = 300  # levels of the tree; a sum of n terms has n
MOST_PARTS = 20_000  # of an expression after functions and macros have been put in


class Builder(Tokens):
    """Builds the tree of one expression from its tokens; `sizes` bounds it."""

    def __init__(self, text: str, sizes: Sizes) -> None:
        """Begin at the first token."""
        self.sizes = sizes
        super().__init__(text)

    def made(self, part: Expression, *parts: Expression, at: int) -> Expression:
        """Fold what is numeric, and refuse what grows too large or too deep."""
        try:
            part = folded(part)
        except (ZeroDivisionError, OverflowError, ValueError):
            raise FormulaError(
                "this has no value (division by zero, or out of range)", at, self.start
            ) from None
        if isinstance(part, Number):
            if not math.isfinite(part.value):
                raise FormulaError("this has no finite value", at, self.start)
            return part
        count, deep = 1, 0
        for inner in parts:
            below, depth = self.sizes.of(inner)
            count += below
            deep = max(deep, depth)
        if count > MOST_PARTS or deep > DEEPEST_TREE:
            raise FormulaError(
                f"an expression of more than {MOST_PARTS} parts or {DEEPEST_TREE} levels",
                at,
                self.start,
            )
        self.sizes.known[id(part)] = (part, count, deep + 1)
        return part

    def deeper(self) -> None:
        """Go one level down."""
        self.sizes.depth += 1
        if self.sizes.depth > DEEPEST:
            raise self.fail(f"nested deeper than {DEEPEST}")

    def joined(self, operator: str, left: Expression, right: Expression, at: int) -> Expression:
        """Join two parts by an operator."""
        if isinstance(left, Number) and isinstance(right, Number):
            try:
                return self.made(Number(OPERATORS[operator](left.value, right.value)), at=at)
            except (ZeroDivisionError, OverflowError, ValueError):
                raise FormulaError("division by zero", at, self.start) from None
        return self.made(Binary(operator, left, right), left, right, at=at)

    def settled(self, part: Expression, at: int) -> Expression:
        """Fold the inside of what a function was rewritten to."""
        if isinstance(part, Binary):
            return self.joined(
                part.operator, self.settled(part.left, at), self.settled(part.right, at), at
            )
        if isinstance(part, Call):
            inner = tuple(self.settled(argument, at) for argument in part.arguments)
            return self.made(Call(part.function, inner), *inner, at=at)
        if isinstance(part, Unary) and isinstance(part.operand, Number):
            return Number(float(not part.operand.value))
        if isinstance(part, Conditional) and isinstance(part.test, Number):
            return part.yes if part.test.value else part.no
        return part
