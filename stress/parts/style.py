"""Capacitor styles: loss, leakage, surge and ageing laws, each number with its source."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from math import inf, pi, sqrt

from stress.netlist.flat import NOTHING
from stress.parts.law import (
    Fate,
    Hot,
    Insulation,
    Leakage,
    LineClass,
    Loss,
    Quoted,
    Reverse,
    Ripple,
    Share,
    Steps,
    Surge,
    Wear,
    between,
    step,
)
from stress.text.unit import unit

MOST_INSULATION_ohm = 1e11  # the solver loses its footing above; healthier is the same to it
REFERENCE_degC = 20.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Style:
    """How one style of capacitor behaves; made from `styles.toml` by `stress.parts.styles`.

    Attributes:
        name: As in a part sheet.
        text: For people.
        polar: Whether it has a plus side that matters.
        aliases: Other names it goes by.
        loss, insulation, hot: Laws that every style has.
        leakages: Published limits of leakage, the usual one first; electrolytics only.
        surge: None where the style has no surge rating.
        reverse: Polar styles only.
        ripples: Multipliers against frequency, by rated voltage; empty where nobody states any.
        wear: Electrolytics only; when a part counts as worn.
        absorption: Share of the voltage that comes back after a discharge.
        tolerance: Usual tolerance of parts of the period.
        new_tolerance: Usual tolerance of a part bought today.
        steps: Rated voltages on sale today.
        bias: Share of the capacitance left at the rated voltage, worst and usual.
        fate: How it ages and ends.
        highest_degC: Upper category temperature, in `highest_degC.value`.
        figures: Further numbers by name, the unit at the end of the name: ac_share (rms over dc
            rating at line frequency), slope_V_per_s (of one part that was looked up).
        classes: Classes of line capacitors.
        replacement: The style that is fitted instead.
    """

    name: str
    text: str
    polar: bool = False
    aliases: tuple[str, ...] = ()
    loss: Loss
    insulation: Insulation
    hot: Hot
    leakages: tuple[Leakage, ...] = ()
    surge: Surge | None = None
    reverse: Reverse | None = None
    ripples: tuple[Ripple, ...] = ()
    wear: Wear | None = None
    absorption: Share
    tolerance: Share
    new_tolerance: Share
    steps: Steps
    bias: Share | None = None
    fate: Fate
    highest_degC: Quoted = field(metadata=unit("degC"))
    figures: Mapping[str, Quoted] = NOTHING
    classes: tuple[LineClass, ...] = ()
    replacement: str = ""

    @property
    def electrolytic(self) -> bool:
        """Whether it forms, dries out and leaks by a law of its own."""
        return bool(self.leakages)

    def tan(self, value_F: float, *, rated_V: float | None, frequency_Hz: float) -> float:
        """Return the loss factor of a healthy part, a plain ratio."""
        esr = self.esr_ohm(value_F, rated_V=rated_V, frequency_Hz=frequency_Hz)
        return 2 * pi * frequency_Hz * value_F * esr

    def esr_ohm(self, value_F: float, *, rated_V: float | None, frequency_Hz: float) -> float:
        """Return the equivalent series resistance of a healthy part at a frequency, in ohm.

        tan δ/(2πfC) by the style's loss factor. Where the style has ripple multipliers m(f),
        the resistance goes with 1/m²: they are stated for equal heat (IEC 60384-4), so that
        the losses of the electrolyte remain at high frequency. Below the lowest frequency of a
        table the loss factor stays.

        Raises:
            ValueError: Capacitance or frequency is not above zero.
        """
        if not (value_F > 0 and frequency_Hz > 0):
            raise ValueError("a capacitance and a frequency above zero are wanted")
        at, tan = self.loss.at_Hz, self.loss.tan
        if self.loss.rated_V:
            row = step(self.loss.rated_V, rated_V or inf)
            tan = (tan[row] if rated_V else self.loss.unrated,)
        excess = max(value_F - self.loss.extra_from_F, 0.0) * self.loss.extra_per_F
        if self.ripples:
            reference = series_ohm(tan[0] + excess, value_F, at[0])
            return reference * self._less(at[0], frequency_Hz, rated_V)
        if frequency_Hz > at[-1] and self.loss.constant_above == "esr":
            return series_ohm(tan[-1] + excess, value_F, at[-1])
        return series_ohm(between(at, tan, frequency_Hz) + excess, value_F, frequency_Hz)

    def _less(self, from_Hz: float, to_Hz: float, rated_V: float | None) -> float:
        """Return the ratio of the series resistances at two frequencies, by the multipliers."""
        lowest = self._ripple(rated_V).at_Hz[0]
        below = lowest / to_Hz if to_Hz < lowest else 1.0
        first = self.ripple_factor(from_Hz, rated_V=rated_V)
        return below * (first / self.ripple_factor(to_Hz, rated_V=rated_V)) ** 2

    def insulation_ohm(self, value_F: float, *, rated_V: float | None) -> float:
        """Return the leakage resistance of a new part at 20 °C, in ohm, at most 1e11.

        Electrolytics: rated voltage over the limit of leakage; with the rating unknown, the
        limit of 100 V.
        """
        if self.leakages:
            volts = rated_V or 100.0
            ohm = volts / self.leakages[0].limit_A(value_F, rated_V=volts)
        else:
            ohm = self.insulation.ohm(value_F)
        return min(ohm, MOST_INSULATION_ohm)

    def leakage_limit_A(
        self, value_F: float, *, rated_V: float, rule: str | None = None
    ) -> float | None:
        """Return the published limit of leakage at the rated voltage and 20 °C, in ampere.

        Args:
            value_F, rated_V: The part.
            rule: Name of one of `leakages`; the usual one otherwise. Styles without such a
                rule: by the insulation of a new part; None where an unknown rule is asked for.
        """
        if not self.leakages:
            return rated_V / self.insulation.ohm(value_F) if rule is None else None
        for leakage in self.leakages:
            if rule in (None, leakage.name):
                return leakage.limit_A(value_F, rated_V=rated_V)
        return None

    def surge_V(self, rated_V: float) -> float:
        """Return what the part stands briefly, in volt; `rated_V` where it has no surge rating."""
        if self.surge is None:
            return rated_V
        ratio = self.surge.ratio
        return rated_V * (
            ratio[step(self.surge.rated_V, rated_V)] if self.surge.rated_V else ratio[0]
        )

    def reverse_V(self, rated_V: float | None) -> float | None:
        """Return the largest lasting voltage the wrong way round; None for non-polar styles."""
        if self.reverse is None:
            return None
        return min(self.reverse.most_V, self.reverse.share * rated_V if rated_V else inf)

    def hot_factor(self, *, from_degC: float, to_degC: float) -> float:
        """Return how many times more it leaks at the second temperature than at the first."""
        return float(2.0 ** ((to_degC - from_degC) / self.hot.doubling_K))

    def voltage_factor(self, share: float) -> float:
        """Return the leakage current at a share of the rated voltage over that at the rating.

        Only downwards, since no reading is carried to a higher voltage.

        Raises:
            ValueError: `share` is not from 0 to 1.
        """
        if not 0 <= share <= 1:
            raise ValueError("leakage is known up to the rated voltage only")
        return float(share**self.hot.voltage_power)

    def time_factor(self, *, from_s: float, to_s: float) -> float:
        """Return the leakage after one time under voltage over that after another."""
        return float((to_s / from_s) ** self.hot.time_power)

    def _ripple(self, rated_V: float | None) -> Ripple:
        return self.ripples[step(tuple(r.up_to_V for r in self.ripples), rated_V or inf)]

    def ripple_factor(self, frequency_Hz: float, *, rated_V: float | None) -> float:
        """Return how much ripple current it stands at a frequency, over that at 100 Hz."""
        if not self.ripples:
            return 1.0
        row = self._ripple(rated_V)
        return between(row.at_Hz, row.factor, frequency_Hz)

    def equivalent_ripple_A(
        self, spectrum: Mapping[float, float], *, rated_V: float | None
    ) -> float:
        """Return the 100 Hz current of the same heat as a spectrum of Hz to A rms.

        √Σ(I/m)², the method of IEC 60384-4 and the makers' guides (from memory, to be
        confirmed).
        """
        return sqrt(
            sum((i / self.ripple_factor(f, rated_V=rated_V)) ** 2 for f, i in spectrum.items())
        )

    def fault_share(self, fault: str, *, years: float | None = None) -> float:
        """Return the share of parts of an age that is found with a fault (common practice).

        Args:
            fault: "leaky", "short", "open", "dried" or "reversed".
            years: Age; None for that of the table.
        """
        at = self.fate.share.get(fault, 0.0)
        return at if years is None else at * min(max(years, 0.0) / self.fate.years, 1.0)


def series_ohm(tan: float, value_F: float, frequency_Hz: float) -> float:
    """Return tan δ/(2πfC), in ohm (IEC 60384-1)."""
    return tan / (2 * pi * frequency_Hz * value_F)
