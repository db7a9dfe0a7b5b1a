"""How the new part goes in: outer foil, metal case, sections of a can."""

from __future__ import annotations

from math import pi

from stress.circuit.circuit import Circuit, Kind, Position
from stress.text.figure import figure

# Styles wound from foils, whose outer one is marked or can be found.
WOUND = frozenset(
    {"paper", "paper-oil", "film", "film-pp", "film-ac", "snubber", "polystyrene", "line-X"}
)
FOIL_RULE = "outer foil to the end of lower impedance, where it shields (common practice)"
CASE_RULE = "the case of an aluminium electrolytic is joined to its minus side (common practice)"
_AT_HZ = 1000.0  # where hum and pick-up are heard
_CLEAR = 3.0  # times: less of a difference and either way round will do
# What a pin adds to the conductance of its node, in siemens; sizes only (common practice).
_PIN_SIEMENS = {"plate": 1 / 50e3, "cathode": 1 / 500.0, "collector": 1 / 50e3, "emitter": 1 / 25.0}


def outer_foil(position: Position, *, circuit: Circuit, style: str) -> str:
    """Return which end the outer foil goes to, in words; "" for styles that have none."""
    if style not in WOUND or not position.value_F:
        return ""
    siemens = [_siemens(node, position=position, circuit=circuit) for node in position.nodes]
    low = 0 if siemens[0] >= siemens[1] else 1
    if siemens[low] < _CLEAR * siemens[1 - low]:
        return "outer foil: either way round, both ends are of like impedance"
    end, other = position.nodes[low], position.nodes[1 - low]
    return f"outer foil (banded end) to node {end}, which is of lower impedance than {other}"


def _siemens(node: str, *, position: Position, circuit: Circuit) -> float:
    """Return the size of the conductance of a node at 1 kHz, without the position itself."""
    if node == "0" or node in circuit.touchable:
        return 1e9
    total = 0.0
    own = {position.name.lower(), *model_elements(circuit)}
    for element in circuit.netlist.elements:
        if node not in element.nodes[:2] or element.name.lower() in own:
            continue
        value = element.value
        if element.letter == "V":
            total += 1e6
        elif not value:
            continue
        elif element.letter == "R":
            total += 1.0 / abs(value)
        elif element.letter == "C":
            total += 2.0 * pi * _AT_HZ * value
        elif element.letter == "L":
            total += 1.0 / (2.0 * pi * _AT_HZ * value)
    for part in circuit.parts:
        if part.kind in (Kind.TUBE, Kind.TRANSISTOR):
            for pin, at in part.pins.items():
                if at == node:
                    total += _PIN_SIEMENS.get(pin.rstrip("23"), 0.0)
    return total


def model_elements(circuit: Circuit) -> frozenset[str]:
    """Return the elements that are the model of an active part, lower case."""
    return frozenset(
        name.lower()
        for part in circuit.parts
        if part.kind in (Kind.TUBE, Kind.RECTIFIER, Kind.TRANSISTOR)
        for name in part.elements
    )


def metal_case(position: Position, *, circuit: Circuit, minus: str, volts: float | None) -> str:
    """Return whether the metal case of an electrolytic may touch the chassis, in words.

    Args:
        position: An electrolytic.
        circuit: What is chassis, and what hangs on the line.
        minus: The node of its minus side.
        volts: Mean voltage of that node against ground, where it is known.
    """
    chassis_live = "0" in circuit.line_connected
    if minus == "0" and not chassis_live:
        return "its metal case is at chassis: it may touch it"
    if minus == "0":
        return (
            "its case is at B-, which hangs on the line: insulate it from metal that can be touched"
        )
    at = f" ({figure(volts, 'V')} from ground)" if volts is not None else ""
    return f"its case is at node {minus}{at}: insulate it from the chassis"


def can_of(position: Position, *, circuit: Circuit) -> tuple[Position, ...]:
    """Return all sections of the can that a position is part of, itself among them."""
    if not position.can:
        return ()
    return tuple(other for other in circuit.positions if other.can == position.can)
