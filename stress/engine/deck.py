"""A case as the text that ngspice reads, and how its vectors are called. Data only."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from stress.engine import card
from stress.text.unit import unit


@dataclass(frozen=True, slots=True)
class State:
    """What the circuit remembers: the voltage of a capacitor or the current of an inductor.

    Attributes:
        element: Name in the netlist.
        device: Name in the deck.
        plus, minus: Nodes of the deck, of a capacitor; of an inductor `plus` is its vector.
        size: Farad or henry.
        start: Volts or amperes that the card gives to start from, or None.
    """

    element: str
    device: str
    kind: str
    plus: str
    minus: str
    size: float
    start: float | None = None


@dataclass(frozen=True, slots=True)
class Probe:
    """A row of the waves: the vector of the deck it is read from."""

    name: str
    vector: str


@dataclass(frozen=True, slots=True)
class Hysteresis:
    """A switch that keeps its state while its control lies between two thresholds.

    Attributes:
        element: Name in the netlist.
        control: Rows of the waves, the second taken off the first; "" for ground.
        low, high: The thresholds, V or A.
    """

    element: str
    control: tuple[str, str]
    low: float
    high: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Deck:
    """A circuit ready for ngspice.

    Attributes:
        cards: Title, elements, models, options; without `.ic` and `.end`.
        states: Everything that is set at a start.
        probes: The rows of the waves.
        nodes: Every node but ground: its name in the netlist by its name in the deck.
        initial_V: By node of the deck, from the twin's `.ic`.
        period_s: None where nothing moves.
        plain: Why the cycle map does not hold for it, or "".
        junctions: Pairs of nodes whose charge a start takes from the node voltages.
        removed: Elements that are left out, lower case.
        hysteresis: Switches whose state a start does not tell while they hold it.
        notices: What was changed for the simulation.
    """

    cards: tuple[str, ...]
    states: tuple[State, ...]
    probes: tuple[Probe, ...]
    nodes: Mapping[str, str]
    initial_V: Mapping[str, float]
    period_s: float | None = field(metadata=unit("s"))
    plain: str
    junctions: tuple[tuple[str, str], ...]
    removed: frozenset[str]
    hysteresis: tuple[Hysteresis, ...]
    notices: tuple[str, ...]

    def text(self, node_V: Mapping[str, float], *, options: str) -> list[str]:
        """Return the lines with a start (voltages by node of the deck) and solver options."""
        lines = [*self.cards, f".options {options}"]
        given = [f"v({node})={card.number(value)}" for node, value in node_V.items()]
        lines += [".ic " + " ".join(given[at : at + 20]) for at in range(0, len(given), 20)]
        lines.append(".end")
        return lines
