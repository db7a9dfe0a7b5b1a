"""Who says so: the source of a number, and how sure it is."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from stress.parts.toml_record import MISSING, Keys, Read, Tables, text, word
from stress.parts.toml_source import Path

# How each mark is printed. "read": seen in a copy of the place named; "second-hand": a page that
# restates it; "memory": recalled from the document named, with how sure; "computed": by
# arithmetic from numbers that stand in the text of the source.
MARKS = {
    "read": "",
    "second-hand": "restated second-hand",
    "memory high": "from memory, to be confirmed",
    "memory medium": "from memory, to be confirmed",
    "memory low": "from memory and unsure, to be confirmed",
    "computed": "computed",
    "common practice": "common practice",
}


@dataclass(frozen=True, slots=True)
class Citation:
    """The document that states a number, and its mark, one of `MARKS`."""

    text: str
    mark: str

    def __str__(self) -> str:
        note = MARKS[self.mark]
        return f"{self.text} ({note})" if note and self.text != note else self.text


def cited(tables: Tables, sources: Any) -> Read:
    """Return a reader of the name of a source in the table `[sources]` of the same file."""
    known = {}
    for name, table in tables.table(("sources",), sources).items():
        keys: Keys = {"text": ("text", text), "mark": ("mark", word(*MARKS))}
        known[name] = tables.record(Citation, keys, ("sources", name), table)

    def reader(tables: Tables, path: Path, value: Any) -> Any:
        if isinstance(value, str) and value in known:
            return known[value] or MISSING
        return tables.wrong(path, f"no source of this name: {value!r}", "see [sources]")

    return reader
