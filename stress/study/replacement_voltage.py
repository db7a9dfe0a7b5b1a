"""Which voltage rating a position asks for, and the next one on sale."""

from __future__ import annotations

from dataclasses import dataclass, field
from math import sqrt

from stress.circuit.circuit import Position
from stress.parts.series import next_voltage
from stress.parts.style import Style
from stress.study.result import PositionStress, Worst
from stress.text.figure import figure
from stress.text.unit import unit

# The alternating rating of film over its direct one where a style states none.
AC_SHARE = 0.35
AC_SOURCE = "ac rating about 0.35 of the dc rating: Vishay MMKP 386, doc 28163"
FILMS = frozenset({"film", "film-pp", "snubber"})
MOST_IN_SERIES = 4


@dataclass(frozen=True, slots=True)
class Need:
    """A rating that one requirement asks for, in volt, with the reason and its line."""

    volts: float = field(metadata=unit("V"))
    why: str
    rule: str


@dataclass(frozen=True, slots=True, kw_only=True)
class VoltageChoice:
    """The rating to buy.

    Attributes:
        rated_V: Of each part.
        count: How many in series.
        governing: The need that decided.
        below: Why it is lower than the rating of the part that is there, or "".
        short: Why it does not cover every need, or "".
    """

    rated_V: float = field(metadata=unit("V"))
    count: int = 1
    governing: Need
    below: str = ""
    short: str = ""


def needs(
    position: Position,
    *,
    style: Style,
    worst: Worst,
    lasting: Need,
    surge_share: float = 1.0,
    ac_V: float = 0.0,
) -> tuple[Need, ...]:
    """Return what every requirement asks of the rating, the largest first.

    Args:
        position: With the rating of the part that is there.
        style: Of the new part.
        worst: What is brief.
        lasting: What the policy asks for what lasts, ripple peak and high line counted.
        surge_share: Of the surge voltage that the policy lets be used.
        ac_V: The alternating voltage as an equivalent sine, rms.
    """
    asked = [lasting]
    if worst.brief_V:
        asked.append(
            Need(
                _for_surge(worst.brief_V / surge_share, style),
                f"{figure(worst.brief_V, 'V')} for a moment ({worst.brief_condition})",
                f"surge voltage: {style.surge.source}"
                if style.surge is not None
                else f"{style.name} has no surge rating: brief voltage within the rating",
            )
        )
    if ac_V > 0.0 and style.name in FILMS:
        stated = style.figures.get("ac_share")
        asked.append(
            Need(
                ac_V / (stated.value if stated is not None else AC_SHARE),
                f"{figure(ac_V, 'V')} of alternating voltage",
                str(stated.source) if stated is not None else AC_SOURCE,
            )
        )
    if position.rated_V is not None:
        asked.append(
            Need(
                position.rated_V,
                f"the part that is there is rated {figure(position.rated_V, 'V')}",
                "never below the original rating (common practice)",
            )
        )
    return tuple(sorted(asked, key=lambda need: -need.volts))


def sine_V(stress: PositionStress) -> float:
    """Return the rms of the sine with the same peak-to-peak voltage, as makers rate film."""
    return stress.ripple_pp_V / (2.0 * sqrt(2.0))


def choose(asked: tuple[Need, ...], *, position: Position, style: Style) -> VoltageChoice:
    """Return the next rating on sale, or a series string where no single part serves.

    Where only the rating of the old part is out of reach, the largest on sale is taken and the
    reason given.

    Args:
        asked: From `needs`.
        position: With the rating of the part that is there.
        style: Of the new part.
    """
    steps = style.steps.rated_V
    governing = asked[0]
    single = next_voltage(governing.volts, style)
    if single is not None:
        return VoltageChoice(rated_V=single, governing=governing)
    stressed = [need for need in asked if not need.rule.startswith("never below")]
    single = next_voltage(stressed[0].volts, style)
    if single is not None:
        return VoltageChoice(
            rated_V=steps[-1],
            governing=stressed[0],
            below=(
                f"below the old part's {figure(position.rated_V or 0.0, 'V')} because "
                f"{style.text} ends at {figure(steps[-1], 'V')} and {stressed[0].why} asks for "
                f"{figure(stressed[0].volts, 'V')} only"
            ),
        )
    for count in range(2, MOST_IN_SERIES + 1):
        # The one that gets most of the charge bears up to 60 % of a pair (±20 %).
        each = next_voltage(stressed[0].volts * 1.2 / count, style)
        if each is not None:
            return VoltageChoice(rated_V=each, count=count, governing=stressed[0])
    return VoltageChoice(
        rated_V=steps[-1],
        count=MOST_IN_SERIES,
        governing=stressed[0],
        short=(
            f"not even {MOST_IN_SERIES} in series of {figure(steps[-1], 'V')} cover "
            f"{figure(stressed[0].volts, 'V')}: look for a transmitting or pulse type"
        ),
    )


def _for_surge(brief_V: float, style: Style) -> float:
    """Return the smallest rating whose surge voltage covers a brief voltage, in volt."""
    for rated_V in style.steps.rated_V:
        if style.surge_V(rated_V) >= brief_V * (1 - 1e-9):
            # The ratio of that step: what a part of just this rating would have to be.
            return brief_V * rated_V / style.surge_V(rated_V)
    top = style.steps.rated_V[-1]
    return brief_V * top / style.surge_V(top)
