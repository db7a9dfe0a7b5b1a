"""Circuits as text to twins, and a pool that all tests of the engine share."""

from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest

from stress.engine.case import Twin
from stress.engine.pool import Pool
from stress.netlist.read import read


@pytest.fixture
def twin_of(tmp_path: Path) -> Callable[..., Twin]:
    """Read cards into a twin; the currents of capacitors and diodes are in its waves."""

    def make(cards: str, *, period_s: float | None = None, **more: Any) -> Twin:
        path = tmp_path / "circuit.cir"
        path.write_text("* test\n" + cards + "\n.end\n", encoding="utf-8")
        netlist = read(path)
        assert not netlist.obstacles
        return Twin(
            elements=netlist.elements,
            models=netlist.models,
            period_s=period_s,
            initial_V=netlist.initial_V,
            currents=tuple(e.name for e in netlist.elements if e.letter in "CD"),
            **more,
        )

    return make


@pytest.fixture(scope="session")
def pool() -> Iterator[Pool]:
    """One worker for all tests that only want answers."""
    with Pool(jobs=1) as started:
        yield started


# Cards and period of circuits that every outside check is made on; they settle by themselves
# within some 100 periods, so that a plain transient can be the judge.
CIRCUITS = {
    "rectifier": (
        "Vac a 0 SIN(0 100 50)\nRs a b 10\nD1 b out DM\nC1 out 0 47u\nRl out 0 1k\n"
        ".model DM D(IS=1n N=1.8 CJO=20p)",
        0.02,
    ),
    "doubler": (
        "Vac a 0 SIN(0 60 60)\nRs a b 22\nD1 b p DM\nD2 n b DM\nC1 p 0 22u\nC2 0 n 22u\n"
        "Rl p n 4.7k\n.model DM D(IS=1n N=1.8)",
        1 / 60,
    ),
    "choke input": (
        "Va a 0 SIN(0 300 60)\nVb b 0 SIN(0 -300 60)\nD1 a c DM\nD2 b c DM\n"
        "L1 c d 4\nR1 d out 60\nC1 out 0 16u\nRl out 0 2.5k\n.model DM D(IS=1n N=1.8 RS=20)",
        1 / 60,
    ),
    "buck": (
        "Vin in 0 24\nRin in i2 0.05\nCi i2 0 47u\nS1 i2 sw g 0 SM\nVg g 0 PULSE(0 5 0 50n 50n 4u 10u)\n"
        "D1 0 sw DS\nL1 sw o 47u\nCo o cx 100u\nRe cx 0 0.05\nRl o 0 3\n"
        ".model SM SW(Ron=0.05 Roff=1e6 Vt=2.5 Vh=0.5)\n.model DS D(IS=1e-7 RS=0.02 CJO=100p)",
        1e-5,
    ),
    "output stage": (
        "Vbb bb 0 250\nVg g 0 SIN(-12 8 400)\nLp bb p 8\nLs s 0 5m\nK1 Lp Ls 0.995\nRw p q 300\n"
        "Rl s 0 3.2\nC1 q 0 2n\nB1 q k I=1.2m*pow(max(V(g,k)+V(q,k)/9,0),1.5)\nRk k 0 200\nCk k 0 10u",
        1 / 400,
    ),
}


@pytest.fixture(params=sorted(CIRCUITS))
def circuit(request: pytest.FixtureRequest) -> tuple[str, str, float]:
    """Name, cards and period of each outside-checked circuit in turn."""
    return (request.param, *CIRCUITS[request.param])
