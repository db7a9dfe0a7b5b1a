"""Reads a type table, the program's own or a user's: TOML in, checked entries out."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field, replace
from functools import partial
from pathlib import Path as FilePath
from types import MappingProxyType
from typing import Any, TypeVar

from stress.parts import type_cell as cells
from stress.parts.limit import STRESSES, Limit, Rating
from stress.parts.model import layout, pins_of
from stress.parts.toml_source import Document, Path, decode, parse
from stress.parts.type import Operation, Source, TypeEntry
from stress.text.quantity import quantity
from stress.text.span import SourceError, SourceErrors

_T = TypeVar("_T")

# Key of the file -> stress name.
LIMITS = {
    "plate_voltage": "plate_V",
    "screen_voltage": "screen_V",
    "plate_dissipation": "plate_W",
    "screen_dissipation": "screen_W",
    "grid_dissipation": "grid_W",
    "grid_current": "grid_A",
    "cathode_current": "cathode_A",
    "heater_cathode_voltage": "heater_cathode_V",
    "power": "power_W",
    "voltage": "voltage_V",
    "current": "current_A",
    "peak_inverse": "reverse_V",
    "peak_current": "peak_A",
    "output_current": "average_A",
}
# Key of the file -> field and unit.
NUMBERS = {
    "heater_voltage": ("heater_V", "V"),
    "heater_current": ("heater_A", "A"),
    "grid_circuit_fixed": ("grid_circuit_fixed_ohm", "ohm"),
    "grid_circuit_cathode": ("grid_circuit_cathode_ohm", "ohm"),
    "plate_rms": ("plate_rms_V", "V"),
    "peak_inverse": ("peak_inverse_V", "V"),
    "peak_current": ("peak_A", "A"),
    "output_current": ("average_A", "A"),
    "drop": ("drop_V", "V"),
    "drop_at": ("drop_A", "A"),
    "first_capacitor": ("first_capacitor_max_F", "F"),
    "supply_impedance": ("supply_impedance_min_ohm", "ohm"),
}
LINE = {
    "plate": ("plate_V", "V"),
    "screen": ("screen_V", "V"),
    "grid": ("grid_V", "V"),
    "plate_current": ("plate_A", "A"),
    "screen_current": ("screen_A", "A"),
    "transconductance": ("gm_S", "A"),
    "plate_resistance": ("plate_ohm", "ohm"),
}


def read(
    path: FilePath, *, known: Mapping[str, TypeEntry] = MappingProxyType({})
) -> tuple[TypeEntry, ...]:
    """Return the entries of a file, in its order.

    Args:
        path: A TOML file; see `stress/parts/type_table` for the form.
        known: Entries that `like` may name besides those of the file itself.

    Raises:
        SourceErrors: Everything that is wrong with it.
        OSError: It cannot be read.
    """
    file = str(path)
    reader = _Reader(parse(decode(path.read_bytes(), file=file), file=file))
    entries = dict(known)
    own = []
    for name in reader.document.values:
        entry = reader.entry(name, entries)
        if entry is not None:
            entries[name] = entry
            own.append(entry)
    if reader.errors:
        order = sorted(reader.errors, key=lambda error: (error.span.line, error.span.column))
        raise SourceErrors(order)
    return tuple(own)


@dataclass(slots=True)
class _Reader:
    """One file being read; collects what is wrong instead of stopping at the first."""

    document: Document
    errors: list[SourceError] = field(default_factory=list)

    def fault(self, path: Path, message: str, hint: str = "") -> None:
        """Note an error at a value, or at what holds it."""
        self.errors.append(SourceError(message, self.document.place(path), hint))

    def unknown(self, path: Path, known: Iterable[str]) -> None:
        """Note a key that means nothing."""
        hint = "keys: " + " ".join(sorted(known))
        self.errors.append(SourceError(f'unknown key "{path[-1]}"', self.document.key(path), hint))

    def attempt(self, path: Path, get: Callable[[], _T]) -> _T | None:
        """Return what `get` gives, or None after noting why it fails."""
        try:
            return get()
        except ValueError as error:
            self.fault(path, str(error), getattr(error, "hint", ""))
            return None

    def entry(self, name: str, known: Mapping[str, TypeEntry]) -> TypeEntry | None:
        row = self.document.values[name]
        if not isinstance(row, dict):
            self.fault((name,), "a type is a table, [NAME]")
            return None
        base = None
        if "like" in row:
            base = known.get(row["like"]) if isinstance(row["like"], str) else None
            if base is None:
                self.fault((name, "like"), f"{row['like']!r}: no type of that name stands above")
                return None
        told = {
            key: self.attempt((name, key), partial(kind, row[key]))
            for key, kind in WORDS.items()
            if key in row
        }
        words: dict[str, Any] = {key: word for key, word in told.items() if word is not None}
        default = words.pop("source", None)
        rating: Rating = words.pop("rating", Rating.DESIGN_CENTRE)
        changes = {"name": name, "note": "", **words, **self._numbers(name, base, default, rating)}
        lines = row.get("operation", [])
        if not isinstance(lines, list):
            self.fault((name, "operation"), "operation is a list of tables, [{plate = …}]")
        elif lines:
            found = [
                self._line((name, "operation", k), lines[k], default) for k in range(len(lines))
            ]
            changes["operation"] = tuple(line for line in found if line is not None)
        for key in row:
            if key not in KEYS:
                self.unknown((name, key), KEYS)
        if base is not None:
            return _finish(replace(base, **{"aliases": (), **changes}))
        if "family" not in changes:
            if "family" not in row:
                self.fault(
                    (name,), f"{name} needs a family", "one of: " + ", ".join(cells.FAMILIES)
                )
            return None
        return _finish(TypeEntry(**changes))

    def _numbers(
        self, name: str, base: TypeEntry | None, default: Source | None, rating: Rating
    ) -> dict[str, Any]:
        """Return the fields with a unit, the limits, and the sources of all."""
        row = self.document.values[name]
        sources: dict[str, Source] = dict(base.sources) if base else {}
        limits: dict[str, Limit] = dict(base.limits) if base else {}
        changes: dict[str, Any] = {}
        for key in row:
            if key not in LIMITS and key not in NUMBERS:
                continue
            path = (name, key)
            found = self.attempt(path, partial(cells.parts, row[key], default, rating))
            if found is None:
                continue
            words, source, system = found
            attribute, unit = NUMBERS.get(key) or (LIMITS[key], STRESSES[LIMITS[key]])
            value = self.attempt(path, partial(cells.positive, words, unit))
            if value is None:
                continue
            if key in NUMBERS:
                changes[attribute] = value
                sources[attribute] = source
            if key in LIMITS:
                limits[LIMITS[key]] = Limit(value=value, source=str(source), rating=system)
                sources[f"limits.{LIMITS[key]}"] = source
        changes["limits"] = MappingProxyType(limits)
        changes["sources"] = MappingProxyType(sources)
        return changes

    def _line(self, path: Path, row: Any, default: Source | None) -> Operation | None:
        if not isinstance(row, dict):
            self.fault(path, "a line of operation is a table, {plate = …}")
            return None
        values: dict[str, Any] = {"source": default}
        for key, cell in row.items():
            if key in LINE_WORDS:
                attribute, kind = LINE_WORDS[key]
                value = self.attempt((*path, key), partial(kind, cell))
            elif key in LINE:
                attribute, unit = LINE[key]
                get = cells.conductance if key == "transconductance" else quantity
                value = self.attempt((*path, key), partial(get, cells.text(cell), unit))
            else:
                self.unknown((*path, key), {*LINE, *LINE_WORDS})
                continue
            if value is None:
                return None
            values[attribute] = value
        if values["source"] is None:
            self.fault(path, "this line has no source, nor has its entry")
            return None
        if values.get("plate_V") is None:
            self.fault(path, "this line has no plate voltage")
            return None
        return Operation(**values)


WORDS: Mapping[str, Callable[[Any], Any]] = {
    "family": cells.family,
    "source": cells.source_of,
    "rating": cells.rating_system,
    "aliases": cells.strings,
    "gas": cells.string,
    "note": cells.string,
    "directly_heated": cells.flag,
    "slow": cells.flag,
    "contact": cells.flag,
    "remote": cells.flag,
    "plates": cells.count,
    "diodes": cells.count,
}
LINE_WORDS: Mapping[str, tuple[str, Callable[[Any], Any]]] = {
    "amplification": ("mu", cells.ratio),
    "cutoff": ("cutoff", cells.flag),
    "unit": ("unit", cells.count),
    "source": ("source", cells.source_of),
}
KEYS = frozenset({*LIMITS, *NUMBERS, *WORDS, "like", "operation"})


def _finish(entry: TypeEntry) -> TypeEntry:
    """Fill in what follows from the rest."""
    warm_up = "instant"
    if entry.heater_V is not None:
        warm_up = "filament" if entry.directly_heated else "cathode"
    pins = pins_of(layout(entry))
    model = entry.model or (entry.name if pins else "")
    return replace(entry, warm_up=warm_up, pins=pins, model=model)
