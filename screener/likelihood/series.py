"""A joint that leaks when any one of several things happens: probability of the series system from its parts.

Each part is given by its reliability index and the direction of its design point; two parts are correlated by the cosine between them.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.special import ndtr

ANGLE_NODES = 32


@dataclass(frozen=True, eq=False)
class SeriesBounds:
    """Between `low` and `high` lies the probability that at least one part fails; arrays (n,)."""

    low: np.ndarray
    high: np.ndarray


def both_fail(first_beta, second_beta, correlation):
    """Probability that two correlated standard normal margins both fall below -beta_1 and -beta_2 [-].

    Phi(-b1) Phi(-b2) + 1/(2 pi) integral over asin(rho) of exp(-(b1^2 + b2^2 - 2 b1 b2 sin t) / (2 cos^2 t)), 32-point Gauss-Legendre; equal
    margins (rho = 1) give the smaller of the two. Source: Plackett's identity (Biometrika 41 (1954) 351), held to scipy's in the tests.
    """
    b1, b2, rho = np.broadcast_arrays(*(np.asarray(a, dtype=float) for a in (first_beta, second_beta, correlation)))
    nodes, weights = np.polynomial.legendre.leggauss(ANGLE_NODES)
    rho = np.clip(rho, -1.0, 1.0)
    # Nodes crowd towards asin(rho), where the integrand changes fastest as |rho| nears 1.
    share = 0.5 * (nodes + 1.0)
    crowd, crowd_slope = 1 - (1 - share) ** 3, 3 * (1 - share) ** 2
    end = np.arcsin(rho)
    angle = end[..., None] * crowd
    cosine2 = np.maximum(np.cos(angle) ** 2, 1e-300)
    power = -(b1[..., None] ** 2 + b2[..., None] ** 2 - 2 * b1[..., None] * b2[..., None] * np.sin(angle)) / (2 * cosine2)
    integral = end * np.sum(0.5 * weights * crowd_slope * np.exp(power), axis=-1) / (2 * np.pi)
    alone = np.minimum(ndtr(-b1), ndtr(-b2))
    return np.clip(ndtr(-b1) * ndtr(-b2) + integral, 0.0, alone)


def series_bounds(beta, alpha) -> SeriesBounds:
    """Ditlevsen's bounds on the probability that at least one of m parts fails, beta (n, m), alpha (n, m, k): `SeriesBounds`.

    Source: Ditlevsen, Journal of Structural Mechanics 7 (1979) 453-472; parts in order of falling probability. Beta of +inf is a part that
    cannot fail.
    """
    order = np.argsort(beta, axis=1, kind="stable")
    beta = np.take_along_axis(beta, order, axis=1)
    alpha = np.take_along_axis(alpha, order[:, :, None], axis=1)
    part = ndtr(-beta)
    low, high = part[:, 0].copy(), part[:, 0].copy()
    for i in range(1, beta.shape[1]):
        never = np.isposinf(beta[:, i])
        pairs = np.zeros((len(beta), i))
        for j in range(i):
            cosine = np.einsum("nk,nk->n", alpha[:, i], alpha[:, j])
            pairs[:, j] = both_fail(beta[:, j], np.where(never, 40.0, beta[:, i]), np.where(never, 0.0, cosine))
        low += np.maximum(0.0, part[:, i] - pairs.sum(axis=1))
        high += part[:, i] - pairs.max(axis=1)
    return SeriesBounds(low, np.minimum(high, 1.0))
