"""`capstress leak`: one position in depth."""

from __future__ import annotations

import click

from stress.command.options import Given, inputs, jobs
from stress.command.review_one import review_one


@click.command()
@inputs
@click.argument("position")
@jobs
def leak(given: Given, position: str, jobs: int | None) -> None:
    """Show what leakage at POSITION of FILE does, as a table and as a curve."""
    from stress.report.depth import print_leak

    review_one(given, position, jobs=jobs, show=print_leak)
