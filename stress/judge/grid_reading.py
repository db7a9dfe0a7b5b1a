"""The reading at a grid that shows a leak coming, and how to tell it from its rival cause."""

from __future__ import annotations

from collections.abc import Mapping

from stress.circuit.chain import Chains
from stress.circuit.circuit import Circuit, Position
from stress.judge.curve import nearest
from stress.study.result import LeakageIn
from stress.text.figure import figure

TELLING_V = 0.2  # a smaller change drowns in the spread of tubes and meters (common practice)


def meter_ohm(circuit: Circuit, volts: float) -> float:
    """Return what the user's meter loads a node with, in ohm.

    A meter stated in ohms per volt is taken on the next range of 1, 2.5, 10, 25 … volts.
    """
    per_volt = circuit.sheet.meter_ohm_per_V
    if per_volt is None:
        return circuit.sheet.meter_ohm
    ranges = [base * 10.0**k for k in range(4) for base in (1.0, 2.5)]
    return per_volt * next((r for r in ranges if r >= abs(volts)), ranges[-1])


def shown(volts: float, *, source_ohm: float, load_ohm: float) -> float:
    """Return what a meter shows of a voltage behind a resistance (voltage divider)."""
    return volts * load_ohm / (load_ohm + source_ohm)


def grid_reading(
    position: Position,
    *,
    circuit: Circuit,
    chains: Chains,
    nodes: Mapping[str, Mapping[str, float]],
    found: LeakageIn,
) -> str:
    """Return the tell-tale reading of a leak into a grid, or "" where no grid is on the way.

    The source resistance at the grid is the change of its voltage over the leak current that
    makes it (Thévenin).
    """
    victim, point = found.victim, nearest(found, found.critical_ohm)
    if victim is None or point is None or point.leak_A <= 0.0:
        return ""
    for step in chains.steps(position.name, victim.part):
        if step.kind != "node" or not step.text.startswith("grid of "):
            continue
        was = nodes.get(step.name, {}).get(found.condition)
        now = point.nodes.get(step.name)
        if was is None or now is None or now - was < TELLING_V:
            continue
        tube = step.text.removeprefix("grid of ")
        source = (now - was) / point.leak_A
        load = meter_ohm(circuit, now)
        reads = shown(now, source_ohm=source, load_ohm=load)
        healthy = shown(was, source_ohm=source, load_ohm=load)
        text = (
            f"tell-tale: {figure(reads, 'V')} on your meter at the {step.text} "
            f"(true {figure(now, 'V')}) where a healthy set shows {figure(healthy, 'V')}"
        )
        if circuit.heaters == "series":
            return (
                f"{text}; lift the plate side of {position.name}: if it goes, {position.name} "
                f"was the cause, if it stays, {tube} draws grid current"
            )
        return (
            f"{text}; if it stays with {tube} pulled, {position.name} is the cause, if it goes, "
            f"{tube} is"
        )
    return ""
