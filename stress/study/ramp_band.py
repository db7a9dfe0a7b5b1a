"""How far healthy readings spread: parts 10 % off, the line 5 % off, the meter's own error.

A reading moves in proportion to the line and, apart from that, by the sum of many small
differences between parts. The share of the line is fitted out of a seeded sample, the rest taken
as some standard deviations of what remains.
"""

from __future__ import annotations

import random
from collections.abc import Mapping, Sequence
from dataclasses import replace
from math import sqrt

import numpy as np

from stress.circuit.circuit import Circuit
from stress.engine.case import Answer, Case, Floats, Settled
from stress.engine.solver import Solver
from stress.netlist.flat import Element
from stress.study.power_probe import meter_ohm, read, resolution
from stress.study.power_result import Band, Kind, Probe

SEED, SAMPLES = 1, 16
FAST_S, FEW = 1e-3, 8  # a switching supply settles slowly: fewer samples, a wider band
PARTS_OFF, LINE_OFF = 0.10, 0.05
DEVIATIONS, DOUBT = 3.5, 16.0  # of the rest: so many, and more the fewer samples tell
CARRIED = 1.1  # allowance for a spread taken over from a neighbour
NO_METER_OHM = 1e11
FELT = 0.005  # share of a reading by which a meter's load must change it to be solved everywhere


def sample_values(
    circuit: Circuit, case: Case, *, chance: random.Random
) -> tuple[Mapping[str, float], float]:
    """Return a case's values with every part off by chance, and the factor on the line.

    Resistors, capacitors and the emission of tubes are up to 10 % off, the line up to 5 %, all
    evenly spread.
    """
    line = 1.0 + chance.uniform(-LINE_OFF, LINE_OFF)
    sources = {name.lower() for name in circuit.line.sources}
    devices = {name.lower() for part in circuit.parts for name in part.elements}
    held = {name.lower(): value for name, value in case.values.items()}
    changed: dict[str, float] = {}
    for element in case.twin.elements:
        name = element.name.lower()
        off = 1.0 + chance.uniform(-PARTS_OFF, PARTS_OFF)
        if name in sources:
            changed[name] = held.get(name, 1.0) * line
        elif name.endswith(".vemission"):
            changed[name] = held.get(name, 1.0) * off
        elif _is_part(element, devices):
            changed[name] = held.get(name, element.value or 0.0) * off
    return {**held, **changed}, line


def _is_part(element: Element, devices: set[str]) -> bool:
    name = element.name.lower()
    inside = name in devices and "." in name
    plain = element.letter in "RC" and element.law is None and bool(element.value)
    return plain and not inside and "#" not in name


def sample_cases(
    circuit: Circuit, healthy: Case, *, seed: int = SEED, count: int | None = None
) -> list[tuple[Case, float]]:
    """Return sampled relatives of a healthy case, and the factor on the line of each."""
    if count is None:
        fast = circuit.period_s is not None and circuit.period_s < FAST_S
        count = FEW if fast else SAMPLES
    chance = random.Random(f"{seed} {healthy.name}")
    found = []
    for index in range(count):
        values, line = sample_values(circuit, healthy, chance=chance)
        name = f"{healthy.name} / sample {seed}.{index + 1}"
        found.append((replace(healthy, name=name, parent=healthy.name, values=values), line))
    return found


def bands(
    circuit: Circuit,
    probes: Sequence[Probe],
    *,
    drawn: Mapping[str, float],
    rows: Sequence[tuple[Mapping[str, float], float]],
    shown: Mapping[str, float],
) -> tuple[Band, ...]:
    """Return the healthy band of every probe that may be read.

    Args:
        drawn: Readings as drawn.
        rows: Readings of the samples, each with the factor on its line.
        shown: What the user's meter shows of `drawn`, where its load was solved.
    """
    found = []
    for probe in probes:
        if probe.forbidden:
            continue
        value = drawn[probe.key]
        own = resolution(probe, value, circuit=circuit)
        below, above = _spread(
            np.array([row[probe.key] for row, _ in rows]),
            np.array([line - 1.0 for _, line in rows]),
        )
        found.append(
            Band(
                probe=probe.key,
                value=value,
                low=max(min(below, value) - own, probe.least),
                high=max(above, value) + own,
                shown=shown.get(probe.key, value),
            )
        )
    return tuple(found)


def carried(
    probes: Sequence[Probe],
    below: Sequence[Band],
    *,
    drawn: Mapping[str, float],
    shown: Mapping[str, float],
    factor: float,
) -> tuple[Band, ...]:
    """Return the bands of a step by those of a step a little below it.

    Args:
        below: Bands of the other step; the spread grows with the line.
        factor: This line voltage over the other one.
    """
    held = {band.probe: band for band in below}
    found = []
    for probe in probes:
        band = held.get(probe.key)
        if band is None:
            continue
        value = drawn[probe.key]
        found.append(
            Band(
                probe=probe.key,
                value=value,
                low=max(value + (band.low - band.value) * factor * CARRIED, probe.least),
                high=value + (band.high - band.value) * factor * CARRIED,
                shown=shown.get(probe.key, value),
            )
        )
    return tuple(found)


def _spread(values: Floats, lines: Floats) -> tuple[float, float]:
    """Return the ends of the healthy band without the meter's error."""
    if values.size < 4:
        return -np.inf, np.inf
    slope, level = np.polyfit(lines, values, 1)
    rest = values - (level + slope * lines)
    deviation = sqrt(float(rest @ rest) / (values.size - 2))
    width = abs(slope) * LINE_OFF + (DEVIATIONS + DOUBT / values.size) * deviation
    return float(min(level - width, values.min())), float(max(level + width, values.max()))


def loads(
    circuit: Circuit,
    healthy: Mapping[str, tuple[Case, Answer]],
    *,
    probes: Sequence[Probe],
    solver: Solver,
) -> Mapping[str, Mapping[str, float]]:
    """Return, by case and probe, what the user's meter shows of a DC voltage.

    Each node is solved with the meter's resistance across it at the highest step; where that
    changes the reading at all, at the other steps too. Elsewhere the meter shows what is there.
    """
    if not healthy:
        return {}
    dc = [p for p in probes if p.kind is Kind.DC_V and not p.forbidden]
    last = list(healthy)[-1]
    shown: dict[str, dict[str, float]] = {name: {} for name in healthy}
    felt = [
        probe
        for probe, true, load in _solved(circuit, dc, [last], healthy, solver)[last]
        if _keep(shown[last], probe, true, load)
    ]
    others = [name for name in healthy if name != last]
    for name, rows in _solved(circuit, felt, others, healthy, solver).items():
        for probe, true, load in rows:
            _keep(shown[name], probe, true, load)
    return shown


def _keep(shown: dict[str, float], probe: Probe, true: float, load: float) -> bool:
    if abs(load - true) <= FELT * abs(true):
        return False
    shown[probe.key] = load
    return True


def _solved(
    circuit: Circuit,
    probes: Sequence[Probe],
    names: Sequence[str],
    healthy: Mapping[str, tuple[Case, Answer]],
    solver: Solver,
) -> dict[str, list[tuple[Probe, float, float]]]:
    """Return probe, true reading and reading with the meter, by case."""
    asked: list[tuple[str, Probe, float, Case]] = []
    for name in names:
        case, answer = healthy[name]
        assert isinstance(answer, Settled)
        twin = replace(
            case.twin,
            elements=case.twin.elements + tuple(_meter(p, case) for p in probes),
        )
        for probe in probes:
            true = read((probe,), answer.waves, circuit=circuit)[probe.key]
            ohm = meter_ohm(true, sheet=circuit.sheet)
            metered = replace(
                case,
                name=f"{name} / meter at {probe.node}",
                twin=twin,
                parent=name,
                values={**case.values, _name(probe): ohm},
            )
            asked.append((name, probe, true, metered))
    found: dict[str, list[tuple[Probe, float, float]]] = {name: [] for name in names}
    for (name, probe, true, _), answer in zip(
        asked, solver.solve([case for *_, case in asked]), strict=True
    ):
        if isinstance(answer, Settled):
            load = read((probe,), answer.waves, circuit=circuit)[probe.key]
            found[name].append((probe, true, load))
    return found


def _name(probe: Probe) -> str:
    return f"R{probe.node}#meter"


def _meter(probe: Probe, case: Case) -> Element:
    return Element(
        name=_name(probe),
        letter="R",
        nodes=(probe.node, "0"),
        value=NO_METER_OHM,
        span=case.twin.elements[0].span,
    )
