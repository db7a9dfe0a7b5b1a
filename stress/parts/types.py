"""The type table: every tube, rectifier, diode and transistor the program knows."""

from __future__ import annotations

import difflib
from collections.abc import Mapping, Sequence
from functools import cache
from pathlib import Path

from stress.parts import read_type
from stress.parts.recognise import candidates, plain
from stress.parts.type import TypeEntry

TABLE = Path(__file__).parent / "type_table"


def find(name: str, *, extra: Sequence[TypeEntry] = ()) -> TypeEntry | None:
    """Return the entry of a type, or None.

    Case, spaces and hyphens do not count; aliases and the usual decorations of subcircuit
    names ("X6V6GT_AN", "12AX7-A") are seen through.

    Args:
        name: A designation, or the name of a subcircuit.
        extra: Entries of the user's own, which go before those of the table.
    """
    own = _index(extra)
    for candidate in candidates(name):
        entry = own.get(candidate) or _table().get(candidate)
        if entry is not None:
            return entry
    return None


def near(name: str) -> tuple[str, ...]:
    """Return up to six designations or aliases that look like the name, best first."""
    shown = {plain(word): word for entry in all_types() for word in (*entry.aliases, entry.name)}
    matches = difflib.get_close_matches(plain(name), shown, n=6, cutoff=0.5)
    return tuple(shown[match] for match in matches)


@cache
def all_types() -> tuple[TypeEntry, ...]:
    """Return the whole table, family by family."""
    known: dict[str, TypeEntry] = {}
    for path in sorted(TABLE.glob("*.toml")):
        known |= {entry.name: entry for entry in read_type.read(path, known=known)}
    return tuple(known.values())


def load(path: Path) -> tuple[TypeEntry, ...]:
    """Return the entries of a user's own file, of the same form as the table's.

    Raises:
        SourceErrors: Everything that is wrong with it.
        OSError: When it cannot be read.
    """
    return read_type.read(path, known={entry.name: entry for entry in all_types()})


@cache
def _table() -> Mapping[str, TypeEntry]:
    return _index(all_types())


def _index(entries: Sequence[TypeEntry]) -> dict[str, TypeEntry]:
    """Return the entries by plain designation; a name goes before an alias of another."""
    found: dict[str, TypeEntry] = {}
    for entry in entries:
        for alias in entry.aliases:
            found.setdefault(plain(alias), entry)
    return found | {plain(entry.name): entry for entry in entries}
