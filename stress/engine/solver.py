"""What the studies ask: many cases in, answers out in the order of the cases."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from typing import Protocol

from stress.engine.case import Answer, Case


@dataclass(frozen=True, slots=True, kw_only=True)
class Versions:
    """What simulates: the library, its version, and that of its interface."""

    ngspice: str
    pyspice: str
    library: str = ""


class Solver(Protocol):
    """Solves cases; `stress.engine.pool.Pool` is the one that runs ngspice."""

    def solve(self, cases: Iterable[Case]) -> Iterator[Answer]:
        """Yield one answer a case, in the order of the cases.

        A case may name as parent one that stands before it in the same call or that was
        solved in an earlier call. Nothing is raised for a case that fails: it is `Unsolved`.
        The answers do not depend on the number of workers.
        """
        ...
