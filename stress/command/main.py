"""The command `capstress`: a group whose commands are imported when they are called."""

from __future__ import annotations

import signal
import threading
from importlib import import_module
from types import FrameType
from typing import NoReturn

import click

COMMANDS = {
    "review": "What every capacitor bears, what its leakage would damage, and what to do first.",
    "check": "Read a netlist and list what was recognised; simulates nothing.",
    "sheet": "Write a part sheet to fill in.",
    "leak": "One position in depth: what its leakage does.",
    "fail": "One position in depth: what its failures do.",
    "bench": "Judge bench readings, or print the form for them.",
    "powerup": "The plan before the first switch-on.",
    "discharge": "How long it stays dangerous after switching off.",
    "part": "What is known of a tube, rectifier or semiconductor type.",
    "engine": "Which ngspice library is used.",
}


class Commands(click.Group):
    """Knows its commands by name; a module is imported when its command is asked for."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Return the names in the order of the work."""
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """Return the command of that name, or None."""
        if cmd_name not in COMMANDS:
            return None
        command: click.Command = getattr(import_module(f"stress.command.{cmd_name}"), cmd_name)
        return command

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """List the commands without importing any of them."""
        with formatter.section("Commands"):
            formatter.write_dl(list(COMMANDS.items()))


@click.command(cls=Commands)
@click.version_option(package_name="capstress")
@click.pass_context
def main(context: click.Context) -> None:
    """Find out what the capacitors of a piece of equipment really bear.

    FILE is a SPICE netlist; a part sheet of the same name with the ending .toml is read with it.
    High voltage kills: nothing that is printed here is leave to work on live equipment.
    """
    if threading.current_thread() is threading.main_thread():
        before = signal.signal(signal.SIGTERM, _end)
        context.call_on_close(lambda: signal.signal(signal.SIGTERM, before))


def _end(number: int, frame: FrameType | None) -> NoReturn:
    """End as an interruption from the keyboard does: workers and files go first."""
    raise SystemExit(128 + number)
