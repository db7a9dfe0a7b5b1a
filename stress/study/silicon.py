"""The resistor that makes up for a rectifier tube where silicon replaces it, tried in place.

It carries pulses, so that voltage over direct current would give twice of it and more; it is
found by trying, and a preferred value is taken and tried as well.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from stress.circuit.circuit import Circuit
from stress.circuit.joined import GROUND
from stress.engine.case import Case, Settled
from stress.engine.solver import Solver
from stress.parts.series import nearest
from stress.study import conditions as stock
from stress.study.plan import Plan, run
from stress.study.result import Condition
from stress.study.rewired import joints
from stress.study.working import Healthy
from stress.text.unit import unit

LEAST_V = 3.0  # less is within the spread of the line
CLOSE = 0.01  # of the voltage
TRIES = 6
FIRST_SHARE = 0.5  # of voltage over direct current
VALUES = "E12"


@dataclass(frozen=True, slots=True, kw_only=True)
class SeriesResistor:
    """What to put in series with the diodes that replace the tubes of one supply.

    Attributes:
        tubes: Names of the rectifiers.
        tube_V, silicon_V: The supply behind them at the usual line, with tube and silicon.
        ohm: A preferred value.
        with_V: The supply with that resistor.
        power_W: Mean power in it.
    """

    tubes: tuple[str, ...]
    tube_V: float = field(metadata=unit("V"))
    silicon_V: float = field(metadata=unit("V"))
    ohm: float = field(metadata=unit("ohm"))
    with_V: float = field(metadata=unit("V"))
    power_W: float = field(metadata=unit("W"))


def series_resistors(
    circuit: Circuit, *, healthy: Healthy, solver: Solver
) -> tuple[SeriesResistor, ...]:
    """Return the resistor of every supply whose rectifier tubes a usual condition replaces."""
    plans = [
        _search(circuit, healthy, condition, node, behind)
        for condition in healthy.working.conditions
        if condition.silicon and not condition.cold and condition.factor == 1.0
        if condition.name in healthy.settled and stock.NOMINAL in healthy.settled
        for node, behind in _supplies(circuit, condition).items()
    ]
    return tuple(found for found in run(plans, solver=solver) if found is not None)


def _supplies(circuit: Circuit, condition: Condition) -> Mapping[str, tuple[tuple[str, str], ...]]:
    """Return, by the node of their cathodes, the replaced rectifiers with the resistors behind
    their diodes; ground left out."""
    found: dict[str, tuple[tuple[str, str], ...]] = {}
    for name in condition.silicon:
        for node, joint in joints(circuit.part(name)).items():
            if node != GROUND:
                found[node] = (*found.get(node, ()), (name, joint))
    return found


def _search(
    circuit: Circuit,
    healthy: Healthy,
    condition: Condition,
    node: str,
    behind: tuple[tuple[str, str], ...],
) -> Plan[SeriesResistor | None]:
    """Plan the search: secants inside the bracket, then the preferred value itself."""
    nodes = healthy.working.nodes.get(node, {})
    tube_V, silicon_V = nodes[stock.NOMINAL], nodes[condition.name]
    amps = sum(
        healthy.working.parts.get(name, {}).get(stock.NOMINAL, {}).get("average_A", 0.0)
        for name, _ in behind
    )
    if amps <= 0.0 or silicon_V - tube_V < LEAST_V:
        return None
    low, low_V = 0.0, silicon_V
    ohm = FIRST_SHARE * (silicon_V - tube_V) / amps
    for _ in range(TRIES):
        (answer,) = yield (_case(circuit, healthy, condition, behind, ohm),)
        if not isinstance(answer, Settled):
            return None
        volts = answer.waves.mean(answer.waves.voltage(node))
        if abs(volts - tube_V) < CLOSE * abs(tube_V) or volts >= low_V:
            break
        # The drop grows less than in proportion, so that a secant from below never overshoots.
        slope = (low_V - volts) / (ohm - low)
        if volts > tube_V:
            low, low_V = ohm, volts
        ohm = max(ohm + (volts - tube_V) / slope, 0.5 * ohm)
    preferred = nearest(ohm, VALUES)
    (answer,) = yield (_case(circuit, healthy, condition, behind, preferred),)
    if not isinstance(answer, Settled):
        return None
    waves = answer.waves
    across = [waves.voltage(joint.lower(), node) for _, joint in behind]
    return SeriesResistor(
        tubes=tuple(name for name, _ in behind),
        tube_V=tube_V,
        silicon_V=silicon_V,
        ohm=preferred,
        with_V=waves.mean(waves.voltage(node)),
        power_W=sum(waves.mean(volts * volts) for volts in across) / preferred,
    )


def _case(
    circuit: Circuit,
    healthy: Healthy,
    condition: Condition,
    behind: tuple[tuple[str, str], ...],
    ohm: float,
) -> Case:
    ohm = float(f"{ohm:.4g}")
    return stock.case(
        circuit,
        condition,
        twin=healthy.twin,
        name=f"{condition.name} / {' and '.join(joint for _, joint in behind)} of {ohm:g} ohm",
        parent=condition.name,
        values={joint: ohm for _, joint in behind},
    )
