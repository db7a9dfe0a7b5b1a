"""The twin with what a condition adds to it: shorts, and silicon in place of rectifier tubes."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import replace

from stress.circuit.circuit import Circuit, Part
from stress.circuit.graph import Pin, cathode_of
from stress.engine.case import Twin
from stress.engine.twin import metered_pins
from stress.netlist.flat import Element, Model
from stress.study.result import Condition

SHORT_OHM = 0.01
SILICON = "#silicon"  # ends the name of such a diode, and is the name of its model
# A 1 A silicon rectifier: some 0.8 V at 0.1 A and 1.2 V at 1 A [memory M]. Sharper ones make
# ngspice lose its step on a stiff line, or where two share an input choke.
DIODE = {"is": 2e-8, "n": 1.9, "rs": 0.3}
SERIES = "#series"  # ends the name of the resistor behind the diodes of a tube, and its node
WIRE_OHM = 0.05


def rewired(circuit: Circuit, condition: Condition, *, twin: Twin) -> Twin:
    """Return the twin with a small resistor across what a condition shorts, and with diodes in
    place of the rectifier tubes that it replaces."""
    added = (*_shorts(circuit, condition), *_silicon(circuit, condition))
    if not added:
        return twin
    models = dict(twin.models)
    if condition.silicon:
        models[SILICON] = Model(
            name=SILICON, kind="d", parameters=DIODE, span=circuit.netlist.elements[0].span
        )
    return replace(twin, elements=twin.elements + added, models=models)


def _shorts(circuit: Circuit, condition: Condition) -> Iterator[Element]:
    named = {element.name.lower(): element for element in circuit.netlist.elements}
    for name in condition.short:
        if name.lower() in named:
            yield Element(
                name=f"{name}#short",
                letter="R",
                nodes=named[name.lower()].nodes[:2],
                value=SHORT_OHM,
                span=named[name.lower()].span,
            )


def joints(part: Part) -> Mapping[str, str]:
    """Return, by the node of each cathode of a rectifier tube, the name of the resistor behind
    the diodes that replace it there; in lower case it is their common node."""
    found: dict[str, str] = {}
    for pin in part.pins:
        cathode = cathode_of(part, pin)
        if Pin(part.name, pin).kind == "output" and cathode is not None:
            found.setdefault(cathode, f"{part.name}{SERIES}{len(found) or ''}")
    return found


def _silicon(circuit: Circuit, condition: Condition) -> Iterator[Element]:
    for name in condition.silicon:
        part = circuit.part(name)
        metered, behind = metered_pins(part), joints(part)
        for pin, node in part.pins.items():
            cathode = cathode_of(part, pin)
            if Pin(part.name, pin).kind == "output" and cathode is not None:
                yield Element(
                    name=f"{part.name}#{pin}{SILICON}",
                    letter="D",
                    nodes=(
                        f"{part.name}#{pin}".lower() if pin in metered else node,
                        behind[cathode].lower(),
                    ),
                    model=SILICON,
                    span=part.span,
                )
        for cathode, joint in behind.items():
            yield Element(
                name=joint,
                letter="R",
                nodes=(joint.lower(), cathode),
                value=WIRE_OHM,
                span=part.span,
            )
