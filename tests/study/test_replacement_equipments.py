"""Every reference equipment has a complete replacement list under every policy.

The two that settle in a few seconds are simulated, healthy, in all their conditions. In the
others every position is taken to bear 80 % of its marked rating: completeness must not depend
on how long a simulation takes.
"""

from functools import cache
from pathlib import Path

import pytest

from stress import pipeline
from stress.engine.pool import Pool
from stress.parts import styles
from stress.parts.policy import policies
from stress.study import shopping
from stress.study.fitted import fitted
from stress.study.replacement import replacement
from stress.study.result import Condition, PositionStress, Working, Worst
from stress.study.working import work
from stress.study.worst import worst

NETLISTS = sorted((Path(__file__).parents[2] / "netlists").glob("*.cir"))
SIMULATED = ("harbour_midget", "charthouse_smps")


@cache
def load(path):
    return pipeline.load(path)


def borne(position):
    volts = 0.8 * (position.rated_V or 100.0)
    return volts, PositionStress(
        case="nominal",
        dc_V=0.9 * volts,
        peak_V=volts,
        reverse_V=0.0 if position.style.polar else None,
        ripple_pp_V=0.2 * volts,
        ripple_rms_A=0.01,
        esr_loss_W=0.0,
        error_V=0.0,
        ripple_Hz=120.0,
    )


def by_share(circuit):
    stresses = {p.name: borne(p) for p in circuit.positions}
    working = Working(
        conditions=(Condition(name="nominal", line_V=117.0),),
        positions={name: {"nominal": stress} for name, (_, stress) in stresses.items()},
        parts={},
    )
    worsts = {
        name: Worst(position=name, worst_V=volts, condition="nominal")
        for name, (volts, _) in stresses.items()
    }
    return working, worsts


@cache
def simulated(path):
    with Pool(jobs=1) as pool:
        working = work(load(path), solver=pool).working
    assert working.unanswered == ()
    return working, worst(load(path), working=working)


def replacements(circuit, policy, *, working, worsts):
    return {
        p.name: replacement(
            p, working=working, worst=worsts[p.name], policy=policy, circuit=circuit
        )
        for p in circuit.positions
    }


def test_there_are_equipments_to_try():
    assert len(NETLISTS) >= 2
    assert len(policies()) >= 4
    assert {path.stem for path in NETLISTS} > set(SIMULATED)


@pytest.mark.parametrize("path", NETLISTS, ids=lambda path: path.stem)
@pytest.mark.parametrize("policy", policies().values(), ids=lambda policy: policy.name)
def test_complete_under_every_policy(path, policy):
    circuit = load(path)
    working, worsts = by_share(circuit)
    found = replacements(circuit, policy, working=working, worsts=worsts)
    is_complete(found, circuit)


@pytest.mark.ngspice
@pytest.mark.parametrize("stem", SIMULATED)
@pytest.mark.parametrize("policy", policies().values(), ids=lambda policy: policy.name)
def test_complete_for_what_is_simulated(stem, policy):
    path = next(path for path in NETLISTS if path.stem == stem)
    circuit = load(path)
    working, worsts = simulated(path)
    found = replacements(circuit, policy, working=working, worsts=worsts)
    is_complete(found, circuit)
    for name, part in found.items():
        if part.safety_class is not None:
            continue  # rated in rms volts of the line
        whole_V = part.rated_V * (part.quantity if "in series" in part.arrangement else 1)
        assert whole_V >= worsts[name].worst_V, name
        # What stands reversed has no polarity afterwards, whatever the policy.
        turned = (worsts[name].reverse_V or 0.0) > 1.0
        assert not (
            turned and styles.find(part.style).polar and "minus to minus" not in part.arrangement
        ), name


def is_complete(found, circuit):
    assert found.keys() == {p.name for p in circuit.positions}
    for position in circuit.positions:
        part = found[position.name]
        assert part.value_F > 0.0
        assert part.rated_V is not None
        assert part.rated_V in styles.find(part.style).steps.rated_V
        assert part.reason
        assert part.rules  # by which line of which document
        whole_V = part.rated_V * (part.quantity if "in series" in part.arrangement else 1)
        reached = (position.rated_V or 0.0) <= whole_V or part.safety_class is not None
        assert reached or any("below the old part's" in note for note in part.notes)
    listed = shopping.rows(found, circuit=circuit)
    assert {name for row in listed for name in row.designators} == found.keys()
    assert len(fitted(circuit, found).positions) == len(circuit.positions)
