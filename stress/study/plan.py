"""Plans: studies as generators of cases, run side by side in waves.

A plan yields the cases it wants next and is sent their answers in the same order. Its next
question depends on its own answers only, so the result does not depend on what runs beside it.
"""

from __future__ import annotations

from collections.abc import Generator, Sequence
from typing import TypeAlias, TypeVar

from stress.engine.case import Answer, Case
from stress.engine.solver import Solver

Result = TypeVar("Result")
Plan: TypeAlias = Generator[tuple[Case, ...], tuple[Answer, ...], Result]


def run(plans: Sequence[Plan[Result]], *, solver: Solver) -> tuple[Result, ...]:
    """Run all plans to their end, wave by wave; return their results in the same order."""
    results: dict[int, Result] = {}
    asked: dict[int, tuple[Case, ...]] = {}
    for index, plan in enumerate(plans):
        _advance(index, plan, None, asked, results)
    while asked:
        wave = dict(asked)
        asked.clear()
        answers = iter(tuple(solver.solve([case for cases in wave.values() for case in cases])))
        for index, cases in wave.items():
            _advance(index, plans[index], tuple(next(answers) for _ in cases), asked, results)
    return tuple(results[index] for index in range(len(plans)))


def _advance(
    index: int,
    plan: Plan[Result],
    answers: tuple[Answer, ...] | None,
    asked: dict[int, tuple[Case, ...]],
    results: dict[int, Result],
) -> None:
    """Hand a plan its answers and keep what it asks next, or its result."""
    try:
        asked[index] = next(plan) if answers is None else plan.send(answers)
    except StopIteration as stop:
        results[index] = stop.value
