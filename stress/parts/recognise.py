"""Recognises tubes that users bring as subcircuits: the type by name, the pins by name or law."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping, Sequence

from stress.netlist.flat import Element
from stress.parts.structure import roles_by_structure

_PREFIX = re.compile(
    r"\A(?:X|T|V|TUBE|VALVE|TRIODE|PENTODE|RECT|DIODE|NH|KOREN|AYUMI)+(?=[0-9A-Z])"
)

# Names of pins in published model libraries, plain and lower case, by role.
_PIN_NAMES = {
    "plate": "p a plate anode pl an p1 a1 plate1 anode1 pa pp ap",
    "plate2": "p2 a2 plate2 anode2 at pt",
    "cathode": "k c cathode kathode cath kath ca k1 c1 cathode1 kp",
    "cathode2": "k2 c2 cathode2 kt",
    "grid": "g grid g1 grid1 cg cgrid control gp",
    "grid2": "gt gridt",
    "screen": "s sg g2 screen screengrid grid2 sc g24 g2g4",
    "suppressor": "g3 sup supp suppressor suppressorgrid grid3 g35",
    "diode": "d d1 ad ad1 diode diode1 da",
    "diode2": "d2 ad2 diode2 db",
    "oscillator": "osc gosc oscillator",
    "heater": "h h1 f f1 heater fil filament hp fp",
    "heater2": "h2 f2 heater2 hm fm",
}
_ROLE = {name: role for role, names in _PIN_NAMES.items() for name in names.split()}


def plain(name: str) -> str:
    """Return the letters and digits of a designation, upper case."""
    return re.sub(r"[^0-9A-Z]", "", name.upper())


def candidates(name: str) -> Iterator[str]:
    """Yield plain designations that the name of a subcircuit may mean, likeliest first.

    The name itself, its parts, both without the usual prefixes of model libraries, then with
    trailing characters (a maker's or a fit's letters) taken off one by one, but never a digit
    of a longer number. Two digits alone ("80") count only as a whole name: "FILTER_80" is no
    rectifier.
    """
    whole = plain(name)
    yield whole
    parts = [plain(part) for part in re.split(r"[^0-9A-Za-z]+", name) if _tells(part)]
    yield from parts
    for text in (whole, *parts):
        bare = _PREFIX.sub("", text)
        if bare != text and _tells(bare):
            yield bare
    for text in (whole, *parts):
        for length in range(len(text) - 1, 2, -1):
            if not (text[length].isdigit() and text[length - 1].isdigit()):
                yield text[:length]


def _tells(part: str) -> bool:
    return len(part) > 2 or (len(part) > 1 and not part.isdigit())


def pin_roles(
    pins: Sequence[str], elements: Sequence[Element], *, nodes: Sequence[str] = ()
) -> tuple[Mapping[str, str], str]:
    """Return role to formal pin, and how the pins were recognised, in words.

    By name when every pin has a known one; else by what the model computes, when `nodes` are
    given; else by the names that are known, if plate and cathode are among them. Where nothing
    tells: no roles and "".

    Args:
        pins: Formal pins of the subcircuit.
        elements: The flat elements inside.
        nodes: The flat nodes on the pins, same order.
    """
    named = _by_name(pins)
    if len(named) == len(pins) and _complete(named):
        return named, "pin names"
    computed = roles_by_structure(pins, nodes, elements)
    if computed:
        taken = set(computed.values())
        rest = {role: pin for role, pin in named.items() if pin not in taken}
        return {**rest, **computed}, "what the model computes"
    return (named, "pin names, in part") if _complete(named) else ({}, "")


def _complete(roles: Mapping[str, str]) -> bool:
    return "plate" in roles and ("cathode" in roles or "heater" in roles)


def _by_name(pins: Sequence[str]) -> dict[str, str]:
    """Return role to pin for the pins whose names say it."""
    plain_names = {re.sub(r"[^0-9a-z]", "", pin.lower()): pin for pin in pins}
    roles: dict[str, str] = {}
    for name, pin in plain_names.items():
        role = _ROLE.get(name)
        if role is not None and role not in roles:
            roles[role] = pin
    second = plain_names.get("g2", plain_names.get("grid2"))
    if "plate2" in roles and second is not None:  # two units: G2 is the grid of the other
        screens = [pin for name, pin in plain_names.items() if _ROLE.get(name) == "screen"]
        roles |= {"grid2": second, "screen": next((p for p in screens if p != second), "")}
        roles = {role: pin for role, pin in roles.items() if pin}
    if plain_names.keys() & {"g4", "g5", "grid4"} and {"suppressor", "grid"} <= roles.keys():
        # A pentagrid: grid 1 oscillates, the signal is on grid 3.
        roles["oscillator"], roles["grid"] = roles["grid"], roles.pop("suppressor")
    if "cathode" not in roles and "heater" in roles and "grid" not in roles:
        roles["cathode"] = roles.pop("heater")  # a rectifier whose filament is the cathode
    return roles
