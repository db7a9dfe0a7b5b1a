"""What may stand in `styles.toml`: every key with the field it fills and its unit."""

from __future__ import annotations

from typing import Any

from stress.parts import law
from stress.parts.toml_record import (
    MISSING,
    Keys,
    Read,
    Tables,
    amount,
    flag,
    mapped,
    nested,
    number,
    several,
    text,
    word,
)
from stress.parts.toml_source import Path

FAULTS = ("leaky", "short", "open", "dried", "reversed")


# The unit that the name of a figure ends with; a plain ratio otherwise.
_ENDINGS = {"_V_per_s": "V/s", "_V": "V", "_A": "A", "_K": "K", "_degC": "degC", "_s": "s"}


def assumption_keys(cite: Read) -> Keys:
    """Return what may stand in a row of the table of assumed styles."""
    return {
        "style": ("style", text),
        "text": ("text", text),
        "source": ("source", cite),
        "roles": ("roles", several(text)),
        "polar": ("polar", flag),
        "least": ("least_F", amount("F")),
        "below": ("below_F", amount("F")),
        "rated_below": ("rated_below_V", amount("V")),
    }


def style_keys(cite: Read) -> Keys:
    """Return what may stand in a table of a style, with the unit of each number."""
    share = amount("1", least=-1.0, above=False)
    plain = number(least=-100.0)
    source: Keys = {"source": ("source", cite)}
    volts = ("rated_V", several(amount("V")))
    at = ("at_Hz", several(amount("Hz")))
    loss: Keys = {
        **source,
        "at": at,
        "tan": ("tan", several(share)),
        "rated": volts,
        "unrated": ("unrated", share),
        "constant_above": ("constant_above", word("tan", "esr")),
        "extra_per": ("extra_per_F", plain),
        "extra_from": ("extra_from_F", amount("F")),
    }
    insulation: Keys = {
        **source,
        "product": ("product_s", amount("s")),
        "most": ("most_ohm", amount("ohm")),
    }
    leakage: Keys = {
        **source,
        "name": ("name", text),
        "scale": ("scale", several(plain)),
        "rated": volts,
        "c_power": ("c_power", plain),
        "u_power": ("u_power", plain),
        "plus": ("plus_A", amount("A")),
        "at_least": ("at_least_A", amount("A")),
        "at_most": ("at_most_A", amount("A")),
        "after": ("after_s", amount("s")),
    }
    hot: Keys = {
        **source,
        "doubling": ("doubling_K", amount("K")),
        "voltage_power": ("voltage_power", plain),
        "voltage_source": ("voltage_source", cite),
        "time_power": ("time_power", plain),
        "time_source": ("time_source", cite),
    }
    surge: Keys = {
        **source,
        "ratio": ("ratio", several(plain)),
        "rated": volts,
        "text": ("text", text),
    }
    reverse: Keys = {
        **source,
        "most": ("most_V", amount("V", above=False)),
        "share": ("share", share),
    }
    ripple: Keys = {
        **source,
        "up_to": ("up_to_V", amount("V")),
        "at": at,
        "factor": ("factor", several(plain)),
    }
    wear: Keys = {
        **source,
        "fall": ("fall", share),
        "esr_factor": ("esr_factor", plain),
        "life": ("life_s", amount("s")),
        "life_at": ("life_degC", amount("degC")),
        "core_rise": ("core_rise_K", amount("K")),
        "life_source": ("life_source", cite),
    }
    span: Keys = {**source, "low": ("low", share), "high": ("high", share)}
    fate: Keys = {
        **source,
        "usual": ("usual", word("leaky", "short", "open", "dried")),
        "ageing": ("ageing", text),
        "failure": ("failure", text),
        "share": ("share", mapped(share, FAULTS)),
        "years": ("years", plain),
    }
    line_class: Keys = {
        **source,
        "name": ("name", text),
        "rated": ("rated_V", amount("V")),
        "peak": ("peak_V", amount("V")),
        "impulse": ("impulse_V", amount("V")),
        "impulse_up_to": ("impulse_F", amount("F")),
        "proof": ("proof_V", amount("V")),
    }
    steps: Keys = {**source, "rated": volts}
    degrees: Keys = {**source, "value": ("value", amount("degC"))}
    return {
        "text": ("text", text),
        "polar": ("polar", flag),
        "aliases": ("aliases", several(text)),
        "replacement": ("replacement", text),
        "loss": ("loss", nested(law.Loss, loss)),
        "insulation": ("insulation", nested(law.Insulation, insulation)),
        "hot": ("hot", nested(law.Hot, hot)),
        "leakages": ("leakages", several(nested(law.Leakage, leakage))),
        "surge": ("surge", nested(law.Surge, surge)),
        "reverse": ("reverse", nested(law.Reverse, reverse)),
        "ripples": ("ripples", several(nested(law.Ripple, ripple))),
        "wear": ("wear", nested(law.Wear, wear)),
        "absorption": ("absorption", nested(law.Share, span)),
        "tolerance": ("tolerance", nested(law.Share, span)),
        "new_tolerance": ("new_tolerance", nested(law.Share, span)),
        "steps": ("steps", nested(law.Steps, steps)),
        "bias": ("bias", nested(law.Share, span)),
        "fate": ("fate", nested(law.Fate, fate)),
        "highest": ("highest_degC", nested(law.Quoted, degrees)),
        "figures": ("figures", _figures(cite)),
        "classes": ("classes", several(nested(law.LineClass, line_class))),
    }


def _figures(cite: Read) -> Read:
    """Read numbers whose names end with their unit."""

    def reader(tables: Tables, path: Path, value: Any) -> Any:
        found = {}
        for name, table in tables.table(path, value).items():
            unit = next((u for end, u in _ENDINGS.items() if name.endswith(end)), "1")
            keys: Keys = {"value": ("value", amount(unit, above=False)), "source": ("source", cite)}
            found[name] = tables.record(law.Quoted, keys, (*path, name), table)
        return MISSING if None in found.values() else found

    return reader
