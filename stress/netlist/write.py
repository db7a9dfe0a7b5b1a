"""A flat netlist as text that `read_text` reads back to the same circuit and ngspice simulates.

Each card begins with its letter and a dot, then the full name ("R.X3.R5"); the mark on the
second line tells the reader so. What ngspice does not know of a capacitor (rating, ripple, style,
series resistance) stands in comments that the reader of a marked text takes up again.
"""

from __future__ import annotations

from collections.abc import Mapping

from stress.netlist.expression import (
    Binary,
    Call,
    Conditional,
    Current,
    Expression,
    Unary,
)
from stress.netlist.expression_text import expression_text
from stress.netlist.flat import Element, Model, Netlist, Wave
from stress.netlist.flattened import MARK, TAGS
from stress.netlist.modelcard import MESHED


def write(netlist: Netlist) -> str:
    """Return the text of a flat netlist.

    Args:
        netlist: Without obstacles in what matters: an element whose model or value is missing
            is written without it.
    """
    lines = [f"* {netlist.title}", MARK]
    letters = {element.name.lower(): element.letter for element in netlist.elements}
    used = {element.model for element in netlist.elements}
    lines += [_model(model) for key, model in netlist.models.items() if key in used]
    for element in netlist.elements:
        lines.append(_card(element, letters))
        tags = _tags(element)
        if tags:
            lines.append(f"{TAGS}{element.letter}.{element.name} {tags}")
    if netlist.initial_V:
        lines += [f".ic v({node})={value!r}" for node, value in netlist.initial_V.items()]
    for name, option in netlist.options.items():
        lines.append(f".options {name}={option if isinstance(option, str) else repr(option)}")
    if netlist.temperature_degC != 27.0:
        lines.append(f".temp {netlist.temperature_degC!r}")
    lines.append(".end")
    return "\n".join(lines) + "\n"


def _model(model: Model) -> str:
    if model.kind in MESHED:
        return f".model {model.name} {model.kind} {model.parameters['text']}"
    told = " ".join(
        f"{name}={value if isinstance(value, str) else repr(value)}"
        for name, value in model.parameters.items()
    )
    return f".model {model.name} {model.kind}({told})"


def _tags(element: Element) -> str:
    tags = element.tags
    told = (
        ("v", tags.rated_V),
        ("irms", tags.ripple_A),
        ("type", tags.style),
        ("rser", tags.esr_ohm),
    )
    return " ".join(
        f"{key}={value if isinstance(value, str) else repr(value)}"
        for key, value in told
        if value is not None
    )


def _card(element: Element, letters: Mapping[str, str]) -> str:
    words = [f"{element.letter}.{element.name}", *element.nodes]
    words += [f"{letters.get(name.lower(), 'V')}.{name}" for name in element.controls]
    if element.law is not None:
        text = expression_text(_lettered(element.law.expression, letters))
        quantity = element.law.quantity
        words.append(f"{quantity}={text}" if element.letter == "B" else f"{quantity}='{text}'")
    if element.model:
        words.append(element.model)
    if element.value is not None:
        words.append(repr(element.value))
    if element.wave is not None:
        words.append(_wave(element.wave))
    for name, value in element.parameters.items():
        if name in ("on", "off", "thermal"):
            words.append(name)
        else:
            words.append(f"{name}={value!r}")
    return " ".join(words)


def _wave(wave: Wave) -> str:
    text = f"{wave.kind}({' '.join(repr(value) for value in wave.values)})"
    return text if wave.repeat_from_s is None else f"{text} r={wave.repeat_from_s!r}"


def _lettered(part: Expression, letters: Mapping[str, str]) -> Expression:
    """Return the expression with the letters before the names of its currents."""
    if isinstance(part, Current):
        return Current(f"{letters.get(part.element.lower(), 'V')}.{part.element}")
    if isinstance(part, Binary):
        return Binary(part.operator, _lettered(part.left, letters), _lettered(part.right, letters))
    if isinstance(part, Call):
        return Call(part.function, tuple(_lettered(a, letters) for a in part.arguments))
    if isinstance(part, Unary):
        return Unary(part.operator, _lettered(part.operand, letters))
    if isinstance(part, Conditional):
        return Conditional(
            _lettered(part.test, letters),
            _lettered(part.yes, letters),
            _lettered(part.no, letters),
        )
    return part
