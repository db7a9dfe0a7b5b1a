"""A netlist file to a flat netlist: the whole way, stage by stage."""

from __future__ import annotations

import os
from collections.abc import Callable, Sequence
from pathlib import Path

from stress.netlist.assembly import MOST_ELEMENTS, Assembly
from stress.netlist.card import Card
from stress.netlist.control import initial, options, transient, unknown
from stress.netlist.dialect import DIALECTS, is_raw_export, recognise
from stress.netlist.expand import Expansion
from stress.netlist.flat import Netlist
from stress.netlist.flattened import FlatScope, is_flattened, tagged
from stress.netlist.outline import Outline
from stress.netlist.problem import Problems, in_order
from stress.netlist.resolve import resolve
from stress.netlist.scan import Entry, Lines
from stress.netlist.scope import Block, Scope, World
from stress.netlist.source import Files, Source, split
from stress.text.number import NumberError, read_number
from stress.text.span import SourceError, SourceErrors


def nothing_built_in(name: str) -> str | None:
    """Know no type."""
    return None


def read(
    path: str | Path,
    *,
    libraries: Sequence[Path] = (),
    dialect: str | None = None,
    built_in: Callable[[str], str | None] = nothing_built_in,
) -> Netlist:
    """Read a netlist file and expand it.

    Args:
        path: Of the file; messages name it like this.
        libraries: Folders from which includes may come besides that of the file.
        dialect: "default", "ps", "lt" or "hs"; None: recognised by `stress.netlist.dialect`.
        built_in: Gives the SPICE text of a subcircuit by the name of a tube type.

    Raises:
        SourceErrors: Everything that is wrong with the text.
        ValueError: There is no such dialect.
    """
    place = Path(path)
    folder = Path(os.path.realpath(place.parent))
    files = Files(folder, tuple(libraries))
    return _read(files.main(folder / place.name, str(path)), files, dialect, built_in)


def read_text(
    text: str,
    *,
    path: str = "netlist",
    libraries: Sequence[Path] = (),
    dialect: str | None = None,
    built_in: Callable[[str], str | None] = nothing_built_in,
) -> Netlist:
    """Read a netlist from a text, as `read` does; includes come from `libraries` only.

    Raises:
        SourceErrors: Everything that is wrong with the text.
        ValueError: There is no such dialect.
    """
    files = Files(None, tuple(libraries))
    return _read(Source(path, split(text, path)), files, dialect, built_in)


def _read(
    source: Source,
    files: Files,
    dialect: str | None,
    built_in: Callable[[str], str | None],
) -> Netlist:
    if dialect is not None and dialect not in DIALECTS:
        raise ValueError(f"no dialect {dialect!r}: one of {', '.join(DIALECTS)}")
    if not any(line.strip() for line in source.lines):
        raise SourceErrors([SourceError("the netlist is empty", source.whole())])
    meaning = dialect or recognise("\n".join(source.lines[:5000]))
    problems = Problems()
    into = Assembly(problems, dollar=meaning != "ps")
    world = World(meaning, from_editor=is_raw_export("\n".join(source.lines[:5000])))
    settings: dict[str, float | str] = {}

    def control(entry: Entry, scope: Scope) -> None:
        _control(entry, scope, into, world, settings)

    outline = Outline(files, problems, into.dollar, control)
    top = Block("", None, source)
    flattened = is_flattened(source.lines)
    scope = FlatScope(top, world=world) if flattened else Scope(top, world=world)
    outline.fill(top, Lines(source, 1, len(source.lines)), scope)
    expansion = Expansion(outline, into, problems, world, built_in)
    if len(top.cards) > MOST_ELEMENTS:
        card = top.cards[MOST_ELEMENTS].card(dollar=into.dollar)
        problems.stop(f"more than {MOST_ELEMENTS:,} elements", card.whole())
    _title(source, problems)
    _later(top, scope, into, settings, problems)
    expansion.block(scope)
    elements = resolve(into, problems)
    if flattened:
        elements = tagged(elements, source.lines)
    problems.settle_missing()
    if len(problems.errors) > 2 and not elements and not into.instances:
        first = problems.sorted_errors()[:3]
        what = SourceError(
            "this does not look like a netlist: none of its cards can be read",
            source.whole(),
            "export the circuit from the schematic editor as SPICE netlist",
        )
        raise SourceErrors([what, *first])
    if problems.errors:
        raise SourceErrors(problems.sorted_errors())
    return Netlist(
        path=source.file,
        title=source.lines[0].strip().removeprefix(".title").lstrip("*").strip(),
        dialect=meaning,
        elements=elements,
        models=into.models,
        instances=tuple(into.instances),
        initial_V=into.initial_V,
        options=settings,
        temperature_degC=world.temperature_degC,
        ignored=tuple(in_order(problems.ignored)),
        notices=tuple(in_order(problems.notices)),
        obstacles=tuple(in_order(problems.obstacles)),
    )


def _title(source: Source, problems: Problems) -> None:
    """Tell where the first line, which is always the title, looks like a card."""
    words = source.lines[0].split()
    if len(words) > 3 and words[0][0].upper() in "RCLVI" and words[0][1:].isalnum():
        try:
            read_number(words[3])
        except NumberError:
            return
        problems.notice(
            "title",
            words[0],
            f'the first line is the title: "{words[0]}" is not in the circuit',
            Card(source, 0, source.lines[0], ((0, 0, 0),)).whole(),
            "put a title line before it",
        )


def _control(
    entry: Entry,
    scope: Scope,
    into: Assembly,
    world: World,
    settings: dict[str, float | str],
) -> None:
    """Do what a control card asks for that must be known before the elements are read."""
    word = entry.word
    card = entry.card(dollar=into.dollar)
    if word == ".global":
        world.global_nodes.update(field.text.lower() for field in card.fields[1:])
    elif word in (".options", ".option", ".opt", ".temp", ".ic", ".tran", ".step"):
        if scope.name:
            _settle(entry, scope, into, settings)
    elif word == ".end":
        if not scope.name and not entry.source.within and into.problems.end is None:
            into.problems.end = (entry.source.file, entry.index + 1)
    elif word == ".title":
        into.problems.ignore(".title: the first line is the title", card.whole(scope.within))
    elif word == ".endl":
        pass
    else:
        unknown(card, word, scope, into.problems)


def _later(
    top: Block, scope: Scope, into: Assembly, settings: dict[str, float | str], problems: Problems
) -> None:
    """Read the settings of the netlist once all its parameters are known."""
    for entry in top.controls:
        try:
            _settle(entry, scope, into, settings)
        except SourceErrors:
            raise
        except SourceError as error:
            problems.error(error)


def _settle(entry: Entry, scope: Scope, into: Assembly, settings: dict[str, float | str]) -> None:
    word, problems = entry.word, into.problems
    card = entry.card(dollar=into.dollar)
    if word in (".options", ".option", ".opt"):
        settings.update(options(card, scope))
        temperature = settings.get("temp")
        if isinstance(temperature, float):
            scope.world.temperature_degC = temperature
    elif word == ".temp":
        fields = [field for field in card.fields[1:] if field.kind != "mark"]
        if fields:
            begin = fields[0].start + (fields[0].kind == "expression")
            scope.world.temperature_degC = scope.number(fields[0].text, card, begin)
    elif word == ".ic":
        into.initial_V.update(initial(card, scope))
    elif word == ".tran":
        problems.ignore(".tran: analysis card", card.whole(scope.within))
        times = transient(card, scope)
        if times is not None and into.stop_s is None:
            into.step_s, into.stop_s = times
    elif word == ".step":
        _stepped(entry, scope, into)


def _stepped(entry: Entry, scope: Scope, into: Assembly) -> None:
    """Set aside a sweep; a parameter that only the sweep defines takes its first value."""
    card = entry.card(dollar=into.dollar)
    into.problems.ignore(".step: the sweep is not made", card.whole(scope.within))
    words = [field for field in card.fields[1:] if field.kind != "mark"]
    words = [w for w in words if w.text.lower() not in ("oct", "dec", "lin", "list")]
    if len(words) >= 3 and words[0].text.lower() == "param":
        name = words[1].text.lower()
        if scope.value(name) is None:
            begin = words[2].start + (words[2].kind == "expression")
            scope.values[name] = scope.number(words[2].text, card, begin)
