"""Limits of the reference equipments: no false alarm when healthy, nothing claimed without one."""

from dataclasses import replace
from pathlib import Path

import pytest

from stress.circuit.chain import Chains
from stress.circuit.circuit import Kind
from stress.engine.pool import Pool
from stress.judge.explain import explain
from stress.judge.findings import Results, healthy_over_limit
from stress.judge.risk import risks
from stress.parts.limit import Rating
from stress.study import conditions as stock
from stress.study.failures import failures
from stress.study.leakage import leakage
from stress.study.limits import limits
from stress.study.working import work
from stress.study.worst import worst

pytestmark = pytest.mark.ngspice

# Of each equipment a position whose leak or short strains something else.
STRAINING = {
    "shore_receiver": "C13",
    "harbour_midget": "C6",
    "hall_amplifier": "C12",
    "beacon_transmitter": "C5",
    "charthouse_smps": "C6",
}


def briefly(circuit):
    """Return the equipment with `nominal`, `high` and `cold` alone."""
    sheet = replace(
        circuit.sheet, conditions=(), equipment=replace(circuit.sheet.equipment, driven=False)
    )
    return replace(circuit, heaters="series", sheet=sheet)


@pytest.fixture(scope="module", params=STRAINING)
def own_pool(request):
    """A pool of its own for each: it remembers answers by the names of their cases."""
    with Pool() as workers:
        yield request.param, workers


@pytest.fixture(scope="module")
def healthy(equipment, own_pool):
    stem, pool = own_pool
    circuit = briefly(equipment(stem))
    return circuit, pool, work(circuit, solver=pool)


def test_healthy_at_high_line_no_design_centre_limit_alarms(healthy):
    """They allow for the spread of the line already: only `nominal` is judged by them."""
    circuit, _, found = healthy
    assert {"nominal", "high"} <= set(found.settled)
    results = Results(
        circuit=circuit, working=found.working, worst={}, leakage={}, failures={}, risks=()
    )
    assert [f.text for f in healthy_over_limit(results)] == []
    high = next(c for c in found.working.conditions if c.name == stock.HIGH)
    tubes = {p.name for p in circuit.parts if p.kind in (Kind.TUBE, Kind.RECTIFIER)}
    judged = limits(circuit, condition=high)
    assert all(
        limit.rating is not Rating.DESIGN_CENTRE
        for part in tubes & set(judged)
        for limit in judged[part].values()
    )


def test_some_tube_would_alarm_if_it_were_judged_so(equipment):
    """The output tube of the receiver passes its 12 W at 126 V of line, and not at 117 V."""
    circuit = briefly(equipment("shore_receiver"))
    with Pool() as pool:
        found = work(circuit, solver=pool).working.parts["XV4"]
    limit = circuit.part("XV4").limits["plate_W"]
    assert limit.rating is Rating.DESIGN_CENTRE
    assert found["nominal"]["plate_W"] < limit.value < found["high"]["plate_W"]


def test_nothing_is_claimed_where_no_limit_is_known(healthy):
    """With every limit taken away a leak and the failures name no victim; what they strain is
    named with the key of the sheet that would have it judged."""
    circuit, pool, found = healthy
    blank = replace(
        circuit,
        parts=tuple(replace(part, limits={}) for part in circuit.parts),
        positions=tuple(replace(p, rated_V=None, ripple_A=None) for p in circuit.positions),
    )
    position = blank.position(STRAINING[stem_of(circuit)])
    found = at_nominal(found)
    leaks = leakage(blank, [position], healthy=found, solver=pool)
    failed = failures(blank, [position], healthy=found, leakage=leaks, solver=pool)
    governing = leaks[position.name].governing
    assert all(one.critical_ohm is None for one in leaks[position.name].by_condition)
    assert governing.assumed_critical_ohm is None
    assert all(failure.victims == () for failure in failed[position.name])
    strained = [*governing.unjudged, *(u for f in failed[position.name] for u in f.unjudged)]
    assert strained
    for each in strained:
        kind = blank.part(each.part).kind
        assert each.stress > 1.4 * each.healthy
        assert f".{each.part}]" in each.key, each
        assert TABLES[kind] in each.key
    told = explained(blank, found, leaks, failed, position)
    (paragraph,) = [text for text in told if "no limit is known" in text]
    assert any(each.key in paragraph for each in strained)


def at_nominal(found):
    """Return the healthy equipment with faults studied at the nominal line alone."""
    return replace(found, settled={stock.NOMINAL: found.settled[stock.NOMINAL]})


def stem_of(circuit):
    return Path(circuit.netlist.path).stem


TABLES = {
    Kind.TUBE: "[tubes.",
    Kind.RECTIFIER: "[tubes.",
    Kind.RESISTOR: "[resistors.",
    Kind.WINDING: "[windings.",
    Kind.DIODE: "[diodes.",
    Kind.TRANSISTOR: "[transistors.",
    Kind.FUSE: "[fuses.",
    Kind.CONTROL: "[controls.",
    Kind.LOUDSPEAKER: "[loudspeakers.",
}


def explained(circuit, found, leaks, failed, position):
    worsts = worst(circuit, working=found.working)
    order = risks(circuit, worst=worsts, leakage=leaks, failures=failed)
    return explain(
        position,
        circuit=circuit,
        chains=Chains(circuit),
        working=found.working,
        worst=worsts.get(position.name),
        leakage=leaks[position.name],
        failures=failed[position.name],
        replacement=None,
        bench=None,
        risk=next(r for r in order if r.position == position.name),
    )


def test_with_its_limits_nothing_is_missing(healthy):
    """The sheets state what their faults strain."""
    circuit, pool, found = healthy
    position = circuit.position(STRAINING[stem_of(circuit)])
    leaks = leakage(circuit, [position], healthy=at_nominal(found), solver=pool)
    assert leaks[position.name].governing.unjudged == ()
