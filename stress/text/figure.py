"""Numbers as the trade writes them: three digits, µF and pF, kΩ and MΩ, mA and µA."""

from __future__ import annotations

from math import floor, isfinite, log10

_PREFIXES = {
    -12: "p",
    -9: "n",
    -6: "µ",
    -3: "m",
    0: "",
    3: "k",
    6: "M",
    9: "G",
    12: "T",
}
# The trade has no millifarad, no kilovolt below 10 kV, no megawatt; what a unit may use.
_ALLOWED = {
    "F": (-12, -6),
    "ohm": (-3, 0, 3, 6, 9),
    "A": (-9, -6, -3, 0),
    "V": (-3, 0),
    "W": (-6, -3, 0),
    "J": (-6, -3, 0),
    "H": (-6, -3, 0),
    "s": (-9, -6, -3, 0),
    "Hz": (0, 3, 6),
    "C": (-6, -3, 0),
}
_SYMBOLS = {"ohm": "Ω", "degC": "°C", "1": ""}


def figure(value: float, unit: str, *, digits: int = 3) -> str:
    """Return a number with its unit, such as "0.022 µF", "3.9 MΩ" or "12.6 V".

    Args:
        value: In the SI unit.
        unit: "F", "ohm", "A", "V", "W", "J", "H", "s", "Hz", "degC", or "1" for a plain ratio.
        digits: Significant digits at most; trailing zeros after the point are dropped.
    """
    symbol = _SYMBOLS.get(unit, unit)
    if not isfinite(value):
        return f"∞ {symbol}".rstrip() if value > 0 else "not a number"
    powers = _ALLOWED.get(unit, (0,))
    power = powers[0] if value else 0
    for candidate in powers:
        # Rounded first, so that 999.96 mA becomes 1 A and not 1000 mA.
        if abs(_rounded(value, digits)) >= 10.0**candidate * _from(unit, candidate):
            power = candidate
    if value == 0 and 0 not in powers:
        power = powers[-1]
    return f"{_plain(value / 10.0**power, digits)} {_PREFIXES[power]}{symbol}".rstrip()


def _from(unit: str, power: int) -> float:
    """Return the mantissa from which a prefix is used: 0.001 µF, not 1000 pF; 0.5 W, not 500 mW."""
    return {("F", -6): 0.001, ("W", 0): 0.1}.get((unit, power), 1.0)


def _rounded(value: float, digits: int) -> float:
    return float(f"{value:.{max(digits - 1, 0)}e}")


def _plain(mantissa: float, digits: int) -> str:
    """Return digits without exponent; whole numbers are never rounded below the point."""
    if mantissa == 0:
        return "0"
    places = max(digits - 1 - floor(log10(abs(_rounded(mantissa, digits)))), 0)
    text = f"{mantissa:.{places}f}"
    return text.rstrip("0").rstrip(".") if "." in text else text
