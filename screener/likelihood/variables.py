"""Doubtful quantities: each one's value as a function of a standard normal variable, per joint.

x(z) has the quantity's own distribution when z is standard normal. Parameters are scalars or one value per joint; a deviation of zero
makes the quantity certain. Correlation is that of Nataf's model (Liu and Der Kiureghian, Probabilistic Engineering Mechanics 1 (1986) 105-112).
"""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np
from scipy.optimize import brentq
from scipy.special import log_ndtr, ndtr, ndtri

EULER = 0.5772156649015329
LOG_TWO_PI = np.log(2 * np.pi)
QUADRATURE_NODES = 64


def standard_density(z):
    """Density of the standard normal distribution, exp(-z^2/2) / sqrt(2 pi) [-]."""
    return np.exp(-0.5 * np.square(z) - 0.5 * LOG_TWO_PI)


def log_minus_log_ndtr(z):
    """ln(-ln Phi(z)), without underflow at large z, where -ln Phi(z) is Phi(-z) (1 + Phi(-z) / 2 ...) [-]."""
    z = np.asarray(z, dtype=float)
    far = z > 5
    tail = log_ndtr(-z)
    return np.where(far, tail + 0.5 * np.exp(tail), np.log(-log_ndtr(np.where(far, 0.0, z))))


@dataclass(frozen=True, eq=False)
class Variable:
    """Base: parameters are the fields. `value` is x(z), `slope` is dx/dz; z broadcasts against the parameters."""

    def take(self, rows):
        """The same quantity for some of the joints (int array); scalars stay."""
        parts = [np.asarray(getattr(self, item.name), dtype=float) for item in fields(self)]
        return type(self)(*(part if part.ndim == 0 else part[rows] for part in parts))

    def value_and_slope(self, z):
        return self.value(z), self.slope(z)


@dataclass(frozen=True, eq=False)
class Normal(Variable):
    """x = mean + deviation z."""

    mean: np.ndarray
    deviation: np.ndarray

    def value(self, z):
        return self.mean + self.deviation * z

    def slope(self, z):
        return self.deviation + 0.0 * z


@dataclass(frozen=True, eq=False)
class LogNormal(Variable):
    """x = exp(log_mean + log_deviation z); always positive."""

    log_mean: np.ndarray
    log_deviation: np.ndarray

    @classmethod
    def of(cls, mean, variation):
        """By mean and coefficient of variation V: log_deviation^2 = ln(1 + V^2), log_mean = ln(mean) - log_deviation^2 / 2."""
        squared = np.log1p(np.square(variation))
        return cls(np.log(mean) - 0.5 * squared, np.sqrt(squared))

    def value(self, z):
        return np.exp(self.log_mean + self.log_deviation * z)

    def slope(self, z):
        return self.log_deviation * self.value(z)

    def value_and_slope(self, z):
        value = self.value(z)
        return value, self.log_deviation * value


@dataclass(frozen=True, eq=False)
class Gumbel(Variable):
    """Largest values: F(x) = exp(-exp(-(x - location) / scale)), x = location - scale ln(-ln Phi(z))."""

    location: np.ndarray
    scale: np.ndarray

    @classmethod
    def of(cls, mean, deviation):
        """By mean and standard deviation: scale = deviation sqrt(6) / pi, location = mean - 0.5772 scale."""
        scale = np.asarray(deviation) * np.sqrt(6) / np.pi
        return cls(mean - EULER * scale, scale)

    def value(self, z):
        return self.location - self.scale * log_minus_log_ndtr(z)

    def slope(self, z):
        return self.value_and_slope(z)[1]

    def value_and_slope(self, z):
        doubled = log_minus_log_ndtr(z)
        rate = np.exp(-0.5 * np.square(z) - 0.5 * LOG_TWO_PI - log_ndtr(z) - doubled)
        return self.location - self.scale * doubled, self.scale * rate


@dataclass(frozen=True, eq=False)
class Weibull(Variable):
    """F(x) = 1 - exp(-(x / scale)^shape), x = scale (-ln Phi(-z))^(1 / shape); shape 1 is the exponential distribution."""

    scale: np.ndarray
    shape: np.ndarray

    def value(self, z):
        return self.scale * np.exp(log_minus_log_ndtr(-np.asarray(z)) / self.shape)

    def slope(self, z):
        return self.value_and_slope(z)[1]

    def value_and_slope(self, z):
        doubled = log_minus_log_ndtr(-np.asarray(z))
        value = self.scale * np.exp(doubled / self.shape)
        rate = np.exp(-0.5 * np.square(z) - 0.5 * LOG_TWO_PI - log_ndtr(-np.asarray(z)) - doubled)
        return value, value / self.shape * rate


@dataclass(frozen=True, eq=False)
class TruncatedNormal(Variable):
    """Normal of `mean` and `deviation` (before cutting), cut to low..high; either may be infinite. deviation > 0."""

    mean: np.ndarray
    deviation: np.ndarray
    low: np.ndarray
    high: np.ndarray

    def _inner(self, z):
        # Whichever tail is the smaller is taken, so that neither end loses its digits.
        a = (np.asarray(self.low) - self.mean) / self.deviation
        b = (np.asarray(self.high) - self.mean) / self.deviation
        mass = np.where(a > 0, ndtr(-a) - ndtr(-b), ndtr(b) - ndtr(a))
        below = ndtr(a) + mass * ndtr(z)
        above = ndtr(-b) + mass * ndtr(-np.asarray(z))
        inner = np.where(below < 0.5, ndtri(np.minimum(below, 0.5)), -ndtri(np.minimum(above, 0.5)))
        return np.clip(inner, a, b), mass

    def value(self, z):
        return self.mean + self.deviation * self._inner(z)[0]

    def slope(self, z):
        inner, mass = self._inner(z)
        return self.deviation * mass * np.exp(0.5 * np.square(np.clip(inner, -38, 38)) - 0.5 * np.square(z))


@dataclass(frozen=True, eq=False)
class Uniform(Variable):
    """Evenly between low and high, x = low + (high - low) Phi(z)."""

    low: np.ndarray
    high: np.ndarray

    def value(self, z):
        return self.low + (self.high - self.low) * ndtr(z)

    def slope(self, z):
        return (self.high - self.low) * standard_density(z)


@dataclass(frozen=True, eq=False)
class Space:
    """The quantities of a limit state. `root`: lower Cholesky factor of the correlation of the z, None where independent."""

    variables: tuple[Variable, ...]
    root: np.ndarray | None = None

    def take(self, rows):
        return Space(tuple(v.take(rows) for v in self.variables), self.root)

    def physical(self, u):
        """(x, dx/dz) as (n, k) arrays at independent standard normal u (n, k); z = root u."""
        z = u if self.root is None else u @ self.root.T
        value, slope = np.empty(z.shape), np.empty(z.shape)
        for k, variable in enumerate(self.variables):
            value[:, k], slope[:, k] = variable.value_and_slope(z[:, k])
        return value, slope

    def gradient(self, by_physical, slope):
        """dg/du (n, k) from dg/dx and dx/dz (n, k)."""
        by_z = by_physical * slope
        return by_z if self.root is None else by_z @ self.root

    def shares_by_quantity(self, alpha):
        """Share of each quantity in the doubt, (n, k), rows sum to 1: alpha^2 where independent.

        With correlation: gamma^2 scaled to 1, gamma = (root^-T alpha), as Der Kiureghian's importance vector for z.
        """
        if self.root is None:
            return np.square(alpha)
        back = alpha @ np.linalg.inv(self.root)
        return np.square(back) / np.sum(np.square(back), axis=1, keepdims=True)


def nataf_correlation(first: Variable, second: Variable, correlation: float) -> float:
    """Correlation of the two standard normal variables that gives `correlation` between two quantities with scalar parameters.

    By Gauss-Hermite quadrature (64 x 64 points) of Nataf's integral and root finding. NaN where no such correlation exists.
    """
    nodes, weights = np.polynomial.hermite_e.hermegauss(QUADRATURE_NODES)
    weights = weights / weights.sum()
    both = weights[:, None] * weights[None, :]

    def standard(variable, z):
        plain = variable.value(nodes)
        mean = weights @ plain
        return (variable.value(z) - mean) / np.sqrt(weights @ np.square(plain - mean))

    def found(rho):
        mixed = rho * nodes[:, None] + np.sqrt(1 - rho * rho) * nodes[None, :]
        return float(np.sum(both * standard(first, nodes)[:, None] * standard(second, mixed))) - correlation

    if correlation == 0:
        return 0.0
    ends = (-0.9999, 0.9999)
    if found(ends[0]) > 0 or found(ends[1]) < 0:
        return float("nan")
    return float(brentq(found, *ends, xtol=1e-10))


def nataf_root(variables: tuple[Variable, ...], correlation: np.ndarray) -> np.ndarray:
    """Lower Cholesky factor of the z's correlation for a correlation matrix of quantities with scalar parameters."""
    corrected = np.eye(len(variables))
    for i, first in enumerate(variables):
        for j in range(i):
            corrected[i, j] = corrected[j, i] = nataf_correlation(first, variables[j], float(correlation[i, j]))
    return np.linalg.cholesky(corrected)
