"""What else to know of a replacement: ripple, pulses, first capacitor, mounting, cans."""

from __future__ import annotations

from collections.abc import Mapping

from stress.circuit.circuit import Circuit, Position
from stress.parts.style import Style
from stress.study.replacement_mounting import (
    CASE_RULE,
    FOIL_RULE,
    can_of,
    metal_case,
    outer_foil,
)
from stress.study.replacement_style import PULSES
from stress.study.reservoir import rectifiers_of, table_limit
from stress.study.result import PositionStress, Working
from stress.text.figure import figure

PULSE_SLOPE = 5e6  # V/s, half of what plain film stands; less needs no word


def ripple_note(rms_A: float, frequency_Hz: float | None, *, needed_A: float) -> str:
    """Return the ripple rating to look for, in words."""
    at = f" (strongest at {figure(frequency_Hz, 'Hz')})" if frequency_Hz else ""
    return (
        f"ripple {figure(rms_A, 'A')} rms{at}: ask for {figure(needed_A, 'A')} or more at 100 Hz, "
        "or the rating at its own frequency by the maker's multipliers"
    )


def pulse_note(position: Position, lasting: Mapping[str, PositionStress], *, ac_V: float) -> str:
    """Return pulse slope, peak current and alternating voltage, where they matter."""
    if not lasting or position.style.electrolytic:
        return ""
    slope = max(stress.slope_V_per_s for stress in lasting.values())
    peak = max(stress.peak_A for stress in lasting.values())
    if position.role not in PULSES and slope < PULSE_SLOPE:
        return ""
    return (
        f"pulses: dv/dt {slope * 1e-6:.3g} V/µs, peak current {figure(peak, 'A')}, alternating "
        f"voltage {figure(ac_V, 'V')} rms as a sine of the same swing"
    )


def reservoir_limit(position: Position, *, circuit: Circuit) -> tuple[float | None, str]:
    """Return the largest value behind a rectifier of the type table, and what it rests on.

    What is there already is not called too large: the peak current decides, simulated.
    """
    limit_F, source = table_limit(rectifiers_of(position, circuit=circuit))
    if limit_F is None:
        return None, ""
    value_F = position.value_F or 0.0
    if value_F > limit_F * 1.001:
        return value_F, (
            f"the {figure(value_F, 'F')} that is there is more than the largest first capacitor of "
            f"{figure(limit_F, 'F')} ({source}): fit no more than that, and judge by the "
            "rectifier's peak current"
        )
    return limit_F, f"largest first capacitor {figure(limit_F, 'F')} ({source})"


def mounting_notes(
    position: Position, *, circuit: Circuit, style: Style, working: Working | None
) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """Return notes on how it goes in, and the rules they rest on."""
    notes, rules = [], []
    foil = outer_foil(position, circuit=circuit, style=style.name)
    if foil:
        notes.append(foil)
        rules.append(FOIL_RULE)
    if style.polar and working is not None:
        notes.append(_case(position, circuit=circuit, working=working))
        rules.append(CASE_RULE)
    sections = can_of(position, circuit=circuit)
    if sections:
        others = ", ".join(other.name for other in sections if other.name != position.name)
        notes.append(
            f"a section of can {position.can} with {others}: one part with all sections, each for "
            "its own voltage and with the same common, or single parts below the chassis with "
            "the can left in place, disconnected"
        )
    return tuple(notes), tuple(rules)


def _case(position: Position, *, circuit: Circuit, working: Working) -> str:
    nominal = working.positions.get(position.name, {}).get("nominal")
    plus = position.plus
    if plus is None:
        plus = 1 if nominal is not None and nominal.dc_V < 0.0 else 0
    minus = position.nodes[1 - plus]
    can = next((can for can in circuit.sheet.cans if can.name == position.can), None)
    if can is not None and can.case is not None:
        minus = can.case
    return metal_case(
        position,
        circuit=circuit,
        minus=minus,
        volts=working.nodes.get(minus, {}).get("nominal"),
    )
