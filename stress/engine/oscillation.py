"""Stages that oscillate by themselves far above the line's frequency.

The grid of a line period does not resolve them, and its integration damps them out of sight.
So every tank with an active device at it is given a push and watched on a grid of its own.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from stress.engine.case import Floats
from stress.engine.deck import Deck
from stress.engine.ngspice import Ngspice, RunFailed
from stress.engine.topology import Groups
from stress.engine.tree import everything
from stress.netlist.expression import Voltage
from stress.netlist.flat import Element

SHORT_OHM = 50.0  # at radio frequency a connection
SHORT_F = 5e-9  # likewise; a tank's own capacitor is smaller
MOST_TANKS = 8
STEPS = 24  # a turn
WATCHES = (5, 20, 80)  # turns; what grows fast is told before it can run away
PUSH_V = 0.01
GROWN = 3.0  # over the watch, and at least to half the push: it oscillates
ACTIVE = frozenset("BGQJMZ")
OPTIONS = "method=trap reltol=1e-5 trtol=1e6 itl4=100"


@dataclass(frozen=True, slots=True, kw_only=True)
class Tank:
    """An inductor with the small capacitance across it.

    Attributes:
        inductor, capacitors: Names of the elements.
        node: Where it is watched, a node of the netlist.
        frequency_Hz: Of its resonance.
        stage: What can drive it.
        couplings: The K elements of the inductor: its feedback, where there is one.
    """

    inductor: str
    capacitors: tuple[str, ...]
    node: str
    frequency_Hz: float
    stage: str
    couplings: tuple[str, ...]

    @property
    def told(self) -> str:
        """What is said of it once it has been seen to oscillate."""
        away = (
            f"its feedback ({', '.join(self.couplings)}) is taken away"
            if self.couplings
            else "it is simulated at rest"
        )
        return (
            f"{self.stage} oscillates by itself at about {self.frequency_Hz:.3g} Hz with "
            f"{self.inductor} and {', '.join(self.capacitors)}; {away} for the review"
        )


def tanks(elements: Sequence[Element], *, above_Hz: float) -> tuple[Tank, ...]:
    """Return the tanks of a circuit that an active device can drive, the slowest first."""
    joined = Groups()
    for element in elements:
        value = abs(element.value or 0.0)
        short = (
            element.letter == "V"
            or (element.letter == "R" and element.law is None and value <= SHORT_OHM)
            or (element.letter == "C" and element.law is None and value >= SHORT_F)
        )
        if short:
            joined.join(*element.nodes[:2])
    drivers = {
        joined.of(node): element
        for element in elements
        if element.letter in ACTIVE
        for node in (*element.nodes, *_read(element))
        if joined.of(node) != joined.of("0")
    }
    found = []
    for element in elements:
        if element.letter != "L" or not element.value:
            continue
        ends = {joined.of(node) for node in element.nodes[:2]}
        across = [
            other
            for other in elements
            if other.letter == "C"
            and other.value
            and {joined.of(node) for node in other.nodes[:2]} == ends
        ]
        driver = next((drivers[end] for end in ends if end in drivers), None)
        if len(ends) < 2 or not across or driver is None:
            continue
        farad = sum(other.value or 0.0 for other in across)
        frequency_Hz = 1.0 / (2.0 * math.pi * math.sqrt(abs(element.value) * farad))
        if frequency_Hz < above_Hz:
            continue
        found.append(
            Tank(
                inductor=element.name,
                capacitors=tuple(other.name for other in across),
                node=next(n for n in element.nodes if joined.of(n) != joined.of("0")),
                frequency_Hz=frequency_Hz,
                stage=driver.inside or driver.name,
                couplings=tuple(
                    other.name
                    for other in elements
                    if other.letter == "K"
                    and element.name.lower() in (name.lower() for name in other.controls)
                ),
            )
        )
    return tuple(sorted(found, key=lambda tank: tank.frequency_Hz))[:MOST_TANKS]


def _read(element: Element) -> tuple[str, ...]:
    """Return the nodes whose voltages the law of an element reads: a tube's grid."""
    if element.law is None:
        return ()
    read = [part for part in everything(element.law.expression) if isinstance(part, Voltage)]
    return tuple(node for part in read for node in (part.plus, part.minus))


def oscillates(
    ngspice: Ngspice, deck: Deck, tank: Tank, *, x: Floats, node_V: Mapping[str, float]
) -> bool:
    """Push a tank in a settled circuit and tell whether its oscillation grows.

    Args:
        ngspice: The library.
        deck: The circuit.
        tank: Where to push.
        x: Shape (n,): the settled state at the start of a period.
        node_V: Voltages at that moment, by node of the deck.
    """
    node = next(name for name, known in deck.nodes.items() if known == tank.node.lower())
    turn_s = 1.0 / tank.frequency_Hz
    ngspice.load(deck.text(node_V, options=OPTIONS))
    for turns in WATCHES:
        for state, value in zip(deck.states, x, strict=True):
            if state.element == tank.inductor:
                value += PUSH_V / (2.0 * math.pi * tank.frequency_Hz * state.size)
            ngspice.alter_start(state.device, float(value))
        try:
            ngspice.transient(stop_s=turns * turn_s, step_s=turn_s / STEPS)
        except RunFailed:
            return False
        swing = ngspice.vector(node)
        fifth = swing.size // 5
        # Against a straight line, since the line's own voltage drifts under the watch.
        first, last = _ripple(swing[:fifth]), _ripple(swing[-fifth:])
        if last > GROWN * first and last > PUSH_V / 2.0:
            return True
    return False


def _ripple(part: Floats) -> float:
    at = np.linspace(-1.0, 1.0, part.size)
    return float(np.std(part - np.polyval(np.polyfit(at, part, 1), at)))
