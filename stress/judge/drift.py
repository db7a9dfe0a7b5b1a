"""How far resistors and windings have moved from what is drawn."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from stress.circuit.circuit import Circuit
from stress.parts.reading import Reading
from stress.text.figure import figure


@dataclass(frozen=True, slots=True, kw_only=True)
class Drift:
    """How far a resistor or winding has moved from what is drawn."""

    part: str
    quantity: str  # "resistance" or "inductance"
    measured: float
    drawn: float | None

    def __str__(self) -> str:
        symbol = "ohm" if self.quantity == "resistance" else "H"
        text = f"{self.part} reads {figure(self.measured, symbol)}"
        if self.drawn:
            share = self.measured / self.drawn - 1.0
            text += f", drawn {figure(self.drawn, symbol)} ({share:+.0%})"
        return text


def drifts(rows: Iterable[Reading], *, circuit: Circuit) -> tuple[Drift, ...]:
    """Return every reading of a resistor or winding beside what is drawn, in reading order."""
    drawn = {element.name.lower(): element for element in circuit.netlist.elements}
    copper = {part.name.lower(): part.resistance_ohm for part in circuit.parts}
    found = []
    for row in rows:
        element = drawn.get(row.part.lower())
        if element is None or element.letter not in "RL":
            continue
        if row.resistance_ohm is not None:
            ohm = element.value if element.letter == "R" else copper.get(row.part.lower())
            found.append(_drift(element.name, "resistance", row.resistance_ohm, ohm))
        if row.inductance_H is not None:
            found.append(_drift(element.name, "inductance", row.inductance_H, element.value))
    return tuple(found)


def _drift(part: str, quantity: str, measured: float, drawn: float | None) -> Drift:
    return Drift(part=part, quantity=quantity, measured=measured, drawn=drawn)
