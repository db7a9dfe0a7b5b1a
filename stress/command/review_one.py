"""What `capstress leak` and `capstress fail` share: a review of one position, then its report."""

from __future__ import annotations

import sys
from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING

from stress.command.options import UNSOLVED, names_of, plain_errors, volts

if TYPE_CHECKING:
    from rich.console import Console

    from stress.study.result import Review


def review_one(
    file: Path,
    position: str,
    *,
    sheet: Path | None,
    libraries: tuple[Path, ...],
    type_files: tuple[Path, ...],
    dialect: str | None,
    high: str | None,
    jobs: int | None,
    show: Callable[[Review, str, Console], None],
) -> None:
    """Review one position and show it; ends the process with status 2 or 3 as `review` does."""
    high_V = volts(high)
    from rich.console import Console

    from stress import pipeline
    from stress.report.progress import progress

    with plain_errors():
        circuit = pipeline.load(
            file,
            sheet=sheet,
            high_V=high_V,
            libraries=libraries,
            type_files=type_files,
            dialect=dialect,
        )
        names = names_of(position, [p.name for p in circuit.positions])
        with progress() as report:
            found = pipeline.review_circuit(circuit, only=names, jobs=jobs, progress=report)
    console = Console()
    for name in names:
        show(found, name, console)
    if found.run.unsolved:
        sys.exit(UNSOLVED)
