"""The current from the line through a person: body networks, and what lies between.

- 1500 Ω ∥ 0.15 µF, 0.75 V across it read as 0.5 mA: ANSI C101.1 [memory H];
- 500 Ω in series with 1500 Ω ∥ 0.22 µF, the voltage across the 500 Ω weighted by
  10 kΩ and 0.022 µF: IEC 60990, perception and reaction [memory H].
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping
from dataclasses import dataclass, field
from math import pi

import numpy as np

from stress.netlist.flat import Element
from stress.text.unit import unit

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


def plain_A(value_F: float, *, line_V: float, frequency_Hz: float) -> float:
    """Return 2πfCV, in ampere rms."""
    return 2.0 * pi * frequency_Hz * value_F * line_V


def read_A(siemens: complex, *, line_V: float, frequency_Hz: float) -> tuple[float, str]:
    """Return the worst reading of the body networks behind an admittance, and which it is."""
    if not siemens:
        return 0.0, BODIES[0].name
    source_ohm = 1.0 / siemens
    return max(
        (
            line_V
            / abs(source_ohm + body.impedance_ohm(frequency_Hz))
            * body.reading(frequency_Hz),
            body.name,
        )
        for body in BODIES
    )


def admittance(
    elements: Iterable[Element],
    *,
    live: Collection[str],
    reach: Collection[str],
    frequency_Hz: float,
    changed: Mapping[str, float],
) -> complex:
    """Return the admittance from the line to what can be touched, in siemens.

    All line-connected nodes are one node, all that can be touched another; in between, the
    resistors, capacitors and inductors by nodal analysis. Tubes and semiconductors do not
    count: they are cold, and what they add is less than the tolerance of a capacitor.

    Args:
        elements: Of the circuit.
        live, reach: The line-connected nodes, and those that can be touched.
        frequency_Hz: Of the line.
        changed: Capacitances by element name in lower case, instead of the netlist's.
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
