"""What is being worked on and how long it still takes; on the error channel, only for people."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from time import monotonic
from typing import Protocol

from rich.console import Console
from rich.progress import BarColumn, MofNCompleteColumn, Progress, TextColumn, TimeRemainingColumn

PATIENCE_s = 1.0  # nothing is shown before


class Report(Protocol):
    """Called by the review as it goes: the stage in words, cases answered, cases known of."""

    def __call__(self, stage: str, done: int, total: int) -> None:
        """Take note."""
        ...


@contextmanager
def progress(console: Console | None = None) -> Iterator[Report]:
    """Show progress with the time left while the block runs; silent unless on a terminal.

    Args:
        console: Where; standard error by default.
    """
    console = console or Console(stderr=True)
    bar = Progress(
        TextColumn("{task.description}"),
        BarColumn(),
        MofNCompleteColumn(),
        TextColumn("left"),
        TimeRemainingColumn(),
        console=console,
        transient=True,
        disable=not console.is_terminal,
    )
    task = bar.add_task("", total=None)
    began, started = monotonic(), False

    def report(stage: str, done: int, total: int) -> None:
        nonlocal started
        if not started and monotonic() - began > PATIENCE_s:
            bar.start()
            started = True
        bar.update(task, description=stage, completed=done, total=total)

    try:
        yield report
    finally:
        bar.stop()
