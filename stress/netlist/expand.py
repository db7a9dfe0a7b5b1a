"""Blocks to flat elements: every X is replaced by what its subcircuit holds."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

from stress.netlist.assembly import MOST_ELEMENTS, Assembly
from stress.netlist.card import Card
from stress.netlist.control import initial
from stress.netlist.flat import Instance
from stress.netlist.grammar import read_element
from stress.netlist.outline import Outline, too_deep
from stress.netlist.part import Part
from stress.netlist.problem import Obstacle, Problems
from stress.netlist.scan import Definition, Entry, Lines, scan
from stress.netlist.scope import Block, Scope, World, did_you_mean, place
from stress.netlist.source import Source, split
from stress.netlist.subcircuit import Call, Header, read_call, read_header
from stress.netlist.weight import Weights
from stress.text.span import SourceError, SourceErrors, Span

DEEPEST = 40
MOST_INSTANCES = 20_000


@dataclass(slots=True)
class Expansion:
    """Expands a netlist into an assembly.

    Attributes:
        built_in: Gives the text of a subcircuit for a type that the netlist does not define.
    """

    outline: Outline
    into: Assembly
    problems: Problems
    world: World
    built_in: Callable[[str], str | None]
    _headers: dict[int, Header] = field(default_factory=dict)
    _built: dict[str, tuple[Definition, Block] | None] = field(default_factory=dict)
    _weights: Weights = field(default_factory=Weights)
    _instances: int = 0
    _depth: int = 0

    def block(self, scope: Scope) -> frozenset[str]:
        """Read the element cards of a scope; returns the letters of what they became."""
        letters: set[str] = set()
        begin = len(self.into.elements)
        for entry in scope.block.cards:
            try:
                card = entry.card(dollar=self.into.dollar)
                if card.text[:1] in ("x", "X"):
                    letters |= self._instance(card, scope)
                else:
                    read_element(Part(card, scope, self.problems), self.into)
            except SourceErrors:
                raise
            except SourceError as error:
                self.problems.error(self._weighed(error))
            except RecursionError:
                self.problems.error(too_deep(card, scope))
        letters.update(element.letter for element in self.into.elements[begin:])
        return frozenset(letters)

    def _weighed(self, error: SourceError) -> SourceError:
        """Return an error, or an obstacle where a schematic editor wrote the card."""
        if not self.world.from_editor or isinstance(error, Obstacle):
            return error
        return Obstacle(
            error.message,
            error.span,
            error.hint or "replace the part by cards that SPICE has, or take it out",
        )

    def _instance(self, card: Card, scope: Scope) -> frozenset[str]:
        call = read_call(card)
        name = scope.prefix + card.word
        span = card.whole(scope.within)
        found, at = self._subcircuit(call, scope)
        if found is None:
            self._missing(card, call, scope, name)
            return frozenset()
        definition, outer, built_in = found
        self._instances += 1
        if self._instances > MOST_INSTANCES:
            self.problems.stop(
                f"more than {MOST_INSTANCES:,} subcircuits after expansion",
                span,
                "a subcircuit multiplies without end",
            )
        if self._depth >= DEEPEST:
            raise card.error(
                f"subcircuits nested deeper than {DEEPEST}, or one that holds itself",
                None,
                "",
                scope.within,
            )
        if len(self.into.elements) + self._weights.of(definition, outer) > MOST_ELEMENTS:
            self.problems.stop(
                f"more than {MOST_ELEMENTS:,} elements after expansion",
                span,
                "the subcircuits multiply; a review is for one piece of equipment",
            )
        header = self._header(definition, scope)
        odd = next((word for word in call.words[:at] if word.kind != "word"), None)
        if odd is not None:
            raise card.error("a node is expected here", odd, "", scope.within)
        nodes = [scope.node(word.text) for word in call.words[:at]]
        inner = self._scope(card, call, at, header, definition, outer, scope, nodes)
        index = len(self.into.instances)
        self.into.instances.append(
            Instance(
                name=name,
                subcircuit=call.words[at].text,
                pins=header.pins,
                nodes=tuple(nodes[: len(header.pins)]),
                inside=scope.name,
                built_in=built_in,
                span=span,
            )
        )
        if built_in:
            self.problems.notice(
                "built-in-type",
                name,
                f"the netlist has no subcircuit {call.words[at].text}; the model of the part table "
                "is used",
                span,
                "include a model file to use another model",
            )
        self._depth += 1
        try:
            body = self.block(inner)
        finally:
            self._depth -= 1
        held = self.into.instances[index]
        self.into.instances[index] = Instance(
            name=held.name,
            subcircuit=held.subcircuit,
            pins=held.pins,
            nodes=held.nodes,
            inside=held.inside,
            built_in=held.built_in,
            body=body,
            span=held.span,
        )
        return body

    def _scope(
        self,
        card: Card,
        call: Call,
        at: int,
        header: Header,
        definition: Definition,
        outer: Block,
        scope: Scope,
        nodes: list[str],
    ) -> Scope:
        """Return the scope of an instance: pins connected, parameters given."""
        pins = [pin.lower() for pin in header.pins]
        name = call.words[at].text
        extra = nodes[len(pins) :]
        if len(nodes) < len(pins) or len(extra) > len(header.optional):
            raise card.error(
                f"{card.word} has {len(nodes)} nodes, {name} takes {len(pins)}: "
                f"{' '.join(header.pins)}",
                (call.words[0].start, call.words[at].end) if at else None,
                f"{name} is defined at {place(_header_span(definition))}",
                scope.within,
            )
        connected = dict(zip(pins, nodes, strict=False))
        for number, (pin, default) in enumerate(header.optional):
            connected[pin.lower()] = extra[number] if number < len(extra) else scope.node(default)
        key = (*scope.within, f"{scope.prefix}{card.word}, called at {place(card.whole())}")
        block = self._body(definition, outer, header)
        inner = Scope(
            block,
            caller=scope,
            name=scope.prefix + card.word,
            nodes=connected,
            within=key,
            world=self.world,
        )
        inner.multiplier = scope.multiplier
        for assignment in header.defaults:
            inner.assign(assignment)
        given: set[str] = set()
        for assignment in call.given:
            value = scope.resolved(assignment)
            if assignment.name == "m":
                if isinstance(value, float):
                    inner.multiplier *= value
                if all(default.name != "m" for default in header.defaults):
                    continue
            inner.values[assignment.name] = value
            given.add(assignment.name)
        inner.given = frozenset(given)
        if block.conditional or not block.read:
            fresh = Block(block.name, outer, definition.source)
            inner.block = fresh
            self.outline.fill(fresh, definition.body, inner)
            block.read[0] = fresh
            block.conditional = fresh.conditional
        else:
            inner.block = block.read[0]
            for assignment in inner.block.parameters:
                inner.assign(assignment, override=not inner.is_given(assignment.name))
            for entry in inner.block.controls:
                if entry.word == ".ic":
                    self.into.initial_V.update(initial(entry.card(dollar=self.into.dollar), inner))
        return inner

    def _body(self, definition: Definition, outer: Block, header: Header) -> Block:
        key = id(definition)
        if key not in outer.read:
            outer.read[key] = Block(header.name, outer, definition.source)
        return outer.read[key]

    def _header(self, definition: Definition, scope: Scope) -> Header:
        key = id(definition)
        if key not in self._headers:
            entry = Entry(definition.source, definition.header, ".subckt")
            card = entry.card(dollar=self.into.dollar)
            self._headers[key] = read_header(card, scope.within)
            if self._headers[key].prose:
                self.problems.notice(
                    "prose",
                    self._headers[key].name,
                    f'"{self._headers[key].prose}" behind the pins is taken for a remark',
                    card.whole(scope.within),
                )
        return self._headers[key]

    def _subcircuit(
        self, call: Call, scope: Scope
    ) -> tuple[tuple[Definition, Block, bool] | None, int]:
        """Return the definition that a call means, its block, and which word names it."""
        last = len(call.words) - 1
        for at in range(last, -1, -1):
            found = self._defined(call.words[at].text.lower(), scope)
            if found is not None and (at == last or self._fits(found[0], at, call, scope)):
                return (*found, False), at
        if last >= 0:
            built = self._from_table(call.words[last].text)
            if built is not None:
                return (*built, True), last
        return None, last

    def _fits(self, definition: Definition, at: int, call: Call, scope: Scope) -> bool:
        """Whether a word before the last names the subcircuit: its pins are as many."""
        pins = len(self._header(definition, scope).pins)
        return pins == at

    def _defined(self, name: str, scope: Scope) -> tuple[Definition, Block] | None:
        holder: Scope | None = scope
        while holder is not None:
            for block in holder.block.outward():
                if name in block.subcircuits:
                    return block.subcircuits[name], block
            holder = holder.caller
        return None

    def _from_table(self, name: str) -> tuple[Definition, Block] | None:
        key = name.lower()
        if key not in self._built:
            text = self.built_in(name)
            self._built[key] = None
            if text is not None:
                source = Source(f"part table: {name}", split(text, name))
                block = Block("", None, source)
                for entry in scan(Lines(source, 0, len(source.lines))).entries:
                    if entry.definition is not None:
                        self._built[key] = (entry.definition, block)
                        inner = source.lines[entry.index].split()[1].lower()
                        block.subcircuits[inner] = entry.definition
                    elif entry.word == ".model":
                        block.models[source.lines[entry.index].split()[1].lower()] = entry
        return self._built[key]

    def _missing(self, card: Card, call: Call, scope: Scope, name: str) -> None:
        if not call.words:
            raise card.error(
                f"{card.word} names no subcircuit",
                None,
                "the form is X1 node node NAME",
                scope.within,
            )
        word = call.words[-1]
        known = {entry for block in scope.block.outward() for entry in block.subcircuits}
        self.into.instances.append(
            Instance(
                name=name,
                subcircuit=word.text,
                pins=(),
                nodes=tuple(scope.node(entry.text) for entry in call.words[:-1]),
                inside=scope.name,
                span=card.whole(scope.within),
            )
        )
        self.problems.obstacle(
            f'the subcircuit "{word.text}" is missing',
            card.span(word.start, word.end, scope.within),
            did_you_mean(word.text, known)
            or "include the file that has it, or use a type that the part table knows",
        )


def _header_span(definition: Definition) -> Span:
    source = definition.source
    return Card(
        source, definition.header, source.lines[definition.header], ((0, definition.header, 0),)
    ).whole()
