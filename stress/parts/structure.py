"""Tells the pins of a tube model by what the model does: no names needed.

The model's own laws are evaluated at a few voltages. The cathode is where current comes out
when every other pin is positive; the grid is what moves that current most; of the pins that
then carry current the screen moves it more than the plate (that is what a screen is for).
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence

from stress.netlist.evaluate import evaluate
from stress.netlist.flat import Element

HIGH_V = 200.0
STEP_V = 2.0
CARRIES_A = 1e-7  # less than this at 200 V is no electrode that collects
CLEARLY = 3.0  # the grid moves the current by so many times more than any other pin


def roles_by_structure(
    pins: Sequence[str], nodes: Sequence[str], elements: Sequence[Element]
) -> dict[str, str]:
    """Return role to formal pin: plate, screen, grid, cathode, plate2; {} where it cannot tell.

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
        self.sources = [e for e in elements if _is_current(e) and set(e.nodes[:2]) & set(nodes)]
        self.inner = {e.nodes[0]: e for e in elements if _is_voltage(e) and e.nodes[0] not in nodes}

    def currents_A(self, volts: Mapping[str, float]) -> dict[str, float]:
        """Return the current into every pin, in ampere, at the voltages of the pins."""
        ground = volts.get("0", 0.0)
        known = _Volts({node: v - ground for node, v in volts.items()}, self.inner)
        into = dict.fromkeys(self.nodes, 0.0)
        for source in self.sources:
            current = _strength(source, known)
            for node, sign in zip(source.nodes[:2], (1.0, -1.0), strict=True):
                if node in into:
                    into[node] += sign * current
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
    cathode, out_A = max(
        ((node, -_at(model, node)[node]) for node in model.nodes), key=lambda pair: pair[1]
    )
    if out_A < CARRIES_A:
        return {}
    others = [node for node in model.nodes if node != cathode]
    moved = {node: _moves(model, cathode, node, _at_all(others, HIGH_V)) for node in others}
    first, *rest = sorted(moved, key=lambda node: moved[node], reverse=True)
    carriers = [node for node in others if _at(model, cathode)[node] > CARRIES_A]
    if not rest:
        return {"plate": first, "cathode": cathode}
    if moved[first] < CLEARLY * moved[rest[0]]:  # nothing controls: a full-wave rectifier
        alike = [node for node in carriers if moved[node] > moved[first] / CLEARLY]
        roles = dict(zip(("plate", "plate2"), alike, strict=False))
        return {**roles, "cathode": cathode} if 1 <= len(alike) <= 2 else {}
    plates = [node for node in carriers if node != first]
    at_zero = _at_all(others, HIGH_V) | {first: 0.0}
    plates.sort(key=lambda node: _moves(model, cathode, node, at_zero))
    if not 1 <= len(plates) <= 2:
        return {}
    names = ("plate", "screen")[: len(plates)]
    return {**dict(zip(names, plates, strict=True)), "grid": first, "cathode": cathode}


def _at_all(nodes: Sequence[str], volts: float) -> dict[str, float]:
    return dict.fromkeys(nodes, volts)


def _at(model: _Model, cathode: str) -> dict[str, float]:
    """Return the currents with one pin at 0 V and all others high."""
    return model.currents_A({**_at_all(model.nodes, HIGH_V), cathode: 0.0})


def _moves(model: _Model, cathode: str, node: str, volts: Mapping[str, float]) -> float:
    """Return how much a pin's voltage moves the cathode current, in siemens."""
    out: Callable[[float], float] = lambda step: (  # noqa: E731
        -model.currents_A({**volts, cathode: 0.0, node: volts[node] + step})[cathode]
    )
    return abs(out(STEP_V) - out(-STEP_V)) / (2 * STEP_V)
