"""What a part can stand, and who says so."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum


class Rating(StrEnum):
    """The rating system of a limit, which decides the condition it is judged in."""

    DESIGN_CENTRE = "design-centre"
    DESIGN_MAXIMUM = "design-maximum"
    ABSOLUTE = "absolute"


# The name of every stress, with the unit of its value. `Limit`s and stresses share these keys.
STRESSES = {
    "plate_W": "W",
    "screen_W": "W",
    "grid_W": "W",
    "grid_A": "A",
    "cathode_A": "A",
    "plate_V": "V",
    "screen_V": "V",
    "heater_cathode_V": "V",
    "power_W": "W",
    "voltage_V": "V",
    "current_A": "A",
    "average_A": "A",
    "peak_A": "A",
    "reverse_V": "V",
    "ripple_A": "A",
}

# What the trade calls them.
QUANTITIES = {
    "plate_W": "plate dissipation",
    "screen_W": "screen dissipation",
    "grid_W": "grid dissipation",
    "grid_A": "grid current",
    "cathode_A": "cathode current",
    "plate_V": "plate voltage",
    "screen_V": "screen voltage",
    "heater_cathode_V": "heater-cathode voltage",
    "power_W": "power",
    "voltage_V": "voltage",
    "current_A": "current",
    "average_A": "average current",
    "peak_A": "peak current",
    "reverse_V": "reverse voltage",
    "ripple_A": "ripple current",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Limit:
    """The largest value of one stress.

    Attributes:
        value: In the unit of `STRESSES[stress]`.
        source: Where it comes from, in words that can be printed: "sheet", or the published
            source of the type table, or what was assumed.
        rating: The rating system.
        assumed: True when nobody stated it; then it never makes a critical leakage.
    """

    value: float
    source: str
    rating: Rating = Rating.DESIGN_CENTRE
    assumed: bool = False
