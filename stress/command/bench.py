"""`capstress bench`: bench limits, the form for readings, and verdicts on them."""

from __future__ import annotations

import sys
from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING

import click

from stress.command.options import UNSOLVED, UNUSABLE, Given, inputs, jobs, plain_errors

if TYPE_CHECKING:
    from stress.circuit.circuit import Circuit


@click.command()
@inputs
@click.argument("readings", required=False, type=click.Path(path_type=Path))
@jobs
@click.option(
    "--form", is_flag=True, help="Write an empty form to print and fill; simulates nothing."
)
def bench(given: Given, readings: Path | None, jobs: int | None, form: bool) -> None:
    """Print the bench limits of FILE, or judge the READINGS (a CSV) that were taken.

    With readings every position that was measured gets its verdict; then the equipment as
    measured is simulated and shown beside the equipment as drawn.

    Exit status: 2 also when a row of the readings could not be used; the others are judged.
    """
    from rich.console import Console

    from stress import pipeline
    from stress.engine.pool import Pool
    from stress.judge.measured import moved, order, past
    from stress.judge.verdict import verdicts
    from stress.parts import reading
    from stress.report.bench_text import print_bench, print_measured, print_verdicts
    from stress.report.progress import progress
    from stress.study.as_measured import as_measured
    from stress.study.working import work

    console = Console()
    with plain_errors():
        circuit = given.load()
        if form:
            click.echo(reading.form(_measurable(circuit)), nl=False)
            return
        taken = reading.read(readings) if readings is not None else None
        with progress() as report:
            drawn = pipeline.review_circuit(circuit, jobs=jobs, progress=report)
        if taken is None:
            print_bench(drawn, console)
            sys.exit(UNSOLVED if drawn.run.unsolved else 0)
        found = verdicts(taken, circuit=circuit, bench=drawn.bench, worst=drawn.worst)
        print_verdicts(found, console)
        ripple = {
            name: limits.esr_Hz for name, limits in drawn.bench.items() if limits.esr_Hz is not None
        }
        measured = as_measured(circuit, found.used, ripple_Hz=ripple)
        with progress() as report, Pool(jobs=jobs, progress=_told(report)) as pool:
            healthy = work(measured, solver=pool)
        console.print()
        print_measured(
            drawn,
            console,
            order=order(drawn.risks, found.verdicts),
            stressed=past(measured, drawn=drawn.working, measured=healthy.working),
            moved=moved(circuit, drawn=drawn.working, measured=healthy.working),
            unanswered=healthy.working.unanswered,
        )
    for problem in found.problems:
        click.echo(str(problem), err=True)
    if found.problems:
        sys.exit(UNUSABLE)
    lost = [case for case in healthy.working.unanswered if case.kind == "unsolved"]
    if drawn.run.unsolved or lost:
        sys.exit(UNSOLVED)


def _told(report: Callable[[str, int, int], None]) -> Callable[[int, int], None]:
    return lambda done, asked: report("as measured", done, asked)


def _measurable(circuit: Circuit) -> tuple[str, ...]:
    """Return what the form lists: positions, then resistors and windings."""
    from stress.circuit.circuit import Kind

    kinds = (Kind.RESISTOR, Kind.WINDING)
    others = tuple(part.name for kind in kinds for part in circuit.parts if part.kind is kind)
    return (*(position.name for position in circuit.positions), *others)
