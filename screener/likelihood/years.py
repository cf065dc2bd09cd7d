"""Likelihood over several years, and what leak-free years say about the joint itself.

How tight the bolts were, how far the PE has crept, what the ring carries, what seals and what the pressure really is stay as they are from year
to year; only the worst surge and the coldest season are new each year. A joint that has lived through thirty winters is therefore not the joint
of its inventory row: its likelihood falls, the more so the less was known about it.
"""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np

from screener.likelihood.form import first_order
from screener.likelihood.sampling import POINTS_AT_ONCE, mixture_weight
from screener.likelihood.tightness import Doubt, HeldBy, JointDoubts, kept_share, limit_state
from screener.records import ModelError, _Columns

NEW_EACH_YEAR = (Doubt.SURGE_PEAK, Doubt.COOLING)
COLD_NODES, COLD_WEIGHTS = np.polynomial.hermite_e.hermegauss(5)
COLD_WEIGHTS = COLD_WEIGHTS / COLD_WEIGHTS.sum()
SAMPLES = 100
"""Points around each of the centres: the origin and the design point of each of the three limit states."""


@dataclass(frozen=True, eq=False)
class YearsLikelihood(_Columns):
    """annual: chance of a leak in the coming year given the leak-free years [-]; within: in the coming years of the horizon; their standard
    errors; survival: chance that the estimates gave to the record. Arrays (n,), NaN where an input is unknown or no draw survives."""

    annual: np.ndarray
    within: np.ndarray
    annual_error: np.ndarray
    within_error: np.ndarray
    survival: np.ndarray


def likelihood_over_years(
    joints: JointDoubts, leak_free_years, horizon_years: float, seed: int, samples: int = SAMPLES, *, leaky_years=0.0
) -> YearsLikelihood:
    """Chance of a leak in the coming year and over the horizon, given the joint's record: `YearsLikelihood`.

    leak_free_years (n,): years without a leak since the last leak, re-tightening or installation; leaky_years (n,): years before that in
    which it leaked at least once, 0 where it never did.

    Averages over what does not change (importance sampling around origin and design points, one set of random numbers for all joints) of
    p, 1 - (1 - p)^h and the record's likelihood (1 - p)^T (1 - (1 - p)^U), where p, the chance in one year, is in closed form, T the leak-free
    and U the leaky years. Today's clamp is taken for the past too: it was higher in the first years after tightening, so that a leak-free past
    is believed somewhat too much, and a repair is taken to restore the joint to what it was, neither better nor worse.
    """
    years = np.broadcast_to(np.asarray(leak_free_years, dtype=float), (len(joints),))
    leaky = np.broadcast_to(np.asarray(leaky_years, dtype=float), (len(joints),))
    years, leaky = np.where(years >= 0, years, np.nan), np.where(leaky >= 0, leaky, np.nan)
    if horizon_years < 0:
        raise ModelError("the horizon must be zero or more years")
    draws = np.random.default_rng(seed).standard_normal((samples, len(Doubt)))
    draws[:, list(NEW_EACH_YEAR)] = 0.0
    at_once = max(1, POINTS_AT_ONCE // samples)
    result = np.full((len(fields(YearsLikelihood)), len(joints)), np.nan)
    # Free ends feel no cold, which spares them its quadrature.
    for group in (np.flatnonzero(joints.pull_per_cooling == 0), np.flatnonzero(joints.pull_per_cooling != 0)):
        for begin in range(0, len(group), at_once):
            some = group[begin : begin + at_once]
            result[:, some] = _some(joints.take(some), years[some], leaky[some], horizon_years, draws)
    return YearsLikelihood(*result)


def yearly_chance(joints: JointDoubts, x):
    """Chance of a leak in one year when all but surge and cold are as in x: P(surge > what the clamp can take) [-].

    x: one array for each `Doubt`, broadcasting against the joints' arrays. The surge it can take:
    (kept F_0 - (1 - phi) b dT) / ((1 - phi) a + m A_f) - operating pressure; Gumbel in closed form, the season's cold by 5-point Gauss-Hermite
    quadrature where the pipe is restrained.
    """
    transmitted = 1.0 - joints.load_factor
    by_ring = joints.collapse_load * x[Doubt.RING_YIELD] * x[Doubt.RING_MODEL]
    clamp = np.minimum(np.minimum(joints.torque_clamp * x[Doubt.PRELOAD], by_ring), joints.proof_load)
    left = kept_share(joints.kept, x[Doubt.CREEP]) * clamp
    per_pressure = transmitted * joints.thrust_per_pressure + x[Doubt.REQUIRED_STRESS] * joints.contact_area
    peak = joints.space().variables[Doubt.SURGE_PEAK]
    scale = np.where(peak.scale > 0, peak.scale, 1.0)
    feels_cold = np.any(joints.pull_per_cooling != 0)
    chance = 0.0
    for node, weight in zip(COLD_NODES, COLD_WEIGHTS, strict=True) if feels_cold else [(0.0, 1.0)]:
        cold = joints.cooling + joints.cooling_deviation * node
        room = (left - transmitted * joints.pull_per_cooling * cold) / per_pressure - x[Doubt.OPERATING_PRESSURE]
        random = -np.expm1(-np.exp(-np.clip((room - peak.location) / scale, -700.0, 700.0)))
        certain = np.where(np.isnan(room), np.nan, room < peak.location)
        chance = chance + weight * np.where(peak.scale > 0, random, certain)
    return np.minimum(chance, 1.0)


def _some(joints, years, leaky, horizon, draws):
    """(annual, within, their errors, survival) of a block of joints."""
    count = len(joints)
    centres = [np.zeros((count, len(Doubt)))]
    for cap in HeldBy:
        point = first_order(limit_state(joints, cap), count, len(Doubt)).point
        point[:, list(NEW_EACH_YEAR)] = 0.0
        centres.append(point)
    centres = np.stack(centres, axis=1)
    unknown = ~np.isfinite(centres).all(axis=(1, 2))
    centres = np.where(unknown[:, None, None], 0.0, centres)
    # Joints along axis 0, draws along axis 1.
    upright = np.arange(count)[:, None]
    tall, variables = joints.take(upright), joints.space().take(upright).variables
    weights, chances = [], []
    for kind in range(centres.shape[1]):
        points = centres[:, kind, None, :] + draws[None]
        x = [None if k in NEW_EACH_YEAR else variables[k].value(points[:, :, k]) for k in Doubt]
        weights.append(mixture_weight(points, centres))
        chances.append(yearly_chance(tall, x))
    weight, p = np.stack(weights, axis=1), np.stack(chances, axis=1)
    with np.errstate(divide="ignore", invalid="ignore"):
        stays = np.log1p(-p)
        past = np.where(years[:, None, None] == 0, 1.0, np.exp(years[:, None, None] * stays))
        leaky = leaky[:, None, None]
        past = past * np.where(leaky == 0, 1.0, -np.expm1(leaky * stays))
        coming = np.where(horizon == 0, 0.0, -np.expm1(horizon * stays))
    survived = weight * past
    survival = survived.mean(axis=(1, 2)) + np.where(unknown, np.nan, 0.0)
    total = np.where(survival > 0, survival, np.nan)
    annual, annual_error = _ratio(survived, p, total)
    within, within_error = _ratio(survived, coming, total)
    return annual, within, annual_error, within_error, np.minimum(survival, 1.0)


def _ratio(weight, value, total):
    """Weighted mean of `value` and its standard error (delta method, strata kept apart), arrays (n, m, s) -> (n,)."""
    mean = (weight * value).mean(axis=(1, 2)) / total
    apart = weight * (value - mean[:, None, None])
    kinds, samples = weight.shape[1:]
    return mean, np.sqrt(apart.var(axis=2, ddof=1).sum(axis=1) / samples) / kinds / total
