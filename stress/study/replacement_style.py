"""Which style of part to fit."""

from __future__ import annotations

from dataclasses import dataclass

from stress.circuit.circuit import Position, Role
from stress.parts import styles
from stress.parts.series import standard_value
from stress.parts.style import Style
from stress.text.figure import figure

PULSES = frozenset({Role.SNUBBER, Role.BUFFER})
SLOPE_RESERVE = 0.5  # of a style's pulse slope is used (common practice)
LARGEST_FILM_F = 10e-6  # more is sold as polypropylene for dc links (common practice)
PLAIN_SLOPE = 1e5  # V/s; less is no pulse
_FILMS = ("film", "film-pp", "snubber")  # each stands steeper pulses than the one before


@dataclass(frozen=True, slots=True)
class StyleChoice:
    """The style to fit, why, and the line that the choice rests on."""

    style: Style
    why: str
    rule: str
    back_to_back: bool = False  # two polar parts, minus to minus
    note: str = ""  # what would serve as well


def style_for(
    position: Position,
    *,
    safety_class: str | None,
    reverse_V: float | None,
    slope_V_per_s: float,
    reverse_share: float | None = None,
    reverse_condition: str | None = None,
) -> StyleChoice:
    """Return the style of part that belongs in a position.

    Args:
        position: With the style of the part that is there.
        safety_class: "X", "Y" or None, from `stress.study.touch`.
        reverse_V: Largest reverse voltage that lasts; None for non-polar styles.
        slope_V_per_s: Steepest change of its voltage.
        reverse_share: Of the rating that the policy lets be used the wrong way round.
        reverse_condition: The condition that makes the reverse voltage.
    """
    if safety_class is not None:
        return StyleChoice(
            styles.styles()[f"line-{safety_class}"],
            f"it is a class {safety_class} position",
            f"IEC 60384-14: class {safety_class} "
            + (
                "across the line" if safety_class == "X" else "from the line to what can be touched"
            ),
        )
    if position.style.polar and reverse_V is not None:
        allowed = position.style.reverse_V(position.rated_V) or 0.0
        if reverse_share is not None and position.rated_V is not None:
            allowed = min(allowed, reverse_share * position.rated_V)
        if reverse_V > allowed:
            at = f" ({reverse_condition})" if reverse_condition else ""
            why = (
                f"it bears {figure(reverse_V, 'V')} the wrong way round{at}, a polar part "
                f"{figure(allowed, 'V')} at most"
            )
            return _non_polar(position, why=why)
    name = position.style.replacement or position.style.name
    if position.style.name == "aluminium-nonpolar" and (position.value_F or 0.0) > LARGEST_FILM_F:
        name = position.style.name  # film of that size finds no room
    if name == "film" and (position.value_F or 0.0) > LARGEST_FILM_F:
        name = "film-pp"
    chosen = styles.styles()[name]
    if chosen.name in _FILMS or position.role in PULSES:
        steep = _steep_enough(position, chosen, slope_V_per_s=slope_V_per_s)
        if steep is not None:
            return steep
    if name == position.style.name:
        return StyleChoice(chosen, f"{chosen.text} again", "same style (common practice)")
    return StyleChoice(
        chosen,
        f"{chosen.text} instead of {position.style.text}",
        f"{position.style.name} is replaced by {name} (common practice)",
    )


def _non_polar(position: Position, *, why: str) -> StyleChoice:
    reverse = position.style.reverse
    rule = f"reverse voltage: {reverse.source}" if reverse else "reverse voltage"
    value_F, volts = position.value_F or 0.0, position.rated_V or 0.0
    if value_F <= LARGEST_FILM_F:
        return StyleChoice(styles.styles()["film"], f"{why}: film has no polarity", rule)
    bipolar = styles.styles()["aluminium-nonpolar"]
    if volts <= bipolar.steps.rated_V[-1]:
        each, _ = standard_value(2.0 * value_F, position.style)
        return StyleChoice(
            bipolar,
            f"{why}: a non-polar electrolytic, either way round",
            rule,
            note=(
                f"two polar parts of {figure(each, 'F')} and its full rated voltage each, in "
                "series and minus to minus, serve as well (common practice)"
            ),
        )
    return StyleChoice(
        position.style, f"{why}: two back to back, minus to minus", rule, back_to_back=True
    )


def _steep_enough(position: Position, chosen: Style, *, slope_V_per_s: float) -> StyleChoice | None:
    """Return a film that stands the pulses of the position; None where any film does."""
    start = _FILMS.index(chosen.name) if chosen.name in _FILMS else 0
    if position.role is Role.SNUBBER:
        start = _FILMS.index("snubber")
    elif position.role is Role.BUFFER:
        start = max(start, _FILMS.index("film-pp"))
    for name in _FILMS[start:]:
        style = styles.styles()[name]
        slope = style.figures.get("slope_V_per_s")
        if slope is None or slope_V_per_s <= SLOPE_RESERVE * slope.value or name == _FILMS[-1]:
            if name == chosen.name:
                return None
            what = position.role.value
            if slope_V_per_s > PLAIN_SLOPE:
                what = f"pulses of {slope_V_per_s * 1e-6:.3g} V/µs"
            source = f": {slope.source}" if slope is not None else ""
            return StyleChoice(
                style,
                f"{style.text} for its place, {what}",
                f"half of a style's pulse slope is used (common practice){source}",
            )
    return None
