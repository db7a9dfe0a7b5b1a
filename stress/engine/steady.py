"""A case to its settled state: the cycle map first, the plain transient where it does not hold."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import replace

import numpy as np

from stress.engine.case import Answer, Floats, Proof, Settled, Wandering, Waves
from stress.engine.cycle import CycleMap, Grid, end_state, groups
from stress.engine.deck import Deck
from stress.engine.fixed_point import Point, approach, directional, jacobian, spectral_radius
from stress.engine.memory import Memory, Outcome, inherited, start_from, translated
from stress.engine.ngspice import Ngspice, RunFailed
from stress.engine.plain import (
    CHUNK,
    MOST_PERIODS,
    Course,
    departs,
    follow,
    follow_from_rest,
    holding,
    told,
)
from stress.engine.refine import alike

DISTANCE = 1e-4  # accepted distance to the fixed point, in yardsticks
PLAIN_PERIODS = 8  # from rest, before the first Jacobian
MORE_PERIODS = 3  # before each further one
TURNS, TURN_CYCLES = 8, 12
COARSE_TURNS = 2  # before the grid is made finer
WARM_CYCLES = 14
UNSTABLE = 1.01
REFUTATIONS = 3  # of a multiplier that looks unstable, before a whole Jacobian
AFAR = 1e-3  # accepted distance for what can only be run from rest
FINEST = 1920  # points a period


class Search:
    """The search for the settled state of one deck.

    Attributes:
        cycles, jacobian_cycles: Periods simulated so far.
    """

    def __init__(self, ngspice: Ngspice, deck: Deck, *, case: str) -> None:
        self.ngspice, self.deck, self.case = ngspice, deck, case
        self.cycles = self.jacobian_cycles = 0
        self.groups = groups(deck)

    @property
    def spent(self) -> int:
        """Periods simulated, with those for Jacobians."""
        return self.cycles + self.jacobian_cycles

    def run(self, memory: Memory | None, *, grid: Grid | None = None) -> Outcome:
        """Return the settled state, starting from a relative's where there is one.

        Raises:
            RunFailed: Where ngspice finds no solution.
        """
        if self.deck.period_s is None:
            return self.standing(grid or Grid())
        if self.deck.plain:
            return self.from_afar(grid or Grid(), self.deck.plain)
        if grid is None:
            grid = Grid() if memory is None else memory.grid
        phi, point = self.search(grid, memory)
        if not point.found:
            return self.plainly(phi, point.x)
        if memory is None:
            phi, point, waves = self.refined(phi, point)
        else:
            waves = phi.waves()
        kept = holding(self.deck, waves)
        if kept:
            return self.from_afar(phi.grid, f"{', '.join(kept)} keeps its state over the period")
        return self.stable(phi, point, waves)

    def search(self, grid: Grid, memory: Memory | None) -> tuple[CycleMap, Point]:
        """Search near a relative's state where that leads anywhere, else from rest."""
        if memory is None:
            return self.from_rest(grid)
        node_V = translated(self.deck, memory)
        phi = self.map(grid, node_V)
        x, matrix = inherited(self.deck, memory, start_from(self.deck, node_V))
        try:
            if matrix is not None and memory.removed == self.deck.removed:
                point = self.near(phi, x, matrix, most=WARM_CYCLES)
                if point.found:
                    return phi, point
                x, y = point.x, point.y
            else:
                y = self.counted(phi, x)
            matrix = self.jacobian(phi, x, y)
            point = self.near(phi, x, matrix, most=WARM_CYCLES, after=y)
            if point.found:
                return phi, point
        except RunFailed:
            pass  # from rest it may still be reached
        return self.from_rest(grid)

    def from_rest(self, grid: Grid) -> tuple[CycleMap, Point]:
        """Search from rest, or from `.ic`, with a Jacobian of its own every few cycles.

        Raises:
            RunFailed: Where not even the plain transient runs.
        """
        phi = self.map(grid, self.deck.initial_V)
        x = start_from(self.deck, self.deck.initial_V)
        x = self.counted(phi, x, periods=PLAIN_PERIODS)
        for turn in range(TURNS):
            y = self.counted(phi, x)
            try:
                matrix = self.jacobian(phi, x, y)
                point = self.near(phi, x, matrix, most=TURN_CYCLES, after=y)
                if point.found:
                    break
                y = point.y
            except RunFailed:
                phi.put_nodes({})  # a step led to where nothing can be solved
                point = Point.lost(x, y)
            x = self.counted(phi, y, periods=MORE_PERIODS)
            if turn >= COARSE_TURNS and phi.grid.points < FINEST:
                # Where the step is too coarse for an edge the map is not smooth.
                finer = replace(phi.grid, points=2 * phi.grid.points)
                phi = self.map(finer, phi.node_V)
        return phi, point

    def refined(self, phi: CycleMap, point: Point) -> tuple[CycleMap, Point, Waves]:
        """Halve the steps until the stresses hold still; keep the coarser of the last two."""
        waves = phi.waves()
        while phi.grid.points < FINEST:
            finer = self.map(replace(phi.grid, points=2 * phi.grid.points), phi.node_V)
            better = self.near(finer, point.x, point.jacobian, most=WARM_CYCLES)
            if not better.found:
                break
            found = finer.waves()
            if alike(waves, found):
                break
            phi, point, waves = finer, better, found
        return phi, point, waves

    def stable(self, phi: CycleMap, point: Point, waves: Waves) -> Outcome:
        """Return a point that was found, unless the circuit leaves it by itself."""
        matrix, growth, along = self.growth(phi, point)
        if growth > UNSTABLE:
            periods = int(np.clip(math.log(1e4) / math.log(growth), CHUNK, MOST_PERIODS))
            trial = self.map(phi.grid, phi.node_V)
            course = departs(trial, point.x, along=along, periods=periods)
            self.cycles += trial.cycles
            if course is not None:
                return self.wandering(course, unstable=True)
        return self.settled(phi, replace(point, jacobian=matrix), waves, growth)

    def growth(self, phi: CycleMap, point: Point) -> tuple[Floats, float, Floats]:
        """Return a Jacobian, its largest multiplier and the direction of it.

        Broyden's corrections are made for the next step, not for the multipliers: one that
        looks unstable is tried in its own direction before a whole Jacobian is paid for.
        """
        matrix, node_V = point.jacobian, phi.node_V
        for trial in range(REFUTATIONS + 1):
            growth = spectral_radius(matrix)
            if growth <= UNSTABLE:
                return matrix, growth, np.zeros_like(point.x)
            if trial == REFUTATIONS:
                matrix = self.jacobian(phi, point.x, point.y)
            values, vectors = np.linalg.eig(matrix)
            fastest = int(np.argmax(np.abs(values)))
            along = np.real(vectors[:, fastest])
            if trial == REFUTATIONS:
                return matrix, float(np.abs(values[fastest])), along
            phi.put_nodes(node_V)
            matrix = directional(
                lambda x: self.tried(phi, x),
                point.x,
                point.y,
                matrix,
                along=along,
                yardstick=phi.scale,
            )
            phi.put_nodes(node_V)
        raise AssertionError("the last turn returns")

    def settled(self, phi: CycleMap, point: Point, waves: Waves, growth: float) -> Outcome:
        """Return the answer of a point that was found."""
        proof = Proof(
            distance=point.distance,
            residual=point.residual,
            cycles=self.cycles,
            jacobian_cycles=self.jacobian_cycles,
            multiplier=growth,
            points=waves.time_s.size - 1,
            method="cycle map",
        )
        answer = Settled(case=self.case, waves=waves, proof=proof, notices=self.deck.notices)
        return self.outcome(answer, self.memory(phi, point.best, point.jacobian))

    def standing(self, grid: Grid) -> Outcome:
        """Return the operating point of a circuit in which nothing moves."""
        self.ngspice.load(self.deck.text(self.deck.initial_V, options=grid.options))
        self.ngspice.operating_point()
        self.cycles += 1
        rows = np.array([self.ngspice.vector(probe.vector)[-1] for probe in self.deck.probes])
        waves = Waves(
            np.array([0.0, 1.0]),
            tuple(probe.name for probe in self.deck.probes),
            np.repeat(rows[:, None], 2, axis=1),
        )
        proof = Proof(
            distance=0.0,
            residual=0.0,
            cycles=1,
            jacobian_cycles=0,
            multiplier=None,
            points=1,
            method="operating point",
        )
        node_V = {node: self.ngspice.last(deck) for deck, node in self.deck.nodes.items()}
        memory = Memory(
            states=tuple(state.element for state in self.deck.states),
            x=end_state(self.ngspice, self.deck),
            jacobian=None,
            node_V=node_V,
            removed=self.deck.removed,
        )
        answer = Settled(case=self.case, waves=waves, proof=proof, notices=self.deck.notices)
        return self.outcome(answer, memory)

    def plainly(self, phi: CycleMap, start: Floats) -> Outcome:
        """Follow the plain transient where the search found nothing."""
        trial = self.map(phi.grid, phi.node_V)
        course = follow(trial, start, tolerance=DISTANCE)
        self.cycles += trial.cycles
        if not course.settled:
            return self.wandering(course, unstable=False)
        return self.followed(trial, course, ())

    def from_afar(self, grid: Grid, why: str) -> Outcome:
        """Follow the plain transient from rest where the map does not hold."""
        phi = self.map(grid, self.deck.initial_V)
        start = start_from(self.deck, self.deck.initial_V)
        course = follow_from_rest(phi, start, tolerance=AFAR)
        self.cycles += phi.cycles
        if not course.settled:
            return self.wandering(course, unstable=False)
        return self.followed(phi, course, (f"{why}: settled by a plain transient",))

    def followed(self, phi: CycleMap, course: Course, notices: tuple[str, ...]) -> Outcome:
        """Return the answer of a plain transient that became periodic."""
        proof = Proof(
            distance=course.distance,
            residual=course.residual,
            cycles=self.cycles,
            jacobian_cycles=self.jacobian_cycles,
            multiplier=None,
            points=course.waves.time_s.size - 1,
            method="plain transient",
        )
        answer = Settled(
            case=self.case,
            waves=course.waves,
            proof=proof,
            notices=(*self.deck.notices, *notices),
        )
        return self.outcome(answer, self.memory(phi, course.x, None))

    def wandering(self, course: Course, *, unstable: bool) -> Outcome:
        """Return what was seen of a circuit that does not become periodic."""
        answer = Wandering(
            case=self.case,
            unstable=unstable,
            waves=course.waves,
            cycles=self.cycles,
            text=told(self.deck, course, unstable=unstable, cycles=self.cycles),
            notices=self.deck.notices,
        )
        return self.outcome(answer, None)

    def outcome(self, answer: Answer, memory: Memory | None) -> Outcome:
        """Return an answer with what it cost."""
        return Outcome(answer=answer, memory=memory, cycles=self.spent)

    def memory(self, phi: CycleMap, x: Floats, matrix: Floats | None) -> Memory:
        """Return what a state leaves for relatives."""
        return Memory(
            states=tuple(state.element for state in self.deck.states),
            x=x,
            jacobian=matrix,
            node_V={self.deck.nodes[deck]: value for deck, value in phi.node_V.items()},
            grid=phi.grid,
            removed=self.deck.removed,
        )

    def map(self, grid: Grid, node_V: Mapping[str, float]) -> CycleMap:
        """Return the cycle map on a grid."""
        return CycleMap(self.ngspice, self.deck, grid=grid, node_V=node_V)

    def counted(self, phi: CycleMap, x: Floats, *, periods: int = 1) -> Floats:
        """Return the state after some periods, which count."""
        self.cycles += periods
        return phi(x, periods=periods)

    def tried(self, phi: CycleMap, x: Floats) -> Floats:
        """Return the state after one period, counted with those for Jacobians."""
        self.jacobian_cycles += 1
        return phi(x)

    def jacobian(self, phi: CycleMap, x: Floats, y: Floats) -> Floats:
        """Return the Jacobian at x, its cycles counted apart."""
        node_V = phi.node_V

        def step(x: Floats) -> Floats:
            phi.put_nodes(node_V)
            return self.tried(phi, x)

        matrix = jacobian(step, x, y, yardstick=phi.scale, groups=self.groups)
        phi.put_nodes(node_V)
        return matrix

    def near(
        self,
        phi: CycleMap,
        x: Floats,
        matrix: Floats,
        *,
        most: int,
        after: Floats | None = None,
    ) -> Point:
        """Search from a state near the fixed point."""
        point = approach(
            lambda x: self.counted(phi, x),
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
