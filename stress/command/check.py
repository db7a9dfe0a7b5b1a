"""`capstress check`: read, resolve and list; simulates nothing."""

from __future__ import annotations

import shutil
import sys
from dataclasses import replace

import click

from stress.command.options import UNUSABLE, Given, inputs, plain_errors


@click.command()
@inputs
def check(given: Given) -> None:
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
        netlist = read(
            given.file, libraries=given.libraries, dialect=given.dialect, built_in=subcircuit
        )
        own = [entry for path in given.type_files for entry in types.load(path)]
        beside = given.sheet or given.file.with_suffix(".toml")
        errors: list[SourceError] = []
        known = Sheet()
        if given.sheet is not None or beside.is_file():
            try:
                known = read_sheet.read(beside)
            except SourceErrors as problems:
                errors += problems.errors  # what the netlist alone tells is still listed
        if given.high_V is not None:
            known = replace(known, line=replace(known.line, high_V=given.high_V))
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
