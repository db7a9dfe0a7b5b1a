"""The numbers of a built-in model: one unit, and the fit it comes from."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TypeAlias

from stress.parts.type import TypeEntry

# Parameters of each form, with the unit of each; those of an exponent or ratio are "1".
PARAMETERS: Mapping[str, Mapping[str, str]] = {
    "triode": {
        "MU": "1",
        "EX": "1",
        "KG1": "V^EX/A",
        "KP": "1",
        "KVB": "V^2",
        "GG": "A/V^XI",
        "CGK": "F",
        "CGP": "F",
        "CPK": "F",
    },
    "pentode": {
        "MU": "1",
        "EX": "1",
        "KG1": "V^EX/A",
        "KP": "1",
        "MUA": "1",
        "KVS": "1",
        "S0": "1",
        "H": "1",
        "GG": "A/V^XI",
        "CGK": "F",
        "CGP": "F",
        "CPK": "F",
    },
    "converter": {
        "MU": "1",
        "EX": "1",
        "KG1": "V^EX/A",
        "KP": "1",
        "MUA": "1",
        "KVS": "1",
        "S0": "1",
        "H": "1",
        "V3": "V",
        "S3": "V",
        "GG": "A/V^XI",
        "CGK": "F",
        "CGP": "F",
        "CPK": "F",
    },
    "rectifier": {"K": "A/V^1.5"},
    "arc": {"VARC": "V", "WARC": "V", "RARC": "ohm"},
    "diode": {"K": "A/V^1.5", "CD": "F"},
    "junction": {"IS": "A", "N": "1", "RS": "ohm"},
}

JUNCTIONS = ("silicon rectifier", "selenium stack", "silicon diode", "germanium diode")


@dataclass(frozen=True, slots=True)
class Unit:
    """One electrode system of an envelope.

    Attributes:
        form: A key of `PARAMETERS`.
        pins: Names of the pins of the subcircuit in the order that the form wants: plate,
            (screen,) grid, cathode(, oscillator); plate, cathode for diodes.
        values: By parameter name, all of the form.
    """

    form: str
    pins: tuple[str, ...]
    values: Mapping[str, float]

    def __post_init__(self) -> None:
        wanted = set(PARAMETERS[self.form])
        if set(self.values) != wanted:
            odd = sorted(set(self.values) ^ wanted)
            raise ValueError(f"{self.form}: parameters missing or unknown: {', '.join(odd)}")

    def __getitem__(self, parameter: str) -> float:
        return self.values[parameter]


Layout: TypeAlias = tuple[tuple[str, tuple[str, ...]], ...]


def layout(entry: TypeEntry) -> Layout:
    """Return form and pins of every unit that a model of the type has; () where none can be."""
    triode = ("triode", ("plate", "grid", "cathode"))
    pentode = ("pentode", ("plate", "screen", "grid", "cathode"))
    converter = ("converter", (*pentode[1], "oscillator"))
    diodes = (("diode", ("diode", "cathode")), ("diode", ("diode2", "cathode")))[: entry.diodes]
    law = "arc" if entry.gas else "rectifier"
    plates = ((law, ("plate", "cathode")), (law, ("plate2", "cathode")))[: entry.plates]
    layouts: Mapping[str, Layout] = {
        "triode": (triode,),
        "double triode": (triode,),
        "diode-triode": (triode, *diodes),
        "pentode": (pentode,),
        "beam tube": (pentode,),
        "diode-pentode": (pentode, *diodes),
        "converter": (converter,),
        "triode-pentode": (pentode, ("triode", ("plate2", "grid2", "cathode2"))),
        "triode-converter": (
            ("converter", (*pentode[1], "grid2")),
            ("triode", ("plate2", "grid2", "cathode")),
        ),
        "double diode": (("diode", ("plate", "cathode")),),
        "rectifier": plates,
    }
    if entry.family in JUNCTIONS and entry.drop_V is not None:
        return (("junction", ("anode", "cathode")),)
    return layouts.get(entry.family, ())


def pins_of(units: Layout) -> tuple[str, ...]:
    """Return the pins of the subcircuit: those of all units once, plates first, then by unit.

    Full-wave rectifiers are plate, plate2, cathode; a diode-triode is plate, grid, cathode,
    diode, diode2.
    """
    pins = dict.fromkeys(pin for _, unit in units for pin in unit)
    if set(pins) == {"plate", "cathode", "plate2"}:
        return ("plate", "plate2", "cathode")
    return tuple(pins)
