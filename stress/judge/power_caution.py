"""What can hurt whoever powers it for the first time, beside the usual cautions.

Common practice; local codes and licensed practice come first.
"""

from __future__ import annotations

from stress.circuit.circuit import Circuit, Kind, Role
from stress.judge.cautions import alternates, cautions
from stress.parts import types
from stress.study.result import Working
from stress.text.figure import figure

HIGH_V = 1000.0


def power_cautions(circuit: Circuit, *, working: Working) -> tuple[str, ...]:
    """Return the cautions of a first power-up, those of the review first."""
    found = list(cautions(circuit, working=working))
    if alternates(circuit):
        found.append(
            "An isolation transformer stands before the variable one, which isolates nothing; a "
            "residual-current device does not protect behind it."
        )
    bridges = [p.name for p in circuit.positions if p.role is Role.LINE_CHASSIS]
    if bridges:
        found.append(
            f"{', '.join(bridges)}: from the line to what can be touched; touch nothing metal "
            "while it is powered, and measure from the case to earth first."
        )
    highest = max((s.peak_V for by in working.positions.values() for s in by.values()), default=0.0)
    if highest > HIGH_V:
        found.append(
            f"High-voltage supply, {figure(highest, 'V')}: no handheld probe; a divider clipped "
            "on dead, or do not measure."
        )
    gas = {e.gas for p in circuit.parts if p.type and (e := types.find(p.type)) is not None}
    if "mercury" in gas and not any("mercury" in text.lower() for text in found):
        found.append(
            "Mercury-vapour rectifiers: if one breaks, leave, air the room, no vacuum cleaner."
        )
    if _selenium(circuit) and not any("selenium" in text.lower() for text in found):
        found.append("A failing selenium stack smokes poison: switch off, leave, air the room.")
    if (circuit.sheet.equipment.kind or "").lower() == "television":
        found.append(
            "Picture tube: it can implode, its anode keeps a charge that no netlist holds, and "
            "above about 20 kV it and its regulator give X-rays."
        )
    return tuple(dict.fromkeys(found))


def _selenium(circuit: Circuit) -> bool:
    diodes = {p.name.lower() for p in circuit.parts if p.kind is Kind.DIODE}
    marked = any("selen" in p.type.lower() for p in circuit.parts)
    return marked or any(
        e.name.lower() in diodes and "selen" in e.model.lower() for e in circuit.netlist.elements
    )
