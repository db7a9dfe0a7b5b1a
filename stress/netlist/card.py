"""One card: a line with its continuations, its comments taken away, and its fields."""

from __future__ import annotations

import re
from typing import NamedTuple

from stress.netlist.source import MOST_COLUMNS, Source
from stress.text.span import SourceError, Span

LONGEST_MESSAGE = 300  # what quotes a word of a thousand characters is cut
_BLANK_COMMENT = re.compile(r"\s(?:\$|//)|^\s*//|^\$")
_JOINED = re.compile(r"\\{1,2}\s*$")
_PLAIN = re.compile(r"(?:[^{}'\"(]|(?<!-)\()*")  # no braces, quotes, nor "Net-(C1-Pad1)"
_PIECE = re.compile(r"[^\s,=()]+|[=()]")
_FIELD = re.compile(
    r"""(?P<blank>[\s,]+)
    |(?P<mark>[=()])
    |(?P<open>[{'"])
    |(?P<word>(?:~\{[^{}\s]{1,60}\}|[^\s=(),{}'"])+)
    |(?P<odd>.)""",
    re.VERBOSE | re.IGNORECASE | re.DOTALL,
)


class Field(NamedTuple):
    """A piece of a card.

    Attributes:
        kind: "word"; "mark" for one of ``= ( )``; "expression" for braces or single quotes;
            "string" for double quotes.
        text: Without the braces or quotes.
        start, end: In the text of the card, with the braces or quotes.
    """

    kind: str
    text: str
    start: int
    end: int


class Card:
    """A logical line and where each of its characters was written."""

    def __init__(
        self, source: Source, index: int, text: str, pieces: tuple[tuple[int, int, int], ...]
    ) -> None:
        """Take the joined text; a piece is (offset in it, line index, column from 0)."""
        self.source, self.index, self.text, self.pieces = source, index, text, pieces
        self._fields: tuple[Field, ...] | None = None

    def span(self, start: int, end: int, within: tuple[str, ...] = ()) -> Span:
        """Return the place of some of its characters, cut at the end of a line."""
        start = min(max(start, 0), max(len(self.text) - 1, 0))
        offset, line, column = self.pieces[0]
        until = len(self.text)
        for number, piece in enumerate(self.pieces):
            if piece[0] <= start:
                offset, line, column = piece
                following = self.pieces[number + 1 :]
                until = following[0][0] - 1 if following else len(self.text)
        length = max(min(end, until) - start, 1)
        whole = self.source.lines[line]
        at = column + start - offset
        # A line of megabytes is not printed; nor is the caret lost.
        if len(whole) > 500:
            cut = max(at - 80, 0)
            whole, at = whole[cut : cut + 200], at - cut
        length = max(min(length, len(whole) - at), 1)
        outer = (*self.source.within, *within)
        return Span(self.source.file, line + 1, at + 1, length, whole, outer)

    def whole(self, within: tuple[str, ...] = ()) -> Span:
        """Return the place of all of its first line."""
        return self.span(0, len(self.text), within)

    def error(
        self,
        message: str,
        at: Field | tuple[int, int] | None = None,
        hint: str = "",
        within: tuple[str, ...] = (),
    ) -> SourceError:
        """Return an error that points at a field, a stretch, or the first word."""
        if isinstance(at, Field):
            start, end = at.start, at.end
        elif at is None:
            start, end = 0, len(self.text.split(None, 1)[0]) if self.text.strip() else 1
        else:
            start, end = at
        if len(message) > LONGEST_MESSAGE:
            message = f"{message[:LONGEST_MESSAGE]}…"
        return SourceError(message, self.span(start, end, within), hint)

    @property
    def fields(self) -> tuple[Field, ...]:
        """The fields in order.

        Raises:
            SourceError: A brace or quote that is never closed.
        """
        if self._fields is None:
            self._fields = tuple(_fields(self))
        return self._fields

    @property
    def word(self) -> str:
        """The first word."""
        return self.text.split(None, 1)[0] if self.text else ""


def uncomment(line: str, *, dollar: bool) -> str:
    """Return a line without its end-of-line comment.

    Args:
        line: As written.
        dollar: Whether a dollar sign after a blank starts a comment too.
    """
    cut = line.find(";")
    while cut > 0 and line.count('"', 0, cut) % 2 and '"' in line[cut:]:
        cut = line.find(";", cut + 1)
    if cut >= 0:
        line = line[:cut]
    if "$" in line or "//" in line:
        for found in _BLANK_COMMENT.finditer(line):
            if "$" in found[0] and not dollar:
                continue
            if line.count('"', 0, found.start()) % 2 and '"' in line[found.end() :]:
                continue
            return line[: found.start()]
    return line


def gather(source: Source, index: int, *, dollar: bool = True) -> Card:
    """Return the card that starts at a line, joined with its continuations.

    Raises:
        SourceError: Longer than any card may be.
    """
    lines = source.lines
    raw = lines[index]
    text = uncomment(raw, dollar=dollar) if (";" in raw or "$" in raw or "//" in raw) else raw
    body = text.strip()
    column = len(text) - len(text.lstrip())
    at = index + 1
    count = len(lines)
    joined = body[-1:] == "\\"
    if not joined and (at >= count or not _continues(lines[at])):
        if len(body) > MOST_COLUMNS:
            raise _too_long(source, index, body)
        return Card(source, index, body, ((0, index, column),))
    if joined:
        body = _JOINED.sub("", body)
    parts, pieces, length = [body], [(0, index, column)], len(body)
    while at < count:
        raw = lines[at]
        stripped = raw.lstrip()
        mark = stripped[:1]
        if joined:
            column = len(raw) - len(stripped)
            rest = stripped
            if mark == "+":
                rest, column = stripped[1:], column + 1
        elif mark == "+":
            rest, column = stripped[1:], len(raw) - len(stripped) + 1
        elif not mark or mark in "*;#" or stripped.startswith("//"):
            at += 1
            continue
        else:
            break
        rest = uncomment(rest, dollar=dollar)
        column += len(rest) - len(rest.lstrip())
        rest = rest.strip()
        joined = rest[-1:] == "\\"
        if joined:
            rest = _JOINED.sub("", rest)
        pieces.append((length + 1, at, column))
        parts.append(rest)
        length += 1 + len(rest)
        if length > MOST_COLUMNS:
            raise _too_long(source, index, parts[0])
        at += 1
    return Card(source, index, " ".join(parts), tuple(pieces))


def _continues(line: str) -> bool:
    """Whether a continuation may follow from this line on: it is one, or a comment or blank."""
    mark = line.lstrip()[:1]
    return not mark or mark in "+*;#/"


def _too_long(source: Source, index: int, text: str) -> SourceError:
    card = Card(source, index, text[:80], ((0, index, 0),))
    return SourceError(f"a card of more than {MOST_COLUMNS:,} characters", card.span(0, 80))


def _fields(card: Card) -> list[Field]:
    text, found, at = card.text, [], 0
    if _PLAIN.fullmatch(text):
        return [
            Field("mark" if match[0] in "=()" else "word", match[0], *match.span())
            for match in _PIECE.finditer(text)
        ]
    while at < len(text):
        match = _FIELD.match(text, at)
        assert match is not None  # the last alternative takes any character
        kind, end = match.lastgroup, match.end()
        if kind == "open":
            end = _closing(card, at)
            quoted = text[at] == '"'
            found.append(
                Field("string" if quoted else "expression", text[at + 1 : end - 1], at, end)
            )
        elif kind == "word" or kind == "mark":
            if text[end : end + 1] == "(" and match[0].lower().endswith(("net-", "unconnected-")):
                end = _editor_node(text, end)
            found.append(Field(kind, text[at:end], at, end))
        elif kind == "odd":
            raise card.error(f'"{match[0]}" does not close anything', (at, end))
        at = end
    return found


def _editor_node(text: str, opening: int) -> int:
    """Return where a node such as "Net-(C1-Pad1)" ends; its parentheses belong to the name."""
    closing = text.find(")", opening, opening + 80)
    inner = text[opening + 1 : closing]
    if closing < 0 or any(mark in inner for mark in " \t("):
        return opening
    end = closing + 1
    while end < len(text) and text[end] not in " \t=(),{}'\"":
        end += 1
    return end


def _closing(card: Card, at: int) -> int:
    """Return where a brace or quote that opens at `at` has been closed."""
    text, opening = card.text, card.text[at]
    if opening == "{":
        depth = 0
        for match in re.compile(r"[{}]").finditer(text, at):
            depth += 1 if match[0] == "{" else -1
            if depth == 0:
                return match.end()
        raise card.error('"{" is never closed', (at, at + 1), 'add the missing "}"')
    end = text.find(opening, at + 1)
    if end < 0:
        raise card.error(f"{opening} is never closed", (at, at + 1), f"add the missing {opening}")
    return end + 1
