"""What is published of one type of tube, rectifier, diode or transistor."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from stress.netlist.flat import NOTHING
from stress.parts.limit import Limit
from stress.text.unit import unit

# How sure a number is. "read": seen in a copy or a transcription that names the sheet;
# "memory": recalled from the named document, high, medium or low confidence.
MARKS = {
    "read": "",
    "memory H": "from memory (sure), to be confirmed",
    "memory M": "from memory, to be confirmed",
    "memory L": "from memory (unsure), to be confirmed",
    "computed": "computed",
    "common practice": "common practice",
    "from memory, to be confirmed": "from memory, to be confirmed",
}


@dataclass(frozen=True, slots=True)
class Source:
    """Where a number comes from, and how sure that is; `mark` is a key of `MARKS`."""

    text: str
    mark: str

    def __str__(self) -> str:
        words = MARKS[self.mark]
        if not self.text or self.text == words:
            return words
        return f"{self.text}, {words}" if words else self.text


@dataclass(frozen=True, slots=True, kw_only=True)
class Operation:
    """One published line of characteristics; None where it is silent.

    Attributes:
        plate_V, screen_V, grid_V: Against the cathode; `grid_V` of the signal grid.
        plate_A, screen_A: Of one unit.
        gm_S: Transconductance; of a converter the conversion transconductance.
        mu: Amplification factor of a triode; of a pentode that of grid 1 against the screen.
        plate_ohm: Plate resistance.
        unit: 1, or 2 for the second unit of an envelope of unlike units.
        cutoff: The line tells where the tube is cut off, not how it is run.
        source: Of the whole line.
    """

    plate_V: float = field(metadata=unit("V"))
    screen_V: float | None = field(default=None, metadata=unit("V"))
    grid_V: float = field(default=0.0, metadata=unit("V"))
    plate_A: float | None = field(default=None, metadata=unit("A"))
    screen_A: float | None = field(default=None, metadata=unit("A"))
    gm_S: float | None = field(default=None, metadata=unit("S"))
    mu: float | None = field(default=None, metadata=unit("1"))
    plate_ohm: float | None = field(default=None, metadata=unit("ohm"))
    cutoff: bool = False
    unit: int = 1
    source: Source


@dataclass(frozen=True, slots=True, kw_only=True)
class TypeEntry:
    """A type by its registered designation. None where nothing is known.

    Attributes:
        name: Registered designation.
        aliases: Other designations of the same or of an interchangeable type.
        family: "triode", "double triode", "pentode", "beam tube", "converter",
            "diode-triode", "diode-pentode", "triode-pentode", "triode-converter",
            "double diode", "rectifier", "silicon rectifier", "selenium stack",
            "silicon diode", "germanium diode", "germanium transistor", "silicon transistor".
        heater_V, heater_A: Heater or filament.
        directly_heated: The filament is the cathode.
        warm_up: "instant", "filament" or "cathode".
        slow: A cathode rectifier that comes up with or after the tubes it feeds.
        limits: By stress name. Of a full-wave rectifier `average_A` is the direct output
            current of the whole tube and `peak_A` that of one plate.
        grid_circuit_fixed_ohm, grid_circuit_cathode_ohm: Largest resistance from grid to
            bias with fixed and with cathode bias.
        contact: Grid-leak (contact potential) bias is normal for the type.
        gas: "mercury" where the drop is that of an arc, else "".
        remote: Remote cut-off (variable mu).
        plates: Of a rectifier: 2 for full wave.
        diodes: Signal diodes beside the main unit, on its cathode.
        plate_rms_V: Largest alternating voltage of a plate, capacitor input.
        peak_inverse_V, peak_A, average_A: Of a rectifier; the same numbers stand in `limits`.
        drop_V, drop_A: A drop and the current (of one plate) it belongs to.
        first_capacitor_max_F, supply_impedance_min_ohm: For capacitor input.
        operation: Published lines.
        pins: Roles of the pins of the built-in model, in its order; empty without a model.
        model: Name of the entry whose model it uses, itself most often; "" without a model.
        sources: By field name, "limits.plate_W" and the like for limits.
        note: A sentence for people.
    """

    name: str
    aliases: tuple[str, ...] = ()
    family: str
    heater_V: float | None = field(default=None, metadata=unit("V"))
    heater_A: float | None = field(default=None, metadata=unit("A"))
    directly_heated: bool = False
    warm_up: str = "instant"
    slow: bool = False
    limits: Mapping[str, Limit] = NOTHING
    grid_circuit_fixed_ohm: float | None = field(default=None, metadata=unit("ohm"))
    grid_circuit_cathode_ohm: float | None = field(default=None, metadata=unit("ohm"))
    contact: bool = False
    gas: str = ""
    remote: bool = False
    plates: int = 1
    diodes: int = 0
    plate_rms_V: float | None = field(default=None, metadata=unit("V"))
    peak_inverse_V: float | None = field(default=None, metadata=unit("V"))
    peak_A: float | None = field(default=None, metadata=unit("A"))
    average_A: float | None = field(default=None, metadata=unit("A"))
    drop_V: float | None = field(default=None, metadata=unit("V"))
    drop_A: float | None = field(default=None, metadata=unit("A"))
    first_capacitor_max_F: float | None = field(default=None, metadata=unit("F"))
    supply_impedance_min_ohm: float | None = field(default=None, metadata=unit("ohm"))
    operation: tuple[Operation, ...] = ()
    pins: tuple[str, ...] = ()
    model: str = ""
    sources: Mapping[str, Source] = NOTHING
    note: str = ""
