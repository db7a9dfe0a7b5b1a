"""The header of a `.subckt` and the card of an X."""

from __future__ import annotations

from dataclasses import dataclass

from stress.netlist.card import Card, Field
from stress.netlist.control import assigned
from stress.netlist.scope import Assignment

_PARAMETERS = frozenset({"params:", "params", "param:", "parameters:"})


@dataclass(frozen=True, slots=True)
class Header:
    """What the header line says.

    Attributes:
        name: As written.
        pins: Formal node names, as written.
        optional: Nodes with a default (`OPTIONAL: A=B`), after the pins.
        defaults: Parameters with their default text.
        prose: Words in parentheses that are no pins.
    """

    name: str
    pins: tuple[str, ...]
    optional: tuple[tuple[str, str], ...]
    defaults: tuple[Assignment, ...]
    prose: str = ""


def read_header(card: Card, within: tuple[str, ...]) -> Header:
    """Read `.subckt NAME pin pin … [params: a=1 b=2]`.

    Raises:
        SourceError: There is no name.
    """
    fields = card.fields
    if len(fields) < 2 or fields[1].kind == "mark":
        raise card.error(
            "a subcircuit needs a name", None, "the form is .subckt NAME pin pin …", within
        )
    pins: list[str] = []
    prose: list[str] = []
    optional: list[tuple[str, str]] = []
    first_assigned: int | None = None
    optional_now = False
    depth, at, listed = 0, 2, False
    while at < len(fields):
        field = fields[at]
        following = fields[at + 1] if at + 1 < len(fields) else None
        low = field.text.lower()
        if field.kind == "mark" and field.text in "()":
            depth += 1 if field.text == "(" else -1
            if depth == 1 and field.text == "(":
                listed = not pins  # `.subckt NAME (a b c)`; later it is a remark
        elif low in ("optional:", "text:") or (
            low == "optional" and following and following.text == ":"
        ):
            optional_now = low.startswith("optional")
        elif low in _PARAMETERS or low == ":":
            optional_now = False
        elif following is not None and following.kind == "mark" and following.text == "=":
            if optional_now and at + 2 < len(fields):
                optional.append((field.text, fields[at + 2].text))
                at += 2
            else:
                first_assigned = field.start if first_assigned is None else first_assigned
                break
        elif depth > 0 and not listed:
            prose.append(field.text)
        elif field.kind == "word":
            pins.append(field.text)
        at += 1
    defaults = tuple(assigned(card, first_assigned)) if first_assigned is not None else ()
    return Header(fields[1].text, tuple(pins), tuple(optional), defaults, " ".join(prose))


@dataclass(frozen=True, slots=True)
class Call:
    """An X card: its nodes and the word that names the subcircuit are `words`."""

    words: tuple[Field, ...]
    given: tuple[Assignment, ...]


def read_call(card: Card) -> Call:
    """Read `X1 node node … NAME [params:] [a=1 b=2]`.

    Raises:
        SourceError: A value is missing behind a `=`.
    """
    fields = card.fields
    words: list[Field] = []
    first_assigned: int | None = None
    for number, field in enumerate(fields[1:], 1):
        following = fields[number + 1] if number + 1 < len(fields) else None
        if field.kind == "mark":
            continue
        if field.text.lower() in _PARAMETERS or field.text == ":":
            continue
        if following is not None and following.kind == "mark" and following.text == "=":
            first_assigned = field.start
            break
        words.append(field)
    given = tuple(assigned(card, first_assigned)) if first_assigned is not None else ()
    return Call(tuple(words), given)
