"""Inductors and their couplings."""

from __future__ import annotations

from stress.netlist.assembly import Assembly
from stress.netlist.card import Field
from stress.netlist.expression import Expression, Number
from stress.netlist.marking import is_placeholder
from stress.netlist.part import Part
from stress.netlist.passive import (
    kept,
    law_of,
    leftover,
    multiplier,
    names_model,
    refuse_rest,
    settled,
    value_word_of,
)

UNITY = 0.99999  # instead of a coupling of 1: leaks 1e-5 of the inductance


def inductor(part: Part, into: Assembly) -> None:
    """`L1 a b 10m`, with its series and parallel parts."""
    part.need(2, "L1 node node value")
    nodes = part.nodes(2)
    core = next((key for key in ("flux", "hc", "bs", "br") if key in part.given), None)
    if core is not None:
        raise part.obstacle(
            f"{part.full} is a core with saturation or hysteresis, which is not simulated here",
            part.given[core].key,
            "give it as a plain inductance in henry at its working current",
        )
    value_word = value_word_of(part, "L")
    given = part.given.pop("l", None) or part.given.pop("ind", None)
    parameters, times = kept(part), multiplier(part)
    initial = part.take("ic")
    if initial is not None:
        parameters["ic"] = initial
    parasitics = {key: part.take(key) for key in ("rser", "rpar", "cpar")}
    for tag in ("ipk", "irms", "mfg", "mfr", "pn", "type", "tol", "desc"):
        part.given.pop(tag, None)
    found: Expression | None = part.quantity(given, "L") if given is not None else None
    model = ""
    for word in part.words[2:]:
        if not model and names_model(part, into, word):
            model = into.model(part, word, ("l", "core"))
        elif found is None:
            found = _inductance(part, word)
        else:
            leftover(part, word)
    if found is None and not model:
        raise part.obstacle(
            f"{part.full} has no value", value_word or part.head, "add its inductance in henry"
        )
    refuse_rest(part)
    a, b = nodes
    if parasitics["rpar"]:
        into.add(part, "R", (a, b), parasitics["rpar"], suffix="#rpar")
    if parasitics["cpar"]:
        into.add(part, "C", (a, b), parasitics["cpar"], suffix="#cpar")
    if parasitics["rser"]:
        inner = f"{part.full.lower()}#rser"
        into.add(part, "R", (inner, b), parasitics["rser"], suffix="#rser")
        nodes = (a, inner)
    law = law_of(found, "L") if found is not None else None
    value = found.value / times if isinstance(found, Number) else None
    into.add(part, "L", nodes, value, model=model, parameters=parameters, law=law)


def _inductance(part: Part, word: Field) -> Expression:
    low = word.text.lower()
    empty = is_placeholder(low) or low in ("l", "l_small", "l_core", "inductor")
    if empty and part.scope.value(low) is None:
        raise part.obstacle(
            f'{part.full} has no value ("{word.text}" is a placeholder)',
            word,
            "put its inductance in henry into the netlist",
        )
    return settled(part, part.quantity(word, "L"))


def coupling(part: Part, into: Assembly) -> None:
    """`K1 L1 L2 0.99`, over more windings too: one coupling for each pair."""
    part.need(3, "K1 L1 L2 coupling")
    given = part.given.pop("k", None) or part.given.pop("coupling", None)
    words = part.words
    if any(word.text[:1].isalpha() and word.text[:1] not in "lL" for word in words[:2]):
        raise part.obstacle(
            f"{part.full} couples no inductors: the form is K1 L1 L2 coupling",
            part.head,
            "if it is a relay, write its coil as R and L and its contacts as R",
        )
    if given is None and words[-1].text[:1].isalpha() and words[-1].kind == "word":
        before = words[-2].text[:1]
        if before.isdigit() or before == ".":
            raise part.obstacle(
                f"{part.full} is a magnetic core with a model, which is not simulated here",
                words[-1],
                "give the windings as inductances in henry and couple them without the core model",
            )
        if (
            words[-1].text[:1].upper() == "L"
            and words[-1].kind == "word"
            and part.scope.value(words[-1].text.lower()) is None
        ):
            raise part.error(
                f"{part.name}: the coupling is missing", words[-1], "the form is K1 L1 L2 0.99"
            )
    value = part.number(given) if given is not None else part.number(words[-1])
    windings = words if given is not None else words[:-1]
    if len(windings) < 2:
        raise part.error(f"{part.name} couples one winding only", part.head)
    if not -1 <= value <= 1:
        raise part.error(
            f"a coupling of {value:g} is not possible", words[-1], "a coupling lies from 0 to 1"
        )
    if abs(value) == 1:
        part.notice(
            "unity-coupling",
            f"{part.full}: a coupling of 1 has no leakage; {UNITY} is used",
            words[-1],
        )
        value *= UNITY
    names = [part.scope.element(word.text) for word in windings]
    number = 0
    for first in range(len(names)):
        for second in range(first + 1, len(names)):
            number += 1
            suffix = "" if number == 1 else f"#{number}"
            into.add(part, "K", (), value, suffix=suffix, controls=(names[first], names[second]))
