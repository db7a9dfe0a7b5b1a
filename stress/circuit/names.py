"""The part sheet against the netlist: every name must be somewhere."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from difflib import get_close_matches

from stress.circuit.circuit import Use
from stress.circuit.joined import GROUND
from stress.circuit.touch import GROUND_NAMES
from stress.netlist.flat import Netlist
from stress.parts.sheet import Sheet
from stress.text.span import SourceError, Span


def check(netlist: Netlist, *, sheet: Sheet, inside: frozenset[str]) -> tuple[SourceError, ...]:
    """Return an error for every name of the sheet that the netlist lacks.

    Args:
        netlist, sheet: What is compared.
        inside: Elements in devices, lower case: their capacitors are no positions.
    """
    by_letter: dict[str, dict[str, str]] = {}
    for e in netlist.elements:
        by_letter.setdefault(e.letter, {})[e.name.lower()] = e.name
    instances = {i.name.lower(): i.name for i in netlist.instances}
    nodes = {n: n for e in netlist.elements for n in e.nodes}
    nodes |= {n: n for i in netlist.instances for n in i.nodes}
    everything = {k: v for table in by_letter.values() for k, v in table.items()} | instances
    capacitors = {k: v for k, v in by_letter.get("C", {}).items() if k not in inside}

    def of(*letters: str) -> dict[str, str]:
        return {k: v for letter in letters for k, v in by_letter.get(letter, {}).items()}

    errors: list[SourceError] = []

    def look(
        table: str, names: Iterable[str], known: Mapping[str, str], what: str, entry: str = ""
    ) -> None:
        for name in names:
            if name.lower() not in known:
                span = _span(sheet, table, entry or name)
                where = f"{table}.{entry}" if entry else table
                errors.append(_missing(where, name, known, what, span))

    for name in sheet.capacitors:
        if name not in capacitors and name in inside:
            device = next(e.inside for e in netlist.elements if e.name.lower() == name)
            errors.append(
                SourceError(
                    f"[capacitors.{name}] is inside {device}, which is taken for one part",
                    _span(sheet, "capacitors", name),
                    f'to make its capacitors positions: [blocks] names = ["{device}"]',
                )
            )
        else:
            look("capacitors", [name], capacitors, "capacitor")
    look("tubes", sheet.tubes, instances, "X card")
    look("resistors", sheet.resistors, of("R"), "resistor")
    look("windings", sheet.windings, of("L"), "winding (L)")
    look("diodes", sheet.diodes, of("D") | instances, "diode")
    look("transistors", sheet.transistors, of("Q", "M", "J", "Z") | instances, "transistor")
    look("fuses", sheet.fuses, of("R", "S", "W"), "resistor that stands for a fuse")
    look("loudspeakers", sheet.loudspeakers, of("R", "L"), "resistor or winding")
    look("line", sheet.line.sources, of("V", "I"), "source")
    look("devices", sheet.devices, instances, "X card")
    look("blocks", sheet.blocks, instances, "X card")
    stems = _stems(of("R"))
    look("controls", sheet.controls, of("R") | stems, "resistor of a control")
    for can in sheet.cans:
        look("cans", can.sections, capacitors, "capacitor", can.name)
        look("cans", _some(can.common, can.case), nodes, "node", can.name)
    for condition in sheet.conditions:
        parts = (*condition.open, *condition.short)
        look("conditions", parts, everything, "part", condition.name)
        look("conditions", condition.pulled, instances, "tube", condition.name)
        look("conditions", condition.silicon, instances, "tube", condition.name)
        look("conditions", condition.muted, of("V", "I"), "source", condition.name)
    for fault in sheet.faults:
        look("faults", fault.between, nodes | {GROUND: GROUND}, "node", fault.name)
    grounds = {name: name for name in GROUND_NAMES}
    look("equipment", sheet.equipment.touchable, nodes | grounds, "node")
    return tuple(errors)


def check_uses(uses: Sequence[Use], *, sheet: Sheet) -> tuple[SourceError, ...]:
    """Return an error for every condition that the sheet asks for and that does not apply."""
    known = {use.name: use.name for use in uses}
    offered = f"on offer here: {', '.join(known)}" if known else "none is on offer here"
    return tuple(
        SourceError(
            f"[equipment] asks for the condition {name}, which does not apply to this circuit",
            sheet.span("equipment", "conditions") or _span(sheet, "equipment", "conditions"),
            offered,
        )
        for name in sheet.equipment.conditions
        if name not in known
    )


def _some(*names: str | None) -> tuple[str, ...]:
    return tuple(name for name in names if name is not None)


def _stems(resistors: Mapping[str, str]) -> dict[str, str]:
    """Return what the two halves of a control may be called together: "vr1" of "RVR1a"."""
    found = {}
    for name in resistors:
        for end in ("a", "b", "1", "2", "top", "bottom", "upper", "lower", "up", "hi", "lo"):
            if name.endswith(end):
                stem = name.removesuffix(end).rstrip("-_.#")
                found[stem] = stem
                found[stem.removeprefix("r")] = stem.removeprefix("r")
    return found


def _missing(table: str, name: str, known: Mapping[str, str], what: str, span: Span) -> SourceError:
    close = get_close_matches(name.lower(), known, n=1, cutoff=0.5)
    if close:
        hint = f"did you mean {known[close[0]]}?"
    else:
        some = ", ".join(list(known.values())[:8])
        hint = f"the netlist has {some}" if some else f"the netlist has no {what}"
    message = f"[{table}] names {name}, but the netlist has no such {what}"
    return SourceError(message, span, hint)


def _span(sheet: Sheet, table: str, name: str) -> Span:
    """Return the place of an entry, or of its table, or the whole file."""
    keys = [(table, name), (table, "source"), (table, "touchable"), (table, "names")]
    for key in keys:
        span = sheet.spans.get((key[0], key[1].lower())) or sheet.spans.get((table,))
        if span is not None:
            return span
    return Span(sheet.path or "part sheet", 0, 0, 1, "")
