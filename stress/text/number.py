"""Strict SPICE numbers: digits, one scale factor, one unit; everything else is an error."""

from __future__ import annotations

import re
from dataclasses import dataclass
from math import inf, isfinite

_PLAIN = re.compile(r"[+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d+)?")
_NUMBER = re.compile(
    r"([+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eEdD][+-]?\d+)?)([^\W\d_]*|%)(.*)", re.DOTALL
)
_COMMA = re.compile(r"([+-]?\d+),(\d+)([^\W\d_]*)")
# IEC 60062: the letter stands where the point would be ("4k7", "2u2", "4R7", "R47").
_CODED = re.compile(r"([+-]?\d*)(meg|[a-zA-ZµμΩ])(\d+)([^\W\d_]*)", re.IGNORECASE)

SCALES = {
    "t": 1e12,
    "g": 1e9,
    "meg": 1e6,
    "k": 1e3,
    "m": 1e-3,
    "mil": 25.4e-6,
    "u": 1e-6,
    "µ": 1e-6,  # U+00B5, micro sign
    "μ": 1e-6,  # U+03BC, Greek letter
    "n": 1e-9,
    "p": 1e-12,
    "f": 1e-15,
}
_EXPONENTS = {
    "t": 12, "g": 9, "meg": 6, "k": 3, "m": -3, "u": -6, "µ": -6, "μ": -6, "n": -9, "p": -12,
    "f": -15,
}  # fmt: skip
UNITS = frozenset(
    [
        "v",
        "volt",
        "volts",
        "vdc",
        "vac",
        "vrms",
        "vpk",
        "vp",
        "a",
        "amp",
        "amps",
        "ampere",
        "amperes",
        "adc",
        "f",
        "farad",
        "farads",
        "h",
        "hy",
        "henry",
        "henrys",
        "henries",
        "ohm",
        "ohms",
        "Ω",
        "ω",
        "r",
        "hz",
        "hertz",
        "s",
        "sec",
        "secs",
        "second",
        "seconds",
        "w",
        "watt",
        "watts",
        "va",
        "deg",
        "degc",
        "c",
        "degree",
        "degrees",
        "rad",
        "coulomb",
        "coulombs",
        "meter",
        "meters",
        "%",
        "dbv",
        "db",
        "cycles",
    ]
)
SUFFIX_HINT = "suffixes are f p n u m k meg g t, then a unit if you like (10u, 10uF, 4.7k, 1Meg)"


class NumberError(ValueError):
    """The text is no number; `start` and `length` say which part of it is wrong."""

    def __init__(self, message: str, start: int = 0, length: int = 0, hint: str = "") -> None:
        super().__init__(message, start, length, hint)
        self.message, self.start, self.length, self.hint = message, start, length, hint


@dataclass(frozen=True, slots=True)
class Reading:
    """A number as read.

    Attributes:
        value: In the unit of the place, SI.
        trap: The likely meaning where the text probably meant something else, else "".
        likely: The value that was probably meant, where there is a trap.
        unit: The unit written behind it, lower case, or "".
        scale: The scale factor written, lower case ("meg", "u"), or "".
    """

    value: float
    trap: str = ""
    likely: float | None = None
    unit: str = ""
    scale: str = ""


def plain_number(text: str) -> float | None:
    """Return the value of digits without suffix, or None where it is something else."""
    if not _PLAIN.fullmatch(text):
        return None
    value = float(text)
    return value if isfinite(value) else None


def read_number(text: str, *, quantity: str = "") -> Reading:
    """Read one SPICE number.

    Args:
        text: Without blanks.
        quantity: "R", "C" or "L" where the place tells what it is; the traps depend on it.

    Raises:
        NumberError: Not a number, or an unknown suffix.
    """
    read = _read(text, quantity)
    if not isfinite(read.value):
        raise NumberError(f'"{text}" is too large', 0, len(text), "")
    return read


def _read(text: str, quantity: str) -> Reading:
    found = _NUMBER.fullmatch(text)
    if found is None:
        return _unusual(text, quantity)
    digits, tail, rest = found.groups()
    if not tail and not rest:
        return Reading(float(digits.replace("d", "e").replace("D", "e")))
    if rest:
        return _unusual(text, quantity)
    scale, unit = _suffix(tail)
    if scale is None:
        raise NumberError(
            f'unknown suffix "{tail}" in "{text}"', len(digits), len(tail), SUFFIX_HINT
        )
    value = _scaled(digits, scale)
    return _with_trap(Reading(value, unit=unit, scale=scale), text, digits, tail, quantity)


def _scaled(digits: str, scale: str) -> float:
    """Return the nearest float: the scale goes into the exponent, not into a product."""
    digits = digits.lower().replace("d", "e")
    if scale in _EXPONENTS:
        mantissa, _, exponent = digits.partition("e")
        shift = int(exponent) if exponent and len(exponent) < 8 else 0
        if exponent and not shift and exponent.strip("+-0"):
            return inf if exponent[0] != "-" else 0.0
        return float(f"{mantissa}e{shift + _EXPONENTS[scale]}")
    return float(digits) * SCALES.get(scale, 1.0)


def _suffix(tail: str) -> tuple[str | None, str]:
    """Split the letters behind the digits into scale and unit; None where neither fits."""
    low = tail.lower()
    for scale in ("meg", "mil"):
        if low.startswith(scale) and (low[3:] in UNITS or not low[3:]):
            return scale, low[3:]
    if low[0] in SCALES and (not low[1:] or low[1:] in UNITS):
        return low[0], low[1:]
    if low[0] in SCALES and low[1:] == "m":  # micrometre and the like, for the sizes of a MOSFET
        return low[0], "m"
    if low == "farad" or low == "farads":
        return "f", low
    return ("", low) if low in UNITS else (None, "")


def _with_trap(read: Reading, text: str, digits: str, tail: str, quantity: str) -> Reading:
    """Say what was probably meant where SPICE reads something that few people mean."""
    likely, meaning = None, ""
    if quantity == "R" and read.scale == "m" and tail[0] == "M":
        likely = _scaled(digits, "meg")
        meaning = f'"{text}" is {digits} milliohm in SPICE; {digits}Meg was probably meant'
    elif quantity == "C" and read.scale == "f" and tail.lower() in ("f", "farad", "farads"):
        likely = float(digits)
        meaning = f'"{text}" is {digits} femtofarad in SPICE; {digits} farad is written {digits}'
    elif quantity == "C" and tail[0] == "M" and read.scale in ("m", "meg"):
        likely = _scaled(digits, "u")
        unit = "millifarad" if read.scale == "m" else "megafarad"
        meaning = f'"{text}" is {digits} {unit} in SPICE; {digits}u was probably meant'
    elif "μ" in tail:
        meaning = f'"{text}" has the Greek letter mu and is read as micro; other programs read 1'
    return Reading(read.value, meaning, likely, read.unit, read.scale) if meaning else read


def _unusual(text: str, quantity: str) -> Reading:
    """Read the spellings that SPICE does not know but a person does: 4k7 and 1,5k."""
    comma = _COMMA.fullmatch(text)
    if comma is not None:
        read = read_number(f"{comma[1]}.{comma[2]}{comma[3]}", quantity=quantity)
        return Reading(
            read.value, f'"{text}" is read as {comma[1]}.{comma[2]}{comma[3]}; write the point',
            unit=read.unit, scale=read.scale,
        )  # fmt: skip
    coded = _CODED.fullmatch(text)
    if coded is not None:
        whole, letter, part, unit = coded.groups()
        scale = "" if letter in "rRΩ" else letter.lower()
        if letter == "M" and quantity != "C" and quantity != "L":
            scale = "meg"  # IEC 60062 has M for mega
        elif letter == "L" and quantity == "R":
            scale = "m"
        known = scale in SCALES or letter in "rRΩvV"
        if whole in ("", "+", "-"):  # "R47"; any other word that begins with a letter is a name
            known = letter in "rR" and quantity == "R"
        if known and (not unit or unit.lower() in UNITS):
            if quantity == "C" and unit[:1] in "vV" and unit:
                raise NumberError(f'"{text}" is not one number', 0, len(text), SUFFIX_HINT)
            digits = f"{whole or '0'}.{part}"
            value = _scaled(digits, scale if scale in SCALES else "")
            meaning = f'"{text}" is read by IEC 60062 as {digits}{scale if scale != "v" else ""}'
            return Reading(value, meaning, unit=unit.lower(), scale=scale)
    found = _NUMBER.match(text)
    if found is None:
        raise NumberError(f'"{text}" is not a number', 0, len(text), "a number such as 4.7k, 0.1u")
    start = len(found[1])
    raise NumberError(
        f'unknown suffix "{text[start:]}" in "{text}"', start, len(text) - start, SUFFIX_HINT
    )
