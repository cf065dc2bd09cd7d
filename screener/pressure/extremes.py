"""Largest pressures: block maxima, peaks over a threshold, Gumbel and GEV fits with their sampling error.

Values in any unit (Pa in the tool), times in s. The shape xi has the sign of Coles (2001): above 0 a heavy tail, 0 Gumbel, below 0 an upper
end. Fits are of one station each; a record too short for a fit gives NaN, and `reason` says why.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.optimize import brentq, minimize
from scipy.special import gamma

EULER = 0.5772156649015329
YEAR = 365.25 * 86_400.0

MOMENT_COVARIANCE = np.array([[1.1128, 0.2287], [0.2287, 0.8046]])
"""n Cov(location, scale)/scale^2 of the probability-weighted-moment fit, for many samples. Phien (1987), J. Hydrology 90, 265-285
(from memory); the tests integrate the covariance of the moments and find the same."""

LIKELIHOOD_COVARIANCE = np.linalg.inv(np.array([[1.0, EULER - 1], [EULER - 1, np.pi**2 / 6 + (1 - EULER) ** 2]]))
"""The same for the maximum-likelihood fit: the inverse of Fisher's information of a Gumbel sample."""

FEWEST = 3
"""Blocks below which no fit is given: two always lie on a line."""


@dataclass(frozen=True, eq=False)
class ExtremeFit:
    """A distribution of maxima: F(x) = exp(-exp(-(x - location)/scale)), or GEV with shape xi.

    covariance: of (location, scale), or (location, scale, shape) for a GEV; unit squared. count: maxima used. block: length of the
    block whose maximum this is [years]. reason: empty, or why the numbers are NaN or weak.
    """

    location: float
    scale: float
    shape: float
    covariance: np.ndarray
    count: int
    block: float
    method: str
    reason: str = ""

    def level(self, years):
        """Level [unit of the values] that a year exceeds with probability 1/years (years > 1), and its standard error (delta method)."""
        share = -np.log1p(-1 / np.asarray(years, dtype=float)) * self.block  # -ln F of one block
        reduced = -np.log(share)
        if len(self.covariance) == 2:
            slope = np.stack((np.ones_like(reduced), reduced))
            value = self.location + self.scale * reduced
        else:
            growth = _grown(reduced, self.shape)
            slope = np.stack((np.ones_like(reduced), growth, self.scale * _grown_by_shape(reduced, self.shape)))
            value = self.location + self.scale * growth
        variance = np.einsum("i...,ij,j...->...", slope, self.covariance, slope)
        return value, np.sqrt(variance)


def _grown(reduced, shape):
    """(exp(xi y) - 1)/xi, and y at xi = 0."""
    return reduced + shape * reduced**2 / 2 if abs(shape) < 1e-9 else np.expm1(shape * reduced) / shape


def _grown_by_shape(reduced, shape):
    """Derivative of `_grown` by xi; y^2/2 at xi = 0."""
    if abs(shape) < 1e-6:
        return reduced**2 / 2
    return (shape * reduced * np.exp(shape * reduced) - np.expm1(shape * reduced)) / shape**2


def _nothing(count, block, method, reason, size=2):
    return ExtremeFit(np.nan, np.nan, np.nan, np.full((size, size), np.nan), count, block, method, reason)


def _checked(maxima):
    values = np.asarray(maxima, dtype=float)
    values = np.sort(values[np.isfinite(values)])
    if len(values) < FEWEST:
        return values, f"{len(values)} blocks with a maximum; a fit needs {FEWEST}"
    if values[0] == values[-1]:
        return values, "all maxima are equal, as of a sensor at its limit"
    return values, ""


def l_moments(values):
    """First three sample L-moments (l1, l2, l3) by unbiased probability-weighted moments; values 1-D, at least 3.

    Hosking (1990), J. R. Statist. Soc. B 52, 105-124: b_r = mean of x_(j) (j-1)...(j-r)/((n-1)...(n-r)).
    """
    x = np.sort(np.asarray(values, dtype=float))
    n = len(x)
    j = np.arange(n)
    b0, b1 = x.mean(), np.mean(x * j) / (n - 1)
    b2 = np.mean(x * j * (j - 1)) / ((n - 1) * (n - 2))
    return b0, 2 * b1 - b0, 6 * b2 - 6 * b1 + b0


def gumbel_by_moments(maxima, block_years):
    """Gumbel fit by probability-weighted moments: scale = l2/ln 2, location = l1 - 0.5772 scale; block_years: length of a block.

    Landwehr, Matalas and Wallis (1979), Water Resour. Res. 15, 1055-1064. Robust in short records: the method to use on logs.
    """
    values, reason = _checked(maxima)
    if reason:
        return _nothing(len(values), block_years, "Gumbel, probability-weighted moments", reason)
    mean, spread, _ = l_moments(values)
    scale = spread / np.log(2)
    covariance = MOMENT_COVARIANCE * scale**2 / len(values)
    return ExtremeFit(mean - EULER * scale, scale, 0.0, covariance, len(values), block_years, "Gumbel, probability-weighted moments", _weak(len(values)))


def gumbel_by_likelihood(maxima, block_years):
    """Gumbel fit by maximum likelihood: scale solves s = mean(x) - sum(x w)/sum(w), w = exp(-x/s); one unknown, always one root.

    Covariance: Fisher's information at the estimate.
    """
    values, reason = _checked(maxima)
    if reason:
        return _nothing(len(values), block_years, "Gumbel, maximum likelihood", reason)
    shifted = values - values[0]

    def excess(scale):
        weight = np.exp(-shifted / scale)
        return shifted.mean() - (shifted * weight).sum() / weight.sum() - scale

    width = float(shifted[-1])
    scale = brentq(excess, width * 1e-4, width * 10, xtol=width * 1e-14, rtol=1e-14)
    location = values[0] - scale * np.log(np.mean(np.exp(-shifted / scale)))
    covariance = LIKELIHOOD_COVARIANCE * scale**2 / len(values)
    return ExtremeFit(float(location), float(scale), 0.0, covariance, len(values), block_years, "Gumbel, maximum likelihood", _weak(len(values)))


def gev_by_moments(maxima, block_years):
    """GEV by L-moments: xi from the L-skewness (Hosking, Wallis and Wood 1985, Technometrics 27, 251-261, refined to the exact root).

    No sampling error is given (NaN): use it as a start, and to see how far from Gumbel a record is.
    """
    values, reason = _checked(maxima)
    if reason:
        return _nothing(len(values), block_years, "GEV, L-moments", reason, 3)
    first, second, third = l_moments(values)
    skew = third / second
    k = brentq(lambda k: 2 * _expm1_ratio(k) - 3 - skew, -0.99, 20.0) if -0.97 < skew < 0.999 else np.nan
    if abs(k) < 1e-8:
        k = 1e-8
    scale = second * k / (-np.expm1(-k * np.log(2)) * gamma(1 + k))
    location = first - scale * (1 - gamma(1 + k)) / k
    return ExtremeFit(float(location), float(scale), float(-k), np.full((3, 3), np.nan), len(values), block_years, "GEV, L-moments", _weak(len(values)))


def _expm1_ratio(k):
    """(1 - 3^-k)/(1 - 2^-k), and ln 3/ln 2 at k = 0."""
    return np.log(3) / np.log(2) if abs(k) < 1e-9 else np.expm1(-k * np.log(3)) / np.expm1(-k * np.log(2))


def gev_by_likelihood(maxima, block_years):
    """GEV by maximum likelihood; covariance from the observed information (Coles 2001, ch. 3). NaN covariance for xi <= -0.5, where it fails."""
    values, reason = _checked(maxima)
    start = gev_by_moments(values, block_years)
    method = "GEV, maximum likelihood"
    if reason or not np.isfinite(start.scale):
        return _nothing(len(values), block_years, method, reason or start.reason or "no L-moment start", 3)
    middle, unit = start.location, start.scale
    y = (values - middle) / unit
    begin = np.array([0.0, 0.0, np.clip(start.shape, -0.3, 0.3)])
    found = minimize(_negative_log_likelihood, begin, args=(y,), method="Nelder-Mead", options={"xatol": 1e-10, "fatol": 1e-12, "maxiter": 20_000, "maxfev": 20_000})
    location, log_scale, shape = found.x
    scale = np.exp(log_scale)
    if not found.success or not -0.5 < shape < 1:
        return _nothing(len(values), block_years, method, "the likelihood has no regular maximum: too few blocks or a hard upper limit", 3)
    information = _hessian(lambda p: _negative_log_likelihood(np.array([p[0], np.log(p[1]), p[2]]), y), np.array([location, scale, shape]))
    stretch = np.diag([unit, unit, 1.0])
    covariance = stretch @ np.linalg.inv(information) @ stretch
    return ExtremeFit(middle + unit * location, unit * scale, shape, covariance, len(values), block_years, method, _weak(len(values)))


def _negative_log_likelihood(parameters, y):
    location, log_scale, shape = parameters
    z = (y - location) / np.exp(log_scale)
    if abs(shape) < 1e-7:
        return len(y) * log_scale + z.sum() + np.exp(-z).sum()
    inner = 1 + shape * z
    if inner.min() <= 0:
        return np.inf
    log_inner = np.log(inner)
    return len(y) * log_scale + (1 + 1 / shape) * log_inner.sum() + np.exp(-log_inner / shape).sum()


def _hessian(function, at, step=1e-4):
    """Second derivatives by central differences; the arguments are of order 1."""
    size = len(at)
    result = np.empty((size, size))
    moves = np.eye(size) * step
    for i in range(size):
        for j in range(size):
            plus, minus = moves[i] + moves[j], moves[i] - moves[j]
            result[i, j] = (function(at + plus) - function(at + minus) - function(at - minus) + function(at - plus)) / (4 * step**2)
    return result


def _weak(count):
    return "" if count >= 10 else f"only {count} blocks: the sampling error is itself rough"
