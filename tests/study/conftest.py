"""Small circuits made by hand, for the studies that need no engine."""

from collections.abc import Callable
from typing import Any

import pytest

from stress.circuit.circuit import Circuit, Line, Position, Role
from stress.netlist.flat import Element, Netlist, Wave
from stress.parts.citation import Citation
from stress.parts.law import (
    Fate,
    Hot,
    Insulation,
    Leakage,
    Loss,
    Quoted,
    Reverse,
    Share,
    Steps,
    Surge,
)
from stress.parts.sheet import Sheet
from stress.parts.style import Style
from stress.text.span import Span

NOWHERE = Span(file="hand.cir", line=1, column=1, length=1, text="")


SOURCE = Citation("made for the tests", "common practice")


def plain_style(*, electrolytic: bool = False, **keys: Any) -> Style:
    """Return a style with round numbers, so that what is expected can be worked out by hand.

    tan δ 0.1 at 100 Hz, insulation 1000 s, leakage twice as much for each 10 K; as an
    electrolytic 0.01·CV µA, surge 1.1, at most 1 V the wrong way round.
    """
    laws: dict[str, Any] = {
        "name": "aluminium" if electrolytic else "paper",
        "text": "test part",
        "polar": electrolytic,
        "loss": Loss(at_Hz=(100.0,), tan=(0.1,), source=SOURCE),
        "insulation": Insulation(product_s=1000.0, source=SOURCE),
        "hot": Hot(doubling_K=10.0, source=SOURCE),
        "absorption": Share(low=0.0, high=0.1, source=SOURCE),
        "tolerance": Share(low=0.8, high=1.2, source=SOURCE),
        "new_tolerance": Share(low=0.9, high=1.1, source=SOURCE),
        "steps": Steps(rated_V=(100.0, 400.0, 630.0), source=SOURCE),
        "fate": Fate(usual="leaky", ageing="", failure="", share={}, source=SOURCE),
        "highest_degC": Quoted(value=85.0, source=SOURCE),
        "replacement": "aluminium" if electrolytic else "film",
    }
    if electrolytic:
        laws["leakages"] = (Leakage(name="test", scale=(0.01,), source=SOURCE),)
        laws["surge"] = Surge(ratio=(1.1,), source=SOURCE)
        laws["reverse"] = Reverse(most_V=1.0, source=SOURCE)
    return Style(**{**laws, **keys})


def element(line: str) -> Element:
    """Return an element of "R1 a b 1000"; a V with "sin" gets 170 V at 60 Hz."""
    name, first, second, *rest = line.split()
    wave = Wave("sin", (0.0, 170.0, 60.0)) if rest[0] == "sin" else None
    return Element(
        name=name,
        letter=name[0].upper(),
        nodes=(first, second),
        value=None if wave else float(rest[0]),
        wave=wave,
        span=NOWHERE,
    )


@pytest.fixture
def circuit_of() -> Callable[..., Circuit]:
    """Return a function from card lines, and what the graph would find, to a circuit."""

    def make(
        *lines: str, live=(), touch=(), roles=None, styles=None, sheet=None, **keys
    ) -> Circuit:
        elements = tuple(element(line) for line in lines)
        positions = tuple(
            Position(
                name=card.name,
                nodes=card.nodes,
                role=(roles or {}).get(card.name, Role.UNKNOWN),
                role_text="",
                style=(styles or {}).get(card.name, plain_style()),
                style_source="test",
                value_F=card.value,
                span=NOWHERE,
            )
            for card in elements
            if card.letter == "C"
        )
        sources = tuple(card.name for card in elements if card.wave)
        line = Line(sources=sources, nominal_V=117.0, high_V=126.0, low_V=105.0)
        return Circuit(
            netlist=Netlist(path="hand.cir", title="hand made", elements=elements),
            sheet=sheet or Sheet(),
            name="hand made",
            positions=positions,
            parts=(),
            line=keys.pop("line", line),
            period_s=1 / 60,
            touchable=frozenset(touch),
            line_connected=frozenset(live),
            **keys,
        )

    return make
