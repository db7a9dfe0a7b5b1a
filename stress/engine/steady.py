"""A case to its settled state: the cycle map first, the plain transient where it does not hold."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace

import numpy as np

from stress.engine.case import Answer, Floats, Proof, Settled, Wandering, Waves
from stress.engine.cycle import CycleMap, Grid, end_state
from stress.engine.deck import Deck
from stress.engine.fixed_point import Point, directional, fastest
from stress.engine.memory import Memory, Outcome, start_from
from stress.engine.ngspice import Ngspice
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
from stress.engine.seek import DISTANCE, Seeker

UNSTABLE = 1.01
REFUTATIONS = 3  # of a multiplier that looks unstable, before the Jacobian is renewed
AFAR = 1e-3  # accepted distance for what can only be run from rest


class Search(Seeker):
    """The search for the settled state of one deck, and what is told of it.

    Args:
        ngspice: The library.
        deck: The circuit, with laws as ngspice computes them fastest.
        spare: Gives the deck with laws as they stand.
        case: Name of the case.
        own: As in `Steady`.
    """

    def __init__(
        self,
        ngspice: Ngspice,
        deck: Deck,
        *,
        spare: Callable[[], Deck],
        case: str,
        own: bool = False,
    ) -> None:
        super().__init__(ngspice, deck, spare=spare)
        self.case, self._own = case, own

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
        phi, point = self.seek(grid, memory)
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
        looks unstable is tried in its own direction before it is renewed.
        """
        matrix, node_V = point.jacobian, phi.node_V
        if self._own:
            matrix = self.jacobian(phi, point.x, point.y)
        for trial in range(REFUTATIONS + 2):
            growth, along = fastest(matrix)
            if growth <= UNSTABLE:
                break
            if trial < REFUTATIONS:
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
            elif trial == REFUTATIONS:
                matrix = self.renewed(phi, point.x, point.y, matrix)
        return matrix, growth, along

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
        notices = (*self.deck.notices, *self.remarks)
        answer = Settled(case=self.case, waves=waves, proof=proof, notices=notices)
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
