"""Closed forms of a discharge: time, hazard class, energy, and the resistor for it."""

from __future__ import annotations

from math import inf, log

from stress.parts.series import next_up
from stress.study.discharge_result import Resistor

# IEC 62368-1 table 5: capacitance and the voltages that end class ES1 and ES2 (from memory, to be
# confirmed). Between two rows the stricter one counts.
CLASSES = (
    (8e-9, 500.0, 1000.0),
    (12e-9, 350.0, 700.0),
    (18e-9, 250.0, 500.0),
    (28e-9, 200.0, 400.0),
    (41e-9, 150.0, 300.0),
    (61e-9, 125.0, 250.0),
    (91e-9, 100.0, 200.0),
    (170e-9, 75.0, 150.0),
    (300e-9, 60.0, 120.0),
)
# NFPA 70E article 360: stored energy that asks for protection (from memory, to be confirmed).
ENERGIES = ((400.0, 0.25), (100.0, 1.0), (0.0, 100.0))

LET_GO_A = 0.1  # largest current of the discharge: no spark, no damage to old plates
LEAST_OHM = 1e3  # the usual range is 1 to 50 kilohm, several watts (common practice)
UNTIL_V = 10.0
RATED_W = 5.0
PART_V = 500.0  # what one such resistor stands (common practice)
# Short-time overload of IEC 60115-1, 6.25 times the rated power for 5 s (from memory, to be
# confirmed).
OVERLOAD_S = 31.25


def fall_s(ohm: float, farad: float, *, start_V: float, end_V: float) -> float:
    """Return the time in which a capacitor falls from one voltage to another: RC ln(V/V_end).

    0 where it is not above the end; infinite without a resistance.
    """
    if abs(start_V) <= end_V:
        return 0.0
    if ohm == inf:
        return inf
    return ohm * farad * log(abs(start_V) / end_V)


def class_V(farad: float) -> tuple[float, float]:
    """Return the voltages that end the classes ES1 and ES2 for a capacitor of this value."""
    for most, first, second in CLASSES:
        if farad <= most:
            return first, second
    return CLASSES[-1][1], CLASSES[-1][2]


def energy_J(farad: float, volts: float) -> float:
    """Return the energy stored: half of C times V squared."""
    return 0.5 * farad * volts * volts


def deadly(farad: float, volts: float) -> bool:
    """Tell whether the energy is past a published threshold for its voltage."""
    joule = energy_J(farad, volts)
    return any(abs(volts) >= least and joule > most for least, most in ENERGIES)


def resistor(farad: float, volts: float) -> Resistor:
    """Return a resistor that empties a capacitor without a spark, and what it must stand.

    The first instant stays below a tenth of an ampere; the energy is a pulse that a resistor of
    five watts takes as short-time overload, else a larger one is named.
    """
    start_V = abs(volts)
    ohm = next_up(max(start_V / LET_GO_A, LEAST_OHM), "E6")
    joule = energy_J(farad, start_V)
    pieces = 1 + int(start_V // PART_V)
    return Resistor(
        ohm=ohm,
        rated_V=start_V,
        rated_W=max(RATED_W, joule / OVERLOAD_S),
        peak_A=start_V / ohm,
        energy_J=joule,
        until_V=UNTIL_V,
        seconds=fall_s(ohm, farad, start_V=start_V, end_V=UNTIL_V),
        pieces=pieces,
    )
