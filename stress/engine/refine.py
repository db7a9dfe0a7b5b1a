"""Whether a time grid is fine enough: two grids give the same stresses."""

from __future__ import annotations

import numpy as np

from stress.engine.case import Waves

# Shares of the largest value of a wave; floors keep currents of no weight from deciding.
MEANS_HOLD, RMS_HOLD, PEAKS_HOLD = 1e-4, 2e-3, 1e-2
LEAST_V, LEAST_A, LEAST_PEAK_A = 1e-2, 1e-6, 1e-3


def alike(coarse: Waves, fine: Waves) -> bool:
    """Return whether means, rms values and extremes of every wave agree on two grids."""
    for name, one, two in zip(coarse.names, coarse.values, fine.values, strict=True):
        size = max(float(np.max(np.abs(two))), LEAST_V if name[0] == "v" else LEAST_A)
        if abs(coarse.mean(one) - fine.mean(two)) > MEANS_HOLD * size:
            return False
        if abs(coarse.rms(one) - fine.rms(two)) > RMS_HOLD * size:
            return False
        hold = PEAKS_HOLD * max(size, 0.0 if name[0] == "v" else LEAST_PEAK_A)
        if abs(float(np.max(one)) - float(np.max(two))) > hold:
            return False
        if abs(float(np.min(one)) - float(np.min(two))) > hold:
            return False
    return True
