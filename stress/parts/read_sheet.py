"""Read a part sheet: TOML into the frozen records of `stress.parts.sheet`, all errors at once.

Names of parts may be written with their block, quoted or not: `[capacitors."X3.C5"]` and
`[capacitors.X3.C5]` are the same. Which X is a device or a block stands in
`[devices] names = ["X3"]` and `[blocks] names = [...]`, or in a list `devices = ["X3"]` above
the first table. A capacitor's `marking` ("104K", "mica-three: red green black") fills what its
other keys leave open. Limits of tubes are design-centre unless `rating` says otherwise; those
of all other parts are absolute.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from difflib import get_close_matches
from functools import partial
from pathlib import Path as File
from typing import Any, TypeVar

from stress.parts import sheet_keys as keys
from stress.parts.limit import STRESSES, Limit, Rating
from stress.parts.sheet import (
    CanEntry,
    CapacitorEntry,
    ConditionEntry,
    EquipmentEntry,
    FaultEntry,
    LineEntry,
    PartEntry,
    Sheet,
    TubeEntry,
)
from stress.parts.toml_record import MISSING, Keys, Tables, several, text
from stress.parts.toml_source import Path, decode, parse, whole
from stress.text.span import SourceError, SourceErrors, Span

E = TypeVar("E")

SINGLE = ("equipment", "line", "meter", "bench", "likelihood")
NAMED: tuple[tuple[str, Keys, Callable[..., Any]], ...] = (
    ("conditions", keys.CONDITION, ConditionEntry),
    ("cans", keys.CAN, CanEntry),
    ("faults", keys.FAULT, FaultEntry),
)


def read(path: File) -> Sheet:
    """Return the sheet in a file.

    Raises:
        SourceErrors: The file cannot be opened, is no TOML, or states something unusable; every
            error of it, in the order of the text.
    """
    try:
        data = path.read_bytes()
    except OSError as error:
        reason = f"the part sheet cannot be read: {error.strerror or error}"
        raise SourceErrors([SourceError(reason, whole(str(path)))]) from None
    return read_text(decode(data, file=str(path)), path=str(path))


def read_text(content: str, *, path: str) -> Sheet:
    """Return the sheet in a text; `path` is what errors call it.

    Raises:
        SourceErrors: As `read`.
    """
    return _Reader(Tables(parse(content, file=path))).sheet(path)


class _Reader:
    """One reading of one sheet."""

    def __init__(self, tables: Tables) -> None:
        self.tables = tables
        self.values = tables.document.values
        self.spans: dict[tuple[str, ...], Span] = {}

    def sheet(self, path: str) -> Sheet:
        for name in self.values:
            if name not in keys.TABLES:
                self.tables.unknown((name,), "table", keys.TABLES)
        found: dict[str, Any] = {
            "equipment": self._single("equipment", keys.EQUIPMENT, EquipmentEntry),
            "line": self._single("line", keys.LINE, LineEntry),
            "capacitors": self._several("capacitors", keys.CAPACITOR, self._capacitor),
            "tubes": self._several("tubes", keys.TUBE, self._tube),
            "devices": self._names("devices"),
            "blocks": self._names("blocks"),
            "likelihood": keys.likelihood(self.tables, ("likelihood",), self._table("likelihood")),
        }
        for table in keys.PART_LIMITS:
            found[table] = self._several(table, keys.part_keys(table), self._part)
        for table, accepted, make in NAMED:
            entries = self._several(table, accepted, partial(self._named, make))
            found[table] = tuple(entries.values())
        for table, accepted in (("meter", keys.METER), ("bench", keys.BENCH)):
            found |= self.tables.fields(accepted, (table,), self._table(table))
        self._contradictions(found)
        self.tables.raise_errors()
        return Sheet(path=path, spans=self.spans, **found)

    def _table(self, name: str) -> Any:
        value = self.values.get(name, {})
        if name in self.values:
            self._note((name,), (name,), value if name in SINGLE else {})
        return value

    def _note(self, path: Path, own: tuple[str, ...], value: Any) -> None:
        """Note where a table and its keys stand."""
        document = self.tables.document
        self.spans[own] = document.key(path)
        for key in value if isinstance(value, dict) else ():
            self.spans[(*own, key)] = document.place((*path, key))

    def _single(self, name: str, accepted: Keys, make: Callable[..., E]) -> E | None:
        return self.tables.record(make, accepted, (name,), self._table(name))

    def _names(self, name: str) -> tuple[str, ...]:
        """Read `[devices] names = [...]` or `devices = [...]`."""
        value = self.values.get(name, [])
        path: Path = (name,)
        if isinstance(value, dict):
            found = self.tables.fields({"names": ("names", several(text))}, path, value)
            return tuple(found.get("names", ()))
        read = several(text)(self.tables, path, value)
        return () if read is MISSING else tuple(read)

    def _several(
        self, table: str, accepted: Keys, make: Callable[[Path, Any, str, Keys], E | None]
    ) -> dict[str, E]:
        """Read the entries of one table, by name in lower case."""
        found: dict[str, E] = {}
        written: dict[str, str] = {}
        for name, path, value in self._entries((table,), self._table(table), accepted):
            lower = name.lower()
            if lower in written:
                self.tables.wrong(path, f"{written[lower]} has been described above already")
                continue
            written[lower] = name
            self._note(path, (table, lower), value)
            entry = make(path, value, name, accepted)
            if entry is not None:
                found[lower] = entry
        return found

    def _entries(
        self, path: Path, value: Any, accepted: Keys, above: str = ""
    ) -> Iterator[tuple[str, Path, Any]]:
        """Yield each entry with its name; a table in an entry is a part inside that block."""
        for key, entry in self.tables.table(path, value).items():
            inner = {}
            if isinstance(entry, dict):
                inner = {
                    k: v
                    for k, v in entry.items()
                    if isinstance(v, dict)
                    and k not in accepted
                    and not get_close_matches(k.lower(), accepted, n=1, cutoff=0.75)
                }
                entry = {k: v for k, v in entry.items() if k not in inner}
            if entry or not inner:
                yield above + key, (*path, key), entry
            yield from self._entries((*path, key), inner, accepted, f"{above}{key}.")

    def _capacitor(
        self, path: Path, value: Any, name: str, accepted: Keys
    ) -> CapacitorEntry | None:
        before = len(self.tables.errors)
        found = self.tables.fields(accepted, path, value)
        found |= found.pop("fitted", {})
        found = found.pop("marking", {}) | found
        return CapacitorEntry(**found) if len(self.tables.errors) == before else None

    def _tube(self, path: Path, value: Any, name: str, accepted: Keys) -> TubeEntry | None:
        before = len(self.tables.errors)
        found = self.tables.fields(accepted, path, value)
        rating = Rating(found.pop("rating", Rating.DESIGN_CENTRE))
        values = self.tables.fields(keys.TUBE_LIMITS, (*path, "limits"), found.pop("limits", {}))
        found["grid_circuit_ohm"] = values.pop("grid_circuit_ohm", None)
        found["limits"] = _limits(values, rating)
        return TubeEntry(**found) if len(self.tables.errors) == before else None

    def _part(self, path: Path, value: Any, name: str, accepted: Keys) -> PartEntry | None:
        before = len(self.tables.errors)
        found = self.tables.fields(accepted, path, value)
        rating = Rating(found.pop("rating", Rating.ABSOLUTE))
        values = {stress: found.pop(stress) for stress in STRESSES if stress in found}
        found["limits"] = _limits(values, rating)
        return PartEntry(**found) if len(self.tables.errors) == before else None

    def _named(
        self, make: Callable[..., E], path: Path, value: Any, name: str, accepted: Keys
    ) -> E | None:
        return self.tables.record(make, accepted, path, value, name=name)

    def _contradictions(self, found: Mapping[str, Any]) -> None:
        """Note what is right by itself and wrong together."""
        line = found["line"]
        if line is not None and line.nominal_V is not None:
            if line.high_V is not None and line.high_V < line.nominal_V:
                self.tables.wrong(("line", "high"), "the high line is below the nominal one")
            if line.low_V is not None and line.low_V > line.nominal_V:
                self.tables.wrong(("line", "low"), "the low line is above the nominal one")
        for condition in found["conditions"]:
            if condition.name.lower() in keys.STOCK_CONDITIONS:
                self.tables.wrong(
                    ("conditions", condition.name),
                    "this condition is always there",
                    "choose another name for your own",
                )


def _limits(values: Mapping[str, float], rating: Rating) -> dict[str, Limit]:
    return {
        stress: Limit(value=value, source=keys.SOURCE, rating=rating)
        for stress, value in values.items()
    }
