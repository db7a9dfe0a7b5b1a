"""The expanded netlist: every element by its full name, every value a plain SI float."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import Any, NoReturn

from stress.finding import Finding
from stress.netlist.expression import Expression
from stress.text.span import SourceError, Span
from stress.text.unit import unit


class Nothing(Mapping[str, Any]):
    """A mapping that holds nothing and is hashable, as a default of a record must be."""

    __slots__ = ()

    def __getitem__(self, key: str) -> NoReturn:
        raise KeyError(key)

    def __iter__(self) -> Iterator[str]:
        return iter(())

    def __len__(self) -> int:
        return 0

    def __hash__(self) -> int:
        return 0

    def __repr__(self) -> str:
        return "{}"


NOTHING = Nothing()


@dataclass(frozen=True, slots=True)
class Wave:
    """What an independent source does over time.

    Attributes:
        kind: "sin", "pulse", "pwl", "exp", "sffm" or "am".
        values: The numbers of that kind in the order of the ngspice manual, SI; for "pwl"
            time and value in turn. Missing trailing values are left out.
        repeat_from_s: For "pwl": the time from which the points repeat, or None.
    """

    kind: str
    values: tuple[float, ...]
    repeat_from_s: float | None = None


@dataclass(frozen=True, slots=True)
class Law:
    """What a behavioural element computes: quantity "V", "I", "R", "C", "L" or "Q"."""

    quantity: str
    expression: Expression


@dataclass(frozen=True, slots=True)
class Tags:
    """What a capacitor's card says about the part beyond its value; None where silent."""

    rated_V: float | None = field(default=None, metadata=unit("V"))
    ripple_A: float | None = field(default=None, metadata=unit("A"))
    style: str | None = None
    esr_ohm: float | None = field(default=None, metadata=unit("ohm"))


@dataclass(frozen=True, slots=True, kw_only=True)
class Element:
    """One primitive of the flat circuit.

    Attributes:
        name: Full name with the case of the netlist, "R5" or "X3.R5".
        letter: Kind, upper case: R C L K V I D Q J M Z S W T, B for a behavioural source,
            E F G H for a linear controlled one (POLY, VALUE and TABLE forms become B).
        nodes: Flat node names, lower case; "0" is ground; "x3.7" is inside X3. Empty for K.
        value: Ohm, farad, henry, coupling or gain; DC volts or amperes for V and I; None where
            the value is a placeholder, behavioural, or set by the model.
        model: Name of an entry in `Netlist.models`, or "".
        parameters: Further numbers by lower-case name (area, m, off, tc1, td, z0 …).
        controls: For E and G the two controlling nodes are in `nodes`[2:]; here stand the
            inductors of a K, the sensed source of F, H and W.
        wave: For V and I with a time function.
        law: For B, and for behavioural R, C and L.
        tags: For C.
        inside: Full name of the innermost instance that holds it, or "".
        span: Where it was written.
    """

    name: str
    letter: str
    nodes: tuple[str, ...]
    value: float | None = None
    model: str = ""
    parameters: Mapping[str, float] = NOTHING
    controls: tuple[str, ...] = ()
    wave: Wave | None = None
    law: Law | None = None
    tags: Tags = Tags()
    inside: str = ""
    span: Span


@dataclass(frozen=True, slots=True, kw_only=True)
class Model:
    """A `.model` as used: numbers by lower-case name; a word keeps its text."""

    name: str
    kind: str  # lower case: d npn pnp njf pjf nmos pmos vdmos sw csw r c l …
    parameters: Mapping[str, float | str]
    span: Span


@dataclass(frozen=True, slots=True, kw_only=True)
class Instance:
    """One X of the netlist, with what it was expanded from.

    Attributes:
        name: Full name, "XU2" or "X3.XU2".
        subcircuit: Name of the subcircuit as the card writes it.
        pins: Formal pin names of the subcircuit, as written.
        nodes: Flat nodes connected to them, same order.
        inside: Full name of the instance that holds it, or "".
        built_in: Whether the body came from this program's part table.
        body: What the subcircuit is made of: the letters of its elements at any depth.
        span: The X card.
    """

    name: str
    subcircuit: str
    pins: tuple[str, ...]
    nodes: tuple[str, ...]
    inside: str = ""
    built_in: bool = False
    body: frozenset[str] = frozenset()
    span: Span


@dataclass(frozen=True, slots=True)
class Ignored:
    """A card that was read and set aside, with the reason."""

    what: str
    span: Span


@dataclass(frozen=True, slots=True, kw_only=True)
class Netlist:
    """A whole flat netlist.

    Attributes:
        path: The file, as the user named it.
        title: The first line, where it is a title.
        dialect: "default", "ps", "lt" or "hs": whose meaning was given to the text.
        elements: In file order, those of an instance where its X stood.
        models: By the key that `Element.model` holds.
        instances: Every X, outer before inner.
        initial_V: `.ic` by flat node.
        options: `.options` by lower-case name, numbers where they are numbers.
        temperature_degC: `.temp`, or 27.
        ignored: Analysis cards, `.control` blocks and the like.
        notices: How a trap or an unusual spelling was read.
        obstacles: What prevents a simulation (missing include or model, a part that is no
            SPICE device …), each with its place; empty when it can be simulated.
    """

    path: str
    title: str
    dialect: str = "default"
    elements: tuple[Element, ...]
    models: Mapping[str, Model] = NOTHING
    instances: tuple[Instance, ...] = ()
    initial_V: Mapping[str, float] = NOTHING
    options: Mapping[str, float | str] = NOTHING
    temperature_degC: float = field(default=27.0, metadata=unit("degC"))
    ignored: tuple[Ignored, ...] = ()
    notices: tuple[Finding, ...] = ()
    obstacles: tuple[SourceError, ...] = ()
