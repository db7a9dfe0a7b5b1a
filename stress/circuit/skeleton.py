"""A part sheet to fill in, with all that the netlist and the graph tell."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping

from stress.circuit.circuit import Circuit, Kind, Part, Position
from stress.parts.limit import STRESSES
from stress.parts.recognise import pin_roles
from stress.parts.sheet_keys import PART_LIMITS, PINS, SOURCE
from stress.text.figure import figure

_BARE = re.compile(r"[A-Za-z0-9_-]+")
_CONTROL = re.compile(r"[\x00-\x1f\x7f]")
_PIN = re.compile(r"([a-z_]+?)_?[0-9]?")


def skeleton(circuit: Circuit) -> str:
    """Return a part sheet in TOML that reads back: what is known is filled in, what is assumed
    says so, what only the user knows stands in comments."""
    return "\n".join(_lines(circuit)) + "\n"


def _lines(circuit: Circuit) -> Iterator[str]:
    yield '# Part sheet. Everything in it is optional. Look at each part: what says "assumed" is'
    yield "# a guess, and a line behind a # is something only you can know."
    yield ""
    yield "[equipment]"
    yield f"name = {_text(circuit.name)}"
    yield f'ambient = "{_quantity(circuit.ambient_degC, "degC")}"  # around the chassis'
    yield f'heaters = "{circuit.heaters}"  # or series, battery'
    touchable = ", ".join(_text(node) for node in sorted(circuit.touchable))
    yield f"touchable = [{touchable}]" if touchable else '# touchable = ["chassis", "antenna"]'
    yield ""
    yield from _line(circuit)
    for position in circuit.positions:
        yield from _position(position)
    for part in circuit.parts:
        if part.kind in (Kind.TUBE, Kind.RECTIFIER):
            yield from _tube(circuit, part)
    yield from _others(circuit)


def _line(circuit: Circuit) -> Iterator[str]:
    line = circuit.line
    if not line.sources:
        yield "# [line]"
        yield '# source = "Vline"'
        yield '# nominal = "117 V"'
        yield ""
        return
    yield "[line]"
    yield f"source = [{', '.join(_text(name) for name in line.sources)}]"
    for key, volts in (("nominal", line.nominal_V), ("high", line.high_V), ("low", line.low_V)):
        yield f'{key} = "{volts:.4g} V"'
    for text in line.assumed:
        yield f"# assumed: {_comment(text)}"
    yield ""


def _position(p: Position) -> Iterator[str]:
    yield f"[capacitors.{_key(p.name)}]  # {_comment(p.role_text)}"
    note = "" if p.style_source == "sheet" else f"  # {_comment(p.style_source)}"
    yield f'style = "{p.style.name}"{note}'
    if p.rated_V is not None:
        yield f'rated = "{_quantity(p.rated_V, "V")}"'
    else:
        yield '# rated = "400 V"  # as marked on the part'
    if p.value_F is None:
        yield '# value = "0.1 uF"  # the netlist has none'
    if p.ripple_A is not None:
        yield f'ripple = "{_quantity(p.ripple_A, "A")}"'
    if p.esr_ohm is not None:
        yield f'esr = "{_quantity(p.esr_ohm, "ohm")}"'
    if p.insulation_ohm is not None:
        yield f'insulation = "{_quantity(p.insulation_ohm, "ohm")}"'
    if p.style.polar and p.plus is not None:
        yield f"plus = {_text(p.nodes[p.plus])}  # the side with the higher voltage"
    yield ""


def _tube(circuit: Circuit, part: Part) -> Iterator[str]:
    yield f"[tubes.{_key(part.name)}]"
    yield f"type = {_text(part.type)}" if part.type else '# type = "6V6GT"'
    pins = {role: pin for role, pin in _formal(circuit, part).items() if _known(role)}
    if pins and part.pins_source != "type table":
        inner = ", ".join(f"{role} = {_text(pin)}" for role, pin in pins.items())
        yield f"pins = {{ {inner} }}  # found by {_comment(part.pins_source)}"
    if part.kind is Kind.RECTIFIER:
        yield "rectifier = true"
    if part.envelope and part.envelope != part.name:
        yield f"envelope = {_text(part.envelope)}"
    if not part.limits:
        yield '# limits = { plate_dissipation = "12 W", screen_dissipation = "2 W" }'
    yield ""


def _formal(circuit: Circuit, part: Part) -> Mapping[str, str]:
    """Return role to pin of the model, by the sheet or as it was recognised."""
    entry = circuit.sheet.tubes.get(part.name.lower())
    if entry is not None and entry.pins:
        return entry.pins
    instance = next(i for i in circuit.netlist.instances if i.name == part.name)
    names = {name.lower() for name in part.elements}
    inside = [e for e in circuit.netlist.elements if e.name.lower() in names]
    return pin_roles(instance.pins, inside, nodes=instance.nodes)[0]


def _known(role: str) -> bool:
    match = _PIN.fullmatch(role)
    return match is not None and match[1] in PINS


def _others(circuit: Circuit) -> Iterator[str]:
    for kind, table, line in (
        (Kind.RESISTOR, "resistors", 'rated = "0.5 W"'),
        (Kind.WINDING, "windings", 'current = "70 mA"'),
        (Kind.DIODE, "diodes", 'current = "150 mA"'),
        (Kind.TRANSISTOR, "transistors", 'power = "0.5 W"'),
        (Kind.FUSE, "fuses", 'current = "1 A"'),
        (Kind.CONTROL, "controls", 'rated = "0.25 W"'),
        (Kind.LOUDSPEAKER, "loudspeakers", 'rated = "3 W"'),
    ):
        parts = [part for part in circuit.parts if part.kind is kind]
        if parts:
            yield f"# --- {table} ---"
        for part in parts:
            value = ""
            if part.value is not None:
                value = "  # " + figure(part.value, "H" if kind is Kind.WINDING else "ohm")
            stated = _stated(table, part)
            # What the program tells apart only by the sheet stands there, the rest behind a #.
            shown = bool(stated) or kind in (Kind.FUSE, Kind.CONTROL, Kind.LOUDSPEAKER)
            yield f"{'' if shown else '# '}[{table}.{_key(part.name)}]{value}"
            yield from stated or [f"# {line}"]
        if parts:
            yield ""


def _stated(table: str, part: Part) -> list[str]:
    """Return the limits that somebody stated, by the keys of the sheet."""
    keys = {stress: key for key, stress in reversed(PART_LIMITS[table].items())}
    return [
        f'{keys[stress]} = "{_quantity(limit.value, STRESSES[stress])}"'
        for stress, limit in part.limits.items()
        if limit.source == SOURCE and stress in keys
    ]


def _key(name: str) -> str:
    return name if _BARE.fullmatch(name) else _text(name)


def _text(value: str) -> str:
    """Return a TOML string."""
    escaped = value.replace("\\", "\\\\").replace('"', '\\"')
    return '"' + _CONTROL.sub(lambda m: f"\\u{ord(m[0]):04x}", escaped) + '"'


def _comment(text: str) -> str:
    return _CONTROL.sub(" ", text)


def _quantity(value: float, unit: str) -> str:
    """Return a number that loses nothing, in the unit without a prefix."""
    return f"{value:.9g} {unit}"
