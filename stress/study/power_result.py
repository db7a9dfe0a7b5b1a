"""What the power-up studies answer: readings and their healthy bands, aborts, lamp, switch-on.

Every number is SI, its unit in the end of its name or in the `unit` of its probe.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import StrEnum
from math import inf

from stress.finding import Severity
from stress.netlist.flat import NOTHING
from stress.study.fault import Fault
from stress.study.result import Unanswered, Victim
from stress.text.unit import unit


class Way(StrEnum):
    """How the first power is given."""

    RAMP = "slow ramp"
    LAMP = "full line through a lamp"
    DIRECT_CURRENT = "bench supply of direct current"
    FILAMENT_FIRST = "filaments first, then the high voltage by steps"
    BATTERY = "current-limited supply in place of the battery"


@dataclass(frozen=True, slots=True, kw_only=True)
class Method:
    """The way to the first power, and what the equipment is that asks for it.

    Attributes:
        way: Which one.
        text: The way in one or two sentences.
        reasons: What of the equipment decides it.
        before: What is done before the first step, in order.
        shares: Line voltages of the steps, in parts of the nominal one.
        lamp: Whether a lamp in series helps as well.
        refused: Ways that are wrong here, and why.
    """

    way: Way
    text: str
    reasons: tuple[str, ...]
    before: tuple[str, ...] = ()
    shares: tuple[float, ...] = field(default=(), metadata=unit("1"))
    lamp: bool = False
    refused: tuple[str, ...] = ()


class Kind(StrEnum):
    """What a meter is set to."""

    DC_V = "DC volts"
    AC_V = "AC volts"
    LINE_A = "line current"
    LINE_W = "line power"
    OHM = "ohms"


UNITS = {Kind.DC_V: "V", Kind.AC_V: "V", Kind.LINE_A: "A", Kind.LINE_W: "W", Kind.OHM: "ohm"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Probe:
    """One thing that is read while the equipment is powered.

    Attributes:
        key: Unique, such as "b0 DC".
        kind: What the meter is set to.
        node: Measured against `against`, the common node but for an ohmmeter; "" for the line.
        text: Where that is, in words.
        effort: 0 at the line, 1 at a terminal of the supply, 2 at a tube's cathode or screen,
            3 at a grid or plate: what has to be opened and how easily a probe slips.
        forbidden: Why nobody may measure here, or "".
    """

    key: str
    kind: Kind
    node: str
    text: str
    effort: int
    forbidden: str = ""
    against: str = "0"

    @property
    def unit(self) -> str:
        """V, A, W or ohm."""
        return UNITS[self.kind]

    @property
    def least(self) -> float:
        """What it never reads below: only a direct voltage has a sign."""
        return -inf if self.kind is Kind.DC_V else 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Band:
    """A healthy reading at one step: as drawn, and between what it lies with usual spread.

    Attributes:
        probe: Key of the probe.
        value, low, high: True value as drawn, and the ends of the band, in the probe's unit.
        shown: What the user's meter shows of `value`; the band moves in the same proportion.
    """

    probe: str
    value: float
    low: float
    high: float
    shown: float

    @property
    def loading(self) -> float:
        """What the meter shows over what is there without it."""
        return self.shown / self.value if 0.5 < abs(self.value) < inf else 1.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Danger:
    """A fault of a position that would do damage at full line.

    Attributes:
        fault: Which.
        victim: Who pays.
        condition: Where it was found.
    """

    fault: Fault
    victim: Victim | None
    condition: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Seen:
    """What the probes read with one dangerous fault at one step.

    Attributes:
        danger: The fault.
        values: By key of the probe; empty where the case has no number.
        victims: Who is past a known limit already at this step.
        idle: The position bears next to nothing here, so that its fault was not tried.
        unanswered: Why there are no numbers.
    """

    danger: Danger
    values: Mapping[str, float] = NOTHING
    victims: tuple[Victim, ...] = ()
    idle: bool = False
    unanswered: Unanswered | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class RampStep:
    """One line voltage: what healthy equipment shows, and what the dangerous faults show.

    Attributes:
        name: Of its condition.
        share: Of the nominal line voltage.
        line_V: rms, or the direct voltage of a battery.
        emission: Part to its share of full emission, for tubes and rectifiers.
        bands: Healthy readings.
        seen: One for each danger; empty where the step is read as the one before.
        unanswered: Healthy cases without a number.
    """

    name: str
    share: float = field(metadata=unit("1"))
    line_V: float | None = field(metadata=unit("V"))
    emission: Mapping[str, float] = NOTHING
    bands: tuple[Band, ...] = ()
    seen: tuple[Seen, ...] = ()
    unanswered: tuple[Unanswered, ...] = ()

    def band(self, probe: str) -> Band | None:
        """Return the band of a probe, or None where it has none here."""
        return next((band for band in self.bands if band.probe == probe), None)


@dataclass(frozen=True, slots=True, kw_only=True)
class Ramp:
    """All steps, in rising order, and what is read at them."""

    probes: tuple[Probe, ...]
    steps: tuple[RampStep, ...]
    dangers: tuple[Danger, ...]

    def probe(self, key: str) -> Probe:
        """Return the probe of a key; KeyError where there is none."""
        for probe in self.probes:
            if probe.key == key:
                return probe
        raise KeyError(key)


@dataclass(frozen=True, slots=True, kw_only=True)
class Abort:
    """A reading at which to switch off at once.

    Attributes:
        probe: Key of the probe.
        above: True: stop above `limit`; False: stop below it.
        limit: As the user's meter shows it.
        tells: The dangerous faults that it catches at this step.
    """

    probe: str
    above: bool
    limit: float
    tells: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """One step of the plan.

    Attributes:
        ramp: Its readings.
        text: What happens here for the first time, or "".
        aborts: What stops the work here.
        cannot_tell: Dangerous faults that nothing at this step shows, though they do damage at
            full line and no earlier step has caught them.
        late: Faults among `aborts` that are past a limit at this step already: read quickly.
    """

    ramp: RampStep
    text: str
    aborts: tuple[Abort, ...]
    cannot_tell: tuple[str, ...]
    late: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class TellTale:
    """The readings that tell best whether a dangerous position is healthy."""

    position: str
    fault: str
    readings: tuple[tuple[str, float, float], ...]  # probe key, healthy, faulty
    step: str
    text: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class LampReading:
    """The lamp in series with the healthy or faulty equipment, settled.

    Attributes:
        fault: "" for healthy equipment.
        lamp_V: rms across the lamp.
        equipment_V: rms left for the equipment.
        current_A: rms.
        glow: Lamp voltage over rated voltage.
        supply_V: Supply node to mean volts.
        tells: Whether it glows visibly more than with healthy equipment.
    """

    fault: str
    lamp_V: float
    equipment_V: float
    current_A: float
    glow: float = field(metadata=unit("1"))
    supply_V: Mapping[str, float] = NOTHING
    tells: bool = False
    unanswered: Unanswered | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Lamp:
    """The filament lamp that is put in series, and what it shows."""

    rated_W: float
    rated_V: float
    healthy: LampReading | None
    faulty: tuple[LampReading, ...]
    text: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Peak:
    """The largest value of one part at switch-on, and the worst way to switch on.

    Attributes:
        part: Position or rectifier.
        quantity: "voltage_V", "peak_A" or "reverse_V".
        cold, hot: With cold tubes, and with hot tubes and empty capacitors.
        phase_deg: Of the line, for the larger of the two.
    """

    part: str
    quantity: str
    cold: float | None
    hot: float | None
    phase_deg: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class SwitchOn:
    """What the first moment brings, at high line; empty where only steady sources feed it."""

    peaks: tuple[Peak, ...]
    seconds: float
    unanswered: tuple[Unanswered, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Work:
    """One line of the order of work before any power."""

    severity: Severity
    where: str
    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class PowerUp:
    """The plan before the first switch-on."""

    method: Method
    work: tuple[Work, ...]
    probes: tuple[Probe, ...]
    steps: tuple[Step, ...]
    lamp: Lamp | None
    tell_tales: tuple[TellTale, ...]
    switch_on: SwitchOn | None
    cautions: tuple[str, ...]
    missing: tuple[str, ...] = ()
    unanswered: tuple[Unanswered, ...] = ()
