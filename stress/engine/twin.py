"""The circuit as simulated: every position as C with its ESR and leakage, every pin metered."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from stress.circuit.circuit import Circuit, Kind, Part, Position
from stress.engine.case import Twin
from stress.netlist.expression import (
    Binary,
    Call,
    Conditional,
    Expression,
    Unary,
    Voltage,
)
from stress.netlist.flat import NOTHING, Element, Law

LEAST_ESR_OHM = 1e-3  # less makes the current of the twin's C ill-conditioned
MOST_LEAKAGE_OHM = 1e11  # more makes ngspice fail at the first step
METERED = frozenset({Kind.TUBE, Kind.RECTIFIER, Kind.TRANSISTOR})
UNMETERED_PINS = ("cathode", "heater", "emitter", "source")


def esr_of(position: Position, *, frequency_Hz: float) -> float:
    """Return the ESR a position is simulated with, in ohm, at a ripple frequency."""
    if position.esr_ohm is not None:
        return max(position.esr_ohm, LEAST_ESR_OHM)
    if not position.value_F:
        return LEAST_ESR_OHM
    esr = position.style.esr_ohm(
        position.value_F, rated_V=position.rated_V, frequency_Hz=frequency_Hz
    )
    return max(esr, LEAST_ESR_OHM)


def insulation_of(position: Position) -> float:
    """Return the leakage resistance of a healthy part in this position, in ohm."""
    if position.insulation_ohm is not None:
        return min(position.insulation_ohm, MOST_LEAKAGE_OHM)
    if not position.value_F:
        return MOST_LEAKAGE_OHM
    new = position.style.insulation_ohm(position.value_F, rated_V=position.rated_V)
    return min(new, MOST_LEAKAGE_OHM)


def metered_pins(part: Part) -> tuple[str, ...]:
    """Return the pins of a part that carry a 0 V source, one for each node.

    The cathode (emitter) carries what the others carry, and so does a pin tied to it. Of other
    pins joined at one node the first stands for all: their currents cannot be told apart in a
    flat circuit.
    """
    if part.kind is Kind.DIODE and not {part.name}.issuperset(part.elements):
        return tuple(part.pins)[:1]  # a model with elements of its own
    if part.kind not in METERED:
        return ()
    seen = {node for pin, node in part.pins.items() if pin.startswith(UNMETERED_PINS)}
    pins = []
    for pin, node in part.pins.items():
        if not pin.startswith(UNMETERED_PINS) and node not in seen:
            seen.add(node)
            pins.append(pin)
    return tuple(pins)


def build(circuit: Circuit, *, frequency_Hz: Mapping[str, float] = NOTHING) -> Twin:
    """Return the twin of a circuit.

    Args:
        circuit: What is simulated.
        frequency_Hz: By position name, the ripple frequency its assumed ESR is taken at;
            where silent the frequency of the period, or 1 kHz without one.
    """
    usual_Hz = 1.0 / circuit.period_s if circuit.period_s else 1000.0
    positions = {position.name.lower(): position for position in circuit.positions}
    inner = _inner_nodes(circuit)
    elements: list[Element] = []
    for element in circuit.netlist.elements:
        position = positions.get(element.name.lower())
        if position is not None and element.law is None:
            elements += _three(
                element, position, frequency_Hz=frequency_Hz.get(position.name, usual_Hz)
            )
        else:
            elements.append(_moved(element, inner.get(element.name.lower(), NOTHING)))
    for part in circuit.parts:
        for pin in metered_pins(part):
            name = f"{part.name}#{pin}"
            nodes = (part.pins[pin], name.lower())
            elements.append(Element(name=name, letter="V", nodes=nodes, value=0.0, span=part.span))
    options = {
        name: value
        for name, value in circuit.netlist.options.items()
        if isinstance(value, float | int)
    }
    diodes = tuple(part.name for part in circuit.parts if part.kind is Kind.DIODE)
    return Twin(
        elements=tuple(elements),
        models=circuit.netlist.models,
        period_s=circuit.period_s,
        options=options,
        temperature_degC=circuit.netlist.temperature_degC,
        initial_V=_initial_V(circuit),
        currents=(*(position.name for position in circuit.positions), *diodes),
    )


def _initial_V(circuit: Circuit) -> dict[str, float]:
    """Return `.ic` with the nodes that the twin puts in series with those of the netlist."""
    given = {node.lower(): volts for node, volts in circuit.netlist.initial_V.items()}
    added = {f"{position.name}#": position.nodes[1] for position in circuit.positions}
    for part in circuit.parts:
        added |= {f"{part.name}#{pin}": part.pins[pin] for pin in metered_pins(part)}
    inside = {
        node.lower(): given[outer.lower()]
        for node, outer in added.items()
        if outer.lower() in given
    }
    return given | inside


def _three(element: Element, position: Position, *, frequency_Hz: float) -> tuple[Element, ...]:
    """Return C, ESR and leakage of a position."""
    name, (first, second) = position.name, position.nodes
    inside = f"{name}#".lower()
    esr = esr_of(position, frequency_Hz=frequency_Hz)
    return (
        replace(element, name=name, nodes=(first, inside), value=position.value_F, model=""),
        Element(
            name=f"{name}#esr", letter="R", nodes=(inside, second), value=esr, span=element.span
        ),
        Element(
            name=f"{name}#leak",
            letter="R",
            nodes=(first, second),
            value=insulation_of(position),
            span=element.span,
        ),
    )


def _inner_nodes(circuit: Circuit) -> dict[str, Mapping[str, str]]:
    """Return by element name how the outer nodes of metered pins are renamed in it."""
    renamed: dict[str, Mapping[str, str]] = {}
    for part in circuit.parts:
        nodes = {part.pins[pin]: f"{part.name}#{pin}".lower() for pin in metered_pins(part)}
        if nodes:
            renamed.update(dict.fromkeys((name.lower() for name in part.elements), nodes))
    return renamed


def _moved(element: Element, nodes: Mapping[str, str]) -> Element:
    """Return an element of a metered part behind the meters of its pins."""
    if not nodes:
        return element
    law = element.law
    if law is not None:
        law = Law(law.quantity, _renamed(law.expression, nodes))
    return replace(element, nodes=tuple(nodes.get(n, n) for n in element.nodes), law=law)


def _renamed(expression: Expression, nodes: Mapping[str, str]) -> Expression:
    """Return an expression that reads the voltages of the renamed nodes."""
    match expression:
        case Voltage(plus, minus):
            return Voltage(nodes.get(plus, plus), nodes.get(minus, minus))
        case Call(function, arguments):
            return Call(function, tuple(_renamed(a, nodes) for a in arguments))
        case Unary(operator, operand):
            return Unary(operator, _renamed(operand, nodes))
        case Binary(operator, left, right):
            return Binary(operator, _renamed(left, nodes), _renamed(right, nodes))
        case Conditional(test, yes, no):
            return Conditional(_renamed(test, nodes), _renamed(yes, nodes), _renamed(no, nodes))
        case _:
            return expression
