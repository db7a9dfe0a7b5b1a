"""When the equipment no longer works as meant though nothing burns.

Judged: the bias and the cathode current of every tube, the voltage of AVC, grid-leak and detector
lines, direct voltage across a volume or tone control. A voltage counts as moved when it moves by
the share of the sheet (a tenth) of its healthy value, or of 0.5 V where that is larger: on a line
that rests at zero a tenth means nothing (common practice).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import log

from stress.circuit.circuit import Circuit, Kind, Role
from stress.engine.case import Waves
from stress.engine.twin import metered_pins
from stress.text.figure import figure

SMALLEST_SCALE_V = 0.5
SMALLEST_CATHODE_A = 1e-5
CONTROL_V = 0.1  # more direct voltage across a control makes it scratch (common practice)
LINES = frozenset({Role.AVC, Role.GRID_LEAK, Role.DETECTOR})


@dataclass(frozen=True, slots=True, kw_only=True)
class Sign:
    """One thing that tells how the equipment works: its value, how far it may move, and what is
    said once it has."""

    text: str
    value: float
    allowed: float


def signs(circuit: Circuit, waves: Waves, *, removed: frozenset[str]) -> Mapping[str, Sign]:
    """Return what is watched, by a key that is the same in every case."""
    share = circuit.sheet.functional_share
    found: dict[str, Sign] = {}
    for part in circuit.parts:
        if part.kind is Kind.CONTROL:
            volts = waves.mean(waves.voltage(part.pins["plus"], part.pins["minus"]))
            text = f"more than {figure(CONTROL_V, 'V')} of direct voltage lies across {part.name}"
            found[f"{part.name} V"] = Sign(text=text, value=volts, allowed=CONTROL_V)
        if part.kind is not Kind.TUBE or {e.lower() for e in part.elements} <= removed:
            continue
        for ending in ("", "2", "3"):
            grid, cathode = part.pins.get(f"grid{ending}"), part.pins.get(f"cathode{ending}")
            cathode = cathode or part.pins.get("cathode", "0")
            if grid is not None and grid != cathode:
                bias = waves.mean(waves.voltage(grid, cathode))
                found[f"{part.name} bias{ending}"] = _volts(f"the bias of {part.name}", bias, share)
        amps = sum(waves.mean(waves.current(f"{part.name}#{p}")) for p in metered_pins(part))
        if amps > SMALLEST_CATHODE_A:
            text = f"the cathode current of {part.name} is off by more than {100 * share:g} %"
            found[f"{part.name} A"] = Sign(text=text, value=amps, allowed=share * amps)
    for position in circuit.positions:
        if position.role in LINES:
            volts = waves.mean(waves.voltage(*position.nodes))
            found[f"{position.name} V"] = _volts(f"the voltage at {position.name}", volts, share)
    return found


def _volts(what: str, volts: float, share: float) -> Sign:
    """Return a voltage that may move by a share, of half a volt where it rests at less."""
    allowed = share * max(abs(volts), SMALLEST_SCALE_V)
    by = f"{100 * share:g} %" if abs(volts) >= SMALLEST_SCALE_V else figure(allowed, "V")
    return Sign(text=f"{what} is off by more than {by}", value=volts, allowed=allowed)


def moved(now: Mapping[str, Sign], healthy: Mapping[str, Sign]) -> tuple[float, str]:
    """Return the logarithm of the largest move over what is allowed, and what is said of it."""
    most, text = 1e-9, ""
    for key, sign in healthy.items():
        if key in now:
            share = abs(now[key].value - sign.value) / sign.allowed
            if share > most:
                most, text = share, sign.text
    return log(most), text
