"""An element card cut into its name, its words and its `name=value` pairs."""

from __future__ import annotations

from dataclasses import dataclass

from stress.netlist.card import Card, Field
from stress.netlist.expression import Expression, Number
from stress.netlist.problem import Obstacle, Problems
from stress.netlist.scope import Scope
from stress.text.number import NumberError, plain_number, read_number
from stress.text.span import SourceError, Span


@dataclass(frozen=True, slots=True)
class Value:
    """What stands behind a `=`: its text and where it is."""

    text: str
    start: int  # of the text, inside braces or quotes
    end: int
    key: Field


class Part:
    """One element card, read in one scope.

    Attributes:
        name: As written, without the path.
        full: With the path of its instance.
        words: The words behind the name that belong to no `=`, marks left out.
        given: The `name=value` pairs by lower-case name.
    """

    def __init__(self, card: Card, scope: Scope, problems: Problems) -> None:
        """Cut the card.

        Raises:
            SourceError: A brace or quote that is never closed.
        """
        self.card, self.scope, self.problems = card, scope, problems
        fields = card.fields
        if not fields or fields[0].kind != "word":
            at = fields[0] if fields else None
            raise card.error(
                f'"{card.text[:1]}" begins no card', at, "a comment begins with *", scope.within
            )
        self.head = fields[0]
        self.name = self.head.text
        self.full = scope.element(self.name)
        self.letter = self.name[0].upper()
        self.fields = fields[1:]
        self.words: list[Field] = []
        self.given: dict[str, Value] = {}
        self.marked = False
        self._cut()

    def _cut(self) -> None:
        fields, at = self.fields, 0
        while at < len(fields):
            field = fields[at]
            if field.kind == "mark":
                self.marked = True
                at += 1
                continue
            following = fields[at + 1] if at + 1 < len(fields) else None
            if (
                following is not None
                and following.kind == "mark"
                and following.text == "="
                and field.kind == "word"
            ):
                at = self._pair(field, at + 2)
                continue
            self.words.append(field)
            at += 1

    def _pair(self, key: Field, at: int) -> int:
        """Read the value behind `key =`; returns the index of the next field."""
        fields = self.fields
        if at >= len(fields) or (fields[at].text == "=" and fields[at].kind == "mark"):
            raise self.error(f'a value is missing behind "{key.text}="', key)
        first = fields[at]
        inside = 0 if first.kind in ("word", "mark") else 1
        start, end = first.start, first.end
        depth = 1 if first.kind == "mark" and first.text == "(" else 0
        at += 1
        # An expression without braces goes on as long as no blank or comma ends it.
        while at < len(fields) and (depth > 0 or fields[at].start == end) and not inside:
            field = fields[at]
            if field.kind == "mark" and field.text == "=":
                break
            if field.kind == "mark":
                depth += 1 if field.text == "(" else -1
                if depth < 0:
                    break
            end = field.end
            at += 1
        text = self.card.text[start + inside : end - inside]
        self.given[key.text.lower()] = Value(text, start + inside, end - inside, key)
        return at

    def span(self) -> Span:
        """Return the place of the whole card."""
        return self.card.whole(self.scope.within)

    def error(
        self, message: str, at: Field | Value | tuple[int, int] | None = None, hint: str = ""
    ) -> SourceError:
        """Return an error at a field of the card."""
        if isinstance(at, Value):
            at = (at.start, at.end)
        return self.card.error(message, at, hint, self.scope.within)

    def obstacle(
        self, message: str, at: Field | Value | tuple[int, int] | None = None, hint: str = ""
    ) -> Obstacle:
        """Return what prevents a simulation, at a field of the card."""
        error = self.error(message, at, hint)
        return Obstacle(error.message, error.span, error.hint)

    def notice(
        self, rule: str, text: str, at: Field | Value | None = None, action: str = ""
    ) -> None:
        """Tell how something unusual was read."""
        start, end = (at.start, at.end) if at is not None else (0, len(self.card.text))
        span = self.card.span(start, end, self.scope.within)
        self.problems.notice(rule, self.full, text, span, action)

    def need(self, count: int, form: str) -> None:
        """Demand at least so many words; `form` is what the card looks like."""
        if len(self.words) < count:
            end = len(self.card.text)
            at = (max(end - 1, 0), end) if self.words else self.head
            raise self.error(f"{self.name}: the card ends too early", at, f"the form is {form}")

    def node(self, field: Field) -> str:
        """Return the flat node that a word names.

        Raises:
            SourceError: It is an expression or a quoted text.
        """
        if field.kind != "word":
            raise self.error("a node is expected here", field)
        return self.scope.node(field.text)

    def nodes(self, count: int) -> tuple[str, ...]:
        """Return the flat nodes that the first words name."""
        return tuple(self.node(field) for field in self.words[:count])

    def number(self, field: Field | Value, quantity: str = "") -> float:
        """Return the number a field stands for.

        Raises:
            SourceError: It is none.
        """
        found = self.quantity(field, quantity)
        if isinstance(found, Number):
            return found.value
        return self.scope.number(field.text, self.card, self._begin(field))

    def quantity(
        self, field: Field | Value, quantity: str = "", across: Expression | None = None
    ) -> Expression:
        """Return the number or the law a field stands for.

        Raises:
            SourceError: It is neither.
        """
        text = field.text
        plain = plain_number(text)
        if plain is not None:
            return Number(plain)
        named = text[:1].isalpha() and self.scope.value(text.lower()) is not None
        if not named and (not isinstance(field, Field) or field.kind == "word"):
            try:
                read = read_number(text, quantity=quantity)
            except NumberError as error:
                if text[:1].isdigit() and not any(mark in text for mark in "*/()^?<>"):
                    start = field.start + error.start
                    at = (start, start + max(error.length, 1))
                    raise self.error(error.message, at, error.hint) from None
            else:
                if read.trap:
                    self.notice("trap", f"{self.full}: {read.trap}", field)
                return Number(read.value)
        return self.scope.tree(text, self.card, self._begin(field), across=across)

    def _begin(self, field: Field | Value) -> int:
        return field.start + (1 if isinstance(field, Field) and field.kind == "expression" else 0)

    def take(self, key: str, quantity: str = "") -> float | None:
        """Return the number given by name, and count it as read; None where it is not there."""
        value = self.given.pop(key, None)
        return None if value is None else self.number(value, quantity)
