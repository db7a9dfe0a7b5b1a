"""How the first power is given, by what the equipment is; all of it common practice."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from stress.circuit.circuit import Circuit, Kind, Part, Role
from stress.netlist.flat import NOTHING
from stress.parts import types
from stress.study.power_result import Method, Way
from stress.text.figure import figure

SHARES = (0.2, 0.4, 0.6, 0.8, 1.0)
FAST_S = 1e-3  # a period below this is that of a switching supply
BIAS_V = 3.0  # a grid this far below ground, led there by direct current, is fixed bias
DEFLECTION = frozenset(
    {
        *("6BG6G", "6BQ6GT", "6DQ6", "6CD6G", "25BQ6GT", "PL36", "PL81", "PL500", "PL504"),
        *("6W4GT", "6AX4GT", "6AU4GT", "PY81", "PY83", "PY88"),
    }
)
SUPPLY_ROLES = (Role.RESERVOIR, Role.FLYING, Role.SMOOTHING)

ISOLATE = (
    "Isolation transformer first, the variable transformer behind it: a variable transformer "
    "isolates nothing. Behind an isolation transformer a residual-current device does not "
    "protect; one hand, another person near."
)
OHMS = (
    "Plug out, everything discharged and measured: fuse of the stated size, line cord sound, no "
    "short from the line to the case."
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Build:
    """What of the equipment decides the way.

    Attributes:
        switching, vibrator, deflection: What forbids a slow ramp.
        mercury, filament, cathode, silicon: Names of the rectifiers of B+, by their kind.
        fixed_bias: Tube to its grid voltage, volts, nominal.
        series: Whether the heaters are one string.
        hot: Whether the common node is joined to the line.
        fed: Whether there is a line at all.
        direct: Whether it is fed by direct current.
    """

    switching: bool
    vibrator: bool
    deflection: bool
    mercury: tuple[str, ...]
    filament: tuple[str, ...]
    cathode: tuple[str, ...]
    silicon: tuple[str, ...]
    fixed_bias: Mapping[str, float]
    series: bool
    hot: bool
    fed: bool
    direct: bool


def look(circuit: Circuit, *, nodes: Mapping[str, float] = NOTHING) -> Build:
    """Return what the equipment is.

    Args:
        circuit: The equipment.
        nodes: Mean volts of its nodes as it is meant to be run; empty where nothing settled.
    """
    kind = (circuit.sheet.equipment.kind or "").lower()
    fast = circuit.period_s is not None and circuit.period_s < FAST_S
    switches = any(e.letter in "SW" for e in circuit.netlist.elements)
    transistors = any(p.kind is Kind.TRANSISTOR for p in circuit.parts)
    switching = kind == "switch-mode" or (fast and (transistors or switches))
    gated = bool(circuit.gates) and switches
    waves = [e.wave for e in circuit.netlist.elements if _is_line(circuit, e.name)]
    rectifiers = [(p, _warm_up(p)) for p in circuit.parts if p.kind is Kind.RECTIFIER]
    positive = [(p, w) for p, w in rectifiers if not _feeds_bias(circuit, p, nodes)]
    return Build(
        switching=switching,
        vibrator=kind == "vibrator" or (gated and not fast and not switching),
        deflection=kind == "television" or any(p.type.upper() in DEFLECTION for p in circuit.parts),
        mercury=tuple(p.name for p, w in positive if w == "mercury"),
        filament=tuple(p.name for p, w in positive if w == "filament"),
        cathode=tuple(p.name for p, w in positive if w == "cathode"),
        silicon=_silicon(circuit, nodes),
        fixed_bias=_fixed_bias(circuit, nodes),
        series=circuit.heaters == "series",
        hot="0" in circuit.line_connected,
        fed=bool(circuit.line.sources),
        direct=bool(waves) and all(wave is None for wave in waves),
    )


def _is_line(circuit: Circuit, name: str) -> bool:
    return name.lower() in {source.lower() for source in circuit.line.sources}


def _warm_up(part: Part) -> str:
    entry = types.find(part.type) if part.type else None
    if entry is not None and entry.gas == "mercury":
        return "mercury"
    if entry is not None and entry.directly_heated:
        return "filament"
    return part.warm_up


def _feeds_bias(circuit: Circuit, part: Part, nodes: Mapping[str, float]) -> bool:
    """Tell whether a rectifier charges something negative: its plates lie below its cathode's
    ground."""
    cathode = next((n for pin, n in part.pins.items() if pin.startswith("cathode")), "0")
    return cathode == "0" or nodes.get(cathode.lower(), 1.0) < 0.0


def _silicon(circuit: Circuit, nodes: Mapping[str, float]) -> tuple[str, ...]:
    """Return the diodes that charge a positive reservoir."""
    plus = {
        node
        for position in circuit.positions
        if position.role in SUPPLY_ROLES
        for node in position.nodes
        if node != "0" and nodes.get(node.lower(), 1.0) > 0.0
    }
    return tuple(
        part.name
        for part in circuit.parts
        if part.kind is Kind.DIODE and part.pins.get("cathode", "") in plus
    )


def _fixed_bias(circuit: Circuit, nodes: Mapping[str, float]) -> Mapping[str, float]:
    """Return the tubes whose grid a bias supply holds, and its voltage.

    A way of resistors and windings leads from the grid to a bias filter or a steady negative
    source; the grid stands well below ground.
    """
    supply = {
        node
        for position in circuit.positions
        if position.role is Role.BIAS_FILTER
        for node in position.nodes
        if node != "0"
    }
    for e in circuit.netlist.elements:
        if e.letter == "V" and e.wave is None and (e.value or 0.0) <= -BIAS_V:
            supply |= {e.nodes[0]} if e.nodes[1] == "0" else set()
        if e.letter == "V" and e.wave is None and (e.value or 0.0) >= BIAS_V:
            supply |= {e.nodes[1]} if e.nodes[0] == "0" else set()
    detectors = {
        n for p in circuit.positions if p.role in (Role.AVC, Role.DETECTOR) for n in p.nodes
    }
    found = {}
    for part in circuit.parts:
        if part.kind is not Kind.TUBE:
            continue
        grid, cathode = part.pins.get("grid", "0"), part.pins.get("cathode", "0")
        volts = nodes.get(grid.lower())
        if volts is None or volts > -BIAS_V or nodes.get(cathode.lower(), 0.0) > -volts / 2.0:
            continue
        reached = _led(circuit, grid)
        if reached & supply and not reached & (detectors - {"0"}):
            found[part.name] = volts
    return found


def _led(circuit: Circuit, start: str) -> frozenset[str]:
    """Return the nodes that resistors and windings join to a node, ground not passed."""
    reached, edge = {start}, {start}
    pairs = [e.nodes[:2] for e in circuit.netlist.elements if e.letter in "RL"]
    while edge:
        edge = {n for pair in pairs if edge & set(pair) for n in pair} - reached - {"0"}
        reached |= edge
    return frozenset(reached)


def method(circuit: Circuit, *, nodes: Mapping[str, float] = NOTHING) -> Method:
    """Return the way to the first power, with its reasons; see `look` for the arguments."""
    build = look(circuit, nodes=nodes)
    if build.switching:
        return _switching(circuit, build)
    if build.vibrator:
        return _vibrator(build)
    reasons, before, refused = _reasons(build), list(_before(circuit, build)), []
    if build.deflection:
        refused.append(
            "No slow ramp: below its working voltage the deflection stage loses its drive and "
            "its output tube burns."
        )
        return Method(
            way=Way.LAMP,
            text="Full line through a filament lamp in series, then full line without it; "
            "never a slow ramp.",
            reasons=("a deflection stage lives by its own drive", *reasons),
            before=tuple(before),
            shares=(1.0,),
            lamp=True,
            refused=tuple(refused),
        )
    if not build.fed:
        return Method(
            way=Way.BATTERY,
            text="A bench supply with a current limit in place of the batteries.",
            reasons=("no line feeds it", *reasons),
            before=(OHMS,),
            shares=(1.0,),
        )
    if build.mercury:
        text = (
            "Filaments of the mercury-vapour rectifiers at full voltage first, then the high "
            "voltage from a variable transformer behind an isolation transformer."
        )
        way = Way.FILAMENT_FIRST
        refused.append(
            "No common ramp of filaments and plates: with a cool filament the arc destroys its "
            "coating at the first pulse."
        )
    else:
        text = (
            "Slow ramp by a variable transformer behind an isolation transformer, reading at "
            "every step; never leave a step whose readings are not right."
        )
        way = Way.RAMP
    return Method(
        way=way,
        text=text,
        reasons=reasons,
        before=tuple(before),
        shares=SHARES,
        lamp=True,
        refused=tuple(refused),
    )


def _reasons(build: Build) -> tuple[str, ...]:
    found = []
    if build.mercury:
        found.append(f"{_names(build.mercury)}: mercury vapour, plates only on a hot filament")
    if build.filament:
        found.append(
            f"{_names(build.filament)}: a filament rectifier, B+ appears from about 60 % of the "
            "line, while the other tubes are cold and load nothing"
        )
    if build.cathode:
        found.append(
            f"{_names(build.cathode)}: a cathode-type rectifier, no B+ below about 70 to 80 % "
            "of the line, so nothing re-forms below it"
        )
    if build.silicon:
        found.append(
            f"{_names(build.silicon)}: a dry rectifier, B+ from the first volt on, with nothing "
            "loading it until the tubes are warm"
        )
    if build.fixed_bias:
        found.append(f"{_names(build.fixed_bias)}: fixed bias, lost bias destroys them in seconds")
    if build.series:
        found.append("heaters in one series string")
    if build.hot:
        found.append("the common node is joined to the line")
    return tuple(found)


def _before(circuit: Circuit, build: Build) -> list[str]:
    found = [OHMS, ISOLATE]
    rectifiers = (*build.mercury, *build.filament, *build.cathode)
    if build.series:
        found.append(
            "Series heaters: leave every tube in its socket; one tube out opens the string or, "
            "on a shunt, burns others."
        )
    elif rectifiers:
        found.append(
            f"First with {_names(rectifiers)} out: heaters and transformer alone, full line, "
            "through the lamp; look at heater voltage and at heat in the transformer for ten "
            "minutes. Then put it back."
        )
    elif build.silicon:
        found.append(
            "The rectifier cannot be pulled, B+ is there from the first step on: first with the "
            "output tubes out, as far as the ratings bear the unloaded voltage, then with them."
        )
    if build.mercury:
        found.append(
            "Mercury-vapour rectifiers: filament alone at full voltage for half a minute at "
            "every switch-on, for a quarter of an hour or more after the tube was moved or laid "
            "down, until no mercury clings to plate or filament; only then plate voltage."
        )
    if build.fixed_bias:
        volts = ", ".join(f"{name} {figure(v, 'V')}" for name, v in build.fixed_bias.items())
        out = "" if build.series else " with these tubes out"
        found.append(
            f"Fixed bias: prove it at the sockets before any B+{out}: at full line {volts} at "
            "the grid pin. Only then put them in."
        )
    return found


def _switching(circuit: Circuit, build: Build) -> Method:
    line = circuit.line
    low = line.low_V / line.nominal_V if build.fed and line.low_V else 1.0
    return Method(
        way=Way.DIRECT_CURRENT,
        text="Bench supply of direct current with a current limit, set to the full low-line "
        "voltage at once; a converter takes constant power, so low line means high current.",
        reasons=(
            "a switching converter: its input current rises as its input voltage falls, unless "
            "something regulates before it",
        ),
        before=(
            OHMS,
            "Load every output as the sheet says; measure outputs only, on their own terminals.",
            "Set the current limit to 1.5 times the input current of the first step.",
        ),
        shares=tuple(sorted({low, 1.0})),
        refused=(
            "Never a slow ramp: below its working voltage the switch conducts without being "
            "driven hard, and the input current is at its highest.",
            "No lamp in series: it starves the converter, which then starts and stops.",
        ),
    )


def _vibrator(build: Build) -> Method:
    return Method(
        way=Way.BATTERY,
        text="Current-limited supply at the full battery voltage, switched on at once; first "
        "with the rectifier out.",
        reasons=("a vibrator: below its voltage the reed stands still and its contacts weld",),
        before=(
            OHMS,
            "Replace the buffer capacitor across the secondary before anything else; a leaky "
            "one destroys transformer and contacts.",
        ),
        shares=(1.0,),
        refused=("Never a slow ramp: a reed that does not swing is a short across the primary.",),
    )


def _names(names: tuple[str, ...] | Mapping[str, float]) -> str:
    return ", ".join(names)
