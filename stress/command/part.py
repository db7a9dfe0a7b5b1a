"""`capstress part TYPE`: what is known of a type."""

from __future__ import annotations

import sys
from pathlib import Path

import click

from stress.command.options import UNUSABLE, plain_errors


@click.command("part")
@click.argument("type_name", metavar="[TYPE]", required=False)
@click.option(
    "--types",
    "type_files",
    multiple=True,
    type=click.Path(path_type=Path),
    help="Your own table of types; can be given again.",
)
@click.option("--model", is_flag=True, help="Print the built-in model as SPICE text instead.")
def part(type_name: str | None, type_files: tuple[Path, ...], model: bool) -> None:
    """Print what is known of a tube, rectifier or semiconductor TYPE, with the sources.

    Without TYPE: all designations. TYPE may also be a built-in transformer or choke.
    """
    from stress.parts import models, types
    from stress.parts.describe import description, listing, wound_description

    with plain_errors():
        extra = tuple(entry for path in type_files for entry in types.load(path))
    if type_name is None:
        click.echo(listing())
        return
    wound = wound_description(type_name)
    if wound is not None:
        click.echo(models.subcircuit(type_name) if model else wound, nl=not model)
        return
    entry = types.find(type_name, extra=extra)
    if entry is None:
        near = types.near(type_name)
        hint = f"; near it: {', '.join(near)}" if near else ""
        click.echo(f"no type {type_name} in the table{hint}", err=True)
        sys.exit(UNUSABLE)
    if not model:
        click.echo(description(entry))
        return
    text = models.subcircuit(type_name, extra=extra)
    if text is None:
        click.echo(f"{entry.name} has no built-in model", err=True)
        sys.exit(UNUSABLE)
    click.echo(text, nl=False)
