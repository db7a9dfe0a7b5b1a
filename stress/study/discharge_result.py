"""What the discharge study answers."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from stress.study.result import Unanswered
from stress.text.unit import unit

# IEC 62368-1: direct voltage below which a source is of class ES1 and ES2, and 50 V, to which
# power capacitors are to discharge themselves (NEC 460.6); from memory (sure), to be confirmed.
SAFE_V, CLASS_2_V, POWER_V = 60.0, 120.0, 50.0
THRESHOLDS_V = (CLASS_2_V, SAFE_V, POWER_V)

CONDUCTING, COLD = "tubes conducting", "tubes cold"
OFF = "switched off"  # equipment without tubes


@dataclass(frozen=True, slots=True, kw_only=True)
class Decay:
    """How the voltage of one position falls after switching off.

    Attributes:
        how: "tubes conducting", "tubes cold", "XV4 pulled" or "switched off".
        start_V: Voltage across its terminals at that moment, by size.
        below_s: Threshold in volts to seconds until it stays below; None: not within any
            time that can be told; 0 where it never was above.
        extrapolated: Thresholds whose time lies beyond the simulation, by its last time constant.
        seconds, volts: The fall, a few points.
    """

    how: str
    start_V: float
    below_s: Mapping[float, float | None] = field(default_factory=dict)
    extrapolated: tuple[float, ...] = ()
    seconds: tuple[float, ...] = ()
    volts: tuple[float, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Resistor:
    """A resistor to discharge a position with, on insulated leads."""

    ohm: float
    rated_V: float
    rated_W: float
    peak_A: float
    energy_J: float
    until_V: float
    seconds: float
    pieces: int = 1


@dataclass(frozen=True, slots=True, kw_only=True)
class Charge:
    """What one position holds, and how it loses it.

    Attributes:
        start_V: The highest steady voltage of any condition, by size; `condition` made it.
        energy_J: Half of value times its square.
        deadly: Past a published threshold of energy.
        class_V: ES1 and ES2 limits for a capacitor of this value.
        bleed_ohm: Direct-current resistance across it with the plug out and everything cold,
            leakage of parts left out; None: not solved, infinite: nothing.
        insulation_ohm: Its own leakage, which counts for nothing.
        floating: Neither terminal has a way for direct current to the common node, so it is
            measured across its own terminals.
        formula_s: Threshold to RC·ln(V/threshold) with `bleed_ohm` and its own leakage.
        holds: It is still above 60 V after five minutes in some way of switching off.
        decays: By simulation.
        resistor: None where it never holds anything dangerous.
        returns_V: What comes back within some ten minutes by dielectric absorption, low and high.
    """

    position: str
    value_F: float
    start_V: float
    condition: str
    energy_J: float
    deadly: bool
    class_V: tuple[float, float]
    bleed_ohm: float | None = field(default=None, metadata=unit("ohm"))
    insulation_ohm: float = field(default=0.0, metadata=unit("ohm"))
    floating: bool = False
    formula_s: Mapping[float, float] = field(default_factory=dict)
    holds: bool = False
    decays: tuple[Decay, ...] = ()
    resistor: Resistor | None = None
    returns_V: tuple[float, float] = (0.0, 0.0)


@dataclass(frozen=True, slots=True, kw_only=True)
class Discharge:
    """The whole equipment after switching off.

    Attributes:
        charges: Those that hold their charge without a bleed path first, then by energy.
        advice: What to do, in order.
        cautions: What no netlist holds.
    """

    charges: tuple[Charge, ...]
    advice: tuple[str, ...] = ()
    cautions: tuple[str, ...] = ()
    unanswered: tuple[Unanswered, ...] = ()
