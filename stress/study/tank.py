"""Tuned circuits: the capacitance that a coil sees, and what a position has in it."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from math import pi, sqrt

import numpy as np

from stress.circuit.circuit import Circuit, Kind, Position, Role
from stress.engine.topology import Groups
from stress.netlist.flat import Element
from stress.study.timing import Timing, loss, shifts

SHORT_OHM = 50.0  # at radio frequency a connection
SHORT_F = 5e-9  # likewise, where it is not what tunes
LEAST_HZ = 20e3  # a coil that resonates below is no tuned circuit unless its capacitor is
LEAST_SHIFT = 1e-3  # a position that moves less is none of the tank's
USUAL_Q = 100.0  # of a coil whose resistance is not in the netlist (common practice)
TUNED = frozenset(
    {
        Role.TUNING,
        Role.GRID_LEAK,
        Role.COUPLING,
        Role.FEEDBACK,
        Role.PLATE_BYPASS,
        Role.DECOUPLING,
        Role.UNKNOWN,
    }
)
ACTIVE = frozenset("BGQJMZ")


@dataclass(frozen=True, slots=True)
class _Tank:
    """A coil and the capacitors that it sees, nodes joined by what is a connection."""

    coil: Element
    ends: tuple[int, int]
    pairs: tuple[tuple[str, int, int, float], ...]  # name, nodes, farad
    nodes: int
    series_ohm: float

    def farad(self, *, name: str = "", share: float = 1.0) -> float:
        """Return the capacitance between the ends, one capacitor taken at a share of its value.

        From the nodes' charges: 1 V at one end, 0 V at the other, no charge in between.
        """
        laplace = np.zeros((self.nodes, self.nodes))
        for each, a, b, farad in self.pairs:
            value = farad * (share if each == name else 1.0)
            laplace[a, a] += value
            laplace[b, b] += value
            laplace[a, b] -= value
            laplace[b, a] -= value
        first, _ = self.ends
        inner = [k for k in range(self.nodes) if k not in self.ends and laplace[k, k] > 0.0]
        seen = float(laplace[first, first])
        if inner:
            row = laplace[first, inner]
            inside = laplace[np.ix_(inner, inner)]
            seen -= float(row @ np.linalg.lstsq(inside, row, rcond=None)[0])
        return seen


def tank_timings(circuit: Circuit) -> Iterator[Timing]:
    """Yield the timing of every position that tunes a coil, the strongest coil of each."""
    for position in circuit.positions:
        if position.role not in TUNED or not position.value_F:
            continue
        found = [t for tank in _tanks(circuit, position) if (t := _timing(circuit, position, tank))]
        if found:
            yield max(found, key=lambda timing: timing.shifts["low"])
        elif _needs_coil(circuit, position):
            yield Timing(
                position=position.name,
                what="a tuned circuit",
                unknown="how far its loss detunes is not known: the coil that it works with is "
                "not in the netlist; add it as L to have this judged",
            )


def _timing(circuit: Circuit, position: Position, tank: _Tank) -> Timing | None:
    henry, whole = abs(tank.coil.value or 0.0), tank.farad()
    if whole <= 0.0:
        return None

    def ratio(share: float) -> float:
        return sqrt(whole / max(tank.farad(name=position.name, share=share), 1e-3 * whole))

    if ratio(0.5) - 1.0 < LEAST_SHIFT:
        return None
    frequency = 1.0 / (2.0 * pi * sqrt(henry * whole))
    if frequency < LEAST_HZ and position.role is not Role.TUNING:
        return None
    reactance = 2.0 * pi * frequency * henry
    quality = reactance / tank.series_ohm if tank.series_ohm > 0.0 else USUAL_Q
    share = circuit.sheet.functional_share
    # A leak across the whole tank; across a part of its capacitance the leak matters less.
    part = _part_of(position, tank)
    leak = quality * reactance * (1.0 - share) / share * part
    assumed = "" if tank.series_ohm > 0.0 else f", taken as {USUAL_Q:g}"
    return Timing(
        position=position.name,
        what=f"the tank of {tank.coil.name}",
        frequency_Hz=frequency,
        shifts=shifts(ratio),
        loss=loss(ratio, detuned=circuit.sheet.detuned_share),
        leak_ohm=leak,
        leak_reason=f"the Q of {tank.coil.name} falls by more than {100 * share:g} % "
        f"(healthy {quality:.3g}{assumed})",
    )


def _part_of(position: Position, tank: _Tank) -> float:
    """Return the square of the share of the tank's voltage that stands across a position."""
    small = 1e-6
    moved = tank.farad(name=position.name, share=1.0 + small) - tank.farad()
    return max(moved / (small * (position.value_F or 1.0)), 0.0)


def _tanks(circuit: Circuit, position: Position) -> Iterator[_Tank]:
    """Yield the coils that a position can tune, with the capacitors they see."""
    elements = circuit.netlist.elements
    joined = Groups()
    values = {p.name.lower(): p.value_F or 0.0 for p in circuit.positions}
    for element in elements:
        if _connects(element, values, but=position.name):
            joined.join(*element.nodes[:2])
    active = {joined.of(n) for e in elements if e.letter in ACTIVE for n in e.nodes}
    active |= {joined.of(n) for p in circuit.parts if p.kind is Kind.TUBE for n in p.pins.values()}
    numbers: dict[object, int] = {}
    pairs = []
    for element in elements:
        value = values.get(element.name.lower(), element.value or 0.0)
        if element.letter != "C" or element.law is not None or value <= 0.0:
            continue
        a, b = (joined.of(node) for node in element.nodes[:2])
        if a != b:
            for node in (a, b):
                numbers.setdefault(node, len(numbers))
            pairs.append((element.name, numbers[a], numbers[b], value))
    for coil in elements:
        if coil.letter != "L" or not coil.value or coil.law is not None:
            continue
        ends = [joined.of(node) for node in coil.nodes[:2]]
        if ends[0] == ends[1] or not all(end in numbers for end in ends):
            continue
        if position.role is not Role.TUNING and not set(ends) & active - {joined.of("0")}:
            continue
        yield _Tank(
            coil=coil,
            ends=(numbers[ends[0]], numbers[ends[1]]),
            pairs=tuple(pairs),
            nodes=len(numbers),
            series_ohm=_series_ohm(elements, coil),
        )


def _connects(element: Element, values: dict[str, float], *, but: str) -> bool:
    """Say whether an element is a connection at radio frequency."""
    if element.law is not None or len(element.nodes) < 2:
        return False
    if element.letter == "C":
        value = values.get(element.name.lower(), element.value or 0.0)
        return value >= SHORT_F and element.name.lower() != but.lower()
    value = abs(element.value or 0.0)
    return element.letter == "V" or (element.letter == "R" and value <= SHORT_OHM)


def _series_ohm(elements: Sequence[Element], coil: Element) -> float:
    """Return the resistance in series with a coil: of small resistors alone with it at a node."""
    total = 0.0
    for node in coil.nodes[:2]:
        others = [e for e in elements if node in e.nodes and e.name != coil.name]
        small = len(others) == 1 and others[0].letter == "R" and node != "0"
        if small and abs(others[0].value or 0.0) <= SHORT_OHM:
            total += abs(others[0].value or 0.0)
    return total


def _needs_coil(circuit: Circuit, position: Position) -> bool:
    """Say whether a position works with a coil that nobody drew: it is said to tune, or lies at
    the grid of an oscillator."""
    if position.role is Role.TUNING:
        return True
    oscillators = {
        node
        for part in circuit.parts
        for pin, node in part.pins.items()
        if pin.startswith("oscillator")
    }
    return position.role is Role.GRID_LEAK and bool(oscillators & set(position.nodes))
