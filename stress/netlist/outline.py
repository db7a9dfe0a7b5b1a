"""Scanned lines sorted into blocks: includes put in, conditions decided, definitions noted."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

from stress.netlist.card import Card
from stress.netlist.control import PARAMETERS, assigned, function, macros
from stress.netlist.problem import Obstacle, Problems
from stress.netlist.scan import ENCRYPTED, Entry, Lines, is_encrypted, scan, sections
from stress.netlist.scope import Block, Scope, did_you_mean, place
from stress.netlist.source import Files, Refused, Source
from stress.text.span import SourceError, SourceErrors

PLAIN = "use a model in plain text, or a type that the part table knows"
_INCLUDES = (".include", ".inc", ".incl")


@dataclass(slots=True)
class _Choice:
    """An open `.if`: whether a branch was taken, and whether the present one is."""

    entry: Entry
    taken: bool
    here: bool
    dead: bool  # inside a branch that is not taken


@dataclass(slots=True)
class Outline:
    """Fills blocks from lines.

    Attributes:
        files: Opens what is included.
        control: Called with each control card that belongs to no definition.
    """

    files: Files
    problems: Problems
    dollar: bool
    control: Callable[[Entry, Scope], None]
    _sections: dict[int, tuple[list[str], dict[str, tuple[int, int]]]] = field(default_factory=dict)

    def fill(self, block: Block, lines: Lines, scope: Scope) -> None:
        """Sort what a stretch holds into a block; parameters go into the scope at once."""
        found = scan(lines)
        for skipped in found.skipped:
            card = Card(
                skipped.source,
                skipped.index,
                skipped.source.lines[skipped.index],
                ((0, skipped.index, 0),),
            )
            span = card.whole(scope.within)
            if skipped.what == ENCRYPTED:
                self.problems.obstacle("an encrypted model cannot be read", span, PLAIN)
            else:
                self.problems.ignore(skipped.what, span)
        for word, source, index in found.unclosed:
            card = Card(source, index, source.lines[index], ((0, index, 0),))
            self.problems.error(
                card.error(
                    f"{word} has no .ends", None, "add .ends behind its last line", scope.within
                )
            )
        choices: list[_Choice] = []
        for entry in found.entries:
            try:
                self._entry(block, entry, scope, choices)
            except SourceErrors:
                raise
            except SourceError as error:
                self.problems.error(error)
            except RecursionError:
                self.problems.error(too_deep(entry.card(dollar=self.dollar), scope))
        for choice in choices:
            card = choice.entry.card(dollar=self.dollar)
            self.problems.error(card.error(".if has no .endif", None, "", scope.within))

    def _entry(self, block: Block, entry: Entry, scope: Scope, choices: list[_Choice]) -> None:
        word = entry.word
        if word in (".if", ".elseif", ".else", ".endif"):
            block.conditional = True
            self._condition(entry, scope, choices)
            return
        if choices and not choices[-1].here:
            return
        if not word:
            block.cards.append(entry)
        elif entry.definition is not None:
            self._subcircuit(block, entry)
        elif word == ".model":
            self._model(block, entry)
        elif word in PARAMETERS:
            card = entry.card(dollar=self.dollar)
            for assignment in assigned(card, len(card.word)) or macros(card):
                block.parameters.append(assignment)
                scope.assign(assignment, override=not scope.is_given(assignment.name))
        elif word == ".func":
            name, body = function(entry.card(dollar=self.dollar))
            block.functions.setdefault(name, body)
        elif word in _INCLUDES or word == ".lib":
            self._include(block, entry, scope)
        elif word in (".ends", ".eom"):
            self._stray(entry, scope)
        else:
            block.controls.append(entry)
            self.control(entry, scope)

    def _stray(self, entry: Entry, scope: Scope) -> None:
        card = entry.card(dollar=self.dollar)
        raise card.error(f"{card.word} closes no .subckt", None, "", scope.within)

    def _subcircuit(self, block: Block, entry: Entry) -> None:
        assert entry.definition is not None
        words = entry.source.lines[entry.index].split(None, 2)
        if len(words) < 2 or words[1][:1] in "(+;$":
            card = entry.card(dollar=self.dollar)
            words = card.text.split(None, 2)
            if len(words) < 2:
                raise card.error(
                    "a subcircuit needs a name", None, "the form is .subckt NAME pin pin …"
                )
        block.subcircuits.setdefault(words[1].partition("(")[0].lower(), entry.definition)

    def _model(self, block: Block, entry: Entry) -> None:
        words = entry.source.lines[entry.index].split(None, 2)
        if len(words) < 2 or words[1][:1] in "(+;$":
            words = entry.card(dollar=self.dollar).text.split(None, 2)
        if len(words) < 2:
            card = entry.card(dollar=self.dollar)
            raise card.error("a model needs a name", None, "the form is .model NAME KIND(…)")
        block.models.setdefault(words[1].lower(), entry)

    def _condition(self, entry: Entry, scope: Scope, choices: list[_Choice]) -> None:
        card = entry.card(dollar=self.dollar)
        if entry.word == ".if":
            dead = bool(choices) and not choices[-1].here
            here = not dead and self._holds(card, scope)
            choices.append(_Choice(entry, here, here, dead))
            return
        if not choices:
            raise card.error(f"{card.word} without .if", None, "", scope.within)
        choice = choices[-1]
        if entry.word == ".endif":
            choices.pop()
        elif choice.dead or choice.taken:
            choice.here = False
        else:
            choice.here = entry.word == ".else" or self._holds(card, scope)
            choice.taken = choice.here

    def _holds(self, card: Card, scope: Scope) -> bool:
        start = len(card.word)
        text = card.text[start:]
        if not text.strip():
            raise card.error(
                "a condition is missing", None, "the form is .if (a > b)", scope.within
            )
        return bool(scope.number(text, card, start))

    def _include(self, block: Block, entry: Entry, scope: Scope) -> None:
        card = entry.card(dollar=self.dollar)
        name, part, at = _named(card)
        if not name:
            raise card.error(f"{card.word} names no file", None, "", scope.within)
        if entry.word == ".lib" and not part and self._is_section(entry, name):
            return  # `.lib NAME` begins a section of a library that was included as a whole
        span = card.span(*at, scope.within)
        call = place(span)
        try:
            source = self.files.include(name, asked_by=entry.source, call=call, part=part)
        except Refused as refusal:
            if refusal.missing and entry.word == ".lib":
                self.problems.missing.append(Obstacle(refusal.message, span, refusal.hint))
                return
            if refusal.missing:
                self.problems.absent = True
                self.problems.obstacle(refusal.message, span, refusal.hint)
                return
            raise SourceError(refusal.message, span, refusal.hint) from None
        if is_encrypted(source.lines):
            self.problems.obstacle(
                f'"{name}" is an encrypted model and cannot be read', span, PLAIN
            )
            return
        lines = Lines(source, 0, len(source.lines))
        if part:
            held = self._sections_of(source)
            stretch = held.get(part.lower())
            if stretch is None:
                hint = did_you_mean(part, held) or "the file has no such section"
                self.problems.obstacle(f'the section "{part}" of "{name}" is missing', span, hint)
                return
            lines = Lines(source, *stretch)
        self.fill(block, _without_prose(lines), scope)

    def _is_section(self, entry: Entry, name: str) -> bool:
        return name.lower() in self._sections_of(entry.source)

    def _sections_of(self, source: Source) -> dict[str, tuple[int, int]]:
        key = id(source.lines)
        if key not in self._sections:
            self._sections[key] = (source.lines, sections(source.lines))
        return self._sections[key][1]


def too_deep(card: Card, scope: Scope) -> SourceError:
    """Return the error for a card whose names and parentheses nest beyond all bounds."""
    return card.error("nested too deep to be read", None, "", scope.within)


def _named(card: Card) -> tuple[str, str, tuple[int, int]]:
    """Return the file and the section that an include names, and where the name stands."""
    rest = card.text[len(card.word) :]
    start = len(card.word) + len(rest) - len(rest.lstrip())
    rest = rest.strip()
    if rest[:1] in "\"'" and rest[1:].find(rest[0]) >= 0:
        end = rest.index(rest[0], 1)
        return rest[1:end].strip(), rest[end + 1 :].strip().strip("\"'"), (start, start + end + 1)
    if card.word.lower() == ".lib":
        words = rest.split()
        # A second word with a slash in it is the rest of a path with a blank.
        if len(words) == 2 and not any(mark in words[1] for mark in "\\/"):
            return words[0], words[1].strip("\"'"), (start, start + len(words[0]))
    return rest, "", (start, start + max(len(rest), 1))


def _without_prose(lines: Lines) -> Lines:
    """Leave out a first line that is a sentence and no card, as old libraries have it."""
    if lines.first:
        return lines
    source: Source = lines.source
    for index, line in enumerate(source.lines[:5]):
        text = line.strip()
        if not text:
            continue
        if text[0] in "*.+;#$/" or (len(text.split()) > 3 and "=" in text):
            break
        words = text.split()
        if words[0][0].isalpha() and len(words) >= 3 and any(w[0].isdigit() for w in words[1:]):
            break
        return Lines(source, index + 1, lines.after)
    return lines
