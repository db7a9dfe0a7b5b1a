"""What people write into the value field of a capacitor: value, rating and style in one."""

from __future__ import annotations

import re
from dataclasses import dataclass

from stress.text.number import NumberError, read_number

LONGEST = 120  # characters of a value field
_PLACEHOLDER = re.compile(
    r"(?:c|cp|cap|c_small|cp_small|c_polarized|c_polarised|c_polarized_small|cp1|cp1_small|"
    r"c_feedthrough|c_variable|c_trim|c_us|cpol|elko|electrolytic|capacitor|capacitor_\w*|dnp|"
    r"dnf|dni|nc|np|nm|tbd|n/a|na|val|value|\?+|~|-|x+|c_disc_?\w*|c_(?:01005|0201|0402|0603|0805|1206|1210|1808|1812|2220|2225)(?:_\w*)?|cp_radial\w*|"
    r"cp_axial\w*|cp_elec\w*|[a-z_]*capacitors?_\w*:\S*)",
    re.IGNORECASE,
)
_LEAD = re.compile(r"^(?:cp?|cap)_(?=[\d.])", re.IGNORECASE)
_VALUE = re.compile(
    r"(?P<value>\d*[.,]?\d+(?:[eE][+-]?\d+)?\s*(?:[pnuµμmk]?[fF](?:arads?)?|mfd|uuf|mmf|[pnuµμ]f?|R\d+)?)",
    re.IGNORECASE,
)
_VOLTS = re.compile(
    r"(?P<volts>\d+(?:[.,]\d+)?)\s*(?P<kilo>k?)v(?:dc|ac|olts?)?(?![a-z0-9])", re.IGNORECASE
)
_KILOVOLT = re.compile(r"(\d+)kv(\d+)", re.IGNORECASE)
_STYLES = (
    (r"x1|x2|x3|mkp-?x2|mpx", "line-X"),
    (r"y1|y2|y3|y4|y5", "line-Y"),
    (r"np0|c0g|cog|npo", "ceramic-1"),
    (r"x[5-8][rstuv]|y5[vpu]|z5u|x7r|cer(?:amic)?|mlcc|disc", "ceramic-2"),
    (r"mks|mkt|mkp|mkc|film|poly\w*|pet|pp|ps|styroflex|foil|mylar", "film"),
    (r"paper|pio|mp", "paper"),
    (r"mica|silver-?mica|sm", "mica"),
    (r"tant(?:al(?:um)?)?|ta", "tantalum"),
    (r"elko|elyt|elec\w*|electrolytic|al(?:u|um|uminium|uminum)?|bipolar|cp", "aluminium"),
)
_STYLE = tuple((re.compile(rf"(?:{words})", re.IGNORECASE), style) for words, style in _STYLES)
_NEUTRAL = re.compile(r"tht|smd|smt|\d{4}|[1-9]\d?%|nom|low-?esr|±?\d+%", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class Marking:
    """What a value field says.

    Attributes:
        value_F: None where it is a placeholder.
        rated_V, style: None where silent.
        notice: How it was read, or "" where it is a plain SPICE number.
        left: Pieces that were not understood.
    """

    value_F: float | None
    rated_V: float | None = None
    style: str | None = None
    notice: str = ""
    left: tuple[str, ...] = ()


def is_placeholder(text: str) -> bool:
    """Whether a value field holds a symbol's or footprint's name, or nothing, instead of a value."""
    return len(text) <= LONGEST and _PLACEHOLDER.fullmatch(text.strip()) is not None


def style_of(text: str) -> str | None:
    """Return the style of capacitor that a word of a tag or value names, or None."""
    for word in re.split(r"[\s_,/()]+", text):
        for pattern, style in _STYLE:
            if word and pattern.fullmatch(word):
                return style
    return None


def read_marking(text: str) -> Marking | None:
    """Read a value field such as `100uF/450V`, `C_10uF_450V`, `470n_THT`; None: not understood."""
    if len(text) > LONGEST:
        return None
    rest = _LEAD.sub("", text.strip())
    first = re.split(r"[\s_/;|@]+", rest)[0]
    value = _value(first)
    if value is None:
        found = _VALUE.match(rest)
        value = _value(found["value"].strip()) if found else None
        if found is None or value is None:
            return None
        rest = rest[found.end() :]
        first = found["value"].strip()
    else:
        rest = rest[len(first) :]
    rated, style, left = None, None, []
    kilo = _KILOVOLT.search(rest)
    volts = _VOLTS.search(rest)
    if kilo is not None:  # "1kV5"
        rated = float(f"{kilo[1]}.{kilo[2]}") * 1000
        rest = rest[: kilo.start()] + " " + rest[kilo.end() :]
    elif volts is not None:
        rated = float(volts["volts"].replace(",", ".")) * (1000 if volts["kilo"] else 1)
        rest = rest[: volts.start()] + " " + rest[volts.end() :]
    for word in re.split(r"[\s_/;|@,()-]+", rest):
        if not word or _NEUTRAL.fullmatch(word):
            continue
        found_style = style_of(word)
        if found_style is not None:
            style = style or found_style
        else:
            left.append(word)
    told = [first]
    if rated is not None:
        told.append(f"{rated:g} V")
    if style is not None:
        told.append(style)
    return Marking(value, rated, style, f'"{text}" is read as {", ".join(told)}', tuple(left))


def _value(text: str) -> float | None:
    """Return farads; `mfd`, `uuf` and `mmf` are the old micro- and picofarad."""
    text = text.replace(" ", "")
    old = re.fullmatch(r"(\d*[.,]?\d+)(mfd|uuf|mmfd?)", text, re.IGNORECASE)
    if old is not None:
        scale = 1e-6 if old[2].lower() == "mfd" else 1e-12
        return float(old[1].replace(",", ".")) * scale
    if not re.match(r"\d|[.,]\d", text):
        return None
    text = re.sub(r"^,", "0,", text)
    try:
        return read_number(text, quantity="C").value
    except NumberError:
        return None
