"""Cases to worker processes and answers back, in the order of the cases.

Which state and Jacobian a case starts from is told by its parent alone, so the answers are the
same for any number of workers, in whatever order they end, and after any loss of a worker.
Every slot is a pool of one process of its own: what one worker leaves locked when it dies
stops no other.
"""

from __future__ import annotations

import hashlib
import pickle
import shutil
import tempfile
from collections import OrderedDict
from collections.abc import Callable, Iterable, Iterator
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path
from types import TracebackType
from typing import Self

from stress.engine.case import Answer, Case, Ran, Response, Settled, Twin, Unsolved, Wandering
from stress.engine.dispatch import Crew, Plan
from stress.engine.memory import Memory
from stress.engine.ngspice import find_library
from stress.engine.slot import Slot, cores
from stress.engine.solver import Versions
from stress.engine.worker import Job, Result, versions

PATIENCE_S = 300.0  # for one case; what takes longer hangs
REMEMBERED_BYTES = 64_000_000  # of answers, for a case that is asked again


@dataclass(slots=True)
class Totals:
    """What a pool has done: distinct cases, those unsolved, all periods, processor time in ngspice."""

    cases: int = 0
    unsolved: int = 0
    cycles: int = 0
    inside_s: float = 0.0


class Pool:
    """Worker processes that solve cases; use as a context manager.

    Args:
        jobs: Number of workers; None: one a core.
        progress: Called with the number of cases answered and asked so far.
        patience_s: How long one case may take before its worker counts as hung.
        memory_bytes: Address space of a worker, or None for no limit.

    Attributes:
        totals: What was done so far.
    """

    def __init__(
        self,
        *,
        jobs: int | None = None,
        progress: Callable[[int, int], None] | None = None,
        patience_s: float = PATIENCE_S,
        memory_bytes: int | None = None,
    ) -> None:
        self._jobs = max(1, jobs if jobs is not None else cores())
        self._progress = progress
        self._patience_s, self._memory_bytes = patience_s, memory_bytes
        self._folder: Path | None = None
        self._slots: list[Slot] = []
        self._twins: dict[int, tuple[Twin, str]] = {}
        self._memories: dict[str, Memory | None] = {}
        self._answers: OrderedDict[str, Answer] = OrderedDict()
        self._remembered_bytes = 0
        self._answered = self._asked = 0
        self.totals = Totals()

    def __enter__(self) -> Self:
        """Start the workers.

        Raises:
            LibraryMissing: Where there is no ngspice library.
        """
        library = find_library()
        self._folder = Path(tempfile.mkdtemp(prefix="capstress-"))
        try:
            empty = self._folder / "empty"
            empty.mkdir()
            for _ in range(self._jobs):
                self._slots.append(Slot(str(empty), library, memory_bytes=self._memory_bytes))
        except BaseException:  # nobody else would clean up after an interruption here
            self._clear()
            raise
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        self._clear()

    def _clear(self) -> None:
        for slot in self._slots:
            slot.end()
        with ThreadPoolExecutor(max_workers=max(len(self._slots), 1)) as threads:
            list(threads.map(Slot.join, self._slots))
        self._slots = []
        if self._folder is not None:
            shutil.rmtree(self._folder, ignore_errors=True)

    def versions(self) -> Versions:
        """Return what simulates.

        Raises:
            LibraryMissing: Where there is no ngspice library.
        """
        return self._slots[0].submit(versions).result(timeout=self._patience_s)

    def solve(self, cases: Iterable[Case]) -> Iterator[Answer]:
        """Yield one answer a case, in the order of the cases; see `Solver`."""
        asked = tuple(cases)
        self._asked += len(asked)
        plan = Plan(asked, remembered=self._answers)
        crew = Crew(self._slots, patience_s=self._patience_s)
        try:
            for index in range(len(asked)):
                while (answer := plan.answers[index]) is None:
                    crew.fill(plan, self._job)
                    for task, result in crew.collect(plan):
                        self._record(task.case.name, result)
                        plan.settle(task, result.answer)
                self._answered += 1
                if self._progress is not None:
                    self._progress(self._answered, self._asked)
                yield answer
        finally:
            crew.leave()

    def _job(self, case: Case) -> Job:
        return Job(
            case=case.name,
            twin=self._file(case.twin),
            values=dict(case.values),
            removed=case.removed,
            analysis=case.analysis,
            memory=None if case.parent is None else self._memories.get(case.parent),
        )

    def _file(self, twin: Twin) -> str:
        """Return the file that holds a twin; a worker reads it once."""
        held = self._twins.get(id(twin))
        if held is not None:
            return held[1]
        assert self._folder is not None, "a pool is used as a context manager"
        text = pickle.dumps(twin, protocol=pickle.HIGHEST_PROTOCOL)
        path = self._folder / f"{hashlib.sha256(text).hexdigest()[:24]}.twin"
        if not path.exists():
            path.write_bytes(text)
        self._twins[id(twin)] = (twin, str(path))  # the twin is kept, so that its id stays its own
        return str(path)

    def _record(self, name: str, result: Result) -> None:
        new = name not in self._memories
        self._memories[name] = result.memory
        self.totals.inside_s += result.inside_s
        if new:
            self.totals.cases += 1
            self.totals.unsolved += isinstance(result.answer, Unsolved)
            self.totals.cycles += result.cycles
        self._answers[name] = result.answer
        self._remembered_bytes += _bytes(result.answer)
        while self._remembered_bytes > REMEMBERED_BYTES:
            _, forgotten = self._answers.popitem(last=False)
            self._remembered_bytes -= _bytes(forgotten)


def _bytes(answer: Answer) -> int:
    match answer:
        case Settled() | Ran() | Wandering():
            return answer.waves.values.nbytes
        case Response():
            return answer.values.nbytes
        case Unsolved():
            return 0
