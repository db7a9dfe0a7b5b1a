"""Progress is for people at a terminal, and only where there is something to wait for."""

import io

import pytest
from rich.console import Console

from stress.report import progress as module
from stress.report.progress import progress


@pytest.mark.parametrize(
    ("terminal", "patience_s", "shown"),
    [(True, 0.0, True), (True, 1e9, False), (False, 0.0, False)],
    ids=["slow on a terminal", "quick on a terminal", "slow in a pipe"],
)
def test_progress(monkeypatch, terminal, patience_s, shown):
    monkeypatch.setattr(module, "PATIENCE_s", patience_s)
    out = io.StringIO()
    with progress(Console(file=out, force_terminal=terminal, width=100)) as report:
        report("leakage", 3, 40)
    assert ("leakage" in out.getvalue()) is shown
    assert ("3/40" in out.getvalue()) is shown
