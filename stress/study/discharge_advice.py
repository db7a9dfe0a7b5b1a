"""What to do after switching off, in order; common practice unless a source stands beside it."""

from __future__ import annotations

from collections.abc import Sequence

from stress.circuit.circuit import Circuit, Kind
from stress.study.discharge_law import resistor
from stress.study.discharge_result import POWER_V, Charge
from stress.text.figure import figure

NO_PATH_OHM = 100e6  # more than this is no bleed path


def no_bleed(charge: Charge) -> bool:
    """Tell whether nothing but its own leakage empties a position that can hurt."""
    past = charge.bleed_ohm
    return past is not None and past > NO_PATH_OHM and charge.start_V > charge.class_V[0]


def advice(charges: Sequence[Charge]) -> tuple[str, ...]:
    """Return the steps from the plug to the first touch."""
    found = [
        "Switch off, pull the plug, wait. Bleeders fail open and their times are promises of a "
        "drawing: measure.",
        "Try the meter on a known source, measure every position across its own terminals, then "
        "try the meter again on the known source.",
    ]
    held = [c for c in charges if c.resistor is not None]
    if held:
        together = sum(c.value_F for c in held)
        r = resistor(together, max(c.start_V for c in held))
        pieces = f"{r.pieces} in series of together " if r.pieces > 1 else ""
        found.append(
            f"Discharge what is above {figure(POWER_V, 'V')} through {pieces}"
            f"{figure(r.ohm, 'ohm')}, {figure(r.rated_W, 'W')}, for {figure(r.rated_V, 'V')}, on "
            "insulated leads clipped on with one hand; were all of them joined, it would take "
            f"{figure(r.energy_J, 'J')} and {figure(r.seconds, 's', digits=2)} down to "
            f"{figure(r.until_V, 'V')}. Never with a screwdriver."
        )
    floating = [c.position for c in charges if c.floating]
    if floating:
        found.append(
            f"{', '.join(floating)}: no way to the chassis; measure and discharge across the "
            "part's own terminals, for both may read nothing against the chassis."
        )
    found.append(
        "Measure again after ten minutes: dielectric absorption brings part of the charge back. "
        "Leave a shorting lead on while you work."
    )
    return tuple(found)


def cautions(circuit: Circuit) -> tuple[str, ...]:
    """Return what holds charge or danger that no netlist shows."""
    found = [
        "The figures are those of the drawing with every part healthy; local codes and licensed "
        "practice come first."
    ]
    if any(part.kind is Kind.TUBE for part in circuit.parts):
        found.append(
            "Tubes conduct while they are hot, for some ten seconds after switching off; what is "
            "left by then falls as with tubes cold."
        )
    if (circuit.sheet.equipment.kind or "").lower() == "television":
        found.append(
            "The picture tube's anode keeps its charge for days and no netlist holds it: "
            "discharge it to its own outer coating through a resistor, twice."
        )
    return tuple(found)
