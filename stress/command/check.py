"""`capstress check`: read, resolve and list; simulates nothing."""

from __future__ import annotations

import shutil
import sys
from pathlib import Path

import click

from stress.command.options import UNUSABLE, plain_errors


@click.command()
@click.argument("file", type=click.Path(path_type=Path))
@click.option(
    "--sheet", type=click.Path(path_type=Path), help="Part sheet; usually FILE's stem with .toml."
)
@click.option(
    "--library",
    "libraries",
    multiple=True,
    type=click.Path(path_type=Path),
    help="Folder from which the netlist may include files; can be given again.",
)
@click.option(
    "--types",
    "type_files",
    multiple=True,
    type=click.Path(path_type=Path),
    help="Your own table of tube and semiconductor types; can be given again.",
)
@click.option(
    "--dialect",
    type=click.Choice(["default", "ps", "lt", "hs"]),
    help="Read the netlist in this dialect instead of the one recognised.",
)
def check(
    file: Path,
    sheet: Path | None,
    libraries: tuple[Path, ...],
    type_files: tuple[Path, ...],
    dialect: str | None,
) -> None:
    """List what was recognised in FILE: positions with roles, tubes with pins, sources.

    Nothing is simulated. Exit status 2 when something prevents a simulation; what can be
    listed is listed all the same.
    """
    from stress.circuit.build import survey
    from stress.netlist.read import read
    from stress.parts import read_sheet, types
    from stress.parts.models import subcircuit
    from stress.parts.sheet import Sheet
    from stress.report.inventory import inventory
    from stress.text.span import SourceError, SourceErrors

    with plain_errors():
        netlist = read(file, libraries=libraries, dialect=dialect, built_in=subcircuit)
        own = [entry for path in type_files for entry in types.load(path)]
        beside = sheet if sheet is not None else file.with_suffix(".toml")
        errors: list[SourceError] = []
        known = Sheet()
        if sheet is not None or beside.is_file():
            try:
                known = read_sheet.read(beside)
            except SourceErrors as problems:
                errors += problems.errors
        circuit, wrong = survey(netlist, known, types=own)
        errors += wrong
    width = shutil.get_terminal_size().columns
    for line in inventory(circuit, errors=errors, width=width):
        click.echo(_spelt(line))
    if errors or netlist.obstacles:
        sys.exit(UNUSABLE)


def _spelt(line: str) -> str:
    """Return a line as the output can show it."""
    encoding = (sys.stdout.encoding or "utf-8").lower()
    if encoding.startswith("utf"):
        return line
    from stress.report.words import encodable  # loads much that is not needed else

    return encodable(line, encoding)
