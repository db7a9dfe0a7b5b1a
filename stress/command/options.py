"""Options that several commands share, and how errors become an exit status."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any, TypeVar

import click

from stress.text.span import SourceErrors

FINISHED, UNUSABLE, UNSOLVED, FAILED_ON = 0, 2, 3, 1
Command = TypeVar("Command", bound=Callable[..., Any])

equipment = click.argument("file", type=click.Path(path_type=Path))
sheet = click.option(
    "--sheet", type=click.Path(path_type=Path), help="Part sheet; usually FILE's stem with .toml."
)
library = click.option(
    "--library",
    "libraries",
    multiple=True,
    type=click.Path(path_type=Path),
    help="Folder from which the netlist may include files; can be given again.",
)
type_file = click.option(
    "--types",
    "type_files",
    multiple=True,
    type=click.Path(path_type=Path),
    help="Your own table of tube and semiconductor types; can be given again.",
)
dialect = click.option(
    "--dialect",
    type=click.Choice(["default", "ps", "lt", "hs"]),
    help="Read the netlist in this dialect instead of the one recognised.",
)
high = click.option("--high", metavar="VOLTS", help="High line voltage, rms, such as 126.")
jobs = click.option("--jobs", type=click.IntRange(1, 256), help="Worker processes; one a core.")


def inputs(command: Command) -> Command:
    """Add the options that every command takes which reads an equipment."""
    for option in (dialect, type_file, library, sheet, equipment):
        command = option(command)
    return command


@contextmanager
def plain_errors() -> Iterator[None]:
    """Turn everything a user can cause into a message and status 2, without a traceback."""
    try:
        yield
    except SourceErrors as problems:
        for problem in problems.errors:
            click.echo(str(problem), err=True)
        count = len(problems.errors)
        click.echo(f"{count} error{'s' if count > 1 else ''}; nothing was simulated.", err=True)
        sys.exit(UNUSABLE)
    except OSError as problem:
        name = f"{problem.filename}: " if problem.filename else ""
        click.echo(f"{name}{problem.strerror or problem}", err=True)
        sys.exit(UNUSABLE)


def volts(text: str | None) -> float | None:
    """Return a voltage given as "126" or "126 V".

    Raises:
        click.BadParameter: It is neither.
    """
    if text is None:
        return None
    from stress.text.quantity import QuantityError, quantity

    try:
        value = quantity(text if not text.strip().replace(".", "").isdigit() else f"{text} V", "V")
    except QuantityError as problem:
        raise click.BadParameter(f"{problem}") from problem
    if not 0.0 < value < 1e5:
        raise click.BadParameter("a line voltage between 0 and 100 kV is wanted")
    return value


def names_of(asked: str, known: list[str]) -> list[str]:
    """Return the positions asked for ("C5,C6") in the netlist's own spelling.

    Ends the process with status 2 where there is no such position.
    """
    by_key = {name.lower(): name for name in known}
    names = [name.strip() for name in asked.split(",") if name.strip()]
    unknown = [name for name in names if name.lower() not in by_key]
    if unknown:
        listed = ", ".join(known)
        click.echo(f"no position {', '.join(unknown)}; the netlist has {listed}", err=True)
        sys.exit(UNUSABLE)
    return [by_key[name.lower()] for name in names]
