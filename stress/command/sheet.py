"""`capstress sheet`: write a part sheet to fill in."""

from __future__ import annotations

import sys
from pathlib import Path

import click

from stress.command.options import UNUSABLE, Given, inputs, plain_errors


@click.command()
@inputs
@click.option(
    "-o",
    "--output",
    type=click.Path(path_type=Path),
    help="Write here instead of printing; an existing file is not overwritten.",
)
def sheet(given: Given, output: Path | None) -> None:
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
        netlist = read(
            given.file, libraries=given.libraries, dialect=given.dialect, built_in=subcircuit
        )
        beside = given.sheet or given.file.with_suffix(".toml")
        known = Sheet()
        if given.sheet is not None or beside.is_file():
            known = read_sheet.read(beside)
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
