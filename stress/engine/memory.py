"""What a solved case leaves for its relatives, and how they take it over."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np

from stress.engine.case import Answer, Floats
from stress.engine.cycle import Grid
from stress.engine.deck import Deck


@dataclass(frozen=True, slots=True, kw_only=True)
class Memory:
    """What a solved case leaves for its relatives; names are those of the netlist.

    Attributes:
        states: Names of the states, n of them.
        x: Shape (n,): the state at the start of the period.
        jacobian: Shape (n, n), or None where none is known.
        node_V: By netlist node, at that moment.
        grid: The grid that was found fine enough.
        removed: Elements that were left out, lower case. A relative that lacks others may
            have nothing on its supply where this one had a load: its Jacobian is its own.
        quieted: Elements taken away so that a stage does not oscillate; relatives do the same.
    """

    states: tuple[str, ...]
    x: Floats
    jacobian: Floats | None
    node_V: Mapping[str, float] = field(default_factory=dict)
    grid: Grid = field(default=Grid())
    removed: frozenset[str] = frozenset()
    quieted: frozenset[str] = frozenset()


@dataclass(frozen=True, slots=True, kw_only=True)
class Outcome:
    """An answer, and what it leaves for its relatives (None: nothing to start from)."""

    answer: Answer
    memory: Memory | None
    cycles: int


def inherited(deck: Deck, memory: Memory, start: Floats) -> tuple[Floats, Floats | None]:
    """Return a relative's state and Jacobian in the order of a deck's states.

    Args:
        deck: The deck to be solved, of n states.
        memory: Of the relative.
        start: Shape (n,): what is taken for a state that the relative lacks.
    """
    names = tuple(state.element for state in deck.states)
    if names == memory.states:
        return memory.x, memory.jacobian
    where = {name: at for at, name in enumerate(memory.states)}
    own = [at for at, name in enumerate(names) if name in where]
    theirs = [where[names[at]] for at in own]
    x = start.copy()
    x[own] = memory.x[theirs]
    if memory.jacobian is None:
        return x, None
    matrix: Floats = np.zeros((len(names), len(names)))
    matrix[np.ix_(own, own)] = memory.jacobian[np.ix_(theirs, theirs)]
    return x, matrix


def translated(deck: Deck, memory: Memory) -> dict[str, float]:
    """Return the node voltages of a memory by the names of a deck, as far as it has them."""
    known = memory.node_V
    return {name: known[node] for name, node in deck.nodes.items() if node in known}


def start_from(deck: Deck, node_V: Mapping[str, float]) -> Floats:
    """Return the state that the cards and node voltages of a deck mean, else 0; shape (n,)."""
    found = []
    for state in deck.states:
        if state.start is not None:
            found.append(state.start)
        elif state.kind == "C":
            found.append(node_V.get(state.plus, 0.0) - node_V.get(state.minus, 0.0))
        else:
            found.append(0.0)
    return np.array(found, dtype=np.float64)
