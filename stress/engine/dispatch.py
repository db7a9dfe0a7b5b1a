"""Which case is due, and who is at it."""

from __future__ import annotations

import heapq
import signal
import time
from collections import deque
from collections.abc import Callable, Iterator, Mapping, Sequence
from concurrent.futures import FIRST_COMPLETED, Future, wait
from concurrent.futures.process import BrokenProcessPool
from dataclasses import dataclass, replace

from pebble import ProcessExpired

from stress.engine.case import Answer, Case, Unsolved
from stress.engine.ngspice import LibraryMissing
from stress.engine.slot import Slot
from stress.engine.worker import Job, Result, work

GIVEN_UP = 2.0  # a case is given up when it has cost this many workers
FROM_OUTSIDE = 0.25  # what a worker counts that was killed from outside or had not begun
AHEAD = 2  # jobs handed to a slot, so that it never waits for the next
LOOK_S = 0.5  # between two looks for workers that hang


@dataclass(slots=True, eq=False)
class Task:
    """A case of a call, by its place; `cost` counts the workers that were lost over it."""

    index: int
    case: Case
    cost: float = 0.0


class Plan:
    """The cases of one call: which wait for their parent, which are due, which are answered.

    Args:
        cases: In order; a parent stands before its children or was answered in an earlier call.
        remembered: Answers of earlier calls by name.

    Attributes:
        answers: One a case, None while it is open.
    """

    def __init__(self, cases: Sequence[Case], *, remembered: Mapping[str, Answer]) -> None:
        self.answers: list[Answer | None] = [None] * len(cases)
        self._cases = cases
        self._due: list[int] = []
        self._waiting: dict[int, list[int]] = {}
        self._same: dict[int, list[int]] = {}
        self._tasks: dict[int, Task] = {}
        first: dict[str, int] = {}
        for index, case in enumerate(cases):
            if case.name in remembered:
                self.answers[index] = remembered[case.name]
                continue
            earlier = first.setdefault(case.name, index)
            if earlier != index:
                self._same.setdefault(earlier, []).append(index)
                continue
            parent = first.get(case.parent) if case.parent is not None else None
            if parent is None:
                self._due.append(index)
            else:
                self._waiting.setdefault(parent, []).append(index)
        heapq.heapify(self._due)

    def next(self) -> Task | None:
        """Return the first case that is due, or None."""
        if not self._due:
            return None
        index = heapq.heappop(self._due)
        return self._tasks.setdefault(index, Task(index, self._cases[index]))

    def again(self, task: Task) -> None:
        """Take a case back."""
        heapq.heappush(self._due, task.index)

    def settle(self, task: Task, answer: Answer) -> None:
        """Enter an answer; what waited for it becomes due."""
        for index in (task.index, *self._same.pop(task.index, ())):
            self.answers[index] = answer
        for child in self._waiting.pop(task.index, ()):
            heapq.heappush(self._due, child)


@dataclass(slots=True)
class _Post:
    """A slot and what it has been handed, the oldest first."""

    slot: Slot
    jobs: deque[tuple[Task, Future[Result]]]
    since: float = 0.0


class Crew:
    """The slots at work on one plan.

    Args:
        slots: Idle.
        patience_s: How long a job may take.
    """

    def __init__(self, slots: Sequence[Slot], *, patience_s: float) -> None:
        self._posts = [_Post(slot, deque()) for slot in slots]
        self._patience_s = patience_s

    def fill(self, plan: Plan, job: Callable[[Case], Job]) -> None:
        """Hand out what is due, to the slot with the least to do."""
        while True:
            post = min(self._posts, key=lambda post: len(post.jobs))
            if len(post.jobs) >= AHEAD:
                return
            task = plan.next()
            if task is None:
                return
            if not post.jobs:
                post.since = time.monotonic()
            post.jobs.append((task, post.slot.submit(work, job(task.case))))

    def collect(self, plan: Plan) -> Iterator[tuple[Task, Result]]:
        """Wait for at least one job or a moment; yield what has ended for good.

        Raises:
            LibraryMissing: Where a worker could not load ngspice.
        """
        heads = [post.jobs[0][1] for post in self._posts if post.jobs]
        wait(heads, timeout=LOOK_S, return_when=FIRST_COMPLETED)
        for post in self._posts:
            while post.jobs and post.jobs[0][1].done():
                task, future = post.jobs.popleft()
                post.since = time.monotonic()
                result = _outcome(task, future)
                if result.poisoned:
                    task.cost += FROM_OUTSIDE if _from_outside(future) else 1.0
                    yield from self._lost(plan, post, task, result)
                else:
                    yield task, result
            if post.jobs and time.monotonic() - post.since > self._patience_s:
                task, _ = post.jobs.popleft()
                task.cost += 1.0
                hung = _failure(task, f"no answer within {self._patience_s:g} s")
                yield from self._lost(plan, post, task, hung)

    def leave(self) -> None:
        """Drop what nobody waits for any more."""
        for post in self._posts:
            for _, future in post.jobs:
                future.cancel()
            post.jobs.clear()

    def _lost(
        self, plan: Plan, post: _Post, task: Task, result: Result
    ) -> Iterator[tuple[Task, Result]]:
        """Replace a worker; its case is tried once more, what it had not begun is not blamed."""
        for innocent, _ in post.jobs:
            plan.again(innocent)
        post.jobs.clear()
        post.slot.replace()
        if task.cost < GIVEN_UP:
            plan.again(task)
        else:
            yield task, replace(result, poisoned="")


def _from_outside(future: Future[Result]) -> bool:
    """Whether a worker ended by nothing that ngspice does by itself."""
    error = future.exception()
    if isinstance(error, ProcessExpired):
        return bool(error.exitcode == -getattr(signal, "SIGKILL", 9))
    return isinstance(error, BrokenProcessPool)


def _outcome(task: Task, future: Future[Result]) -> Result:
    error = future.exception()
    if error is None:
        return future.result()
    if isinstance(error, LibraryMissing):
        raise error  # no other worker would find one
    text = " ".join(str(part) for part in error.args) or type(error).__name__
    return _failure(task, f"the worker ended: {text}")


def _failure(task: Task, reason: str) -> Result:
    answer = Unsolved(case=task.case.name, reason=reason)
    return Result(answer=answer, memory=None, cycles=0, inside_s=0.0, poisoned=reason)
