"""`capstress leak`: one position in depth."""

from __future__ import annotations

from pathlib import Path

import click

from stress.command.options import high, inputs, jobs
from stress.command.review_one import review_one


@click.command()
@inputs
@click.argument("position")
@high
@jobs
def leak(
    file: Path,
    position: str,
    sheet: Path | None,
    libraries: tuple[Path, ...],
    type_files: tuple[Path, ...],
    dialect: str | None,
    high: str | None,
    jobs: int | None,
) -> None:
    """Show what leakage at POSITION of FILE does, as a table and as a curve."""
    from stress.report.depth import print_leak

    review_one(
        file,
        position,
        sheet=sheet,
        libraries=libraries,
        type_files=type_files,
        dialect=dialect,
        high=high,
        jobs=jobs,
        show=print_leak,
    )
