"""Control cards: which are read, which are set aside with a notice, which are refused."""

from __future__ import annotations

import re

from stress.netlist.card import Card, Field
from stress.netlist.controlled import assignments
from stress.netlist.problem import Problems
from stress.netlist.scope import Assignment, Scope, did_you_mean
from stress.text.number import NumberError, read_number

PARAMETERS = (".param", ".params", ".parameter")
READ = frozenset(
    [
        ".subckt",
        ".macro",
        ".ends",
        ".eom",
        ".model",
        ".func",
        ".include",
        ".inc",
        ".incl",
        ".lib",
        ".endl",
        ".global",
        ".options",
        ".option",
        ".opt",
        ".temp",
        ".ic",
        ".tran",
        ".if",
        ".elseif",
        ".else",
        ".endif",
        ".title",
        ".end",
        ".step",
    ]
) | frozenset(PARAMETERS)
IGNORED = {
    **dict.fromkeys(
        [
            ".ac",
            ".dc",
            ".op",
            ".tf",
            ".noise",
            ".four",
            ".fourier",
            ".pz",
            ".sens",
            ".disto",
            ".hb",
            ".pss",
            ".sp",
            ".fft",
            ".mc",
            ".monte",
            ".wcase",
            ".net",
            ".spectrum",
            ".check",
            ".lin",
        ],
        "analysis card",
    ),
    **dict.fromkeys(
        [
            ".print",
            ".plot",
            ".probe",
            ".save",
            ".meas",
            ".measure",
            ".width",
            ".wave",
            ".graph",
            ".view",
            ".vec",
            ".lis",
            ".list",
            ".ferret",
            ".savebias",
            ".loadbias",
            ".watch",
            ".echo",
            ".machine",
            ".endmachine",
            ".state",
            ".rule",
            ".output",
            ".savestate",
            ".load",
            ".store",
            ".connect",
            ".text",
            ".textpos",
            ".plotwinsize",
        ],
        "output card",
    ),
    **dict.fromkeys(
        [
            ".backanno",
            ".stimulus",
            ".distribution",
            ".stmlib",
            ".autoconvergence",
            ".alter",
            ".data",
            ".enddata",
            ".del",
            ".protect",
            ".unprotect",
            ".prot",
            ".unprot",
            ".nodeset",
            ".aliases",
            ".endalias",
            ".loadsave",
            ".sst",
            ".control",
            ".endc",
            ".simulator",
            ".export",
            ".tnom",
            ".cosim",
            ".malias",
            ".stop",
            ".dcvolt",
            ".saveall",
        ],
        "card that the review does not use",
    ),
}
REFUSED = {
    ".csparam": "it hands a number to a script, which is never run",
    ".hdl": "compiled models are never loaded",
    ".verilog": "compiled models are never loaded",
    ".pre_osdi": "compiled models are never loaded",
    ".osdi": "compiled models are never loaded",
    ".codemodel": "compiled models are never loaded",
    ".exec": "nothing in a netlist is ever run",
    ".shell": "nothing in a netlist is ever run",
}
_NAME = re.compile(r"[^\W\d][\w.$#]*")


def assigned(card: Card, start: int = 0) -> list[Assignment]:
    """Return the `name = text` pairs of a `.param` card or the end of a `.subckt` header.

    Raises:
        SourceError: What stands there is no pair.
    """
    found = []
    text = card.text
    for key, begin, end in assignments(text, start):
        while begin < end and text[begin] in " \t":
            begin += 1
        if begin >= end:
            at = max(begin - 1, 0)
            raise card.error(f'a value is missing behind "{key}="', (at, at + 1))
        value = text[begin:end]
        if len(value) > 1 and value[0] + value[-1] in ("''", '""') and value[0] not in value[1:-1]:
            begin, end, value = begin + 1, end - 1, value[1:-1]
        found.append(Assignment(key.lower(), value, card, begin, end))
    return found


def macros(card: Card) -> list[Assignment]:
    """Return the pair of `.param NAME {text}`, a macro without `=`; [] where it is none."""
    fields = card.fields
    if len(fields) == 3 and fields[2].kind == "expression":
        inner = fields[2]
        return [
            Assignment(fields[1].text.lower(), inner.text, card, inner.start + 1, inner.end - 1)
        ]
    return []


def function(card: Card) -> tuple[str, tuple[tuple[str, ...], str]]:
    """Read `.func name(a,b) {body}`; returns the name and (formals, body).

    Raises:
        SourceError: It has another form.
    """
    text = card.text
    form = "the form is .func name(a,b) {expression}"
    opening, closing = text.find("("), text.find(")")
    if opening < 0 or closing < opening:
        raise card.error("a function needs its arguments in parentheses", None, form)
    name = text[len(card.word) : opening].strip()
    if not _NAME.fullmatch(name):
        raise card.error(f'"{name}" is no name of a function', (len(card.word), opening), form)
    formals = tuple(entry.strip().lower() for entry in text[opening + 1 : closing].split(","))
    if formals == ("",):
        formals = ()
    body = text[closing + 1 :].strip().lstrip("=").strip()
    if not body:
        raise card.error("the body of the function is missing", (closing, closing + 1), form)
    return name.lower(), (formals, body)


def initial(card: Card, scope: Scope) -> dict[str, float]:
    """Read `.ic V(a)=1 V(b)=2`; by flat node.

    Raises:
        SourceError: It has another form.
    """
    found: dict[str, float] = {}
    pattern = re.compile(
        r"v\s{0,9}\(\s{0,9}([^()]{1,80}(?:\([^()]{0,80}\))?[^()]{0,80})\)\s{0,9}=\s{0,9}",
        re.IGNORECASE,
    )
    for match in pattern.finditer(card.text):
        stretch = re.compile(r"\{[^}]*\}|'[^']*'|\S+").match(card.text, match.end())
        if stretch is None:
            raise card.error("a voltage is missing here", (match.start(), match.end()))
        text, start = stretch[0], stretch.start()
        if text[0] in "{'":
            text, start = text[1:-1], start + 1
        found[scope.node(match[1].strip())] = scope.number(text, card, start)
    return found


def transient(card: Card, scope: Scope) -> tuple[float, float] | None:
    """Return step and stop of a `.tran` card; one number alone is the stop (lt)."""
    numbers: list[float] = []
    for field in card.fields[1:]:
        if field.kind == "mark":
            continue
        try:
            numbers.append(_number(card, scope, field))
        except NumberError:
            break
    if not numbers:
        return None
    if len(numbers) == 1:
        return numbers[0] / 1000, numbers[0]
    step, stop = numbers[0], numbers[1]
    return (step or stop / 1000), stop


def _number(card: Card, scope: Scope, field: Field) -> float:
    if field.kind == "expression":
        return scope.number(field.text, card, field.start + 1)
    return read_number(field.text).value


def options(card: Card, scope: Scope) -> dict[str, float | str]:
    """Read `.options name=value flag …`; a flag is 1, a value that is no number stays a word."""
    found: dict[str, float | str] = {}
    fields = card.fields[1:]
    at = 0
    while at < len(fields):
        key = fields[at]
        if at + 2 < len(fields) and fields[at + 1].text == "=":
            value = fields[at + 2]
            found[key.text.lower()] = _option(card, scope, value)
            at += 3
        else:
            if key.kind == "word":
                found[key.text.lower()] = 1.0
            at += 1
    return found


def _option(card: Card, scope: Scope, value: Field) -> float | str:
    if value.kind == "expression":
        return scope.number(value.text, card, value.start + 1)
    try:
        return read_number(value.text).value
    except NumberError:
        held = scope.value(value.text.lower())
        return held if isinstance(held, float) else value.text


def unknown(card: Card, word: str, scope: Scope, problems: Problems) -> None:
    """Say what an unknown control card might have been, or set it aside."""
    if word in REFUSED:
        problems.ignore(f"{word}: {REFUSED[word]}", card.whole(scope.within))
        return
    what = IGNORED.get(word)
    if what is not None:
        problems.ignore(f"{word}: {what}", card.whole(scope.within))
        return
    hint = did_you_mean(word, READ)
    if hint:
        raise card.error(f'unknown control card "{word}"', (0, len(word)), hint, scope.within)
    problems.ignore(f"{word}: unknown control card", card.whole(scope.within))
