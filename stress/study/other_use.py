"""The conditions of other uses: how they are asked for, and how each is run."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

from stress.circuit.circuit import Circuit, Use
from stress.study.result import Condition

# What a use is called at the highest line voltage, and there with the tubes cold.
ENDINGS = {" high": " at high line", " cold": " and the tubes cold at high line"}
WORDS = {
    "standby": "with the standby switch open",
    "speaker-out": "with the loudspeaker unplugged",
    "primary-out": "with the output primary unplugged",
    "field-out": "with the field coil unplugged",
    "bias-lost": "with the fixed bias lost",
    "drive-lost": "with the drive lost",
    "silicon": "with silicon instead of the rectifier tube",
    "todays-line": "on today's line",
}


def asked(circuit: Circuit, names: Iterable[str]) -> Circuit:
    """Return the circuit with further conditions asked for, by the names of its uses.

    Raises:
        ValueError: A use that is not on offer, with those that are.
    """
    known = [use.name for use in circuit.uses]
    for name in names:
        if name not in known:
            raise ValueError(f"no condition {name!r} is on offer here; {_list(known)}")
    equipment = circuit.sheet.equipment
    wanted = tuple(dict.fromkeys((*equipment.conditions, *names)))
    sheet = replace(circuit.sheet, equipment=replace(equipment, conditions=wanted))
    return replace(circuit, sheet=sheet)


def _list(known: list[str]) -> str:
    return f"there are {', '.join(known)}" if known else "there is none"


def on_offer(circuit: Circuit) -> tuple[Use, ...]:
    """Return the uses that apply and were not asked for."""
    return tuple(u for u in circuit.uses if u.name not in circuit.sheet.equipment.conditions)


def is_own(condition: Condition, circuit: Circuit) -> bool:
    """Say whether the user asked for a condition, in the sheet or by its use."""
    names = {entry.name for entry in circuit.sheet.conditions}
    uses = [use.name for use in circuit.uses if use.name in circuit.sheet.equipment.conditions]
    return condition.name in names or any(
        condition.name in (use, *(f"{use}{ending}" for ending in ENDINGS)) for use in uses
    )


def use_of(condition: Condition) -> str:
    """Return the name of the use that a condition belongs to, or its own."""
    for ending in ENDINGS:
        if condition.name.removesuffix(ending) in WORDS:
            return condition.name.removesuffix(ending)
    return condition.name


def told(name: str) -> str:
    """Return the condition of a use in words, or "" where the name is none of these."""
    for ending, at in ENDINGS.items():
        if name.endswith(ending) and (use := WORDS.get(name.removesuffix(ending))):
            return f"{use}{at}"
    return WORDS.get(name, "")


def conditions(circuit: Circuit, use: Use) -> list[Condition]:
    """Return the conditions of a use: at the usual line voltage and at the highest.

    Silicon brings all of B+ while the other tubes are cold, at every switch-on: that is judged
    like what lasts, and is a condition more.
    """
    line = circuit.line
    nominal = Condition(
        name=use.name,
        line_V=line.nominal_V if line.sources else None,
        pulled=use.pulled,
        open=use.open,
        silicon=use.silicon,
        muted=use.muted,
        driven=use.driven and circuit.sheet.equipment.driven,
        text=f"{use.text}: {use.tests}",
    )
    if not line.sources:
        return [nominal]
    if use.nominal_V is not None:
        factor = use.nominal_V / line.nominal_V
        nominal = replace(nominal, line_V=use.nominal_V, factor=factor, usual=True)
    high_V = use.high_V or line.high_V
    high = replace(
        nominal,
        name=f"{use.name} high",
        line_V=high_V,
        factor=high_V / line.nominal_V,
        usual=False,
        text="the same at the highest line voltage",
    )
    if not use.silicon:
        return [nominal, high]
    text = "the same, all other tubes still cold"
    return [nominal, high, replace(high, name=f"{use.name} cold", cold=True, text=text)]
