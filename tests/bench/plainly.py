"""Plain transients from rest in this process: what a case costs without the cycle map."""

import os
import tempfile

import numpy as np

from stress.engine.case import Case
from stress.engine.cycle import CycleMap, Grid
from stress.engine.draft import Draft
from stress.engine.memory import start_from
from stress.engine.ngspice import Ngspice
from stress.engine.seek import Seeker

CHUNK = 40  # periods, over which one is timed
_KEPT: list[Ngspice] = []


def ngspice() -> Ngspice:
    """The library of this process, in an empty folder."""
    if not _KEPT:
        folder = tempfile.mkdtemp(prefix="capstress-bench-")
        here = os.getcwd()
        os.chdir(folder)
        _KEPT.append(Ngspice())
        os.chdir(here)
    return _KEPT[0]


def settled_plainly(case: Case, *, grid: Grid, within: float, most: int) -> tuple[float, int]:
    """Run a case from rest until it is near its fixed point; return (seconds in ngspice, periods).

    The fixed point is found first, outside the time. A circuit that is not there after `most`
    periods counts with what it has spent.
    """
    deck = Draft(case.twin, case.removed, forever=True).deck(case.values)
    search = Seeker(ngspice(), deck, spare=lambda: deck)
    _, point = search.from_rest(grid)
    target = point.best
    phi = CycleMap(ngspice(), deck, grid=grid, node_V=deck.initial_V)
    start = start_from(deck, deck.initial_V)
    began = ngspice().seconds
    phi(start, periods=CHUNK)
    per_period = (ngspice().seconds - began) / CHUNK
    # Counted on the cycle map, whose fixed point is known; timed as one run without restarts.
    phi = CycleMap(ngspice(), deck, grid=grid, node_V=deck.initial_V)
    x, periods = start, 0
    while periods < most:
        x, periods = phi(x), periods + 1
        if float(np.max(np.abs(x - target) / phi.scale(target))) <= within:
            break
    return periods * per_period, periods


def averaged_plainly(
    case: Case, *, points: int, periods: int
) -> dict[str, tuple[float, float, float]]:
    """Return (mean, ripple rms, peak) of every row after a fine plain transient from rest."""
    deck = Draft(case.twin, case.removed, forever=True).deck(case.values)
    phi = CycleMap(ngspice(), deck, grid=Grid(points=points), node_V=deck.initial_V)
    x = start_from(deck, deck.initial_V)
    while phi.cycles < periods:
        x = phi(x, periods=10)
    waves = phi.waves()
    return {
        name: (waves.mean(row), waves.rms(row - waves.mean(row)), float(row.max()))
        for name, row in zip(waves.names, waves.values, strict=True)
    }
