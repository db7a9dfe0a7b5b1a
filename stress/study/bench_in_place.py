"""Whether a bench test means anything with the part left in place, and what it would read."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from math import inf, isfinite, pi

from stress.circuit.circuit import Circuit, Kind, Position
from stress.engine.case import Twin
from stress.engine.solver import Solver
from stress.study.bench_esr import TESTER_HZ
from stress.study.in_place import (
    ELECTROLYTIC_HZ,
    OPEN_HZ,
    OTHER_HZ,
    QUIET_V,
    SMALL_OPEN_HZ,
    Around,
    plan,
)
from stress.study.plan import run
from stress.study.result import Bench
from stress.text.figure import figure

IN_PLACE, LIFT = "in place", "lift one lead"
SMALL_F = 0.01e-6
SAME = 0.1  # within this a capacitance read in place is the part's own
ESR_SAME = 0.2
TOLD_APART = 3.0  # times: an open part from a good one, a good one from a short
SHORT_OHM = 10.0  # less than this reads as a short on an ohmmeter


def survey(
    benches: Mapping[str, Bench], *, circuit: Circuit, twin: Twin, solver: Solver
) -> Mapping[str, Bench]:
    """Return the bench limits with what each test is worth in place, by position name.

    Args:
        benches: From `stress.study.bench`.
        circuit: The healthy circuit.
        twin: Its twin, as for the working stress.
        solver: Answers three small cases a position, none of them with a period.
    """
    asked = [circuit.position(name) for name in benches]
    plans = [
        plan(position, circuit=circuit, twin=twin, test_V=benches[position.name].test_V or QUIET_V)
        for position in asked
    ]
    return {
        position.name: placed(
            benches[position.name], around=around, position=position, circuit=circuit
        )
        for position, around in zip(asked, run(plans, solver=solver), strict=True)
    }


def placed(bench: Bench, *, around: Around, position: Position, circuit: Circuit) -> Bench:
    """Return the bench limits of a position with what each test is worth in place."""
    leakage, leak_note = _leakage(bench, around, circuit)
    capacitance, value_note = _capacitance(bench, around, position)
    esr, esr_note = _esr(bench, around, position)
    notes = (leak_note, value_note, esr_note, _indication(around, position))
    return replace(
        bench,
        in_leakage=leakage,
        in_capacitance=capacitance,
        in_esr=esr,
        notes=bench.notes + tuple(note for note in notes if note),
    )


def seen_ohm(part_ohm: complex, around_ohm: complex) -> complex:
    """Return the impedance a meter sees: the part and what is around it, in parallel."""
    total = part_ohm + around_ohm
    return part_ohm * around_ohm / total if total else complex(0.0)


def seen_F(value_F: float, *, esr_ohm: float, around: Around, frequency_Hz: float) -> float:
    """Return the capacitance a meter shows, read as a series reactance, in farad.

    Infinite where the whole looks inductive or like a plain resistance.
    """
    w = 2.0 * pi * frequency_Hz
    part = esr_ohm + 1.0 / (1j * w * value_F)
    reactance = seen_ohm(part, around.impedance_ohm[frequency_Hz]).imag
    return -1.0 / (w * reactance) if reactance < 0.0 else float("inf")


def seen_esr_ohm(value_F: float, *, esr_ohm: float, around: Around, frequency_Hz: float) -> float:
    """Return the series resistance a meter shows, in ohm."""
    part = esr_ohm + 1.0 / (2j * pi * frequency_Hz * value_F)
    return seen_ohm(part, around.impedance_ohm[frequency_Hz]).real


def capacitance_Hz(position: Position) -> float:
    """Return the frequency capacitance is measured at: 120 Hz for electrolytics, else 1 kHz."""
    return ELECTROLYTIC_HZ if position.style.electrolytic else OTHER_HZ


def open_Hz(position: Position) -> float:
    """Return the frequency of the open and short indication: 100 kHz, 1 MHz below 0.01 µF."""
    return SMALL_OPEN_HZ if (position.value_F or 0.0) < SMALL_F else OPEN_HZ


def _leakage(bench: Bench, around: Around, circuit: Circuit) -> tuple[str | None, str]:
    if bench.test_V is None or bench.leakage_max_A is None or around.direct_ohm is None:
        return None, ""
    volts = bench.test_V
    past_A = volts / around.direct_ohm if around.direct_ohm > 0.0 else inf
    if any(part.kind is Kind.TRANSISTOR for part in circuit.parts):
        return LIFT, (
            f"leakage: lift one lead, {figure(volts, 'V')} would reach semiconductors in place"
        )
    if past_A > bench.leakage_max_A:
        return LIFT, (
            f"leakage: lift one lead, the circuit past it is {figure(around.direct_ohm, 'ohm')} "
            f"and passes {figure(past_A, 'A')} at {figure(volts, 'V')}"
        )
    return IN_PLACE, (
        f"leakage in place: the circuit past it passes {figure(past_A, 'A')} itself, so the "
        f"limit reads {figure(bench.leakage_max_A + past_A, 'A')}"
    )


def _capacitance(bench: Bench, around: Around, position: Position) -> tuple[str | None, str]:
    hertz = capacitance_Hz(position)
    if bench.value_min_F is None or bench.value_max_F is None or not position.value_F:
        return None, ""
    if hertz not in around.impedance_ohm:
        return None, ""
    good, low, high = (
        seen_F(value, esr_ohm=_new_ohm(position, hertz), around=around, frequency_Hz=hertz)
        for value in (position.value_F, bench.value_min_F, bench.value_max_F)
    )
    at = figure(hertz, "Hz")
    if not isfinite(good):
        return LIFT, f"capacitance at {at}: lift one lead, in place it does not read as one"
    if abs(good / position.value_F - 1.0) <= SAME:
        return IN_PLACE, (
            f"capacitance in place at {at}: the limits read {figure(low, 'F')} to "
            f"{figure(high, 'F')}"
        )
    return (
        LIFT,
        f"capacitance at {at}: lift one lead, in place a good part reads {figure(good, 'F')}",
    )


def _esr(bench: Bench, around: Around, position: Position) -> tuple[str | None, str]:
    if bench.esr_max_ohm is None or not bench.esr_Hz or not position.value_F:
        return None, ""
    if TESTER_HZ not in around.impedance_ohm:
        return None, ""
    new = _new_ohm(position, TESTER_HZ)
    limit = bench.esr_max_ohm * new / _new_ohm(position, bench.esr_Hz)
    good, bad = (
        seen_esr_ohm(position.value_F, esr_ohm=ohm, around=around, frequency_Hz=TESTER_HZ)
        for ohm in (new, limit)
    )
    at = figure(TESTER_HZ, "Hz")
    if abs(bad / limit - 1.0) <= ESR_SAME and good < bad:
        return IN_PLACE, f"ESR in place at {at}: the limit reads {figure(bad, 'ohm')}"
    return LIFT, (
        f"ESR at {at}: lift one lead, in place a part at its limit of {figure(limit, 'ohm')} "
        f"reads {figure(bad, 'ohm')}"
    )


def _indication(around: Around, position: Position) -> str:
    """Return what an in-place indication of opens and shorts is worth."""
    hertz = open_Hz(position)
    if not position.value_F or hertz not in around.impedance_ohm:
        return ""
    own = abs(1.0 / (2j * pi * hertz * position.value_F))
    shows_open = abs(around.impedance_ohm[hertz]) >= TOLD_APART * own
    quiet = around.quiet_ohm
    shows_short = quiet is not None and quiet >= TOLD_APART * SHORT_OHM
    shown = [
        f"an open shows at {figure(hertz, 'Hz')}"
        if shows_open
        else f"an open does not show at {figure(hertz, 'Hz')}, the circuit past it reads lower",
        f"a short shows on an ohmmeter of {figure(QUIET_V, 'V')} or less"
        if shows_short
        else "a short does not show on an ohmmeter"
        + (f", the circuit past it is {figure(quiet, 'ohm')}" if quiet is not None else ""),
    ]
    return "indication in place: " + "; ".join(shown)


def _new_ohm(position: Position, frequency_Hz: float) -> float:
    return position.style.esr_ohm(
        position.value_F or 0.0, rated_V=position.rated_V, frequency_Hz=frequency_Hz
    )
