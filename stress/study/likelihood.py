"""How likely a fault is: the style's table by age, weighed by the sheet (common practice)."""

from __future__ import annotations

from stress.circuit.circuit import Circuit, Position

YEAR = 2026  # against which the age of a part with a stated year is taken
LEAST = 1e-3  # where the table has no fault of this kind: one in a thousand


def likelihood(circuit: Circuit, position: Position, fault: str) -> float:
    """Return the share of parts of this style and age that are found with a fault, at most 1."""
    entry = circuit.sheet.capacitors.get(position.name.lower())
    years = float(YEAR - entry.year) if entry is not None and entry.year else None
    weight = circuit.sheet.likelihood.get(position.style.name, 1.0)
    return min(max(position.style.fault_share(fault, years=years), LEAST) * weight, 1.0)
