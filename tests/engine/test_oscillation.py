"""Stages that oscillate by themselves: found, named, quieted, and nothing else disturbed."""

import pytest

from stress.engine.case import Case, Settled
from stress.engine.oscillation import tanks

SUPPLY = "Vac a 0 SIN(0 200 50)\nRs a b 100\nD1 b bp DM\nC0 bp 0 47u\n.model DM D(IS=1n N=1.8)\n"
# A triode with its tank in the grid and a feedback winding in the plate, at 1.0 MHz.
STAGE = (
    "Rb bp t 10k\nCb t 0 0.1u\nLt t p 10u\nLg g 0 250u\nCg g 0 100p\nRg g 0 200k\n"
    "K1 Lt Lg {coupling}\nB1 p 0 I=1m*pow(max(V(g)+V(p)/30,0),1.5)\n"
)


@pytest.fixture
def stage(twin_of):
    def make(coupling):
        return twin_of(SUPPLY + STAGE.replace("{coupling}", str(coupling)), period_s=0.02)

    return make


def test_tanks_are_found_with_what_drives_them(stage):
    (tank,) = tanks(stage(0.2).elements, above_Hz=1e4)

    assert tank.inductor == "Lg"
    assert tank.capacitors == ("Cg",)
    assert tank.couplings == ("K1",)
    assert tank.frequency_Hz == pytest.approx(1.007e6, rel=1e-3)  # 1/(2 pi sqrt(LC))
    assert tanks(stage(0.2).elements, above_Hz=2e6) == ()


@pytest.mark.ngspice
@pytest.mark.parametrize(("coupling", "loud"), [(0.2, True), (-0.2, False), (0.001, False)])
def test_only_what_grows_is_quieted(stage, pool, coupling, loud):
    """Feedback of the right sense and size grows; the other sense and a trace of it do not."""
    root = Case(name=f"stage {coupling}", twin=stage(coupling))
    child = Case(name=f"{root.name} high", twin=root.twin, parent=root.name, values={"Vac": 1.1})
    answer, relative = list(pool.solve([root, child]))

    assert isinstance(answer, Settled)
    assert isinstance(relative, Settled)
    assert any("oscillates by itself at about 1.01e+06 Hz" in n for n in answer.notices) == loud
    assert relative.waves.mean(relative.waves.voltage("bp")) > answer.waves.mean(
        answer.waves.voltage("bp")
    )
