"""Which X is one part, and which is a piece of equipment."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from stress.netlist.flat import Element, Instance, Netlist
from stress.parts.recognise import plain
from stress.parts.sheet import Sheet
from stress.parts.type import TypeEntry
from stress.parts.types import find as find_type

MODEL_LETTERS = frozenset("BEFGHDQJMZK")
BLOCK_F = 1e-9  # a model holds picofarads; a capacitor from here on is a part of its own


@dataclass(frozen=True, slots=True)
class Device:
    """An instance that is one part.

    Attributes:
        instance: Its X.
        elements: All flat elements inside, at any depth.
        entry: What the type table says of it, or None.
        reason: Why it is taken for a device, in words.
    """

    instance: Instance
    elements: tuple[Element, ...]
    entry: TypeEntry | None
    reason: str


@dataclass(frozen=True, slots=True)
class Split:
    """Every outermost device, every block with the reason, and the elements in devices."""

    devices: tuple[Device, ...]
    blocks: tuple[tuple[Instance, str], ...]
    inside: frozenset[str]


def split(netlist: Netlist, *, sheet: Sheet, types: Sequence[TypeEntry] = ()) -> Split:
    """Decide for every X by the sheet, the type table, and what its body holds.

    A body is a device's when it holds a controlled source, a junction or a coupling and no
    capacitor of 1 nF or more; a body with a known tube among its own X is a block.
    """
    held = _elements_by_instance(netlist)
    parents = {i.name.lower(): i.inside.lower() for i in netlist.instances}
    own = {"device": _lower(sheet.devices) | set(sheet.tubes), "block": _lower(sheet.blocks)}
    known = {i.name.lower(): find_type(i.subcircuit, extra=tuple(types)) for i in netlist.instances}
    holds_tube = {
        parents[name] for name, entry in known.items() if entry is not None and parents[name]
    } | {parents[name] for name in sheet.tubes if parents.get(name)}
    devices: list[Device] = []
    blocks: list[tuple[Instance, str]] = []
    taken: set[str] = set()
    for instance in netlist.instances:
        name = instance.name.lower()
        if parents[name] in taken:
            taken.add(name)
            continue
        elements = held.get(name, ())
        entry = known[name]
        is_device, reason = _decide(instance, elements, entry, own, name in holds_tube)
        if is_device:
            taken.add(name)
            devices.append(Device(instance, elements, entry, reason))
        else:
            blocks.append((instance, reason))
    inside = frozenset(e.name.lower() for d in devices for e in d.elements)
    return Split(tuple(devices), tuple(blocks), inside)


def _decide(
    instance: Instance,
    elements: Sequence[Element],
    entry: TypeEntry | None,
    own: dict[str, set[str]],
    holds_tube: bool,
) -> tuple[bool, str]:
    name = instance.name.lower()
    if name in own["block"]:
        return False, "block by the sheet"
    if name in own["device"]:
        return True, "device by the sheet"
    large = [e for e in elements if e.letter == "C" and (e.value or 0.0) >= BLOCK_F]
    if entry is not None and (not large or _means(entry, instance.subcircuit)):
        return True, f"device: {entry.name} of the type table"
    if large:
        return False, f"block: holds {large[0].name} of 1 nF or more"
    if holds_tube:
        return False, "block: holds tubes"
    letters = {e.letter for e in elements} | instance.body
    found = sorted(letters & MODEL_LETTERS)
    if found:
        return True, f"device: holds {', '.join(found)} and no capacitor of 1 nF or more"
    return False, "block: no model in it"


def _means(entry: TypeEntry, name: str) -> bool:
    """Say whether a name is the designation itself and no decoration of it."""
    return plain(name) in {plain(word) for word in (entry.name, *entry.aliases)}


def _elements_by_instance(netlist: Netlist) -> dict[str, tuple[Element, ...]]:
    """Return the elements of every instance, those of its inner instances among them."""
    parents = {i.name.lower(): i.inside.lower() for i in netlist.instances}
    found: dict[str, list[Element]] = {}
    for element in netlist.elements:
        holder = element.inside.lower()
        while holder:
            found.setdefault(holder, []).append(element)
            holder = parents.get(holder, "")
    return {name: tuple(elements) for name, elements in found.items()}


def _lower(names: Sequence[str]) -> set[str]:
    return {name.lower() for name in names}
