"""A whole review whose workers are struck at random tells what an undisturbed one tells."""

import json
import os
import random
import signal
import threading
from collections.abc import Callable
from dataclasses import dataclass, field
from functools import partial
from pathlib import Path

import psutil
import pytest
from click.testing import CliRunner

from stress import pipeline
from stress.command.main import main
from stress.engine.pool import Pool

MIDGET = Path(__file__).parents[2] / "netlists" / "harbour_midget.cir"
PATIENCE_S = 4.0  # for a worker that stands still; a case of this set takes some 50 ms

pytestmark = pytest.mark.ngspice


def review(path):
    """Review one position; return the document but for the time it took."""
    done = CliRunner().invoke(
        main, ["review", str(MIDGET), "--only", "C5", "--jobs", "2", "--json", str(path)]
    )
    assert done.exit_code == 0, done.output
    found = json.loads(path.read_text(encoding="utf-8"))
    assert found["run"].pop("wall_s") > 0.0
    return found


@pytest.fixture(scope="module")
def calm(tmp_path_factory):
    return review(tmp_path_factory.mktemp("calm") / "review.json")


def kill(worker):
    worker.send_signal(signal.SIGKILL)


def stop(worker):
    worker.send_signal(signal.SIGSTOP)


def starve(worker):
    """Leave a worker no byte of address space more than it has."""
    now = worker.memory_info().vms
    worker.rlimit(psutil.RLIMIT_AS, (now, now))


@dataclass
class Fire:
    """Strikes workers at their work, one after the other, at random moments."""

    blow: Callable[[psutil.Process], None]
    times: int
    seed: int
    done: threading.Event = field(default_factory=threading.Event)
    struck: list[int] = field(default_factory=list)
    seen: set[int] = field(default_factory=set)

    def __call__(self):
        chance = random.Random(self.seed)
        while not self.done.wait(chance.uniform(0.05, 0.5)):
            working = [child for child in psutil.Process().children() if at_work(child)]
            self.seen |= {worker.pid for worker in working}
            fresh = [worker for worker in working if worker.pid not in self.struck]
            if fresh and len(self.struck) < self.times:
                victim = chance.choice(fresh)
                self.blow(victim)
                self.struck.append(victim.pid)


def at_work(process):
    try:
        return Path(process.cwd()).name == "empty"
    except psutil.Error:  # gone meanwhile
        return False


LINUX = pytest.mark.skipif(not hasattr(psutil, "RLIMIT_AS"), reason="limits of others on Linux")


@pytest.mark.skipif(os.name != "posix", reason="signals of POSIX")
@pytest.mark.parametrize(
    "fire",
    # A case is given up when it has cost two workers; one killed from outside counts a quarter.
    [
        pytest.param(Fire(kill, times=6, seed=1), id="killed"),
        pytest.param(Fire(stop, times=1, seed=3), id="stopped"),
        pytest.param(Fire(starve, times=1, seed=4), id="without memory", marks=LINUX),
    ],
)
def test_the_review_is_the_same(calm, tmp_path, monkeypatch, fire):
    monkeypatch.setattr(pipeline, "Pool", partial(Pool, patience_s=PATIENCE_S))
    thread = threading.Thread(target=fire)
    thread.start()
    try:
        found = review(tmp_path / "review.json")
    finally:
        fire.done.set()
        thread.join()

    assert len(fire.struck) >= min(fire.times, 3)
    assert len(fire.seen) > 2  # others took over
    assert found == calm
