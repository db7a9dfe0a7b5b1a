"""What to fit between the line and the chassis, or across the line."""

from __future__ import annotations

from dataclasses import dataclass, field

from stress.circuit.circuit import Circuit, Position
from stress.parts.style import Style
from stress.study.touch import (
    LIMIT_A,
    LIMIT_SOURCE,
    VALUE_TOLERANCE,
    Touch,
    touch,
    what_is_lost,
)
from stress.text.figure import figure
from stress.text.unit import unit

X_RULE = "IEC 60384-14: an X2 part stands impulses of 2.5 kV, an X1 part of 4 kV"
Y_RULE = (
    "IEC 60384-14: a Y2 part stands impulses of 5 kV, and may stand for an X2, never the reverse"
)


@dataclass(frozen=True, slots=True, kw_only=True)
class LinePart:
    """A line position's part.

    Attributes:
        ac_V: Its alternating rating, rms.
        value_max_F: Largest capacitance by the touch current; None for class X.
        touch: What was computed; None for class X or without a line.
    """

    ac_V: float = field(metadata=unit("V"))
    value_max_F: float | None = field(default=None, metadata=unit("F"))
    touch: Touch | None = None
    notes: tuple[str, ...] = ()
    rules: tuple[str, ...] = ()


def line_part(position: Position, *, safety_class: str, style: Style, circuit: Circuit) -> LinePart:
    """Return rating and largest value of a line position's part.

    The rating covers the highest line voltage; the largest value keeps the touch current under
    the published limit with the part at the high end of its tolerance and everything else from
    the line to what can be touched counted.
    """
    most_V = circuit.line.high_V or 0.0
    rated_V = next(
        (step for step in style.steps.rated_V if step >= most_V), style.steps.rated_V[-1]
    )
    if safety_class == "X":
        return LinePart(
            ac_V=rated_V,
            notes=("across the line: class X2 or better, never a plain part",),
            rules=(X_RULE,),
        )
    notes = ["from the line to what can be touched: class Y2 or Y1, never a plain or an X part"]
    found = touch(position, circuit=circuit)
    if found is None:
        notes.append("no alternating line is known: no touch current was computed")
        return LinePart(ac_V=rated_V, notes=tuple(notes), rules=(Y_RULE,))
    notes.append(_as_it_is(found))
    largest = found.value_max_F / (1.0 + VALUE_TOLERANCE)
    if found.fixed_A >= LIMIT_A:
        which = ", ".join(found.resistors) or "what else joins them"
        notes.append(
            f"{which} alone passes {figure(found.fixed_A, 'A')}, more than {figure(LIMIT_A, 'A')}: "
            "raise it first; the value here counts on that"
        )
    notes.append(
        f"up to {figure(largest, 'F')} (±{VALUE_TOLERANCE:.0%}) keeps it below "
        f"{figure(LIMIT_A, 'A')}, shared with the other parts of class Y"
    )
    return LinePart(
        ac_V=rated_V,
        value_max_F=largest,
        touch=found,
        notes=tuple(notes),
        rules=(Y_RULE, LIMIT_SOURCE),
    )


def loss_note(position: Position, *, fitted_F: float) -> str:
    """Return what fitting less than the original costs, or "" where it is not less."""
    lost = what_is_lost(position, fitted_F=fitted_F)
    return (
        f"fitting less than the original {figure(position.value_F or 0.0, 'F')}: {lost}"
        if lost
        else ""
    )


def _as_it_is(found: Touch) -> str:
    told = (
        f"touch current at {figure(found.line_V, 'V')} and {figure(found.frequency_Hz, 'Hz')}: "
        f"{figure(found.reading_A, 'A')} through the body network ({found.body}) with what is "
        f"drawn there, {figure(found.others_A, 'A')} of it by other parts; 2πfCV of this one is "
        f"{figure(found.plain_A, 'A')}"
    )
    if found.earths:
        told += f"; {', '.join(found.earths)} taken for the earth of the service, not counted"
    return told
