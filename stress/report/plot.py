"""A curve in characters: share of the limit against leakage resistance."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise
from math import log10

from stress.text.figure import figure

MARKS = "ox+#*"
HEIGHT = 12


def plot(
    curves: Sequence[tuple[str, Sequence[tuple[float, float]]]], *, width: int, height: int = HEIGHT
) -> list[str]:
    """Return the lines of a plot.

    Args:
        curves: At most five (name, ((ohm, share of limit), ...)); shares above 0.
        width: Characters in all.
        height: Lines of the plot itself.
    """
    points = [point for _, curve in curves for point in curve]
    if len(points) < 2:
        return []
    room = width - 9
    left, right = log10(max(ohm for ohm, _ in points)), log10(min(ohm for ohm, _ in points))
    top = max(max(share for _, share in points) * 1.1, 1.2)
    grid = [[" "] * room for _ in range(height)]
    limit_row = _row(1.0, top, height)
    grid[limit_row] = ["-"] * room
    for (_, curve), mark in zip(curves, MARKS, strict=False):
        for ohm, share in _filled(curve, room):
            column = round((left - log10(ohm)) / max(left - right, 1e-9) * (room - 1))
            grid[_row(share, top, height)][column] = mark
    lines = []
    for row, cells in enumerate(grid):
        label = "limit" if row == limit_row else ""
        if row == 0:
            label = f"{top:.1f} x"
        lines.append(f"{label:>7} |{''.join(cells)}".rstrip())
    most, least = figure(10**left, "ohm"), figure(10**right, "ohm")
    lines.append(f"{'0':>7} +{'-' * room}")
    lines.append(f"{'':>9}{most}{least.rjust(room - len(most))}")
    lines += [f"{'':>9}{mark} {name}" for (name, _), mark in zip(curves, MARKS, strict=False)]
    return lines


def _row(share: float, top: float, height: int) -> int:
    return min(max(round((1.0 - share / top) * (height - 1)), 0), height - 1)


def _filled(curve: Sequence[tuple[float, float]], columns: int) -> list[tuple[float, float]]:
    """Return the points with straight lines on log R between them, one a column at least."""
    ordered = sorted(curve, reverse=True)
    found = list(ordered[:1])
    for (ohm, share), (next_ohm, next_share) in pairwise(ordered):
        steps = max(round(columns * log10(ohm / next_ohm) / 4), 1)
        for k in range(1, steps + 1):
            part = k / steps
            found.append(
                (
                    10 ** (log10(ohm) + part * log10(next_ohm / ohm)),
                    share + part * (next_share - share),
                )
            )
    return found
