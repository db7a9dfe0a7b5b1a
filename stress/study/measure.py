"""From waves to the stress of a position or a part; the definitions of every stress name.

The mean over the period, unless said otherwise here:

    plate_W, screen_W, grid_W   mean of (voltage against the cathode) times (current into the pin)
    plate_V, screen_V           mean voltage against the cathode
    cathode_A                   mean of the sum of the currents into all other pins
    grid_A                      mean of the current into the grid
    heater_cathode_V            mean voltage between cathode and heater, by size
    power_W                     mean of voltage times current
    voltage_V                   resistor: rms; capacitor, transistor: largest by size
    current_A                   winding, fuse: rms; transistor: mean collector current by size;
                                control, loudspeaker: mean by size
    average_A, peak_A           diode: mean and largest; rectifier tube: mean of all its plates
                                together, largest of the worst plate
    reverse_V                   largest reverse voltage
    ripple_A                    rms current of a capacitor
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from stress.circuit.circuit import Kind, Part, Position
from stress.engine.case import Floats, Waves
from stress.engine.twin import metered_pins
from stress.study.result import PositionStress

HARMONICS = 40
SHOWN = 12
LEAST_RIPPLE = 1e-9  # A rms below which a position has no ripple frequency


def position_stress(
    position: Position, waves: Waves, *, plus: int, esr_ohm: float, case: str, distance: float
) -> PositionStress:
    """Return what a position bears.

    Args:
        plus: Index of the node that is the plus side, for `reverse_V`.
        esr_ohm: What it was simulated with.
        distance: Of the case's proof, for `error_V`.
    """
    volts = waves.voltage(*position.nodes)
    amps = waves.current(position.name)
    rms = waves.rms(amps)
    reverse = None
    if position.style.polar:
        reverse = max(0.0, float(-(volts if plus == 0 else -volts).min()))
    spectrum = harmonics(waves.time_s, amps)
    slope = np.abs(np.diff(volts) / np.diff(waves.time_s))
    peak = float(np.abs(volts).max())
    return PositionStress(
        case=case,
        dc_V=waves.mean(volts),
        peak_V=peak,
        reverse_V=reverse,
        ripple_pp_V=float(np.ptp(volts)),
        ripple_rms_A=rms,
        esr_loss_W=rms * rms * esr_ohm,
        error_V=distance * max(1.0, peak),
        ripple_Hz=max(spectrum, key=lambda line: line[1])[0] if spectrum else None,
        spectrum=spectrum,
        peak_A=float(np.abs(amps).max()),
        slope_V_per_s=float(slope.max()),
    )


def harmonics(time_s: Floats, samples: Floats) -> tuple[tuple[float, float], ...]:
    """Return (Hz, rms) of the strongest harmonics of one period, in the order of frequency.

    Args:
        time_s, samples: Shape (m,), one period, both ends included.
    """
    if time_s.size < 4:
        return ()
    period = float(time_s[-1] - time_s[0])
    # A power of two at twice the usual grid, so that narrow pulses keep their harmonics.
    even = time_s[0] + period * np.arange(512) / 512
    lines = np.fft.rfft(np.interp(even, time_s, samples)) / 512
    rms = np.sqrt(2.0) * np.abs(lines[1 : HARMONICS + 1])
    if float(rms.max()) < LEAST_RIPPLE:
        return ()
    strongest = sorted(np.argsort(rms)[::-1][:SHOWN])
    return tuple((float((k + 1) / period), float(rms[k])) for k in strongest)


def part_stresses(
    part: Part, waves: Waves, *, removed: frozenset[str] = frozenset(), heater_bias_V: float = 0.0
) -> Mapping[str, float]:
    """Return the stresses of a part by name; empty where it was taken out."""
    elements = frozenset(name.lower() for name in part.elements or (part.name,))
    if elements <= removed or part.name.lower() in removed:
        return {}
    match part.kind:
        case Kind.TUBE:
            return _tube(part, waves, heater_bias_V=heater_bias_V)
        case Kind.RECTIFIER:
            return _rectifier(part, waves)
        case Kind.TRANSISTOR:
            return _transistor(part, waves)
        case Kind.DIODE:
            volts = _across(part, waves)
            meter = metered_pins(part)
            amps = waves.current(f"{part.name}#{meter[0]}" if meter else part.name)
            return {
                "average_A": waves.mean(amps),
                "peak_A": float(amps.max()),
                "reverse_V": max(0.0, float(-volts.min())),
            }
        case Kind.WINDING:
            return {"current_A": waves.rms(waves.current(part.name))}
        case _:
            return _resistance(part, waves)


def _across(part: Part, waves: Waves) -> Floats:
    plus, minus = list(part.pins.values())[:2]
    return waves.voltage(plus, minus)


def _resistance(part: Part, waves: Waves) -> Mapping[str, float]:
    if not part.value:
        return {}
    volts = _across(part, waves)
    amps = volts / part.value
    if part.kind is Kind.FUSE:
        return {"current_A": waves.rms(amps)}
    stresses = {"power_W": waves.mean(volts * amps), "voltage_V": waves.rms(volts)}
    if part.kind in (Kind.CONTROL, Kind.LOUDSPEAKER):
        stresses["current_A"] = abs(waves.mean(amps))
    return stresses


def _units(part: Part) -> tuple[str, ...]:
    """Return the endings of the units of one envelope: "" and, for a second, "2"."""
    return tuple(ending for ending in ("", "2", "3") if f"plate{ending}" in part.pins)


def _tube(part: Part, waves: Waves, *, heater_bias_V: float) -> Mapping[str, float]:
    """Return the worst of the units of an envelope, stress by stress."""
    metered = metered_pins(part)
    stresses: dict[str, float] = {}
    for ending in _units(part):
        cathode = part.pins.get(f"cathode{ending}", part.pins.get("cathode", "0"))
        unit: dict[str, float] = {}
        for role in ("plate", "screen", "grid"):
            pin = f"{role}{ending}"
            if pin not in part.pins:
                continue
            volts = waves.voltage(part.pins[pin], cathode)
            if role != "grid":
                unit[f"{role}_V"] = waves.mean(volts)
            if pin in metered:
                amps = waves.current(f"{part.name}#{pin}")
                unit[f"{role}_W"] = waves.mean(volts * amps)
                if role == "grid":
                    unit["grid_A"] = waves.mean(amps)
        others = [
            waves.current(f"{part.name}#{pin}")
            for pin in metered
            if pin.endswith(ending) and (ending or not pin[-1].isdigit())
        ]
        if others:
            unit["cathode_A"] = waves.mean(np.sum(others, axis=0))
        unit["heater_cathode_V"] = abs(waves.mean(waves.voltage(cathode)) - heater_bias_V)
        for name, value in unit.items():
            stresses[name] = max(stresses.get(name, value), value)
    return stresses


def _rectifier(part: Part, waves: Waves) -> Mapping[str, float]:
    metered = metered_pins(part)
    average, peak, reverse = [], [], []
    for ending in _units(part):
        plate = f"plate{ending}"
        cathode = part.pins.get(f"cathode{ending}", part.pins.get("cathode", "0"))
        reverse.append(float(waves.voltage(cathode, part.pins[plate]).max()))
        if plate in metered:
            amps = waves.current(f"{part.name}#{plate}")
            average.append(waves.mean(amps))
            peak.append(float(amps.max()))
    stresses = {"reverse_V": max(0.0, *reverse)}
    if average:
        # The limit of a full-wave type is the current of the whole tube.
        stresses["average_A"] = float(np.sum(average))
        stresses["peak_A"] = max(peak)
    return stresses


def _transistor(part: Part, waves: Waves) -> Mapping[str, float]:
    collector = "collector" if "collector" in part.pins else "drain"
    base = "base" if "base" in part.pins else "gate"
    emitter = part.pins.get("emitter", part.pins.get("source", "0"))
    metered = metered_pins(part)
    volts = waves.voltage(part.pins[collector], emitter)
    stresses = {"voltage_V": float(np.abs(volts).max())}
    if collector not in metered:
        return stresses
    amps = waves.current(f"{part.name}#{collector}")
    power = volts * amps
    if base in metered:
        drive = waves.current(f"{part.name}#{base}")
        power = power + waves.voltage(part.pins[base], emitter) * drive
    stresses["current_A"] = abs(waves.mean(amps))
    stresses["power_W"] = waves.mean(power)
    return stresses
