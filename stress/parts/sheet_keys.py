"""What may stand in each table of a part sheet: the key, the field it fills, how it is read."""

from __future__ import annotations

import re
from typing import Any

from stress.parts import capacitor_codes, styles
from stress.parts.limit import STRESSES, Rating
from stress.parts.toml_record import (
    MISSING,
    Keys,
    Read,
    Tables,
    amount,
    flag,
    several,
    shown,
    text,
    whole,
    word,
)
from stress.parts.toml_source import Path

OLDEST, NEWEST = 1900, 2100
SOURCE = "sheet"
_PIN = re.compile(r"([a-z_]+?)_?[0-9]?")
PINS = (
    "plate", "screen", "grid", "cathode", "heater", "filament", "suppressor", "diode", "target",
    "shield", "oscillator_grid", "oscillator_plate", "collector", "base", "emitter", "drain",
    "gate", "source",
)  # fmt: skip


def style(tables: Tables, path: Path, value: Any) -> Any:
    """Read the name of a capacitor style, or an alias of it."""
    found = styles.find(value) if isinstance(value, str) else None
    if found is None:
        hint = styles.near(value) if isinstance(value, str) else styles.near("")
        return tables.wrong(path, f"{shown(value)} is no capacitor style", hint)
    return found.name


def tolerance(tables: Tables, path: Path, value: Any) -> Any:
    """Read "10 %" or ["-20 %", "50 %"] as the real value over the marked one, low and high."""
    if isinstance(value, list) and len(value) != 2:
        return tables.wrong(path, "two values are wanted", 'such as ["-20 %", "50 %"]')
    share = amount("1", least=-1.0, most=10.0)
    found = several(share)(tables, path, value)
    if found is MISSING:
        return MISSING
    low, high = (-abs(found[0]), abs(found[0])) if len(found) == 1 else found
    if not low <= 0 <= high:
        return tables.wrong(path, "the lower value comes first", 'such as ["-20 %", "50 %"]')
    if low <= -1:
        return tables.wrong(path, "nothing would be left", 'such as "20 %"')
    return (1 + low, 1 + high)


def pins(tables: Tables, path: Path, value: Any) -> Any:
    """Read which pin of the model is which: names, or numbers from 1."""
    found = {}
    for name, pin in tables.table(path, value).items():
        role = name.lower().replace("anode", "plate")  # the same thing by another name
        base = _PIN.fullmatch(role)
        if base is None or base[1] not in PINS:
            tables.unknown((*path, name), "pin", PINS)
        elif isinstance(pin, str | int) and not isinstance(pin, bool) and str(pin).strip():
            found[role] = str(pin).strip()
        else:
            tables.wrong((*path, name), "a pin name in quotes or a number from 1 is wanted")
    return found


def marking(tables: Tables, path: Path, value: Any) -> Any:
    """Read what is printed or dotted on a capacitor, as the fields it fills."""
    try:
        found = capacitor_codes.read(value if isinstance(value, str) else str(value))
    except capacitor_codes.CodeError as error:
        return tables.wrong(path, str(error), 'such as "104K", or "mica-three: red green black"')
    fields = {
        "value_F": found.value_F,
        "rated_V": found.rated_V,
        "tolerance": found.tolerance,
        "style": found.style,
    }
    return {name: field for name, field in fields.items() if field is not None}


def between(tables: Tables, path: Path, value: Any) -> Any:
    """Read two different node names."""
    found = several(text, least=2, most=2)(tables, path, value)
    if found is not MISSING and found[0].lower() == found[1].lower():
        return tables.wrong(path, "two different nodes are wanted")
    return found


_name = several(text)
_rating = word(*(rating.value for rating in Rating))
_share = amount("1", most=1.0)

EQUIPMENT: Keys = {
    "name": ("name", text),
    "ambient": ("ambient_degC", amount("degC", least=-60.0, most=200.0)),
    "heaters": ("heaters", word("parallel", "series", "battery")),
    "touchable": ("touchable", _name),
    "kind": ("kind", text),
    "tubes_out": ("tubes_out", flag),
    "driven": ("driven", flag),
    "conditions": ("conditions", _name),
}
LINE: Keys = {
    "source": ("sources", _name),
    "sources": ("sources", _name),
    "nominal": ("nominal_V", amount("V")),
    "high": ("high_V", amount("V")),
    "low": ("low_V", amount("V")),
    "period": ("period_s", amount("s")),
}
FITTED: Keys = {
    "value": ("fitted_value_F", amount("F")),
    "rated": ("fitted_rated_V", amount("V")),
    "style": ("fitted_style", style),
}
CAPACITOR: Keys = {
    "style": ("style", style),
    "plus": ("plus", text),
    "rated": ("rated_V", amount("V")),
    "value": ("value_F", amount("F")),
    "ripple": ("ripple_A", amount("A")),
    "esr": ("esr_ohm", amount("ohm", above=False)),
    "insulation": ("insulation_ohm", amount("ohm")),
    "tolerance": ("tolerance", tolerance),
    "year": ("year", whole(OLDEST, NEWEST)),
    "role": ("role", text),
    "metal_case": ("metal_case", flag),
    "marking": ("marking", marking),  # fills what the other keys leave open
    "fitted": ("fitted", lambda tables, path, value: tables.fields(FITTED, path, value)),
}
_TUBE_STRESSES = {
    "plate_voltage": "plate_V",
    "screen_voltage": "screen_V",
    "plate_dissipation": "plate_W",
    "screen_dissipation": "screen_W",
    "grid_dissipation": "grid_W",
    "grid_current": "grid_A",
    "cathode_current": "cathode_A",
    "heater_cathode_voltage": "heater_cathode_V",
    # rectifier tubes
    "current": "average_A",
    "peak_current": "peak_A",
    "reverse": "reverse_V",
}
TUBE_LIMITS: Keys = {
    **{key: (stress, amount(STRESSES[stress])) for key, stress in _TUBE_STRESSES.items()},
    "grid_circuit": ("grid_circuit_ohm", amount("ohm")),
}
TUBE: Keys = {
    "type": ("type", text),
    "pins": ("pins", pins),
    "limits": ("limits", lambda tables, path, value: value),  # after `rating` is known
    "rating": ("rating", _rating),
    "rectifier": ("rectifier", flag),
    "envelope": ("envelope", text),
    "heater_bias": ("heater_bias_V", amount("V", least=-1000.0)),
}
# By table: the key in the file and the stress that it limits. All are absolute limits.
PART_LIMITS: dict[str, dict[str, str]] = {
    "resistors": {"rated": "power_W", "power": "power_W", "voltage": "voltage_V"},
    "windings": {"current": "current_A", "voltage": "voltage_V"},
    "diodes": {"current": "average_A", "peak_current": "peak_A", "reverse": "reverse_V"},
    "transistors": {"power": "power_W", "voltage": "voltage_V", "current": "current_A"},
    "fuses": {"current": "current_A"},
    "controls": {
        "rated": "power_W",
        "power": "power_W",
        "voltage": "voltage_V",
        "current": "current_A",
    },
    "loudspeakers": {"rated": "power_W", "power": "power_W", "current": "current_A"},
}
CONDITION: Keys = {
    "open": ("open", _name),
    "short": ("short", _name),
    "pulled": ("pulled", _name),
    "silicon": ("silicon", _name),
    "muted": ("muted", _name),
    "line": ("line", word("nominal", "high", "low")),
    "lasts": ("lasts", flag),
    "driven": ("driven", flag),
}
STOCK_CONDITIONS = ("nominal", "high", "low", "cold", "pulled", "inrush", "driven")
CAN: Keys = {
    "sections": ("sections", several(text, least=2)),
    "common": ("common", text),
    "case": ("case", text),
}
FAULT: Keys = {"between": ("between", between), "style": ("style", style)}
METER: Keys = {
    "resistance": ("meter_ohm", amount("ohm")),
    "sensitivity": ("meter_ohm_per_V", amount("ohm/V")),
}
BENCH: Keys = {
    "temperature": ("bench_degC", amount("degC", least=-20.0, most=60.0)),
    "safety": ("safety", amount("1", least=1.0, most=100.0, above=False)),
    "tester": ("tester_V", several(amount("V"))),
    "functional": ("functional_share", _share),
    "detuned": ("detuned_share", _share),
}


def part_keys(table: str) -> Keys:
    """Return what may stand in an entry of `[resistors]`, `[windings]` and the like."""
    keys: dict[str, tuple[str, Read]] = {
        key: (stress, amount(STRESSES[stress])) for key, stress in PART_LIMITS[table].items()
    }
    keys |= {"type": ("type", text), "irreplaceable": ("irreplaceable", flag)}
    keys |= {"rating": ("rating", _rating)}
    if table == "fuses":
        keys["class"] = ("blow_class", text)
    return keys


def likelihood(tables: Tables, path: Path, value: Any) -> dict[str, float]:
    """Read the factors on the likelihood of a fault, by style."""
    found = {}
    for name, factor in tables.table(path, value).items():
        known = styles.find(name)
        if known is None:
            tables.unknown((*path, name), "capacitor style", tuple(styles.styles()))
            continue
        result = amount("1", most=1000.0, above=False)(tables, (*path, name), factor)
        if result is not MISSING:
            found[known.name] = result
    return found


TABLES = (
    "equipment", "line", "capacitors", "tubes", *PART_LIMITS, "conditions", "cans", "faults",
    "devices", "blocks", "meter", "bench", "likelihood",
)  # fmt: skip
