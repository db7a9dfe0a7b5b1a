"""A review whose cases, answers and totals are kept, for the timings."""

import resource
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field
from pathlib import Path
from time import monotonic

import stress.pipeline as pipeline
from stress.engine.case import Answer, Case, Settled, Steady
from stress.engine.pool import Pool, Totals

NETLISTS = Path(__file__).parents[2] / "netlists"
RECEIVER, MIDGET = NETLISTS / "shore_receiver.cir", NETLISTS / "harbour_midget.cir"


@dataclass
class Log:
    """What a review asked and got, and what it cost; processor time is that of all processes."""

    asked: list[tuple[Case, Answer]] = field(default_factory=list)
    totals: Totals = field(default_factory=Totals)
    wall_s: float = 0.0
    cpu_s: float = 0.0

    @property
    def steady(self) -> list[tuple[Case, Settled]]:
        """Settled states, with their cases."""
        return [(c, a) for c, a in self.asked if isinstance(a, Settled)]


def cpu_s() -> float:
    """Processor time of this process and of all its children that have ended."""
    kinds = (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN)
    return sum(use.ru_utime + use.ru_stime for use in map(resource.getrusage, kinds))


def reviewed(path: Path, *, jobs: int, only: tuple[str, ...] = ()) -> Log:
    """Review an equipment, or some of its positions, and return what its engine did."""
    log = Log()

    class Recording(Pool):
        def solve(self, cases: Iterable[Case]) -> Iterator[Answer]:
            asked = tuple(cases)
            for case, answer in zip(asked, super().solve(asked), strict=True):
                log.asked.append((case, answer))
                yield answer
            log.totals = self.totals

    usual, pipeline.Pool = pipeline.Pool, Recording
    began, spent = monotonic(), cpu_s()
    try:
        pipeline.review(path, jobs=jobs, only=only)
    finally:
        pipeline.Pool = usual
    log.wall_s, log.cpu_s = monotonic() - began, cpu_s() - spent
    return log


def leaks(log: Log) -> list[tuple[Case, Settled]]:
    """The leak cases that started from a solved relative."""
    return [
        (case, answer)
        for case, answer in log.steady
        if case.parent is not None and "leaky" in case.name and isinstance(case.analysis, Steady)
    ]
