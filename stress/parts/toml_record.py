"""Tables of a TOML document into frozen records, by a table of keys; all errors at once."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import MISSING as MISSING_DEFAULT
from dataclasses import fields, is_dataclass
from difflib import get_close_matches
from math import inf, isfinite
from typing import Any, TypeVar

from stress.parts.toml_source import Document, Path
from stress.text.quantity import QuantityError, quantity
from stress.text.span import SourceError, SourceErrors

R = TypeVar("R")

# What a reader of a value returns when it has noted an error instead.
MISSING: Any = object()
Read = Callable[["Tables", Path, Any], Any]
# By the key in the file: the field of the record, and how its value is read.
Keys = Mapping[str, tuple[str, Read]]


class Tables:
    """The tables of one document, and every error found in them so far."""

    def __init__(self, document: Document) -> None:
        self.document = document
        self.errors: list[SourceError] = []

    def title(self, path: Path) -> str:
        """Return a path as people write it: "[capacitors.C5] rated"."""
        names, value = list(path), self.document.values
        tables = []
        while names and isinstance(value, dict) and isinstance(value.get(str(names[0])), dict):
            value = value[str(names[0])]
            tables.append(str(names.pop(0)))
        items = [f"item {name + 1}" if isinstance(name, int) else name for name in names]
        return " ".join([f"[{'.'.join(tables)}]"] * bool(tables) + [", ".join(items)] * bool(items))

    def wrong(self, path: Path, message: str, hint: str = "") -> Any:
        """Note that a value cannot be used; returns `MISSING`."""
        self.errors.append(
            SourceError(f"{self.title(path)}: {message}", self.document.place(path), hint)
        )
        return MISSING

    def unknown(self, path: Path, kind: str, accepted: Sequence[str]) -> None:
        """Note a key that nobody reads."""
        name = str(path[-1])
        where = f" in {self.title(path[:-1])}" if len(path) > 1 else ""
        span = self.document.key(path)
        self.errors.append(
            SourceError(f'unknown {kind} "{name}"{where}', span, near(name, accepted))
        )

    def raise_errors(self) -> None:
        """Raise all errors in the order of the text, if there are any.

        Raises:
            SourceErrors: Every error noted.
        """
        if self.errors:
            raise SourceErrors(sorted(self.errors, key=lambda e: (e.span.line, e.span.column)))

    def table(self, path: Path, value: Any) -> Mapping[str, Any]:
        """Return a value that must be a table; an empty one after noting that it is none."""
        if isinstance(value, dict):
            return value
        self.wrong(path, "a table is wanted here", f"such as [{'.'.join(map(str, path))}]")
        return {}

    def record(
        self, make: Callable[..., R], keys: Keys, path: Path, value: Any, **more: Any
    ) -> R | None:
        """Return a record made of one table, or None when a key of it is wrong.

        Args:
            make: The dataclass; called with the fields found and `more`.
            keys: What may stand in the table.
            path, value: The table.
        """
        before = len(self.errors)
        found = self.fields(keys, path, value) | more
        for missing in _required(make) - found.keys():
            names = [key for key, (field, _) in keys.items() if field == missing]
            if len(self.errors) == before and names:
                self.wrong(path, f'"{names[0]}" is missing')
        if len(self.errors) > before:
            return None
        try:
            return make(**found)
        except ValueError as error:
            self.wrong(path, str(error))
            return None

    def fields(self, keys: Keys, path: Path, value: Any) -> dict[str, Any]:
        """Return the fields of one table by name, without those that are wrong."""
        found: dict[str, Any] = {}
        by: dict[str, str] = {}
        for key, inner in self.table(path, value).items():
            if key not in keys:
                self.unknown((*path, key), "key", list(keys))
                continue
            field, read = keys[key]
            if field in by:
                self.wrong((*path, key), f'this says the same as "{by[field]}"', "keep one of them")
                continue
            by[field] = key
            result = read(self, (*path, key), inner)
            if result is not MISSING:
                found[field] = result
        return found


def _required(make: Callable[..., Any]) -> set[str]:
    """Return the fields of a dataclass that have no default."""
    return {
        f.name
        for f in (fields(make) if is_dataclass(make) else ())
        if f.default is MISSING_DEFAULT and f.default_factory is MISSING_DEFAULT
    }


def shown(value: Any) -> str:
    """Return a value for an error message, cut short."""
    words = f'"{value}"' if isinstance(value, str) else str(value)
    return words if len(words) <= 40 else f"{words[:39]}…"


def near(name: str, accepted: Sequence[str]) -> str:
    """Return "did you mean", or the list of what is accepted."""
    lower = {choice.lower(): choice for choice in accepted}
    close = get_close_matches(name.lower(), lower, n=1, cutoff=0.6)
    if close:
        return f'did you mean "{lower[close[0]]}"?'
    return f"accepted: {', '.join(accepted)}"


def amount(unit: str, *, least: float = 0.0, most: float = inf, above: bool = True) -> Read:
    """Read a quantity in `unit`, larger than `least` (or equal, unless `above`), up to `most`."""

    def read(tables: Tables, path: Path, value: Any) -> Any:
        if isinstance(value, int | float) and not isinstance(value, bool):
            if unit != "1":
                spelt = {"ohm": "kohm", "F": "uF"}.get(unit, unit)
                return tables.wrong(
                    path,
                    "a quantity needs its unit",
                    f'write it in quotes, such as "{value} {spelt}"',
                )
            number = float(value) if abs(value) < 1e300 else inf
        elif isinstance(value, str):
            try:
                number = quantity(value, unit)
            except QuantityError as error:
                return tables.wrong(path, error.message, error.hint)
        else:
            return tables.wrong(path, "a quantity in quotes is wanted", f"in {unit}")
        if not isfinite(number):
            return tables.wrong(path, "this is no finite number")
        if number < least or (above and number == least):
            limit = "more than" if above else "at least"
            return tables.wrong(
                path, f"{shown(value)} is too small", f"{limit} {least:g} {unit}".rstrip(" 1")
            )
        if number > most:
            return tables.wrong(
                path, f"{shown(value)} is too large", f"at most {most:g} {unit}".rstrip(" 1")
            )
        return number

    return read


def text(tables: Tables, path: Path, value: Any) -> Any:
    """Read a text that is not empty."""
    if isinstance(value, str) and value.strip():
        return value.strip()
    return tables.wrong(path, "a text in quotes is wanted")


def flag(tables: Tables, path: Path, value: Any) -> Any:
    """Read true or false."""
    return value if isinstance(value, bool) else tables.wrong(path, "true or false is wanted")


def whole(least: int, most: int) -> Read:
    """Read a whole number from `least` to `most`."""

    def read(tables: Tables, path: Path, value: Any) -> Any:
        if isinstance(value, int) and not isinstance(value, bool) and least <= value <= most:
            return value
        return tables.wrong(path, f"a whole number from {least} to {most} is wanted")

    return read


def word(*choices: str) -> Read:
    """Read one of a few words."""

    def read(tables: Tables, path: Path, value: Any) -> Any:
        if isinstance(value, str) and value.lower() in choices:
            return value.lower()
        return tables.wrong(path, f"{shown(value)} is not known here", near(str(value), choices))

    return read


def several(one: Read, *, least: int = 0, most: int = 1000) -> Read:
    """Read an array of values, or a single value as an array of one."""

    def read(tables: Tables, path: Path, value: Any) -> Any:
        items = value if isinstance(value, list) else [value]
        if not least <= len(items) <= most:
            wanted = f"{least}" if least == most else f"{least} to {most}"
            return tables.wrong(path, f"{wanted} values are wanted, not {len(items)}")
        paths = [(*path, i) if isinstance(value, list) else path for i in range(len(items))]
        found = [one(tables, at, item) for at, item in zip(paths, items, strict=True)]
        return MISSING if any(item is MISSING for item in found) else tuple(found)

    return read


def number(*, least: float) -> Read:
    """Read a plain number, at least `least`."""

    def read(tables: Tables, path: Path, value: Any) -> Any:
        if isinstance(value, int | float) and not isinstance(value, bool) and least <= value < inf:
            return float(value)
        return tables.wrong(path, f"a number is wanted, at least {least:g}")

    return read


def mapped(one: Read, keys: Sequence[str]) -> Read:
    """Read a table of values of one kind, by known keys."""

    def read(tables: Tables, path: Path, value: Any) -> Any:
        return tables.fields({key: (key, one) for key in keys}, path, value)

    return read


def nested(make: Callable[..., Any], keys: Keys) -> Read:
    """Read a table as a record."""

    def read(tables: Tables, path: Path, value: Any) -> Any:
        found = tables.record(make, keys, path, value)
        return MISSING if found is None else found

    return read
