"""The fall of a voltage out of runs of rising length: when it stays below, and a few points."""

from __future__ import annotations

from collections.abc import Sequence
from math import isfinite, log

import numpy as np

from stress.engine.case import Floats
from stress.study.discharge_result import THRESHOLDS_V, Decay

SLOWEST_S = 1e6  # a time constant beyond this is not told
POINTS = 24
FIRST_SHARE = 1e-3  # of the shortest run, for the first point after the start


def decay(how: str, runs: Sequence[tuple[Floats, Floats]]) -> Decay:
    """Return the fall of one position out of runs of rising length."""
    below: dict[float, float | None] = {}
    beyond = []
    for threshold in THRESHOLDS_V:
        below[threshold] = next(
            (
                at
                for time, volts in runs
                if (at := _stays_below(time, volts, threshold)) is not None
            ),
            None,
        )
        if below[threshold] is None:
            below[threshold] = _extrapolated(*runs[-1], threshold)
            beyond += [threshold] if below[threshold] is not None else []
    seconds, volts = _thinned(runs)
    return Decay(
        how=how,
        start_V=float(runs[0][1][0]),
        below_s=below,
        extrapolated=tuple(beyond),
        seconds=seconds,
        volts=volts,
    )


def _stays_below(time: Floats, volts: Floats, threshold: float) -> float | None:
    """Return from when on the voltage stays below, between samples on a straight line."""
    over = np.flatnonzero(volts >= threshold)
    if over.size == 0:
        return 0.0
    last = int(over[-1])
    if last + 1 >= volts.size:
        return None
    share = (volts[last] - threshold) / (volts[last] - volts[last + 1])
    return float(time[last] + share * (time[last + 1] - time[last]))


def _extrapolated(time: Floats, volts: Floats, threshold: float) -> float | None:
    """Return when it will be below by the time constant of the last fifth, or None."""
    at = int(np.searchsorted(time, 0.8 * time[-1]))
    if not volts[at] > volts[-1] > 0.0:
        return None
    tau = float((time[-1] - time[at]) / log(volts[at] / volts[-1]))
    if not isfinite(tau) or tau > SLOWEST_S:
        return None
    return float(time[-1] + tau * log(volts[-1] / threshold))


def _thinned(
    runs: Sequence[tuple[Floats, Floats]],
) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """Return a few points of the fall, evenly spread on the logarithm of time."""
    longest = float(runs[-1][0][-1])
    wanted = np.geomspace(FIRST_SHARE * float(runs[0][0][-1]), longest, POINTS)
    found = [(0.0, float(runs[0][1][0]))]
    for second in wanted:
        time, volts = next(r for r in runs if second <= r[0][-1] * (1.0 + 1e-9))
        found.append((float(second), float(np.interp(second, time, volts))))
    return tuple(t for t, _ in found), tuple(v for _, v in found)
