"""Every position that sets a frequency: tanks first, then timings by resistor and capacitor."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from stress.circuit.circuit import Circuit
from stress.study.relaxation import relaxation_timings
from stress.study.result import LeakageIn
from stress.study.tank import tank_timings
from stress.study.timing import Timing


def timings(circuit: Circuit) -> Mapping[str, Timing]:
    """Return what sets a frequency, by position name; known ones go before unknown ones."""
    found: dict[str, Timing] = {}
    for timing in (*relaxation_timings(circuit), *tank_timings(circuit)):
        held = found.get(timing.position)
        if held is None or (held.unknown and not timing.unknown):
            found[timing.position] = timing
    return found


def with_detuning(of: LeakageIn, timing: Timing | None, *, top_ohm: float) -> LeakageIn:
    """Return a leakage result in which the loss of a tuned circuit counts as function.

    Args:
        of: As simulated.
        timing: Of the position, or None.
        top_ohm: The insulation of a healthy part; no leak is above it.
    """
    if timing is None or timing.leak_ohm is None:
        return of
    ohm = min(timing.leak_ohm, top_ohm)
    if of.functional_ohm is not None and of.functional_ohm >= ohm:
        return of
    return replace(of, functional_ohm=ohm, functional_reason=timing.leak_reason)
