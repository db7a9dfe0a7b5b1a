"""Diodes, transistors, switches, lines: whatever takes a model."""

from __future__ import annotations

from stress.netlist.assembly import Assembly
from stress.netlist.card import Field
from stress.netlist.expression import Voltage
from stress.netlist.flat import Law
from stress.netlist.ideal import ideal_diode, is_ideal, switch_model
from stress.netlist.part import Part
from stress.text.number import NumberError, read_number

KINDS: dict[str, tuple[str, ...]] = {
    "D": ("d", "numd"),
    "Q": ("npn", "pnp", "nbjt", "nbjt2"),
    "J": ("njf", "pjf"),
    "Z": ("nmf", "pmf", "nhfet", "phfet"),
    "M": ("nmos", "pmos", "vdmos", "nsoi", "psoi", "numos"),
    "S": ("sw", "vswitch"),
    "W": ("csw", "iswitch"),
    "O": ("ltra",),
    "U": ("urc",),
    "Y": ("txl",),
}
# Nodes at least and at most, and the form of the card.
NODES: dict[str, tuple[int, int, str]] = {
    "D": (2, 3, "D1 anode cathode model"),
    "Q": (3, 5, "Q1 collector base emitter model"),
    "J": (3, 3, "J1 drain gate source model"),
    "Z": (3, 3, "Z1 drain gate source model"),
    "M": (3, 7, "M1 drain gate source bulk model"),
    "O": (4, 4, "O1 node node node node model"),
    "U": (3, 3, "U1 node node node model"),
    "Y": (4, 4, "Y1 node node node node model"),
}
_FLAGS = frozenset({"off", "on"})


def semiconductor(part: Part, into: Assembly) -> None:
    """D, Q, J, Z, M, O, U, Y: nodes, a model, an area, `name=value` pairs."""
    fewest, most, form = NODES[part.letter]
    part.need(fewest + 1, form)
    at = _model_at(part, into, fewest, most)
    word = part.words[at]
    key = into.model(part, word, KINDS[part.letter])
    if not key:
        return
    parameters: dict[str, float] = {}
    for extra in part.words[at + 1 :]:
        low = extra.text.lower()
        if low in _FLAGS:
            parameters["off"] = 1.0
        elif low == "thermal":
            parameters["thermal"] = 1.0
        elif low in ("ic", "tnodeout"):
            continue
        elif "area" not in parameters and part.letter in "DQJZM":
            parameters["area"] = part.number(extra)
    for name in list(part.given):
        if name == "ic" or name.endswith("file"):
            part.given.pop(name)
            continue
        value = part.take(name)
        if value is not None and name not in ("tol",):
            parameters[name] = value
    times = part.scope.multiplier * parameters.get("m", 1.0)
    if times != 1:
        parameters["m"] = times
    model = into.models[key]
    # The lt dialect puts the substrate into brackets.
    nodes = tuple(node.strip("[]") or node for node in part.nodes(at))
    if part.letter == "D" and is_ideal(model):
        law = ideal_diode(model, Voltage(*nodes[:2]), parameters)
        into.add(part, "B", nodes[:2], law=Law("I", law))
        part.notice(
            "ideal-diode",
            f"{part.full}: the piecewise linear diode {word.text} is read as a current by its law",
        )
        return
    if part.letter == "J" and model.kind in ("njf", "pjf") and at != 3:
        raise part.error(f"{part.name} has three nodes", part.words[2])
    into.add(part, part.letter, nodes, model=key, parameters=parameters)


def _model_at(part: Part, into: Assembly, fewest: int, most: int) -> int:
    """Return which word names the model: the first one behind the nodes that is a model."""
    last = min(most, len(part.words) - 1)
    for at in range(fewest, last + 1):
        word = part.words[at]
        if word.kind == "word" and into.knows_model(part.scope, word.text):
            return at
    fourth = part.words[4] if len(part.words) > 4 and part.letter in "MQ" else None
    if fourth is not None and not _is_number(fourth) and fourth.text.lower() not in _FLAGS:
        return 4
    return len(part.words) - 1 if part.letter == "U" else fewest


def _is_number(word: Field) -> bool:
    try:
        read_number(word.text)
    except NumberError:
        return word.kind == "expression"
    return True


def switch(part: Part, into: Assembly) -> None:
    """S by a voltage, W by a current."""
    by_current = part.letter == "W"
    form = "W1 node node Vsource model" if by_current else "S1 node node control control model"
    controls = 1 if by_current else 2
    part.need(3 + controls, form)
    key = into.model(part, part.words[2 + controls], KINDS[part.letter])
    if not key:
        return
    if into.models[key].kind in ("vswitch", "iswitch"):
        part.notice(
            "gradual-switch",
            f"{part.full} closes gradually in the ps dialect; here it closes and opens at the "
            "same two levels",
        )
    key = switch_model(into.models, key)
    parameters = {}
    for extra in part.words[3 + controls :]:
        if extra.text.lower() == "on":
            parameters["on"] = 1.0
        elif extra.text.lower() != "off":
            raise part.error(f'"{extra.text}" is not expected here', extra, "ON or OFF may follow")
    if by_current:
        names = (part.scope.element(part.words[2].text),)
        into.add(part, "W", part.nodes(2), model=key, parameters=parameters, controls=names)
    else:
        into.add(part, "S", part.nodes(4), model=key, parameters=parameters)


def line(part: Part, into: Assembly) -> None:
    """`T1 a b c d Z0=50 TD=10n`, or F= and NL= instead of TD=."""
    editor = "if it is a transformer, write its windings as L cards coupled by a K card"
    form = "T1 node node node node Z0=50 TD=10n"
    if len(part.words) < 4 or ("z0" not in part.given and "zo" not in part.given):
        raise part.obstacle(
            f"{part.full} is no transmission line: the form is {form}", part.head, editor
        )
    parameters: dict[str, float] = {}
    for name, as_name in (("z0", "z0"), ("zo", "z0"), ("td", "td"), ("f", "f"), ("nl", "nl")):
        value = part.take(name)
        if value is not None:
            parameters[as_name] = value
    if "td" not in parameters and "f" not in parameters:
        raise part.error(f"{part.name}: TD= or F= is missing", part.head, f"the form is {form}")
    into.add(part, "T", part.nodes(4), parameters=parameters)


def coupled_lines(part: Part, into: Assembly) -> None:
    """`P1 a b 0 c d 0 model`: as many nodes as the model has lines, twice, each with its ground."""
    model = part.words[-1] if part.words else part.head
    if len(part.words) < 5 or not into.knows_model(part.scope, model.text):
        raise part.obstacle(
            f"{part.full} is no coupled line: its last word is no model",
            part.head,
            "if it is a plug or connector, take it out or join its nodes",
        )
    key = into.model(part, model, ("cpl",))
    if key:
        into.add(part, "P", part.nodes(len(part.words) - 1), model=key)
