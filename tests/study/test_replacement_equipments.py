"""Every reference equipment has a complete replacement list under every policy.

What the positions bear is taken as 80 % of their marked rating: the engine has tests of its
own, and completeness must not depend on it.
"""

from functools import cache
from pathlib import Path

import pytest

from stress import pipeline
from stress.parts import styles
from stress.parts.policy import policies
from stress.study import shopping
from stress.study.fitted import fitted
from stress.study.replacement import replacement
from stress.study.result import Condition, PositionStress, Working, Worst

NETLISTS = sorted((Path(__file__).parents[2] / "netlists").glob("*.cir"))


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


def replacements(circuit, policy):
    stresses = {p.name: borne(p) for p in circuit.positions}
    working = Working(
        conditions=(Condition(name="nominal", line_V=117.0),),
        positions={name: {"nominal": stress} for name, (_, stress) in stresses.items()},
        parts={},
    )
    return {
        p.name: replacement(
            p,
            working=working,
            worst=Worst(position=p.name, worst_V=stresses[p.name][0], condition="nominal"),
            policy=policy,
            circuit=circuit,
        )
        for p in circuit.positions
    }


def test_there_are_equipments_to_try():
    assert len(NETLISTS) >= 2
    assert len(policies()) >= 4


@pytest.mark.parametrize("path", NETLISTS, ids=lambda path: path.stem)
@pytest.mark.parametrize("policy", policies().values(), ids=lambda policy: policy.name)
def test_complete_under_every_policy(path, policy):
    circuit = load(path)
    found = replacements(circuit, policy)
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
