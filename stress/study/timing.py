"""What sets a frequency at a position, and how far its loss takes that frequency.

Closed forms, nothing is simulated: a tank goes as 1/sqrt(LC) with all the capacitance that its
coil sees (Thomson 1853), a timing by resistor and capacitor as 1/RC.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field

from stress.circuit.circuit import Circuit
from stress.study.fault import DRIED_SHARE, LOW_SHARE, OPEN_SHARE
from stress.text.figure import figure
from stress.text.unit import unit

SHARES = {"low": LOW_SHARE, "dried": DRIED_SHARE, "open": OPEN_SHARE}
LOST = 3.0  # times its frequency: nothing but strays is left of it


@dataclass(frozen=True, slots=True, kw_only=True)
class Timing:
    """A frequency that a position helps to set.

    Attributes:
        position: Its name.
        what: "the tank of L3", "the multivibrator of X1 and X2".
        frequency_Hz: Of the tank; None for a timing, whose swing no netlist tells without a run.
        shifts: By fault ("low", "open", "dried"), by which share the frequency rises.
        loss: The share of its capacitance that it may lose before it is detuned; None where
            even all of it would not detune.
        leak_ohm, leak_reason: From which leakage on it matters, and how.
        unknown: Why nothing can be said, or "".
    """

    position: str
    what: str
    frequency_Hz: float | None = field(default=None, metadata=unit("Hz"))
    shifts: Mapping[str, float] = field(default_factory=dict)
    loss: float | None = None
    leak_ohm: float | None = field(default=None, metadata=unit("ohm"))
    leak_reason: str = ""
    unknown: str = ""


def shifts(ratio: Callable[[float], float]) -> dict[str, float]:
    """Return by fault how much the frequency rises, from its ratio at a share of the value."""
    return {fault: ratio(share) - 1.0 for fault, share in SHARES.items()}


def loss(ratio: Callable[[float], float], *, detuned: float) -> float | None:
    """Return the share that may be lost before the frequency is off by a share `detuned`.

    By halving the interval; the frequency rises with the loss.
    """
    if ratio(OPEN_SHARE) - 1.0 < detuned:
        return None
    least, most = 0.0, 1.0 - OPEN_SHARE
    for _ in range(40):
        middle = 0.5 * (least + most)
        if ratio(1.0 - middle) - 1.0 < detuned:
            least = middle
        else:
            most = middle
    return most


def detuning(timing: Timing, fault: str, *, circuit: Circuit) -> str:
    """Return in words what a fault does to the frequency; "" where that is within its share."""
    shift = timing.shifts.get(fault)
    if shift is None or shift <= circuit.sheet.detuned_share:
        return ""
    if shift >= LOST - 1.0:
        by = f"{1.0 + shift:.3g} times as fast" if shift < 100.0 else "out of all proportion"
        if timing.frequency_Hz is not None:
            return f"{timing.what} is gone from {figure(timing.frequency_Hz, 'Hz')}: only strays tune it"
        return f"{timing.what} runs {by}"
    percent = f"{100.0 * shift:.0f} %" if shift >= 0.1 else f"{100.0 * shift:.2g} %"
    if timing.frequency_Hz is None:
        return f"{timing.what} runs {percent} too fast"
    now = timing.frequency_Hz * (1.0 + shift)
    return (
        f"{timing.what} goes from {figure(timing.frequency_Hz, 'Hz')} to {figure(now, 'Hz')}, "
        f"{percent} off"
    )


def told(timing: Timing, *, circuit: Circuit) -> str:
    """Return what a position means for a frequency, for its explanation."""
    if timing.unknown:
        return timing.unknown
    percent = f"{100.0 * circuit.sheet.detuned_share:g} %"
    at = f" at {figure(timing.frequency_Hz, 'Hz')}" if timing.frequency_Hz is not None else ""
    if timing.loss is None:
        return f"sets {timing.what}{at}; not even without it is that off by {percent}"
    return (
        f"sets {timing.what}{at}: off by {percent} once {100.0 * timing.loss:.2g} % of its "
        "capacitance is lost"
    )
