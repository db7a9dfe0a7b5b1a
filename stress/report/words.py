"""The words all reports share: trade names of stresses, and words in place of missing numbers."""

from __future__ import annotations

import re
import unicodedata

from stress.circuit.circuit import Position
from stress.finding import Severity
from stress.parts.limit import QUANTITIES, STRESSES
from stress.study.result import LeakageIn, Replacement, Review, Victim
from stress.text.figure import figure

_BEFORE_UNIT = re.compile(r"(?<=\d) (?=[pnµmkMGT]?(?:F|Ω|A|V|W|J|H|s|Hz|h|C)\b|°C|%)")
_SPELT = str.maketrans(
    {"µ": "u", "Ω": "ohm", "°": "deg", "·": "*", "×": "x", "…": "...", "→": "->"}
)
NOT_KNOWN = "not known"
NOT_STUDIED = "not studied"
UNSOLVED = "unsolved"
NO_DAMAGE = "no damage"
NO_EFFECT = "no effect"
NOT_LIMITED = "not limited by the netlist"

SEVERITIES = {
    Severity.REPLACE: "replace before power",
    Severity.TEST: "test before power",
    Severity.WATCH: "watch",
    Severity.NOTE: "note",
}


# Less than this is noise of the simulation and is not spelt out.
_FLOORS = {"V": 1e-3, "A": 1e-9, "W": 1e-6}


def amount(value: float | None, unit: str, *, missing: str = NOT_KNOWN) -> str:
    """Return a number as the trade writes it, or the word that says why there is none."""
    if value is None:
        return missing
    floor = _FLOORS.get(unit, 0.0)
    if 0.0 < abs(value) < floor:
        return f"below {figure(floor, unit)}"
    return figure(value, unit)


def quantity(stress: str) -> str:
    """Return what the trade calls a stress; a name that is not in the list stays as it is."""
    return QUANTITIES.get(stress, stress)


def unit_of(stress: str) -> str:
    """Return the unit of a stress by its name."""
    return STRESSES.get(stress, stress.rpartition("_")[2])


def plain(text: str) -> str:
    """Return the text without control characters, which a name in a netlist may smuggle in."""
    return "".join("�" if unicodedata.category(c) in ("Cc", "Cf") else c for c in text)


def victim(of: Victim) -> str:
    """Return what is driven past which limit: "XU2 plate dissipation 14.6 W, limit 12 W"."""
    unit = unit_of(of.quantity)
    text = f"{of.part} {quantity(of.quantity)} {figure(of.stress, unit)}"
    text += f", limit {figure(of.limit.value, unit)}"
    if of.limit.assumed:
        text += " (assumed)"
    return text + (f", {of.after_text}" if of.after_text else "")


def marked(of: Position) -> str:
    """Return what is fitted: "paper 0.02 µF, 400 V"."""
    value = amount(of.value_F, "F", missing="value not known")
    return f"{of.style.name} {value}, {amount(of.rated_V, 'V', missing='rating not known')}"


def fit(of: Replacement) -> str:
    """Return what to fit: "0.022 µF film, 630 V", "2 x 47 µF aluminium, 450 V, two in series"."""
    values = tuple(dict.fromkeys(of.parts_F)) or (of.value_F,)
    many = f"{of.quantity} x " if of.quantity > 1 and len(values) == 1 else ""
    text = f"{many}{' + '.join(figure(value, 'F') for value in values)} {of.style}"
    if of.safety_class:
        # Parts across or beside the line are rated by their alternating voltage.
        ac_V = of.ac_V if of.ac_V is not None else of.rated_V
        text += f", class {of.safety_class}"
        return f"{text}, {figure(ac_V, 'V')} AC" if ac_V is not None else text
    if of.rated_V is not None:
        text += f", {figure(of.rated_V, 'V')}"
    if of.ac_V is not None:
        text += f" ({figure(of.ac_V, 'V')} AC)"
    return text + (f", {of.arrangement}" if of.arrangement else "")


def encodable(text: str, encoding: str) -> str:
    """Return text that an old terminal can show: "0.02 uF", "3.9 Mohm" where it knows no µ or Ω."""
    try:
        text.encode(encoding)
    except UnicodeEncodeError:
        return text.translate(_SPELT).encode(encoding, "replace").decode(encoding)
    return text


def tidy(text: str) -> str:
    """Return text for the page: as `plain`, and numbers stay on the line of their unit."""
    return _BEFORE_UNIT.sub("\u00a0", plain(text))


def joined(text: str, action: str) -> str:
    """Return what is the matter and what to do about it."""
    if not action:
        return text
    return f"{text} {action}" if text.endswith((".", "!", "?")) else f"{text}; {action}"


def missing_in(review: Review, condition: str) -> str:
    """Return why a condition has no numbers: "unsolved", "does not settle", "not run" …"""
    for unanswered in review.working.unanswered:
        # Cases are named after their condition: "high / C5 short", "inrush at 90°, 0.2 s".
        if unanswered.case == condition or unanswered.case.startswith(
            (f"{condition} /", f"{condition} at ")
        ):
            return unanswered.kind
    return "not run"


def critical(of: LeakageIn) -> str:
    """Return the critical leakage of one condition in words."""
    if of.critical_ohm is not None:
        return "always" if of.always else figure(of.critical_ohm, "ohm")
    return of.unanswered[0].kind if of.unanswered else NO_DAMAGE


def functional(of: LeakageIn) -> str:
    """Return the functional leakage of one condition in words."""
    if of.functional_ohm is not None:
        return figure(of.functional_ohm, "ohm")
    return of.unanswered[0].kind if of.unanswered else NO_EFFECT
