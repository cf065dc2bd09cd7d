"""Likelihoods against leak records: putting them right, and scoring them on years they were not fitted to.

Fit on the leaks of some years and score on later ones; scores on the fitted years flatter.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.special import expit, logit
from scipy.stats import rankdata

LEAST_LEAKS = 20
"""Leaks below which no calibration is made: ten for each of two fitted numbers (rule of thumb of Peduzzi et al., J. Clin. Epidemiol. 49
(1996) 1373-1379, from memory)."""
SLOPE_DEVIATION = 0.5
"""Standard deviation of the slope about 1 before the data speak. Judgement, no source."""
INTERCEPT_DEVIATION = 5.0
"""Standard deviation of the intercept about 0 before the data speak: two powers of ten either way. Judgement, no source."""
STEPS = 100

FREQUENCY_BAND = (1e-5, 1e-2)
"""Leaks per flange and year within which a fleet's mean is believable. Process plant runs at 1e-5 to 1e-4 (IOGP report 434-01; Spouge, Process
Safety Progress 24 (2005) 249-257; orders of magnitude from memory, tables not read); PE faces relax, so one or two powers of ten are added."""


@dataclass(frozen=True)
class Calibration:
    """logit(calibrated) = intercept + slope logit(chance). covariance of the two; usable False with the reason: nothing was fitted (NaN)."""

    intercept: float
    slope: float
    covariance: np.ndarray
    leaks: int
    usable: bool
    reason: str

    def apply(self, chance):
        """Calibrated chances; NaN throughout where the calibration is not usable."""
        with np.errstate(divide="ignore"):
            return expit(self.intercept + self.slope * logit(np.asarray(chance, dtype=float)))


def calibrate(chance, leaked, least_leaks: int = LEAST_LEAKS) -> Calibration:
    """Slope and intercept on log-odds by penalised maximum likelihood: `Calibration`.

    chance: predicted chance of a leak over the period, strictly between 0 and 1; leaked: whether the joint leaked in it (bool). The penalty
    is a normal prior about slope 1 and intercept 0; Newton's method, the problem being convex. Joints of unknown chance are left out.
    """
    chance, leaked = np.asarray(chance, dtype=float), np.asarray(leaked, dtype=bool)
    usable = (chance > 0) & (chance < 1)
    x, y = logit(chance[usable]), leaked[usable].astype(float)
    count = int(y.sum())
    nothing = np.full((2, 2), np.nan)
    if count < least_leaks:
        return Calibration(np.nan, np.nan, nothing, count, False, f"only {count} leaks on record; at least {least_leaks} are needed")
    if len(y) - count < least_leaks:
        return Calibration(np.nan, np.nan, nothing, count, False, "too few joints without a leak to compare with")
    design = np.column_stack([np.ones_like(x), x])
    weight = np.diag([INTERCEPT_DEVIATION**-2, SLOPE_DEVIATION**-2])
    centre = np.array([0.0, 1.0])
    value = np.array([logit(np.clip(y.mean(), 1e-12, 1 - 1e-12)) - logit(np.clip(chance[usable].mean(), 1e-12, 1 - 1e-12)), 1.0])
    for _ in range(STEPS):
        slope, curvature = _derivatives(design, y, value, weight, centre)
        move = np.linalg.solve(curvature, slope)
        while _cost(design, y, value + move, weight, centre) > _cost(design, y, value, weight, centre) + 1e-12 * len(y):
            move = 0.5 * move
        value = value + move
        if np.abs(move).max() < 1e-10:
            break
    _, curvature = _derivatives(design, y, value, weight, centre)
    return Calibration(float(value[0]), float(value[1]), np.linalg.inv(curvature), count, True, "")


def _cost(design, y, value, weight, centre):
    eta = design @ value
    away = value - centre
    return float(np.sum(np.logaddexp(0.0, eta) - y * eta) + 0.5 * away @ weight @ away)


def _derivatives(design, y, value, weight, centre):
    p = expit(design @ value)
    slope = design.T @ (y - p) - weight @ (value - centre)
    return slope, (design * (p * (1 - p))[:, None]).T @ design + weight


def brier_score(chance, leaked):
    """Mean squared distance between chance and what happened [-]; 0 is perfect."""
    return float(np.mean(np.square(np.asarray(chance) - np.asarray(leaked, dtype=float))))


@dataclass(frozen=True)
class Murphy:
    """Brier score = reliability - resolution + uncertainty + within. within: what forecasts differing inside one bin add."""

    reliability: float
    resolution: float
    uncertainty: float
    within: float


def murphy_decomposition(chance, leaked, bins: int = 10) -> Murphy:
    """Parts of the Brier score over bins of equal count (equal chances share a bin): `Murphy`.

    Source: Murphy, J. Applied Meteorology 12 (1973) 595-600; within-bin terms of Stephenson et al., Weather and Forecasting 23 (2008) 752-757.
    """
    chance, y = np.asarray(chance, dtype=float), np.asarray(leaked, dtype=float)
    index = _bins(chance, bins)
    count = np.bincount(index).astype(float)
    predicted, seen = np.bincount(index, chance) / count, np.bincount(index, y) / count
    share, base = count / len(y), y.mean()
    apart = chance - predicted[index]
    within = np.mean(np.square(apart)) - 2 * np.mean(apart * (y - seen[index]))
    return Murphy(float(share @ np.square(predicted - seen)), float(share @ np.square(seen - base)), float(base * (1 - base)), float(within))


def _bins(chance, bins):
    """Bin of each chance, by rank; equal chances fall into the bin of their mean rank; empty bins are closed up."""
    raw = np.minimum((rankdata(chance) - 0.5) / len(chance) * bins, bins - 1).astype(int)
    return np.unique(raw, return_inverse=True)[1]


@dataclass(frozen=True, eq=False)
class ReliabilityCurve:
    """Per bin: mean predicted chance, share seen to leak, its 90 % interval (Wilson), number of joints."""

    predicted: np.ndarray
    seen: np.ndarray
    low: np.ndarray
    high: np.ndarray
    joints: np.ndarray


def reliability_curve(chance, leaked, bins: int = 10) -> ReliabilityCurve:
    """Predicted against seen, in bins of equal count: `ReliabilityCurve`. Interval: Wilson, JASA 22 (1927) 209-212, z = 1.645."""
    index = _bins(np.asarray(chance, dtype=float), bins)
    n = np.bincount(index).astype(float)
    predicted, p = np.bincount(index, chance) / n, np.bincount(index, np.asarray(leaked, dtype=float)) / n
    z = 1.6448536
    middle = (p + z * z / (2 * n)) / (1 + z * z / n)
    half = z / (1 + z * z / n) * np.sqrt(p * (1 - p) / n + z * z / (4 * n * n))
    return ReliabilityCurve(predicted, p, np.maximum(middle - half, 0.0), np.minimum(middle + half, 1.0), n.astype(int))


def concordance(score, leaked):
    """Chance that a leaked joint scores above one that did not leak, ties half (area under the ROC curve) [-]; NaN without both kinds."""
    leaked = np.asarray(leaked, dtype=bool)
    bad, good = int(leaked.sum()), int((~leaked).sum())
    if bad == 0 or good == 0:
        return float("nan")
    return float((rankdata(score)[leaked].sum() - bad * (bad + 1) / 2) / (bad * good))


def gain_curve(score, leaked):
    """(share of joints inspected, share of leaks found) when joints are taken from the highest score down, both from 0 to 1.

    Equal scores are one straight piece: the mean over every order in which they could be taken.
    """
    order = np.argsort(-np.asarray(score, dtype=float), kind="stable")
    ranked, found = np.asarray(score, dtype=float)[order], np.cumsum(np.asarray(leaked, dtype=float)[order])
    ends = np.append(np.flatnonzero(np.diff(ranked) != 0), len(ranked) - 1)
    return np.append(0.0, (ends + 1) / len(ranked)), np.append(0.0, found[ends] / found[-1])


def share_found(score, leaked, inspected: float):
    """Share of the leaks among the top `inspected` share of joints (0.05 = top 5 %) [-]; NaN without leaks."""
    if not np.any(leaked):
        return float("nan")
    return float(np.interp(inspected, *gain_curve(score, leaked)))


def outside_band(mean_likelihood: float) -> str:
    """One sentence when a fleet's mean annual likelihood lies outside the believable band, else an empty text."""
    low, high = FREQUENCY_BAND
    if not np.isfinite(mean_likelihood) or low <= mean_likelihood <= high:
        return ""
    side, edge = ("below", low) if mean_likelihood < low else ("above", high)
    return (
        f"The fleet's mean likelihood of {mean_likelihood:.1e} leaks per joint and year lies {side} {edge:.0e}, the {'lower' if side == 'below' else 'upper'} "
        "end of what published flange leak frequencies suggest: use it to compare joints, not as a rate."
    )
