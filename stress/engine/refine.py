"""How fine a time grid must be: two grids give the same stresses."""

from __future__ import annotations

import numpy as np

from stress.engine.case import Waves

# A grid of twice the points has a quarter of the error, so the coarser one of two that agree this
# closely is within 0.02 % of direct values, 0.5 % of ripple, 2 % of extremes.
MEANS_HOLD, RIPPLE_HOLD, PEAKS_HOLD = 1.5e-4, 3.7e-3, 1.5e-2
LEAST_V, LEAST_A = 1.0, 1e-3  # what is smaller does not decide
LEAST_RIPPLE = 1e-3  # of the largest value


def excess(coarse: Waves, fine: Waves) -> float:
    """Return how far two grids differ, as a multiple of what is allowed: alike at 1 or less."""
    worst = 0.0
    for name, one, two in zip(coarse.names, coarse.values, fine.values, strict=True):
        if name.startswith("v(") and "." in name:
            continue  # inside a model or block; what matters of it shows outside
        least = LEAST_V if name[0] == "v" else LEAST_A
        size = max(float(np.max(np.abs(two))), least)
        mean_one, mean_two = coarse.mean(one), fine.mean(two)
        ripple_one, ripple_two = coarse.rms(one - mean_one), fine.rms(two - mean_two)
        peaks = abs(float(np.max(one)) - float(np.max(two)))
        dips = abs(float(np.min(one)) - float(np.min(two)))
        worst = max(
            worst,
            abs(mean_one - mean_two) / (MEANS_HOLD * size),
            abs(ripple_one - ripple_two) / (RIPPLE_HOLD * max(ripple_two, LEAST_RIPPLE * size)),
            max(peaks, dips) / (PEAKS_HOLD * size),
        )
    return worst
