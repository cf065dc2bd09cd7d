"""Cycles to failure of steel by published S-N curves. Stress ranges in Pa, functions of arrays that broadcast, NaN in gives NaN out.

The curves are characteristic ones (97.7 % survive); `mean_life` moves them to the middle for likelihoods.
Printed curves are in MPa: their intercepts are handed in as printed.
"""

import numpy as np

MEGAPASCAL = 1e6

EN_REFERENCE_CYCLES = 2e6
EN_LIMIT_CYCLES = 5e6
EN_CUT_OFF_CYCLES = 1e8
EN_STEEP, EN_FLAT = 3.0, 5.0

CONSTANT_AMPLITUDE_SHARE = (EN_REFERENCE_CYCLES / EN_LIMIT_CYCLES) ** (1 / EN_STEEP)
"""Constant-amplitude limit over detail category: (2/5)^(1/3) = 0.737."""

CUT_OFF_SHARE = CONSTANT_AMPLITUDE_SHARE * (EN_LIMIT_CYCLES / EN_CUT_OFF_CYCLES) ** (1 / EN_FLAT)
"""Cut-off limit over detail category: 0.737 (5/100)^(1/5) = 0.405; a guide prints 0.404."""


def en_life(stress_range, detail_category):
    """Cycles to failure N [-] under stress ranges of varying size: EN 1993-1-9:2005, 7.1, direct stress; endless (inf) below the cut-off.

    stress_range dS, detail_category dS_C (the range at 2e6 cycles, already divided by its partial factor and size factor) [Pa].
    dS^3 N = dS_C^3 2e6 up to 5e6 cycles; slope 5 from there to 1e8; below the cut-off no damage. Read in secondary texts. In air or
    well-kept paint; the 2025 edition excludes seawater; in free corrosion use `single_slope_life`. Not meant below 1e4 cycles.
    """
    span, category = np.broadcast_arrays(np.asarray(stress_range, dtype=float), np.asarray(detail_category, dtype=float))
    with np.errstate(divide="ignore"):
        ratio = category / span
        life = np.where(
            span >= CONSTANT_AMPLITUDE_SHARE * category,
            EN_REFERENCE_CYCLES * ratio**EN_STEEP,
            EN_LIMIT_CYCLES * (CONSTANT_AMPLITUDE_SHARE * ratio) ** EN_FLAT,
        )
    return np.where(span < CUT_OFF_SHARE * category, np.inf, life)


def en_constant_amplitude_limit(detail_category):
    """Range [Pa] below which cycles that are all alike do no damage; detail_category [Pa]. A record whose largest range stays below is safe."""
    return CONSTANT_AMPLITUDE_SHARE * np.asarray(detail_category, dtype=float)


def en_bolt_size_factor(bolt_diameter):
    """k_s [-] = (30 mm/d)^0.25 for d > 30 mm, else 1: detail category 50, bolts and rods in tension. EN 1993-1-9, Table 8.1 (from memory). d [m]."""
    d = np.asarray(bolt_diameter, dtype=float)
    return np.where(d > 0.030, (0.030 / d) ** 0.25, np.where(np.isnan(d), np.nan, 1.0))


def en_plate_size_factor(thickness):
    """k_s [-] = (25 mm/t)^0.2 for t > 25 mm, else 1, for details that call for it. EN 1993-1-9, 7.2.2 (from memory). thickness t [m]."""
    t = np.asarray(thickness, dtype=float)
    return np.where(t > 0.025, (0.025 / t) ** 0.2, np.where(np.isnan(t), np.nan, 1.0))


def single_slope_life(stress_range, log10_intercept, slope):
    """Cycles to failure N [-]: log10 N = log10 a - m log10(dS in MPa), without any limit: steel in free corrosion.

    DNV-RP-C203 (2014), table of free corrosion: m = 3; F1 11.222, W1 10.784, ... Seawater curves: an upper bound of harm for buried steel
    in fresh water and soil, for which no curve was found. stress_range dS [Pa]; log10_intercept, slope m [-] as printed.
    """
    with np.errstate(divide="ignore"):
        return 10.0 ** (np.asarray(log10_intercept, dtype=float) - slope * np.log10(np.asarray(stress_range, dtype=float) / MEGAPASCAL))


def two_slope_life(stress_range, log10_intercept, slope, log10_intercept_beyond, slope_beyond, knee_cycles):
    """Cycles to failure N [-] by two branches that meet at knee_cycles; no limit. DNV-RP-C203 (2014), curves in air: D 12.164, 15.606, 1e7.

    Intercepts as printed, MPa. Some copies of the 2024 edition pair intercepts that don't meet (B1, B2): NaN when they miss by over 5 %.
    """
    steep = single_slope_life(stress_range, log10_intercept, slope)
    flat = single_slope_life(stress_range, log10_intercept_beyond, slope_beyond)
    knee = (np.asarray(log10_intercept, dtype=float) - np.log10(knee_cycles)) / slope
    missing = np.abs(np.asarray(log10_intercept_beyond, dtype=float) - slope_beyond * knee - np.log10(knee_cycles))
    return np.where(missing < np.log10(1.05), np.where(steep <= knee_cycles, steep, flat), np.nan)


def dnv_thickness_factor(thickness, reference_thickness, exponent):
    """Factor on the stress range [-]: (t/t_ref)^k for t > t_ref, else 1. DNV-RP-C203, 2.4; t_ref 25 mm for plates [m], k by curve and edition."""
    ratio = np.asarray(thickness, dtype=float) / reference_thickness
    return np.where(ratio > 1, ratio**exponent, np.where(np.isnan(ratio), np.nan, 1.0))


def mean_life(characteristic_life, log10_deviation):
    """Life that half of the specimens reach [-]: two standard deviations of log10 N above the characteristic one.

    DNV-RP-C203: characteristic = mean minus two standard deviations, log10_deviation 0.20 (from memory).
    """
    return np.asarray(characteristic_life, dtype=float) * 10.0 ** (2 * np.asarray(log10_deviation, dtype=float))
