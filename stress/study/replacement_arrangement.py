"""Several parts where no single one serves: in series, back to back, in parallel."""

from __future__ import annotations

from dataclasses import dataclass, field

from stress.circuit.circuit import Position
from stress.parts.series import around, nearest, standard_value
from stress.parts.style import Style
from stress.study import balancing, life
from stress.study.replacement_voltage import VoltageChoice
from stress.study.result import Worst
from stress.text.figure import figure
from stress.text.unit import unit

# What a series for high ripple carries over an ordinary one [from memory, to be confirmed].
HIGH_RIPPLE = 1.5
MOST_IN_PARALLEL = 4
PAIR_FROM = 0.02  # an exact value that is farther off is made of two
EXACT_RULE = "exact values of two in parallel (common practice)"
RIPPLE_RULE = "what one part carries: catalogue consensus [from memory, to be confirmed]"


@dataclass(frozen=True, slots=True, kw_only=True)
class Arrangement:
    """What is bought for one position.

    Attributes:
        value_F: Of the whole.
        parts_F: Of every part; one for a plain replacement.
        text: "" for a single part.
        balance_ohm: All balancing resistors in series; None without them.
        short: Why the whole does not serve either, or "".
    """

    value_F: float = field(metadata=unit("F"))
    parts_F: tuple[float, ...] = field(metadata=unit("F"))
    text: str = ""
    balance_ohm: float | None = field(default=None, metadata=unit("ohm"))
    notes: tuple[str, ...] = ()
    rules: tuple[str, ...] = ()
    short: str = ""


def single(value_F: float) -> Arrangement:
    """Return the plain case: one part."""
    return Arrangement(value_F=value_F, parts_F=(value_F,))


def in_series(value_F: float, *, style: Style, volts: VoltageChoice, worst: Worst) -> Arrangement:
    """Return a string of equal parts with a balancing resistor across each.

    Args:
        value_F: What the position is to have.
        style: Of the parts.
        volts: Rating of each, and how many.
        worst: What the string bears, lasting and brief.
    """
    count = volts.count
    each, _ = standard_value(count * value_F, style)
    # Every one is loaded no more than the policy lets a single part be.
    share = min(worst.worst_V / volts.governing.volts, 1.0)
    try:
        string = balancing.series(
            each,
            count=count,
            each_F=each,
            each_V=volts.rated_V * share,
            steady_V=worst.worst_V,
            brief_V=worst.brief_V or 0.0,
        )
    except ValueError as problem:
        return Arrangement(
            value_F=each / count,
            parts_F=(each,) * count,
            text=f"{count} in series",
            short=str(problem),
        )
    resistor = f"{figure(string.resistor_ohm, 'ohm')} {string.resistor_W:g} W"
    return Arrangement(
        value_F=each / count,
        parts_F=(each,) * count,
        text=f"{count} in series with {resistor} across each",
        balance_ohm=count * string.resistor_ohm,
        notes=(
            f"balancing: one of them bears {figure(string.share_V, 'V')} of "
            f"{figure(worst.worst_V, 'V')} at worst, by leakage spread and ±5 % resistors, and "
            f"{figure(string.brief_V, 'V')} while charging, by ±20 % of capacitance; the resistors "
            f"draw {figure(string.bleed_A, 'A')} and discharge the string as well; take resistors "
            f"that stand {figure(string.share_V, 'V')} each, or two in series",
            "the case of the upper part is not at chassis: sleeve it",
        ),
        rules=(balancing.SPREAD_SOURCE,),
    )


def back_to_back(value_F: float, *, style: Style) -> Arrangement:
    """Return two polar parts minus to minus, each of twice the value."""
    each, _ = standard_value(2.0 * value_F, style)
    return Arrangement(
        value_F=each / 2.0,
        parts_F=(each, each),
        text="two in series, minus to minus",
        notes=("each bears the whole voltage in its turn, so each has the full rating",),
        rules=("two polar parts back to back serve as a non-polar one (common practice)",),
    )


def in_parallel(value_F: float, *, style: Style, rated_V: float, ripple_A: float) -> Arrangement:
    """Return one part, or as many in parallel as the ripple asks for.

    Args:
        value_F: What the position is to have.
        style: Of the parts.
        rated_V: Of each.
        ripple_A: 100 Hz equivalent that the whole is to carry.
    """
    count = 1
    while count < MOST_IN_PARALLEL:
        carried = HIGH_RIPPLE * life.ordinary_ripple_A(value_F / count, rated_V=rated_V)
        if ripple_A / count <= carried:
            break
        count += 1
    if count == 1:
        return single(value_F)
    each, _ = standard_value(value_F / count, style)
    return Arrangement(
        value_F=each * count,
        parts_F=(each,) * count,
        text=f"{count} in parallel",
        notes=(
            f"{figure(ripple_A, 'A')} (as 100 Hz) is more than one part of this size carries: "
            f"{count} in parallel, each rated for {figure(ripple_A / count, 'A')} or more",
        ),
        rules=(RIPPLE_RULE,),
    )


def exact(position: Position, *, chosen_F: float) -> Arrangement:
    """Return one part, or two in parallel where the nearest standard value is off by too much."""
    wanted = position.value_F or chosen_F
    if abs(chosen_F / wanted - 1.0) <= PAIR_FROM:
        return single(chosen_F)
    large = around(wanted, "E12")[0]
    pairs = []
    for first in (large, around(large * 0.999, "E12")[0]):
        if wanted - first > 0.005 * wanted:
            pairs.append((first, nearest(wanted - first, "E12")))
    best = min(pairs, key=lambda pair: abs(sum(pair) / wanted - 1.0), default=None)
    if best is None or abs(sum(best) - wanted) >= abs(chosen_F - wanted):
        return single(chosen_F)
    return Arrangement(
        value_F=sum(best),
        parts_F=best,
        text=f"{figure(best[0], 'F')} and {figure(best[1], 'F')} in parallel",
        rules=(EXACT_RULE,),
    )
