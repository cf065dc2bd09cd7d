"""Importance sampling: the probability of failure of many joints with its standard error, from points drawn around their design points.

One set of standard normal numbers, drawn from the seed, serves every joint. A joint's result therefore depends on the seed and on the joint
alone, not on the order of the joints or on how they are cut into blocks; errors of different joints move together, which leaves ranks steady.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.likelihood.form import LimitState

POINTS_AT_ONCE = 262_144


@dataclass(frozen=True, eq=False)
class Sampled:
    """probability (n,); standard_error (n,): of the probability; failures (n,): points that failed, few of them make both unreliable."""

    probability: np.ndarray
    standard_error: np.ndarray
    failures: np.ndarray


def sample_around(limit_state: LimitState, centres: np.ndarray, rows: np.ndarray, seed: int, samples: int) -> Sampled:
    """Probability that g < 0 for the joints `rows`, from `samples` points around each of their centres (len(rows), m, k).

    The density drawn from is the even mixture of unit normal densities at the m centres; every point weighs its standard normal density over
    the mixture's (balance heuristic, Veach and Guibas 1995), so the weight never exceeds m where a centre is the origin. Centres of NaN
    give NaN.
    """
    joints, kinds, quantities = centres.shape
    draws = np.random.default_rng(seed).standard_normal((samples, quantities))
    joints_at_once = max(1, POINTS_AT_ONCE // samples)
    mean, variance = np.zeros(joints), np.zeros(joints)
    failures = np.zeros(joints, dtype=int)
    known = np.isfinite(centres).all(axis=(1, 2))
    for begin in range(0, joints, joints_at_once):
        some = slice(begin, begin + joints_at_once)
        safe = np.where(known[some, None, None], centres[some], 0.0)
        for kind in range(kinds):
            points = safe[:, kind, None, :] + draws[None, :, :]
            repeated = np.repeat(rows[some], samples)
            g = limit_state(points.reshape(-1, quantities), repeated)[0].reshape(points.shape[:2])
            failed = g < 0
            weighed = np.where(failed, mixture_weight(points, safe), 0.0)
            # A point at which g is unknown makes the joint's probability unknown.
            weighed = np.where(np.isnan(g), np.nan, weighed)
            mean[some] += weighed.mean(axis=1) / kinds
            variance[some] += weighed.var(axis=1, ddof=1) / samples / kinds**2
            failures[some] += failed.sum(axis=1)
    unknown = np.where(known, 0.0, np.nan)
    return Sampled(mean + unknown, np.sqrt(variance) + unknown, failures)


def mixture_weight(points, centres):
    """Standard normal density over the mixture's at points (j, s, k) for centres (j, m, k)."""
    # ln phi(u - c) - ln phi(u) = c.u - |c|^2 / 2
    exponent = np.matmul(points, centres.transpose(0, 2, 1)) - 0.5 * np.square(centres).sum(axis=2)[:, None, :]
    largest = exponent.max(axis=2)
    return np.exp(-largest) / np.exp(exponent - largest[:, :, None]).mean(axis=2)
