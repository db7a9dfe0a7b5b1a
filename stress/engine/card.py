"""One flat element to one card of an ngspice deck: safe names, plain numbers, no electricity."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from stress.engine.tree import everything, inner, rebuilt
from stress.netlist.expression import Current, Expression, Voltage
from stress.netlist.expression_text import expression_text
from stress.netlist.flat import Element, Model, Wave

LEAST_OHM = 1e-3  # ngspice puts the same in place of a resistance of 0
METER = "#sense"  # ending of the name of a 0 V source in series
_SENSED = frozenset("VLEH")


def number(value: float) -> str:
    """Return a number as decks carry it: no suffix, every digit."""
    return repr(float(value))


@dataclass(frozen=True, slots=True)
class Names:
    """Names of a deck for those of the netlist; ngspice tells no case apart and knows few signs.

    Attributes:
        nodes, devices, models: By lower-case name of the netlist.
    """

    nodes: Mapping[str, str]
    devices: Mapping[str, str]
    models: Mapping[str, str]

    def node(self, name: str) -> str:
        """Return a node's name in the deck."""
        return self.nodes[name.lower()]

    def device(self, name: str) -> str:
        """Return an element's name in the deck."""
        return self.devices[name.lower()]

    def branch(self, name: str) -> str:
        """Return the device whose branch carries an element's current: its meter, or itself."""
        return self.devices.get(name.lower() + METER) or self.devices[name.lower()]


def name_all(elements: Iterable[Element], models: Mapping[str, Model]) -> Names:
    """Give every node, element and model a name of its own."""
    nodes: dict[str, str] = {"0": "0"}
    devices: dict[str, str] = {}
    for element in elements:
        devices[element.name.lower()] = f"{_letter(element)}{len(devices) + 1}"
        read: list[str] = []
        if element.law is not None:
            for each in everything(element.law.expression):
                if isinstance(each, Voltage):
                    read += [each.plus, each.minus]
        for node in (*element.nodes, *read):
            nodes.setdefault(node.lower(), f"n{len(nodes)}")
    kinds = {key.lower(): f"m{at}" for at, key in enumerate(models, start=1)}
    return Names(nodes, devices, kinds)


def sensed(elements: Iterable[Element]) -> frozenset[str]:
    """Return the lower-case names of the elements whose current something depends on."""
    found: set[str] = set()
    for element in elements:
        if element.letter in "FHW":
            found.update(name.lower() for name in element.controls)
        if element.law is not None:
            found.update(
                each.element.lower()
                for each in everything(element.law.expression)
                if isinstance(each, Current)
            )
    return frozenset(found)


def needs_meter(element: Element) -> bool:
    """Whether the current of an element can only be sensed through a source in series."""
    if element.letter == "B":
        return element.law is None or element.law.quantity != "V"
    return element.letter not in _SENSED


def card(element: Element, names: Names, *, value: float | None, wave: Wave | None = None) -> str:
    """Return the card of an element.

    Args:
        element: What to write.
        names: The names of the deck.
        value: Its ohm, farad, henry, coupling, gain, volts or amperes in this case.
        wave: The time function in this case, for V and I.
    """
    words = [names.device(element.name), *(names.node(node) for node in element.nodes)]
    letter = element.letter
    if element.law is not None and value is None:
        words.append(_behaviour(element, names))
    elif letter in "VI":
        words += ["dc", number(value or 0.0)]
        if wave is not None:
            words.append(_wave(wave))
    elif letter == "K":
        words += [names.device(inductor) for inductor in element.controls]
        words.append(number(value or 0.0))
    elif letter in "FH":
        words += [names.branch(element.controls[0]), number(value or 0.0)]
    elif letter == "W":
        words += [names.branch(element.controls[0]), names.models[element.model.lower()]]
        words += _flags(element)
    elif letter == "R":
        ohm = LEAST_OHM if value == 0.0 else value
        words += [*_valued(element, names, ohm), *_named(element)]
    elif letter in "CL":
        words += [*_valued(element, names, value), *_named(element)]
    elif letter in "EG":
        words.append(number(value or 0.0))
    elif letter == "T":
        words += _named(element)
    else:
        words += [names.models[element.model.lower()], *_named(element), *_flags(element)]
    return " ".join(words)


def model_card(model: Model, name: str) -> str:
    """Return a `.model` card; of the words only the polarity of a power MOSFET counts."""
    parameters = []
    for key, value in model.parameters.items():
        if isinstance(value, str):
            if key in ("pchan", "nchan"):
                parameters.append(key)
        elif key in ("pchan", "nchan"):
            parameters.append(key)
        else:
            parameters.append(f"{key}={number(value)}")
    return f".model {name} {model.kind}({' '.join(parameters)})"


def _letter(element: Element) -> str:
    if element.law is not None and element.letter in "EFGH":
        return "b"
    return element.letter.lower()


def _valued(element: Element, names: Names, value: float | None) -> list[str]:
    if value is not None:
        return [number(value)]
    return [names.models[element.model.lower()]]


_SILENT = frozenset({"ic", "on", "off", "ac", "noiseless", "rser", "rpar", "cpar", "lser"})


def _named(element: Element) -> list[str]:
    return [f"{k}={number(v)}" for k, v in element.parameters.items() if k not in _SILENT]


def _flags(element: Element) -> list[str]:
    return [flag for flag in ("on", "off") if element.parameters.get(flag)]


def _wave(wave: Wave) -> str:
    text = f"{wave.kind}({' '.join(number(value) for value in wave.values)})"
    if wave.kind == "pwl" and wave.repeat_from_s is not None:
        text += f" r={number(wave.repeat_from_s)}"
    return text


def _behaviour(element: Element, names: Names) -> str:
    assert element.law is not None
    text = expression_text(_renamed(element.law.expression, names))
    quantity = element.law.quantity.lower()
    if element.letter in "RCL":
        return f"{quantity}='{text}'"
    return f"{quantity}={text}"


def _renamed(expression: Expression, names: Names) -> Expression:
    """Return an expression with the names of the deck."""
    match expression:
        case Voltage(plus, minus):
            return Voltage(names.node(plus), names.node(minus))
        case Current(element):
            return Current(names.branch(element))
        case _:
            return rebuilt(expression, [_renamed(part, names) for part in inner(expression)])
