import importlib.util
import json
import sys
from collections.abc import Callable, Iterator, Mapping
from dataclasses import replace
from functools import cache
from pathlib import Path
from types import ModuleType

import pytest

from stress.circuit.build import build
from stress.circuit.circuit import Circuit
from stress.engine import twin
from stress.engine.case import Answer
from stress.engine.pool import Pool
from stress.netlist.flat import Netlist
from stress.netlist.read import read
from stress.parts import read_sheet
from stress.parts.models import subcircuit
from stress.parts.sheet import CapacitorEntry, Sheet
from stress.study import conditions

NETLISTS = Path(__file__).parents[2] / "netlists"
ESR_OHM, INSULATION_OHM = 1e-3, 1e10  # as the decks of the plain program have them


@cache
def netlist(stem: str) -> Netlist:
    return read(NETLISTS / f"{stem}.cir", built_in=subcircuit)


@cache
def sheet(stem: str) -> Sheet:
    return read_sheet.read(NETLISTS / f"{stem}.toml")


@cache
def circuit(stem: str) -> Circuit:
    return build(netlist(stem), sheet(stem))


@cache
def ideal(stem: str) -> Circuit:
    """Return the circuit with capacitors that hardly lose or leak anything, and with the models
    that the oracle was made with."""
    entries = {
        name: replace(
            sheet(stem).capacitors.get(name, CapacitorEntry()),
            esr_ohm=ESR_OHM,
            insulation_ohm=INSULATION_OHM,
        )
        for name in (position.name.lower() for position in circuit(stem).positions)
    }
    models = json.loads(Path(__file__).with_name("models.json").read_text(encoding="utf-8"))
    as_then = read(NETLISTS / f"{stem}.cir", built_in=models.get)
    return build(as_then, replace(sheet(stem), capacitors=entries))


@pytest.fixture(scope="session")
def read_equipment() -> Callable[[str], Netlist]:
    return netlist


@pytest.fixture(scope="session")
def equipment() -> Callable[[str], Circuit]:
    return circuit


@pytest.fixture(scope="session")
def ideal_equipment() -> Callable[[str], Circuit]:
    return ideal


@pytest.fixture(scope="session")
def pool() -> Iterator[Pool]:
    with Pool() as workers:
        yield workers


@pytest.fixture(scope="session")
def solve(pool: Pool) -> Callable[[Circuit], Mapping[str, Answer]]:
    """Solve every stock condition of an equipment and those of its sheet, once."""
    known: dict[tuple[int, tuple[str, ...]], Mapping[str, Answer]] = {}

    def solve(given: Circuit, *, only: tuple[str, ...] = ()) -> Mapping[str, Answer]:
        key = (id(given), only)
        if key not in known:
            wanted = [c for c in conditions.conditions(given) if not only or c.name in only]
            built = twin.build(given)
            cases = []
            for condition in wanted:
                parent = conditions.healthy_parent(condition)
                case = conditions.case(
                    given,
                    condition,
                    twin=built,
                    name=f"{id(given)} {condition.name}",
                    parent=parent and f"{id(given)} {parent}",
                )
                cases.append(case)
            known[key] = {
                condition.name: answer
                for condition, answer in zip(wanted, pool.solve(cases), strict=True)
            }
        return known[key]

    return solve


@pytest.fixture(scope="session")
def plain() -> ModuleType:
    """The second opinion, `plain_program.py`."""
    path = Path(__file__).with_name("plain_program.py")
    spec = importlib.util.spec_from_file_location("plain_program", path)
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module  # a dataclass looks its module up while it is made
    spec.loader.exec_module(module)
    return module
