"""Line positions: the safety class they need, and the current through a person who touches.

The current is computed through a network that stands for the body, with everything between
the line and what can be touched counted, at full line voltage: that is the worse plug
polarity with the power switch open, where the capacitors of both sides of the line add up.

Limits: 0.5 mA for portable, 0.75 mA for stationary equipment, ANSI C101.1 [memory H]; 0.5 mA
rms as ES1, IEC 62368-1 table 4 [memory H]. Classes X and Y: IEC 60384-14 [read second-hand].
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from math import pi, sqrt

from stress.circuit.circuit import Circuit, Position, Role
from stress.netlist.flat import Element
from stress.study.result import Working
from stress.study.touch_network import admittance, plain_A, read_A
from stress.text.figure import figure
from stress.text.unit import unit

LIMIT_A = 0.5e-3
LIMIT_SOURCE = "0.5 mA: ANSI C101.1 portable, IEC 62368-1 table 4 ES1 [memory H]"
VALUE_TOLERANCE = 0.20  # code M, the usual one of class Y parts
# A resistor below this from a pole of the line to ground is the earth of the service, which the
# equipment does not hold: nobody builds in what would pass a tenth of an ampere to a person.
EARTH_OHM = 1000.0
# Below this a line is no danger by touch: ES1 of IEC 62368-1, 42.4 V peak [memory H]
HARMLESS_V = 30.0  # rms
NO_PATH_OHM = 1e8  # more passes no current worth naming


@dataclass(frozen=True, slots=True, kw_only=True)
class Touch:
    """The touch current of the equipment, and what one position may have.

    Attributes:
        line_V, frequency_Hz: What it was computed at.
        plain_A: 2πfCV of this position alone.
        reading_A: Through the worse body network, everything as it is counted.
        others_A: The same without this position.
        fixed_A: The same without any position of class Y: what resistors and the rest pass.
        body: The network that read more.
        value_max_F: The largest capacitance here that keeps the reading under the limit. All
            positions of class Y share what the rest leaves: none is cut below another that is
            larger. Where the rest alone passes the limit, what they may have without it.
        resistors: Those straight from the line to what can be touched.
        earths: Resistors that were taken for the earth of the service and not counted.
    """

    line_V: float = field(metadata=unit("V"))
    frequency_Hz: float = field(metadata=unit("Hz"))
    plain_A: float = field(metadata=unit("A"))
    reading_A: float = field(metadata=unit("A"))
    others_A: float = field(metadata=unit("A"))
    fixed_A: float = field(metadata=unit("A"))
    body: str
    value_max_F: float = field(metadata=unit("F"))
    resistors: tuple[str, ...] = ()
    earths: tuple[str, ...] = ()


def safety_class(
    position: Position, *, circuit: Circuit, working: Working | None = None
) -> str | None:
    """Return "X", "Y" or None: the class of IEC 60384-14 that the position needs.

    Y from a line-connected node to one that can be touched; X where the whole line voltage
    stands across it. On a hot chassis line to B- is X, and B- to case, antenna or earth is Y.
    """
    first, second = position.nodes
    if 0.0 < circuit.line.high_V < HARMLESS_V:
        return None
    live = [node in circuit.line_connected for node in position.nodes]
    reach = [node in circuit.touchable for node in position.nodes]
    if (live[0] and reach[1] and not live[1]) or (live[1] and reach[0] and not live[0]):
        return "Y"
    if position.role is Role.LINE_CHASSIS:
        # Both ends on the line: the "chassis" is B- itself, and this is across the line.
        return "X" if all(live) and not any(reach) else "Y"
    if position.role is Role.LINE_ACROSS:
        return "X"
    if not circuit.line.sources or first == second or not all(live):
        return None
    return "X" if working and _bears_the_line(position, circuit, working) else None


def _bears_the_line(position: Position, circuit: Circuit, working: Working) -> bool:
    """Tell whether the whole line voltage stands across it, without a direct part."""
    stress = working.positions.get(position.name, {}).get("nominal")
    if stress is None:
        return False
    peak = circuit.line.nominal_V * sqrt(2.0)
    return abs(stress.dc_V) < 0.1 * peak and 0.9 * peak < stress.peak_V < 1.1 * peak


def line_frequency_Hz(circuit: Circuit) -> float | None:
    """Return the frequency of the line, or None where it does not alternate."""
    names = {name.lower() for name in circuit.line.sources}
    for element in circuit.netlist.elements:
        if element.name.lower() in names and element.wave and element.wave.kind == "sin":
            return float(element.wave.values[2])
    return None


def touch(position: Position, *, circuit: Circuit, limit_A: float = LIMIT_A) -> Touch | None:
    """Return the touch current at high line, or None where no alternating line is known.

    Args:
        position: A position of class Y.
        circuit: With the line, what is connected to it and what can be touched.
        limit_A: The published limit, rms.
    """
    line_V, hertz = circuit.line.high_V, line_frequency_Hz(circuit)
    if hertz is None or position.value_F is None:
        return None
    # What the role says is line and chassis counts even where the sheet does not name it.
    live, reach = set(circuit.line_connected), set(circuit.touchable)
    if position.role is Role.LINE_CHASSIS:
        reach |= {node for node in position.nodes if node not in live}
    live -= reach
    earths = service_earths(circuit)
    counted = [element for element in circuit.netlist.elements if element.name not in earths]
    group = {
        other.name.lower(): other.value_F or 0.0
        for other in circuit.positions
        if other.name == position.name or safety_class(other, circuit=circuit) == "Y"
    }

    def reading(values_F: Mapping[str, float], *, of: Sequence[Element] = counted) -> float:
        siemens = admittance(of, live=live, reach=reach, frequency_Hz=hertz, changed=values_F)
        return read_A(siemens, line_V=line_V, frequency_Hz=hertz)[0]

    own = position.name.lower()
    nothing = dict.fromkeys(group, 0.0)
    fixed_A = reading(nothing)
    shared = counted if fixed_A < limit_A else [e for e in counted if e.name.lower() in group]
    as_is = admittance(counted, live=live, reach=reach, frequency_Hz=hertz, changed=group)
    now_A, body = read_A(as_is, line_V=line_V, frequency_Hz=hertz)
    return Touch(
        line_V=line_V,
        frequency_Hz=hertz,
        plain_A=plain_A(position.value_F, line_V=line_V, frequency_Hz=hertz),
        reading_A=now_A,
        others_A=reading({**group, own: 0.0}),
        fixed_A=fixed_A,
        body=body,
        value_max_F=_largest(
            lambda most_F: reading(
                {
                    name: most_F if name == own else min(value_F, most_F)
                    for name, value_F in group.items()
                },
                of=shared,
            ),
            limit_A,
        ),
        resistors=_between_both(counted, live=live, reach=reach),
        earths=earths,
    )


def _between_both(
    elements: Iterable[Element], *, live: Collection[str], reach: Collection[str]
) -> tuple[str, ...]:
    return tuple(
        f"{element.name} ({figure(element.value or 0.0, 'ohm')})"
        for element in elements
        if element.letter == "R"
        and any(node in live for node in element.nodes)
        and any(node in reach for node in element.nodes)
        and (element.value or 0.0) < NO_PATH_OHM
    )


def service_earths(circuit: Circuit) -> tuple[str, ...]:
    """Return the small resistors from a pole of the line to ground, by name."""
    sources = {name.lower() for name in circuit.line.sources}
    poles = {
        node
        for element in circuit.netlist.elements
        if element.name.lower() in sources
        for node in element.nodes[:2]
    }
    return tuple(
        element.name
        for element in circuit.netlist.elements
        if element.letter == "R"
        and "0" in element.nodes
        and set(element.nodes) & (poles - {"0"})
        and element.value is not None
        and element.value < EARTH_OHM
    )


def what_is_lost(position: Position, *, fitted_F: float) -> str:
    """Return in words what a smaller capacitor than the original costs."""
    if not position.value_F or fitted_F >= position.value_F:
        return ""
    times = position.value_F / fitted_F
    ohm = 1.0 / (2.0 * pi * 1e6 * fitted_F)
    return (
        f"its impedance at 1 MHz rises {times:.1f} times to {ohm:.0f} Ω, so expect a little more "
        "interference from the line and perhaps modulation hum on strong stations; nothing else "
        "depends on it"
    )


def _largest(reading: Callable[[float], float], limit_A: float) -> float:
    """Return the largest capacitance whose reading is at most the limit; 0 where none is."""
    low, high = 0.0, 100e-6
    if reading(low) > limit_A:
        return 0.0
    if reading(high) <= limit_A:
        return high
    for _ in range(60):
        middle = (low + high) / 2.0
        low, high = (middle, high) if reading(middle) <= limit_A else (low, middle)
    return low
