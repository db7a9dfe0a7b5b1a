"""Capacitor styles: loss, leakage, surge and ageing laws, each number with its source."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class Style:
    """How one style of capacitor behaves; made from `styles.toml` by `stress.parts.styles`.

    Placeholder of the interface; the owner of this module adds the fields and their sources.
    """

    name: str
    text: str
    polar: bool

    def esr_ohm(self, value_F: float, *, rated_V: float | None, frequency_Hz: float) -> float:
        """Return the equivalent series resistance of a healthy part at a frequency, in ohm."""
        raise NotImplementedError

    def insulation_ohm(self, value_F: float, *, rated_V: float | None) -> float:
        """Return the leakage resistance of a new part at 20 °C, in ohm, at most 1e11."""
        raise NotImplementedError

    def surge_V(self, rated_V: float) -> float:
        """Return what the part stands briefly, in volt; `rated_V` where it has no surge rating."""
        raise NotImplementedError

    def hot_factor(self, *, from_degC: float, to_degC: float) -> float:
        """Return how many times more it leaks at the second temperature than at the first."""
        raise NotImplementedError
