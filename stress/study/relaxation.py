"""Timings by resistor and capacitor: multivibrators and blocking oscillators.

A coupling from the plate of one tube to the grid of another, which is coupled back, sets how long
the other stays cut off: a time in proportion to the capacitor and to the resistance of the grid.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise

from stress.circuit.circuit import Circuit, Kind, Part, Position
from stress.netlist.flat import Element
from stress.study.timing import Timing, loss, shifts

SHORTEST_S = 20e-6  # a faster grid capacitor belongs to a radio-frequency oscillator
LEAST_OHM = 1e3
PINS = {Kind.TUBE: ("plate", "grid", "cathode"), Kind.TRANSISTOR: ("collector", "base", "emitter")}


@dataclass(frozen=True, slots=True)
class _Unit:
    """One triode of a glass, or a transistor."""

    name: str
    part: str
    output: str
    input: str
    common: str


@dataclass(frozen=True, slots=True)
class _Link:
    """A capacitor from the output of one unit to the input of another, and the time it sets."""

    position: Position
    source: _Unit
    target: _Unit
    ohm: float

    @property
    def time_s(self) -> float:
        return self.ohm * (self.position.value_F or 0.0)


def relaxation_timings(circuit: Circuit) -> Iterator[Timing]:
    """Yield the timing of every position that sets the period of a relaxation oscillator."""
    links = list(_links(circuit))
    for link in links:
        if link.time_s < SHORTEST_S:
            continue
        back = [o for o in links if o.source == link.target and o.target == link.source]
        if link.source == link.target:
            yield _timing(circuit, link, 0.0, f"the blocking oscillator {link.target.part}")
        elif back or _share_cathode(link):
            names = " and ".join(sorted({link.source.part, link.target.part}))
            other = sum(o.time_s for o in back)
            yield _timing(circuit, link, other, f"the multivibrator of {names}")


def _share_cathode(link: _Link) -> bool:
    return link.source.common == link.target.common != "0"


def _timing(circuit: Circuit, link: _Link, other_s: float, what: str) -> Timing:
    whole = link.time_s + other_s

    def ratio(share: float) -> float:
        return whole / (share * link.time_s + other_s)

    # The leak lies across the capacitor and discharges it beside the grid's resistance; the
    # bias that it lets through is judged in the simulated leak.
    detuned = circuit.sheet.detuned_share
    own = link.time_s / whole
    leak = link.ohm * (own * (1.0 + detuned) / detuned - 1.0)
    return Timing(
        position=link.position.name,
        what=what,
        shifts=shifts(ratio),
        loss=loss(ratio, detuned=detuned),
        leak_ohm=leak if leak > 0.0 else None,
        leak_reason=f"{what} is off by more than {100 * detuned:g} %",
    )


def _links(circuit: Circuit) -> Iterator[_Link]:
    units = [unit for part in circuit.parts for unit in _units(part)]
    elements = circuit.netlist.elements
    cores = _cores(elements)
    at: dict[str, list[Element]] = {}
    for element in elements:
        if element.letter in "RL":
            for node in element.nodes[:2]:
                at.setdefault(node, []).append(element)
    for position in circuit.positions:
        first, second = position.nodes
        for near, far in ((first, second), (second, first)):
            for target in (unit for unit in units if unit.input == far != "0"):
                ohm = _to_rest(far, at, but=position.name)
                for source in units:
                    direct = source.output == near != "0" and source != target
                    wound = source == target and _wound(near, source.output, at, cores)
                    if ohm and (direct or wound):
                        yield _Link(position, source, target, ohm)


def _units(part: Part) -> Iterator[_Unit]:
    if part.kind not in PINS:
        return
    output, grid, common = PINS[part.kind]
    for ending in ("", "2", "3"):
        names = (f"{output}{ending}", f"{grid}{ending}")
        if all(name in part.pins for name in names):
            cathode = part.pins.get(f"{common}{ending}", part.pins.get(common, "0"))
            yield _Unit(
                f"{part.name}{ending}", part.name, part.pins[names[0]], part.pins[names[1]], cathode
            )


def _to_rest(grid: str, at: dict[str, list[Element]], *, but: str) -> float:
    """Return the resistance from a grid along a chain of resistors, or 0 where there is none."""
    total, node, last = 0.0, grid, but
    for _ in range(4):
        resistors = [e for e in at.get(node, ()) if e.letter == "R" and e.name != last]
        if not resistors or (total and (len(resistors) > 1 or node == "0")):
            break
        step = max(resistors, key=lambda e: e.value or 0.0) if not total else resistors[0]
        total += step.value or 0.0
        node = step.nodes[1] if step.nodes[0] == node else step.nodes[0]
        last = step.name
    return total if total >= LEAST_OHM else 0.0


def _cores(elements: tuple[Element, ...]) -> dict[str, set[str]]:
    """Return by inductor all that share its core, lower case."""
    cores: dict[str, set[str]] = {}
    for element in elements:
        if element.letter == "K":
            for first, second in pairwise(name.lower() for name in element.controls):
                whole = cores.get(first, {first}) | cores.get(second, {second})
                for name in whole:
                    cores[name] = whole
    return cores


def _wound(node: str, plate: str, at: dict[str, list[Element]], cores: dict[str, set[str]]) -> bool:
    """Say whether a winding at a node is on the core of one at the plate."""
    here = {e.name.lower() for e in at.get(node, ()) if e.letter == "L"}
    there = {e.name.lower() for e in at.get(plate, ()) if e.letter == "L"}
    return any(cores.get(name, set()) & there for name in here) and not here & there
