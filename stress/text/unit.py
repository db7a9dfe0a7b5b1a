"""The unit of a float, in machine-readable field metadata."""

from __future__ import annotations

from dataclasses import fields
from typing import Any


def unit(symbol: str) -> dict[str, str]:
    """Return field metadata naming the unit a float is held in; "1" is a plain ratio."""
    return {"unit": symbol}


def units_of(record: type[Any]) -> dict[str, str]:
    """Return the unit of every field of a dataclass that states one, by field name."""
    return {f.name: f.metadata["unit"] for f in fields(record) if "unit" in f.metadata}
