"""What can be read on powered equipment, and how a waveform becomes a reading."""

from __future__ import annotations

from collections.abc import Mapping
from math import sqrt

import numpy as np

from stress.circuit.circuit import Circuit, Role
from stress.circuit.circuit import Kind as PartKind
from stress.engine.case import Settled, Waves
from stress.parts.sheet import Sheet
from stress.study.power_result import Kind, Probe

SUPPLY = frozenset(
    {
        Role.RESERVOIR,
        Role.SMOOTHING,
        Role.DECOUPLING,
        Role.BIAS_FILTER,
        Role.OUTPUT_FILTER,
        Role.FLYING,
    }
)
EFFORTS = {"cathode": 2, "screen": 2, "emitter": 2, "source": 2, "grid": 3, "base": 3, "gate": 3}
UNREAD_PINS = ("heater", "filament", "diode", "oscillator", "suppressor")

# What a handheld meter and its probes stand, and where pulses make its reading meaningless or
# kill it (common practice; measurement categories of IEC 61010-031 end at 1000 V).
METER_MOST_V = 1000.0
PULSE_PERIOD_S, PULSE_V = 1e-3, 50.0

# How well a reading is known: share of it, and a floor (common practice for handheld meters).
DIGITAL = {Kind.DC_V: (0.01, 0.1), Kind.AC_V: (0.03, 0.2), Kind.LINE_A: (0.02, 0.01)}
DIGITAL[Kind.LINE_W] = (0.02, 1.0)
OSCILLOSCOPE = (0.03, 0.02)  # for ripple that is too fast for a handheld meter
COIL_SHARE = 0.03  # of full scale, for a moving-coil meter
COIL_RANGES_V = (3.0, 10.0, 30.0, 100.0, 300.0, 1000.0)


def probes(circuit: Circuit, *, nominal: Settled | None) -> tuple[Probe, ...]:
    """Return what can be read: the line, the supply, the pins of tubes and transistors.

    Args:
        circuit: The equipment.
        nominal: Its settled state; tells where voltage or pulses forbid to measure.
    """
    found: dict[str, Probe] = {}

    def add(kind: Kind, node: str, text: str, effort: int) -> None:
        key = f"{node} {kind.value}".strip()
        if key not in found:
            reason = forbidden(circuit, node, nominal) if node else ""
            found[key] = Probe(
                key=key, kind=kind, node=node, text=text, effort=effort, forbidden=reason
            )

    if circuit.line.sources:
        add(Kind.LINE_A, "", "line current", 0)
        add(Kind.LINE_W, "", "line power", 0)
    for position in circuit.positions:
        if position.role in SUPPLY:
            for node in position.nodes:
                if node != "0":
                    text = f"at {position.name} ({node})"
                    add(Kind.DC_V, node, text, 1)
                    scope = ", by oscilloscope" if _fast(circuit) else ""
                    add(Kind.AC_V, node, text + scope, 1)
    for part in circuit.parts:
        if part.kind not in (PartKind.TUBE, PartKind.TRANSISTOR):
            continue
        for pin, node in part.pins.items():
            name = pin.rstrip("0123456789")
            if node != "0" and name not in UNREAD_PINS:
                add(Kind.DC_V, node, f"{name} of {part.name} ({node})", EFFORTS.get(name, 3))
    return tuple(found.values())


def forbidden(circuit: Circuit, node: str, nominal: Settled | None) -> str:
    """Return why a node must not be measured, or ""."""
    if nominal is None:
        return ""
    volts = nominal.waves.voltage(node)
    peak, swing = float(np.abs(volts).max()), float(np.ptp(volts))
    if peak > METER_MOST_V:
        return f"{peak:.0f} V peak, more than a handheld meter stands"
    if _fast(circuit) and swing > PULSE_V:
        return f"fast pulses of {swing:.0f} V"
    return ""


def _fast(circuit: Circuit) -> bool:
    return circuit.period_s is not None and circuit.period_s < PULSE_PERIOD_S


def read(probes: tuple[Probe, ...], waves: Waves, *, circuit: Circuit) -> Mapping[str, float]:
    """Return what every probe reads, by its key, without the load of a meter."""
    return {probe.key: _value(probe, waves, circuit) for probe in probes}


def _value(probe: Probe, waves: Waves, circuit: Circuit) -> float:
    match probe.kind:
        case Kind.DC_V:
            return waves.mean(waves.voltage(probe.node))
        case Kind.AC_V:
            volts = waves.voltage(probe.node)
            return sqrt(max(waves.rms(volts) ** 2 - waves.mean(volts) ** 2, 0.0))
        case Kind.LINE_A:
            return max(waves.rms(waves.current(name)) for name in circuit.line.sources)
        case Kind.OHM:
            raise ValueError("an ohmmeter reads nothing on powered equipment")
        case Kind.LINE_W:
            return sum(_delivered(name, waves, circuit) for name in circuit.line.sources)


def _delivered(source: str, waves: Waves, circuit: Circuit) -> float:
    nodes = next(e.nodes for e in circuit.netlist.elements if e.name.lower() == source.lower())
    return -waves.mean(waves.voltage(nodes[0], nodes[1]) * waves.current(source))


def resolution(probe: Probe, value: float, *, circuit: Circuit) -> float:
    """Return by how much a reading may be off on the user's meter, in the probe's unit."""
    sheet = circuit.sheet
    if probe.kind is Kind.AC_V and _fast(circuit):
        share, floor = OSCILLOSCOPE
        return share * abs(value) + floor
    if sheet.meter_ohm_per_V is not None and probe.kind in (Kind.DC_V, Kind.AC_V):
        return COIL_SHARE * _range(value)
    share, floor = DIGITAL[probe.kind]
    return share * abs(value) + floor


def meter_ohm(value: float, *, sheet: Sheet) -> float:
    """Return what the user's meter loads a node with, on the range for a voltage."""
    if sheet.meter_ohm_per_V is None:
        return sheet.meter_ohm
    return sheet.meter_ohm_per_V * _range(value)


def _range(value: float) -> float:
    return next((full for full in COIL_RANGES_V if full >= abs(value)), COIL_RANGES_V[-1])
