"""Which card stands where: one quick pass over the lines that parses nothing but the first word.

A large library costs no more than this pass: the body of a subcircuit is scanned when the
subcircuit is used, a model is read when an element asks for it.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from stress.netlist.card import Card, gather
from stress.netlist.source import Source

ENCRYPTED = "encrypted text"
# Blocks that are set aside whole: what ends them, and what they are called.
_BLOCKS = {
    ".control": (".endc", ".control block: nothing in it is ever run"),
    ".data": (".enddata", ".data: the sweep is not made"),
}


@dataclass(frozen=True, slots=True)
class Lines:
    """A stretch of a file: lines `first` up to, not including, `after`."""

    source: Source
    first: int
    after: int


@dataclass(frozen=True, slots=True)
class Definition:
    """Where a subcircuit is written: its header line and the stretch of its body."""

    source: Source
    header: int
    body: Lines


@dataclass(frozen=True, slots=True)
class Entry:
    """One card of a stretch, told by its first word; `definition` for a subcircuit."""

    source: Source
    index: int
    word: str  # lower case with its dot for a control card, else ""
    definition: Definition | None = None

    def name_of(self) -> str:
        """Return the lower-case second word of its line, which names a model."""
        words = self.source.lines[self.index].split(None, 2)
        return words[1].lower() if len(words) > 1 else ""

    def card(self, *, dollar: bool) -> Card:
        """Return the card; SourceError where it is too long."""
        return gather(self.source, self.index, dollar=dollar)


@dataclass(slots=True)
class Skipped:
    """A stretch that was set aside, such as a `.control` block."""

    what: str
    source: Source
    index: int


@dataclass(slots=True)
class Scan:
    """What a stretch holds, in its order."""

    entries: list[Entry] = field(default_factory=list)
    skipped: list[Skipped] = field(default_factory=list)
    unclosed: list[tuple[str, Source, int]] = field(default_factory=list)


def scan(lines: Lines) -> Scan:
    """Return the cards of a stretch; linear, about one look at each line."""
    found = Scan()
    source, text = lines.source, lines.source.lines
    append = found.entries.append
    index, after = lines.first, lines.after
    joined = False
    clear = 0  # no encrypted text before this line, so that each line is looked at once
    while index < after:
        line = text[index]
        mark = line[:1]
        if mark in " \t\x1a\x0c\xa0":
            line = line.strip("\x1a\x0c\xa0 \t")
            mark = line[:1]
        if joined or not mark or mark in "*+;#" or (mark == "/" and line[:2] == "//"):
            joined = (joined or mark == "+") and line.rstrip()[-1:] == "\\"
            index += 1
            continue
        joined = line[-1:] == "\\" or line.rstrip()[-1:] == "\\"
        if mark == ".":
            word = line.split(None, 1)[0].lower()
            if word == ".subckt" or word == ".macro":
                end = _end(text, index, after)
                if end is None:
                    found.unclosed.append((word, source, index))
                    end = after
                body = Lines(source, index + 1, end)
                append(Entry(source, index, word, Definition(source, index, body)))
                index, joined = end + 1, False
                continue
            if word in _BLOCKS:
                closing, what = _BLOCKS[word]
                end = _until(text, index + 1, after, closing)
                found.skipped.append(Skipped(what, source, index))
                index, joined = end + 1, False
                continue
            if word in (".prot", ".protect") and index >= clear:
                clear = end = _until(text, index + 1, after, ".unprot")
                if any(_is_cipher(line) for line in text[index + 1 : end]):
                    found.skipped.append(Skipped(ENCRYPTED, source, index))
                    index, joined = end + 1, False
                    continue
            append(Entry(source, index, word))
            if word == ".alter":
                break  # what follows changes the circuit for another run
        elif mark == "$":
            # The other beginnings of encrypted text, by their first word.
            if line[:12].lower() == "$cdnencstart":
                end = _until(text, index + 1, after, "$cdnencfinish")
                found.skipped.append(Skipped(ENCRYPTED, source, index))
                index = end
            joined = False
        else:
            append(Entry(source, index, ""))
        index += 1
    return found


def _until(text: list[str], index: int, after: int, closing: str) -> int:
    """Return the line that begins with a word, or the end of the stretch."""
    while index < after and text[index].lstrip()[: len(closing)].lower() != closing:
        index += 1
    return index


def _is_cipher(line: str) -> bool:
    """Whether a line is no card, comment or continuation."""
    mark = line.lstrip()[:1]
    return bool(mark) and not mark.isalpha() and mark not in "*.+;#$/"


def is_encrypted(lines: list[str]) -> bool:
    """Whether a file says at its head that it is encrypted."""
    return any("encrypted file" in line.lower() for line in lines[:5])


def _end(text: list[str], index: int, after: int) -> int | None:
    """Return the line of the `.ends` that closes the subcircuit opened at `index`."""
    depth = 1
    for at in range(index + 1, after):
        line = text[at]
        if "." not in line[:1]:
            if line[:1] not in (" ", "\t"):
                continue
            line = line.lstrip()
            if line[:1] != ".":
                continue
        low = line[:7].lower()
        if low.startswith((".subckt", ".macro")):
            depth += 1
        elif low.startswith(".ends") or low.startswith(".eom"):
            depth -= 1
            if depth == 0:
                return at
    return None


def sections(lines: list[str]) -> dict[str, tuple[int, int]]:
    """Return the stretch of each `.lib NAME` … `.endl` of a library, by lower-case name."""
    found: dict[str, tuple[int, int]] = {}
    name, begin = "", 0
    for index, line in enumerate(lines):
        low = line.lstrip()[:5].lower()
        if low == ".endl":
            if name:
                found.setdefault(name, (begin, index))
            name = ""
        elif low.startswith(".lib") and not name:
            words = line.split()
            if len(words) == 2:
                name, begin = words[1].strip("'\"").lower(), index + 1
    return found
