"""The circuit as the studies see it: positions, parts, line, signals."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import StrEnum
from typing import TypeVar

from stress.finding import Finding
from stress.netlist.flat import NOTHING, Netlist
from stress.parts.limit import Limit
from stress.parts.sheet import Sheet
from stress.parts.style import Style
from stress.text.span import Span
from stress.text.unit import unit


class Role(StrEnum):
    """What a capacitor does in its place."""

    RESERVOIR = "reservoir"
    SMOOTHING = "smoothing"
    COUPLING = "coupling"
    CATHODE_BYPASS = "cathode bypass"
    SCREEN_BYPASS = "screen bypass"
    PLATE_BYPASS = "plate bypass"
    TONE = "tone"
    GRID_LEAK = "grid-leak"
    AVC = "AVC filter"
    DETECTOR = "detector filter"
    BIAS_FILTER = "bias filter"
    LINE_ACROSS = "across the line"
    LINE_CHASSIS = "line to chassis"
    FEEDBACK = "feedback"
    DECOUPLING = "decoupling"
    TUNING = "tuning"
    SNUBBER = "snubber"
    BUFFER = "buffer across a winding"
    FLYING = "doubler"
    OUTPUT_FILTER = "output filter"
    UNKNOWN = "role not recognised"


@dataclass(frozen=True, slots=True, kw_only=True)
class Position:
    """One capacitor in its place.

    Attributes:
        name: Designator, "C5" or "X3.C5"; also the name of its element.
        nodes: First and second node of the card.
        role, role_text: What it does, and that in words with its neighbours
            ("coupling, plate of XU1 to grid of XU2").
        style: How the part behaves; `style_source` is "sheet", "netlist tag" or "assumed: …".
        value_F: Capacitance; None where neither netlist nor sheet tells.
        rated_V: Marked rating, or None where nobody stated it.
        ripple_A: Marked ripple current, or None.
        plus: 0 or 1, the index in `nodes` of the plus side where the sheet states it or the
            graph leaves no doubt; else None (then the side with the positive nominal mean).
        esr_ohm, insulation_ohm: From the sheet or a tag; None: by the style's law.
        can: Name of the multi-section part it belongs to, or "".
        span: Its card.
    """

    name: str
    nodes: tuple[str, str]
    role: Role
    role_text: str
    style: Style
    style_source: str
    value_F: float | None = field(metadata=unit("F"))
    rated_V: float | None = field(default=None, metadata=unit("V"))
    ripple_A: float | None = field(default=None, metadata=unit("A"))
    plus: int | None = None
    esr_ohm: float | None = field(default=None, metadata=unit("ohm"))
    insulation_ohm: float | None = field(default=None, metadata=unit("ohm"))
    can: str = ""
    span: Span


class Kind(StrEnum):
    """What a part other than a position is."""

    TUBE = "tube"
    RECTIFIER = "rectifier tube"
    RESISTOR = "resistor"
    WINDING = "winding"
    DIODE = "diode"
    TRANSISTOR = "transistor"
    FUSE = "fuse"
    CONTROL = "control"
    LOUDSPEAKER = "loudspeaker"


@dataclass(frozen=True, slots=True, kw_only=True)
class Part:
    """A part that can be a victim.

    Attributes:
        name: Full name of its element or instance.
        kind: What it is.
        type: Its registered type where known ("6V6GT"), else "".
        pins: Role of each pin to its flat node. A tube: plate, screen, grid, cathode, heater,
            suppressor, and plate2, grid2, cathode2, diode … for further units of one envelope;
            two-terminal parts: plus, minus (anode, cathode for a diode); transistors:
            collector, base, emitter or drain, gate, source.
        pins_source: How the pins were recognised, for `capstress check`.
        elements: Names of the flat elements that are the part.
        envelope: Name shared by the units of one glass, or the part's own name.
        limits: By stress name.
        value: Ohm of a resistor, henry of a winding, else None.
        resistance_ohm: DC resistance of a winding where the netlist shows it.
        irreplaceable: From the sheet; always true of windings that it names so.
        warm_up: "instant", "filament" or "cathode"; for tubes and rectifiers.
        contact: Whether the type biases itself by contact potential, so that positions at its
            grid are not judged by a model without it.
        span: Where it was written.
    """

    name: str
    kind: Kind
    type: str = ""
    pins: Mapping[str, str] = NOTHING
    pins_source: str = ""
    elements: tuple[str, ...] = ()
    envelope: str = ""
    limits: Mapping[str, Limit] = NOTHING
    value: float | None = None
    resistance_ohm: float | None = field(default=None, metadata=unit("ohm"))
    irreplaceable: bool = False
    warm_up: str = "instant"
    contact: bool = False
    span: Span


@dataclass(frozen=True, slots=True, kw_only=True)
class Line:
    """How the equipment is fed.

    Attributes:
        sources: Names of the V elements that stand for the mains; empty without a line.
        nominal_V, high_V, low_V: rms.
        assumed: What of this nobody stated, in words.
    """

    sources: tuple[str, ...] = ()
    nominal_V: float = field(default=0.0, metadata=unit("V"))
    high_V: float = field(default=0.0, metadata=unit("V"))
    low_V: float = field(default=0.0, metadata=unit("V"))
    assumed: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Use:
    """Another way to run the equipment, offered where the graph shows that it applies.

    Attributes:
        name: By which it is asked for.
        text, tests: What is done, and what that shows.
        open, pulled: Elements that are open and tubes that are out.
        silicon: Rectifier tubes that silicon diodes replace.
        muted: Sources that are silent.
        driven: Whether it runs with its signals where the equipment is asked for so.
        nominal_V, high_V: Of another line, rms; None: as the equipment is run.
    """

    name: str
    text: str
    tests: str
    open: tuple[str, ...] = ()
    pulled: tuple[str, ...] = ()
    silicon: tuple[str, ...] = ()
    muted: tuple[str, ...] = ()
    driven: bool = False
    nominal_V: float | None = field(default=None, metadata=unit("V"))
    high_V: float | None = field(default=None, metadata=unit("V"))


@dataclass(frozen=True, slots=True, kw_only=True)
class Circuit:
    """Everything the studies need, resolved; see `stress.circuit.build`.

    Attributes:
        netlist, sheet: What it was built from.
        name: Of the equipment.
        positions: In netlist order.
        parts: Tubes first, then resistors, windings, diodes and the rest, in netlist order.
        line: The mains.
        signals: Sources that are muted except in the condition `driven`.
        gates: Sources that gate a switch or that power is drawn from; never muted.
        period_s: The common period of the line and the gates; None: DC sources only.
        heaters: "parallel", "series" or "battery".
        ambient_degC: Around the chassis.
        touchable: Nodes a person can touch.
        line_connected: Nodes with a conducting path to the line that no winding breaks.
        findings: What is visible without solving.
        assumed: Everything assumed, in words, for the report.
        decisions: Which X was taken for one part and which for a block, and why, in words.
        uses: Other ways to run it that are on offer.
    """

    netlist: Netlist
    sheet: Sheet
    name: str
    positions: tuple[Position, ...]
    parts: tuple[Part, ...]
    line: Line
    signals: tuple[str, ...] = ()
    gates: tuple[str, ...] = ()
    period_s: float | None = field(default=None, metadata=unit("s"))
    heaters: str = "parallel"
    ambient_degC: float = field(default=40.0, metadata=unit("degC"))
    touchable: frozenset[str] = frozenset()
    line_connected: frozenset[str] = frozenset()
    findings: tuple[Finding, ...] = ()
    assumed: tuple[str, ...] = ()
    decisions: tuple[str, ...] = ()
    uses: tuple[Use, ...] = ()

    def position(self, name: str) -> Position:
        """Return the position of that name; KeyError where there is none."""
        return _named(self.positions, name)

    def part(self, name: str) -> Part:
        """Return the part of that name; KeyError where there is none."""
        return _named(self.parts, name)


_Thing = TypeVar("_Thing", Position, Part)


def _named(things: tuple[_Thing, ...], name: str) -> _Thing:
    """Return the thing of that name, whatever the case of its letters."""
    for thing in things:
        if thing.name.lower() == name.lower():
            return thing
    raise KeyError(name)
