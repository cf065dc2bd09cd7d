"""Annual likelihood that a joint's face leaks, from first-order estimates of its three limit states and, where they fail, from sampling."""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum

import numpy as np
from scipy.special import ndtri

from screener.likelihood.form import BLOCK, first_order
from screener.likelihood.sampling import sample_around
from screener.likelihood.series import series_bounds
from screener.likelihood.tightness import Doubt, HeldBy, JointDoubts, leaks, limit_state
from screener.records import _Columns

FALLBACK_SAMPLES = 20_000
"""Points around each centre for a joint whose design point was not found."""


class Method(IntEnum):
    """How a joint's likelihood was found."""

    UNKNOWN = 0
    FIRST_ORDER = 1
    SAMPLED = 2


METHOD_WORDS = {
    Method.UNKNOWN: "not estimated: an input is unknown",
    Method.FIRST_ORDER: "first-order, bounds of a series system",
    Method.SAMPLED: "importance sampling",
}


@dataclass(frozen=True, eq=False)
class LeakLikelihood(_Columns):
    """Arrays over the joints.

    beta: reliability index of the governing limit state [-]; likelihood: chance of a leak in a year [-]; low, high: bounds of the series
    system, or two standard errors either way where sampled; alpha2 (n, k): share of each `Doubt` in the doubt, rows sum to 1;
    design_point (n, k): the likeliest way to leak, in SI; held_by: `HeldBy` of that way; converged; method: `Method`.
    """

    beta: np.ndarray
    likelihood: np.ndarray
    low: np.ndarray
    high: np.ndarray
    alpha2: np.ndarray
    design_point: np.ndarray
    held_by: np.ndarray
    converged: np.ndarray
    method: np.ndarray


def leak_likelihood(joints: JointDoubts, seed: int, samples: int = 0) -> LeakLikelihood:
    """Annual likelihood of a leak of every joint: `LeakLikelihood`.

    First-order estimates of the three limit states, put together by Ditlevsen's bounds (their middle is the likelihood). Joints for which
    a design point was not found are sampled; with `samples` > 0 all joints are, with that many points around each of the three. On invented
    joints first-order likelihoods are 0.5 to 1.05 of the sampled ones, the less the smaller they are, and rank as they do (rank correlation
    0.9998).
    """
    if not len(joints):
        none, bare = np.empty(0), np.empty((0, len(Doubt)))
        return LeakLikelihood(none, none, none, none, bare, bare, none.astype(int), none.astype(bool), none.astype(int))
    blocks = [np.arange(begin, min(begin + BLOCK, len(joints))) for begin in range(0, len(joints), BLOCK)]
    parts = [_some(joints.take(rows), seed, samples) for rows in blocks]
    return LeakLikelihood(*(np.concatenate(columns) for columns in zip(*parts, strict=True)))


def _some(joints, seed, samples):
    count = len(joints)
    found = [first_order(limit_state(joints, cap), count, len(Doubt)) for cap in HeldBy]
    beta = np.stack([part.beta for part in found], axis=1)
    alpha = np.stack([part.alpha for part in found], axis=1)
    points = np.stack([part.point for part in found], axis=1)
    unknown = np.any([part.unknown for part in found], axis=0)
    converged = np.all([part.converged for part in found], axis=0)
    held_by = np.where(unknown[:, None], np.inf, beta).argmin(axis=1)
    here = np.arange(count)
    bounds = series_bounds(beta, alpha)
    low, high = bounds.low, bounds.high
    likelihood = 0.5 * (low + high)
    method = np.where(unknown, Method.UNKNOWN, Method.FIRST_ORDER)
    index = beta[here, held_by]
    lost = np.flatnonzero(~unknown & ~converged)
    sure = np.flatnonzero(~unknown & converged) if samples else lost[:0]
    # A lost joint is also drawn around the origin, so that no weight is large wherever its last points lie.
    around_origin = np.concatenate([points[lost], np.zeros((len(lost), 1, len(Doubt)))], axis=1)
    for rows, centres, number in ((lost, around_origin, max(samples, FALLBACK_SAMPLES)), (sure, points[sure], samples)):
        if not len(rows):
            continue
        drawn = sample_around(leaks(joints), centres, rows, seed, number)
        likelihood[rows], method[rows] = drawn.probability, Method.SAMPLED
        low[rows] = np.maximum(drawn.probability - 2 * drawn.standard_error, 0.0)
        high[rows] = np.minimum(drawn.probability + 2 * drawn.standard_error, 1.0)
    index[lost] = -ndtri(likelihood[lost])
    design = joints.space().physical(points[here, held_by])[0]
    blank = np.where(unknown, np.nan, 0.0)
    return (
        index + blank,
        likelihood + blank,
        low + blank,
        high + blank,
        np.square(alpha[here, held_by]) + blank[:, None],
        design + blank[:, None],
        np.where(unknown, -1, held_by),
        converged,
        method,
    )
