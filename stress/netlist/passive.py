"""What passive cards have in common, and the resistor."""

from __future__ import annotations

from stress.netlist.assembly import Assembly
from stress.netlist.card import Field
from stress.netlist.expression import Expression, Name, Number
from stress.netlist.flat import Law
from stress.netlist.marking import is_placeholder
from stress.netlist.part import Part
from stress.text.number import NumberError, read_number
from stress.text.span import SourceError

KEPT = ("tc1", "tc2", "temp", "dtemp", "l", "w", "ac", "scale", "bv_max", "nt")
_UNITS = {
    "R": ("ohm", "ohms", "kohm", "mohm", "k", "meg", "r"),
    "C": ("f", "uf", "nf", "pf", "mf", "u", "n", "p", "µ", "µf", "μ", "μf"),
    "L": ("h", "mh", "uh", "nh", "m", "u", "µ", "µh", "μ", "μh"),
}


def kept(part: Part) -> dict[str, float]:
    """Take the parameters that go with the element as they are."""
    found: dict[str, float] = {}
    if not part.given:
        return found
    tc = part.given.pop("tc", None)
    if tc is not None:
        at = part.card.text.find(",", tc.end - 1)
        first, _, second = tc.text.partition(",")
        found["tc1"] = part.number(type(tc)(first, tc.start, tc.start + len(first), tc.key))
        if second:
            begin = tc.start + len(first) + 1
            found["tc2"] = part.number(type(tc)(second, begin, tc.end, tc.key))
        elif at >= 0:
            for word in part.words:
                if word.start > at:
                    found["tc2"] = part.number(word)
                    part.words.remove(word)
                    break
    for key in KEPT:
        value = part.take(key)
        if value is not None:
            found[key] = value
    return found


def multiplier(part: Part) -> float:
    """Take `m=` of the card times that of the instances around it."""
    own = part.take("m")
    return part.scope.multiplier * (1.0 if own is None else own)


def _unit_apart(part: Part, letter: str, at: int) -> Field | None:
    """Join a value and a unit written behind it with a blank: `10 µF`."""
    if len(part.words) <= at + 1:
        return None
    value, unit = part.words[at], part.words[at + 1]
    if unit.text.lower() not in _UNITS[letter] or value.kind != "word":
        return None
    try:
        read_number(value.text)
        read_number(value.text + unit.text)
    except NumberError:
        return None
    joined = Field("word", value.text + unit.text, value.start, unit.end)
    part.notice("trap", f'{part.full}: "{value.text} {unit.text}" is read as {joined.text}', value)
    return joined


def _comma(part: Part, at: int) -> Field | None:
    """Join what a decimal comma has cut in two: `1,5k`."""
    if len(part.words) <= at + 1:
        return None
    whole, rest = part.words[at], part.words[at + 1]
    text = part.card.text[whole.start : rest.end]
    if not (whole.text.lstrip("+-").isdigit() and rest.text[:1].isdigit()) or text != (
        f"{whole.text},{rest.text}"
    ):
        return None
    return Field("word", text, whole.start, rest.end)


def value_word_of(part: Part, letter: str) -> Field | None:
    """Return the word that should be the value, two of them joined where they belong together."""
    if len(part.words) < 3:
        return None
    if len(part.words) == 3:
        return part.words[2]
    for joined in (_comma(part, 2), _unit_apart(part, letter, 2)):
        if joined is not None:
            del part.words[3]
            part.words[2] = joined
            break
    return part.words[2]


def law_of(expression: Expression, quantity: str) -> Law | None:
    """Return the law where a value is no plain number."""
    return None if isinstance(expression, Number) else Law(quantity, expression)


def settled(part: Part, found: Expression) -> Expression:
    """A value that hangs on the temperature alone is a number."""
    if isinstance(found, Name) and found.name == "temper":
        return Number(part.scope.world.temperature_degC)
    return found


def resistor(part: Part, into: Assembly) -> None:
    """`R1 a b 1k`, with a model, a law, or three nodes (a potentiometer)."""
    part.need(2, "R1 node node value")
    if _potentiometer(part, into):
        return
    part.words = [word for word in part.words if word.text.lower() != "noiseless"]
    value_word = value_word_of(part, "R")
    parameters, times = kept(part), multiplier(part)
    for tag in ("tol", "pwr", "power", "noisy", "noise", "tolerance"):
        part.given.pop(tag, None)
    given = part.given.pop("r", None) or part.given.pop("resistance", None)
    model = ""
    found: Expression | None = None
    nodes = part.nodes(2)
    if given is not None:
        found = part.quantity(given, "R")
    for word in part.words[2:]:
        if found is None and (word.kind == "expression" or not names_model(part, into, word)):
            found = _resistance(part, word)
        elif not model and names_model(part, into, word):
            model = into.model(part, word, ("r",))
        elif word is not value_word and part.letter == "R":
            leftover(part, word)
    if found is None and not model:
        raise part.obstacle(
            f"{part.full} has no value", value_word or part.head, "add its resistance in ohm"
        )
    refuse_rest(part)
    law = law_of(found, "R") if found is not None else None
    value = found.value if isinstance(found, Number) else None
    if value is not None and times != 1 and not model:
        value /= times
    elif times != 1:
        parameters["m"] = times
    into.add(part, "R", nodes, value, model=model, parameters=parameters, law=law)


def names_model(part: Part, into: Assembly, word: Field) -> bool:
    """Whether a word is the name of a model that can be used here."""
    return word.kind == "word" and into.knows_model(part.scope, word.text)


def _resistance(part: Part, word: Field) -> Expression:
    """Read a value; `27k/1W` says the wattage too, a symbol's name is no value."""
    head, slash, _ = word.text.partition("/")
    if slash and word.kind == "word":
        try:
            found = Number(read_number(head, quantity="R").value)
        except NumberError:
            pass
        else:
            part.notice("trap", f'{part.full}: "{word.text}" is read as {head} ohm', word)
            return found
    low = word.text.lower()
    empty = is_placeholder(low) or low in ("r", "r_small", "r_us", "r_pot")
    if empty and part.scope.value(low) is None:
        raise part.obstacle(
            f'{part.full} has no value ("{word.text}" is a placeholder)',
            word,
            "put its resistance in ohm into the netlist",
        )
    return settled(part, part.quantity(word, "R"))


def leftover(part: Part, word: Field) -> None:
    """Let a further number pass, and refuse anything else behind the value."""
    try:
        part.number(word)  # `R1 a b 1k 2.0`: an old value for ac
    except SourceError:
        raise part.error(f'"{word.text}" is not expected here', word) from None


def refuse_rest(part: Part) -> None:
    """Refuse a parameter that the card does not have."""
    for key, value in part.given.items():
        if key in ("noisy", "noise", "temp", "mfg", "mfr", "pn", "type", "tol", "pwr", "desc"):
            continue
        part.notice("unknown-parameter", f'{part.full}: "{value.key.text}=" is not used', value.key)


def _potentiometer(part: Part, into: Assembly) -> bool:
    """`RV1 a wiper b 20k`: two halves, the wiper in the middle."""
    if len(part.words) != 4 or part.given:
        return False
    third, last = part.words[2], part.words[3]
    if last.kind != "expression":
        try:
            read_number(last.text, quantity="R")
        except NumberError:
            return False
    if names_model(part, into, third) or third.kind == "expression":
        return False
    low = part.name.lower()
    if not low.startswith(("rv", "rp", "pot", "vr")):
        try:
            read_number(third.text)
        except NumberError:
            if isinstance(part.scope.value(third.text.lower()), float):
                return False
        else:
            return False
    half = part.number(last, "R") / 2 / multiplier(part)
    a, wiper, b = part.nodes(3)
    part.notice(
        "potentiometer",
        f"{part.full} has three nodes: it is read as a potentiometer with its wiper in the middle",
        last,
        "write two resistors for another setting",
    )
    into.add(part, "R", (a, wiper), half, suffix="#1")
    into.add(part, "R", (wiper, b), half, suffix="#2")
    return True
