"""Ripple current, self-heating and expected life of electrolytics.

Sources, with how sure each number is:

- the 10-kelvin rule, and the core rise at the rated ripple of 10, 5 and 3 K for 85, 105 and
  125 °C series: Wikipedia, "Aluminum electrolytic capacitor", restating IEC 60384-1/-4 [read];
- heat given off by the can: Nippon Chemi-Con technical note [memory M];
- what one ordinary part carries: catalogue consensus [memory L], to be confirmed at the
  data sheet of the part bought.

Frequency multipliers belong to the style, see `stress.parts.style`.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from math import pi

from stress.parts.law import between
from stress.parts.style import Style
from stress.study.result import PositionStress
from stress.text.unit import unit

RULE = "life by L = L0·2^((T0 - T)/10): Wikipedia, restating IEC 60384-4"
_CORE_RISE_degC, _CORE_RISE_K = (85.0, 105.0, 125.0), (10.0, 5.0, 3.0)
# W/(K cm²) by diameter in mm
_DIAMETER_mm = (5.0, 6.3, 8.0, 10.0, 12.5, 16.0, 18.0, 22.0, 25.0, 30.0, 35.0, 40.0)
_GIVEN_OFF = (2.18, 2.16, 2.13, 2.10, 2.05, 2.00, 1.96, 1.88, 1.84, 1.75, 1.66, 1.58)
LONGEST_H = 131_400.0  # 15 years; beyond it seals age whatever the rule says (common practice)
USUAL_HZ = 100.0
LOW_V = 100.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Endurance:
    """What a series is sold for: so many hours at its upper category temperature."""

    hours: float = field(metadata=unit("h"))
    rated_degC: float = field(metadata=unit("degC"))
    source: str


# What to ask for in the shop: the longest-lived series that every maker has.
ORDINARY = Endurance(
    hours=2000.0,
    rated_degC=105.0,
    source="2000 h at 105 °C, an ordinary series [from memory, to be confirmed]",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Life:
    """Expected life of an electrolytic by the 10-kelvin rule.

    Attributes:
        ambient_degC: Around the part.
        rise_K: Self-heating of the core by the ripple.
        core_degC: The hot spot, ambient plus rise.
        hours: Expected life, at most `LONGEST_H`.
        uncapped_hours: What the rule alone gives.
    """

    ambient_degC: float = field(metadata=unit("degC"))
    rise_K: float = field(metadata=unit("K"))
    core_degC: float = field(metadata=unit("degC"))
    hours: float = field(metadata=unit("h"))
    uncapped_hours: float = field(metadata=unit("h"))


def equivalent_A(stress: PositionStress, *, style: Style, rated_V: float | None) -> float:
    """Return the 100 Hz ripple current that heats as much as the real one, A rms."""
    if stress.spectrum:
        spectrum = {hertz: amperes for hertz, amperes in stress.spectrum if hertz > 0.0}
        return style.equivalent_ripple_A(spectrum, rated_V=rated_V)
    factor = style.ripple_factor(stress.ripple_Hz or USUAL_HZ, rated_V=rated_V)
    return stress.ripple_rms_A / factor


def core_rise_K(rated_degC: float) -> float:
    """Return the core rise at rated ripple of a series by its upper temperature, in K."""
    return between(_CORE_RISE_degC, _CORE_RISE_K, rated_degC)


def can_rise_K(loss_W: float, *, diameter_mm: float, length_mm: float) -> float:
    """Return the rise of a bare can by what its surface gives off, in K.

    ΔT = P/(β A) with A = (π/4)·D·(D + 4L).
    """
    diameter, length = diameter_mm / 10.0, length_mm / 10.0
    area_cm2 = pi / 4.0 * diameter * (diameter + 4.0 * length)
    return loss_W / (between(_DIAMETER_mm, _GIVEN_OFF, diameter_mm) * 1e-3 * area_cm2)


def ordinary_ripple_A(value_F: float, *, rated_V: float) -> float:
    """Return the 100 Hz ripple current that one ordinary 105 °C part carries, about, A rms.

    A power law through catalogue values [from memory, to be confirmed]: 0.15 A for 10 µF and
    0.45 A for 47 µF at 450 V, 1.3 A for 220 µF at 400 V, and twice as much of parts up to
    100 V: 1 A for 1000 µF and 0.2 A for 100 µF at 25 V. It only decides whether to look for one
    part or for several in parallel; the part bought is chosen by its own data sheet.
    """
    carried = float(0.45 * (value_F * rated_V / 0.02115) ** 0.72)
    return 2.0 * carried if rated_V <= LOW_V else carried


def expected(
    *,
    ambient_degC: float,
    ripple_A: float,
    rated_ripple_A: float,
    endurance: Endurance = ORDINARY,
) -> Life:
    """Return the expected life by L = L0·2^((T0 - T)/10), T being the hot spot.

    The rise at the rated ripple is not credited, so the figure is on the short side.

    Args:
        ambient_degC: Around the part.
        ripple_A: Equivalent ripple at 100 Hz.
        rated_ripple_A: Rated ripple of the part at 100 Hz.
        endurance: Of its series.
    """
    rise = core_rise_K(endurance.rated_degC) * (ripple_A / rated_ripple_A) ** 2
    core = ambient_degC + rise
    hours = endurance.hours * 2.0 ** ((endurance.rated_degC - core) / 10.0)
    return Life(
        ambient_degC=ambient_degC,
        rise_K=rise,
        core_degC=core,
        hours=min(hours, LONGEST_H),
        uncapped_hours=hours,
    )
