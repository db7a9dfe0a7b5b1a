"""The faults that a first power-up must find: those that do damage at full line."""

from __future__ import annotations

from collections.abc import Mapping

from stress.study.fault import Fault
from stress.study.power_result import Danger
from stress.study.result import Failure, Leakage

WELL_BELOW = 10.0  # the second leak that is tried: a tenth of the critical one
FAILURES = ("short", "open", "dried")


def dangers(
    leakage: Mapping[str, Leakage], failures: Mapping[str, tuple[Failure, ...]]
) -> tuple[Danger, ...]:
    """Return every leak and failure that drives a part past a known limit.

    A leak is taken at the critical resistance and at a tenth of it; what already does damage
    at the insulation of a healthy part is no fault and is left out, and so is what the netlist
    does not limit: there the fuse decides, before any reading.
    """
    found: list[Danger] = []
    for name, study in leakage.items():
        worst = study.governing
        if worst is None or worst.critical_ohm is None or worst.always:
            continue
        for ohm in (worst.critical_ohm, worst.critical_ohm / WELL_BELOW):
            fault = Fault(position=name, kind="leaky", ohm=float(f"{ohm:.6g}"))
            found.append(Danger(fault=fault, victim=worst.victim, condition=worst.condition))
    for name, results in failures.items():
        for failure in results:
            known = [victim for victim in failure.victims if not victim.limit.assumed]
            if failure.fault in FAILURES and known:
                fault = Fault(position=name, kind=failure.fault)
                found.append(Danger(fault=fault, victim=known[0], condition=failure.condition))
    return tuple(found)
