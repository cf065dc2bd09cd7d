"""Corrections for mean stress. Amplitude s_a, mean s_m, strengths in one unit of stress; arrays broadcast, NaN in gives NaN out.

Each gives the fully reversed amplitude (mean 0) that does the same harm; twice that is a range. Forms as in Dowling, Calhoun and
Arcari (2009), read in secondary texts. Where a mean reaches the strength there is no answer: NaN.
"""

import numpy as np


def goodman(amplitude, mean, tensile_strength):
    """s_ar = s_a/(1 - s_m/s_u); tensile_strength s_u. With the true fracture strength instead of s_u it is Morrow's form."""
    left = 1 - np.asarray(mean, dtype=float) / tensile_strength
    return np.asarray(amplitude, dtype=float) / np.where(left > 0, left, np.nan)


def gerber(amplitude, mean, tensile_strength):
    """s_ar = s_a/(1 - (s_m/s_u)^2); for tensile means s_m >= 0 only, else NaN."""
    m = np.asarray(mean, dtype=float)
    left = 1 - (m / tensile_strength) ** 2
    return np.asarray(amplitude, dtype=float) / np.where((left > 0) & (m >= 0), left, np.nan)


def walker(amplitude, mean, exponent):
    """s_ar = s_max^(1 - g) s_a^g, s_max = s_m + s_a; exponent g = 0.5 is Smith, Watson and Topper. NaN where s_max is negative."""
    a = np.asarray(amplitude, dtype=float)
    largest = a + mean
    return np.where(largest >= 0, largest, np.nan) ** (1 - exponent) * a**exponent


def part_compressive_range(lowest, highest, compressive_share):
    """Stress range with the compressive part counted at a share: EN 1993-1-9, 7.2.1, 0.6 for non-welded or stress-relieved details."""
    low, high = np.asarray(lowest, dtype=float), np.asarray(highest, dtype=float)
    tension = np.maximum(high, 0) - np.maximum(low, 0)
    return tension + compressive_share * (high - low - tension)


def mean_with_shakedown(mean, amplitude, yield_strength):
    """Mean stress after shakedown: the peak s_m + s_a can't stay above yield, so s_m <= s_y - s_a (elastic, perfectly plastic).

    A ring yielded at tightening keeps a mean of at most that. NaN where the range exceeds 2 s_y: plastic in every cycle.
    """
    a = np.asarray(amplitude, dtype=float)
    held = np.clip(mean, -(yield_strength - a), yield_strength - a) + 0 * np.asarray(mean, dtype=float)
    return np.where(a <= yield_strength, held, np.nan)
