"""The laws a style of capacitor obeys, as numbers with their source; SI floats."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from math import inf, sqrt

from stress.parts.citation import Citation
from stress.text.unit import unit


@dataclass(frozen=True, slots=True, kw_only=True)
class Loss:
    """The loss factor tan δ = 2πfC·ESR (IEC 60384-1).

    Either `tan` against `at_Hz`, or `tan` against `rated_V` at the one frequency in `at_Hz`;
    a rating takes the row of the next listed one at or above it, the last one beyond.

    Attributes:
        unrated: For a part whose rating is not known, where it depends on the rating.
        constant_above: What stays constant above the last frequency: "tan" or "esr".
        extra_per_F, extra_from_F: What is added to `tan` for the part of a capacitance above.
    """

    at_Hz: tuple[float, ...] = field(metadata=unit("Hz"))
    tan: tuple[float, ...] = field(metadata=unit("1"))
    rated_V: tuple[float, ...] = field(default=(), metadata=unit("V"))
    unrated: float = field(default=0.0, metadata=unit("1"))
    constant_above: str = "tan"
    extra_per_F: float = 0.0
    extra_from_F: float = field(default=inf, metadata=unit("F"))
    source: Citation

    def __post_init__(self) -> None:
        if len(self.tan) != len(self.rated_V or self.at_Hz):
            raise ValueError("as many loss factors as frequencies or ratings are wanted")


@dataclass(frozen=True, slots=True, kw_only=True)
class Insulation:
    """Insulation of a new part: product_s / C, of which no more than `most_ohm` is asked."""

    product_s: float = field(default=inf, metadata=unit("s"))
    most_ohm: float = field(default=inf, metadata=unit("ohm"))
    source: Citation

    def ohm(self, value_F: float) -> float:
        """Return the insulation resistance, in ohm."""
        return min(self.most_ohm, self.product_s / value_F)


@dataclass(frozen=True, slots=True, kw_only=True)
class Leakage:
    """A published limit of leakage: scale · C^c_power · U^u_power + plus, in µF, V and µA.

    Attributes:
        name: Short name of the rule.
        scale: By the steps of `rated_V`, the last one beyond; one number without steps.
        at_least_A, at_most_A: What the result is confined to.
        after_s: Time under voltage at which it holds.
    """

    name: str
    scale: tuple[float, ...]
    rated_V: tuple[float, ...] = field(default=(), metadata=unit("V"))
    c_power: float = 1.0
    u_power: float = 1.0
    plus_A: float = field(default=0.0, metadata=unit("A"))
    at_least_A: float = field(default=0.0, metadata=unit("A"))
    at_most_A: float = field(default=inf, metadata=unit("A"))
    after_s: float = field(default=120.0, metadata=unit("s"))
    source: Citation

    def limit_A(self, value_F: float, *, rated_V: float) -> float:
        """Return the largest leakage current at the rated voltage and 20 °C, in ampere."""
        scale = self.scale[step(self.rated_V, rated_V)] if self.rated_V else self.scale[0]
        microamps = scale * (value_F * 1e6) ** self.c_power * rated_V**self.u_power
        return float(max(min(microamps * 1e-6 + self.plus_A, self.at_most_A), self.at_least_A))


@dataclass(frozen=True, slots=True, kw_only=True)
class Hot:
    """How leakage changes: twice as much for each `doubling_K` that it is warmer.

    `voltage_power` and `time_power`: leakage goes with (U/rated) and (time) to these powers.
    """

    doubling_K: float = field(metadata=unit("K"))
    source: Citation
    voltage_power: float = 1.0
    voltage_source: Citation | None = None
    time_power: float = 0.0
    time_source: Citation | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Surge:
    """What the part stands briefly, over its rating, by steps of the rating."""

    ratio: tuple[float, ...]
    rated_V: tuple[float, ...] = field(default=(), metadata=unit("V"))
    text: str = ""
    source: Citation


@dataclass(frozen=True, slots=True, kw_only=True)
class Reverse:
    """What a polar part stands the wrong way round: a share of its rating, up to a voltage."""

    most_V: float = field(metadata=unit("V"))
    share: float = field(default=inf, metadata=unit("1"))
    source: Citation


@dataclass(frozen=True, slots=True, kw_only=True)
class Ripple:
    """Multipliers of the rated ripple current against frequency, for ratings up to `up_to_V`."""

    up_to_V: float = field(default=inf, metadata=unit("V"))
    at_Hz: tuple[float, ...] = field(metadata=unit("Hz"))
    factor: tuple[float, ...]
    source: Citation

    def __post_init__(self) -> None:
        if len(self.factor) != len(self.at_Hz):
            raise ValueError("as many ripple factors as frequencies are wanted")


@dataclass(frozen=True, slots=True, kw_only=True)
class Wear:
    """When a part counts as worn, and how long it lasts.

    Attributes:
        fall: Share of capacitance lost. `esr_factor`: times the first ESR.
        life_s, life_degC: Usual life at the upper category temperature.
        core_rise_K: Rise of the core at the rated ripple.
    """

    fall: float = field(metadata=unit("1"))
    esr_factor: float
    life_s: float = field(metadata=unit("s"))
    life_degC: float = field(metadata=unit("degC"))
    core_rise_K: float = field(metadata=unit("K"))
    source: Citation
    life_source: Citation


@dataclass(frozen=True, slots=True, kw_only=True)
class Share:
    """A share from `low` to `high`: a tolerance, or how much of a charge comes back."""

    low: float = field(metadata=unit("1"))
    high: float = field(metadata=unit("1"))
    source: Citation


@dataclass(frozen=True, slots=True, kw_only=True)
class Quoted:
    """One number in the unit that the name of its key ends with, and its source."""

    value: float
    source: Citation


@dataclass(frozen=True, slots=True, kw_only=True)
class Steps:
    """The rated voltages on sale."""

    rated_V: tuple[float, ...] = field(metadata=unit("V"))
    source: Citation


@dataclass(frozen=True, slots=True, kw_only=True)
class Fate:
    """How the style ends: the usual fault, and what to know about its age and its failures.

    Attributes:
        usual: "leaky", "short", "open" or "dried".
        share: By fault: the share of parts of `years` that is found so. An order for ranking,
            and no statistics.
    """

    usual: str
    ageing: str
    failure: str
    share: Mapping[str, float]
    years: float = 50.0
    source: Citation


@dataclass(frozen=True, slots=True, kw_only=True)
class LineClass:
    """A class of line capacitor (IEC 60384-14).

    Attributes:
        name: "X1", "X2", "Y1" …
        rated_V: Largest rms rating of the class, and `peak_V` the peak in service.
        impulse_V: Impulse before endurance, up to `impulse_F`; above, divided by the root of
            the capacitance over it.
    """

    name: str
    rated_V: float | None = field(default=None, metadata=unit("V"))
    peak_V: float | None = field(default=None, metadata=unit("V"))
    impulse_V: float | None = field(default=None, metadata=unit("V"))
    impulse_F: float = field(default=inf, metadata=unit("F"))
    proof_V: float | None = field(default=None, metadata=unit("V"))
    source: Citation

    def impulse(self, value_F: float) -> float | None:
        """Return the impulse that a capacitance of this class is tested with, in volt."""
        if self.impulse_V is None:
            return None
        return self.impulse_V / sqrt(max(value_F / self.impulse_F, 1.0))


def step(steps: tuple[float, ...], value: float) -> int:
    """Return the index of the first step at or above a value, or of the last one."""
    return next((i for i, at in enumerate(steps) if value <= at), len(steps) - 1)


def between(xs: tuple[float, ...], ys: tuple[float, ...], x: float) -> float:
    """Return y at x on straight lines between points; the end values outside."""
    if x <= xs[0]:
        return ys[0]
    for i in range(1, len(xs)):
        if x <= xs[i]:
            share = (x - xs[i - 1]) / (xs[i] - xs[i - 1])
            return ys[i - 1] + share * (ys[i] - ys[i - 1])
    return ys[-1]
