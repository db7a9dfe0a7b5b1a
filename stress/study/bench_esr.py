"""The largest ESR a position bears: by heat, by age and by what it is there for.

The smallest of these governs:

- heat: loss at the real ripple no more than that of the rated ripple in a new part;
- age: three times the ESR of a new part counts as worn out where ripple flows (Wikipedia,
  "Aluminum electrolytic capacitor", and Vishay 056/057, doc 28340 table 5 [read]); a part
  that carries next to no ripple may be far worse;
- loss: five times that of a new part where it is no electrolytic (common practice);
- purpose: what is left of a bypass, at most a tenth of the resistance it bypasses
  (common practice).
"""

from __future__ import annotations

from dataclasses import dataclass, field
from math import pi

from stress.circuit.circuit import Circuit, Position, Role
from stress.study import life
from stress.study.replacement_mounting import model_elements
from stress.study.result import PositionStress, Working
from stress.text.figure import figure
from stress.text.unit import unit

WORN_TIMES = 3.0
LOSSY_TIMES = 5.0  # for parts that are no electrolytics
LOSS_HZ = 1000.0  # where their loss factor is stated and measured
SHARE_OF_BYPASSED = 0.1
TESTER_HZ = 100e3
COOL_K = 0.1  # less self-heating than this and ripple is no reason
LEAST_RIPPLE_A = 1e-4
FILTERS = frozenset(
    {
        Role.RESERVOIR,
        Role.SMOOTHING,
        Role.OUTPUT_FILTER,
        Role.FLYING,
        Role.BIAS_FILTER,
        Role.DECOUPLING,
        Role.SNUBBER,
        Role.BUFFER,
    }
)


@dataclass(frozen=True, slots=True, kw_only=True)
class EsrLimit:
    """The largest ESR at a frequency, why, and the same at a tester's frequency."""

    ohm: float = field(metadata=unit("ohm"))
    frequency_Hz: float = field(metadata=unit("Hz"))
    tester_ohm: float = field(metadata=unit("ohm"))
    new_ohm: float = field(metadata=unit("ohm"))
    reason: str


def largest(position: Position, *, working: Working, circuit: Circuit) -> EsrLimit | None:
    """Return the largest ESR of a position, or None where its capacitance is not known.

    It belongs to the strongest ripple frequency under the conditions that last; to 120 Hz for
    an electrolytic without ripple, and to 1 kHz for parts that are none.
    """
    if not position.value_F:
        return None
    worst = _most_ripple(position, working)
    if position.style.electrolytic:
        hertz = worst.ripple_Hz if worst and worst.ripple_Hz else 120.0
    else:
        hertz = LOSS_HZ
    new = position.style.esr_ohm(position.value_F, rated_V=position.rated_V, frequency_Hz=hertz)
    limits = _limits(position, worst, new_ohm=new, circuit=circuit)
    if not limits:
        reactance = 1.0 / (2.0 * pi * hertz * position.value_F)
        limits = [(reactance, "its reactance: with more than that it is no capacitor there")]
    ohm, reason = min(limits)
    return EsrLimit(
        ohm=ohm,
        frequency_Hz=hertz,
        tester_ohm=moved(ohm, position=position, from_Hz=hertz, to_Hz=TESTER_HZ),
        new_ohm=new,
        reason=f"{reason}, at {figure(hertz, 'Hz')}",
    )


def _limits(
    position: Position, worst: PositionStress | None, *, new_ohm: float, circuit: Circuit
) -> list[tuple[float, str]]:
    limits: list[tuple[float, str]] = []
    rippled = worst is not None and worst.ripple_rms_A > LEAST_RIPPLE_A
    if worst is not None and rippled:
        limits.append(_by_heat(position, worst, new_ohm=new_ohm))
    if not position.style.electrolytic:
        why = f"{LOSSY_TIMES:g} times a new part's {figure(new_ohm, 'ohm')} means moisture or a bad end"
        return [*limits, (LOSSY_TIMES * new_ohm, why)]
    warm = worst is not None and _rise_K(position, worst, times=WORN_TIMES) > COOL_K
    if warm or (position.role in FILTERS and rippled):
        why = f"three times a new part's {figure(new_ohm, 'ohm')} counts as worn out"
        limits.append((WORN_TIMES * new_ohm, why))
    bypassed = bypassed_ohm(position, circuit=circuit)
    if bypassed is not None and position.role not in FILTERS:
        why = f"a tenth of the {figure(bypassed, 'ohm')} that it bypasses"
        limits.append((max(SHARE_OF_BYPASSED * bypassed, WORN_TIMES * new_ohm), why))
    return limits


def moved(ohm: float, *, position: Position, from_Hz: float, to_Hz: float) -> float:
    """Return an ESR of one frequency as the same part would show it at another, in ohm.

    By the law of the style: the part is taken to be worse by the same factor everywhere.
    """
    if not position.value_F:
        return ohm
    at = [
        position.style.esr_ohm(position.value_F, rated_V=position.rated_V, frequency_Hz=hertz)
        for hertz in (from_Hz, to_Hz)
    ]
    return ohm * at[1] / at[0] if at[0] > 0.0 else ohm


def bypassed_ohm(position: Position, *, circuit: Circuit) -> float | None:
    """Return the smallest resistor straight across the position, else at its live end, in ohm.

    The live end is the one that is not ground. None without a resistor there.
    """
    first, second = position.nodes
    across, at_end = [], []
    inner = model_elements(circuit)
    for element in circuit.netlist.elements:
        if element.name.lower() in inner:
            continue
        if element.letter != "R" or not element.value or element.value <= 0.0:
            continue
        nodes = set(element.nodes)
        if nodes == {first, second}:
            across.append(element.value)
        elif (first != "0" and first in nodes) or (second != "0" and second in nodes):
            at_end.append(element.value)
    return min(across or at_end, default=None)


def _most_ripple(position: Position, working: Working) -> PositionStress | None:
    lasting = {condition.name for condition in working.conditions if condition.lasts}
    stresses = [
        stress
        for name, stress in working.positions.get(position.name, {}).items()
        if name in lasting
    ]
    return max(stresses, key=lambda stress: stress.ripple_rms_A, default=None)


def _rated_ripple_A(position: Position) -> float:
    """Return the marked ripple rating at 100 Hz, else what one ordinary part carries."""
    if position.ripple_A is not None:
        return position.ripple_A
    rated_V = position.rated_V or 25.0
    return life.ordinary_ripple_A(position.value_F or 0.0, rated_V=rated_V)


def _ripple_share(position: Position, stress: PositionStress) -> float:
    """Return the ripple over the rated ripple, both at 100 Hz."""
    carried = life.equivalent_A(stress, style=position.style, rated_V=position.rated_V)
    return carried / _rated_ripple_A(position)


def _rise_K(position: Position, stress: PositionStress, *, times: float) -> float:
    """Return the self-heating with an ESR so many times that of a new part, in K."""
    if not position.style.electrolytic:
        return 0.0
    share = _ripple_share(position, stress)
    return life.core_rise_K(85.0) * share * share * times


def _by_heat(position: Position, stress: PositionStress, *, new_ohm: float) -> tuple[float, str]:
    """Return the ESR at which the real ripple heats as much as the rated one does when new."""
    if not position.style.electrolytic:
        # No ripple rating is published for these; a quarter watt is warm to the touch.
        return (
            0.25 / stress.ripple_rms_A**2,
            f"a quarter of a watt at {figure(stress.ripple_rms_A, 'A')} of ripple",
        )
    share = _ripple_share(position, stress)
    if share > 1.0:
        return (
            new_ohm,
            f"it carries {figure(stress.ripple_rms_A, 'A')}, more than such a part should",
        )
    return (
        new_ohm / (share * share),
        f"the heat of its rated ripple, at {figure(stress.ripple_rms_A, 'A')}",
    )
