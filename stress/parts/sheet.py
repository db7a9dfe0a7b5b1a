"""The part sheet: what the user knows of the parts, as frozen records in SI.

`read` (in `stress.parts.read_sheet`) makes one from TOML; an empty `Sheet()` stands for none.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from stress.netlist.flat import NOTHING
from stress.parts.limit import Limit
from stress.text.span import Span
from stress.text.unit import unit


@dataclass(frozen=True, slots=True, kw_only=True)
class EquipmentEntry:
    """`[equipment]`; None and empty where the sheet is silent."""

    name: str | None = None
    ambient_degC: float | None = field(default=None, metadata=unit("degC"))
    heaters: str | None = None  # parallel, series, battery
    touchable: tuple[str, ...] = ()
    kind: str | None = None  # receiver, amplifier, transmitter, television, switch-mode …
    tubes_out: bool = False  # the user says that tubes may be out while it is powered
    driven: bool = False  # ask for the condition `driven`
    conditions: tuple[str, ...] = ()  # other uses that are asked for


@dataclass(frozen=True, slots=True, kw_only=True)
class LineEntry:
    """`[line]`."""

    sources: tuple[str, ...] = ()
    nominal_V: float | None = field(default=None, metadata=unit("V"))
    high_V: float | None = field(default=None, metadata=unit("V"))
    low_V: float | None = field(default=None, metadata=unit("V"))
    period_s: float | None = field(default=None, metadata=unit("s"))


@dataclass(frozen=True, slots=True, kw_only=True)
class CapacitorEntry:
    """`[capacitors.X]`."""

    style: str | None = None
    plus: str | None = None
    rated_V: float | None = field(default=None, metadata=unit("V"))
    value_F: float | None = field(default=None, metadata=unit("F"))
    ripple_A: float | None = field(default=None, metadata=unit("A"))
    esr_ohm: float | None = field(default=None, metadata=unit("ohm"))
    insulation_ohm: float | None = field(default=None, metadata=unit("ohm"))
    tolerance: tuple[float, float] | None = None  # value over marked value, low and high
    year: int | None = None
    role: str | None = None
    fitted_value_F: float | None = field(default=None, metadata=unit("F"))
    fitted_rated_V: float | None = field(default=None, metadata=unit("V"))
    fitted_style: str | None = None
    metal_case: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class TubeEntry:
    """`[tubes.X]`; `limits` by stress name."""

    type: str | None = None
    pins: Mapping[str, str] = NOTHING
    limits: Mapping[str, Limit] = NOTHING
    rectifier: bool | None = None
    envelope: str | None = None
    heater_bias_V: float | None = field(default=None, metadata=unit("V"))
    grid_circuit_ohm: float | None = field(default=None, metadata=unit("ohm"))


@dataclass(frozen=True, slots=True, kw_only=True)
class PartEntry:
    """An entry of `[resistors]`, `[windings]`, `[diodes]`, `[transistors]`, `[fuses]`,
    `[controls]` or `[loudspeakers]`."""

    limits: Mapping[str, Limit] = NOTHING
    irreplaceable: bool = False
    type: str | None = None
    blow_class: str | None = None  # fuses: fast, slow …


@dataclass(frozen=True, slots=True, kw_only=True)
class ConditionEntry:
    """`[conditions.X]`: how the equipment is run besides the stock conditions."""

    name: str
    open: tuple[str, ...] = ()
    short: tuple[str, ...] = ()
    pulled: tuple[str, ...] = ()
    silicon: tuple[str, ...] = ()  # rectifier tubes replaced by silicon diodes
    muted: tuple[str, ...] = ()  # sources that are silent
    line: str = "high"  # nominal, high, low
    lasts: bool = True
    driven: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class CanEntry:
    """`[cans.X]`: several sections in one part."""

    name: str
    sections: tuple[str, ...]
    common: str | None = None
    case: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class FaultEntry:
    """`[faults.X]`: leakage between nodes of different positions."""

    name: str
    between: tuple[str, str]
    style: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheet:
    """The whole sheet; every mapping is by the designator in lower case.

    Attributes:
        path: The file, or None where there is no sheet.
        meter_ohm: What the user's meter loads a node with; `meter_ohm_per_V` instead for a
            moving-coil meter.
        bench_degC: Temperature of the bench.
        safety: Factor on the leakage that is allowed.
        tester_V: Voltages the user's tester has.
        functional_share: Share by which a bias may move (0.1).
        detuned_share: Share by which a tuned circuit or a timing may be off (0.01).
        likelihood: The user's factors on the likelihood of a fault, by style.
        spans: Where each entry stands, by its table and its name in lower case, and each key
            of it by its path, such as ("capacitors", "c5", "plus").
    """

    path: str | None = None
    equipment: EquipmentEntry = EquipmentEntry()
    line: LineEntry = LineEntry()
    capacitors: Mapping[str, CapacitorEntry] = NOTHING
    tubes: Mapping[str, TubeEntry] = NOTHING
    resistors: Mapping[str, PartEntry] = NOTHING
    windings: Mapping[str, PartEntry] = NOTHING
    diodes: Mapping[str, PartEntry] = NOTHING
    transistors: Mapping[str, PartEntry] = NOTHING
    fuses: Mapping[str, PartEntry] = NOTHING
    controls: Mapping[str, PartEntry] = NOTHING
    loudspeakers: Mapping[str, PartEntry] = NOTHING
    conditions: tuple[ConditionEntry, ...] = ()
    cans: tuple[CanEntry, ...] = ()
    faults: tuple[FaultEntry, ...] = ()
    devices: tuple[str, ...] = ()
    blocks: tuple[str, ...] = ()
    meter_ohm: float = field(default=10e6, metadata=unit("ohm"))
    meter_ohm_per_V: float | None = field(default=None, metadata=unit("ohm/V"))
    bench_degC: float = field(default=20.0, metadata=unit("degC"))
    safety: float = field(default=2.0, metadata=unit("1"))
    tester_V: tuple[float, ...] = ()
    functional_share: float = field(default=0.1, metadata=unit("1"))
    detuned_share: float = field(default=0.01, metadata=unit("1"))
    likelihood: Mapping[str, float] = NOTHING
    spans: Mapping[tuple[str, ...], Span] = field(default_factory=dict, compare=False, repr=False)

    def span(self, table: str, name: str, *keys: str) -> Span | None:
        """Return where an entry, or a key of it, stands in the file."""
        path = (table, name.lower(), *keys)
        return self.spans.get(path) or self.spans.get(path[:2])
