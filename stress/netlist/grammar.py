"""The letters of the element cards: one row each."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from stress.netlist.assembly import Assembly
from stress.netlist.capacitor import capacitor
from stress.netlist.controlled import behavioural, controlled
from stress.netlist.magnetic import coupling, inductor
from stress.netlist.part import Part
from stress.netlist.passive import resistor
from stress.netlist.semiconductor import coupled_lines, line, semiconductor, switch
from stress.netlist.stimulus import source
from stress.text.span import SourceError, SourceErrors


@dataclass(frozen=True, slots=True)
class Row:
    """What a letter is called, what its card looks like, and what reads it."""

    what: str
    form: str
    read: Callable[[Part, Assembly], None]


GRAMMAR = {
    "R": Row("resistor", "R1 node node ohm", resistor),
    "C": Row("capacitor", "C1 node node farad", capacitor),
    "L": Row("inductor", "L1 node node henry", inductor),
    "K": Row("coupling", "K1 L1 L2 coupling", coupling),
    "V": Row("voltage source", "V1 plus minus volt [wave]", source),
    "I": Row("current source", "I1 plus minus ampere [wave]", source),
    "E": Row("voltage-controlled voltage source", "E1 node node node node gain", controlled),
    "F": Row("current-controlled current source", "F1 node node Vsource gain", controlled),
    "G": Row("voltage-controlled current source", "G1 node node node node siemens", controlled),
    "H": Row("current-controlled voltage source", "H1 node node Vsource ohm", controlled),
    "B": Row("behavioural source", "B1 node node V={…}", behavioural),
    "D": Row("diode", "D1 anode cathode model", semiconductor),
    "Q": Row("bipolar transistor", "Q1 collector base emitter model", semiconductor),
    "J": Row("junction transistor", "J1 drain gate source model", semiconductor),
    "Z": Row("MESFET", "Z1 drain gate source model", semiconductor),
    "M": Row("MOSFET", "M1 drain gate source bulk model", semiconductor),
    "S": Row("voltage switch", "S1 node node control control model", switch),
    "W": Row("current switch", "W1 node node Vsource model", switch),
    "T": Row("transmission line", "T1 node node node node Z0=ohm TD=second", line),
    "O": Row("lossy line", "O1 node node node node model", semiconductor),
    "U": Row("distributed RC line", "U1 node node node model", semiconductor),
    "Y": Row("lossy line", "Y1 node node node node model", semiconductor),
    "P": Row("coupled lines", "P1 node … node node … node model", coupled_lines),
}
# Letters that schematic editors give to parts for which SPICE has no card.
NO_DEVICE = {
    "A": "a code-model device",
    "N": "a compiled model",
}


# What of a card that cannot be simulated still goes into the inventory: so many nodes.
_CONNECTS = {"R": 2, "C": 2, "L": 2, "V": 2, "I": 2, "D": 2, "Q": 3, "J": 3, "Z": 3, "M": 3}


def _remains(part: Part, into: Assembly) -> None:
    """Keep the element with its nodes alone, so that the graph is whole."""
    nodes = _CONNECTS.get(part.letter, 0)
    words = part.words[:nodes]
    whole = len(words) == nodes and all(word.kind == "word" for word in words)
    if nodes and whole and not into.holds(part.full):
        into.add(part, part.letter, part.nodes(nodes))


def read_element(part: Part, into: Assembly) -> None:
    """Read one element card.

    Raises:
        SourceError: The card is wrong; an `Obstacle` where it cannot be simulated.
    """
    row = GRAMMAR.get(part.letter)
    if row is not None:
        try:
            row.read(part, into)
        except SourceErrors:
            raise
        except SourceError:
            _remains(part, into)
            raise
        return
    if part.letter in NO_DEVICE:
        raise part.obstacle(
            f"{part.full} is {NO_DEVICE[part.letter]}, which is not simulated here",
            part.head,
            "replace it by the parts it stands for",
        )
    known = " ".join(GRAMMAR)
    raise part.error(
        f'"{part.name}" is no element: no card begins with "{part.name[0]}"',
        part.head,
        f"elements begin with {known} or X; a comment begins with *",
    )
