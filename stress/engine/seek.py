"""The fixed point of a circuit's cycle map: near a relative's, or from rest."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import replace

import numpy as np

from stress.engine.case import Floats, Waves
from stress.engine.cycle import CycleMap, Grid, groups
from stress.engine.deck import Deck
from stress.engine.fixed_point import Point, approach, jacobian, renewed
from stress.engine.memory import Memory, inherited, start_from, translated
from stress.engine.ngspice import Ngspice, RunFailed
from stress.engine.refine import excess

DISTANCE = 1e-4  # accepted distance to the fixed point, in yardsticks
PLAIN_PERIODS = 8  # from rest, before the first Jacobian
MORE_PERIODS = 3  # before each further one
TURNS, TURN_CYCLES = 8, 12
COARSE_TURNS = 2  # before the grid is made finer
COARSEST = 4  # times as many points at most while nothing is found
WARM_CYCLES = 16
RENEWALS = 2  # of a relative's Jacobian, before rest is tried
FINEST = 1920  # points a period
ENOUGH = 1.8  # times as many points, where twice as many are not needed


class Seeker:
    """The search for the fixed point of one deck.

    Args:
        ngspice: The library.
        deck: The circuit, with laws as ngspice computes them fastest.
        spare: Gives the deck with laws as they stand, which is slower and starts more easily.

    Attributes:
        deck: The one that is used now.
        cycles, jacobian_cycles: Periods simulated so far.
        remarks: What the user must know of how it was found.
    """

    def __init__(self, ngspice: Ngspice, deck: Deck, *, spare: Callable[[], Deck]) -> None:
        self.ngspice, self.deck, self.spare = ngspice, deck, spare
        self.cycles = self.jacobian_cycles = 0
        self.remarks: tuple[str, ...] = ()
        self._groups = groups(deck)

    @property
    def spent(self) -> int:
        """Periods simulated, with those for Jacobians."""
        return self.cycles + self.jacobian_cycles

    def seek(self, grid: Grid, memory: Memory | None) -> tuple[CycleMap, Point]:
        """Search near a relative's state where that leads anywhere, else from rest."""
        if memory is None:
            return self.from_rest(grid)
        eased, known = self.deck, None
        for easy in (True, False):
            self.deck = eased if easy else self.spare()
            try:
                phi, point, known = self.beside(grid, memory)
            except RunFailed:
                continue  # laws as they stand may start where eased ones do not
            if point.found:
                return phi, point
            break
        self.deck = eased
        return self.from_rest(grid, known=known)

    def beside(self, grid: Grid, memory: Memory) -> tuple[CycleMap, Point, Floats]:
        """Search near a relative's state; return the Jacobian too.

        Raises:
            RunFailed: Where nothing can be solved there.
        """
        node_V = translated(self.deck, memory)
        phi = self.map(grid, node_V)
        x, matrix = inherited(self.deck, memory, start_from(self.deck, node_V))
        if matrix is None or memory.removed != self.deck.removed:
            y = self.counted(phi, x)
            matrix = self.jacobian(phi, x, y)
            point = self.near(phi, x, matrix, most=WARM_CYCLES, after=y)
        else:
            point = self.near(phi, x, matrix, most=WARM_CYCLES)
        for _ in range(RENEWALS):
            if point.found:
                break
            matrix = self.renewed(phi, point.x, point.y, matrix)
            point = self.near(phi, point.x, matrix, most=WARM_CYCLES, after=point.y)
        return phi, point, matrix

    def from_rest(self, grid: Grid, *, known: Floats | None = None) -> tuple[CycleMap, Point]:
        """Search from rest, or from `.ic`, with a Jacobian of its own every few cycles.

        Args:
            grid: Made finer on the way where nothing is found.
            known: A relative's Jacobian, renewed before a whole one is paid for.

        Raises:
            RunFailed: Where not even the plain transient runs.
        """
        phi = self.map(grid, self.deck.initial_V)
        x = start_from(self.deck, self.deck.initial_V)
        x = self.counted(phi, x, periods=PLAIN_PERIODS)
        matrix = known
        for turn in range(TURNS):
            y = self.counted(phi, x)
            try:
                if matrix is None:
                    matrix = self.jacobian(phi, x, y)
                else:
                    matrix = self.renewed(phi, x, y, matrix)
                point = self.near(phi, x, matrix, most=TURN_CYCLES, after=y)
                if point.found:
                    break
                y = point.y
            except RunFailed:
                phi.put_nodes({})  # a step led to where nothing can be solved
                point = Point.lost(x, y)
            if turn == 0 and known is not None:
                matrix = None
            x = self.counted(phi, y, periods=MORE_PERIODS)
            if turn >= COARSE_TURNS and phi.grid.points < COARSEST * grid.points:
                # Where the step is too coarse for an edge the map is not smooth.
                finer = replace(phi.grid, points=2 * phi.grid.points)
                phi = self.map(finer, phi.node_V)
        return phi, point

    def refined(self, phi: CycleMap, point: Point) -> tuple[CycleMap, Point, Waves]:
        """Make the steps shorter until the stresses hold still.

        Two grids tell how far the coarser one is off; the error goes with the square of the step
        (Gear's method of second order), which tells the grid that suffices.
        """
        waves = phi.waves()
        while phi.grid.points < FINEST:
            finer, better = self.regridded(phi, point, points=2 * phi.grid.points)
            if not better.found:
                break
            found = finer.waves()
            factor = excess(waves, found)
            if factor <= 1.0:
                break
            if factor <= ENOUGH**2:
                points = int(round(phi.grid.points * math.sqrt(factor), -1)) + 10
                between, middle = self.regridded(finer, better, points=points)
                if middle.found:
                    return between, middle, between.waves()
            phi, point, waves = finer, better, found
        else:
            self.remarks += (
                f"{phi.grid.points} points a period do not hold the stresses still: sharp edges "
                "and peaks are less exact",
            )
        return phi, point, waves

    def regridded(self, phi: CycleMap, point: Point, *, points: int) -> tuple[CycleMap, Point]:
        """Return a found point on another grid."""
        other = self.map(replace(phi.grid, points=points), phi.node_V)
        return other, self.near(other, point.best, point.jacobian, most=WARM_CYCLES)

    def near(
        self,
        phi: CycleMap,
        x: Floats,
        matrix: Floats,
        *,
        most: int,
        after: Floats | None = None,
    ) -> Point:
        """Search from a state near the fixed point.

        Raises:
            RunFailed: Where nothing can be solved at the start.
        """
        good_V = None if after is None else phi.node_V

        def step(x: Floats) -> Floats:
            nonlocal good_V
            node_V = phi.node_V
            try:
                y = self.counted(phi, x)
            except RunFailed:
                if good_V is None:
                    raise
                phi.put_nodes(good_V)
                return np.full_like(x, np.nan)  # a step led to where nothing can be solved
            good_V = node_V
            return y

        point = approach(
            step,
            x,
            matrix,
            after=after,
            yardstick=phi.scale,
            tolerance=DISTANCE,
            most=most,
        )
        if point.found and point.x is x and after is not None:
            self.counted(phi, x)  # the last run was one for the Jacobian
        return point

    def jacobian(self, phi: CycleMap, x: Floats, y: Floats) -> Floats:
        """Return the Jacobian at x, its cycles counted apart."""
        node_V = phi.node_V

        def step(x: Floats) -> Floats:
            phi.put_nodes(node_V)
            return self.tried(phi, x)

        matrix = jacobian(step, x, y, yardstick=phi.scale, groups=self._groups)
        phi.put_nodes(node_V)
        return matrix

    def renewed(self, phi: CycleMap, x: Floats, y: Floats, known: Floats) -> Floats:
        """Return the Jacobian at x from one of nearby, its cycles counted apart."""
        node_V = phi.node_V

        def step(x: Floats) -> Floats:
            phi.put_nodes(node_V)
            return self.tried(phi, x)

        matrix = renewed(step, x, y, known, yardstick=phi.scale)
        phi.put_nodes(node_V)
        return matrix

    def tried(self, phi: CycleMap, x: Floats) -> Floats:
        """Return the state after one period, counted with those for Jacobians."""
        self.jacobian_cycles += 1
        return phi(x)

    def counted(self, phi: CycleMap, x: Floats, *, periods: int = 1) -> Floats:
        """Return the state after some periods, which count."""
        self.cycles += periods
        return phi(x, periods=periods)

    def map(self, grid: Grid, node_V: Mapping[str, float]) -> CycleMap:
        """Return the cycle map on a grid."""
        return CycleMap(self.ngspice, self.deck, grid=grid, node_V=node_V)
