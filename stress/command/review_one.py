"""What `capstress leak` and `capstress fail` share: a review of one position, then its report."""

from __future__ import annotations

import sys
from collections.abc import Callable
from typing import TYPE_CHECKING

from stress.command.options import UNSOLVED, Given, names_of, plain_errors

if TYPE_CHECKING:
    from rich.console import Console

    from stress.study.result import Review


def review_one(
    given: Given,
    position: str,
    *,
    jobs: int | None,
    show: Callable[[Review, str, Console], None],
) -> None:
    """Review one position and show it; ends the process with status 2 or 3 as `review` does."""
    from rich.console import Console

    from stress import pipeline
    from stress.report.progress import progress

    with plain_errors():
        circuit = given.load()
        names = names_of(position, circuit)
        with progress() as report:
            found = pipeline.review_circuit(circuit, only=names, jobs=jobs, progress=report)
    console = Console()
    for name in names:
        show(found, name, console)
    if found.run.unsolved:
        sys.exit(UNSOLVED)
