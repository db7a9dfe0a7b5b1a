"""The `.model` card."""

from __future__ import annotations

from collections.abc import Callable

from stress.netlist.card import Card, Field
from stress.netlist.flat import Model
from stress.netlist.problem import Obstacle, Problems
from stress.netlist.scope import Scope
from stress.text.number import NumberError, plain_number, read_number

# What a manufacturer's or an editor's library says about the part beyond its electrical model.
VENDOR = frozenset(
    [
        "mfg",
        "mfr",
        "type",
        "vpk",
        "iave",
        "irms",
        "ipk",
        "vceo",
        "vcbo",
        "vebo",
        "icrating",
        "vds",
        "vgs",
        "qg",
        "ron_typ",
        "pn",
        "descr",
        "desc",
        "manufacturer",
        "package",
        "vgsrating",
        "idrating",
        "tolerance",
        "dev",
        "lot",
        "symbol",
        "part",
        "mdl",
    ]
)
TYPES_WITH_TAG_RON = frozenset({"vdmos", "nmos", "pmos"})
KINDS = frozenset(
    [
        "d",
        "npn",
        "pnp",
        "lpnp",
        "njf",
        "pjf",
        "nmf",
        "pmf",
        "nhfet",
        "phfet",
        "nmos",
        "pmos",
        "nsoi",
        "psoi",
        "vdmos",
        "sw",
        "csw",
        "vswitch",
        "iswitch",
        "r",
        "res",
        "c",
        "cap",
        "l",
        "ind",
        "core",
        "ltra",
        "urc",
        "txl",
        "cpl",
    ]
)
# Devices solved on a mesh of their own: what describes them goes through line by line.
MESHED = frozenset({"numd", "nbjt", "nbjt2", "numos"})
_SYNONYMS = {"res": "r", "cap": "c", "ind": "l", "lpnp": "pnp"}


def read_model(
    card: Card,
    scope: Scope,
    problems: Problems,
    base: Callable[[Scope, str], Model | None],
) -> Model:
    """Read one model in the scope that holds it.

    Args:
        card: `.model NAME KIND (name=value …)`, with or without the parentheses.
        scope: Its parameters are worth what they are worth there.
        problems: For the tags that are left out.
        base: Finds the model that `AKO:NAME` is like.

    Raises:
        SourceError: The card is wrong; an `Obstacle` where the kind is unknown.
    """
    fields = [field for field in card.fields if field.text not in ("(", ")")]
    if len(fields) < 3:
        raise card.error(
            "the model card ends too early", None, "the form is .model NAME KIND(name=value …)"
        )
    name, at = fields[1].text, 2
    numbers: dict[str, float | str] = {}
    kind = fields[at].text.lower()
    if kind.startswith("ako"):
        like = fields[at].text.partition(":")[2]
        if not like:
            at += 1
            if at >= len(fields):
                raise card.error(
                    "the model card ends too early", fields[2], "the form is AKO:NAME", scope.within
                )
            like = fields[at].text.lstrip(":")
        found = base(scope, like) if like.lower() != name.lower() else None
        if found is None:
            raise Obstacle(
                f'the model "{like}", which "{name}" is like, is missing',
                card.span(fields[at].start, fields[at].end, scope.within),
                "add its .model or include the file that has it",
            )
        numbers.update(found.parameters)
        kind = found.kind
        at += 1
        if at < len(fields) and fields[at].text.lower() in KINDS:
            at += 1
    else:
        if kind not in KINDS and kind not in MESHED:
            raise Obstacle(
                f'"{fields[at].text}" is no kind of model that can be simulated here',
                card.span(fields[at].start, fields[at].end, scope.within),
                "kinds are D NPN PNP NJF PJF NMOS PMOS VDMOS SW CSW R C L and the like",
            )
        kind = _SYNONYMS.get(kind, kind)
        at += 1
        if kind in MESHED:
            numbers = {"text": _as_written(card, fields[2].end)}
            return Model(
                name=name.lower(), kind=kind, parameters=numbers, span=card.whole(scope.within)
            )
    while at < len(fields):
        at = _parameter(card, scope, fields, at, numbers, kind)
    return Model(name=name.lower(), kind=kind, parameters=numbers, span=card.whole(scope.within))


def _as_written(card: Card, start: int) -> str:
    """Return the rest of a card with its continuation lines kept apart."""
    ends = [offset for offset, _, _ in card.pieces[1:]] + [len(card.text) + 1]
    begins = [start, *ends[:-1]]
    return "\n+ ".join(
        card.text[begin : end - 1].strip() for begin, end in zip(begins, ends, strict=True)
    )


def _without_mark(fields: list[Field], at: int) -> bool:
    """Whether `name value` stands here, without the `=`: ngspice takes it for a blank."""
    if at + 1 >= len(fields) or fields[at].kind != "word" or fields[at + 1].kind == "mark":
        return False
    key, value = fields[at].text, fields[at + 1].text
    if not key[0].isalpha() or key.lower().startswith(("dev", "lot")) or value.endswith("%"):
        return False
    behind = fields[at + 2] if at + 2 < len(fields) else None
    if behind is not None and behind.text == "=" and behind.kind == "mark":
        return False
    try:
        read_number(value)
    except NumberError:
        return False
    return True


def _parameter(
    card: Card,
    scope: Scope,
    fields: list[Field],
    at: int,
    numbers: dict[str, float | str],
    kind: str,
) -> int:
    """Read `name=value`, or a bare word as a flag; returns the index behind it."""
    key = fields[at]
    if _without_mark(fields, at):
        equals = Field("mark", "=", key.end, key.end)
        _parameter(card, scope, [key, equals, fields[at + 1]], 0, numbers, kind)
        return at + 2
    if at + 2 >= len(fields) or fields[at + 1].text != "=" or fields[at + 1].kind != "mark":
        if key.kind == "mark" or plain_number(key.text) is not None:
            return at + 1  # a stray value, such as the spread behind DEV
        if at + 1 < len(fields) and fields[at + 1].text == "=":
            raise card.error(f'a value is missing behind "{key.text}="', key, "", scope.within)
        low = key.text.lower()
        if low.startswith(("dev", "lot")) or key.text.endswith("%"):
            return at + 1
        numbers[low] = 1.0
        return at + 1
    value = fields[at + 2]
    low = key.text.lower()
    at += 3
    if kind == "cpl" and low != "length":  # a matrix: numbers one behind the other
        row = [value.text]
        while at < len(fields) and not (at + 1 < len(fields) and fields[at + 1].text == "="):
            row.append(fields[at].text)
            at += 1
        numbers[low] = " ".join(repr(read_number(text).value) for text in row)
        return at
    if (
        low in VENDOR
        or (kind in TYPES_WITH_TAG_RON and low == "ron")
        or (low.startswith(("dev/", "lot/")))
    ):
        return at
    if value.kind == "string":
        return at
    if value.kind == "expression":
        numbers[low] = scope.number(value.text, card, value.start + 1)
        return at
    plain = plain_number(value.text)
    if plain is not None:
        numbers[low] = plain
        return at
    try:
        numbers[low] = read_number(value.text).value
    except NumberError as error:
        if value.text[:1].isalpha() or value.text[:1] == "_":
            held = scope.value(value.text.lower())
            if isinstance(held, float):
                numbers[low] = held
            elif low in ("version", "poly", "level"):
                numbers[low] = value.text
            # Any other word describes the part and is no number of its model.
            return at
        if value.text[:1].isdigit() and value.text.count(".") > 1:
            numbers[low] = value.text  # a version such as 4.8.2
            return at
        if any(mark in value.text for mark in "*/+"):
            numbers[low] = scope.number(value.text, card, value.start)
            return at
        start = value.start + error.start
        raise card.error(
            error.message, (start, start + max(error.length, 1)), error.hint, scope.within
        ) from None
    return at
