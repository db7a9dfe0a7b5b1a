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
