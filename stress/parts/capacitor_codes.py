"""What the marks on a capacitor say: colour dots and bands, figures and letters.

The tables are in `capacitor_codes.toml`, each with its source.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from functools import cache
from importlib.resources import files
from typing import Any

from stress.parts.citation import Citation, cited
from stress.parts.law import step
from stress.parts.toml_record import Tables
from stress.parts.toml_source import parse
from stress.text.quantity import quantity
from stress.text.unit import unit

FILE = "capacitor_codes.toml"
_SPELLINGS = {"gray": "grey", "purple": "violet", "-": "none", "body": "none"}
Table = Mapping[str, Any]
_RKM_POWERS = {"p": -12, "n": -9, "u": -6, "m": -3, "F": 0}
_RKM = re.compile(r"(\d{1,3})([pnumF])(\d{0,3})([A-Za-z]?)", re.ASCII)
_FIGURES = re.compile(r"(\d{2})(\d)([A-Z]?)(\d[A-Z])?", re.ASCII)
_VOLTAGE_FIRST = re.compile(r"(\d[A-Z])(\d{2})(\d)([A-Z]?)", re.ASCII)


class CodeError(ValueError):
    """The marks mean nothing in the form given; the message says what would be accepted."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Marking:
    """What a capacitor's marks say; None where they are silent.

    Attributes:
        tolerance: Real value over marked value, low and high.
        style: A name of `stress.parts.styles`.
        sources: The tables it was read with.
    """

    value_F: float = field(metadata=unit("F"))
    tolerance: tuple[float, float] | None = None
    rated_V: float | None = field(default=None, metadata=unit("V"))
    style: str | None = None
    sources: tuple[Citation, ...] = ()


@dataclass(frozen=True, slots=True)
class CeramicLetters:
    """What three letters such as X7R say of a class 2 ceramic (EIA RS-198)."""

    low_degC: float = field(metadata=unit("degC"))
    high_degC: float = field(metadata=unit("degC"))
    fall: float = field(metadata=unit("1"))
    rise: float = field(metadata=unit("1"))
    source: Citation


def forms() -> Mapping[str, Sequence[str]]:
    """Return the forms of dots and bands: for each, what every dot in its order says."""
    return {name: tuple(form["dots"]) for name, form in _table()["forms"].items()}


def dots(form: str, colours: Sequence[str]) -> Marking:
    """Return what the colours of dots or bands say, in the order of the form.

    Args:
        form: One of `forms()`, such as "mica-six".
        colours: A colour each; "none" for a dot that is missing or of the body's colour.

    Raises:
        CodeError: The form is unknown, or a colour does not fit its dot.
    """
    table = _table()
    if form not in table["forms"]:
        raise CodeError(f'no form "{form}"; known: {", ".join(table["forms"])}')
    wanted = table["forms"][form]["dots"]
    spelt = [_SPELLINGS.get(colour.strip().lower(), colour.strip().lower()) for colour in colours]
    if len(spelt) != len(wanted):
        raise CodeError(f"{form} has {len(wanted)} dots: {', '.join(wanted)}")
    said: dict[str, list[str]] = {}
    for what, colour in zip(wanted, spelt, strict=True):
        said.setdefault(what, []).append(colour)
    figures = "".join(str(_digit(colour)) for colour in said["digit"])
    value_F = float(f"{figures}e{_power(said['multiplier'][0]) - 12}")
    used = [table["forms"][form], table["colours"]]
    style = "mica" if form.startswith("mica") else "paper"
    if "type" in said:
        style = _looked_up("mica_type", said["type"][0])
        used.append(table["mica_type"])
    share = 0.2
    if "tolerance" in said:
        share = quantity(_looked_up("colour_tolerance", said["tolerance"][0]), "1")
        used.append(table["colour_tolerance"])
    if not value_F:
        raise CodeError("all figures are black: the dots may be read from the wrong end")
    rated_V, rating = _dot_rating(said, value_F, style)
    return Marking(
        value_F=value_F,
        tolerance=(1 - share, 1 + share),
        rated_V=rated_V,
        style=style,
        sources=_sources(used + rating),
    )


def letters(text: str) -> Marking:
    """Return what figures and letters say: "104K2E", "2E104K", "4n7J", "473".

    Raises:
        CodeError: The text is no such code.
    """
    code = text.strip().replace("µ", "u").replace("μ", "u").replace(" ", "")
    used = [_table()["letter_code"]]
    if found := _RKM.fullmatch(code):
        value_F = float(f"{found[1]}.{found[3] or 0}e{_RKM_POWERS[found[2]]}")
        return _lettered(value_F, found[4].upper(), "", used)
    code = code.upper()
    if found := _VOLTAGE_FIRST.fullmatch(code):
        volts, figures, zeros, letter = found.groups()
    elif found := _FIGURES.fullmatch(code):
        figures, zeros, letter, volts = found.groups()
    else:
        raise CodeError(f'"{text[:20]}" is no code such as 104K, 104K2E or 4n7J')
    power = _table()["letter_code"]["powers"].get(zeros, int(zeros))
    return _lettered(float(f"{figures}e{power - 12}"), letter, volts or "", used)


def ceramic(text: str) -> CeramicLetters:
    """Return what three letters such as X7R say: temperatures, and change of capacitance.

    Raises:
        CodeError: There are no such letters.
    """
    code = text.strip().upper()
    table = _table()["ceramic"]
    try:
        low, high, change = table["low"][code[0]], table["high"][code[1]], code[2:]
        fall, rise = table["fall"][change], table["rise"][change]
    except (KeyError, IndexError):
        raise CodeError(f'"{text[:20]}" are no letters such as X7R or Z5U') from None
    return CeramicLetters(
        low_degC=quantity(low, "degC"),
        high_degC=quantity(high, "degC"),
        fall=quantity(fall, "1"),
        rise=quantity(rise, "1"),
        source=table["source"],
    )


def tantalum_V(colour: str) -> float:
    """Return the rated voltage that the dot of a tantalum bead says, in volt.

    Raises:
        CodeError: The colour is none of them.
    """
    return quantity(_looked_up("tantalum_voltage", colour.strip().lower()), "V")


def read(text: str) -> Marking:
    """Return what marks say, as a part sheet states them.

    Args:
        text: A code in figures and letters, or a form and its colours:
            "mica-six: black green brown red yellow black".

    Raises:
        CodeError: It is neither.
    """
    form, colon, colours = text.partition(":")
    if colon:
        return dots(form.strip().lower(), colours.replace(",", " ").split())
    return letters(text)


def _lettered(value_F: float, letter: str, volts: str, used: list[Table]) -> Marking:
    if not value_F:
        raise CodeError("no capacitance is nothing")
    tolerance = None
    table = _table()
    uneven = table["letter_tolerance_uneven"]
    if letter in uneven["low"]:
        low, high = (quantity(uneven[side][letter], "1") for side in ("low", "high"))
        tolerance = (1 + low, 1 + high)
        used = [*used, uneven]
    elif letter in table["letter_tolerance_pF"]["values"]:
        spread = quantity(table["letter_tolerance_pF"]["values"][letter], "F") / value_F
        tolerance = (1 - spread, 1 + spread)
        used = [*used, table["letter_tolerance_pF"]]
    elif letter:
        share = quantity(_looked_up("letter_tolerance", letter), "1")
        tolerance = (1 - share, 1 + share)
        used = [*used, table["letter_tolerance"]]
    rated_V = None
    if volts:
        rated_V = quantity(_looked_up("voltage_code", volts), "V")
        used = [*used, table["voltage_code"]]
    return Marking(value_F=value_F, tolerance=tolerance, rated_V=rated_V, sources=_sources(used))


def _dot_rating(
    said: Mapping[str, list[str]], value_F: float, style: str
) -> tuple[float | None, list[Table]]:
    """Return the rated voltage by its dot, its bands, or the capacitance."""
    table = _table()
    if "voltage" in said:
        found = _looked_up("mica_voltage", said["voltage"][0])
        return quantity(found, "V"), [table["mica_voltage"]]
    if "hundreds" in said:
        return 100.0 * int("".join(str(_digit(one)) for one in said["hundreds"])), []
    if style != "mica":
        return None, []
    rating = table["mica_rating"]
    steps = tuple(quantity(one, "F") for one in rating["up_to"])
    return quantity(rating["rated"][step(steps, value_F)], "V"), [rating]


def _digit(colour: str) -> int:
    names = _table()["colours"]["names"]
    if colour not in names:
        raise CodeError(f'"{colour}" stands for no figure; those are {", ".join(names)}')
    return int(names.index(colour))


def _power(colour: str) -> int:
    """Return the power of ten that a multiplier dot says."""
    powers = _table()["colours"]["powers"]
    return int(powers[colour]) if colour in powers else _digit(colour)


def _looked_up(table: str, name: str) -> str:
    values = _table()[table]["values"]
    if name not in values:
        kind = table.replace("_", " ")
        raise CodeError(f'"{name}" is no {kind}; known: {", ".join(values)}')
    return str(values[name])


def _sources(used: Sequence[Table]) -> tuple[Citation, ...]:
    return tuple(dict.fromkeys(one["source"] for one in used if "source" in one))


@cache
def _table() -> Table:
    """Return the tables, each with its citation as "source"."""
    content = files("stress.parts").joinpath(FILE).read_text(encoding="utf-8")
    tables = Tables(parse(content, file=FILE))
    values = dict(tables.document.values)
    cite = cited(tables, values.pop("sources"))
    found: dict[str, Any] = {}
    for name, table in values.items():
        rows = table if name == "forms" else {"": table}
        with_source = {
            row: {**one, "source": cite(tables, (name, row, "source"), one["source"])}
            for row, one in rows.items()
        }
        found[name] = with_source if name == "forms" else with_source[""]
    tables.raise_errors()
    return found
