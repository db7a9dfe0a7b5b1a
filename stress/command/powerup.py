"""`capstress powerup`: the plan before the first switch-on."""

from __future__ import annotations

import sys
from pathlib import Path
from typing import TYPE_CHECKING

import click

from stress.command.options import UNSOLVED, UNUSABLE, Given, inputs, jobs, plain_errors

if TYPE_CHECKING:
    from stress.circuit.circuit import Circuit
    from stress.parts.reading import Readings


@click.command()
@inputs
@click.argument("readings", required=False, type=click.Path(path_type=Path))
@jobs
@click.option(
    "--steps",
    default="",
    metavar="20,40,60",
    help="Line voltages of the steps, in percent of the nominal one; the highest is added.",
)
def powerup(given: Given, readings: Path | None, jobs: int | None, steps: str) -> None:
    """Show how FILE is powered for the first time, step by step, and when to stop.

    With READINGS (a CSV of bench readings) the plan is that of the equipment as measured.

    Exit status: 2 when the input cannot be used, 3 when the engine left a case unsolved.
    """
    from rich.console import Console

    from stress import pipeline
    from stress.engine.pool import Pool
    from stress.judge.power_up import power_up
    from stress.judge.risk import risks
    from stress.parts import reading
    from stress.report.power_text import print_power_up
    from stress.report.progress import progress
    from stress.study.failures import failures
    from stress.study.inrush import inrush
    from stress.study.leakage import leakage
    from stress.study.working import work
    from stress.study.worst import worst

    shares = _shares(steps)
    with plain_errors():
        circuit = given.load()
        taken = reading.read(readings) if readings is not None else None
        if taken is not None:
            circuit = _as_measured(circuit, taken)
        positions = circuit.positions
        expected = (2 * pipeline.POINTS + 20) * len(positions)
        stage = "working stress"
        with (
            progress() as report,
            Pool(
                jobs=jobs, progress=lambda done, known: report(stage, done, max(known, expected))
            ) as pool,
        ):
            healthy = inrush(circuit, healthy=work(circuit, solver=pool), solver=pool)
            stage = "which faults do damage"
            leaks = leakage(circuit, positions, healthy=healthy, solver=pool)
            failed = failures(circuit, positions, healthy=healthy, leakage=leaks, solver=pool)
            stage = "power-up"
            plan = power_up(
                circuit,
                healthy=healthy,
                leakage=leaks,
                failures=failed,
                risks=risks(
                    circuit,
                    worst=worst(circuit, working=healthy.working),
                    leakage=leaks,
                    failures=failed,
                ),
                solver=pool,
                shares=shares,
            )
            unsolved = pool.totals.unsolved
    print_power_up(plan, circuit, Console())
    for problem in taken.problems if taken is not None else ():
        click.echo(str(problem), err=True)
    if taken is not None and taken.problems:
        sys.exit(UNUSABLE)
    if unsolved:
        sys.exit(UNSOLVED)


def _as_measured(circuit: Circuit, taken: Readings) -> Circuit:
    from stress.study.as_measured import as_measured

    return as_measured(circuit, taken.rows)


def _shares(steps: str) -> tuple[float, ...]:
    """Return the steps given as "20,40,60" in parts of the nominal line.

    Raises:
        click.BadParameter: It is not a list of percentages up to 110.
    """
    try:
        found = tuple(sorted({float(text) / 100.0 for text in steps.split(",") if text.strip()}))
    except ValueError:
        found = (0.0,)
    if any(not 0.0 < share <= 1.1 for share in found):
        raise click.BadParameter(
            "wanted: percentages above 0 and up to 110, such as 20,40,60", param_hint="--steps"
        )
    return found
