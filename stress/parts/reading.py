"""Readings from the bench: a CSV with a header, columns in any order, empty where not measured.

A row that cannot be used becomes a problem with its file and line, and the others still count.
A reading that lacks what it depends on (the voltage of a leakage, the frequency of a series
resistance) is asked back and left out, never guessed.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from stress.parts.toml_record import near, shown
from stress.parts.toml_source import whole
from stress.text.quantity import QuantityError, quantity
from stress.text.span import SourceError, SourceErrors, Span
from stress.text.unit import unit

LARGEST = 2_000_000  # bytes
STATES = ("open", "short")


@dataclass(frozen=True, slots=True, kw_only=True)
class Reading:
    """What was measured at one part; None where it was not.

    Attributes:
        part: As written.
        leakage_A, at_V, after_s: Leakage current, at which voltage, after how long under it.
        temperature_degC: Of the part while it was measured.
        esr_ohm, esr_Hz: Series resistance, at which frequency.
        resistance_ohm, inductance_H: Of resistors and windings.
        state: "open" or "short" by an indication in place, or None.
        span: The row; `spans` each value by its column.
    """

    part: str
    capacitance_F: float | None = field(default=None, metadata=unit("F"))
    esr_ohm: float | None = field(default=None, metadata=unit("ohm"))
    esr_Hz: float | None = field(default=None, metadata=unit("Hz"))
    leakage_A: float | None = field(default=None, metadata=unit("A"))
    at_V: float | None = field(default=None, metadata=unit("V"))
    after_s: float | None = field(default=None, metadata=unit("s"))
    temperature_degC: float | None = field(default=None, metadata=unit("degC"))
    resistance_ohm: float | None = field(default=None, metadata=unit("ohm"))
    inductance_H: float | None = field(default=None, metadata=unit("H"))
    state: str | None = None
    span: Span
    spans: Mapping[str, Span] = field(default_factory=dict, compare=False, repr=False)


@dataclass(frozen=True, slots=True)
class Readings:
    """The usable rows in the order of the file, and what is wrong with the others."""

    rows: tuple[Reading, ...]
    problems: tuple[SourceError, ...]


@dataclass(frozen=True, slots=True)
class _Column:
    """A column: the field it fills, its unit, and what it may hold."""

    field: str
    unit: str
    zero: bool = False  # whether nothing is a reading
    least: float = 0.0


COLUMNS: Mapping[str, _Column] = {
    "capacitance": _Column("capacitance_F", "F"),
    "esr": _Column("esr_ohm", "ohm", zero=True),
    "leakage": _Column("leakage_A", "A", zero=True),
    "at": _Column("at_V", "V"),
    "minutes": _Column("after_s", "s"),
    "temperature": _Column("temperature_degC", "degC", zero=True, least=-60.0),
    "esr_frequency": _Column("esr_Hz", "Hz"),
    "resistance": _Column("resistance_ohm", "ohm", zero=True),
    "inductance": _Column("inductance_H", "H"),
}
HEADER = ("part", *COLUMNS, "state")
_MEASURED = ("capacitance", "esr", "leakage", "resistance", "inductance", "state")


def form(names: Iterable[str]) -> str:
    """Return an empty form to print and fill: the header, and one line for each part."""
    commas = "," * (len(HEADER) - 1)
    return "".join(f"{line}\n" for line in (",".join(HEADER), *(name + commas for name in names)))


def read(path: Path) -> Readings:
    """Return the readings in a file.

    Raises:
        SourceErrors: The file cannot be opened, or has no header with a column "part".
    """
    try:
        data = path.read_bytes()
    except OSError as error:
        reason = f"the readings cannot be read: {error.strerror or error}"
        raise SourceErrors([SourceError(reason, whole(str(path)))]) from None
    if len(data) > LARGEST or b"\0" in data:
        reason = "this is no table of readings, but a large or binary file"
        raise SourceErrors([SourceError(reason, whole(str(path)), "a CSV is wanted")])
    try:
        content = data.decode("utf-8-sig")
    except UnicodeDecodeError:  # what spreadsheets write on some systems
        content = data.decode("latin-1")
    return read_text(content, file=str(path))


def read_text(content: str, *, file: str) -> Readings:
    """Return the readings in a text; `file` is what problems call it.

    Raises:
        SourceErrors: There is no header with a column "part".
    """
    lines = _lines(content)
    header_line = next(lines, None)
    separator = _separator(header_line[1]) if header_line else ","
    header = list(_cells(*header_line, separator, file)) if header_line else []
    names = [text.strip().lower().replace(" ", "_") for text, _ in header]
    if "part" not in names:
        span = header[0][1] if header else whole(file)
        hint = f"the first line names the columns: {','.join(HEADER)}"
        raise SourceErrors([SourceError('there is no column "part"', span, hint)])
    table = _Table(file, separator, names)
    table.check_header([span for _, span in header])
    for number, line in lines:
        table.add(number, line)
    return Readings(tuple(table.rows), tuple(sorted(table.problems, key=_place)))


def _place(problem: SourceError) -> tuple[int, int]:
    return problem.span.line, problem.span.column


def _lines(content: str) -> Iterator[tuple[int, str]]:
    """Yield the lines that hold something, with their numbers."""
    for number, line in enumerate(re.split(r"\r\n|\r|\n", content), 1):
        if line.strip(" \t,;") and not line.lstrip().startswith("#"):
            yield number, line


def _separator(line: str) -> str:
    """Return what separates the columns: spreadsheets write commas, semicolons or tabs."""
    return max(",;\t", key=line.count)


def _cells(number: int, line: str, separator: str, file: str) -> Iterator[tuple[str, Span]]:
    """Yield each cell of a line with its place."""
    pattern = re.compile(rf'\s*"((?:[^"]|"")*)"\s*(?={separator}|$)|([^{separator}]*)')
    at = 0
    while at <= len(line):
        found = pattern.match(line, at)
        assert found is not None, "an empty cell matches"
        quoted = found[1] is not None
        text = found[1].replace('""', '"') if quoted else found[2]
        start = found.start(1) if quoted else at + len(text) - len(text.lstrip())
        length = max(len(found[1] if quoted else text.strip()), 1)
        yield text.strip(), Span(file, number, start + 1, length, line)
        at = found.end() + 1


class _Table:
    """The rows and problems found so far."""

    def __init__(self, file: str, separator: str, names: list[str]) -> None:
        self.file, self.separator, self.names = file, separator, names
        self.rows: list[Reading] = []
        self.problems: list[SourceError] = []
        self._seen: dict[tuple[str, float | None], Reading] = {}

    def check_header(self, spans: list[Span]) -> None:
        for i, (name, span) in enumerate(zip(self.names, spans, strict=True)):
            if name and name not in HEADER:
                self._wrong(f'unknown column "{name[:40]}"', span, near(name, HEADER))
            elif name and name in self.names[:i]:
                self._wrong(f'the column "{name}" stands twice', span, "the first one counts")

    def add(self, number: int, line: str) -> None:
        """Read one line: a row, or problems, or both."""
        cells = list(_cells(number, line, self.separator, self.file))
        if len(cells) > len(self.names) and any(text for text, _ in cells[len(self.names) :]):
            span = cells[len(self.names)][1]
            self._wrong("this row has more cells than the header", span)
            return
        found: dict[str, tuple[str, Span]] = {}
        for name, cell in zip(self.names, cells, strict=False):
            if cell[0] and name in HEADER:
                found.setdefault(name, cell)
        if found.keys() == {"part"}:  # a line of the form that was left empty
            return
        row = Span(self.file, number, 1, max(len(line), 1), line)
        if "part" not in found:
            self._wrong("this row names no part", row)
            return
        reading = self._reading(found, row)
        if reading is not None and self._is_new(reading):
            self.rows.append(reading)

    def _reading(self, found: Mapping[str, tuple[str, Span]], row: Span) -> Reading | None:
        part, place = found["part"]
        spans = {name: span for name, (_, span) in found.items()}
        values: dict[str, Any] = {}
        for name, (text, span) in found.items():
            if name in COLUMNS:
                value = self._value(part, name, text, span)
                if value is not None:
                    values[COLUMNS[name].field] = value
            elif name == "state":
                if text.lower() in STATES:
                    values["state"] = text.lower()
                else:
                    hint = "open or short, by an indication in place"
                    self._wrong(f"{part}: {shown(text)} is no state", span, hint)
        if not any(name in found for name in _MEASURED):
            self._wrong(f"{part}: nothing was measured", place, f"one of {', '.join(_MEASURED)}")
            return None
        values = self._complete(part, values, spans)
        reading = Reading(part=part, span=row, spans=spans, **values)
        return reading if self._is_consistent(reading) and values else None

    def _value(self, part: str, name: str, text: str, span: Span) -> float | None:
        column = COLUMNS[name]
        if name == "minutes" and re.fullmatch(r"\d+(\.\d*)?", text):
            text = f"{text} min"
        try:
            value = quantity(text, column.unit)
        except QuantityError as error:
            self._wrong(f"{part}, {name}: {error.message}", span, error.hint)
            return None
        if value < column.least or (value == 0 and not column.zero):
            hint = 'an open part has the state "open"' if name == "capacitance" else ""
            self._wrong(f"{part}, {name}: {shown(text)} is too small", span, hint)
            return None
        return value

    def _complete(
        self, part: str, values: dict[str, Any], spans: Mapping[str, Span]
    ) -> dict[str, Any]:
        """Return the values without those that lack what they depend on."""
        kept = dict(values)
        if "leakage_A" in values and "at_V" not in values:
            question = f"{part}: at which voltage was the leakage measured?"
            self._wrong(question, spans["leakage"], 'fill in "at", such as 400 V')
            del kept["leakage_A"]
        if "esr_ohm" in values and "esr_Hz" not in values:
            question = f"{part}: at which frequency was the series resistance measured?"
            self._wrong(question, spans["esr"], 'fill in "esr_frequency", such as 100 kHz')
            del kept["esr_ohm"]
        return kept if any(key not in _CIRCUMSTANCES for key in kept) else {}

    def _is_consistent(self, reading: Reading) -> bool:
        """Note a row that contradicts itself."""
        part, span = reading.part, reading.span
        if reading.state == "open" and reading.capacitance_F is not None:
            self._wrong(f"{part} is open and has a capacitance", span, "measure it again")
        elif reading.state == "open" and reading.leakage_A:
            self._wrong(f"{part} is open and leaks", span, "measure it again")
        elif reading.state == "short" and reading.capacitance_F is not None:
            self._wrong(f"{part} is a short and has a capacitance", span, "measure it again")
        else:
            return True
        return False

    def _is_new(self, reading: Reading) -> bool:
        """Note a part that was read twice in the same way."""
        key = (reading.part.lower(), reading.at_V)
        first = self._seen.setdefault(key, reading)
        if first is reading:
            return True
        hint = f"the first reading is on line {first.span.line}; several voltages may stand"
        self._wrong(f"{reading.part} stands twice", reading.span, hint)
        return False

    def _wrong(self, message: str, span: Span, hint: str = "") -> None:
        self.problems.append(SourceError(message, span, hint))


# What is no reading by itself.
_CIRCUMSTANCES = ("at_V", "after_s", "temperature_degC", "esr_Hz")
