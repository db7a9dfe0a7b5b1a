"""Tubes, and other devices with pins: which role each pin has, and what the part can stand."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import replace

from stress.circuit.circuit import Kind, Part
from stress.circuit.device import Device
from stress.parts.limit import Limit
from stress.parts.recognise import pin_roles
from stress.parts.sheet import PartEntry, Sheet, TubeEntry
from stress.parts.type import TypeEntry
from stress.parts.types import find as find_type
from stress.text.span import SourceError

TRANSISTOR_PINS = (
    {"collector": "c", "base": "b", "emitter": "e"},
    {"drain": "d", "gate": "g", "source": "s"},
    {"collector": "collector", "base": "base", "emitter": "emitter"},
    {"drain": "drain", "gate": "gate", "source": "source"},
)
DIODE_PINS = ({"a": "anode", "k": "cathode"}, {"anode": "anode", "cathode": "cathode"})
_UNIT = re.compile(r"\A(.*\d)[-_.]?([A-D])\Z", re.IGNORECASE)


def find(
    devices: Sequence[Device], *, sheet: Sheet, types: Sequence[TypeEntry] = ()
) -> tuple[tuple[Part, ...], tuple[SourceError, ...], tuple[str, ...]]:
    """Return the devices as parts, what is wrong with their pins, and what was assumed.

    A device whose pins nobody can name is no part: its elements stay in the circuit as they
    are.
    """
    parts: list[Part] = []
    errors: list[SourceError] = []
    for device in devices:
        entry = sheet.tubes.get(device.instance.name.lower())
        part, wrong = _tube(device, entry, types)
        errors += wrong
        if part is None and not wrong:
            part = _semiconductor(device, sheet)
        if part is not None:
            parts.append(part)
    named, assumed = _envelopes(parts, sheet)
    return named, tuple(errors), assumed


def _tube(
    device: Device, entry: TubeEntry | None, types: Sequence[TypeEntry]
) -> tuple[Part | None, list[SourceError]]:
    instance = device.instance
    known = find_type(entry.type, extra=tuple(types)) if entry and entry.type else device.entry
    if known is not None and _solid(known):
        return None, []
    pins, source, errors = _pins(device, entry, known)
    if errors:
        return None, errors
    tubelike = entry is not None or known is not None
    if not pins or not (tubelike or "cathode" in pins or "filament" in pins):
        return None, []
    if not tubelike and not _emits(device):
        return None, []
    limits = dict(known.limits) if known else {}
    if entry is not None:
        limits |= entry.limits
    gridless = not any("grid" in role for role in pins)
    rectifier = known.family == "rectifier" if known else gridless
    if entry is not None and entry.rectifier is not None:
        rectifier = entry.rectifier
    return (
        Part(
            name=instance.name,
            kind=Kind.RECTIFIER if rectifier else Kind.TUBE,
            type=known.name if known else (entry.type or "" if entry else ""),
            pins=pins,
            pins_source=source,
            elements=tuple(e.name for e in device.elements),
            envelope=entry.envelope if entry and entry.envelope else instance.name,
            limits=limits,
            warm_up=known.warm_up if known else "cathode",
            contact=bool(known and known.contact and not instance.built_in),
            span=instance.span,
        ),
        [],
    )


def _solid(entry: TypeEntry) -> bool:
    return entry.family.startswith(("silicon", "germanium", "selenium"))


def _emits(device: Device) -> bool:
    """Say whether the body computes a current as tube models do, by B or G."""
    return any(e.letter in "BG" for e in device.elements)


def _pins(
    device: Device, entry: TubeEntry | None, known: TypeEntry | None
) -> tuple[dict[str, str], str, list[SourceError]]:
    """Return role to flat node, how it was found, and errors of the sheet."""
    instance = device.instance
    at = dict(zip((p.lower() for p in instance.pins), instance.nodes, strict=False))
    if entry is not None and entry.pins:
        pins, errors = {}, []
        for role, pin in entry.pins.items():
            index = int(pin) - 1 if pin.isdigit() and pin.lower() not in at else None
            if index is not None and 0 <= index < len(instance.nodes):
                pins[role] = instance.nodes[index]
            elif pin.lower() in at:
                pins[role] = at[pin.lower()]
            else:
                names = ", ".join(instance.pins) or "none"
                errors.append(
                    SourceError(
                        f"{instance.name} has no pin {pin!r} for its {role}",
                        instance.span,
                        f"its pins are {names}, or numbers from 1 to {len(instance.nodes)}",
                    )
                )
        return pins, "sheet", errors
    if instance.built_in and known is not None and known.pins:
        return dict(zip(known.pins, instance.nodes, strict=False)), "type table", []
    roles, how = pin_roles(instance.pins, device.elements, nodes=instance.nodes)
    return {r: at[p.lower()] for r, p in roles.items() if p.lower() in at}, how, []


def _semiconductor(device: Device, sheet: Sheet) -> Part | None:
    """Return a transistor or diode that the netlist states as a subcircuit."""
    instance, name = device.instance, device.instance.name.lower()
    letters = {e.letter for e in device.elements}
    at = dict(zip((p.lower() for p in instance.pins), instance.nodes, strict=False))
    pins: dict[str, str] = {}
    kind = Kind.TRANSISTOR
    for row in TRANSISTOR_PINS:
        if set(row.values()) <= set(at) and letters & set("QMJZBG"):
            pins = {role: at[pin] for role, pin in row.items()}
            break
    if not pins and len(instance.nodes) == 2 and "D" in letters:
        kind = Kind.DIODE
        diode = next(e for e in device.elements if e.letter == "D")
        for names in DIODE_PINS:
            if set(names) == set(at):
                pins = {role: at[pin] for pin, role in names.items()}
        if not pins:
            turned = diode.nodes[0] == instance.nodes[1] or diode.nodes[1] == instance.nodes[0]
            first, second = instance.nodes[::-1] if turned else instance.nodes
            pins = {"anode": first, "cathode": second}
    if not pins:
        return None
    table: Mapping[str, PartEntry] = sheet.diodes if kind is Kind.DIODE else sheet.transistors
    entry = table.get(name, PartEntry())
    limits: dict[str, Limit] = dict(device.entry.limits) if device.entry else {}
    return Part(
        name=instance.name,
        kind=kind,
        type=device.entry.name if device.entry else entry.type or "",
        pins=pins,
        pins_source="pin names",
        elements=tuple(e.name for e in device.elements),
        envelope=instance.name,
        limits=limits | dict(entry.limits),
        irreplaceable=entry.irreplaceable,
        span=instance.span,
    )


def _envelopes(parts: Sequence[Part], sheet: Sheet) -> tuple[tuple[Part, ...], tuple[str, ...]]:
    """Put units such as XV1A and XV1B of one type into one envelope, where the sheet is
    silent."""
    groups: dict[tuple[str, str], list[Part]] = {}
    for part in parts:
        match = _UNIT.match(part.name)
        entry = sheet.tubes.get(part.name.lower())
        if match and part.kind is Kind.TUBE and not (entry and entry.envelope):
            groups.setdefault((match[1].lower(), part.type), []).append(part)
    named: dict[str, str] = {}
    assumed = []
    for group in groups.values():
        if len(group) > 1:
            match = _UNIT.match(group[0].name)
            glass = match[1] if match else group[0].name
            named |= {part.name: glass for part in group}
            names = " and ".join(part.name for part in group)
            assumed.append(f"{names} share one envelope, {glass}, by their names")
    return (
        tuple(replace(p, envelope=named[p.name]) if p.name in named else p for p in parts),
        tuple(assumed),
    )
