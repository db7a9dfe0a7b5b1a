"""`capstress engine`: which ngspice library is used."""

from __future__ import annotations

import platform

import click

from stress.engine.ngspice import VARIABLE, LibraryMissing
from stress.engine.pool import Pool

TESTED = ("39",)  # versions that this program's tests were run with
HOW = {
    "Linux": "Debian, Ubuntu: apt install libngspice0; Fedora: dnf install libngspice",
    "Darwin": "macOS: brew install libngspice",
    "Windows": "Windows: the ngspice DLL package from ngspice.sourceforge.io",
}


@click.command()
def engine() -> None:
    """Tell which ngspice library is used, its version, and how to get one."""
    try:
        with Pool(jobs=1) as pool:
            found = pool.versions()
    except LibraryMissing as error:
        click.echo(f"No ngspice library: {error}.", err=True)
        click.echo(f"To get one: {how_to_get()}.", err=True)
        click.echo(f"One in an unusual place is named by the variable {VARIABLE}.", err=True)
        raise SystemExit(3) from None
    click.echo(f"library   {found.library}")
    tested = "tested with this program" if found.ngspice in TESTED else untested()
    click.echo(f"ngspice   {found.ngspice}, {tested}")
    click.echo(f"PySpice   {found.pyspice}")
    click.echo(f"another   {how_to_get()}; or name one by the variable {VARIABLE}")


def how_to_get() -> str:
    """Return how to install the library on this system, or on all where it is unknown."""
    return HOW.get(platform.system(), "; ".join(HOW.values()))


def untested() -> str:
    """Return what is said of a version that the tests were not run with."""
    return f"not tried with this program (tried: {', '.join(TESTED)}); its manual promises the same"
