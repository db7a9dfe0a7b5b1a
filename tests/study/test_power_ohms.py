import pytest

from stress.engine.pool import Pool
from stress.pipeline import load
from stress.study.fault import Fault
from stress.study.power_ohms import NAME, ohm_probes, ohm_step, shorted
from stress.study.power_result import Danger
from stress.study.working import work

SUPPLY = """supply with a bleeder
Vline a n SIN(0 170 60)
Re n 0 1Meg
Rs a s 10
D1 s b RECT
Ck1 a n 0.1u
C1 b n 40u
Rf b c 470
C2 c n 20u
Rl c n 22k
.model RECT D(IS=1n RS=1)
.end
"""
SHEET = """
[equipment]
touchable = ["0"]
[capacitors.C1]
style = "aluminium"
[capacitors.C2]
style = "aluminium"
[capacitors.Ck1]
style = "paper"
"""


def danger(position, kind, ohm=None):
    return Danger(fault=Fault(position=position, kind=kind, ohm=ohm), victim=None, condition="high")


@pytest.fixture
def circuit(tmp_path):
    path = tmp_path / "supply.cir"
    path.write_text(SUPPLY)
    path.with_suffix(".toml").write_text(SHEET)
    return load(path)


@pytest.mark.parametrize(
    ("position", "kind", "ohm", "shows"),
    [
        ("C1", "short", None, True),
        ("C1", "leaky", 900.0, True),
        ("C1", "leaky", 5e3, False),  # an electrolytic may leak at working voltage only
        ("Ck1", "leaky", 5e3, True),  # paper conducts at any voltage
        ("Ck1", "leaky", 5e6, False),
        ("C1", "open", None, False),
    ],
)
def test_what_an_ohmmeter_shows(circuit, position, kind, ohm, shows):
    assert shorted(danger(position, kind, ohm), circuit.position(position)) is shows


@pytest.mark.ngspice
def test_readings_are_those_of_the_resistors(circuit):
    """At C2: 22 kohm; with C1 short 470 ohm in parallel; the plug is open but for Ck1's leak."""
    shorts = [danger("C1", "short"), danger("Ck1", "short")]
    probes = ohm_probes(circuit)
    with Pool(jobs=1) as pool:
        step = ohm_step(
            circuit,
            healthy=work(circuit, solver=pool),
            dangers=shorts,
            probes=probes,
            positions={p.name: p for p in circuit.positions},
            solver=pool,
        )
    assert step.name == NAME
    at_c = next(p.key for p in probes if p.node == "c")
    plug = next(p.key for p in probes if (p.node, p.against) == ("a", "n"))
    healthy = step.band(at_c)
    # measured against the common node: the bleeder and 1 Mohm in series
    assert healthy.value == pytest.approx(1.022e6, rel=0.01)
    first, second = step.seen
    assert first.values[at_c] == pytest.approx(1e6 + 470 * 22e3 / 22.47e3, rel=0.01)
    assert second.values[plug] == pytest.approx(0.1, abs=0.05)
    assert second.values[plug] < step.band(plug).low
