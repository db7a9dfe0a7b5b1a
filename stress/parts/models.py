"""The built-in models: SPICE text by type, and emission by heater voltage."""

from __future__ import annotations

import tomllib
from collections.abc import Mapping, Sequence
from functools import cache
from pathlib import Path
from typing import Any

from stress.parts import types, wound
from stress.parts.model import Unit
from stress.parts.model_text import junction_card, subcircuit_text
from stress.parts.type import TypeEntry

TABLE = Path(__file__).parent / "model_table"


def subcircuit(name: str, *, extra: Sequence[TypeEntry] = ()) -> str | None:
    """Return the `.subckt` of the built-in model of a type, or None.

    The name is matched as by `stress.parts.types.find`; the subcircuit carries the name that
    was asked for. Pins: plate grid cathode; plate screen grid cathode; rectifiers plate
    [plate2] cathode; then diode, diode2, oscillator, plate2, grid2, cathode2 as far as the
    type has them (`TypeEntry.pins`). One unit of a double triode is one subcircuit. The wound
    parts of `stress.parts.wound` are found by their own names. Entries in `extra` (a user's
    own) go before those of the table and may use a model by `like`.
    """
    wound_part = wound.subcircuit(name)
    if wound_part is not None:
        return wound_part
    entry = types.find(name, extra=extra)
    if entry is None:
        return None
    found = units(entry)
    return subcircuit_text("_".join(name.split()), pins=entry.pins, units=found) if found else None


def device_model(name: str, *, extra: Sequence[TypeEntry] = ()) -> str | None:
    """Return the `.model` card of a diode or rectifier of the table, or None.

    For a D whose model the netlist does not bring, such as `D1 a k 1N4007`.
    """
    entry = types.find(name, extra=extra)
    found = units(entry) if entry else ()
    if not found or found[0].form != "junction":
        return None
    return junction_card("_".join(name.split()), found[0])


def units(entry: TypeEntry) -> tuple[Unit, ...]:
    """Return the units of the model of a type, () where there is none."""
    rows = _table().get(entry.model, {}).get("unit", ())
    return tuple(
        Unit(
            row["form"],
            tuple(row["pins"]),
            {name: float(v) for name, v in row.items() if name not in ("form", "pins")},
        )
        for row in rows
    )


def fit_error(entry: TypeEntry) -> Mapping[str, float]:
    """Return how far the model is off its published lines, in parts of one.

    Keys "plate", "screen", "gm" for the lines of `TypeEntry.operation` and "curves" for points
    read off published curves, the worst of each; empty for rectifiers, whose drop is exact.
    """
    return dict(_table().get(entry.model, {}).get("fit", {}))


def modelled() -> tuple[TypeEntry, ...]:
    """Return the entries that have a model."""
    return tuple(entry for entry in types.all_types() if units(entry))


def emission(entry: TypeEntry, heater_share: float) -> float:
    """Return the share of full emission at a share of the rated heater voltage.

    A straight line from none to full between 70 and 85 % of the rated voltage for cathode
    types, between 50 and 80 % for filaments. Common practice: receivers wake up on a slow
    supply at about 70 to 80 % of the line, battery and rectifier filaments earlier; only the
    two ends are used in advice, the line between is a convention.
    """
    if entry.warm_up == "instant":
        return 1.0
    low, full = (0.5, 0.8) if entry.directly_heated else (0.7, 0.85)
    return min(1.0, max(0.0, (heater_share - low) / (full - low)))


@cache
def _table() -> Mapping[str, Mapping[str, Any]]:
    """Return the model table as it stands in its files, by type."""
    found: dict[str, Mapping[str, Any]] = {}
    for path in sorted(TABLE.glob("*.toml")):
        found |= tomllib.loads(path.read_text(encoding="utf-8"))
    return found
