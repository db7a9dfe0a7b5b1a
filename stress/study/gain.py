"""What an open or a low capacitor costs in gain: small-signal analysis at the operating point.

A supply fed from alternating current has no operating point of its own; its reservoirs are held
at the mean voltage of the settled equipment, as an ideal filter would, and the line rests.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from math import log10

from stress.circuit.circuit import Circuit, Kind, Part, Position, Role
from stress.engine.case import Case, Response, SmallSignal, Twin
from stress.engine.solver import Solver
from stress.netlist.flat import Element
from stress.study import conditions as stock
from stress.study.fault import Fault, values
from stress.study.working import Healthy

AUDIO_Hz = 400.0  # the usual test tone (common practice)
HELD = frozenset({Role.RESERVOIR, Role.BIAS_FILTER, Role.FLYING})
CONCERNED = frozenset(
    {Role.CATHODE_BYPASS, Role.SCREEN_BYPASS, Role.COUPLING, Role.DECOUPLING, Role.FEEDBACK}
)
FAULTS = ("open", "low")
LEAST_CHANGE_dB = 0.5
AUDIO_STAGE = 1.0  # a stage that does not amplify 400 Hz is none for audio


@dataclass(frozen=True, slots=True, kw_only=True)
class Stage:
    """A gain that is watched: from the driven grid to a node."""

    text: str
    tube: str
    grid: str
    output: str


@dataclass(frozen=True, slots=True, kw_only=True)
class GainLoss:
    """The gain of a stage at 400 Hz, healthy and with a fault; plain ratios."""

    position: str
    fault: str
    stage: str
    healthy: float
    faulty: float

    @property
    def change_dB(self) -> float:
        """Change in decibel, negative for a loss."""
        return 20.0 * log10(max(self.faulty, 1e-9) / max(self.healthy, 1e-9))

    def __str__(self) -> str:
        if self.change_dB < -40.0:
            return f"{self.stage} is gone"
        return (
            f"{self.stage} at 400 Hz {self.healthy:.3g} to {self.faulty:.3g} "
            f"({self.change_dB:+.1f} dB)"
        )


def gain_losses(
    circuit: Circuit, studied: Sequence[Position], *, healthy: Healthy, solver: Solver
) -> Mapping[str, tuple[GainLoss, ...]]:
    """Return, by position name, every gain that an open or a low part changes noticeably.

    Empty for switched supplies, and where `nominal` did not settle.
    """
    if circuit.gates or stock.NOMINAL not in healthy.settled:
        return {}
    resting = at_rest(circuit, healthy)
    watched = {
        p.name: stages
        for p in studied
        if p.role in CONCERNED and p.value_F and (stages := stages_at(circuit, p))
    }
    tubes = sorted({stage.tube for stages in watched.values() for stage in stages})
    if not tubes:
        return {}
    cases = [_case(circuit, resting, tube, None, healthy) for tube in tubes]
    for name, stages in watched.items():
        position = circuit.position(name)
        for tube in dict.fromkeys(stage.tube for stage in stages):
            for kind in FAULTS:
                fault = Fault(position=position.name, kind=kind)
                cases.append(_case(circuit, resting, tube, fault, healthy))
    answers = {case.name: answer for case, answer in zip(cases, solver.solve(cases), strict=True)}
    found: dict[str, tuple[GainLoss, ...]] = {}
    for name, stages in watched.items():
        for stage in stages:
            sound = _gain(answers.get(_name(stage.tube, None)), stage)
            for kind in FAULTS:
                fault = Fault(position=name, kind=kind)
                faulty = _gain(answers.get(_name(stage.tube, fault)), stage)
                if sound is None or faulty is None or sound < AUDIO_STAGE:
                    continue
                loss = GainLoss(
                    position=name, fault=kind, stage=stage.text, healthy=sound, faulty=faulty
                )
                if abs(loss.change_dB) >= LEAST_CHANGE_dB:
                    found[name] = (*found.get(name, ()), loss)
    return found


def at_rest(circuit: Circuit, healthy: Healthy) -> Twin:
    """Return the twin with its reservoirs held and a current source at every grid."""
    waves = healthy.settled[stock.NOMINAL].waves
    added = []
    if circuit.period_s is not None:
        for position in circuit.positions:
            if position.role in HELD:
                volts = waves.mean(waves.voltage(*position.nodes))
                added.append(
                    Element(
                        name=f"{position.name}#hold",
                        letter="V",
                        nodes=position.nodes,
                        value=volts,
                        span=position.span,
                    )
                )
    for tube in _tubes(circuit):
        added.append(
            Element(
                name=f"{tube.name}#drive",
                letter="I",
                nodes=("0", tube.pins["grid"]),
                value=0.0,
                span=tube.span,
            )
        )
    twin = healthy.twin
    return replace(twin, elements=(*twin.elements, *added), period_s=None)


def _tubes(circuit: Circuit) -> list[Part]:
    return [
        p
        for p in circuit.parts
        if p.kind is Kind.TUBE and {"plate", "grid"} <= set(p.pins) and p.pins["grid"] != "0"
    ]


def stages_at(circuit: Circuit, position: Position) -> tuple[Stage, ...]:
    """Return the gains that a position has a part in.

    A bypass: the stage whose cathode or screen it bypasses, from grid to plate. A coupling: from
    the grid of the tube before it to what is behind it.
    """
    found = []
    first, second = position.nodes
    for tube in _tubes(circuit):
        pins = tube.pins
        cathode = pins.get("cathode", "0")
        bypassed = {cathode, pins.get("screen", cathode)} - {"0"}
        if bypassed & {first, second} and position.role is not Role.COUPLING:
            text = f"gain of {tube.name}"
            found.append(_stage(tube, text, pins["plate"]))
        elif position.role is Role.COUPLING:
            for near, far in ((first, second), (second, first)):
                if near == pins["plate"] and far != "0":
                    found.append(_stage(tube, f"gain from {tube.name} past {position.name}", far))
    return tuple(found)


def _stage(tube: Part, text: str, output: str) -> Stage:
    return Stage(
        text=text,
        tube=tube.name,
        grid=tube.pins["grid"],
        output=output,
    )


def _name(tube: str, fault: Fault | None) -> str:
    return f"gain / {tube} driven" + (f" / {fault}" if fault is not None else "")


def _case(
    circuit: Circuit, resting: Twin, tube: str, fault: Fault | None, healthy: Healthy
) -> Case:
    changed: Mapping[str, float] = {}
    if fault is not None:
        position = circuit.position(fault.position)
        changed = values(fault, position, esr_ohm=healthy.esr_ohm[position.name])
    return Case(
        name=_name(tube, fault),
        twin=resting,
        condition="gain",
        fault=str(fault or ""),
        values=changed,
        analysis=SmallSignal(frequencies_Hz=(AUDIO_Hz,), source=f"{tube}#drive"),
    )


def _gain(answer: object, stage: Stage) -> float | None:
    """Return the size of output over drive, or None without a number."""
    if not isinstance(answer, Response):
        return None

    def volts(node: str) -> float:
        return float(abs(answer.values[answer.names.index(f"v({node})"), 0]))

    try:
        # Against ground at the grid: the cathode follows when its bypass is open, and that is
        # the loss.
        drive = volts(stage.grid)
        return volts(stage.output) / drive if drive > 0.0 else None
    except ValueError:
        return None
