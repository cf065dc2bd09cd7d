"""The quantities' transformations against scipy's distributions, far into both tails."""

import numpy as np
import pytest
from scipy import stats

from screener.likelihood.variables import Gumbel, LogNormal, Normal, Space, TruncatedNormal, Uniform, Weibull

Z = np.linspace(-7.5, 7.5, 61)


def law(variable):
    if isinstance(variable, Normal):
        return stats.norm(variable.mean, variable.deviation)
    if isinstance(variable, LogNormal):
        return stats.lognorm(variable.log_deviation, scale=np.exp(variable.log_mean))
    if isinstance(variable, Gumbel):
        return stats.gumbel_r(variable.location, variable.scale)
    if isinstance(variable, Weibull):
        return stats.weibull_min(variable.shape, scale=variable.scale)
    if isinstance(variable, Uniform):
        return stats.uniform(variable.low, variable.high - variable.low)
    ends = ((end - variable.mean) / variable.deviation for end in (variable.low, variable.high))
    return stats.truncnorm(*ends, loc=variable.mean, scale=variable.deviation)


ALL = [
    Normal(3.0, 2.0),
    LogNormal.of(3.0, 0.4),
    Gumbel.of(5.0, 1.5),
    Weibull(2.0, 1.7),
    TruncatedNormal(1.0, 0.5, 0.0, np.inf),
    TruncatedNormal(1.0, 0.5, 3.0, 9.0),
    TruncatedNormal(1.0, 0.5, -np.inf, -1.0),
    Uniform(2.0, 6.0),
]


@pytest.mark.parametrize("variable", ALL, ids=lambda v: type(v).__name__)
def test_value_has_the_distribution(variable):
    x = variable.value(Z)
    low = Z < 0
    np.testing.assert_allclose(law(variable).cdf(x[low]), stats.norm.cdf(Z[low]), rtol=1e-6, atol=5e-14)
    np.testing.assert_allclose(law(variable).sf(x[~low]), stats.norm.sf(Z[~low]), rtol=1e-5, atol=5e-14)


@pytest.mark.parametrize("variable", ALL, ids=lambda v: type(v).__name__)
def test_slope_is_the_derivative(variable):
    z = Z[np.abs(Z) < 6]
    numeric = (variable.value(z + 1e-5) - variable.value(z - 1e-5)) / 2e-5
    np.testing.assert_allclose(variable.value_and_slope(z)[1], numeric, rtol=2e-4, atol=1e-9)
    np.testing.assert_allclose(variable.slope(z), variable.value_and_slope(z)[1])


def test_far_tails_stay_finite():
    for variable in ALL:
        value, slope = variable.value_and_slope(np.array([-30.0, 30.0]))
        assert np.isfinite(value).all() and np.isfinite(slope).all()


def test_means_and_deviations_are_those_asked_for():
    assert law(LogNormal.of(3.0, 0.4)).mean() == pytest.approx(3.0)
    assert law(LogNormal.of(3.0, 0.4)).std() == pytest.approx(1.2)
    assert law(Gumbel.of(5.0, 1.5)).mean() == pytest.approx(5.0)
    assert law(Gumbel.of(5.0, 1.5)).std() == pytest.approx(1.5)


def test_parameters_per_joint_and_correlation():
    space = Space((Normal(np.array([0.0, 10.0]), 1.0), Normal(0.0, 2.0)), np.linalg.cholesky([[1, 0.6], [0.6, 1]]))
    u = np.random.default_rng(1).standard_normal((200_000, 2))
    x, slope = space.take(np.ones(200_000, dtype=int)).physical(u)
    assert x.mean(axis=0) == pytest.approx([10.0, 0.0], abs=0.02)
    assert np.corrcoef(x.T)[0, 1] == pytest.approx(0.6, abs=0.01)
    alpha = np.array([[0.6, 0.8]])
    assert space.shares_by_quantity(alpha).sum() == pytest.approx(1.0)
    assert Space(space.variables).shares_by_quantity(alpha)[0] == pytest.approx([0.36, 0.64])
