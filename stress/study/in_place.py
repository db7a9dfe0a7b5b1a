"""Bench tests with the part left in place: what the unpowered circuit around it does to them.

The set is unplugged and cold: the line and other supplies are disconnected, signals are quiet,
tubes do not conduct, semiconductors have no bias. Two direct-current cases tell what flows past
the part at the test voltage and at a voltage too small to turn a junction on; a small-signal
case tells the impedance past it at the frequencies of the meters.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from stress.circuit.circuit import Circuit, Kind, Position
from stress.engine.case import (
    Answer,
    Case,
    Response,
    Settled,
    SmallSignal,
    Steady,
    Twin,
    Waves,
)
from stress.netlist.flat import Element
from stress.study.plan import Plan
from stress.study.result import Unanswered
from stress.study.working import unanswered
from stress.text.unit import unit

ELECTROLYTIC_HZ, OTHER_HZ = 120.0, 1000.0  # where meters measure capacitance
OPEN_HZ, SMALL_OPEN_HZ = 100e3, 1e6
FREQUENCIES_HZ = (ELECTROLYTIC_HZ, OTHER_HZ, OPEN_HZ, SMALL_OPEN_HZ)
QUIET_V = 0.1  # turns on no junction, germanium included
LEAD_OHM = 1.0  # of the test leads; keeps a source off an ideal loop
# Controlled and behavioural sources stand for active parts, which do nothing without power.
MODELLED = frozenset("BEFGH")
REST_OHM = 1e10  # leads the charge of a gate away
_TEST = "Vtest#bench"
_DRIVE = "Itest#bench"


@dataclass(frozen=True, slots=True, kw_only=True)
class Around:
    """What the circuit puts in parallel with a position.

    Attributes:
        position: Its name.
        test_V: The voltage `direct_ohm` belongs to.
        direct_ohm: Resistance past the part at the test voltage.
        quiet_ohm: Resistance past it at 0.1 V.
        impedance_ohm: By frequency in Hz.
        unanswered: Cases without a number; their fields are None or empty.
    """

    position: str
    test_V: float = field(metadata=unit("V"))
    direct_ohm: float | None = field(default=None, metadata=unit("ohm"))
    quiet_ohm: float | None = field(default=None, metadata=unit("ohm"))
    impedance_ohm: Mapping[float, complex] = field(default_factory=dict)
    unanswered: tuple[Unanswered, ...] = ()


def plan(position: Position, *, circuit: Circuit, twin: Twin, test_V: float) -> Plan[Around]:
    """Ask for what is in parallel with a position; see `stress.study.plan`.

    Args:
        position: The part that would be tested.
        circuit: The healthy circuit.
        twin: Its twin, as for the working stress.
        test_V: Of the leakage test.
    """
    cases = (
        _direct(position, circuit=circuit, twin=twin, volts=test_V, name="test voltage"),
        _direct(position, circuit=circuit, twin=twin, volts=QUIET_V, name="quiet"),
        _alternating(position, circuit=circuit, twin=twin),
    )
    at_test, quiet, response = yield cases
    impedances: dict[float, complex] = {}
    if isinstance(response, Response):
        across = _phasor(response, position.nodes[0]) - _phasor(response, position.nodes[1])
        impedances = {
            hertz: complex(ohm) for hertz, ohm in zip(FREQUENCIES_HZ, across, strict=True)
        }
    return Around(
        position=position.name,
        test_V=test_V,
        direct_ohm=_resistance(at_test, test_V),
        quiet_ohm=_resistance(quiet, QUIET_V),
        impedance_ohm=impedances,
        unanswered=tuple(
            found
            for case, answer in zip(cases, (at_test, quiet, response), strict=True)
            if (found := unanswered(answer, case.name)) is not None
        ),
    )


def unplugged(twin: Twin, *, circuit: Circuit) -> Twin:
    """Return the twin as it stands on the bench: no supplies, nothing active, all at rest."""
    tubes = {
        name.lower()
        for part in circuit.parts
        if part.kind in (Kind.TUBE, Kind.RECTIFIER)
        for name in part.elements
    }
    signals = {name.lower() for name in circuit.signals}
    kept = []
    for element in twin.elements:
        name = element.name.lower()
        if name in tubes or element.letter in MODELLED:
            continue
        if element.letter in "VI" and (element.wave is not None or element.value):
            if name in signals and element.letter == "V":
                kept.append(replace(element, wave=None, value=0.0))  # its generator stays wired
            continue
        kept.append(element)
        if element.letter == "M":  # what drove its gate may be gone
            gate, source = element.nodes[1:3]
            kept.append(
                Element(
                    name=f"{element.name}#rest",
                    letter="R",
                    nodes=(gate, source),
                    value=REST_OHM,
                    span=element.span,
                )
            )
    return replace(twin, elements=tuple(kept), period_s=None, initial_V={}, currents=())


def _without(position: Position) -> frozenset[str]:
    name = position.name.lower()
    return frozenset({name, f"{name}#esr", f"{name}#leak"})


def _direct(position: Position, *, circuit: Circuit, twin: Twin, volts: float, name: str) -> Case:
    plus, minus = position.nodes if position.plus != 1 else position.nodes[::-1]
    middle = "bench#lead"
    elements = (
        Element(name=_TEST, letter="V", nodes=(middle, minus), value=volts, span=position.span),
        Element(
            name="Rtest#bench", letter="R", nodes=(middle, plus), value=LEAD_OHM, span=position.span
        ),
    )
    bench = unplugged(twin, circuit=circuit)
    return Case(
        name=f"in place, {name} / {position.name}",
        twin=replace(bench, elements=bench.elements + elements),
        condition="unplugged",
        fault=position.name,
        removed=_without(position),
        analysis=Steady(),
    )


def _alternating(position: Position, *, circuit: Circuit, twin: Twin) -> Case:
    drive = Element(
        name=_DRIVE, letter="I", nodes=position.nodes[::-1], value=0.0, span=position.span
    )
    bench = unplugged(twin, circuit=circuit)
    return Case(
        name=f"in place, small signal / {position.name}",
        twin=replace(bench, elements=(*bench.elements, drive)),
        condition="unplugged",
        fault=position.name,
        removed=_without(position),
        analysis=SmallSignal(frequencies_Hz=FREQUENCIES_HZ, source=_DRIVE),
    )


def _resistance(answer: Answer, volts: float) -> float | None:
    """Return what the source saw, the leads taken off; infinite where nothing flowed."""
    if not isinstance(answer, Settled):
        return None
    waves: Waves = answer.waves
    amps = abs(waves.mean(waves.current(_TEST)))
    return max(volts / amps - LEAD_OHM, 0.0) if amps > 0.0 else float("inf")


def _phasor(response: Response, node: str) -> NDArray[np.complex128]:
    if node == "0":
        return np.zeros(len(response.frequencies_Hz), dtype=np.complex128)
    row: NDArray[np.complex128] = response.values[response.names.index(f"v({node.lower()})")]
    return row
