"""Reading a solved leakage curve."""

from __future__ import annotations

from math import log

from stress.study.result import CurvePoint, LeakageIn


def nearest(found: LeakageIn, ohm: float | None) -> CurvePoint | None:
    """Return the solved point of a curve that lies nearest to a resistance, by its logarithm."""
    solved = [point for point in found.curve if point.unanswered is None]
    if ohm is None or not solved:
        return None
    return min(solved, key=lambda point: abs(log(point.ohm / ohm)))
