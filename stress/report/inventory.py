"""What `capstress check` prints: parts, positions, sources, what was assumed and what is wrong."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from textwrap import wrap

from stress.circuit.circuit import Circuit, Kind, Part, Position
from stress.finding import Finding
from stress.parts.limit import STRESSES
from stress.text.figure import figure
from stress.text.span import SourceError

NAMED = (Kind.TUBE, Kind.RECTIFIER, Kind.TRANSISTOR, Kind.DIODE)
LISTED = (Kind.WINDING, Kind.FUSE, Kind.CONTROL, Kind.LOUDSPEAKER)
PLURALS = {
    Kind.TUBE: "Tubes",
    Kind.RECTIFIER: "Rectifier tubes",
    Kind.TRANSISTOR: "Transistors",
    Kind.DIODE: "Diodes",
    Kind.WINDING: "Windings",
    Kind.FUSE: "Fuses",
    Kind.CONTROL: "Controls",
    Kind.LOUDSPEAKER: "Loudspeakers",
}
LEAST_WIDTH = 40
MOST_NODES = 12


def inventory(
    circuit: Circuit, *, errors: Sequence[SourceError] = (), width: int = 80
) -> Iterator[str]:
    """Yield the lines of an inventory, without control codes.

    Args:
        circuit: As far as it could be read.
        errors: What the sheet or the values lack.
        width: Of the terminal.
    """
    width = max(width, LEAST_WIDTH)
    for line in _lines(circuit, errors, width):
        yield "\n".join(_clean(part) for part in line.split("\n"))


def _clean(text: str) -> str:
    """Return a text without what a terminal would obey; a name in a netlist may hold it."""
    return "".join(c if c.isprintable() or c == "\t" else "�" for c in text)


def _amount(value: float | None, unit: str, *, missing: str) -> str:
    return missing if value is None else figure(value, unit)


def _lines(circuit: Circuit, errors: Sequence[SourceError], width: int) -> Iterator[str]:
    netlist = circuit.netlist
    yield from _item(circuit.name, "", width, indent=0)
    sheet = f"part sheet {circuit.sheet.path}" if circuit.sheet.path else "no part sheet"
    yield from _item(f"{netlist.path}, dialect {netlist.dialect}; {sheet}", "", width, indent=0)

    yield from _head(f"Capacitors: {_count(len(circuit.positions), 'position')}")
    for position in circuit.positions:
        yield from _position(position, width)
    for kind in NAMED:
        parts = [part for part in circuit.parts if part.kind is kind]
        if parts:
            yield from _head(PLURALS[kind])
        for part in parts:
            yield from _item(_pins(part), part.name, width)
    for kind in LISTED:
        parts = [part for part in circuit.parts if part.kind is kind]
        if parts:
            yield from _head(PLURALS[kind])
            yield from _item("; ".join(_plain_part(part) for part in parts), "", width)
    yield from _resistors(circuit, width)
    yield from _sources(circuit, width)
    yield from _listed("Devices and blocks", circuit.decisions, width)
    yield from _listed("Assumed", circuit.assumed, width)
    uses = [f"{use.name}: {use.text}; {use.tests}" for use in circuit.uses]
    yield from _listed("Conditions on offer", uses, width)
    ignored = [f"{i.span.file}:{i.span.line}: {i.what}" for i in netlist.ignored]
    yield from _listed("Read and set aside", ignored, width)
    yield from _listed("Read with a notice", map(_notice, netlist.notices), width)
    yield from _listed(
        "To know before anything is simulated", map(_finding, circuit.findings), width
    )
    yield from _obstacles((*netlist.obstacles, *errors), width)


def _head(text: str) -> Iterator[str]:
    yield ""
    yield text


def _listed(title: str, items: Iterable[str], width: int) -> Iterator[str]:
    lines = list(items)
    if lines:
        yield from _head(title)
    for line in lines:
        yield from _item(line, "", width)


def _item(text: str, name: str, width: int, *, indent: int = 2) -> Iterator[str]:
    """Wrap a text behind a name, with the lines after the first set in."""
    first = " " * indent + (f"{name:<5} " if name else "")
    rest = " " * (indent + (6 if name else 2 if indent else 0))
    for line in wrap(
        text, width, initial_indent=first, subsequent_indent=rest, break_on_hyphens=False
    ) or [first]:
        yield line.rstrip()


def _position(p: Position, width: int) -> Iterator[str]:
    role = p.role.value
    text = p.role_text if p.role_text.startswith(role) else f"{role}: {p.role_text}"
    yield from _item(text, p.name, width)
    value = _amount(p.value_F, "F", missing="value missing")
    rated = _amount(p.rated_V, "V", missing="rating not known")
    plus = "" if p.plus is None or not p.style.polar else f", plus at {p.nodes[p.plus]}"
    source = "" if p.style_source == "sheet" else f" ({p.style_source})"
    can = f", section of {p.can}" if p.can else ""
    text = f"{value}, {rated}, {p.style.name}{source}{plus}{can}"
    text += f"; nodes {p.nodes[0]} and {p.nodes[1]}"
    yield from wrap(text, width, initial_indent=" " * 8, subsequent_indent=" " * 8)


def _pins(part: Part) -> str:
    pins = ", ".join(f"{role} {node}" for role, node in part.pins.items())
    type_ = part.type or "type not known"
    shown = f"{type_}: {pins}"
    if part.kind in (Kind.TUBE, Kind.RECTIFIER):
        shown += f"; pins by {part.pins_source}"
    if part.envelope and part.envelope != part.name:
        shown += f"; in the envelope {part.envelope}"
    if part.limits:
        limits = (
            f"{name} {figure(limit.value, STRESSES[name])}" for name, limit in part.limits.items()
        )
        return f"{shown}; limits: {', '.join(limits)}"
    return f"{shown}; no limits known"


def _plain_part(part: Part) -> str:
    shown = part.name
    if part.kind is Kind.WINDING:
        copper = _amount(part.resistance_ohm, "ohm", missing="no resistance drawn")
        shown += f" {_amount(part.value, 'H', missing='value missing')}, {copper}"
    elif part.value is not None:
        shown += f" {figure(part.value, 'ohm')}"
    return shown


def _resistors(circuit: Circuit, width: int) -> Iterator[str]:
    parts = [part for part in circuit.parts if part.kind is Kind.RESISTOR]
    if not parts:
        return
    assumed = [p for p in parts if any(limit.assumed for limit in p.limits.values())]
    yield from _head(f"Resistors: {len(parts)}")
    if assumed:
        limit = next(iter(assumed[0].limits.values()))
        few = ", ".join(p.name for p in assumed[:12]) + (" …" if len(assumed) > 12 else "")
        text = (
            f"{len(assumed)} without a rating in the sheet: {figure(limit.value, 'W')}, "
            f"{limit.source}: {few}"
        )
        yield from _item(text, "", width)


def _sources(circuit: Circuit, width: int) -> Iterator[str]:
    yield from _head("Sources")
    line = circuit.line
    if line.sources:
        text = (
            f"line: {', '.join(line.sources)}; {figure(line.nominal_V, 'V')} nominal, "
            f"{figure(line.high_V, 'V')} high, {figure(line.low_V, 'V')} low"
        )
        yield from _item(text, "", width)
    else:
        yield from _item("no line; the circuit runs on its own sources", "", width)
    if circuit.signals:
        yield from _item(f"signals, mute unless driven: {', '.join(circuit.signals)}", "", width)
    if circuit.gates:
        yield from _item(
            f"gates, and what power is drawn from: {', '.join(circuit.gates)}", "", width
        )
    period = "none, direct voltages only"
    if circuit.period_s is not None:
        period = f"{figure(circuit.period_s, 's', digits=5)}"
    yield from _item(f"period: {period}; heaters in {circuit.heaters}", "", width)
    for what, nodes in (
        ("connected to the line", circuit.line_connected),
        ("can be touched", circuit.touchable),
    ):
        if nodes:
            few = sorted(nodes)[:MOST_NODES]
            more = " …" if len(nodes) > MOST_NODES else ""
            yield from _item(f"{what}: {', '.join(few)}{more}", "", width)


def _notice(finding: Finding) -> str:
    at = f"{finding.span}: " if finding.span is not None else ""
    return f"{at}{finding.text}" + (f" ({finding.action})" if finding.action else "")


def _finding(finding: Finding) -> str:
    text = f"{finding.where}, {finding.severity.value.replace('-', ' ')}: {finding.text}"
    return text + (f" — {finding.action}" if finding.action else "")


def _obstacles(errors: Sequence[SourceError], width: int) -> Iterator[str]:
    if not errors:
        yield ""
        yield from _item("Nothing stands in the way of a simulation.", "", width, indent=0)
        return
    yield from _head(f"{_count(len(errors), 'obstacle')} to a simulation:")
    for error in errors:
        yield str(error)


def _count(number: int, what: str) -> str:
    return f"{number} {what}" if number == 1 else f"{number} {what}s"
