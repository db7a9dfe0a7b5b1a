"""What a fault does to parts whose limit nobody knows: named, with the key that would judge it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from stress.circuit.circuit import Circuit, Kind, Part
from stress.parts.limit import QUANTITIES, STRESSES
from stress.study.limits import Stresses
from stress.text.figure import figure

GROWS = 1.5  # times its healthy stress, from which a part without a limit is worth a word
MOST = 3
# The stress that wears a part of a kind, the least that counts, the table and key of its limit.
ASKED: Mapping[Kind, tuple[tuple[str, float, str], ...]] = {
    Kind.TUBE: (
        ("plate_W", 0.05, "[tubes.{name}] limits = {{ plate_dissipation = \"…\" }}"),
        ("screen_W", 0.05, "[tubes.{name}] limits = {{ screen_dissipation = \"…\" }}"),
    ),
    Kind.RECTIFIER: (("average_A", 1e-3, "[tubes.{name}] limits = {{ current = \"…\" }}"),),
    Kind.WINDING: (("current_A", 1e-3, '[windings.{name}] current = "…"'),),
    Kind.RESISTOR: (("power_W", 0.01, '[resistors.{name}] rated = "…"'),),
    Kind.CONTROL: (("power_W", 0.01, '[controls.{name}] power = "…"'),),
    Kind.LOUDSPEAKER: (("power_W", 0.05, '[loudspeakers.{name}] power = "…"'),),
    Kind.DIODE: (("average_A", 1e-3, '[diodes.{name}] current = "…"'),),
    Kind.TRANSISTOR: (("power_W", 0.01, '[transistors.{name}] power = "…"'),),
    Kind.FUSE: (("current_A", 1e-3, '[fuses.{name}] current = "…"'),),
}  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True)
class Unjudged:
    """A stress that a fault raises and that no known limit judges."""

    part: str
    quantity: str
    healthy: float
    stress: float
    key: str  # of the sheet, that would have it judged

    @property
    def risen(self) -> str:
        """What has risen, from where to where, in words."""
        unit = STRESSES[self.quantity]
        return (
            f"{self.part} {QUANTITIES[self.quantity]} {figure(self.healthy, unit)} to "
            f"{figure(self.stress, unit)}"
        )

    def __str__(self) -> str:
        return f"{self.risen} ({self.key})"


def unjudged(circuit: Circuit, stresses: Stresses, *, healthy: Stresses) -> tuple[Unjudged, ...]:
    """Return the parts without a limit whose stress a fault raises most, the furthest first.

    Args:
        circuit: Whose parts have or lack limits.
        stresses, healthy: With the fault and without, in one condition.
    """
    found = [
        Unjudged(
            part=part.name,
            quantity=name,
            healthy=healthy.get(part.name, {}).get(name, 0.0),
            stress=stress,
            key=key.format(name=part.name),
        )
        for part in circuit.parts
        for name, least, key in _asked(part)
        if (stress := stresses.get(part.name, {}).get(name, 0.0)) >= least
        and stress > GROWS * max(healthy.get(part.name, {}).get(name, 0.0), 0.0)
    ]
    return tuple(sorted(found, key=lambda u: -u.stress / max(u.healthy, 1e-9))[:MOST])


def _asked(part: Part) -> tuple[tuple[str, float, str], ...]:
    return tuple(row for row in ASKED.get(part.kind, ()) if row[0] not in part.limits)


def not_judged(found: tuple[Unjudged, ...]) -> str:
    """Return in words which limits are missing; "" where none is."""
    if not found:
        return ""
    return "not judged, since no limit is known: " + "; ".join(str(each) for each in found)
