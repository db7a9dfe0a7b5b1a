"""TOML with places: every key and value of a document, and where it stands in the text.

`tomllib` reads the values; a scan of the same text, which is known to be valid by then, finds
the places, so that errors can point at them.
"""

from __future__ import annotations

import re
import tomllib
from bisect import bisect_right
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from stress.text.span import SourceError, SourceErrors, Span

LARGEST = 300_000  # characters; a sheet of a thousand parts has half of that
LONGEST = 1000  # characters of a line; long dotted keys cost their square
DEEPEST = 8  # levels of tables and arrays; a sheet needs four

Path = tuple[str | int, ...]

_GAP = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*")
_KEY = re.compile(r"""[A-Za-z0-9_-]+|"(?:\\.|[^"\\\n])*"|'[^'\n]*'""")
_DOT = re.compile(r"[ \t]*\.[ \t]*")
_SCALAR = re.compile(
    r'"""(?:\\.|[^\\])*?"""(?:"{0,2})'
    r"|'''.*?'''(?:'{0,2})"
    r'|"(?:\\.|[^"\\\n])*"'
    r"|'[^'\n]*'"
    r"|[^,\]}\n#]+",
    re.DOTALL,
)
_WHERE = re.compile(r"\(at (?:line (\d+), column (\d+)|end of document)\)$")


@dataclass(frozen=True, slots=True)
class Document:
    """A TOML document.

    Attributes:
        values: As `tomllib` reads them.
        file: The file as the user named it.
        keys, places: Where each key, and each value, stands, by its path. A table has the key
            of its first header.
    """

    values: Mapping[str, Any]
    file: str
    keys: Mapping[Path, Span]
    places: Mapping[Path, Span]

    def key(self, path: Path) -> Span:
        """Return the place of a key; of its table for an element of an array."""
        return self.keys.get(path) or self.place(path)

    def place(self, path: Path) -> Span:
        """Return the place of a value, else of what holds it."""
        while path:
            if span := self.places.get(path) or self.keys.get(path):
                return span
            path = path[:-1]
        return whole(self.file)


def whole(file: str) -> Span:
    """Return the span that means a whole file."""
    return Span(file, 0, 0, 1, "")


def decode(data: bytes, *, file: str) -> str:
    """Return UTF-8 text without its byte-order mark, line ends as newlines.

    Raises:
        SourceErrors: The bytes are no UTF-8.
    """
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        before = data[: error.start].decode("utf-8", "replace")
        line = before.count("\n") + 1
        column = len(before) - before.rfind("\n")
        shown = data.splitlines()[line - 1].decode("utf-8", "replace") if line else ""
        span = Span(file, line, column, 1, shown[:200])
        raise SourceErrors(
            [SourceError("this is no UTF-8 text", span, "save the file as UTF-8")]
        ) from None
    return text.replace("\r\n", "\n")


def parse(text: str, *, file: str) -> Document:
    """Read a TOML document.

    Raises:
        SourceErrors: It is no TOML, or larger or deeper than any honest one.
    """
    if len(text) > LARGEST:
        raise SourceErrors(
            [SourceError(f"the file has more than {LARGEST} characters", whole(file))]
        )
    for row, line in enumerate(text.split("\n"), 1):
        if len(line) > LONGEST:
            span = Span(file, row, LONGEST - 20, 1, line[:LONGEST])
            raise SourceErrors([SourceError(f"a line has more than {LONGEST} characters", span)])
    try:
        values = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise SourceErrors([_syntax(str(error), text, file)]) from None
    except RecursionError:
        reason = "tables or arrays are nested too deep"
        raise SourceErrors([SourceError(reason, whole(file))]) from None
    for name, value in values.items():
        if _deeper_than(value, DEEPEST):
            reason = f'"{name[:40]}" nests more than {DEEPEST} tables or arrays'
            raise SourceErrors([SourceError(reason, whole(file))])
    scan = _Scan(text, file)
    scan.document()
    return Document(values, file, scan.keys, scan.places)


def _syntax(message: str, text: str, file: str) -> SourceError:
    """Return the error of `tomllib` with its place as a span."""
    found = _WHERE.search(message)
    lines = text.split("\n")
    line, column = (int(found[1]), int(found[2])) if found and found[1] else (len(lines), 1)
    if found and not found[1]:  # the end of the document
        while line > 1 and not lines[line - 1].strip():
            line -= 1
        column = len(lines[line - 1]) + 1
    reason = message[: found.start()].strip() if found else message
    shown = lines[line - 1].rstrip("\r")
    span = Span(file, line, min(column, len(shown) + 1), 1, shown)
    return SourceError(f"this is no TOML: {reason[:1].lower()}{reason[1:]}", span, _advice(shown))


def _advice(line: str) -> str:
    """Return what most likely went wrong on a line that is no TOML."""
    bare = re.fullmatch(r"\s*[\w.-]+\s*=\s*([^\s\"'\[{#][^#]*?)\s*(?:#.*)?", line)
    if bare and not re.fullmatch(r"[+-]?[\d_.]+|true|false", bare[1]):
        return f'texts and quantities stand in quotes, such as "{bare[1]}"'
    return ""


def _deeper_than(value: Any, depth: int) -> bool:
    level = [value]
    for _ in range(depth):
        level = [
            inner
            for outer in level
            if isinstance(outer, dict | list)
            for inner in (outer.values() if isinstance(outer, dict) else outer)
        ]
    return any(isinstance(outer, dict | list) for outer in level)


class _Scan:
    """One walk over a valid document, noting where keys and values stand."""

    def __init__(self, text: str, file: str) -> None:
        self.text, self.file, self.at = text, file, 0
        self.keys: dict[Path, Span] = {}
        self.places: dict[Path, Span] = {}
        self._lines = text.split("\n")
        self._starts = [0]
        for line in self._lines:
            self._starts.append(self._starts[-1] + len(line) + 1)
        self._rows: dict[Path, int] = {}  # how many tables each array of tables has

    def document(self) -> None:
        table: Path = ()
        while self._skip() < len(self.text):
            if self.text[self.at] == "[":
                table = self._header()
            else:
                self._pair(table)

    def _header(self) -> Path:
        several = self.text.startswith("[[", self.at)
        self.at += 2 if several else 1
        start = self.at
        path: Path = ()
        names = self._names()
        span = self._span(start, self.at)
        for name in names[:-1]:
            path = (*path, name)
            self.keys.setdefault(path, span)
            path = self._into(path)
        path = (*path, names[-1])
        if several:
            self._rows[path] = self._rows.get(path, -1) + 1
            path = self._into(path)
        self.keys.setdefault(path, span)
        self.at = self.text.index("]", self.at) + (2 if several else 1)
        return path

    def _into(self, path: Path) -> Path:
        return (*path, self._rows[path]) if path in self._rows else path

    def _pair(self, table: Path) -> None:
        start = self.at
        path = table
        for name in self._names():
            path = (*path, name)
            self.keys.setdefault(path, self._span(start, self.at))
        self.at = self.text.index("=", self.at) + 1
        self._value(path)

    def _names(self) -> list[str]:
        """Read a dotted key."""
        names = []
        while True:
            self._skip()
            found = _KEY.match(self.text, self.at)
            assert found is not None, "tomllib has accepted this key"
            self.at = found.end()
            names.append(_plain(found[0]))
            dot = _DOT.match(self.text, self.at)
            if dot is None:
                return names
            self.at = dot.end()

    def _value(self, path: Path) -> None:
        start = self._skip()
        opening = self.text[start]
        if opening in "[{":
            self._several(path, "]" if opening == "[" else "}")
        else:
            found = _SCALAR.match(self.text, start)
            assert found is not None, "tomllib has accepted this value"
            self.at = start + len(found[0].rstrip())
        self.places[path] = self._span(start, self.at)

    def _several(self, path: Path, closing: str) -> None:
        self.at += 1
        index = 0
        while self.text[self._skip()] != closing:
            if self.text[self.at] == ",":
                self.at += 1
            elif closing == "}":
                self._pair(path)
            else:
                self._value((*path, index))
                index += 1
        self.at += 1

    def _skip(self) -> int:
        """Pass over spaces, newlines and comments; return where the scan stands then."""
        found = _GAP.match(self.text, self.at)
        self.at = found.end() if found else self.at
        return self.at

    def _span(self, start: int, end: int) -> Span:
        line = bisect_right(self._starts, start)
        text = self._lines[line - 1]
        column = start - self._starts[line - 1] + 1
        length = max(min(end - start, len(text) - column + 1), 1)
        return Span(self.file, line, column, length, text)


def _plain(key: str) -> str:
    """Return a key without its quotes and escapes."""
    if key[0] == "'":
        return key[1:-1]
    if key[0] == '"':
        return str(next(iter(tomllib.loads(f"{key} = 0"))))
    return key
