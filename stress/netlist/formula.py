"""Text to `Expression`: precedence climbing over one expression, in the meaning of its dialect.

    expression = choice
    choice     = either ["?" expression ":" expression]
    either     = both {("||" | "|") both}
    both       = compared {("&&" | "&") compared}
    compared   = sum {("<" | "<=" | ">" | ">=" | "==" | "!=" | "<>") sum}
    sum        = product {("+" | "-") product}
    product    = signed {("*" | "/" | "%") signed}
    signed     = ("-" | "+" | "!" | "~") signed | raised
    raised     = primary {("^" | "**") (primary | signed)}
    primary    = number | name | name "(" arguments ")" | "V(" nodes ")" | "I(" element ")"
               | "(" expression ")" | "{" expression "}" | "'" expression "'"

Braces and quotes inside an expression count as parentheses.
"""

from __future__ import annotations

from stress.netlist.building import DEEPEST, Builder
from stress.netlist.expression import (
    Conditional,
    Current,
    Expression,
    Name,
    Number,
    Unary,
    Voltage,
)
from stress.netlist.function import REFUSED, SPREAD, arity, named, raised
from stress.netlist.meaning import CONSTANTS, Formals, FormulaError, Names, Sizes
from stress.text.number import NumberError, read_number

_CLOSES = {"(": ")", "{": "}"}
# How tightly an operator binds, and what it is called in the tree.
_BINDS = {
    "||": (0, "||"), "|": (0, "||"), "&&": (1, "&&"), "&": (1, "&&"),
    "<": (2, "<"), "<=": (2, "<="), ">": (2, ">"), ">=": (2, ">="),
    "==": (2, "=="), "=": (2, "=="), "!=": (2, "!="), "<>": (2, "!="),
    "+": (3, "+"), "-": (3, "-"), "*": (4, "*"), "/": (4, "/"), "%": (4, "%"),
}  # fmt: skip


def parse(
    text: str,
    names: Names,
    *,
    dialect: str = "default",
    parametric: bool = False,
    across: Expression | None = None,
    sizes: Sizes | None = None,
) -> Expression:
    """Return the expression; parameters, functions and macros are put in, numbers folded.

    Args:
        text: Without the outer braces or quotes, or with them.
        names: What its names stand for.
        dialect: Whose meaning the functions have.
        parametric: A parameter: the outcome must be a number, so unknown names are errors.
        across: What `x` stands for (the charge of a capacitor is given in terms of it).
        sizes: To be shared between the expressions that make up one.

    Raises:
        FormulaError: With the place in `text`.
    """
    return _Reader(text, names, dialect, parametric, across, sizes or Sizes()).whole()


class _Reader(Builder):
    def __init__(
        self,
        text: str,
        names: Names,
        dialect: str,
        parametric: bool,
        across: Expression | None,
        sizes: Sizes,
    ) -> None:
        self.names, self.dialect = names, dialect
        self.parametric, self.across = parametric, across
        super().__init__(text, sizes)

    def whole(self) -> Expression:
        if self.kind == "end":
            raise FormulaError("an expression is missing here", 0, 1)
        found = self.choice()
        if self.kind != "end":
            raise self.fail(f'"{self.token}" is not expected here', "an operator is missing")
        return found

    def choice(self) -> Expression:
        self.deeper()
        at = self.start
        test = self.binary(0)
        if self.take("?"):
            yes = self.choice()
            self.expect(":")
            no = self.choice()
            if isinstance(test, Number):
                test = yes if test.value else no
            else:
                test = self.made(Conditional(test, yes, no), test, yes, no, at=at)
        self.sizes.depth -= 1
        return test

    def binary(self, lowest: int) -> Expression:
        at = self.start
        left = self.signed()
        while self.kind == "mark":
            level, operator = _BINDS.get(self.token, (-1, ""))
            if level < lowest:
                break
            self.step()
            left = self.joined(operator, left, self.binary(level + 1), at)
        return left

    def signed(self) -> Expression:
        at = self.start
        sign = self.take("-", "+", "!", "~")
        if not sign:
            return self.raised()
        self.deeper()
        inner = self.signed()
        self.sizes.depth -= 1
        if sign == "+":
            return inner
        operator = "-" if sign == "-" else "!"
        if isinstance(inner, Number):
            return Number(-inner.value if operator == "-" else float(not inner.value))
        return self.made(Unary(operator, inner), inner, at=at)

    def raised(self) -> Expression:
        at = self.start
        base = self.primary()
        while self.take("^", "**"):
            power = self.signed() if self.token in ("-", "+") else self.primary()
            base = self.made(
                raised(base, power, dialect=self.dialect, parametric=self.parametric),
                base, base, power, at=at,
            )  # fmt: skip
        return base

    def primary(self) -> Expression:
        at, kind, token = self.start, self.kind, self.token
        if kind == "number":
            return self.number()
        if kind == "name":
            end = self.end
            self.step()
            if self.kind == "mark" and self.token in "({":
                low = token.lower()
                if low in ("v", "i") and self.names.function(low) is None:
                    return self.sensed(low, at)
                return self.applied(token, at, end)
            return self.name(token, at, end)
        if kind == "mark" and token in ("(", "{"):
            self.step()
            inner = self.choice()
            self.expect(_CLOSES[token])
            return inner
        if kind == "mark" and token == "'":
            self.step()
            inner = self.choice()
            self.expect("'")
            return inner
        raise self.fail(
            f'expected a number, a name or "(", got "{token}"' if token
            else "the expression ends where a number or a name should follow"
        )  # fmt: skip

    def number(self) -> Expression:
        try:
            value = read_number(self.token).value
        except NumberError as error:
            start = self.start + error.start
            raise FormulaError(
                error.message, start, start + max(error.length, 1), error.hint
            ) from None
        self.step()
        return Number(value)

    def name(self, token: str, at: int, end: int) -> Expression:
        low = token.lower()
        if isinstance(self.names, Formals) and low in self.names.trees:
            tree = self.names.trees[low]
            if isinstance(tree, FormulaError):  # a node name, used as a number
                raise FormulaError(tree.message, at, end, tree.hint)
            return tree
        if low == "x" and self.across is not None:
            return self.across
        value = self.names.value(low)
        if isinstance(value, str):
            return self.inlined(value, self.outer(), token, at, end)
        if value is not None:
            return Number(value)
        if not self.parametric:
            if low in ("time", "temper"):
                return Name(low)
            if low == "temp":
                return Name("temper")
            if low == "hertz":
                return Number(0.0)
        if low in CONSTANTS:
            return Number(CONSTANTS[low])
        if low == "temper" or low == "temp":
            return Name("temper")
        raise FormulaError(f'undefined parameter "{token}"', at, end, self.names.similar(low))

    def outer(self) -> Names:
        """Return the names that count outside the formals of functions."""
        names = self.names
        while isinstance(names, Formals):
            names = names.outer
        return names

    def inlined(self, text: str, names: Names, token: str, at: int, end: int) -> Expression:
        """Read the text of a macro or function where it is used."""
        if self.sizes.depth >= DEEPEST - 2:
            raise FormulaError(
                f'"{token}" is defined by itself, or nested deeper than {DEEPEST}', at, end
            )
        depth = self.sizes.depth
        try:
            return parse(
                text, names, dialect=self.dialect, parametric=self.parametric,
                across=self.across, sizes=self.sizes,
            )  # fmt: skip
        except FormulaError as error:
            message = error.message
            if not message.startswith('in "') and "by itself" not in message:
                message = f'in "{token}": {message}'
            raise FormulaError(message, at, end, error.hint, obstacle=error.obstacle) from None
        finally:
            self.sizes.depth = depth

    def sensed(self, kind: str, at: int) -> Expression:
        """V(a), V(a,b) or I(element)."""
        pieces = [piece.strip().strip("\"'") for piece in self.raw_arguments()]
        if not all(pieces) or len(pieces) > (2 if kind == "v" else 1):
            form = "V(node) or V(node,node)" if kind == "v" else "I(element)"
            raise FormulaError(f"expected {form}", at, self.start)
        if self.parametric:
            raise FormulaError("a voltage or current cannot stand in a number", at, at + 1)
        if kind == "i":
            return Current(self.names.element(pieces[0]))
        plus = self.names.node(pieces[0])
        minus = self.names.node(pieces[1]) if len(pieces) == 2 else "0"
        return Number(0.0) if plus == minus else Voltage(plus, minus)

    def applied(self, token: str, at: int, end: int) -> Expression:
        low = token.lower()
        closing = _CLOSES[self.token]
        own = self.names.function(low)
        if own is None and low in REFUSED:
            raise FormulaError(
                f"{token}() is {REFUSED[low]}, which is not simulated here",
                at, end, "write it with parts (a capacitor integrates a current)", obstacle=True,
            )  # fmt: skip
        if own is not None:
            return self.own(token, own, at, end)
        self.step()
        trees: list[Expression] = []
        while self.token != closing:
            trees.append(self.choice())
            if not self.take(","):
                break
        self.expect(closing)
        if (low in SPREAD or (low == "limit" and len(trees) == 2)) and trees:
            self.sizes.spread = True
            return trees[0]
        bounds = arity(low)
        if bounds is None:
            raise FormulaError(
                f'unknown function "{token}"',
                at,
                end,
                self.names.similar(low, functions=True),
                obstacle=True,
            )
        if not bounds[0] <= len(trees) <= bounds[1] or (
            low in ("table", "tbl", "pwl") and len(trees) % 2 == 0
        ):
            need = f"{bounds[0]}" if bounds[0] == bounds[1] else f"at least {bounds[0]}"
            raise FormulaError(f"{token}() takes {need} arguments, got {len(trees)}", at, end)
        try:
            part = named(low, trees, dialect=self.dialect, parametric=self.parametric)
        except (ZeroDivisionError, OverflowError, ValueError):
            part = None
        if part is None:
            raise FormulaError("this has no value", at, end)
        return self.made(self.settled(part, at), *trees, *trees, at=at)

    def own(self, token: str, own: tuple[tuple[str, ...], str], at: int, end: int) -> Expression:
        """A function of the netlist: its body is read with the arguments in place."""
        formals, body = own
        texts = [text.strip() for text in self.raw_arguments()]
        if texts == [""]:
            texts = []
        if len(formals) != len(texts):
            raise FormulaError(
                f"{token}() takes {len(formals)} arguments, got {len(texts)}", at, end
            )
        trees: dict[str, Expression | FormulaError] = {}
        depth = self.sizes.depth
        for formal, text in zip(formals, texts, strict=True):
            self.deeper()
            try:
                trees[formal] = parse(
                    text, self.names, dialect=self.dialect, parametric=self.parametric,
                    across=self.across, sizes=self.sizes,
                )  # fmt: skip
            except FormulaError as error:
                trees[formal] = error  # perhaps a node name, for V() in the body
            self.sizes.depth = depth
        # A node name that is itself a formal of the function around it.
        if isinstance(self.names, Formals):
            around = self.names.texts
            texts = [around.get(text.lower(), text) for text in texts]
        # What has a value is no node: ngspice leaves the names inside V() and I() alone then.
        given = {
            formal: text
            for formal, text in zip(formals, texts, strict=True)
            if isinstance(trees[formal], FormulaError)
        }
        inner = Formals(self.outer(), trees, given)
        return self.inlined(body, inner, token, at, end)
