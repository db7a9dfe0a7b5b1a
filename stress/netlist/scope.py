"""What the names in one instance mean: parameters, functions, nodes.

Parameters are looked up along the calls, as ngspice does it (measured with version 39: a
subcircuit sees the parameters of the one that calls it); functions, models and subcircuits
along the text, from the inner to the outer definition.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field
from difflib import get_close_matches

from stress.netlist.card import Card
from stress.netlist.evaluate import evaluate
from stress.netlist.expression import Expression, Number
from stress.netlist.formula import parse
from stress.netlist.function import NAMED
from stress.netlist.meaning import FormulaError
from stress.netlist.problem import Obstacle
from stress.netlist.scan import Definition, Entry
from stress.netlist.source import Source
from stress.text.span import SourceError, Span

_SENSES = re.compile(r"(?<![\w.])[vi]\s*\(", re.IGNORECASE)
GROUND = frozenset({"0", "gnd", "gnd!"})
DEEPEST_PARAMETER = 40
MOST_COMPARED = 1000  # names looked at for "did you mean"
BOLTZMANN_V = 8.617333262e-5  # volt per kelvin: Boltzmann constant over elementary charge


@dataclass(frozen=True, slots=True)
class Assignment:
    """`name = text` as written, with the place of the text in its card."""

    name: str
    text: str
    card: Card
    start: int
    end: int


@dataclass(slots=True, eq=False)
class Block:
    """The text of one scope: the netlist, or the body of a subcircuit, includes put in.

    Attributes:
        name: Of the subcircuit, or "".
        outer: The block in whose text it stands.
        cards: Element cards in order.
        conditional: It holds `.if`, so that each instance has its own.
        source: The file its header stands in.
    """

    name: str
    outer: Block | None
    source: Source
    cards: list[Entry] = field(default_factory=list)
    parameters: list[Assignment] = field(default_factory=list)
    functions: dict[str, tuple[tuple[str, ...], str]] = field(default_factory=dict)
    models: dict[str, Entry] = field(default_factory=dict)
    subcircuits: dict[str, Definition] = field(default_factory=dict)
    controls: list[Entry] = field(default_factory=list)
    read: dict[int, Block] = field(default_factory=dict)
    conditional: bool = False

    def outward(self) -> Iterator[Block]:
        """Yield this block and those around it."""
        block: Block | None = self
        while block is not None:
            yield block
            block = block.outer


class Scope:
    """One instance of a block: implements `stress.netlist.formula.Names`."""

    def __init__(
        self,
        block: Block,
        *,
        caller: Scope | None = None,
        name: str = "",
        nodes: dict[str, str] | None = None,
        within: tuple[str, ...] = (),
        world: World,
    ) -> None:
        """Take the full name of the instance and what its pins are connected to."""
        self.block, self.caller, self.name = block, caller, name
        self.nodes = nodes if nodes is not None else {}
        self.within, self.world = within, world
        self.prefix = f"{name}." if name else ""
        self.node_prefix = self.prefix.lower()
        self.values: dict[str, float | str | Assignment] = {}
        self.multiplier = 1.0
        self.given: frozenset[str] = frozenset()  # by the call; they win over the body's own
        self._busy: set[str] = set()

    def assign(self, assignment: Assignment, *, override: bool = True) -> None:
        """Give a parameter its text, to be read when it is asked for."""
        if override or assignment.name not in self.values:
            self.values[assignment.name] = assignment

    def is_given(self, name: str) -> bool:
        """Whether the call of this instance gives the parameter a value."""
        return name in self.given

    def resolved(self, assignment: Assignment) -> float | str:
        """Return what a text is worth here: a number, or itself where it is a macro.

        Raises:
            SourceError: It is wrong.
        """
        if _SENSES.search(assignment.text):
            return assignment.text
        return self.number(assignment.text, assignment.card, assignment.start)

    def value(self, name: str) -> float | str | None:
        """Return a parameter's number or the text of a macro; None where it is unknown.

        Raises:
            SourceError: The text of the parameter is wrong.
        """
        scope: Scope | None = self
        while scope is not None:
            held = scope.values.get(name)
            if held is not None:
                return scope._settle(name, held) if isinstance(held, Assignment) else held
            scope = scope.caller
        if name == "vt":  # known to every ps netlist without a definition
            return (self.world.temperature_degC + 273.15) * BOLTZMANN_V
        return None

    def _settle(self, name: str, held: Assignment) -> float | str:
        at = (held.start, held.end)
        if name in self._busy:
            outer = self.caller.value(name) if self.caller is not None else None
            if outer is not None:  # `x1 … r={r}`: the name of the caller is meant
                return outer
            raise held.card.error(f'"{name}" is defined by itself', at, within=self.within)
        if len(self.world.settling) >= DEEPEST_PARAMETER:
            raise held.card.error(
                f"parameters that depend on each other more than {DEEPEST_PARAMETER} deep",
                at,
                within=self.within,
            )
        found: float | str
        if _SENSES.search(held.text):
            found = held.text
        else:
            self._busy.add(name)
            self.world.settling.append(name)
            try:
                found = self.number(held.text, held.card, held.start)
            finally:
                self._busy.discard(name)
                self.world.settling.pop()
        self.values[name] = found
        return found

    def function(self, name: str) -> tuple[tuple[str, ...], str] | None:
        """Return the formal names and the body of a `.func`."""
        scope: Scope | None = self
        while scope is not None:
            for block in scope.block.outward():
                if name in block.functions:
                    return block.functions[name]
            scope = scope.caller
        return None

    def node(self, name: str) -> str:
        """Return the flat name of a node."""
        low = name.lower()
        if low in GROUND:
            return "0"
        held = self.nodes.get(low)
        if held is not None:
            return held
        if low in self.world.global_nodes or low.startswith("$g_"):
            return low
        return self.node_prefix + low

    def element(self, name: str) -> str:
        """Return the full name of an element, in the spelling of the text."""
        return self.prefix + name.replace(":", ".")

    def similar(self, name: str, *, functions: bool = False) -> str:
        """Return "did you mean" with the parameters or functions that look like this name."""
        known: set[str] = set(NAMED) if functions else set()
        scope: Scope | None = self
        while scope is not None:
            if not functions:
                known.update(scope.values)
            for block in scope.block.outward() if functions else ():
                known.update(block.functions)
            scope = scope.caller
        return did_you_mean(name, known)

    def tree(
        self,
        text: str,
        card: Card,
        start: int,
        *,
        parametric: bool = False,
        across: Expression | None = None,
    ) -> Expression:
        """Return the expression of a text that stands in a card from `start` on.

        Raises:
            SourceError: With its place; an `Obstacle` where it cannot be simulated.
        """
        try:
            return parse(
                text, self, dialect=self.world.dialect, parametric=parametric, across=across
            )
        except FormulaError as error:
            span = card.span(start + error.start, start + error.end, self.within)
            kind = Obstacle if error.obstacle else SourceError
            raise kind(error.message, span, error.hint) from None

    def number(self, text: str, card: Card, start: int) -> float:
        """Return the number a text stands for.

        Raises:
            SourceError: It is none.
        """
        found = self.tree(text, card, start, parametric=True)
        if isinstance(found, Number):
            return found.value
        try:
            return evaluate(found, names={"temper": self.world.temperature_degC})
        except (KeyError, ArithmeticError, ValueError):
            raise card.error(
                f'"{text}" has no value', (start, start + len(text)), within=self.within
            ) from None


@dataclass(slots=True)
class World:
    """What is the same everywhere in the netlist.

    Attributes:
        from_editor: A raw export of a schematic editor: a card that is no SPICE card is a part
            that SPICE does not have, not a mistake.
    """

    dialect: str
    global_nodes: set[str] = field(default_factory=set)
    temperature_degC: float = 27.0
    from_editor: bool = False
    settling: list[str] = field(default_factory=list)


def did_you_mean(name: str, known: Iterable[str]) -> str:
    """Return the hint "did you mean …?", or "" where nothing is near."""
    low = name.lower()
    alike = [entry for entry in (k.lower() for k in known) if abs(len(entry) - len(low)) < 4]
    near = get_close_matches(low, sorted(alike)[:MOST_COMPARED], 3, 0.7) if len(low) < 60 else []
    return f"did you mean {' or '.join(dict.fromkeys(near))}?" if near else ""


def place(span: Span) -> str:
    """Return "file:line" of a span, for "called at" and the like."""
    return f"{span.file}:{span.line}"
