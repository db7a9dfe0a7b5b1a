"""Files as lines: decoding, where an include may lie, and how much may be read."""

from __future__ import annotations

import os
import stat
from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path

from stress.text.span import SourceError, SourceErrors, Span

MOST_BYTES = 24_000_000  # of one file and of all files together
MOST_LINES = 1_000_000
MOST_COLUMNS = 200_000  # of one line with its continuations
MOST_INCLUDES = 500
DEEPEST_INCLUDE = 30


@dataclass(frozen=True, slots=True, eq=False)
class Source:
    """The lines of one file.

    Attributes:
        file: The name as the user or the including line has it, for messages.
        lines: Without their ends.
        real: Where it really lies; None for a text that came from no file.
        within: The includes that led here, outermost first.
    """

    file: str
    lines: list[str]
    real: Path | None = None
    within: tuple[str, ...] = ()

    def whole(self) -> Span:
        """Return the span that means the whole file."""
        return Span(self.file, 0, 0, 1, "", self.within)


class Refused(Exception):
    """An include that may not be read; the message is for the line that asks for it."""

    def __init__(self, message: str, hint: str = "", *, missing: bool = False) -> None:
        super().__init__(message)
        self.message, self.hint, self.missing = message, hint, missing


def decode(content: bytes, file: str) -> str:
    """Return the text: UTF-8 strictly, else UTF-16 by its mark, else latin-1.

    Raises:
        SourceErrors: It is no text at all.
    """
    if content[:2] in (b"\xff\xfe", b"\xfe\xff"):
        try:
            return content.decode("utf-16")
        except UnicodeDecodeError:
            pass
    if b"\0" in content:
        raise SourceErrors([_not_text(file)])
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError:
        text = content.decode("latin-1")
    # C1 control characters are no letters; a few come from old code pages, many from binaries.
    odd = sum(text.count(chr(c)) for c in range(1, 32) if c not in (9, 10, 12, 13, 26))
    if odd > 8 and odd * 50 > len(text):
        raise SourceErrors([_not_text(file)])
    return text


def _not_text(file: str) -> SourceError:
    return SourceError(
        "this is not a netlist but a binary file",
        Span(file, 0, 0, 1, ""),
        "a netlist is plain text: export it from the schematic editor as SPICE netlist",
    )


def split(text: str, file: str) -> list[str]:
    """Return the lines of a text, whatever their ends.

    Raises:
        SourceErrors: More lines than `MOST_LINES`.
    """
    if "\r" in text:
        text = text.replace("\r\n", "\n").replace("\r", "\n")
    if text.count("\n") > MOST_LINES:
        raise SourceErrors(
            [SourceError(f"more than {MOST_LINES:,} lines", Span(file, 0, 0, 1, ""))]
        )
    lines = text.split("\n")
    if lines[-1] == "":
        lines.pop()
    return lines


@dataclass(slots=True)
class Files:
    """Reads files, each once, from the folders that are allowed.

    Attributes:
        folder: Of the netlist; None where the text came from no file: then no include opens
            but below `libraries`.
        libraries: Folders the user named.
    """

    folder: Path | None
    libraries: Sequence[Path] = ()
    _read: dict[Path, list[str]] = field(default_factory=dict)
    _bytes: int = 0
    _asked: int = 0
    _given: int = 0

    def main(self, path: Path, file: str) -> Source:
        """Read the netlist itself.

        Raises:
            SourceErrors: It cannot be opened, is too large or is no text.
        """
        try:
            return Source(file, self._lines(path, file), path)
        except Refused as refusal:
            error = SourceError(refusal.message, Span(file, 0, 0, 1, ""), refusal.hint)
            raise SourceErrors([error]) from None

    def include(self, name: str, *, asked_by: Source, call: str, part: str = "") -> Source:
        """Read a file that a line of another file names; `part` is the section it asks for.

        Raises:
            Refused: With the reason.
            SourceErrors: It is no text.
        """
        self._asked += 1
        if self._asked > MOST_INCLUDES:
            raise Refused(f"more than {MOST_INCLUDES} includes", "the files include each other")
        if len(asked_by.within) >= DEEPEST_INCLUDE:
            raise Refused(f"includes nested deeper than {DEEPEST_INCLUDE}")
        path = self._find(name, asked_by)
        shown = path.name if asked_by.real is None else self._shown(path)
        if part:
            shown = f"{shown} {part}"
        around = any(entry.startswith(f"{shown}, included") for entry in asked_by.within)
        if around or (path == asked_by.real and not part):
            raise Refused(f'"{shown}" includes itself', "take one of the includes out")
        within = (*asked_by.within, f"{shown}, included at {call}")
        file = shown.removesuffix(f" {part}") if part else shown
        lines = self._lines(path, file)
        self._given += len(lines)
        if self._given > 2 * MOST_LINES:
            raise Refused(f"more than {2 * MOST_LINES:,} lines are included")
        return Source(file, lines, path, within)

    def _shown(self, path: Path) -> str:
        if self.folder is not None:
            try:
                return str(path.relative_to(self.folder))
            except ValueError:
                pass
        return path.name

    def _find(self, name: str, asked_by: Source) -> Path:
        """Return the real path of an include, or refuse; tells nothing about other folders."""
        clean = name.replace("\\", "/")
        if "\0" in clean or not clean.strip():
            raise Refused("the include names no file")
        roots = [Path(os.path.realpath(root)) for root in self.libraries]
        if self.folder is not None:
            roots.insert(0, Path(os.path.realpath(self.folder)))
        near = [asked_by.real.parent] if asked_by.real is not None else []
        drive = clean[1:3] == ":/"
        absolute = clean.startswith(("/", "~")) or drive
        candidates = [Path(clean)] if absolute and not drive else []
        candidates += [start / clean for start in [*near, *roots] if not absolute]
        outside = False
        for candidate in candidates:
            found = _any_case(candidate)
            real = Path(os.path.realpath(found or candidate))
            if not any(real.is_relative_to(root) for root in roots):
                outside = True
            elif found is not None:
                return real
        # A path of another computer: its last part may lie beside the netlist.
        base = clean.rsplit("/", 1)[-1]
        for start in [*near, *roots] if base not in ("", ".", "..") else []:
            found = _any_case(start / base)
            real = Path(os.path.realpath(found or start / base))
            if found is not None and any(real.is_relative_to(root) for root in roots):
                return real
        if outside:
            raise Refused(
                f'"{name}" lies outside the folder of the netlist and is not read',
                "put the file beside the netlist, or name its folder with --library DIR",
                missing=True,
            )
        raise Refused(
            f'the file "{name}" is missing',
            "put the file beside the netlist, or name its folder with --library DIR",
            missing=True,
        )

    def _lines(self, path: Path, file: str) -> list[str]:
        held = self._read.get(path)
        if held is not None:
            return held
        try:
            status = os.stat(path)
            if not stat.S_ISREG(status.st_mode):
                what = "a folder" if stat.S_ISDIR(status.st_mode) else "no plain file"
                raise Refused(f'"{file}" is {what}', "a netlist is a text file")
            if status.st_size + self._bytes > MOST_BYTES:
                raise Refused(f'"{file}": more than {MOST_BYTES // 1_000_000} MB to read')
            with open(path, "rb") as stream:
                content = stream.read(MOST_BYTES + 1)
        except FileNotFoundError:
            raise Refused(f'the file "{file}" does not exist') from None
        except OSError as error:
            raise Refused(f'"{file}" cannot be read: {error.strerror}') from None
        self._bytes += len(content)
        if len(content) > MOST_BYTES:
            raise Refused(f'"{file}": more than {MOST_BYTES // 1_000_000} MB to read')
        lines = split(decode(content, file), file)
        self._read[path] = lines
        return lines


def _any_case(path: Path) -> Path | None:
    """Return the path as it is on disk, taking any letter case for each part; None: nowhere."""
    try:
        if path.exists():
            return path
        parts, here = path.parts, Path(path.anchor or ".")
        for part in parts[1:] if path.anchor else parts:
            if part == ".." or (here / part).exists():
                here = here / part
                continue
            low = part.lower()
            same = [entry for entry in os.listdir(here) if entry.lower() == low]
            if not same:
                return None
            here = here / sorted(same)[0]
    except (OSError, ValueError):
        return None
    return here
