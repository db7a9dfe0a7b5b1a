"""`capstress sheet`: write a part sheet to fill in."""

from __future__ import annotations

import sys
from pathlib import Path

import click

from stress.command.options import UNUSABLE, plain_errors


@click.command()
@click.argument("file", type=click.Path(path_type=Path))
@click.option(
    "-o",
    "--output",
    type=click.Path(path_type=Path),
    help="Write here instead of printing; an existing file is not overwritten.",
)
@click.option(
    "--library",
    "libraries",
    multiple=True,
    type=click.Path(path_type=Path),
    help="Folder from which the netlist may include files; can be given again.",
)
@click.option(
    "--dialect",
    type=click.Choice(["default", "ps", "lt", "hs"]),
    help="Read the netlist in this dialect instead of the one recognised.",
)
def sheet(
    file: Path, output: Path | None, libraries: tuple[Path, ...], dialect: str | None
) -> None:
    """Print a part sheet for FILE with the roles, styles and tube pins that were inferred.

    What is assumed says so. A part sheet beside FILE is read, and what it states is kept.
    """
    from stress.circuit.build import survey
    from stress.circuit.skeleton import skeleton
    from stress.netlist.read import read
    from stress.parts import read_sheet
    from stress.parts.models import subcircuit
    from stress.parts.sheet import Sheet

    with plain_errors():
        netlist = read(file, libraries=libraries, dialect=dialect, built_in=subcircuit)
        beside = file.with_suffix(".toml")
        known = read_sheet.read(beside) if beside.is_file() else Sheet()
        circuit, _ = survey(netlist, known)
        text = skeleton(circuit)
        if output is None:
            click.echo(text, nl=False)
            return
        if output.exists():
            click.echo(f"{output} is there already; give another name", err=True)
            sys.exit(UNUSABLE)
        output.write_text(text, encoding="utf-8")
        click.echo(f"{output}: capacitors to look at: {len(circuit.positions)}")
