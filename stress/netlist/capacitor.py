"""Capacitors, with what people write beside the value."""

from __future__ import annotations

from stress.netlist.assembly import Assembly
from stress.netlist.card import Field
from stress.netlist.charge import slope
from stress.netlist.controlled import polynomial
from stress.netlist.expression import Binary, Expression, Name, Number, Voltage
from stress.netlist.flat import Tags
from stress.netlist.marking import is_placeholder, read_marking, style_of
from stress.netlist.part import Part
from stress.netlist.passive import (
    kept,
    law_of,
    multiplier,
    names_model,
    refuse_rest,
    settled,
    value_word_of,
)
from stress.text.number import NumberError, read_number


def capacitor(part: Part, into: Assembly) -> None:
    """`C1 a b 10u`, with what people write beside the value."""
    part.need(2, "C1 node node value")
    nodes = part.nodes(2)
    across = Voltage(*nodes)
    value_word = value_word_of(part, "C")
    parameters, times = kept(part), multiplier(part)
    tags, series = _tags(part)
    initial = part.take("ic")
    if initial is not None:
        parameters["ic"] = initial
    times *= part.take("x") or 1.0
    model, found = "", None
    given = part.given.pop("c", None) or part.given.pop("capacitance", None)
    charge = part.given.pop("q", None)
    if charge is not None:
        found = slope(part.quantity(charge, across=Name("x")), Name("x"), across)
        if found is None:
            raise part.obstacle(
                f"{part.full}: its charge cannot be differentiated", charge, "give C= instead"
            )
    elif given is not None:
        found = part.quantity(given, "C")
    elif value_word is not None and value_word.text.lower() == "poly":
        found = _polynomial(part, across)
    else:
        for number, word in enumerate(part.words[2:], 2):
            if found is None and not names_model(part, into, word):
                found, tags = _capacitance(part, word, tags)
                if found is None:
                    break
            elif not model and names_model(part, into, word):
                model = into.model(part, word, ("c",))
            else:
                tags = _more(part, part.words[number:], tags)
                break
    if value_word is None and found is None and not model:
        _placeholder(part, None)
    refuse_rest(part)
    if isinstance(found, Number) and times != 1 and not model:
        found = Number(found.value * times)
    elif found is not None and not isinstance(found, Number) and times != 1:
        found = Binary("*", Number(times), found)
    elif times != 1 and model:
        parameters["m"] = times
    inner = _around(part, into, nodes, series)
    into.add(
        part,
        "C",
        inner,
        found.value if isinstance(found, Number) else None,
        model=model,
        parameters=parameters,
        law=law_of(found, "C") if found is not None else None,
        tags=tags,
    )


def _tags(part: Part) -> tuple[Tags, dict[str, float]]:
    """Take rating, ripple and style from the instance tags, and the parasitics to expand."""
    rated, ripple = part.take("v"), part.take("irms")
    kind = part.given.pop("type", None)
    esr = part.take("rser")
    for tag in ("mfg", "mfr", "pn", "tol", "desc"):
        part.given.pop(tag, None)
    part.words = [word for word in part.words if word.text.lower() != "noiseless"]
    parasitics = {}
    for key in ("lser", "rpar", "cpar", "rlshunt"):
        value = part.take(key)
        if value:
            parasitics[key] = value
    style = style_of(kind.text) if kind is not None else None
    return Tags(rated or None, ripple or None, style, esr or None), parasitics


def _around(
    part: Part, into: Assembly, nodes: tuple[str, ...], parasitics: dict[str, float]
) -> tuple[str, ...]:
    """Put what lies in series with and across a capacitor; returns its own nodes."""
    a, b = nodes
    if "rpar" in parasitics:
        into.add(part, "R", (a, b), parasitics["rpar"], suffix="#rpar")
    if "cpar" in parasitics:
        into.add(part, "C", (a, b), parasitics["cpar"], suffix="#cpar")
    if "lser" not in parasitics:
        return nodes
    inner = f"{part.full.lower()}#lser"
    into.add(part, "L", (a, inner), parasitics["lser"], suffix="#lser")
    if "rlshunt" in parasitics:
        into.add(part, "R", (a, inner), parasitics["rlshunt"], suffix="#rlshunt")
    return (inner, b)


def _capacitance(part: Part, word: Field, tags: Tags) -> tuple[Expression | None, Tags]:
    """Read the value field; None where it is a placeholder."""
    if word.kind == "expression":
        return settled(part, part.quantity(word, "C")), tags
    text = word.text
    try:
        read = read_number(text, quantity="C")
    except NumberError:
        if isinstance(part.scope.value(text.lower()), float | str):
            return part.quantity(word), tags
        marking = None if is_placeholder(text) else read_marking(text)
        if marking is not None:
            return Number(marking.value_F or 0.0), _marked(part, word, marking.notice, tags, text)
        formula = any(mark in text for mark in "*/()")
        if not formula and (is_placeholder(text) or not text[:1].isdigit()):
            _placeholder(part, word)
            return None, tags
        return settled(part, part.quantity(word, "C")), tags
    if read.trap:
        part.notice("trap", f"{part.full}: {read.trap}", word)
    elif text.lstrip("0").startswith(".") and read.value >= 1e-4 and not read.scale:
        part.notice(
            "trap",
            f'{part.full}: "{text}" is {read.value:g} farad in SPICE; {text}u was probably meant',
            word,
            "write the value with its suffix, or give it in the part sheet",
        )
    return Number(read.value), tags


def _marked(part: Part, word: Field, notice: str, tags: Tags, text: str) -> Tags:
    marking = read_marking(text)
    part.notice("value-field", f"{part.full}: {notice}", word)
    if marking is None:
        return tags
    return Tags(
        tags.rated_V or marking.rated_V, tags.ripple_A, tags.style or marking.style, tags.esr_ohm
    )


def _more(part: Part, words: list[Field], tags: Tags) -> Tags:
    """Read what follows the value in the same field: `100n / 400V`."""
    start, end = words[0].start, words[-1].end
    text = part.card.text[start:end]
    marking = read_marking(f"1u/{text.lstrip('/ ')}")
    if marking is None or (marking.rated_V is None and marking.style is None):
        raise part.error(
            f'"{text}" behind the value is not understood',
            (start, end),
            "a rating such as 400V or a style such as film may stand there",
        )
    told = ", ".join(
        str(entry)
        for entry in (marking.rated_V and f"{marking.rated_V:g} V", marking.style)
        if entry
    )
    return _marked(
        part, words[0], f'"{text.strip()}" is read as {told}', tags, f"1u/{text.lstrip('/ ')}"
    )


def _placeholder(part: Part, word: Field | None) -> None:
    what = f'"{word.text}" is no value' if word is not None else "the card has no value"
    part.notice(
        "placeholder-value",
        f"{part.full}: {what}; the rest is read without it",
        word,
        f'give it in the part sheet: [capacitors.{part.full}] value = "0.1 uF"',
    )


def _polynomial(part: Part, across: Expression) -> Expression:
    """`C1 a b POLY c0 c1 …`: c0 + c1 v + c2 v²."""
    coefficients = [part.number(word) for word in part.words[3:]]
    if not coefficients:
        raise part.error("POLY needs at least one coefficient", part.words[2])
    return polynomial([across], coefficients)
