"""Numbers with units as people write them, read strictly into SI floats; the only user of pint.

The plain forms ("0.02 uF", "117 V", "1 Meg") are read by a table, exactly as decimal numbers.
Compound units ("5 mA*kV") and rarer ones ("104 degF") go through
pint, which is slow to start and therefore made on first use only.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from decimal import Decimal
from functools import cache
from math import isfinite
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from pint import UnitRegistry

LONGEST = 60  # characters of one quantity; nothing sensible is longer
_NUMBER = r"[+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d{1,3})?"
_PLAIN = re.compile(rf"({_NUMBER})\s*([^\d\s].*)?")
_FRACTION = re.compile(r"(\d{1,4})/(\d{1,4})\s*(\D.*)?")
# IEC 60062: the letter stands for the point, "4k7". Only letters that cannot be misread.
_RKM = re.compile(r"(\d{1,4})([RkKMGpnuµ])(\d{1,4})")
_UNIT = re.compile(r"[A-Za-z%]+(?:\^?-?[1-4])?(?:\s*[ */]\s*[A-Za-z]+(?:\^?-?[1-4])?){0,3}")

# What each unit measures, with the words for it.
_KINDS = {
    "V": "a voltage",
    "A": "a current",
    "W": "a power",
    "ohm": "a resistance",
    "F": "a capacitance",
    "H": "an inductance",
    "s": "a time",
    "Hz": "a frequency",
    "degC": "a temperature",
    "K": "a temperature difference",
    "J": "an energy",
    "C": "a charge",
    "m": "a length",
    "ohm/V": "a meter's resistance per volt",
    "V/s": "a voltage slope",
    "1": "a plain number",
}
_EXAMPLES = {
    "V": "117 V",
    "A": "70 mA",
    "W": "12 W",
    "ohm": "4.7 kohm",
    "F": "0.02 uF",
    "H": "10 H",
    "s": "2 min",
    "Hz": "120 Hz",
    "degC": "40 degC",
    "K": "10 K",
    "J": "0.5 J",
    "C": "45 uC",
    "m": "18 mm",
    "ohm/V": "20 kohm/V",
    "V/s": "50 V/us",
    "1": "10 %",
}
_POWERS = {"f": -15, "p": -12, "n": -9, "u": -6, "m": -3, "": 0, "k": 3, "M": 6, "G": 9, "T": 12}
# Symbol, the prefixes in use with it, and the names that mean the same.
_SYMBOLS = (
    ("V", "num k", ("volt", "volts", "Vdc", "Vac", "Vrms", "WV", "WVDC")),
    ("A", "pnum ", ("amp", "amps", "ampere", "amperes")),
    ("W", "num k", ("watt", "watts")),
    ("ohm", "um kMGT", ("ohms", "Ohm", "Ohms", "R")),
    ("F", "fpnu ", ("farad", "farads")),
    ("H", "num ", ("henry", "henries", "henrys")),
    ("s", "pnum ", ("sec", "second", "seconds")),
    ("Hz", "m kMG", ("hertz",)),
    ("degC", " ", ("°C", "celsius", "degree_C")),
    ("K", " ", ("kelvin",)),
    ("J", "num k", ("joule", "joules")),
    ("C", "pnum ", ("coulomb",)),
    ("m", "um ", ("metre", "meter")),
    ("ohm/V", " kM", ("ohms/V", "ohm/volt", "ohms/volt", "ohm per volt", "ohms per volt")),
    ("%", " ", ("percent",)),
)
_SLOPES = {"V/s": 0, "V/ms": 3, "V/us": 6, "kV/us": 9, "V/ns": 9}
_OLD = re.compile(r"(?:(u|m)?(u|m)(?:fd|f)s?\.?|mfd)", re.IGNORECASE)


class QuantityError(ValueError):
    """The text is no quantity of the unit wanted; `hint` says what would be accepted."""

    def __init__(self, message: str, hint: str = "") -> None:
        super().__init__(message, hint)  # what unpickling calls again
        self.message, self.hint = message, hint

    def __str__(self) -> str:
        return f"{self.message} ({self.hint})" if self.hint else self.message


def quantity(text: str, unit: str) -> float:
    """Return the number that a text states, in `unit`.

    Args:
        text: Such as "0.02 uF", "117 V", "1/2 W", "1 Meg", "4k7", "40 degC", "2 min".
        unit: The SI unit wanted: "V", "A", "W", "ohm", "F", "H", "s", "Hz", "degC", "K", "J",
            "C", "m", "ohm/V", "V/s", or "1" for a plain number or percentage.

    Raises:
        QuantityError: It is no number, has no unit or the wrong one, or one that old documents
            and new ones use differently ("20 mF", "MFD"), which is asked back.
    """
    if len(text) > LONGEST:
        raise QuantityError(f'"{text[:20]}…" is too long for a quantity', _wanted(unit))
    plain = _ascii(text)
    if found := _RKM.fullmatch(plain):
        return _code(found, unit)
    number, name = _split(plain, text, unit)
    if not name:
        return _bare(number, text, unit)
    if unit == "F" and (name == "mF" or _is_old(name)):
        raise _old_capacitance(number, name, text)
    if prefix := _lone_prefix(name, unit):
        known: tuple[str, int] | None = (unit, _POWERS[prefix])
    else:
        known = _table().get(name) or _loosely(name, text, unit)
    if known is None:
        value = _by_pint(number, name, text, unit)
    elif known[0] == unit:
        value = float(number.scaleb(known[1]))
    elif (known[0], unit) in _OFFSETS:
        value = float(number.scaleb(known[1]) * _OFFSETS[known[0], unit])
    else:
        raise _wrong_kind(text, known[0], unit)
    return _finite(value, text, unit)


# Seconds in a minute or an hour, hundredths in a percentage: exact, so no pint is needed.
_OFFSETS: Mapping[tuple[str, str], Decimal] = {
    ("min", "s"): Decimal(60),
    ("h", "s"): Decimal(3600),
    ("%", "1"): Decimal("0.01"),
}


@cache
def _table() -> Mapping[str, tuple[str, int]]:
    """Return every plain spelling of a unit with its symbol and power of ten."""
    table: dict[str, tuple[str, int]] = {}
    for symbol, prefixes, names in _SYMBOLS:
        for prefix in prefixes.replace(" ", "\0"):
            sign = prefix.strip("\0")
            for name in (symbol, *names):
                table[sign + name] = (symbol, _POWERS[sign])
                if sign == "k" and symbol != "K":
                    table["K" + name] = (symbol, 3)
    for name in ("Meg", "meg", "MEG", "Megohm", "megohm", "Megohms", "megohms", "MEGohm"):
        table[name] = ("ohm", 6)
    table |= {"min": ("min", 0), "minute": ("min", 0), "minutes": ("min", 0)}
    table |= {"h": ("h", 0), "hour": ("h", 0), "hours": ("h", 0)}
    return table | {slope: ("V/s", power) for slope, power in _SLOPES.items()}


# Signs that stand for plain letters. Only these: a general folding would read "10²" as 102.
_SIGNS = {
    "µ": "u",
    "μ": "u",
    "Ω": "ohm",
    "\u2126": "ohm",
    "°C": "degC",
    "℃": "degC",
    "°F": "degF",
    "−": "-",
    "\u00a0": " ",
    "\u2009": " ",
    "\u202f": " ",
}
_FRACTIONS = {"½": "1/2", "¼": "1/4", "⅓": "1/3", "¾": "3/4", "⅛": "1/8"}


def _ascii(text: str) -> str:
    """Return the text with µ as u, Ω as ohm, typographic spaces and signs in plain form."""
    plain = text
    for sign, letters in _SIGNS.items():
        plain = plain.replace(sign, letters)
    plain = plain.strip()
    return _FRACTIONS.get(plain[:1], plain[:1]) + plain[1:]


def _split(plain: str, text: str, unit: str) -> tuple[Decimal, str]:
    if found := _FRACTION.fullmatch(plain):
        if int(found[2]) == 0:
            raise QuantityError(f'"{text}" divides by zero', _wanted(unit))
        return Decimal(found[1]) / Decimal(found[2]), (found[3] or "").strip()
    match = _PLAIN.fullmatch(plain)
    if not plain.isascii() or match is None:
        raise QuantityError(f'"{text}" is no quantity', _wanted(unit))
    rest = (match[2] or "").strip()
    if rest.startswith(","):
        raise QuantityError(
            f'the comma in "{text}" can mean two things',
            f"write a point for decimals and nothing between thousands, {_wanted(unit)}",
        )
    return Decimal(match[1]), rest


def _bare(number: Decimal, text: str, unit: str) -> float:
    if unit != "1" and number != 0:
        raise QuantityError(
            f'"{text}" has no unit, and {_KINDS.get(unit, unit)} is wanted', _wanted(unit)
        )
    if unit == "degC":
        raise QuantityError(f'"{text}" has no unit', _wanted(unit))
    return _finite(float(number), text, unit)


def _code(found: re.Match[str], unit: str) -> float:
    """Return the value of an IEC 60062 code such as 4k7 or 2n2."""
    letter = found[2].replace("K", "k").replace("µ", "u")
    kind = {"R": "ohm", "k": "ohm", "M": "ohm", "G": "ohm"}.get(letter, "F")
    if kind != unit:
        raise _wrong_kind(found[0], kind, unit)
    power = 0 if letter == "R" else _POWERS[letter]
    return float(Decimal(f"{found[1]}.{found[3]}").scaleb(power))


def _lone_prefix(name: str, unit: str) -> str:
    """Return the prefix that stands alone for the unit, as in "470k" or "100n", or ""."""
    allowed = {"ohm": "kKG", "F": "pnu"}.get(unit, "")
    return name.replace("K", "k") if len(name) == 1 and name in allowed else ""


def _is_old(name: str) -> bool:
    return name.lower() != "uf" and _OLD.fullmatch(name) is not None


def _old_capacitance(number: Decimal, name: str, text: str) -> QuantityError:
    """Return the question about a unit that old documents use in another sense.

    MFD, MF and mF stood for microfarads, MMFD, mmF and uuF for picofarads (common practice).
    """
    letters = name.lower().rstrip("s.").removesuffix("d").removesuffix("f")
    modern = "uF" if len(letters) == 1 else "pF"
    figure = f"{number.normalize():f}"
    hint = f'if it comes from an old document, write "{figure} {modern}"'
    if name == "mF":
        hint += f'; if millifarads are meant, write "{figure}000 uF"'
        if "." in figure:
            hint = hint.replace(f"{figure}000", f"{(number * 1000).normalize():f}")
    return QuantityError(f'"{text}" is an old way to write a capacitance, or a rare one', hint)


def _loosely(name: str, text: str, unit: str) -> tuple[str, int] | None:
    """Return what a name in the wrong case means where only one reading exists.

    Anything that could be milli or mega is asked back.
    """
    if name == "M" and unit in ("ohm", "F", "V"):
        raise QuantityError(
            f'"{text}" is a million here and a thousandth in a netlist',
            f'write "{text.rstrip("M ")} Mohm"' if unit == "ohm" else _wanted(unit),
        )
    same = {key: value for key, value in _table().items() if key.casefold() == name.casefold()}
    if not same:
        return None
    if len(set(same.values())) == 1 and not any(key[0] in "mM" for key in same):
        return next(iter(same.values()))
    choices = " or ".join(f'"{key}"' for key in sorted(same))
    raise QuantityError(f'the case of "{name}" in "{text}" matters', f"write {choices}")


def _by_pint(number: Decimal, name: str, text: str, unit: str) -> float:
    """Return a quantity in a compound or rare unit.

    Only letters, small exponents and the signs between them reach pint's parser.
    """
    if not _UNIT.fullmatch(name):
        raise QuantityError(f'"{name}" in "{text}" is no unit', _wanted(unit))
    registry = _registry()
    from pint.errors import PintError

    try:
        given = registry.Quantity(float(number), registry.parse_units(name))
        if given.check(registry.parse_units(_PINT.get(unit, unit)).dimensionality):
            return float(given.to(_PINT.get(unit, unit)).magnitude)
        kinds = [
            kind for kind in _KINDS if given.check(registry.parse_units(_PINT.get(kind, kind)))
        ]
    except (PintError, ValueError, TypeError, ArithmeticError, AttributeError, KeyError):
        raise QuantityError(f'"{name}" in "{text}" is no known unit', _wanted(unit)) from None
    raise _wrong_kind(text, kinds[0] if kinds else "", unit)


_PINT = {"1": "dimensionless", "ohm/V": "ohm/volt", "V/s": "volt/second", "K": "delta_degC"}


@cache
def _registry() -> UnitRegistry[Any]:
    from pint import UnitRegistry

    return UnitRegistry(autoconvert_offset_to_baseunit=False)


def _wrong_kind(text: str, given: str, unit: str) -> QuantityError:
    is_what = _KINDS.get({"min": "s", "h": "s", "%": "1"}.get(given, given))
    told = f"is {is_what}" if is_what else "measures something else"
    return QuantityError(f'"{text}" {told}, and {_KINDS.get(unit, unit)} is wanted', _wanted(unit))


def _wanted(unit: str) -> str:
    return f'such as "{_EXAMPLES[unit]}"' if unit in _EXAMPLES else f"in {unit}"


def _finite(value: float, text: str, unit: str) -> float:
    if not isfinite(value):
        raise QuantityError(f'"{text}" is too large', _wanted(unit))
    return value
