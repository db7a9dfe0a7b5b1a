"""The small-signal response of every row at one frequency."""

from __future__ import annotations

import numpy as np

from stress.engine.deck import Deck
from stress.engine.ngspice import Ngspice


def response(ngspice: Ngspice, deck: Deck, frequency_Hz: float) -> list[complex]:
    """Return the row values of one frequency; capacitors' currents follow from their voltages."""
    states = {f"i({state.element.lower()})": state for state in deck.states if state.kind == "C"}

    def at(node: str) -> complex:
        return 0j if node in ("0", "") else complex(ngspice.complex_vector(node)[-1])

    found: list[complex] = []
    for probe in deck.probes:
        state = states.get(probe.name)
        if state is not None:
            voltage = at(state.plus) - at(state.minus)
            found.append(2j * np.pi * frequency_Hz * state.size * voltage)
        elif probe.vector.startswith("@"):
            found.append(complex("nan"))
        else:
            found.append(at(probe.vector))
    return found
