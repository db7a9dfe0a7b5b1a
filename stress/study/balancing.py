"""Capacitors in series and in parallel, and the resistors that make series ones share.

Sharing in the steady state is by leakage; its spread between electrolytics of one kind is
taken as 0.0015 times C in µF times the total voltage, in µA (Cornell Dubilier application
guide) [memory M]. While charging they share by capacitance, the smaller one taking more.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from stress.parts.series import next_down
from stress.text.unit import unit

SPREAD_UA_PER_UF_V = 0.0015
SPREAD_SOURCE = "leakage spread 0.0015·C·V µA, Cornell Dubilier application guide [memory M]"
CAPACITANCE_TOLERANCE = 0.20  # of an ordinary electrolytic, code M
RESISTOR_TOLERANCE = 0.05
MOST_OHM = 10e6  # across more the dirt of a board leaks as well (common practice)
POWER_RESERVE = 0.5  # of a resistor's wattage is used (common practice)
WATTAGES = (0.25, 0.5, 1.0, 2.0, 3.0, 5.0, 10.0)


@dataclass(frozen=True, slots=True, kw_only=True)
class Series:
    """Equal capacitors in series with a resistor across each.

    Attributes:
        count: How many.
        each_F: Capacitance of each; the string has `each_F / count`.
        each_V: Rating of each.
        resistor_ohm: Standard value across each.
        resistor_W: Wattage to buy.
        resistor_V: What one resistor bears at worst.
        bleed_A: What the string of resistors draws at the working voltage.
        share_V: Worst steady voltage on one, leakage spread and resistor tolerance counted.
        brief_V: Worst voltage on one while charging, by the spread of capacitance.
    """

    count: int
    each_F: float = field(metadata=unit("F"))
    each_V: float = field(metadata=unit("V"))
    resistor_ohm: float = field(metadata=unit("ohm"))
    resistor_W: float = field(metadata=unit("W"))
    resistor_V: float = field(metadata=unit("V"))
    bleed_A: float = field(metadata=unit("A"))
    share_V: float = field(metadata=unit("V"))
    brief_V: float = field(metadata=unit("V"))


def leakage_spread_A(value_F: float, *, total_V: float) -> float:
    """Return how much more one electrolytic may leak than its neighbour, in ampere."""
    return SPREAD_UA_PER_UF_V * (value_F * 1e6) * total_V * 1e-6


def largest_resistor_ohm(value_F: float, *, count: int, each_V: float, total_V: float) -> float:
    """Return the largest balancing resistor that holds every one within its rating, in ohm.

    For two in series R = (2 UR - V) / dI, with dI the leakage spread; for n the part that leaks
    least takes the excess of all others: R = (n UR - V) / ((n - 1) dI).

    Raises:
        ValueError: Where the ratings do not even add up to the voltage, or count is below 2.
    """
    if count < 2 or count * each_V <= total_V:
        raise ValueError(f"{count} parts of {each_V} V do not bear {total_V} V")
    spread = leakage_spread_A(value_F, total_V=total_V)
    return (count * each_V - total_V) / ((count - 1) * spread)


def shared_V(value_F: float, *, count: int, resistor_ohm: float, total_V: float) -> float:
    """Return the worst steady voltage on one of a string, in volt.

    That one leaks nothing and has the largest resistor; each other leaks the whole spread and
    has the smallest. Kirchhoff's laws, solved directly: the string carries one current I,
    V1 = I R1 and V2 = (I - dI) R2.
    """
    spread = leakage_spread_A(value_F, total_V=total_V)
    large = resistor_ohm * (1.0 + RESISTOR_TOLERANCE)
    small = resistor_ohm * (1.0 - RESISTOR_TOLERANCE)
    current = (total_V + (count - 1) * spread * small) / (large + (count - 1) * small)
    return min(current * large, total_V)


def charging_V(total_V: float, *, count: int) -> float:
    """Return the worst voltage on one of a string while it charges quickly, in volt.

    That one is at the low end of its tolerance and the others at the high end.
    """
    low, high = 1.0 - CAPACITANCE_TOLERANCE, 1.0 + CAPACITANCE_TOLERANCE
    return total_V * (1.0 / low) / (1.0 / low + (count - 1) / high)


def series(
    value_F: float, *, count: int, each_F: float, each_V: float, steady_V: float, brief_V: float
) -> Series:
    """Return a string with its balancing resistors.

    Args:
        value_F: What the position needs.
        count: How many in series.
        each_F: Standard value of each, near `count * value_F`.
        each_V: Rating of each.
        steady_V: What the string bears and that lasts.
        brief_V: What it bears while charging.

    Raises:
        ValueError: Where the parts cannot share the voltage within their rating.
    """
    most = largest_resistor_ohm(each_F, count=count, each_V=each_V, total_V=steady_V)
    ohm = next_down(min(most, MOST_OHM))
    while shared_V(each_F, count=count, resistor_ohm=ohm, total_V=steady_V) > each_V:
        # The tolerance of the resistors takes from the reserve that the leakage had.
        ohm = next_down(ohm * 0.99)
        if ohm < 1000.0:
            raise ValueError(f"{count} parts of {each_V} V do not share {steady_V} V")
    share = shared_V(each_F, count=count, resistor_ohm=ohm, total_V=steady_V)
    power = share * share / ohm / POWER_RESERVE
    return Series(
        count=count,
        each_F=each_F,
        each_V=each_V,
        resistor_ohm=ohm,
        resistor_W=next((watts for watts in WATTAGES if watts >= power), power),
        resistor_V=share,
        bleed_A=steady_V / (count * ohm),
        share_V=share,
        brief_V=charging_V(max(brief_V, steady_V), count=count),
    )
