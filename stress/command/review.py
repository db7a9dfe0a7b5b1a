"""`capstress review`: everything at once."""

from __future__ import annotations

import sys
from pathlib import Path
from typing import TYPE_CHECKING

import click

from stress.command.options import (
    FAILED_ON,
    UNSOLVED,
    UNUSABLE,
    Given,
    inputs,
    jobs,
    names_of,
    plain_errors,
)
from stress.finding import Severity

if TYPE_CHECKING:
    from stress.circuit.circuit import Circuit


@click.command()
@inputs
@jobs
@click.option("--only", default="", metavar="C5,C6", help="Study the faults of these only.")
@click.option(
    "--also",
    multiple=True,
    metavar="'C5 leaky 1 Meg'",
    help="A known fault that is in every case; can be given again.",
)
@click.option(
    "--condition",
    "ask",
    multiple=True,
    metavar="NAME",
    help="A further condition, of those on offer for this circuit; can be given again.",
)
@click.option(
    "--pairs",
    type=click.IntRange(1, 500),
    default=None,
    metavar="COUNT",
    help="Also try so many of the likeliest pairs of faults at once, such as 24.",
)
@click.option(
    "--policy",
    default="common-practice",
    show_default=True,
    help="Derating policy, or a TOML file of your own.",
)
@click.option("--plan/--no-plan", default=False, help="Power-up plan and discharge as well.")
@click.option(
    "--fitted", is_flag=True, help="Run it again with the chosen parts; show before and after."
)
@click.option("--json", "json_file", type=click.Path(path_type=Path), help="Write all numbers.")
@click.option("--html", "html_file", type=click.Path(path_type=Path), help="Write a page.")
@click.option("--csv", "csv_folder", type=click.Path(path_type=Path), help="Write tables here.")
@click.option("--verbose", is_flag=True, help="Show the method and its residuals as well.")
@click.option(
    "--fail-on",
    type=click.Choice([severity.value for severity in Severity]),
    help="Exit with status 1 when there is a finding of this severity or a more urgent one.",
)
def review(
    given: Given,
    jobs: int | None,
    only: str,
    also: tuple[str, ...],
    ask: tuple[str, ...],
    pairs: int | None,
    policy: str,
    plan: bool,
    fitted: bool,
    json_file: Path | None,
    html_file: Path | None,
    csv_folder: Path | None,
    verbose: bool,
    fail_on: str | None,
) -> None:
    """Review the equipment of FILE: what every capacitor bears, and what to do first.

    Exit status: 0 when the review was finished, whatever it found; 1 with --fail-on; 2 when the
    input cannot be used; 3 when the engine left a case unsolved.
    """
    from rich.console import Console

    from stress import pipeline
    from stress.report.discharge_text import print_discharge
    from stress.report.document import write_json
    from stress.report.fitted_text import print_fitted
    from stress.report.power_text import print_power_up
    from stress.report.progress import progress
    from stress.report.terminal import print_review
    from stress.study.fitted import fitted as chosen_parts

    with plain_errors():
        circuit = given.load()
        names = names_of(only, circuit)
        _known_policy(policy)
        _known_faults(also, circuit)
        circuit = _asked(ask, circuit)
        with progress() as report:
            found = pipeline.review_circuit(
                circuit,
                only=names,
                also=also,
                pairs=pairs or 0,
                policy=policy,
                plan=plan,
                jobs=jobs,
                progress=report,
            )
        after = None
        if fitted:
            with progress() as report:
                after = pipeline.review_circuit(
                    chosen_parts(circuit, found.replacements),
                    only=names,
                    policy=policy,
                    jobs=jobs,
                    progress=report,
                )
        if json_file is not None:
            write_json(found, json_file)
        if html_file is not None:
            from stress.report.page import write_page

            write_page(found, html_file, fitted=after)
        if csv_folder is not None:
            from stress.report.tables import write_csv

            write_csv(found, csv_folder)
        console = Console()
        print_review(found, console, verbose=verbose)
        if found.power_up is not None:
            print_power_up(found.power_up, circuit, console)
        if found.discharge is not None:
            print_discharge(found.discharge, circuit, console)
        if after is not None:
            print_fitted(found, after, console)
    if found.run.unsolved:
        sys.exit(UNSOLVED)
    if fail_on is not None:
        worst = min((f.severity.rank for f in found.findings), default=len(Severity))
        if worst <= Severity(fail_on).rank:
            sys.exit(FAILED_ON)


def _known_policy(policy: str) -> None:
    from stress.parts.policy import policies
    from stress.pipeline import policy_of

    try:
        policy_of(policy)
    except KeyError:
        known = ", ".join(policies())
        click.echo(f"no policy and no file {policy!r}; there are {known}", err=True)
        sys.exit(UNUSABLE)


def _asked(ask: tuple[str, ...], circuit: Circuit) -> Circuit:
    from stress.study.other_use import asked

    try:
        return asked(circuit, ask)
    except ValueError as problem:
        click.echo(f"--condition: {problem}", err=True)
        sys.exit(UNUSABLE)


def _known_faults(also: tuple[str, ...], circuit: Circuit) -> None:
    from stress.study.fault import parse

    for text in also:
        try:
            parse(text, circuit)
        except ValueError as problem:
            click.echo(f"--also {text!r}: {problem}", err=True)
            sys.exit(UNUSABLE)
