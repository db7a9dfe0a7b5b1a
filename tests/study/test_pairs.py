"""Two faults at once on a node with a closed form.

300 V reaches a resistor through the leaks of C1 and C2 side by side. With 1 MΩ each and 470 kΩ
to ground the node stands at 300 · 470/1470 = 95.9 V with one, 300 · 470/970 = 145.4 V with both:
19.6 mW and 45.0 mW in the resistor.
"""

import pytest

from stress.circuit.build import build
from stress.circuit.chain import Chains
from stress.engine.case import Unsolved
from stress.engine.pool import Pool
from stress.judge.findings import Results, two_faults, without_number
from stress.judge.pair import named, pair_text, pair_texts
from stress.netlist.read import read_text
from stress.parts import read_sheet
from stress.report.pair_document import pairs_document
from stress.study.likelihood import likelihood
from stress.study.pairs import pairs
from stress.study.working import work

pytestmark = pytest.mark.ngspice

NODE = """Two capacitors into one node
V1 b 0 DC 300
C1 b g 20n
C2 b g 20n
R2 g 0 {ohm}
.end
"""
SHEET = """[capacitors.C1]
style = "paper"
[capacitors.C2]
style = "paper"
[resistors.R2]
power = "{power}"
{more}
"""


def circuit_of(*, power="30 mW", ohm="470k", more=""):
    sheet = read_sheet.read_text(SHEET.format(power=power, more=more), path="s.toml")
    return build(read_text(NODE.format(ohm=ohm)), sheet)


@pytest.fixture
def pool():  # one a circuit: a pool remembers answers by the names of their cases
    with Pool(jobs=1) as workers:
        yield workers


@pytest.fixture
def tried(pool):
    def run(circuit, count=1, solver=pool):
        healthy = work(circuit, solver=pool)
        return pairs(
            circuit, circuit.positions, healthy=healthy, leakage={}, count=count, solver=solver
        )

    return run


def test_a_limit_that_only_both_pass(tried):
    circuit = circuit_of()
    found = tried(circuit)
    (pair,) = found.found
    assert [str(fault) for fault in pair.faults] == ["C1 leaky 1 MΩ", "C2 leaky 1 MΩ"]
    (hit,) = pair.victims
    assert (hit.victim.part, hit.victim.quantity) == ("R2", "power_W")
    assert hit.victim.stress == pytest.approx(145.36**2 / 470e3, rel=1e-3)
    assert hit.alone == (pytest.approx(95.92**2 / 470e3, rel=1e-3),) * 2
    shares = [likelihood(circuit, p, "leaky") for p in circuit.positions]
    assert pair.likelihood == pytest.approx(shares[0] * shares[1])


@pytest.mark.parametrize(
    ("power", "ohm", "count"),
    [
        ("30 mW", "470k", 1),
        ("50 mW", "470k", 0),  # neither passes it together
        ("15 mW", "470k", 1),  # each alone does, both 2.3 times as far
        # 47 MΩ: 293.8 V with one, 296.8 V with both, 1.02 times as far: said of each alone
        ("1.5 mW", "47meg", 0),
    ],
)
def test_only_what_neither_does_alone_is_told(tried, power, ohm, count):
    assert len(tried(circuit_of(power=power, ohm=ohm)).found) == count


def test_no_more_pairs_than_asked_for_the_likeliest_first(tried):
    found = tried(circuit_of(), count=4)
    assert (found.asked, len(found.tried)) == (4, 4)
    assert found.possible > 4
    likely = [pair.likelihood for pair in found.tried]
    assert likely == sorted(likely, reverse=True)
    assert all(p.faults[0].position != p.faults[1].position for p in found.tried)


def test_sections_of_one_can_fail_together(tried):
    can = '[cans.K1]\nsections = ["C1", "C2"]\ncommon = "g"\n'
    apart, together = tried(circuit_of(), 20), tried(circuit_of(more=can), 20)  # solved alike

    def open_open(found):
        return next(
            p.likelihood for p in found.tried if [f.kind for f in p.faults] == ["open", "open"]
        )

    assert open_open(together) > 5.0 * open_open(apart)


class Failing:
    """A solver that leaves one case without a number."""

    def __init__(self, solver, name):
        self.solver, self.name = solver, name

    def solve(self, cases):
        asked = list(cases)
        for case, answer in zip(asked, self.solver.solve(asked), strict=True):
            gone = case.name == self.name
            yield Unsolved(case=case.name, reason="lost on purpose") if gone else answer


@pytest.mark.parametrize(
    "name",
    ["nominal / C1 leaky 1 MΩ and C2 leaky 1 MΩ", "nominal / C2 leaky 1 MΩ, alone"],
)
def test_error_a_pair_without_a_number_is_counted_and_shown(tried, pool, name):
    circuit = circuit_of()
    found = tried(circuit, solver=Failing(pool, name))
    assert found.found == ()
    (pair,) = found.unsolved
    assert pair.unanswered[0].case == name
    summary, lost = pair_texts(found, circuit)
    assert "1 not solved" in summary
    assert "unsolved" in lost
    told = [f.text for f in without_number(results(circuit, found))]
    assert any("lost on purpose" in text for text in told)


def results(circuit, found):
    with Pool(jobs=1) as workers:
        working = work(circuit, solver=workers).working
    return Results(
        circuit=circuit, working=working, worst={}, leakage={}, failures={}, risks=(), pairs=found
    )


def test_in_words_and_as_a_document(tried):
    circuit = circuit_of()
    found = tried(circuit)
    (pair,) = found.found
    assert named(pair) == "C1 leaky 1 MΩ and C2 leaky 1 MΩ"
    text = pair_text(pair, Chains(circuit))
    assert "R2" in text
    assert "C1 leaky alone 19.6 mW, C2 leaky alone 19.6 mW" in text
    (told,) = two_faults(results(circuit, found))
    assert told.where == "R2"
    assert "together" in told.text
    document = pairs_document(found)
    assert (document["tried"], document["unsolved"]) == (1, 0)
    assert document["found"][0]["victims"][0]["limit"] == 0.03
    assert document["faults"][0] == {"position": "C1", "fault": "leaky", "leak_ohm": 1e6}
    assert not list(two_faults(results(circuit, None)))
