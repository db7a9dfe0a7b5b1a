"""What is asked of the engine, and what it answers. Data only."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from stress.netlist.flat import NOTHING, Element, Model
from stress.text.unit import unit

Floats: TypeAlias = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Twin:
    """The circuit as simulated: flat elements, with every position as C, ESR and leakage.

    `stress.engine.twin` makes it. Element names are those of the netlist but for what the
    twin adds: of position "C5" the elements "C5" (the C itself), "C5#esr" and "C5#leak"; of
    the pin "plate" of tube "XU2" the 0 V source "XU2#plate", through which the current into
    that pin flows. Wherever names are told apart the case of letters does not count.

    Attributes:
        elements, models: Flat, as `stress.netlist.flat`.
        period_s: Common period of the sources at work; None where all are DC.
        options: What of the user's `.options` counts (gmin, abstol …), numbers only.
        temperature_degC: For the models.
        initial_V: `.ic` by flat node; where a steady state is looked for from rest.
        currents: Elements whose current is wanted in the waves, besides the voltage
            sources and inductors (always there): capacitors, diodes, transistors' pins.
    """

    elements: tuple[Element, ...]
    models: Mapping[str, Model]
    period_s: float | None = field(metadata=unit("s"))
    options: Mapping[str, float] = NOTHING
    temperature_degC: float = field(default=27.0, metadata=unit("degC"))
    initial_V: Mapping[str, float] = NOTHING
    currents: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Steady:
    """Ask for the settled state: a period of it, or the operating point without a period.

    Attributes:
        own: Its multipliers are its own, not those of a relative: without a load or with a part
            less a circuit may leave its steady state where the relative did not.
    """

    own: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Transient:
    """Ask for a run from a given state.

    Attributes:
        stop_s: How long.
        step_s: Largest step; None: the grid of the steady state.
        phase_deg: Phase of the line sources at the start.
        keep: Names of the vectors wanted; empty: all.
    """

    stop_s: float = field(metadata=unit("s"))
    step_s: float | None = field(default=None, metadata=unit("s"))
    phase_deg: float = field(default=0.0, metadata=unit("degree"))
    keep: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class SmallSignal:
    """Ask for the small-signal response around the operating point of the twin.

    Attributes:
        frequencies_Hz: Where.
        source: The V or I element that is driven with 1 V or 1 A; all others are quiet.
    """

    frequencies_Hz: tuple[float, ...] = field(metadata=unit("Hz"))
    source: str


Analysis: TypeAlias = Steady | Transient | SmallSignal


@dataclass(frozen=True, slots=True, kw_only=True)
class Case:
    """One condition with zero or more faults, to be solved.

    Attributes:
        name: Unique in a review, such as "high / C5 leaky 1.2 Mohm".
        twin: The circuit.
        condition, fault: Labels for people; the engine does not read them.
        parent: Name of the case whose state it starts from and whose Jacobian it may use;
            None: from rest (all states 0, or `.ic`). The parent has been answered before, in
            this call or an earlier one. Where the parent is unsolved, rest is taken.
        values: By element name: ohm, farad, henry or gain; for a V or I element the factor on
            all its amplitudes (0 mutes it).
        removed: Elements that are left out.
        analysis: What is asked.
    """

    name: str
    twin: Twin
    condition: str = ""
    fault: str = ""
    parent: str | None = None
    values: Mapping[str, float] = NOTHING
    removed: frozenset[str] = frozenset()
    analysis: Analysis = Steady()


@dataclass(frozen=True, slots=True, eq=False)
class Waves:
    """Voltages and currents over time; the values of a row belong to its name.

    Attributes:
        time_s: Shape (m,), m ≥ 2, rising. A steady state covers one period exactly, both ends
            included; an operating point is two equal samples over one second.
        names: Lower case: "v(node)" for nodes, "i(element)" for currents, into the first
            node of the element. k of them.
        values: Shape (k, m), finite.

    Raises:
        ValueError: On other shapes or values that are not finite.
    """

    time_s: Floats
    names: tuple[str, ...]
    values: Floats
    _weights: Floats = field(init=False, repr=False)  # of the trapezoidal rule

    def __post_init__(self) -> None:
        if self.time_s.ndim != 1 or self.time_s.size < 2:
            raise ValueError(f"time has shape {self.time_s.shape}, not (m,) with m of 2 or more")
        if self.values.shape != (len(self.names), self.time_s.size):
            raise ValueError(
                f"values have shape {self.values.shape}, not {(len(self.names), self.time_s.size)}"
            )
        if not (np.isfinite(self.values).all() and np.isfinite(self.time_s).all()):
            raise ValueError("values that are not finite")
        steps = np.diff(self.time_s)
        if not (steps > 0).all():
            raise ValueError("time does not rise")
        weights = np.zeros_like(self.time_s)
        weights[:-1] += steps
        weights[1:] += steps
        object.__setattr__(self, "_weights", weights / weights.sum())

    def voltage(self, plus: str, minus: str = "0") -> Floats:
        """Return the voltage of `plus` against `minus`, shape (m,); ground is all zero."""
        return self._node(plus) - self._node(minus)

    def current(self, element: str) -> Floats:
        """Return the current into the first node of an element, shape (m,).

        Raises:
            KeyError: Where the current was not asked for.
        """
        return self._row(f"i({element.lower()})")

    def mean(self, samples: Floats) -> float:
        """Return the mean over time of samples of shape (m,), by the trapezoidal rule."""
        return float(self._weights @ samples)

    def rms(self, samples: Floats) -> float:
        """Return the root mean square over time of samples of shape (m,)."""
        return float(np.sqrt(max(self.mean(samples * samples), 0.0)))

    def _node(self, node: str) -> Floats:
        if node == "0":
            return np.zeros_like(self.time_s)
        return self._row(f"v({node.lower()})")

    def _row(self, name: str) -> Floats:
        try:
            return np.asarray(self.values[self.names.index(name)], dtype=np.float64)
        except ValueError:
            raise KeyError(name) from None


@dataclass(frozen=True, slots=True, kw_only=True)
class Proof:
    """Why a settled state is believed.

    Attributes:
        distance: Estimated distance to the fixed point, the largest over the states, each
            against the larger of 1 V (1 mA for an inductor) and its own size.
        residual: The same measure of the change over the reported period.
        cycles: Periods simulated for this case, those for Jacobians apart.
        jacobian_cycles: Periods simulated for a Jacobian of its own.
        multiplier: Largest absolute multiplier known, or None for an operating point.
        points: Points of the grid in the reported period.
        method: "cycle map", "plain transient" or "operating point".
    """

    distance: float
    residual: float
    cycles: int
    jacobian_cycles: int
    multiplier: float | None
    points: int
    method: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Settled:
    """A steady state. `error_V` bounds a capacitor's voltage by the proof's distance."""

    case: str
    waves: Waves
    proof: Proof
    notices: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Ran:
    """A transient as asked."""

    case: str
    waves: Waves
    notices: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Response:
    """A small-signal response: complex values of shape (k, number of frequencies).

    A current that ngspice does not give there (of a diode or transistor) is nan.
    """

    case: str
    frequencies_Hz: Floats
    names: tuple[str, ...]
    values: NDArray[np.complex128]
    notices: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Wandering:
    """An answer, not a failure: what never becomes periodic, with the range observed.

    Attributes:
        unstable: True where it departs from a steady state by itself (motorboating).
        waves: The last stretch that was observed.
        cycles: Periods simulated.
    """

    case: str
    unstable: bool
    waves: Waves
    cycles: int
    text: str
    notices: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Unsolved:
    """The engine failed after its retry; never a number."""

    case: str
    reason: str
    cycles: int = 0


Answer: TypeAlias = Settled | Ran | Response | Wandering | Unsolved
