"""The fixed point of a map, from few evaluations of it. Numbers only; knows no circuit.

The settled state of a circuit is the fixed point of its cycle map Φ (Aprille and Trick, Proc.
IEEE 60, 1972; Skelboe, IEEE Trans. CAS 27, 1980). Newton's method needs the Jacobian J of Φ,
one more cycle for every state; Broyden's first formula (Math. Comp. 19, 1965) corrects a J
with every cycle that is run anyway. Measured on two receivers, a push-pull amplifier, a
transmitter, a flyback and a buck converter:

- from rest, eight plain periods, one J, then Newton with Broyden's corrections: 12 to 31 cycles.
  Anderson's mixing (J. ACM 12, 1965) without any J took 7 to 36, and stalled on the amplifier
  and the flyback. Newton with a fresh J at every step takes the fewest steps and by far the
  most cycles.
- from a solved neighbour with its J: 2 to 5 cycles.

So a root case pays for a Jacobian and its relatives share it. With nothing on the supply the
multipliers come close to 1, and a step too far charges a capacitor to where only its leakage
brings it back; from rest the steps stay below the fixed point by themselves, because the charge
that a rectifier passes is convex in the voltage it meets.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import TypeAlias

import numpy as np

from stress.engine.case import Floats

Map: TypeAlias = Callable[[Floats], Floats]
Yardstick: TypeAlias = Callable[[Floats], Floats]

FAR, PLAIN_STEPS = 10.0, 1  # a residual in yardsticks; periods that are just followed
STEP_LIMIT = 2.0  # of one Newton step, in yardsticks
CUT = 0.3  # of a step that was too long
GROWS = 3.0  # the distance after a step that is still taken, against the one before
LEAST_SHARE = 0.02  # of a step that led astray
SHRINKS = 0.5  # what a confirmed step leaves of a residual, at most
SILENT = 1e-3  # of the tolerance: a residual so small need not shrink further
PERTURBATION = 1e-3  # in yardsticks
FORGOTTEN = 1e-3  # of a deviation is as good as nothing


@dataclass(frozen=True, slots=True)
class Point:
    """Where an iteration ended.

    Attributes:
        x, y: Shape (n,): a state and the state one period later.
        jacobian: Shape (n, n), as known by then.
        distance: Largest estimated distance of x to the fixed point, in yardsticks.
        residual: Largest change over the period, in yardsticks.
        found: Whether the distance is within the tolerance and confirmed.
    """

    x: Floats
    y: Floats
    jacobian: Floats
    distance: float
    residual: float
    found: bool

    @classmethod
    def lost(cls, x: Floats, y: Floats) -> Point:
        """Return a state from which nothing was found."""
        none = np.zeros((x.size, x.size))
        return cls(x, y, none, np.inf, np.inf, False)

    @property
    def best(self) -> Floats:
        """Return the estimate of the fixed point, shape (n,)."""
        matrix = np.eye(self.x.size) - self.jacobian
        return np.asarray(self.x + _solved(matrix, self.y - self.x), dtype=np.float64)


def jacobian(
    phi: Map, x: Floats, y: Floats, *, yardstick: Yardstick, groups: Sequence[Sequence[int]]
) -> Floats:
    """Return the Jacobian of the map at x by finite differences, shape (n, n).

    States of which nothing is left after one period are tested together: a group that leaves
    no trace costs one evaluation, else it is halved.

    Args:
        phi: The map.
        x, y: Shape (n,): a state and what the map makes of it.
        yardstick: Gives what a deviation of each state is measured against, from a state.
        groups: Which states are tested together; together all of them.
    """
    steps = PERTURBATION * yardstick(x)
    result: Floats = np.zeros((x.size, x.size))
    waiting = [tuple(group) for group in groups if group]
    while waiting:
        group = list(waiting.pop())
        moved = x.copy()
        moved[group] += steps[group]
        change = phi(moved) - y
        if len(group) == 1:
            result[:, group[0]] = change / steps[group[0]]
        elif np.max(np.abs(change) / steps) > 1e-3:
            half = len(group) // 2
            waiting += [tuple(group[:half]), tuple(group[half:])]
    return result


def renewed(phi: Map, x: Floats, y: Floats, known: Floats, *, yardstick: Yardstick) -> Floats:
    """Return the Jacobian at x from one that was known nearby, shape (n, n).

    After one period little is left of most states, so that what the map makes of a
    neighbourhood has far fewer dimensions than there are states (15 of 50 in an amplifier). The
    known Jacobian tells which; only along those, and along the residual, the map is tried.

    Args:
        phi: The map.
        x, y: Shape (n,): a state and what the map makes of it.
        known: Shape (n, n).
        yardstick: Gives what a deviation of each state is measured against, from a state.
    """
    scale = yardstick(x)
    scaled = known * scale / scale[:, None]
    reached, sizes, _ = np.linalg.svd(np.column_stack((scaled, (y - x) / scale)))
    matrix = known
    for along in reached.T[: np.count_nonzero(sizes > FORGOTTEN)]:
        matrix = directional(phi, x, y, matrix, along=along * scale, yardstick=yardstick)
    return matrix


def directional(
    phi: Map, x: Floats, y: Floats, matrix: Floats, *, along: Floats, yardstick: Yardstick
) -> Floats:
    """Return a Jacobian corrected by what the map does in one direction.

    Args:
        phi: The map.
        x, y: Shape (n,): a state and what the map makes of it.
        matrix: Shape (n, n): the Jacobian to correct.
        along: Shape (n,): the direction.
        yardstick: Gives what a deviation of each state is measured against, from a state.
    """
    scale = yardstick(x)
    moved = along * PERTURBATION / max(_length(along, scale), 1e-300)
    return _corrected(matrix, moved, phi(x + moved) - y, scale)


def approach(
    phi: Map,
    start: Floats,
    known: Floats,
    *,
    after: Floats | None = None,
    yardstick: Yardstick,
    tolerance: float,
    most: int,
    limit: float = STEP_LIMIT,
) -> Point:
    """Find the fixed point from a neighbourhood in which a Jacobian is roughly known.

    A point is accepted where the estimated distance |(I-J)⁻¹(Φ(x)-x)| is within the tolerance
    and the step before it shrank every residual that matters: with multipliers near 1 a wrong
    Jacobian makes any small residual look like arrival, and only the next cycle tells.

    Args:
        phi: The map; not finite where it has no value, which makes the step before it shorter.
        start: Shape (n,).
        known: Shape (n, n): a Jacobian, which is corrected on the way.
        after: Shape (n,): what the map makes of the start, where that is known.
        yardstick: Gives what a deviation of each state is measured against.
        tolerance: Largest estimated distance, in yardsticks.
        most: Evaluations at most.
        limit: Longest step, in yardsticks.
    """
    walk = _Walk(start, known, yardstick=yardstick, tolerance=tolerance, limit=limit)
    point = None
    for _ in range(most):
        y = phi(walk.x) if after is None else after
        after = None
        reached = walk.entered(y)
        if reached is not None:
            point = reached
            if point.found or not np.isfinite(point.distance):
                break
            walk.advance(point)
        elif walk.share <= LEAST_SHARE and not np.isfinite(y).all():
            break
    assert point is not None
    return point


class _Walk:
    """An iteration on its way: where it stands, what it knows, how long its steps may be."""

    def __init__(
        self,
        start: Floats,
        known: Floats,
        *,
        yardstick: Yardstick,
        tolerance: float,
        limit: float,
    ) -> None:
        self.x, self.share = start, 1.0
        self._matrix: Floats = np.eye(start.size) - known
        self._yardstick, self._tolerance, self._limit = yardstick, tolerance, limit
        self._before: tuple[Floats, Floats] | None = None
        self._promised = np.inf
        self._cut, self._plain = False, PLAIN_STEPS

    def entered(self, y: Floats) -> Point | None:
        """Enter what the map makes of the state; None where the step before it was too long."""
        before, residual, scale = self._before, y - self.x, self._yardstick(self.x)
        if before is not None:
            if not np.isfinite(y).all():
                self._shorten()
                self.x = before[0] + CUT * (self.x - before[0])
                return None
            # Measured by the matrix that chose the step, a good step brings the end nearer.
            nearer = _length(_solved(self._matrix, residual), scale) <= GROWS * self._promised
            self._matrix = _corrected(self._matrix, self.x - before[0], before[1] - residual, scale)
            if not nearer and self.share > LEAST_SHARE:
                self._shorten()
                self.x = before[0] + self._step(before[1], scale)
                return None
            # Not at once after a step that had to be cut.
            self.share = self.share if self._cut else min(1.0, self.share / CUT)
            self._cut = False
        distance = _length(_solved(self._matrix, residual), scale)
        change = np.abs(residual) / scale
        previous = None if before is None else np.abs(before[1]) / scale
        return Point(
            self.x,
            y,
            np.eye(y.size) - self._matrix,
            distance,
            float(np.max(change, initial=0.0)),
            distance <= self._tolerance and _confirmed(change, previous, self._tolerance),
        )

    def advance(self, point: Point) -> None:
        """Go on from a point: where it is far off, first by what the circuit does by itself."""
        residual = point.y - point.x
        self._before, self._promised = (point.x, residual), point.distance
        if point.residual > FAR and self._plain > 0:
            self.x, self._plain = point.y, self._plain - 1
        else:
            self.x = point.x + self._step(residual, self._yardstick(point.x))

    def _step(self, residual: Floats, scale: Floats) -> Floats:
        step = _solved(self._matrix, residual)
        return step * min(self.share, self._limit / max(_length(step, scale), 1e-300))

    def _shorten(self) -> None:
        self.share, self._cut = CUT * self.share, True


def _solved(matrix: Floats, residual: Floats) -> Floats:
    try:
        return np.asarray(np.linalg.solve(matrix, residual), dtype=np.float64)
    except np.linalg.LinAlgError:
        return residual


def _length(step: Floats, scale: Floats) -> float:
    return float(np.max(np.abs(step) / scale, initial=0.0))


def _confirmed(change: Floats, previous: Floats | None, tolerance: float) -> bool:
    """Whether no residual that matters has kept its size over the last step."""
    matters = change > SILENT * tolerance
    if previous is None:
        return not bool(matters.any())
    return bool((change[matters] <= SHRINKS * previous[matters]).all())


def _corrected(matrix: Floats, moved: Floats, answered: Floats, scale: Floats) -> Floats:
    """Return the matrix that Broyden's first formula makes of a step and what it changed.

    The inner product counts every state in its yardstick.
    """
    weight = moved / (scale * scale)
    size = float(moved @ weight)
    if size <= 0.0 or not np.isfinite(size):
        return matrix
    result: Floats = matrix + np.outer(answered - matrix @ moved, weight) / size
    return result


def fastest(matrix: Floats) -> tuple[float, Floats]:
    """Return the largest absolute eigenvalue of a Jacobian and the direction it belongs to.

    Where the eighth power tells that nothing is near 1 the number is a bound, the direction 0.
    """
    none = np.zeros(len(matrix))
    if not matrix.size:
        return 0.0, none
    power: Floats = matrix
    for _ in range(3):
        power = power @ power
    rough = float(np.sqrt(np.sum(power * power)))
    if rough < 0.5**8:
        return math.pow(rough, 0.125), none
    values, vectors = np.linalg.eig(matrix)
    at = int(np.argmax(np.abs(values)))
    return float(np.abs(values[at])), np.asarray(np.real(vectors[:, at]), dtype=np.float64)
