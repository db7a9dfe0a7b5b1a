"""Tells the pins of a tube model by what the model does: no names needed.

The model's own laws are evaluated at a few voltages. The cathode is where current comes out
when every other pin is positive; the grid is the pin that moves the currents of the others; of
the pins whose current it moves the screen has more hold on the cathode current than the plate
(that is what a screen is for). A pin that carries current on its own account is a diode; one
that besides shares the current between plate and screen is a converter's signal grid. Envelopes
of two unlike units are not told this way.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from contextlib import suppress
from dataclasses import dataclass

from stress.netlist.evaluate import evaluate
from stress.netlist.flat import Element

HIGH_V = 200.0
STEP_V = 0.5
CARRIES_A = 1e-7  # less than this at 200 V is no electrode that collects
CONTROLS_S = 1e-8  # less than this and a pin does not control another
CLEARLY = 3.0  # the grid moves the others' currents so many times more than any other pin does


def roles_by_structure(
    pins: Sequence[str], nodes: Sequence[str], elements: Sequence[Element]
) -> dict[str, str]:
    """Return role to formal pin, {} where it cannot tell.

    Args:
        pins: Formal pins of the subcircuit.
        nodes: The flat nodes on them, same order.
        elements: The flat elements inside.
    """
    if len(pins) != len(nodes) or len(set(nodes)) != len(nodes) or not 2 <= len(pins) <= 6:
        return {}
    model = _Model(nodes, elements)
    try:
        roles = _roles(model)
    except (KeyError, ArithmeticError, ValueError, RecursionError):
        return {}
    return {role: pins[nodes.index(node)] for role, node in roles.items()}


class _Model:
    """Currents into the pins of a model, from its behavioural and controlled sources."""

    def __init__(self, nodes: Sequence[str], elements: Sequence[Element]) -> None:
        self.nodes = tuple(nodes)
        voltages = [e for e in elements if _is_voltage(e)]
        self.inner = {e.nodes[0]: e for e in voltages if e.nodes[0] not in nodes}
        # A resistor between a pin and an inner node limits a current; here it is a wire.
        self.wires = {node: node for node in nodes}
        for element in elements:
            if element.letter == "R":
                for pin, inner in (element.nodes, element.nodes[::-1]):
                    if pin in nodes and inner not in (*nodes, "0", *self.inner):
                        self.wires.setdefault(inner, pin)
        self.sources = [e for e in elements if _is_current(e)]

    def currents_A(self, volts: Mapping[str, float]) -> dict[str, float]:
        """Return the current into every pin, in ampere, at the voltages of the pins."""
        ground = volts.get("0", 0.0)
        pins = {inner: volts[pin] - ground for inner, pin in self.wires.items()}
        known = _Volts(pins, self.inner)
        into = dict.fromkeys(self.nodes, 0.0)
        for source in self.sources:
            current = _strength(source, known)
            for node, sign in zip(source.nodes[:2], (1.0, -1.0), strict=True):
                if node in self.wires:
                    into[self.wires[node]] += sign * current
        return into


class _Volts(Mapping[str, float]):
    """Voltages of pins, and of inner nodes that a source sets, worked out when asked for."""

    def __init__(self, pins: Mapping[str, float], inner: Mapping[str, Element]) -> None:
        self._known = dict(pins)
        self._inner = inner

    def __getitem__(self, node: str) -> float:
        if node == "0":
            return 0.0
        if node not in self._known:
            source = self._inner[node]
            self._known[node] = _strength(source, self) + self[source.nodes[1]]
        return self._known[node]

    def __iter__(self) -> Iterator[str]:
        return iter(self._known)

    def __len__(self) -> int:
        return len(self._known)


def _is_current(element: Element) -> bool:
    if element.letter == "B":
        return element.law is not None and element.law.quantity == "I"
    return element.letter in "GD"


def _is_voltage(element: Element) -> bool:
    if element.letter == "B":
        return element.law is not None and element.law.quantity == "V"
    return element.letter in "EV"


def _strength(source: Element, volts: Mapping[str, float]) -> float:
    """Return ampere or volt of a source; a junction counts as one ohm beyond half a volt."""
    if source.law is not None:
        return evaluate(source.law.expression, voltages=volts, names={"temper": 27.0, "time": 0.0})
    if source.letter == "D":
        return max(volts[source.nodes[0]] - volts[source.nodes[1]] - 0.5, 0.0)
    if source.letter == "V":
        return source.value or 0.0
    control = volts[source.nodes[2]] - volts[source.nodes[3]]
    return (source.value or 0.0) * control


def _roles(model: _Model) -> dict[str, str]:
    outs: dict[str, float] = {}
    for node in model.nodes:
        with suppress(ArithmeticError, ValueError):  # a law may have no value with that pin low
            outs[node] = _at(model, node)[node]
    cathode = min(outs, key=lambda node: outs[node], default="")
    if not outs or outs[cathode] > -CARRIES_A:
        return {}
    others = [node for node in model.nodes if node != cathode]
    points = [point for node in others if (point := _Point.grid(model, cathode, node))]
    grids = [point for point in points if point.is_grid]
    if not grids:
        carriers = [node for node in others if _at(model, cathode)[node] > CARRIES_A]
        if any(point.steered for point in points) or not 1 <= len(carriers) <= 2:
            return {}
        return {**dict(zip(("plate", "plate2"), carriers, strict=False)), "cathode": cathode}
    # With the true grid at 0 V the currents are the smallest: elsewhere it stands at 200 V.
    point = min(grids, key=lambda each: each.cathode_A)
    steered = sorted(point.steered, key=lambda node: point.pulls[node])
    alone = [node for node in point.carriers if node not in steered]
    if len(steered) > 2 or len(alone) > 2:
        return {}
    roles = dict(zip(("plate", "screen"), steered, strict=False)) | {"cathode": cathode}
    signal = [node for node in alone if _shares(model, point, node)]
    if signal:  # a pentagrid: what looks like a diode at 200 V moves the plate current at 0 V
        return {**roles, "grid": signal[0], "oscillator": point.node} if len(alone) == 1 else {}
    return {**roles, "grid": point.node, **dict(zip(("diode", "diode2"), alone, strict=False))}


def _at(model: _Model, cathode: str) -> dict[str, float]:
    """Return the currents with one pin at 0 V and all others high."""
    return model.currents_A({**dict.fromkeys(model.nodes, HIGH_V), cathode: 0.0})


@dataclass(frozen=True, slots=True)
class _Point:
    """The model with one pin at 0 V as if it were the grid, the others high.

    Attributes:
        node: The pin.
        volts: Of every pin.
        cathode_A: Out of the cathode.
        carriers: Other pins into which current flows.
        steered: Those of them whose current rises with the pin's voltage.
        pulls: How much the voltage of each pin moves the cathode current, siemens.
    """

    node: str
    volts: Mapping[str, float]
    cathode_A: float
    carriers: tuple[str, ...]
    steered: tuple[str, ...]
    pulls: Mapping[str, float]

    @classmethod
    def grid(cls, model: _Model, cathode: str, node: str) -> _Point | None:
        """Return the point, or None where the law has no value there."""
        volts = {**dict.fromkeys(model.nodes, HIGH_V), cathode: 0.0, node: 0.0}
        others = [pin for pin in model.nodes if pin not in (node, cathode)]
        try:
            currents = model.currents_A(volts)
            slopes = {pin: _slopes(model, volts, pin) for pin in (node, *others)}
        except (ArithmeticError, ValueError):
            return None
        carriers = tuple(pin for pin in others if currents[pin] > CARRIES_A)
        steered = tuple(pin for pin in carriers if slopes[node][pin] > CONTROLS_S)
        pulls = {pin: abs(slopes[pin][cathode]) for pin in slopes}
        return cls(node, volts, -currents[cathode], carriers, steered, pulls)

    @property
    def is_grid(self) -> bool:
        """Whether the pin steers others, and has more hold on the current than any of them."""
        hold = self.pulls[self.node]
        return bool(self.steered) and all(hold > CLEARLY * self.pulls[pin] for pin in self.steered)


def _slopes(model: _Model, volts: Mapping[str, float], node: str) -> dict[str, float]:
    """Return what a pin's voltage does to the current into every pin, in siemens."""
    above = model.currents_A({**volts, node: volts[node] + STEP_V})
    below = model.currents_A({**volts, node: volts[node] - STEP_V})
    return {pin: (above[pin] - below[pin]) / (2 * STEP_V) for pin in model.nodes}


def _shares(model: _Model, point: _Point, node: str) -> bool:
    """Say whether a pin at 0 V moves the currents of others."""
    slopes = _slopes(model, {**point.volts, node: 0.0}, node)
    return any(abs(slopes[pin]) > CONTROLS_S for pin in point.steered)
