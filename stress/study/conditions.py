"""How the equipment is run: the stock conditions, those of the sheet, and their cases."""

from __future__ import annotations

from collections.abc import Mapping

from stress.circuit.circuit import Circuit, Kind
from stress.engine.case import Case, Steady, Twin
from stress.netlist.flat import NOTHING
from stress.parts.sheet import ConditionEntry
from stress.study import other_use
from stress.study.result import Condition
from stress.study.rewired import rewired

NOMINAL, HIGH, COLD, DRIVEN, INRUSH = "nominal", "high", "cold", "driven", "inrush"
WORDS = {
    NOMINAL: "as it is run",
    HIGH: "at high line",
    COLD: "with the tubes cold at high line",
    INRUSH: "for a moment at switch-on",
    DRIVEN: "with its signals",
}


def conditions(circuit: Circuit) -> tuple[Condition, ...]:
    """Return every condition that is solved for a steady state, `nominal` first.

    Without a line there is no `high`, and the others run on the circuit's own sources. With
    series heaters a tube that is pulled cools all others, so that only `cold` remains.
    """
    line = circuit.line
    high_factor = line.high_V / line.nominal_V if line.sources else 1.0
    nominal_V = line.nominal_V if line.sources else None
    most_V = line.high_V if line.sources else None
    found = [Condition(name=NOMINAL, line_V=nominal_V, text="as it is meant to be run")]
    if line.sources:
        found.append(
            Condition(name=HIGH, line_V=most_V, factor=high_factor, text="the highest line voltage")
        )
    cold_text = "switched on, rectifiers at work, all other tubes still cold"
    found.append(
        Condition(
            name=COLD,
            line_V=most_V,
            factor=high_factor,
            cold=True,
            lasts=_cold_lasts(circuit),
            text=cold_text,
        )
    )
    if circuit.signals and circuit.sheet.equipment.driven:
        found.append(Condition(name=DRIVEN, line_V=nominal_V, driven=True, text="with its signals"))
    if circuit.heaters != "series":
        found += [
            Condition(
                name=f"pulled {envelope}",
                line_V=most_V,
                factor=high_factor,
                pulled=(envelope,),
                text=f"{envelope} taken out, the rest warm",
            )
            for envelope in envelopes(circuit)
        ]
    found += [_own(circuit, entry) for entry in circuit.sheet.conditions]
    for use in circuit.uses:
        if use.name in circuit.sheet.equipment.conditions:
            found += other_use.conditions(circuit, use)
    return tuple(found)


def told(name: str) -> str:
    """Return a condition in words that stand after a voltage: "with the tubes cold at high line"."""
    if name.startswith("pulled "):
        return f"with {name.removeprefix('pulled ')} pulled at high line"
    return WORDS.get(name) or other_use.told(name) or f"in the condition {name}"


def _cold_lasts(circuit: Circuit) -> bool:
    """Tubes may be out for long only when the user says so and B+ does not wait for them."""
    slow = any(p.kind is Kind.RECTIFIER and p.warm_up == "cathode" for p in circuit.parts)
    has_tubes = any(part.kind is Kind.TUBE for part in circuit.parts)
    return not has_tubes or (circuit.sheet.equipment.tubes_out and not slow)


def _own(circuit: Circuit, entry: ConditionEntry) -> Condition:
    line = circuit.line
    volts = {"nominal": line.nominal_V, "high": line.high_V, "low": line.low_V}.get(entry.line)
    return Condition(
        name=entry.name,
        line_V=volts if line.sources else None,
        factor=volts / line.nominal_V if line.sources and volts else 1.0,
        pulled=entry.pulled,
        open=entry.open,
        short=entry.short,
        lasts=entry.lasts,
        driven=entry.driven,
        silicon=entry.silicon,
        muted=entry.muted,
        text="from the sheet",
    )


def envelopes(circuit: Circuit) -> tuple[str, ...]:
    """Return the names of all glasses that can be pulled, rectifiers apart."""
    names = [p.envelope or p.name for p in circuit.parts if p.kind is Kind.TUBE]
    return tuple(dict.fromkeys(names))


def removed(circuit: Circuit, condition: Condition) -> frozenset[str]:
    """Return the elements that are not there in a condition, lower case."""
    opened = tuple(name.lower() for name in condition.open)
    gone = {
        name
        for name in (element.name.lower() for element in circuit.netlist.elements)
        if name in opened or name.startswith(tuple(f"{block}." for block in opened))
    }
    pulled = {name.lower() for name in (*condition.pulled, *condition.silicon)}
    for part in circuit.parts:
        out = pulled & {part.name.lower(), part.envelope.lower()}
        cold = condition.cold and part.kind is Kind.TUBE
        if out or cold:
            gone |= {name.lower() for name in part.elements}
    return frozenset(gone)


def sources(circuit: Circuit, condition: Condition) -> Mapping[str, float]:
    """Return the factor on every source that is not run as the netlist has it."""
    factors: dict[str, float] = {}
    if condition.factor != 1.0:
        factors.update(dict.fromkeys(circuit.line.sources, condition.factor))
    if not condition.driven:
        factors.update(dict.fromkeys(circuit.signals, 0.0))
    factors.update(dict.fromkeys(condition.muted, 0.0))
    return factors


def case(
    circuit: Circuit,
    condition: Condition,
    *,
    twin: Twin,
    name: str = "",
    fault: str = "",
    parent: str | None = None,
    values: Mapping[str, float] = NOTHING,
) -> Case:
    """Return the steady case of a condition, with further values set for a fault."""
    return Case(
        name=name or condition.name,
        twin=rewired(circuit, condition, twin=twin),
        condition=condition.name,
        fault=fault,
        parent=parent,
        values={**sources(circuit, condition), **values},
        removed=removed(circuit, condition),
        analysis=Steady(own=not fault),
    )


def healthy_parent(condition: Condition) -> str | None:
    """Return whose settled state a healthy condition starts from.

    `cold` starts from rest: with nothing loading the supply a capacitor charged too high by a
    relative would stay there.
    """
    if condition.name == NOMINAL or condition.cold:
        return None
    return NOMINAL
