"""Reads a type table, the program's own or a user's: TOML in, checked entries out."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace
from functools import partial
from pathlib import Path
from types import MappingProxyType
from typing import Any

from stress.parts.limit import STRESSES, Limit, Rating
from stress.parts.model import layout, pins_of
from stress.parts.type import MARKS, Operation, Source, TypeEntry
from stress.text.quantity import quantity
from stress.text.span import SourceError, SourceErrors, Span

FAMILIES = (
    "triode",
    "double triode",
    "pentode",
    "beam tube",
    "converter",
    "diode-triode",
    "diode-pentode",
    "triode-pentode",
    "triode-converter",
    "double diode",
    "rectifier",
    "silicon rectifier",
    "selenium stack",
    "silicon diode",
    "germanium diode",
    "germanium transistor",
    "silicon transistor",
)
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
FLAGS = ("directly_heated", "slow", "contact", "remote")
WORDS = ("family", "gas", "note", "warm_up")
_MARKED = re.compile(r"(?P<text>.*?)\s*\[(?P<mark>[^\][]+)\]\s*\Z", re.DOTALL)


def _conductance(text: str, unit: str) -> float:
    """Return a transconductance such as "4.1 mA/V" without waking pint up.

    Raises:
        ValueError: When it is none.
    """
    if not text.endswith("/V"):
        raise ValueError(f'"{text}" is no transconductance: write 4.1 mA/V')
    return quantity(text.removesuffix("/V"), unit)


def read(
    path: Path, *, known: Mapping[str, TypeEntry] = MappingProxyType({})
) -> tuple[TypeEntry, ...]:
    """Return the entries of a file, in its order.

    Args:
        path: A TOML file; see `stress/parts/type_table` for the form.
        known: Entries that `like` may name besides those of the file itself.

    Raises:
        SourceErrors: Everything that is wrong with it.
    """
    text = path.read_text(encoding="utf-8")
    try:
        tables = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        where = re.search(r"line (\d+)", str(error))
        line = int(where[1]) if where else 1
        rows = text.splitlines() or [""]
        at = Span(str(path), line, 1, 1, rows[min(line, len(rows)) - 1])
        raise SourceErrors([SourceError(f"no TOML: {error}", at)]) from error
    reader = _Reader(str(path), text)
    entries = dict(known)
    own = []
    for name, row in tables.items():
        if not isinstance(row, dict):
            reader.fault(name, name, "a type is a table, [NAME]")
            continue
        entry = reader.entry(name, row, entries)
        if entry is not None:
            entries[name] = entry
            own.append(entry)
    if reader.errors:
        raise SourceErrors(sorted(reader.errors, key=lambda error: error.span.line))
    return tuple(own)


@dataclass(slots=True)
class _Reader:
    """One file being read; collects what is wrong instead of stopping at the first."""

    file: str
    text: str
    errors: list[SourceError] = field(default_factory=list)

    def fault(self, name: str, key: str, message: str, hint: str = "") -> None:
        """Note an error at a key of a type."""
        lines = self.text.splitlines()
        heads = [i for i, row in enumerate(lines) if row.strip().strip("[]\"' ") == name]
        start = heads[0] if heads else 0
        for index in range(start, len(lines)):
            column = lines[index].find(key)
            if column >= 0:
                span = Span(self.file, index + 1, column + 1, max(len(key), 1), lines[index])
                break
        else:
            span = Span(self.file, 0, 0, 1, "")
        self.errors.append(SourceError(message, span, hint))

    def attempt(self, name: str, key: str, get: Callable[[], Any]) -> Any:
        """Return what `get` gives, or None after noting why it fails."""
        try:
            return get()
        except (ValueError, TypeError) as error:
            self.fault(name, key, str(error))
            return None

    def entry(
        self, name: str, row: dict[str, Any], known: Mapping[str, TypeEntry]
    ) -> TypeEntry | None:
        row = dict(row)
        base = None
        if "like" in row:
            like = row.pop("like")
            base = known.get(like)
            if base is None:
                self.fault(name, "like", f'"{like}" stands nowhere above')
                return None
        default = self._source(name, row.pop("source", None), base)
        rating = self.attempt(name, "rating", lambda: Rating(row.pop("rating", "design-centre")))
        sources: dict[str, Source] = dict(base.sources) if base else {}
        limits: dict[str, Limit] = dict(base.limits) if base else {}
        changes: dict[str, Any] = {"name": name, "aliases": tuple(row.pop("aliases", ()))}
        for key in list(row):
            if key not in LIMITS and key not in NUMBERS:
                continue
            found = self.attempt(name, key, partial(_parts, row[key], default, rating))
            del row[key]
            if found is None:
                continue
            words, source, system = found
            if key in NUMBERS:
                attribute, unit = NUMBERS[key]
                changes[attribute] = self.attempt(name, key, partial(quantity, words, unit))
                sources[attribute] = source
            if key in LIMITS:
                stress = LIMITS[key]
                value = self.attempt(name, key, partial(quantity, words, STRESSES[stress]))
                if value is not None:
                    limits[stress] = Limit(value=abs(value), source=str(source), rating=system)
                    sources[f"limits.{stress}"] = source
        for key in WORDS + FLAGS + ("plates", "diodes"):
            if key in row:
                changes[key] = row.pop(key)
        lines = [self._line(name, line, default) for line in row.pop("operation", ())]
        if lines:
            changes["operation"] = tuple(line for line in lines if line is not None)
        for key in row:
            self.fault(
                name, key, f'unknown key "{key}"', "keys: " + " ".join(sorted({*LIMITS, *NUMBERS}))
            )
        changes |= {"limits": MappingProxyType(limits), "sources": MappingProxyType(sources)}
        changes.setdefault("note", "")
        if base is not None:
            return _finish(replace(base, **changes))
        if changes.get("family") not in FAMILIES:
            self.fault(name, "family", f"{name} needs a family", "one of: " + ", ".join(FAMILIES))
            return None
        return _finish(TypeEntry(**changes))

    def _source(self, name: str, text: str | None, base: TypeEntry | None) -> Source | None:
        if text is None:
            return None
        return self.attempt(name, "source", lambda: marked(text))  # type: ignore[no-any-return]

    def _line(self, name: str, row: dict[str, Any], default: Source | None) -> Operation | None:
        row = dict(row)
        source = default
        if "source" in row:
            words = row.pop("source")
            source = self.attempt(name, "operation", lambda: marked(words))
        if source is None:
            self.fault(name, "operation", f"a line of {name} without a source")
            return None
        values: dict[str, Any] = {
            "mu": row.pop("amplification", None),
            "cutoff": row.pop("cutoff", False),
            "unit": row.pop("unit", 1),
        }
        for key, words in row.items():
            if key not in LINE:
                self.fault(name, "operation", f'unknown key "{key}"', "keys: " + " ".join(LINE))
                continue
            attribute, unit = LINE[key]
            get = _conductance if key == "transconductance" else quantity
            values[attribute] = self.attempt(name, key, partial(get, words, unit))
        if values.get("plate_V") is None:
            self.fault(name, "operation", f"a line of {name} without plate voltage")
            return None
        return Operation(**values, source=source)


def marked(text: str) -> Source:
    """Split "RCA RC-19 [memory H]".

    Raises:
        ValueError: When the mark is missing or unknown.
    """
    match = _MARKED.match(text)
    if match is None or match["mark"] not in MARKS:
        raise ValueError(f'"{text}" does not end in a mark: [' + "] [".join(MARKS) + "]")
    return Source(match["text"], match["mark"])


def _parts(cell: Any, default: Source | None, rating: Rating) -> tuple[str, Source, Rating]:
    """Return quantity, source and rating system of a cell: "5 V" or ["5 V", source, rating]."""
    cells = [cell] if isinstance(cell, str) else list(cell)
    if not cells or not all(isinstance(part, str) for part in cells) or len(cells) > 3:
        raise ValueError(f'{cell!r} is neither "5 V" nor ["5 V", "source [mark]", "rating system"]')
    source = marked(cells[1]) if len(cells) > 1 else default
    if source is None:
        raise ValueError(f'"{cells[0]}" has no source, nor has its entry')
    return cells[0], source, Rating(cells[2]) if len(cells) > 2 else rating


def _finish(entry: TypeEntry) -> TypeEntry:
    """Fill in what follows from the rest."""
    warm_up = entry.warm_up
    if entry.heater_V is not None and warm_up == "instant":
        warm_up = "filament" if entry.directly_heated else "cathode"
    pins = pins_of(layout(entry))
    return replace(
        entry, warm_up=warm_up, pins=pins, model=entry.model or (entry.name if pins else "")
    )
