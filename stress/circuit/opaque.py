"""Devices that are neither tube nor transistor, such as an operational amplifier: which pins
they look at and which they drive."""

from __future__ import annotations

from collections.abc import Collection, Sequence

from stress.circuit.behaviour import nodes_in
from stress.circuit.circuit import Kind, Part
from stress.circuit.device import Device
from stress.circuit.joined import GROUND
from stress.netlist.flat import Element

STEPS = 3  # resistors and voltage sources between what drives and the pin


def label(devices: Sequence[Device], *, known: Collection[str]) -> tuple[Part, ...]:
    """Return a stand-in with pins "input…" and "output…" for every device that is no part.

    Args:
        devices: All devices.
        known: Names of those that are parts.
    """
    found = []
    for device in devices:
        if device.instance.name in known:
            continue
        pins = {n for n in device.instance.nodes if n != GROUND}
        sensed = {n for e in device.elements for n in _sensed(e)} & pins
        driven = _reached(device.elements, {n for e in device.elements for n in _driven(e)})
        driven = (driven & pins) - sensed
        if sensed and driven:
            named = {f"input{_number(i)}": n for i, n in enumerate(sorted(sensed))}
            named |= {f"output{_number(i)}": n for i, n in enumerate(sorted(driven))}
            found.append(
                Part(
                    name=device.instance.name,
                    kind=Kind.TRANSISTOR,
                    pins=named,
                    pins_source="what the model computes",
                    span=device.instance.span,
                )
            )
    return tuple(found)


def _number(index: int) -> str:
    return str(index + 1) if index else ""


def _sensed(element: Element) -> set[str]:
    if element.letter in "EG":
        return set(element.nodes[2:])
    if element.letter == "B" and element.law is not None:
        return nodes_in(element.law.expression) - set(element.nodes)
    return set(element.nodes[1:2]) if element.letter in "QMJZ" else set()


def _driven(element: Element) -> set[str]:
    if element.letter in "EGBFH":
        return set(element.nodes[:2])
    return {element.nodes[0], element.nodes[2]} if element.letter in "QMJZ" else set()


def _reached(elements: Sequence[Element], nodes: set[str]) -> set[str]:
    """Return the nodes, and those that resistors, sources and junctions join to them."""
    found = nodes - {GROUND}
    for _ in range(STEPS):
        for e in elements:
            if e.letter in "RVD" and set(e.nodes) & found:
                found |= set(e.nodes) - {GROUND}
    return found
