"""What several commands share: how an equipment is given, and how errors become an exit status."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from functools import wraps
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from stress.text.span import SourceErrors

if TYPE_CHECKING:
    from stress.circuit.circuit import Circuit

FINISHED, FAILED_ON, UNUSABLE, UNSOLVED = 0, 1, 2, 3

jobs = click.option("--jobs", type=click.IntRange(1, 256), help="Worker processes; one a core.")
_INPUTS = (
    click.argument("file", type=click.Path(path_type=Path)),
    click.option(
        "--sheet",
        type=click.Path(path_type=Path),
        help="Part sheet; usually FILE's stem with .toml.",
    ),
    click.option("--high", metavar="VOLTS", help="High line voltage, rms, such as 126."),
    click.option(
        "--library",
        "libraries",
        multiple=True,
        type=click.Path(path_type=Path),
        help="Folder from which the netlist may include files; can be given again.",
    ),
    click.option(
        "--types",
        "type_files",
        multiple=True,
        type=click.Path(path_type=Path),
        help="Your own table of tube and semiconductor types; can be given again.",
    ),
    click.option(
        "--dialect",
        type=click.Choice(["default", "ps", "lt", "hs"]),
        help="Read the netlist in this dialect instead of the one recognised.",
    ),
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Given:
    """The equipment as given on the command line."""

    file: Path
    sheet: Path | None
    high_V: float | None
    libraries: tuple[Path, ...]
    type_files: tuple[Path, ...]
    dialect: str | None

    def load(self) -> Circuit:
        """Read it; raises as `stress.pipeline.load`."""
        from stress import pipeline

        return pipeline.load(
            self.file,
            sheet=self.sheet,
            high_V=self.high_V,
            libraries=self.libraries,
            type_files=self.type_files,
            dialect=self.dialect,
        )


def inputs(command: Callable[..., None]) -> Callable[..., None]:
    """Give a command the argument and options that name an equipment, as its first parameter."""

    @wraps(command)
    def wrapped(
        file: Path,
        sheet: Path | None,
        high: str | None,
        libraries: tuple[Path, ...],
        type_files: tuple[Path, ...],
        dialect: str | None,
        **rest: Any,
    ) -> None:
        given = Given(
            file=file,
            sheet=sheet,
            high_V=_volts(high),
            libraries=libraries,
            type_files=type_files,
            dialect=dialect,
        )
        command(given, **rest)

    result: Callable[..., None] = wrapped
    for option in reversed(_INPUTS):
        result = option(result)
    return result


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


def _volts(text: str | None) -> float | None:
    """Return a voltage given as "126" or "126 V".

    Raises:
        click.BadParameter: It is neither.
    """
    if text is None:
        return None
    from stress.text.quantity import QuantityError, quantity

    try:
        value = quantity(f"{text} V" if text.strip()[-1:].isdigit() else text, "V")
    except QuantityError as problem:
        raise click.BadParameter(f"{problem}", param_hint="--high") from problem
    if not 0.0 < value < 1e5:
        raise click.BadParameter("wanted: a voltage between 0 and 100 kV", param_hint="--high")
    return value


def names_of(asked: str, circuit: Circuit) -> list[str]:
    """Return the positions asked for ("C5,C6") in the netlist's own spelling.

    Ends the process with status 2 where there is no such position.
    """
    by_key = {position.name.lower(): position.name for position in circuit.positions}
    names = [name.strip() for name in asked.split(",") if name.strip()]
    unknown = [name for name in names if name.lower() not in by_key]
    if unknown:
        listed = ", ".join(by_key.values())
        click.echo(f"no position {', '.join(unknown)}; the netlist has {listed}", err=True)
        sys.exit(UNUSABLE)
    return [by_key[name.lower()] for name in names]
