"""`capstress discharge`: how long it stays dangerous after switching off."""

from __future__ import annotations

import sys

import click

from stress.command.options import UNSOLVED, Given, inputs, jobs, plain_errors


@click.command()
@inputs
@jobs
def discharge(given: Given, jobs: int | None) -> None:
    """Show what every capacitor of FILE holds after switching off, and for how long.

    Exit status: 2 when the input cannot be used, 3 when the engine left a case unsolved.
    """
    from rich.console import Console

    from stress.engine.pool import Pool
    from stress.report.discharge_text import print_discharge
    from stress.report.progress import progress
    from stress.study.discharge import discharge as follow
    from stress.study.working import work

    with plain_errors():
        circuit = given.load()
        with (
            progress() as report,
            Pool(jobs=jobs, progress=lambda done, known: report("discharge", done, known)) as pool,
        ):
            found = follow(circuit, healthy=work(circuit, solver=pool), solver=pool)
            unsolved = pool.totals.unsolved
    print_discharge(found, circuit, Console())
    if unsolved:
        sys.exit(UNSOLVED)
