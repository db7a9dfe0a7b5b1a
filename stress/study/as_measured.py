"""The equipment as measured: every reading in its place, so that it can be simulated."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import replace

from stress.circuit.circuit import Circuit, Kind, Part, Position
from stress.netlist.flat import NOTHING, Element
from stress.parts.reading import Reading
from stress.study.bench import part_degC
from stress.study.bench_esr import moved
from stress.study.fault import OPEN_SHARE, SHORT_OHM

WINDING = "#measured"  # the copper of a winding that the netlist does not show


def as_measured(
    circuit: Circuit,
    readings: Iterable[Reading],
    *,
    ripple_Hz: Mapping[str, float] = NOTHING,
) -> Circuit:
    """Return a copy of a circuit in which every reading stands for its part.

    Of a position: capacitance, ESR and leakage, the last as the resistance it will have at
    working temperature; open and short as such. Of a resistor: its resistance. Of a winding:
    inductance, and resistance as far as the netlist does not show it already. What was not
    measured stays as it is; a reading of a part that does not exist is left out.

    Args:
        circuit: As found.
        readings: Rows; of several for one part the highest test voltage counts for leakage,
            the last row for the rest.
        ripple_Hz: By position, the frequency its ESR is simulated at; else as measured.
    """
    rows: dict[str, list[Reading]] = {}
    for row in readings:
        rows.setdefault(row.part.lower(), []).append(row)
    positions = tuple(
        _position(position, rows[position.name.lower()], circuit=circuit, ripple_Hz=ripple_Hz)
        if position.name.lower() in rows
        else position
        for position in circuit.positions
    )
    values = {position.name.lower(): position.value_F for position in positions}
    ohms = {part.name.lower(): part.resistance_ohm or 0.0 for part in circuit.parts}
    elements: list[Element] = []
    for element in circuit.netlist.elements:
        name = element.name.lower()
        if name in values and element.law is None:
            elements.append(replace(element, value=values[name]))
        elif name in rows and element.letter in "RL":
            elements += _element(element, rows[name], shown_ohm=ohms.get(name, 0.0))
        else:
            elements.append(element)
    return replace(
        circuit,
        positions=positions,
        parts=tuple(_part(part, rows.get(part.name.lower(), [])) for part in circuit.parts),
        netlist=replace(circuit.netlist, elements=tuple(elements)),
    )


def leakage_row(rows: Iterable[Reading]) -> Reading | None:
    """Return the leakage reading at the highest voltage, or None."""
    taken = [row for row in rows if row.leakage_A is not None and row.at_V]
    return max(taken, key=lambda row: row.at_V or 0.0, default=None)


def _position(
    position: Position,
    rows: list[Reading],
    *,
    circuit: Circuit,
    ripple_Hz: Mapping[str, float],
) -> Position:
    value_F, esr_ohm, insulation = position.value_F, position.esr_ohm, position.insulation_ohm
    for row in rows:
        if row.capacitance_F is not None:
            value_F = row.capacitance_F
        if row.esr_ohm is not None and row.esr_Hz is not None:
            at_Hz = ripple_Hz.get(position.name, row.esr_Hz)
            esr_ohm = moved(row.esr_ohm, position=position, from_Hz=row.esr_Hz, to_Hz=at_Hz)
    leaky = leakage_row(rows)
    if leaky is not None and leaky.leakage_A and leaky.at_V:
        bench_degC = leaky.temperature_degC
        if bench_degC is None:
            bench_degC = circuit.sheet.bench_degC
        hot = position.style.hot_factor(from_degC=bench_degC, to_degC=part_degC(circuit))
        insulation = leaky.at_V / leaky.leakage_A / hot
    states = {row.state for row in rows}
    if "open" in states and value_F:
        value_F *= OPEN_SHARE
    if "short" in states:
        insulation = SHORT_OHM
    return replace(position, value_F=value_F, esr_ohm=esr_ohm, insulation_ohm=insulation)


def _element(element: Element, rows: list[Reading], *, shown_ohm: float) -> list[Element]:
    """Return a resistor or winding with its readings."""
    ohm = next((r.resistance_ohm for r in reversed(rows) if r.resistance_ohm is not None), None)
    henry = next((r.inductance_H for r in reversed(rows) if r.inductance_H is not None), None)
    if element.letter == "R":
        # Zero ohms would be no resistor to the solver.
        return [replace(element, value=max(ohm, 1e-3)) if ohm is not None else element]
    found = replace(element, value=henry) if henry is not None else element
    if ohm is None or ohm <= shown_ohm:
        return [found]
    first, second = element.nodes[:2]
    inside = f"{element.name}{WINDING}".lower()
    return [
        replace(found, nodes=(first, inside)),
        Element(
            name=f"{element.name}{WINDING}",
            letter="R",
            nodes=(inside, second),
            value=ohm - shown_ohm,
            span=element.span,
        ),
    ]


def _part(part: Part, rows: list[Reading]) -> Part:
    """Return a part that is judged by its reading."""
    for row in rows:
        if row.resistance_ohm is not None and part.kind is Kind.WINDING:
            part = replace(part, resistance_ohm=row.resistance_ohm)
        elif row.resistance_ohm is not None and part.value is not None:
            part = replace(part, value=max(row.resistance_ohm, 1e-3))
        if row.inductance_H is not None and part.kind is Kind.WINDING:
            part = replace(part, value=row.inductance_H)
    return part
