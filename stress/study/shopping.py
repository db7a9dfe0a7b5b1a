"""The shopping list: what to buy, equal parts together, cans as one."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from stress.circuit.circuit import Circuit
from stress.study.result import Replacement
from stress.text.unit import unit


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """One line of the list.

    Attributes:
        designators: Positions, in netlist order.
        quantity: How many parts to buy.
        value_F: Of each part where they are equal, else of all; of a can of each section.
        rated_V: Highest that any of the positions asks for.
        style: Name of the style.
        safety_class: "X", "Y" or None.
        ripple_rms_A: Largest ripple of the positions, at `ripple_Hz`.
        remarks: Arrangement, can, what else to look for.
    """

    designators: tuple[str, ...]
    quantity: int
    value_F: tuple[float, ...] = field(metadata=unit("F"))
    rated_V: float | None = field(metadata=unit("V"))
    style: str
    safety_class: str | None = None
    ripple_rms_A: float | None = field(default=None, metadata=unit("A"))
    ripple_Hz: float | None = field(default=None, metadata=unit("Hz"))
    remarks: str = ""


def rows(replacements: Mapping[str, Replacement], *, circuit: Circuit) -> tuple[Row, ...]:
    """Return the list in netlist order; a row stands where its first position does.

    Args:
        replacements: By position name; a position without one is not on the list.
        circuit: For the order and the cans.
    """
    groups: dict[tuple[object, ...], list[Replacement]] = {}
    for position in circuit.positions:
        part = replacements.get(position.name)
        if part is None:
            continue
        if position.can:
            key: tuple[object, ...] = ("can", position.can)
        else:
            key = (part.value_F, part.rated_V, part.style, part.safety_class, part.arrangement)
        groups.setdefault(key, []).append(part)
    return tuple(
        _can(str(key[1]), parts) if key[0] == "can" else _plain(parts)
        for key, parts in groups.items()
    )


def _plain(parts: list[Replacement]) -> Row:
    first = parts[0]
    ripple, hertz = _most_ripple(parts)
    return Row(
        designators=tuple(part.position for part in parts),
        quantity=sum(part.quantity for part in parts),
        value_F=tuple(dict.fromkeys(first.parts_F)) or (first.value_F,),
        rated_V=first.rated_V,
        style=first.style,
        safety_class=first.safety_class,
        ripple_rms_A=ripple,
        ripple_Hz=hertz,
        remarks=first.arrangement,
    )


def _can(name: str, parts: list[Replacement]) -> Row:
    rated = [part.rated_V for part in parts if part.rated_V is not None]
    ripple, hertz = _most_ripple(parts)
    return Row(
        designators=tuple(part.position for part in parts),
        quantity=1,
        value_F=tuple(part.value_F for part in parts),
        rated_V=max(rated, default=None),
        style=parts[0].style,
        ripple_rms_A=ripple,
        ripple_Hz=hertz,
        remarks=f"can {name}: one part with {len(parts)} sections, or single parts below it",
    )


def _most_ripple(parts: list[Replacement]) -> tuple[float | None, float | None]:
    found = [(part.ripple_rms_A, part.ripple_Hz) for part in parts if part.ripple_rms_A]
    return max(found, key=lambda pair: pair[0] or 0.0, default=(None, None))
