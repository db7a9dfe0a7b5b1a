"""What the studies answer; the renderers and the judge read these and nothing else.

Every number is SI, its unit in the end of its name. None is "not known" or "does not apply";
a case that was not solved stands in `Unanswered`, never as a number.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from stress.circuit.circuit import Circuit
from stress.engine.case import Floats, Proof
from stress.engine.solver import Versions
from stress.finding import Finding, Severity
from stress.netlist.flat import NOTHING
from stress.parts.limit import Limit

if TYPE_CHECKING:
    from stress.study.discharge_result import Discharge
    from stress.study.pairs import Pairs
    from stress.study.power_result import PowerUp
    from stress.study.unjudged import Unjudged


@dataclass(frozen=True, slots=True, kw_only=True)
class Condition:
    """How the equipment is run; the fields of the JSON `conditions`."""

    name: str
    line_V: float | None
    factor: float = 1.0  # on the line sources of the netlist
    pulled: tuple[str, ...] = ()
    open: tuple[str, ...] = ()
    short: tuple[str, ...] = ()
    cold: bool = False
    lasts: bool = True  # False: brief, judged against surge ratings
    driven: bool = False
    silicon: tuple[str, ...] = ()  # rectifier tubes that silicon diodes replace
    muted: tuple[str, ...] = ()  # sources that are silent
    usual: bool = False  # its line voltage is the usual one there, though above the nominal
    text: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Unanswered:
    """A case without a number, and what the engine said of it.

    `kind` is "unsolved" (the engine failed), "does not settle", "unstable" or
    "not limited by the netlist".
    """

    case: str
    kind: str
    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class PositionStress:
    """What one position bears in one condition; see DEVELOPERS.md, "JSON", for the terms."""

    case: str
    dc_V: float
    peak_V: float
    reverse_V: float | None
    ripple_pp_V: float
    ripple_rms_A: float
    esr_loss_W: float
    error_V: float
    ripple_Hz: float | None = None  # the strongest component of the current
    spectrum: tuple[tuple[float, float], ...] = ()  # Hz, A rms
    peak_A: float = 0.0
    slope_V_per_s: float = 0.0  # the steepest change of its voltage


@dataclass(frozen=True, slots=True, kw_only=True)
class Trace:
    """One period of a position in one condition, shape (m,) each, for the picture."""

    condition: str
    time_s: Floats
    voltage_V: Floats
    current_A: Floats


@dataclass(frozen=True, slots=True, kw_only=True)
class Surge:
    """What a position bears for a moment at switch-on, and the case that made it."""

    case: str
    peak_V: float
    reverse_V: float | None
    phase_deg: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Working:
    """The working stress of everything, by condition name.

    Attributes:
        conditions: In the order they were run.
        positions: Position name to condition name to stress.
        parts: Part name to condition name to stress name to value.
        supply_V: Node to condition to mean volts against ground, for every node.
        traces: Position name to its pictures.
        proofs: By condition name.
        inrush: Position name to its surge; empty where it was not run.
        inrush_parts: Rectifier and diode name to the peaks at switch-on.
        unanswered: By condition name, what has no number.
        notices: What was held, tied down or quieted, in words.
    """

    conditions: tuple[Condition, ...]
    positions: Mapping[str, Mapping[str, PositionStress]]
    parts: Mapping[str, Mapping[str, Mapping[str, float]]]
    nodes: Mapping[str, Mapping[str, float]] = NOTHING
    traces: Mapping[str, tuple[Trace, ...]] = NOTHING
    proofs: Mapping[str, Proof] = NOTHING
    inrush: Mapping[str, Surge] = NOTHING
    inrush_parts: Mapping[str, Mapping[str, float]] = NOTHING
    unanswered: tuple[Unanswered, ...] = ()
    notices: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Worst:
    """The worst lasting voltage of a position and the condition that made it."""

    position: str
    worst_V: float
    condition: str
    brief_V: float | None = None  # inrush and brief cold
    brief_condition: str | None = None
    reverse_V: float | None = None
    reverse_condition: str | None = None  # that makes it; None also where nothing is reversed


@dataclass(frozen=True, slots=True, kw_only=True)
class Victim:
    """A part driven past a limit by a fault elsewhere."""

    part: str
    quantity: str
    stress: float
    limit: Limit
    healthy: float | None = None
    after_s: float | None = None  # order of magnitude of the time to damage, where a law gives it
    after_text: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class CurvePoint:
    """The stresses of the parts that move, at one leakage resistance.

    Attributes:
        ohm: Leakage resistance.
        leak_A: Mean current through it.
        stresses: Part name to stress name to value.
        nodes: Node to mean volts, for the neighbours.
        unanswered: Set where the case has no numbers.
    """

    ohm: float
    leak_A: float
    stresses: Mapping[str, Mapping[str, float]]
    nodes: Mapping[str, float] = NOTHING
    unanswered: Unanswered | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class LeakageIn:
    """The leakage study of one position in one condition."""

    condition: str
    critical_ohm: float | None
    critical_A: float | None
    victim: Victim | None
    always: bool = False  # already past it at the insulation of a healthy part
    functional_ohm: float | None = None
    functional_reason: str | None = None
    assumed_critical_ohm: float | None = None
    assumed_victim: Victim | None = None
    governs: bool = False
    unjudged: tuple[Unjudged, ...] = ()  # at the smallest resistance with numbers
    curve: tuple[CurvePoint, ...] = ()
    unanswered: tuple[Unanswered, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Leakage:
    """The leakage study of one position; the condition with the largest resistance governs."""

    position: str
    governing: LeakageIn | None
    by_condition: tuple[LeakageIn, ...]
    limited: bool = True  # False: across an ideal source, "not limited by the netlist"
    text: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Failure:
    """What one failure of one position does: short, open, dried, low or reversed."""

    position: str
    fault: str
    condition: str
    victims: tuple[Victim, ...]
    text: str
    dangerous: bool
    consequences: tuple[str, ...] = ()  # hum, loss of gain, silence
    unjudged: tuple[Unjudged, ...] = ()  # raised stresses of parts without a known limit
    unanswered: Unanswered | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Replacement:
    """Which part to fit."""

    position: str
    value_F: float
    rated_V: float | None
    style: str
    ripple_rms_A: float | None
    reason: str
    rules: tuple[str, ...] = ()  # line and document each choice rests on
    notes: tuple[str, ...] = ()  # balancing, reservoir limit, outer foil, case, life …
    quantity: int = 1
    arrangement: str = ""  # "two in series" and the like
    life_h: float | None = None
    value_max_F: float | None = None
    ac_V: float | None = None
    safety_class: str | None = None
    balance_ohm: float | None = None  # of all balancing resistors of a series arrangement
    ripple_Hz: float | None = None  # what `ripple_rms_A` belongs to
    parts_F: tuple[float, ...] = ()  # of an arrangement; `value_F` is the whole


@dataclass(frozen=True, slots=True, kw_only=True)
class Bench:
    """The readings that are acceptable for a position; None where a study has no answer."""

    position: str
    test_V: float | None
    leakage_max_A: float | None
    leakage_reason: str
    esr_max_ohm: float | None
    esr_Hz: float | None
    esr_reason: str
    value_min_F: float | None
    value_max_F: float | None
    hot_factor: float = 1.0
    safety: float = 2.0
    in_leakage: str | None = None  # "in place" or "lift one lead"
    in_esr: str | None = None
    in_capacitance: str | None = None
    notes: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Risk:
    """The place of a position in the order of work."""

    position: str
    rank: int  # 1 is first
    severity: Severity
    reason: str
    consequence: float = 0.0
    likelihood: float = 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Run:
    """What the review cost."""

    cases: int
    unsolved: int
    cycles: int
    wall_s: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Review:
    """Everything one review found; what the renderers take.

    Attributes:
        explanations: Position name to the paragraphs of its explanation.
        cautions: What can hurt the reader, by what the circuit is.
        power_up, discharge: The plan of the first switch-on and what stays charged; None where
            they were not asked for.
        pairs: Two likely faults at once; None where they were not asked for.
        pair_texts: The same in words, a summary first and then every pair that was found.
    """

    circuit: Circuit
    working: Working
    worst: Mapping[str, Worst]
    leakage: Mapping[str, Leakage]
    failures: Mapping[str, tuple[Failure, ...]]
    replacements: Mapping[str, Replacement]
    bench: Mapping[str, Bench]
    risks: tuple[Risk, ...]
    findings: tuple[Finding, ...]
    explanations: Mapping[str, tuple[str, ...]]
    cautions: tuple[str, ...]
    run: Run
    versions: Versions
    policy: str = ""
    power_up: PowerUp | None = None
    discharge: Discharge | None = None
    pairs: Pairs | None = None
    pair_texts: tuple[str, ...] = ()
