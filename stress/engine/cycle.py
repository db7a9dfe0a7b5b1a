"""One period of a circuit as a map from its state to its state.

A start sets every capacitor voltage and inductor current exactly; junction charges take theirs
from the node voltages of the `.ic` card, which is renewed when they have moved.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from stress.engine.case import Floats, Waves
from stress.engine.deck import Deck
from stress.engine.ngspice import Ngspice, RunFailed

# The truncation error does not steer the step, so that neighbouring starts use the same grid
# and the map is smooth; the Newton iteration at each point is the other source of roughness.
OPTIONS = "method=gear trtol=1e7 itl4=100"
MOVED_V = 0.01  # of a junction, before its start is renewed
MOVED_SHARE = 1e-4
FAST_F = 2e-7  # farad per second of period: smaller capacitors are tested in groups
FAST_H = 0.1  # henry per second of period, likewise


@dataclass(frozen=True, slots=True)
class Grid:
    """How finely a period is cut, and how closely each point is solved.

    Attributes:
        points: Steps a period, at least.
        reltol: Relative tolerance of the Newton iteration.
        more: Further options.
    """

    points: int = 160
    reltol: float = 1e-6
    more: str = ""

    @property
    def options(self) -> str:
        """Solver options as ngspice reads them."""
        return f"{OPTIONS} reltol={self.reltol!r} {self.more}"


# After a numerical failure: smaller steps, a tolerance that is easier to meet, more patience.
CAREFUL = Grid(points=400, reltol=1e-4, more="itl1=500 itl2=500 abstol=1e-10 vntol=1e-5")
# After one more: what floats on junctions alone is only found with 10 gigohm to ground.
SHUNTED = replace(CAREFUL, more=f"{CAREFUL.more} rshunt=1e10")


class CycleMap:
    """The state after one period, from the state before it.

    Attributes:
        cycles: Periods simulated so far.
        kept: How many periods of a longer run are kept, the last ones.
    """

    def __init__(
        self, ngspice: Ngspice, deck: Deck, *, grid: Grid, node_V: Mapping[str, float]
    ) -> None:
        if deck.period_s is None:
            raise ValueError("a circuit without a period has no cycle map")
        self.deck, self.grid, self.period_s = deck, grid, deck.period_s
        self.cycles, self.kept = 0, 1
        self._ngspice = ngspice
        self._node_V = dict(node_V)
        self._loaded_V: dict[str, float] | None = None
        self.kinds = np.array([state.kind == "C" for state in deck.states], dtype=bool)

    @property
    def node_V(self) -> dict[str, float]:
        """Node voltages at the end of the last period, by node of the deck."""
        return dict(self._node_V)

    def put_nodes(self, node_V: Mapping[str, float]) -> None:
        """Say what the node voltages are at the next start."""
        self._node_V = dict(node_V)

    def scale(self, x: Floats) -> Floats:
        """Return the yardstick of each state, shape (n,): 1 V or 1 mA, or its own size."""
        return np.maximum(np.where(self.kinds, 1.0, 1e-3), np.abs(x))

    def __call__(self, x: Floats, *, periods: int = 1) -> Floats:
        """Return the state after some periods, both of shape (n,).

        Raises:
            RunFailed: Where the run breaks off, or cannot be started from this.
        """
        if not np.isfinite(x).all():
            raise RunFailed("a state that is not finite")
        if self._loaded_V is None or self._junctions_moved(self._loaded_V):
            self._load(self._node_V)
        self.cycles += periods
        try:
            self._run(x, periods)
        except RunFailed:
            # Without node voltages to start from the first point is solved from nothing.
            self._load({})
            self._loaded_V = None  # the next start has node voltages again
            self._run(x, periods)
        end = end_state(self._ngspice, self.deck)
        if not np.isfinite(end).all():
            raise RunFailed("values that are not finite")
        self._node_V = {node: self._ngspice.last(node) for node in self.deck.nodes}
        return end

    def waves(self) -> Waves:
        """Return the last period that was run, closed: its start is what its end is."""
        time_s = self._ngspice.vector("time")
        start = time_s[-1] - self.period_s
        step_s = self.period_s / self.grid.points
        # The first steps after a start are tiny, and a capacitor's current in them is noise.
        inside = time_s > start + 0.5 * step_s
        inside[-1] = True
        found = self._rows(inside)
        times = np.concatenate(([0.0], time_s[inside] - start))
        times[-1] = self.period_s
        return Waves(times, self._names, np.concatenate((found[:, -1:], found), axis=1))

    def stretch(self) -> Waves:
        """Return all that was kept of the last run, as it is."""
        time_s = self._ngspice.vector("time")
        rising = np.concatenate(([True], np.diff(time_s) > 0.0))
        return Waves(time_s[rising], self._names, self._rows(rising))

    @property
    def _names(self) -> tuple[str, ...]:
        return tuple(probe.name for probe in self.deck.probes)

    def _rows(self, chosen: NDArray[np.bool_]) -> Floats:
        rows = np.empty((len(self.deck.probes), int(chosen.sum())))
        for row, probe in zip(rows, self.deck.probes, strict=True):
            row[:] = self._ngspice.vector(probe.vector)[chosen]
        return rows

    def _load(self, node_V: Mapping[str, float]) -> None:
        self._ngspice.load(self.deck.text(node_V, options=self.grid.options))
        self._loaded_V = dict(node_V)

    def _run(self, x: Floats, periods: int) -> None:
        for state, value in zip(self.deck.states, x, strict=True):
            self._ngspice.alter_start(state.device, float(value))
        self._ngspice.transient(
            stop_s=periods * self.period_s,
            step_s=self.period_s / self.grid.points,
            keep_from_s=max(periods - self.kept, 0) * self.period_s,
        )

    def _junctions_moved(self, loaded_V: Mapping[str, float]) -> bool:
        for first, second in self.deck.junctions:
            now = self._node_V.get(first, 0.0) - self._node_V.get(second, 0.0)
            then = loaded_V.get(first, 0.0) - loaded_V.get(second, 0.0)
            if not math.isclose(now, then, rel_tol=MOVED_SHARE, abs_tol=MOVED_V):
                return True
        return False


def end_state(ngspice: Ngspice, deck: Deck) -> Floats:
    """Return the state at the end of the last run, shape (n,)."""
    last = ngspice.last
    end = np.empty(len(deck.states))
    for at, state in enumerate(deck.states):
        if state.kind == "L":
            end[at] = last(state.plus)
        else:
            plus = last(state.plus) if state.plus != "0" else 0.0
            end[at] = plus - (last(state.minus) if state.minus != "0" else 0.0)
    return end


def groups(deck: Deck) -> tuple[tuple[int, ...], ...]:
    """Return which states are tested together for a Jacobian: the quick ones, by their size."""
    period_s = deck.period_s or 1.0
    least = {"C": FAST_F * period_s, "L": FAST_H * period_s}
    quick = [at for at, state in enumerate(deck.states) if state.size < least[state.kind]]
    slow = [at for at in range(len(deck.states)) if at not in set(quick)]
    return (tuple(quick), *((at,) for at in slow))
