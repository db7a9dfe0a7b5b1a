"""Resistors, windings, diodes, transistors, fuses, controls and loudspeakers as parts."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Collection, Mapping, Sequence
from dataclasses import replace

from stress.circuit.circuit import Kind, Part
from stress.netlist.flat import NOTHING, Element, Netlist
from stress.parts.limit import Limit, Rating
from stress.parts.sheet import PartEntry, Sheet
from stress.parts.type import TypeEntry
from stress.parts.types import find as find_type

ASSUMED_RESISTOR_W = 0.5
ASSUMED_RESISTOR = Limit(
    value=ASSUMED_RESISTOR_W,
    source="assumed: half a watt, the usual size in receivers (common practice)",
    rating=Rating.ABSOLUTE,
    assumed=True,
)
TRANSISTOR_PINS = {
    "Q": ("collector", "base", "emitter"),
    "M": ("drain", "gate", "source"),
    "J": ("drain", "gate", "source"),
    "Z": ("drain", "gate", "source"),
}
WINDING_OHM = 5000.0  # more in series with a winding is a part of its own
_PARASITIC = re.compile(r"#(rser|lser|rpar|cpar|rlshunt)\Z")
_END = r"[-_.#]?(?:[ab]|[12]|top|bottom|upper|lower|up|down|hi|lo)?"


def transistors(
    netlist: Netlist,
    *,
    sheet: Sheet,
    inside: Collection[str],
    types: Sequence[TypeEntry] = (),
) -> tuple[Part, ...]:
    """Return every Q, M, J and Z that is in no device (`inside`, lower case)."""
    found = []
    for e in netlist.elements:
        if e.letter not in TRANSISTOR_PINS or e.name.lower() in inside:
            continue
        entry = sheet.transistors.get(e.name.lower(), PartEntry())
        known = _known(netlist, e, entry, types)
        found.append(
            Part(
                name=e.name,
                kind=Kind.TRANSISTOR,
                type=known.name if known else entry.type or "",
                pins=dict(zip(TRANSISTOR_PINS[e.letter], e.nodes, strict=False)),
                pins_source="netlist",
                elements=(e.name,),
                envelope=e.name,
                limits=(dict(known.limits) if known else {}) | dict(entry.limits),
                irreplaceable=entry.irreplaceable,
                span=e.span,
            )
        )
    return tuple(found)


def others(
    netlist: Netlist,
    *,
    sheet: Sheet,
    inside: Collection[str],
    types: Sequence[TypeEntry] = (),
) -> tuple[Part, ...]:
    """Return all R, L and D that are in no device, and the loudspeakers, in netlist order."""
    uses = Counter(n for e in netlist.elements for n in set(e.nodes))
    at: dict[str, list[Element]] = {}
    for e in netlist.elements:
        if e.letter == "R":
            for node in set(e.nodes):
                at.setdefault(node, []).append(e)
    windings = _windings_of_models(netlist, inside)
    in_series = {
        e.name.lower(): _series(e, at, uses)
        for e in netlist.elements
        if e.letter == "L" and (e.name.lower() not in inside or e.name in windings)
    }
    copper = {r.name.lower() for found in in_series.values() for r in found}
    parts = []
    for e in netlist.elements:
        name = e.name.lower()
        if is_parasitic(name) or (name in inside and e.name not in windings):
            continue
        if e.letter == "R" and name not in copper:
            parts.append(_resistor(e, sheet))
        elif e.letter == "L":
            parts.append(_winding(e, in_series.get(name, ()), sheet))
        elif e.letter == "D":
            parts.append(_diode(netlist, e, sheet, types))
    return tuple(parts)


def _known(
    netlist: Netlist, e: Element, entry: PartEntry, types: Sequence[TypeEntry]
) -> TypeEntry | None:
    model = netlist.models.get(e.model)
    name = entry.type or (model.name if model else e.model)
    known = find_type(name, extra=tuple(types)) if name else None
    solid = ("silicon", "germanium", "selenium")
    return known if known and known.family.startswith(solid) else None


def is_parasitic(name: str) -> bool:
    """Say whether an element only stands for what the card of another one says of it."""
    return _PARASITIC.search(name) is not None


def _windings_of_models(netlist: Netlist, inside: Collection[str]) -> frozenset[str]:
    """Return the inductors of devices that are transformers: nothing but inductors, couplings
    and what belongs to them. The currents in those are currents of real windings."""
    letters: dict[str, set[str]] = {}
    for e in netlist.elements:
        if e.name.lower() in inside:
            letters.setdefault(e.inside, set()).add(e.letter)
    return frozenset(
        e.name
        for e in netlist.elements
        if e.letter == "L" and e.inside in letters and letters[e.inside] <= set("LKRCV")
    )


def _resistor(e: Element, sheet: Sheet) -> Part:
    name = e.name.lower()
    kind, entry = Kind.RESISTOR, sheet.resistors.get(name, PartEntry())
    control = _control(name, sheet.controls)
    if name in sheet.loudspeakers:
        kind, entry = Kind.LOUDSPEAKER, sheet.loudspeakers[name]
    elif name in sheet.fuses or _is_fuse(name):
        kind, entry = Kind.FUSE, sheet.fuses.get(name, PartEntry())
    elif control is not None:
        kind, entry = Kind.CONTROL, sheet.controls[control]
    limits = dict(entry.limits)
    if kind is Kind.RESISTOR and "power_W" not in limits:
        limits["power_W"] = ASSUMED_RESISTOR
    return _two_ends(e, kind, entry, limits=limits)


def _is_fuse(name: str) -> bool:
    """Say whether an R is named for a fuse: "Rfuse1", "RFU2"; "RF1" stays a resistor."""
    return re.search(r"fuse|\Arfu\d", name.rpartition(".")[2]) is not None


def _control(name: str, controls: Mapping[str, PartEntry]) -> str | None:
    """Return the control a resistor is one end of: "RVR1a" and "VR1_2" are of "VR1"."""
    plain = name.removeprefix("r") if name.startswith(("rv", "rp")) else name
    for control in controls:
        if any(re.fullmatch(re.escape(control) + _END, n) for n in (name, plain)):
            return control
    return None


def _series(
    e: Element, at: Mapping[str, Sequence[Element]], uses: Mapping[str, int]
) -> tuple[Element, ...]:
    """Return the resistors that are the copper of a winding: alone with it at a node, and
    named after it, or for copper."""
    own = e.name.rpartition(".")[2].lower()
    stem = own.removeprefix("l")
    found = []
    for node in e.nodes:
        others = at.get(node, ())
        if node == "0" or uses[node] != 2 or len(others) != 1:
            continue
        r = others[0]
        short = r.name.rpartition(".")[2].lower()
        named = own in short or (short == f"r{stem}" and not stem.isdigit())
        named = named or re.match(r"r_?(dc|w|cu|ser)", short) is not None
        if named and r.value is not None and r.value <= WINDING_OHM:
            found.append(r)
    return tuple(found)


def _winding(e: Element, copper: Sequence[Element], sheet: Sheet) -> Part:
    name = e.name.lower()
    kind, entry = Kind.WINDING, sheet.windings.get(name, PartEntry())
    if name in sheet.loudspeakers:
        kind, entry = Kind.LOUDSPEAKER, sheet.loudspeakers[name]
    own = e.parameters.get("rser", 0.0)
    ohm = own + sum(r.value or 0.0 for r in copper)
    part = _two_ends(e, kind, entry, limits=dict(entry.limits))
    return replace(
        part,
        elements=(e.name, *(r.name for r in copper)),
        resistance_ohm=ohm if ohm > 0 else None,
    )


def _diode(netlist: Netlist, e: Element, sheet: Sheet, types: Sequence[TypeEntry]) -> Part:
    entry = sheet.diodes.get(e.name.lower(), PartEntry())
    known = _known(netlist, e, entry, types)
    part = _two_ends(
        e, Kind.DIODE, entry, limits=(dict(known.limits) if known else {}) | dict(entry.limits)
    )
    pins = dict(zip(("anode", "cathode"), e.nodes, strict=False))
    return replace(part, pins=pins, type=known.name if known else part.type)


def _two_ends(e: Element, kind: Kind, entry: PartEntry, *, limits: Mapping[str, Limit]) -> Part:
    return Part(
        name=e.name,
        kind=kind,
        type=entry.type or "",
        pins=dict(zip(("plus", "minus"), e.nodes, strict=False)),
        pins_source="netlist",
        elements=(e.name,),
        envelope=e.name,
        limits=limits or NOTHING,
        value=e.value if e.letter in "RL" else None,
        irreplaceable=entry.irreplaceable,
        span=e.span,
    )
