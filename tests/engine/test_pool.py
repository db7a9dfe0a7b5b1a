"""Workers: order, parents, repetition, and what the loss of a worker may change (nothing)."""

import os
import signal
import threading
import time
from dataclasses import replace

import psutil
import pytest

from stress.engine.case import Case, Settled, Steady, Transient, Unsolved, Wandering
from stress.engine.pool import Pool

pytestmark = pytest.mark.ngspice

SUPPLY = """
Vac  a 0 SIN(0 100 50)
Rs   a b 10
D1   b out DM
C1   out 0 47u
Rf   out f 470
C2   f 0 22u
Rl   f 0 4.7k
Rleak f 0 1e9
.model DM D(IS=1n N=1.8)
"""


@pytest.fixture
def supply(twin_of):
    return twin_of(SUPPLY, period_s=0.02)


def chain(twin, *, count=12):
    """A root and a chain of leaks, each starting from the one before."""
    cases = [Case(name="root", twin=twin)]
    for at in range(count):
        name = f"leak {at}"
        ohm = 1e6 * 0.5**at
        cases.append(Case(name=name, twin=twin, parent=cases[-1].name, values={"Rleak": ohm}))
        cases.append(Case(name=f"high {at}", twin=twin, parent=name, values={"Vac": 1.1}))
    return cases


def told(answers):
    """What a review would print of answers: exact numbers."""
    rows = []
    for answer in answers:
        assert isinstance(answer, Settled), answer
        waves = answer.waves
        rows.append((answer.case, waves.mean(waves.voltage("f")), answer.proof))
    return rows


def test_answers_are_in_order_and_the_same_for_any_number_of_workers(supply):
    cases = chain(supply)
    with Pool(jobs=1) as one, Pool(jobs=3) as three:
        first, second = told(one.solve(cases)), told(three.solve(cases))
        totals = one.totals, three.totals

    assert [row[0] for row in first] == [case.name for case in cases]
    assert first == second
    assert totals[0].cases == totals[1].cases == len(cases)
    assert totals[0].cycles == totals[1].cycles > len(cases)
    assert totals[0].unsolved == 0


def test_a_case_solved_before_is_answered_from_memory(supply):
    cases = chain(supply, count=2)
    with Pool(jobs=1) as pool:
        first = told(pool.solve(cases))
        spent = pool.totals.cycles
        again = told(pool.solve(cases[::-1]))

        assert again == first[::-1]
        assert pool.totals.cycles == spent
        assert pool.totals.cases == len(cases)


def test_progress_tells_answered_and_asked(supply):
    seen = []
    with Pool(jobs=1, progress=lambda done, asked: seen.append((done, asked))) as pool:
        list(pool.solve(chain(supply, count=1)))

    assert seen == [(1, 3), (2, 3), (3, 3)]


@pytest.mark.parametrize(
    ("blow", "times"), [(signal.SIGKILL, 4), (signal.SIGSTOP, 1)], ids=["killed", "stopped"]
)
def test_workers_may_be_lost_at_any_moment(supply, blow, times):
    """Workers are struck while the cases run; the answers are what they were."""
    cases = chain(supply)
    with Pool(jobs=1) as calm:
        expected = told(calm.solve(cases))

    # A worker that only stands still is given up after its patience.
    with Pool(jobs=2, patience_s=3.0) as pool:
        struck, done = [], threading.Event()

        def strike():
            while len(struck) < times and not done.is_set():
                for child in psutil.Process().children():
                    if child.pid not in struck and is_worker(child):
                        os.kill(child.pid, blow)
                        struck.append(child.pid)
                        break
                done.wait(0.2)

        found = []
        answers = pool.solve(cases)
        found.append(next(answers))
        thread = threading.Thread(target=strike)
        thread.start()
        found += list(answers)
        done.set()
        thread.join()

    assert len(struck) >= 1
    assert told(found) == expected


def is_worker(process):
    return "spawn_main" in " ".join(process.cmdline())


def test_a_worker_without_memory_costs_its_case_only(supply):
    """320 MB of address space hold the libraries; a million points of 9 rows more do not fit."""
    greedy = Case(name="greedy", twin=supply, analysis=Transient(stop_s=2.0, step_s=5e-7))
    cases = [Case(name="root", twin=supply), greedy]
    after = Case(name="after", twin=supply, parent="root", values={"Rl": 1e4})
    with Pool(jobs=1, memory_bytes=320_000_000) as pool:
        first, lost, last = list(pool.solve([*cases, after]))

    assert isinstance(first, Settled)
    assert isinstance(lost, Unsolved)
    assert lost.reason
    assert isinstance(last, Settled)


def test_interruption_leaves_nothing(supply):
    seen = []

    def interrupted():
        others = psutil.Process().children()  # of pools that other tests still hold
        with Pool(jobs=2) as pool:
            next(pool.solve(chain(supply)))
            started = [child for child in psutil.Process().children() if child not in others]
            workers = [child for child in started if is_worker(child)]
            seen.extend((pool._folder, workers, time.monotonic()))
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        interrupted()
    folder, workers, began = seen

    assert time.monotonic() - began < 2.0
    assert workers
    assert not any(worker.is_running() for worker in workers)
    assert not folder.exists()


# What has no number, and the kind of answer that says so
HOPELESS = [
    ("V1 a 0 5\nV2 a 0 6\nR1 a 0 1k", None, Unsolved, "loop of voltage sources"),
    ("V1 a 0 5\nR1 a b 1k\nB1 b 0 V=V(b)+1", None, Unsolved, ""),
    (
        # Two frequencies without a common period: never the same again.
        "V1 a 0 SIN(0 1 50)\nV2 b a SIN(0 1 71)\nR1 b c 1k\nC1 c 0 1u",
        0.02,
        Wandering,
        "does not settle",
    ),
    (
        # An astable circuit: a comparator with hysteresis that charges its own capacitor.
        "V1 a 0 SIN(0 1 50)\nR3 a 0 1k\nB1 o 0 V=10*tanh(100*(V(p)-V(c)))\n"
        "R1 o p 1k\nR2 p 0 1k\nRc o c 10k\nC1 c 0 0.66u",
        0.02,
        Wandering,
        "leaves its steady state",
    ),
    (
        # An oscillator whose rest state is a steady state that it leaves: growth e^(+10 T) a turn.
        "V1 a 0 SIN(0 1 50)\nR1 a 0 1k\nL1 t 0 1\nC1 t 0 200u\n"
        "B1 t 0 I=-0.004*V(t)+1e-5*V(t)*V(t)*V(t)",
        0.02,
        Wandering,
        "leaves its steady state",
    ),
]


@pytest.mark.parametrize(("cards", "period_s", "kind", "text"), HOPELESS)
def test_what_has_no_number_gets_none(twin_of, pool, cards, period_s, kind, text):
    case = Case(name=cards, twin=twin_of(cards, period_s=period_s), analysis=Steady())
    (answer,) = pool.solve([case])

    assert isinstance(answer, kind), answer
    if isinstance(answer, Wandering):
        assert text in answer.text
        assert answer.unstable == ("leaves" in text)
        assert answer.waves.time_s.size > 100
    else:
        assert text in answer.reason


def test_a_parent_without_number_means_rest(supply, pool):
    lost = Case(name="no way", twin=replace(supply, elements=supply.elements + loop(supply)))
    child = Case(name="child of none", twin=supply, parent="no way")
    orphan = Case(name="no parent", twin=supply)
    unsolved, found, same = list(pool.solve([lost, child, orphan]))

    assert isinstance(unsolved, Unsolved)
    assert (found.waves.values == same.waves.values).all()


def loop(twin):
    source = twin.elements[0]
    return (replace(source, name="Vtwice"),)
