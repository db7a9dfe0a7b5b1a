"""Controlled and behavioural sources: E F G H B."""

from __future__ import annotations

import re
from collections.abc import Sequence
from itertools import combinations_with_replacement

from stress.netlist.assembly import Assembly
from stress.netlist.card import Field
from stress.netlist.expression import Binary, Call, Current, Expression, Number, Voltage
from stress.netlist.flat import Law
from stress.netlist.part import Part, Value

_KEY = re.compile(r"(?<![\w<>=!.])([a-z]\w*)\s*=(?!=)", re.IGNORECASE)
_TRANSFER = {
    "laplace": "a transfer function in s",
    "freq": "a frequency response table",
    "chebyshev": "a filter function",
    "delay": "a delay",
    "foster": "a transfer function in s",
    "pole": "a transfer function in s",
}
_KINDS = frozenset({"vcvs", "vccs", "cccs", "ccvs"})
_OTHER = {
    "opamp": "an ideal amplifier",
    "transformer": "an ideal transformer",
    "and": "a logic gate",
    "nand": "a logic gate",
    "or": "a logic gate",
    "nor": "a logic gate",
    "pwl": "a piecewise linear source of the hs kind",
    "npwl": "a piecewise linear source of the hs kind",
    "ppwl": "a piecewise linear source of the hs kind",
    "vcr": "a controlled resistance of the hs kind",
    "vccap": "a controlled capacitance of the hs kind",
}
_LAWS = {"v": "V", "i": "I", "r": "R", "c": "C", "l": "L"}
_FORMS = {
    "E": "E1 node node node node gain, or E1 node node VALUE={…}",
    "G": "G1 node node node node siemens, or G1 node node VALUE={…}",
    "F": "F1 node node Vsource gain",
    "H": "H1 node node Vsource ohm",
}


def controlled(part: Part, into: Assembly) -> None:
    """E, F, G, H in all their forms; what is not linear becomes a B."""
    part.need(2, _FORMS[part.letter])
    part.words = part.words[:2] + [w for w in part.words[2:] if w.text.lower() not in _KINDS]
    law = _law(part)
    if law is not None:
        _behave(part, into, law)
        return
    by_current = part.letter in "FH"
    controls = 1 if by_current else 2
    if len(part.words) < 3 + controls:
        _too_short(part)
    gain = part.quantity(part.words[2 + controls])
    times = _multiplier(part)
    if by_current:
        control: Expression = Current(part.scope.element(part.words[2].text))
    else:
        plus, minus = (part.node(word) for word in part.words[2:4])
        control = Voltage(plus, minus)
    lowest, highest = part.take("min"), part.take("max")
    if not isinstance(gain, Number) or lowest is not None or highest is not None:
        found: Expression = Binary("*", gain, control)
        if highest is not None:
            found = Call("min", (found, Number(highest)))
        if lowest is not None:
            found = Call("max", (found, Number(lowest)))
        _behave(part, into, found)
        return
    value = gain.value * (times if part.letter in "GF" else 1.0)
    if by_current:
        names = (part.scope.element(part.words[2].text),)
        into.add(part, part.letter, part.nodes(2), value, controls=names)
    else:
        into.add(part, part.letter, part.nodes(4), value)


def _times(a: Expression, b: Expression) -> Expression:
    zero = Number(0.0)
    return zero if zero in (a, b) else Binary("*", a, b)


def _multiplier(part: Part) -> float:
    own = part.take("m")
    return part.scope.multiplier * (1.0 if own is None else own)


def _too_short(part: Part) -> None:
    if part.letter == "F":
        raise part.obstacle(
            f"{part.full} is no current-controlled source: the form is {_FORMS['F']}",
            part.head,
            "if it is a fuse, write it as a resistor of its cold resistance",
        )
    part.need(4 if part.letter == "H" else 5, _FORMS[part.letter])


def _behave(part: Part, into: Assembly, found: Expression) -> None:
    quantity = "V" if part.letter in "EH" else "I"
    times = _multiplier(part)
    if quantity == "I" and times != 1:
        if isinstance(found, Number):
            found = Number(times * found.value)
        else:
            found = Binary("*", Number(times), found)
    into.add(part, "B", part.nodes(2), law=Law(quantity, found))


def _law(part: Part) -> Expression | None:
    """Return the law of the VALUE, TABLE and POLY forms, None for a linear source."""
    for key in ("value", "vol", "cur"):
        given = part.given.pop(key, None)
        if given is not None:
            return part.scope.tree(given.text, part.card, given.start)
    for key in (*_TRANSFER, *_OTHER):
        if key in part.given:
            _refuse(part, key, part.given[key].key)
    for number, word in enumerate(part.words[2:], 2):
        low = word.text.lower() if word.kind == "word" else ""
        if low == "value" and len(part.words) > number + 1:
            expression = part.words[number + 1]
            return part.quantity(expression)
        if low == "table" and len(part.words) > number + 1:
            return _table(part, part.words[number + 1], part.words[number + 2 :])
        if low == "poly" or low.startswith("poly("):
            return _polynomial(part, number)
        if number == 2 and (low in _TRANSFER or low in _OTHER):
            _refuse(part, low, word)
    table = part.given.pop("table", None)
    if table is not None:
        return _table_given(part, table)
    return None


def _refuse(part: Part, what: str, at: Field) -> None:
    told = _TRANSFER.get(what) or _OTHER[what]
    raise part.obstacle(
        f"{part.full} is {told} ({what.upper()}), which is not simulated here",
        at,
        "replace it by a plain gain, VALUE={…}, or by the parts it stands for",
    )


def _table(part: Part, expression: Field, points: Sequence[Field]) -> Expression:
    return table_of(part, part.quantity(expression), points)


def table_of(part: Part, x: Expression, points: Sequence[Field]) -> Expression:
    """Return a table of an expression; the points are x and y in turn."""
    numbers = [part.number(word) for word in points]
    if len(numbers) < 2 or len(numbers) % 2:
        raise part.error(
            "a TABLE needs pairs of numbers",
            points[-1] if points else part.head,
            "the form is TABLE {expression} = (x1,y1) (x2,y2) …",
        )
    pairs = sorted(zip(numbers[0::2], numbers[1::2], strict=True), key=lambda pair: pair[0])
    flat = [Number(number) for pair in pairs for number in pair]
    return Call("table", (x, *flat))


def _table_given(part: Part, table: Value) -> Expression:
    """`TABLE={expression} (x,y) …`, or control nodes and `table=(x,y,…)`."""
    inner = part.card.text[table.start : table.end]
    if inner.startswith("("):
        points = [
            field
            for field in part.card.fields
            if table.start < field.start < table.end and field.kind != "mark"
        ]
        plus, minus = (part.node(word) for word in part.words[2:4])
        return table_of(part, Voltage(plus, minus), points)
    x = part.scope.tree(table.text, part.card, table.start)
    return table_of(part, x, part.words[2:])


def _polynomial(part: Part, at: int) -> Expression:
    """`POLY(n)` with its controls and coefficients, in the order that SPICE 2 has given them."""
    words = part.words
    word = words[at]
    count_text = word.text[5:].rstrip(")") if "(" in word.text else ""
    following = at + 1
    if not count_text:
        if following >= len(words):
            raise part.error("POLY needs its number of controls", word, "POLY(1), POLY(2) …")
        count = part.number(words[following])
        following += 1
    else:
        count = float(count_text)
    dimensions = int(count)
    if dimensions != count or not 1 <= dimensions <= 20:
        raise part.error(f"POLY({count:g}) is not possible", word, "from 1 to 20 controls")
    controls: list[Expression] = []
    for _ in range(dimensions):
        if part.letter in "EG":
            pair = words[following : following + 2]
            if len(pair) < 2:
                raise part.error(f"POLY({dimensions}) needs {2 * dimensions} nodes", word)
            plus, minus = (part.node(entry) for entry in pair)
            controls.append(Number(0.0) if plus == minus else Voltage(plus, minus))
            following += 2
        else:
            if following >= len(words):
                raise part.error(f"POLY({dimensions}) needs {dimensions} sources", word)
            controls.append(Current(part.scope.element(words[following].text)))
            following += 1
    coefficients = [part.number(entry) for entry in words[following:]]
    if not coefficients:
        raise part.error("POLY needs at least one coefficient", word)
    return polynomial(controls, coefficients)


def polynomial(controls: Sequence[Expression], coefficients: Sequence[float]) -> Expression:
    """Return c0 + c1 x1 + … + cn xn + products of two, of three …; each product once."""
    if len(controls) == 1:
        found: Expression = Number(coefficients[-1])
        for coefficient in reversed(coefficients[:-1]):
            found = _times(controls[0], found)
            if coefficient:
                constant = Number(coefficient)
                found = constant if found == Number(0.0) else Binary("+", constant, found)
        return found
    terms: list[Expression] = []
    left = list(coefficients)
    degree = 0
    while left:
        for chosen in combinations_with_replacement(range(len(controls)), degree):
            if not left:
                break
            coefficient = left.pop(0)
            if coefficient:
                term: Expression = Number(coefficient)
                for which in chosen:
                    term = _times(term, controls[which])
                if term != Number(0.0):
                    terms.append(term)
        degree += 1
    return _sum(terms)


def _sum(terms: list[Expression]) -> Expression:
    """Add terms in halves, so that the tree stays shallow."""
    if not terms:
        return Number(0.0)
    if len(terms) == 1:
        return terms[0]
    half = len(terms) // 2
    return Binary("+", _sum(terms[:half]), _sum(terms[half:]))


def behavioural(part: Part, into: Assembly) -> None:
    """`B1 a b V=…` or `I=…`."""
    part.need(2, "B1 node node V={…} or I={…}")
    start = part.words[1].end
    pieces = assignments(part.card.text, start)
    law: Law | None = None
    for key, begin, end in pieces:
        low = key.lower()
        if low in _LAWS and law is None:
            text = part.card.text[begin:end]
            law = Law(_LAWS[low], part.scope.tree(text, part.card, begin))
        elif low == "laplace" or low == "delay":
            _refuse(part, low, Field("word", key, begin, end))
    if law is None:
        raise part.error(
            f"{part.name}: V= or I= is missing", part.head, "the form is B1 node node V={…}"
        )
    for key in ("rpar", "cpar"):
        value = part.take(key)
        if value:
            into.add(part, key[0].upper(), part.nodes(2), value, suffix=f"#{key}")
    times = part.scope.multiplier * (part.take("m") or 1.0)
    if law.quantity == "I" and times != 1:
        law = Law("I", Binary("*", Number(times), law.expression))
    if law.quantity in "RC":
        into.add(part, law.quantity, part.nodes(2), law=law)
    else:
        into.add(part, "B", part.nodes(2), law=law)


def assignments(text: str, start: int) -> list[tuple[str, int, int]]:
    """Return (key, begin, end) of each `key = expression` at the outermost level of a text.

    An expression without braces runs to the next key, whatever blanks it holds.
    """
    depth, at, found = 0, start, list[tuple[str, int, int]]()
    quoted = False
    while at < len(text):
        mark = text[at]
        if mark == "'":
            quoted = not quoted
        elif mark in "({":
            depth += 1
        elif mark in ")}":
            depth -= 1
        elif depth == 0 and not quoted and (mark.isalpha() or mark == "_"):
            key = _KEY.match(text, at)
            if key is not None:
                found.append((key[1], key.end(), len(text)))
                at = key.end()
                continue
            while at < len(text) and (text[at].isalnum() or text[at] in "_."):
                at += 1
            continue
        at += 1
    for number in range(len(found) - 1):
        key_text, begin, _ = found[number]
        following = found[number + 1]
        end = text.rfind(following[0], begin, following[1])
        found[number] = (key_text, begin, end)
    return [(key, begin, _trimmed(text, begin, end)) for key, begin, end in found]


def _trimmed(text: str, begin: int, end: int) -> int:
    while end > begin and text[end - 1] in " \t,":
        end -= 1
    return end
