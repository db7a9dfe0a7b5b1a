"""Bench limits: the readings that are acceptable for a position.

The leakage that may be read is test_V / (R · hot · safety): R the larger of the critical and
the functional leakage resistance of the position in the circuit, hot how many times more the
part leaks where it works than on the bench, safety the factor of the sheet. Where nothing in
the circuit suffers, the published limit of the style is taken instead.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from stress.circuit.circuit import Circuit, Position, Role
from stress.parts.policy import Policy
from stress.study.bench_esr import TESTER_HZ, EsrLimit, largest
from stress.study.result import Bench, Leakage, Working, Worst
from stress.text.figure import figure
from stress.text.unit import unit

CHASSIS_RISE_K = 20.0  # the parts under a chassis over the air around it (common practice)

# Smallest and largest capacitance over the marked one, by role; common practice.
_WINDOWS: dict[Role, tuple[float, float, str]] = {
    Role.TUNING: (0.98, 1.02, "it tunes"),
    Role.DETECTOR: (0.8, 1.3, "it sets a time constant with room to spare"),
    Role.TONE: (0.8, 1.2, "it shapes the tone"),
    Role.FEEDBACK: (0.9, 1.1, "it shapes a loop"),
    Role.SNUBBER: (0.9, 1.1, "it tunes a pulse"),
    Role.BUFFER: (0.9, 1.1, "it tunes a pulse"),
    Role.COUPLING: (
        0.9,
        1.35,
        "less takes bass, and a third more than marked means moisture and leakage",
    ),
}
_USUAL_WINDOW = (0.8, 1.35, "it bypasses; much more than marked means moisture and leakage")
# C - 30 % counts as the end of life: Wikipedia, "Aluminum electrolytic capacitor" [read].
_ELECTROLYTIC_WINDOW = (
    0.7,
    1.5,
    "30 % less counts as worn out, and half more than marked comes with high leakage",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class LeakageLimit:
    """The current that may leak at the test voltage, and on what it rests.

    Attributes:
        test_V: The voltage to test at.
        most_A: The largest acceptable current.
        ohm: The resistance it comes from, or None where the style's published limit is used.
        hot: How many times more it leaks at work.
        style_A: The published limit of the style at the same voltage.
        reason: In words, every factor shown.
    """

    test_V: float = field(metadata=unit("V"))
    most_A: float = field(metadata=unit("A"))
    ohm: float | None = field(default=None, metadata=unit("ohm"))
    hot: float = field(default=1.0, metadata=unit("1"))
    style_A: float = field(metadata=unit("A"))
    reason: str


def bench(
    position: Position,
    *,
    working: Working,
    worst: Worst,
    leakage: Leakage | None,
    circuit: Circuit,
    policy: Policy | None = None,
) -> Bench:
    """Return the bench limits of a position.

    Args:
        position: Where.
        working: Its ripple.
        worst: The largest voltage that lasts.
        leakage: What its leakage damages, or None where that was not studied.
        circuit: Temperatures, the tester's voltages, what it bypasses.
        policy: Says whether a new part would be loaded so; the limits do not depend on it.
    """
    notes: list[str] = []
    volts = test_voltage(position, worst=worst, circuit=circuit, notes=notes)
    leak = leakage_limit(position, test_V=volts, leakage=leakage, circuit=circuit)
    if policy is not None:
        notes += _loaded(position, worst=worst, circuit=circuit, policy=policy)
    esr = largest(position, working=working, circuit=circuit)
    low, high, why = window(position, circuit=circuit)
    value = position.value_F
    if leak is not None:
        notes += _leakage_notes(position, leak)
    if esr is not None and position.style.electrolytic:
        notes.append(
            f"on a {figure(TESTER_HZ, 'Hz')} meter that ESR reads {figure(esr.tester_ohm, 'ohm')};"
            f" a new part reads {figure(_new_at_tester(esr), 'ohm')}"
        )
    if value:
        notes.append(f"capacitance: {why}")
    return Bench(
        position=position.name,
        test_V=volts,
        leakage_max_A=leak.most_A if leak else None,
        leakage_reason=leak.reason if leak else "it sees no voltage that a test could stand for",
        esr_max_ohm=esr.ohm if esr else None,
        esr_Hz=esr.frequency_Hz if esr else None,
        esr_reason=esr.reason if esr else "its capacitance is not known",
        value_min_F=low * value if value else None,
        value_max_F=high * value if value else None,
        hot_factor=leak.hot if leak else 1.0,
        safety=circuit.sheet.safety,
        notes=tuple(notes),
    )


def test_voltage(
    position: Position, *, worst: Worst, circuit: Circuit, notes: list[str]
) -> float | None:
    """Return the voltage to test at: the smaller of the marked rating and what lasts.

    Of the voltages the tester has, the next above it that the rating allows is taken, else the
    highest below it. None where neither rating nor stress is known.
    """
    known = [volts for volts in (position.rated_V, worst.worst_V) if volts and volts > 0.0]
    if not known:
        return None
    wanted = min(known)
    if position.rated_V is None:
        notes.append("no rating is known: do not test above the working voltage")
    elif position.rated_V < worst.worst_V:
        notes.append(
            f"it bears {figure(worst.worst_V, 'V')}, more than its rating of "
            f"{figure(position.rated_V, 'V')}: no reading makes it good for this position"
        )
    steps = circuit.sheet.tester_V
    if not steps:
        return wanted
    allowed = position.rated_V if position.rated_V is not None else wanted
    above = [step for step in steps if wanted <= step <= allowed]
    below = [step for step in steps if step < wanted]
    if above:
        return min(above)
    if not below:
        return wanted
    notes.append(
        f"the tester stops at {figure(max(below), 'V')}, the position asks for "
        f"{figure(wanted, 'V')}: a good reading there proves nothing about the rest"
    )
    return max(below)


def part_degC(circuit: Circuit) -> float:
    """Return the temperature of the parts at work."""
    return circuit.ambient_degC + CHASSIS_RISE_K


def leakage_limit(
    position: Position, *, test_V: float | None, leakage: Leakage | None, circuit: Circuit
) -> LeakageLimit | None:
    """Return the current that may leak at a test voltage; None without a voltage."""
    if test_V is None or not position.value_F:
        return None
    rated_V = position.rated_V if position.rated_V is not None else test_V
    style_A = published_A(position, test_V=test_V, rated_V=rated_V)
    ohm, why = _smallest_allowed(leakage)
    if ohm is None:
        return LeakageLimit(
            test_V=test_V,
            most_A=style_A,
            style_A=style_A,
            reason=f"{why}; the published limit of the style counts: {_rule(position)}",
        )
    work, bench_degC = part_degC(circuit), circuit.sheet.bench_degC
    hot = position.style.hot_factor(from_degC=bench_degC, to_degC=work)
    safety = circuit.sheet.safety
    return LeakageLimit(
        test_V=test_V,
        most_A=test_V / (ohm * hot * safety),
        ohm=ohm,
        hot=hot,
        style_A=style_A,
        reason=(
            f"{why} {figure(ohm, 'ohm')}; {hot:.3g} times more leakage at {work:.0f} °C than at "
            f"{bench_degC:.0f} °C on the bench; safety factor {safety:g}"
        ),
    )


def published_A(position: Position, *, test_V: float, rated_V: float) -> float:
    """Return the style's published limit of leakage at a voltage on the bench, in ampere.

    Below the rating by the style's own law of voltage.
    """
    value_F = position.value_F or 0.0
    limit = position.style.leakage_limit_A(value_F, rated_V=rated_V)
    if limit is None:
        return test_V / position.style.insulation_ohm(value_F, rated_V=rated_V)
    return limit * position.style.voltage_factor(min(test_V / rated_V, 1.0))


def _rule(position: Position) -> str:
    leakages = position.style.leakages
    source = leakages[0].source if leakages else position.style.insulation.source
    return f"{position.style.text}, {source}"


def _smallest_allowed(leakage: Leakage | None) -> tuple[float | None, str]:
    """Return the largest resistance at which something suffers, over all conditions."""
    if leakage is None:
        return None, "what its leakage damages was not studied"
    if not leakage.limited:
        return None, "across an ideal source its leakage is not limited by the netlist"
    found = [
        (ohm, why)
        for case in leakage.by_condition
        for ohm, why in (
            (case.critical_ohm, _damage(case.victim.part if case.victim else "a part")),
            (case.functional_ohm, case.functional_reason or "the equipment works otherwise below"),
        )
        if ohm is not None
    ]
    if not found:
        return None, "no leakage of it damages anything in this circuit"
    return max(found)


def _damage(part: str) -> str:
    return f"{part} passes its limit below"


def window(position: Position, *, circuit: Circuit) -> tuple[float, float, str]:
    """Return the smallest and largest capacitance over the marked one, and why.

    A tolerance in the sheet that is tighter than the window of the role is kept.
    """
    if position.style.electrolytic:
        low, high, why = _ELECTROLYTIC_WINDOW
    else:
        low, high, why = _WINDOWS.get(position.role, _USUAL_WINDOW)
    entry = circuit.sheet.capacitors.get(position.name.lower())
    if entry is not None and entry.tolerance is not None:
        least, most = entry.tolerance
        if least > low or most < high:
            low, high, why = max(low, least), min(high, most), "the tolerance in the sheet"
    return low, high, why


def _loaded(
    position: Position, *, worst: Worst, circuit: Circuit, policy: Policy
) -> tuple[str, ...]:
    """Return that the policy would not load the part so, where it would not."""
    rated_V = position.rated_V
    choice = policy.choose(position.style, worst.worst_V, temperature_degC=part_degC(circuit))
    if rated_V is None or choice is None or worst.worst_V > rated_V:
        return ()
    if choice.needed_V <= rated_V * (1 + 1e-9):
        return ()
    return (
        f"good readings leave it {worst.worst_V / rated_V:.0%} loaded: {policy.name} asks for "
        f"{figure(choice.needed_V, 'V')} here ({choice.reason})",
    )


def _leakage_notes(position: Position, limit: LeakageLimit) -> list[str]:
    if not position.style.electrolytic:
        return []
    rule = position.style.leakages[0]
    notes = [
        f"read after {rule.after_s / 60.0:g} min under voltage, as the published limit does "
        f"({rule.name}, in µF, V and µA; {rule.source}); earlier it reads more",
        "an electrolytic that has lain idle leaks too much at first: form it with the current "
        f"held to {figure(_forming_A(limit.style_A), 'A')} at most, raising the voltage to the "
        "test voltage as the current falls, and read when it has come to a plateau; what still "
        "falls has not been formed, what rises again is bad",
        "forming restores neither capacitance nor ESR, and is not for tantalum or for parts "
        "that bulge, leak or grow warm",
    ]
    if limit.ohm is not None and limit.style_A < limit.most_A:
        notes.append(
            f"the circuit would bear {figure(limit.most_A, 'A')}, but a sound part passes no more "
            f"than {figure(limit.style_A, 'A')}: between the two, form it and measure again"
        )
    return notes


def _forming_A(style_A: float) -> float:
    """Return the current to form with: ten times the limit, 1 to 20 mA (common practice)."""
    return min(max(10.0 * style_A, 1e-3), 20e-3)


def _new_at_tester(esr: EsrLimit) -> float:
    return esr.new_ohm * esr.tester_ohm / esr.ohm if esr.ohm else 0.0
