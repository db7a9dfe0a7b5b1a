"""`capstress fail`: one position in depth."""

from __future__ import annotations

import click

from stress.command.options import Given, inputs, jobs
from stress.command.review_one import review_one


@click.command()
@inputs
@click.argument("position")
@jobs
def fail(given: Given, position: str, jobs: int | None) -> None:
    """Show what a short, an open, a dried or a reversed part at POSITION of FILE does."""
    from stress.report.depth import print_fail

    review_one(given, position, jobs=jobs, show=print_fail)
