"""What silicon instead of a rectifier tube asks for: a resistor that drops what the tube did."""

from __future__ import annotations

from collections.abc import Iterator

from stress.circuit.circuit import Circuit, Part
from stress.circuit.graph import Pin, cathode_of
from stress.circuit.joined import GROUND
from stress.finding import Finding, Severity
from stress.parts.series import nearest
from stress.study import conditions as stock
from stress.study.result import Condition, Working
from stress.text.figure import figure

LEAST_V = 3.0  # less is within the spread of the line
POWER_MARGIN = 2.0  # on the power of a resistor (common practice)
SERIES = "E12"


def series_resistors(circuit: Circuit, working: Working) -> Iterator[Finding]:
    """Yield a note for every rectifier that silicon replaces in a usual condition.

    The resistor is the voltage that is too much over the direct current of the tube: a first
    guess, since it carries pulses (common practice).
    """
    for condition in working.conditions:
        if condition.cold or condition.factor != 1.0 or not condition.silicon:
            continue
        by_node: dict[str, list[str]] = {}
        for name in condition.silicon:
            for node in _cathodes(circuit.part(name)):
                by_node.setdefault(node, []).append(name)
        for node, names in by_node.items():
            amps = sum(
                working.parts.get(name, {}).get(stock.NOMINAL, {}).get("average_A", 0.0)
                for name in names
            )
            volts = working.nodes.get(node, {})
            was, now = volts.get(stock.NOMINAL), volts.get(condition.name)
            if was is None or now is None or amps <= 0.0 or abs(now) - abs(was) < LEAST_V:
                continue
            yield _resistor(names, condition, was_V=was, now_V=now, amps=amps)


def _cathodes(part: Part) -> list[str]:
    """Return the nodes of a rectifier's cathodes, ground left out."""
    found = [cathode_of(part, pin) for pin in part.pins if Pin(part.name, pin).kind == "output"]
    return list(dict.fromkeys(node for node in found if node is not None and node != GROUND))


def _resistor(
    names: list[str], condition: Condition, *, was_V: float, now_V: float, amps: float
) -> Finding:
    ohm = nearest((abs(now_V) - abs(was_V)) / amps, SERIES)
    watts = figure(POWER_MARGIN * amps**2 * ohm, "W", digits=2)
    return Finding(
        severity=Severity.NOTE,
        where=names[0],
        condition=condition.name,
        text=f"with silicon the supply behind {' and '.join(names)} stands at "
        f"{figure(now_V, 'V')} instead of {figure(was_V, 'V')}; about {figure(ohm, 'ohm')}, "
        f"{watts}, in series takes that away. A first guess, since it carries pulses: measure. "
        "While the tubes are cold it takes nothing away.",
        rule="silicon-resistor",
    )
