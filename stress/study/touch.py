"""Line positions: the safety class they need, and the current through a person who touches.

The current is computed through a network that stands for the body, with everything between
the line and what can be touched counted, at full line voltage: that is the worse plug
polarity with the power switch open, where the capacitors of both sides of the line add up.

Networks and limits:

- 1500 Ω ∥ 0.15 µF, 0.75 V across it read as 0.5 mA; 0.5 mA for portable, 0.75 mA for
  stationary equipment: ANSI C101.1 [memory H];
- 500 Ω in series with 1500 Ω ∥ 0.22 µF, the voltage across the 500 Ω weighted by
  10 kΩ and 0.022 µF: IEC 60990, perception and reaction [memory H]; 0.5 mA rms as ES1 of
  IEC 62368-1, table 4 [memory H];
- classes X and Y: IEC 60384-14 [read second-hand].
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass, field
from math import pi, sqrt

import numpy as np

from stress.circuit.circuit import Circuit, Position, Role
from stress.netlist.flat import Element
from stress.study.result import Working
from stress.text.unit import unit

LIMIT_A = 0.5e-3
LIMIT_SOURCE = "0.5 mA: ANSI C101.1 portable, IEC 62368-1 table 4 ES1 [memory H]"
VALUE_TOLERANCE = 0.20  # code M, the usual one of class Y parts
# A resistor below this from a pole of the line to ground is the earth of the service, which the
# equipment does not hold: nobody builds in what would pass a tenth of an ampere to a person.
EARTH_OHM = 1000.0
_LEAST_SIEMENS = 1e-12  # ties down what nothing else does


@dataclass(frozen=True, slots=True, kw_only=True)
class Body:
    """A network that stands for a person, and how its voltage is read as a current."""

    name: str
    series_ohm: float = field(metadata=unit("ohm"))  # carries the current that is read; 0: none
    shunted_ohm: float = field(metadata=unit("ohm"))
    shunt_F: float = field(metadata=unit("F"))
    filter_s: float = field(default=0.0, metadata=unit("s"))

    def impedance_ohm(self, frequency_Hz: float) -> complex:
        """Return what a source sees."""
        w = 2.0 * pi * frequency_Hz
        return self.series_ohm + self.shunted_ohm / (1 + 1j * w * self.shunted_ohm * self.shunt_F)

    def reading(self, frequency_Hz: float) -> float:
        """Return what is read over what flows."""
        w = 2.0 * pi * frequency_Hz
        if self.series_ohm:
            return 1.0 / abs(1 + 1j * w * self.filter_s)
        return abs(self.impedance_ohm(frequency_Hz)) / self.shunted_ohm


ANSI = Body(
    name="ANSI C101.1, 1500 Ω ∥ 0.15 µF", series_ohm=0.0, shunted_ohm=1500.0, shunt_F=0.15e-6
)
IEC = Body(
    name="IEC 60990, perception and reaction",
    series_ohm=500.0,
    shunted_ohm=1500.0,
    shunt_F=0.22e-6,
    filter_s=10e3 * 0.022e-6,
)
BODIES = (ANSI, IEC)


@dataclass(frozen=True, slots=True, kw_only=True)
class Touch:
    """The touch current of the equipment, and what one position may have.

    Attributes:
        line_V, frequency_Hz: What it was computed at.
        plain_A: 2πfCV of this position alone.
        reading_A: Through the worse body network, everything in parallel counted.
        others_A: The same without this position.
        body: The network that read more.
        value_max_F: The largest capacitance here that keeps the reading under the limit, or
            0 where the others alone pass it.
        earths: Resistors that were taken for the earth of the service and not counted.
    """

    line_V: float = field(metadata=unit("V"))
    frequency_Hz: float = field(metadata=unit("Hz"))
    plain_A: float = field(metadata=unit("A"))
    reading_A: float = field(metadata=unit("A"))
    others_A: float = field(metadata=unit("A"))
    body: str
    value_max_F: float = field(metadata=unit("F"))
    earths: tuple[str, ...] = ()


def safety_class(
    position: Position, *, circuit: Circuit, working: Working | None = None
) -> str | None:
    """Return "X", "Y" or None: the class of IEC 60384-14 that the position needs.

    Y from a line-connected node to one that can be touched; X where the whole line voltage
    stands across it. On a hot chassis line to B- is X, and B- to case, antenna or earth is Y.
    """
    first, second = position.nodes
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


def line_frequency_Hz(circuit: Circuit) -> float:
    """Return the frequency of the line, 60 Hz where the netlist does not tell."""
    names = {name.lower() for name in circuit.line.sources}
    for element in circuit.netlist.elements:
        if element.name.lower() in names and element.wave and element.wave.kind == "sin":
            return float(element.wave.values[2])
    return 60.0


def plain_A(value_F: float, *, line_V: float, frequency_Hz: float) -> float:
    """Return 2πfCV, in ampere rms."""
    return 2.0 * pi * frequency_Hz * value_F * line_V


def read_A(source_ohm: complex, *, line_V: float, frequency_Hz: float) -> tuple[float, str]:
    """Return the worst reading of the body networks behind an impedance, and which it is."""
    return max(
        (
            line_V
            / abs(source_ohm + body.impedance_ohm(frequency_Hz))
            * body.reading(frequency_Hz),
            body.name,
        )
        for body in BODIES
    )


def touch(position: Position, *, circuit: Circuit, limit_A: float = LIMIT_A) -> Touch | None:
    """Return the touch current at high line, or None where no line is known.

    Args:
        position: A position of class Y.
        circuit: With the line, what is connected to it and what can be touched.
        limit_A: The published limit, rms.
    """
    if not circuit.line.sources or position.value_F is None:
        return None
    line_V, hertz = circuit.line.high_V, line_frequency_Hz(circuit)
    # What the role says is line and chassis counts even where the sheet does not name it.
    live, reach = set(circuit.line_connected), set(circuit.touchable)
    if position.role is Role.LINE_CHASSIS:
        reach |= {node for node in position.nodes if node not in live}
    live -= reach
    earths = service_earths(circuit)
    counted = [element for element in circuit.netlist.elements if element.name not in earths]

    def reading(value_F: float) -> tuple[float, str]:
        admittance = _between(
            counted,
            live=live,
            reach=reach,
            frequency_Hz=hertz,
            changed={position.name.lower(): value_F},
        )
        ohm = 1.0 / admittance if admittance else complex(1e15)
        return read_A(ohm, line_V=line_V, frequency_Hz=hertz)

    now, body = reading(position.value_F)
    others, _ = reading(0.0)
    return Touch(
        line_V=line_V,
        frequency_Hz=hertz,
        plain_A=plain_A(position.value_F, line_V=line_V, frequency_Hz=hertz),
        reading_A=now,
        others_A=others,
        body=body,
        value_max_F=_largest(lambda value_F: reading(value_F)[0], limit_A),
        earths=earths,
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


def _between(
    elements: Iterable[Element],
    *,
    live: set[str],
    reach: set[str],
    frequency_Hz: float,
    changed: dict[str, float],
) -> complex:
    """Return the admittance from the line to what can be touched, in siemens.

    All line-connected nodes are one node, all that can be touched another; in between, the
    resistors, capacitors and inductors by nodal analysis. Tubes and semiconductors do not
    count: they are cold, and what they add is less than the tolerance of a capacitor.
    """
    w = 2.0 * pi * frequency_Hz
    branches: list[tuple[str, str, complex]] = []
    for element in elements:
        if len(element.nodes) < 2:
            continue
        value = changed.get(element.name.lower(), element.value)
        nodes = [
            "line" if node in live else "touch" if node in reach else node
            for node in element.nodes[:2]
        ]
        if nodes[0] == nodes[1] or value is None:
            continue
        if element.letter == "R" and value > 0.0:
            branches.append((nodes[0], nodes[1], complex(1.0 / value)))
        elif element.letter == "C":
            branches.append((nodes[0], nodes[1], 1j * w * value))
        elif element.letter == "L" and value > 0.0:
            branches.append((nodes[0], nodes[1], 1.0 / (1j * w * value)))
        elif element.letter == "V" and element.wave is None and not value:
            branches.append((nodes[0], nodes[1], complex(1e6)))
    order = sorted({node for first, second, _ in branches for node in (first, second)} - {"line"})
    if "touch" not in order or not any("line" in branch[:2] for branch in branches):
        return 0j
    row = {node: number for number, node in enumerate(order)}
    matrix = np.eye(len(order), dtype=np.complex128) * _LEAST_SIEMENS
    driven = np.zeros(len(order), dtype=np.complex128)
    for first, second, siemens in branches:
        for node, other in ((first, second), (second, first)):
            if node == "line":
                continue
            matrix[row[node], row[node]] += siemens
            if other == "line":
                driven[row[node]] += siemens
            else:
                matrix[row[node], row[other]] -= siemens
    # With 1 V on the line and what can be touched held at 0 V, the current into it.
    free = [number for number, node in enumerate(order) if node != "touch"]
    held = row["touch"]
    total = driven[held]
    if free:
        voltages = np.linalg.solve(matrix[np.ix_(free, free)], driven[free])
        total = total - matrix[held, free] @ voltages
    return complex(total)
