"""Netlist and part sheet to a circuit: positions with roles, parts with limits, sources."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from pathlib import PurePath

from stress.circuit import (
    component,
    device,
    drive,
    hazards,
    names,
    opaque,
    position,
    sources,
    supply,
    touch,
    tube,
    use,
)
from stress.circuit.circuit import Circuit, Kind, Part
from stress.circuit.graph import Graph
from stress.circuit.surroundings import Surroundings
from stress.finding import Finding, Severity
from stress.netlist.flat import Netlist
from stress.parts.sheet import Sheet
from stress.parts.type import TypeEntry
from stress.text.span import SourceError, SourceErrors, Span

AMBIENT_DEGC = 40.0


def build(netlist: Netlist, sheet: Sheet, *, types: Sequence[TypeEntry] = ()) -> Circuit:
    """Return the circuit.

    Args:
        netlist: Flat.
        sheet: What the user knows; `Sheet()` for nothing.
        types: The user's own type entries, which go before the type table.

    Raises:
        SourceErrors: The sheet names what the netlist lacks, a position has no value, or
            there is no capacitor.
    """
    circuit, errors = survey(netlist, sheet, types=types)
    if errors:
        raise SourceErrors(errors)
    return circuit


def survey(
    netlist: Netlist, sheet: Sheet, *, types: Sequence[TypeEntry] = ()
) -> tuple[Circuit, tuple[SourceError, ...]]:
    """Return the circuit as far as it goes, and what `build` would raise."""
    a = anatomy(netlist, sheet, types=types)
    inside = a.split.inside
    positions, missing, odd = position.find(a.surroundings, sheet=sheet, inside=inside)
    errors = [*names.check(netlist, sheet=sheet, inside=inside), *a.pin_errors, *missing]
    if not positions and not netlist.obstacles:
        errors.append(
            SourceError(
                "the netlist has no capacitors, so there is nothing to do",
                Span(netlist.path, 0, 0, 1, ""),
                "; ".join(f"{f.where}: {f.text}" for f in odd if f.rule == "no-part")
                or "the capacitors of a device (a tube model) are no positions",
            )
        )
    uses = use.find(a.surroundings, fed=a.sources, sheet=sheet)
    errors += names.check_uses(uses, sheet=sheet)
    touchable = [n for n in a.graph.nodes if n in a.touch.touchable]
    line = a.sources.line
    circuit = Circuit(
        netlist=netlist,
        sheet=sheet,
        name=sheet.equipment.name or netlist.title or PurePath(netlist.path).stem,
        positions=positions,
        parts=a.parts,
        line=line,
        signals=a.sources.signals,
        gates=a.sources.gates,
        period_s=a.sources.period_s,
        heaters=sheet.equipment.heaters or "parallel",
        ambient_degC=(
            AMBIENT_DEGC if sheet.equipment.ambient_degC is None else sheet.equipment.ambient_degC
        ),
        touchable=frozenset(touchable) | a.touch.touchable,
        line_connected=a.graph.members(a.touch.hot),
        findings=(
            *hazards.find(a.surroundings, positions=positions, sheet=sheet),
            *odd,
            *_unrecognised(a),
        ),
        assumed=(
            *line.assumed,
            *_heaters(a, sheet),
            *a.sources.assumed,
            *a.touch.assumed,
            *a.envelopes,
            *use.without_drive(uses, signals=a.sources.signals, sheet=sheet),
        ),
        decisions=(
            *(f"{d.instance.name} ({d.instance.subcircuit}): {d.reason}" for d in a.split.devices),
            *(f"{i.name} ({i.subcircuit}): {reason}" for i, reason in a.split.blocks),
        ),
        uses=uses,
    )
    return circuit, tuple(errors)


def _unrecognised(a: Anatomy) -> list[Finding]:
    """Return a note for every device that computes currents and whose pins nobody knows."""
    known = {part.name for part in a.parts}
    return [
        Finding(
            severity=Severity.NOTE,
            where=d.instance.name,
            text=f"{d.instance.name} ({d.instance.subcircuit}) is taken for one part, but what "
            "its pins are is not recognised; it is judged by no limit",
            action=f"a tube: state [tubes.{d.instance.name}] pins",
            rule="pins-not-recognised",
            span=d.instance.span,
        )
        for d in a.split.devices
        if d.instance.name not in known and any(e.letter in "BG" for e in d.elements)
    ]


def _in_signal(part: Part, graph: Graph, driven: drive.Drive, sheet: Sheet) -> Part:
    """Return a tube without grids that no power drives as what it is: a detector, which is cold
    while the others are."""
    entry = sheet.tubes.get(part.name.lower())
    stated = part.type or (entry is not None and entry.rectifier is not None)
    if part.kind is not Kind.RECTIFIER or stated:
        return part
    if any(graph.at(node) in driven.nodes for node in part.pins.values()):
        return part
    return replace(part, kind=Kind.TUBE)


def _heaters(a: Anatomy, sheet: Sheet) -> tuple[str, ...]:
    """Return what is assumed of the heaters of a set without a power transformer."""
    tubes = any(part.kind is Kind.TUBE for part in a.parts)
    if sheet.equipment.heaters is not None or not a.touch.hot_ground or not tubes:
        return ()
    return (
        "heaters in parallel; sets without a transformer mostly have them in series, then state "
        '[equipment] heaters = "series"',
    )


def _ordered(parts: Sequence[Part]) -> tuple[Part, ...]:
    """Return tubes first, then resistors, windings, diodes and the rest, in netlist order."""
    order = list(Kind)
    return tuple(sorted(parts, key=lambda part: order.index(part.kind)))


@dataclass(frozen=True, slots=True)
class Anatomy:
    """Everything found on the way from netlist and sheet to a circuit.

    Attributes:
        split: Devices and blocks.
        graph: The circuit as a graph.
        sources: Line, signals, gates.
        surroundings: What stands around a node.
        parts: All parts but the positions.
        envelopes: Which units were put into one glass, in words.
        pin_errors: Pins that the sheet states wrongly.
    """

    split: device.Split
    graph: Graph
    sources: sources.Sources
    surroundings: Surroundings
    parts: tuple[Part, ...]
    envelopes: tuple[str, ...]
    pin_errors: tuple[SourceError, ...]

    @property
    def touch(self) -> touch.Touch:
        """What is connected to the line, and what can be touched."""
        return self.surroundings.touch


def anatomy(netlist: Netlist, sheet: Sheet, *, types: Sequence[TypeEntry] = ()) -> Anatomy:
    """Take a circuit apart, stage by stage."""
    split = device.split(netlist, sheet=sheet, types=types)
    devices, pin_errors, envelopes = tube.find(split.devices, sheet=sheet, types=types)
    solid = component.transistors(netlist, sheet=sheet, inside=split.inside, types=types)
    contacts = {n.lower() for c in sheet.conditions for n in (*c.open, *c.short)}
    labels = opaque.label(split.devices, known={part.name for part in devices})
    graph = Graph(netlist, parts=(*devices, *solid), labels=labels, contacts=contacts)
    fed = sources.find(graph, entry=sheet.line)
    driven = drive.find(graph, line=fed.line.sources, gated=fed.gated, powering=fed.powering)
    supplied = supply.find(graph, drive=driven)
    touched = touch.find(
        graph,
        drive=driven,
        line=fed.line,
        stated_V=sheet.line.nominal_V,
        named=sheet.equipment.touchable,
    )
    others = component.others(netlist, sheet=sheet, inside=split.inside, types=types)
    devices = tuple(_in_signal(part, graph, driven, sheet) for part in devices)
    parts = _ordered((*devices, *solid, *others))
    around = Surroundings(
        graph,
        drive=driven,
        supply=supplied,
        touch=touched,
        parts={part.name.lower(): part for part in parts},
        gated=fed.gated,
    )
    return Anatomy(split, graph, fed, around, parts, envelopes, pin_errors)
