"""The search for a fixed point on maps whose fixed point is known in closed form."""

import numpy as np
import pytest

from stress.engine.fixed_point import (
    approach,
    directional,
    fastest,
    jacobian,
    renewed,
)


def ones(x):
    return np.ones_like(x)


class Counted:
    """A map that counts its evaluations."""

    def __init__(self, phi):
        self.phi, self.calls = phi, 0

    def __call__(self, x):
        self.calls += 1
        return self.phi(x)


ROTATION = 0.95 * np.array([[np.cos(0.3), -np.sin(0.3)], [np.sin(0.3), np.cos(0.3)]])
MATRICES = [
    np.diag([0.7, 0.1, 0.0]),
    np.diag([0.9999, 0.5, 0.3]),
    ROTATION,
    np.array([[0.98, 0.3, 0.0], [0.0, 0.6, 0.2], [0.1, 0.0, -0.4]]),
]


@pytest.mark.parametrize("matrix", MATRICES, ids=lambda m: f"{np.abs(m).max():.4g}")
def test_a_linear_map_is_solved_by_its_jacobian(matrix):
    """One step reaches the fixed point (I-A)^-1 b, the next cycle confirms it."""
    b = np.arange(1.0, len(matrix) + 1.0)
    phi = Counted(lambda x: matrix @ x + b)
    start = np.zeros(len(matrix))
    found = jacobian(
        phi, start, phi(start), yardstick=ones, groups=[[i] for i in range(len(matrix))]
    )
    phi.calls = 0
    # The multiplier 0.9999 puts the fixed point at 10,000 yardsticks: a step may be that long.
    point = approach(phi, start, found, yardstick=ones, tolerance=1e-6, most=6, limit=1e6)

    assert found == pytest.approx(matrix, abs=1e-9)
    assert point.found
    assert phi.calls <= 3
    assert point.best == pytest.approx(np.linalg.solve(np.eye(len(matrix)) - matrix, b), rel=1e-6)


def unloaded(slope):
    """A map that brings a state back to 177.2 V by a share of the excess a cycle."""
    return lambda x: x - slope * (x - 177.2)


def volts(x):
    return np.maximum(np.abs(x), 1.0)


def test_a_small_residual_is_not_arrival():
    """At 200 V the state moves 3 µV a cycle: only its own Jacobian tells how far it has to go."""
    phi, start = unloaded(1.5e-7), np.array([200.0])
    own = jacobian(phi, start, phi(start), yardstick=volts, groups=[[0]])
    point = approach(phi, start, own, yardstick=volts, tolerance=1e-4, most=6)

    assert point.found
    assert point.x[0] == pytest.approx(177.2, abs=0.01)


@pytest.mark.parametrize("slope", [0.1, 1e-2, 1e-3, 1e-4])
def test_a_wrong_jacobian_is_found_out_by_the_next_cycle(slope):
    """A loaded relative claims a multiplier of 0.7; no state far from the truth is accepted."""
    point = approach(
        unloaded(slope),
        np.array([177.5]),
        np.array([[0.7]]),
        yardstick=volts,
        tolerance=1e-4,
        most=12,
    )

    assert point.found
    assert point.x[0] == pytest.approx(177.2, abs=177.2e-4)


def test_a_rectifier_is_reached_from_below_and_never_passed():
    """Charge a cycle is convex in the voltage: ten diode slopes below the peak to the peak."""

    def phi(x):
        return x + 0.01 * np.exp(np.clip((10.0 - x) / 0.5, -60, 5)) - 1e-6 * x

    seen = []

    def watched(x):
        seen.append(float(x[0]))
        return phi(x)

    start = np.array([8.0])
    first = jacobian(phi, start, phi(start), yardstick=ones, groups=[[0]])
    point = approach(watched, start, first, yardstick=ones, tolerance=1e-5, most=60)
    # 0.01 e^((10-x)/0.5) = 1e-6 x, solved by iteration of x = 10 - 0.5 ln(1e-4 x)
    exact = 10.0
    for _ in range(100):
        exact = 10.0 - 0.5 * np.log(1e-4 * exact)

    assert point.found
    assert point.x[0] == pytest.approx(exact, abs=2e-4)
    assert max(seen) < exact + 1e-3


def test_a_known_jacobian_is_renewed_along_what_it_reaches():
    """Rank 2 of 12 states: a map that has changed there costs 2 or 3 evaluations, not 12."""
    rng = np.random.default_rng(3)
    shape, reads = rng.normal(size=(12, 2)) / 4.0, rng.normal(size=(2, 12)) / 4.0
    known, now = shape @ reads, shape @ np.diag([1.5, 0.5]) @ reads
    phi, x = Counted(lambda x: now @ x + 1.0), shape @ np.ones(2)
    found = renewed(phi, x, now @ x + 1.0, known, yardstick=ones)
    inside = shape @ np.array([0.3, -0.2])

    assert phi.calls <= 3
    assert found @ inside == pytest.approx(now @ inside, abs=1e-9)
    assert np.abs(known @ inside - now @ inside).max() > 1e-3  # it was wrong before


def test_where_the_map_has_no_value_the_step_is_cut():
    """Above 1.5 the map has no value; a Jacobian that is far off leads there first."""

    def phi(x):
        return np.where(x > 1.5, np.nan, 0.5 * x + 0.7)

    point = approach(
        phi, np.array([0.0]), np.array([[0.9]]), yardstick=ones, tolerance=1e-6, most=12
    )

    assert point.found
    assert point.x[0] == pytest.approx(1.4, abs=1e-5)  # 0.7 / (1 - 0.5)


def test_states_that_leave_no_trace_cost_one_evaluation_together():
    matrix = np.zeros((20, 20))
    matrix[0, 0], matrix[0, 19] = 0.5, 0.25
    phi = Counted(lambda x: matrix @ x)
    zero = np.zeros(20)
    found = jacobian(phi, zero, zero, yardstick=ones, groups=[[0], list(range(1, 20))])

    assert found == pytest.approx(matrix, abs=1e-12)
    assert phi.calls < 14  # one by one it would be 20


def test_one_direction_corrects_a_jacobian():
    true, known = np.diag([0.5, 0.3]), np.diag([1.2, 0.3])
    zero = np.zeros(2)
    found = directional(
        lambda x: true @ x, zero, zero, known, along=np.array([1.0, 0.0]), yardstick=ones
    )

    assert fastest(known)[0] == pytest.approx(1.2)
    assert found == pytest.approx(true)


@pytest.mark.parametrize(
    ("matrix", "radius"),
    [(np.zeros((0, 0)), 0.0), (np.diag([0.2, -0.99]), 0.99), (ROTATION, 0.95)],
)
def test_the_largest_multiplier(matrix, radius):
    assert fastest(matrix)[0] == pytest.approx(radius)
