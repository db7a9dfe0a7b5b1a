"""How long a victim lasts, as an order of magnitude, where a published thermal law allows."""

from __future__ import annotations

from dataclasses import replace

from stress.circuit.circuit import Circuit, Kind
from stress.study.result import Victim
from stress.text.figure import figure

# Copper: heat per volume and kelvin, and resistivity at about 100 °C (handbook values, from
# memory, to be confirmed). The adiabatic balance is that of Onderdonk's fusing equation
# (E. R. Stauffacher, General Electric Review 31, 1928; from memory, to be confirmed).
COPPER_J_PER_M3K = 3.45e6
COPPER_OHM_M = 2.2e-8
USUAL_A_PER_M2 = 2.5e6  # current density at which windings are rated (common practice)
ENAMEL_RISE_K = 100.0  # above a warm winding, where old enamel and paper give up (common practice)

# A resistor stands 2.5 times its rated voltage, 6.25 times its power, for 5 s: short-time
# overload of IEC 60115-1 (from memory, to be confirmed). The same energy is allowed elsewhere.
OVERLOAD_POWER, OVERLOAD_S = 6.25, 5.0

# Longest pre-arcing time by multiple of the rated current, IEC 60127-2 glass cartridges (from
# memory, to be confirmed): quick-acting and time-lag.
FUSE_S = {
    "fast": ((10.0, 0.02), (4.0, 0.3), (2.75, 2.0), (2.1, 1800.0)),
    "slow": ((10.0, 0.3), (4.0, 3.0), (2.75, 10.0), (2.1, 1800.0)),
}
UNKNOWN = "time to damage unknown"


def timed(victims: tuple[Victim, ...], circuit: Circuit) -> tuple[Victim, ...]:
    """Return the victims with the order of magnitude of the time they last."""
    kinds = {part.name: part.kind for part in circuit.parts}
    return tuple(_timed(victim, kinds.get(victim.part), circuit) for victim in victims)


def _timed(victim: Victim, kind: Kind | None, circuit: Circuit) -> Victim:
    seconds = None
    share = victim.stress / victim.limit.value
    match kind:
        case Kind.WINDING:
            seconds = winding_s(share)
        case Kind.RESISTOR | Kind.CONTROL if victim.quantity == "power_W":
            seconds = resistor_s(share)
        case Kind.FUSE:
            entry = circuit.sheet.fuses.get(victim.part.lower())
            blow = (entry.blow_class if entry is not None else None) or "fast"
            seconds = fuse_s(share, blow)
            word = f"blows within {figure(seconds, 's', digits=1)}" if seconds else "may hold"
            return replace(victim, after_s=seconds, after_text=word)
    if seconds is None:
        return replace(victim, after_text=UNKNOWN)
    return replace(victim, after_s=seconds, after_text=f"within about {_order(seconds)}")


def winding_s(share: float) -> float:
    """Return the time in which a winding heats up by 100 K, nothing being carried away.

    Args:
        share: Current over the rated current.
    """
    density = USUAL_A_PER_M2 * share
    return ENAMEL_RISE_K * COPPER_J_PER_M3K / (COPPER_OHM_M * density**2)


def resistor_s(share: float) -> float | None:
    """Return the time after which a resistor has taken the energy of its overload test.

    Args:
        share: Power over the rated power; below 1.5 no time is claimed.
    """
    if share < 1.5:
        return None
    return OVERLOAD_S * (OVERLOAD_POWER - 1.0) / (share - 1.0)


def fuse_s(share: float, blow: str) -> float | None:
    """Return the longest time a fuse of a class holds; None below 2.1 times its rating."""
    for multiple, seconds in FUSE_S.get(blow, FUSE_S["fast"]):
        if share >= multiple:
            return seconds
    return None


def _order(seconds: float) -> str:
    """Return an order of magnitude in words."""
    for limit, word in (
        (2.0, "a second"),
        (15.0, "seconds"),
        (90.0, "a minute"),
        (900.0, "minutes"),
    ):
        if seconds < limit:
            return word
    return "an hour"
