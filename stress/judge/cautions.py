"""What can hurt the reader, by what the circuit is.

The usual precautions of the trade (common practice); local codes and licensed practice come first.
"""

from __future__ import annotations

from stress.circuit.circuit import Circuit, Kind
from stress.study.result import Working
from stress.text.figure import figure

ALWAYS = (
    "High voltage kills. Nothing here is leave to work on live equipment: local codes and licensed "
    "practice come first.",
    "Capacitors keep their charge after switching off. Disconnect, wait, discharge through a "
    "resistor on insulated leads, and measure every one before touching it.",
    "Clip the meter on with the power off, read with one hand away, switch off again. Work with "
    "another person near who knows where the switch is.",
)
HAZARDOUS_V = 60.0  # DC, the ES1 limit of IEC 62368-1 (from memory, to be confirmed)
LETHAL_J = 1.0  # at 100 V and more, NFPA 70E article 360 (from memory, to be confirmed)


def cautions(circuit: Circuit, *, working: Working) -> tuple[str, ...]:
    """Return the cautions, the special ones of this equipment first."""
    special = []
    if "0" in circuit.line_connected:
        special.append(
            "The chassis or common negative is joined to the line: use an isolation transformer, "
            "and remember that a residual-current device does not protect behind one."
        )
    elif circuit.line_connected or alternates(circuit):
        special.append("The line side is live even with the set switched off.")
    highest = max((s.peak_V for by in working.positions.values() for s in by.values()), default=0.0)
    if highest > HAZARDOUS_V:
        special.append(f"Up to {figure(highest, 'V')} stands across its capacitors.")
    stored = {
        p.name: 0.5 * p.value_F * max(s.peak_V for s in by.values()) ** 2
        for p in circuit.positions
        if p.value_F and (by := working.positions.get(p.name))
    }
    dangerous = {name: joule for name, joule in stored.items() if joule >= LETHAL_J}
    if dangerous:
        names = ", ".join(f"{name} {figure(joule, 'J')}" for name, joule in dangerous.items())
        special.append(f"Stored energy that can kill: {names}.")
    if any("mercury" in part.type.lower() or part.type == "83" for part in circuit.parts):
        special.append("A mercury-vapour rectifier is a glass of poison: do not break it.")
    if any(part.kind is Kind.DIODE and "selen" in part.type.lower() for part in circuit.parts):
        special.append(
            "A burning selenium stack gives off poisonous fumes: switch off, air the room."
        )
    if any(p.style.name == "paper-oil" for p in circuit.positions):
        special.append("Old oil-filled capacitors may hold PCB: gloves, and proper disposal.")
    return (*special, *ALWAYS)


def alternates(circuit: Circuit) -> bool:
    """Tell whether a line source alternates; a battery that stands for the line does not."""
    sources = {name.lower() for name in circuit.line.sources}
    return any(e.name.lower() in sources and e.wave for e in circuit.netlist.elements)
