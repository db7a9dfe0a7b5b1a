"""What is wrong at a position, and how the twin shows it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

from stress.circuit.circuit import Circuit, Position
from stress.engine.case import Twin
from stress.text.figure import figure
from stress.text.quantity import QuantityError, quantity

SHORT_OHM = 0.1
OPEN_SHARE = 1e-9
DRIED_SHARE, DRIED_ESR = 0.2, 10.0
LOW_SHARE = 0.5
KINDS = ("leaky", "short", "open", "dried", "low", "reversed")


@dataclass(frozen=True, slots=True, kw_only=True)
class Fault:
    """One fault of one position: "leaky", "short", "open", "dried", "low" or "reversed"."""

    position: str
    kind: str
    ohm: float | None = None

    def __str__(self) -> str:
        if self.kind == "leaky" and self.ohm is not None:
            return f"{self.position} leaky {figure(self.ohm, 'ohm', digits=6)}"
        return f"{self.position} {self.kind}"


def values(fault: Fault, position: Position, *, esr_ohm: float) -> Mapping[str, float]:
    """Return what the fault sets in the twin, by element name.

    A short is 0.1 Ω, an open part keeps 1e-9 of its capacitance, a dried one has a fifth of it
    and ten times its ESR, a low one half of it. A reversed electrolytic conducts: it is taken as
    a short, the worst it comes to.

    Raises:
        ValueError: For a kind that does not exist, or a leaky one without its resistance.
    """
    name, farad = position.name, position.value_F or 0.0
    match fault.kind:
        case "leaky" if fault.ohm is not None:
            return {f"{name}#leak": fault.ohm}
        case "short" | "reversed":
            return {f"{name}#leak": SHORT_OHM}
        case "open":
            return {name: farad * OPEN_SHARE}
        case "dried":
            return {name: farad * DRIED_SHARE, f"{name}#esr": esr_ohm * DRIED_ESR}
        case "low":
            return {name: farad * LOW_SHARE}
        case _:
            raise ValueError(f"no such fault: {fault}")


def across_ideal_source(circuit: Circuit, position: Position) -> bool:
    """Tell whether nothing but ideal voltage sources joins the two nodes of a position.

    A fault there is limited by the fuse and the wiring only, which no netlist holds.
    """
    joined = {position.nodes[0]}
    pairs = [e.nodes[:2] for e in circuit.netlist.elements if e.letter == "V"]
    while True:
        reached = {node for pair in pairs if joined & set(pair) for node in pair} - joined
        if not reached:
            return position.nodes[1] in joined
        joined |= reached


def parse(text: str, circuit: Circuit) -> Fault:
    """Read a known fault such as "C5 leaky 1 Meg" or "C7 open".

    Raises:
        ValueError: With what would be accepted.
    """
    name, _, rest = text.strip().partition(" ")
    kind, _, ohm = rest.strip().partition(" ")
    try:
        position = circuit.position(name)
    except KeyError:
        known = ", ".join(p.name for p in circuit.positions)
        raise ValueError(f"no position {name!r}; there are {known}") from None
    if kind not in KINDS:
        raise ValueError(f"no fault {kind!r}; there are {', '.join(KINDS)}")
    if (kind == "leaky") != bool(ohm.strip()):
        raise ValueError('a leak is given with its resistance, "C5 leaky 1 Meg", others without')
    if kind != "leaky":
        return Fault(position=position.name, kind=kind)
    try:
        value = quantity(ohm if "ohm" in ohm.lower() or "Ω" in ohm else f"{ohm.strip()}ohm", "ohm")
    except QuantityError as problem:
        raise ValueError(str(problem)) from problem
    if value <= 0.0:
        raise ValueError("a leakage resistance above zero is wanted")
    return Fault(position=position.name, kind=kind, ohm=value)


def applied(
    twin: Twin, faults: tuple[Fault, ...], *, circuit: Circuit, esr_ohm: Mapping[str, float]
) -> Twin:
    """Return the twin with known faults in it, so that they are in every case."""
    changed = {
        name.lower(): value
        for fault in faults
        for name, value in values(
            fault, circuit.position(fault.position), esr_ohm=esr_ohm[fault.position]
        ).items()
    }
    if not changed:
        return twin
    elements = tuple(
        replace(e, value=changed[e.name.lower()]) if e.name.lower() in changed else e
        for e in twin.elements
    )
    return replace(twin, elements=elements)
