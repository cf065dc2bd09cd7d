"""Extreme-value fits against a published data set with its published fit, a reference library and integrals of the theory."""

import csv
from pathlib import Path

import numpy as np
import pytest
from scipy import integrate, stats

from screener.pressure import annual_maximum, extremes


@pytest.fixture(scope="module")
def sea_level():
    path = Path(__file__).parent / "data" / "sea_level_maxima.csv"
    with open(path, newline="", encoding="utf-8") as stream:
        table = csv.DictReader(line for line in stream if not line.startswith("#"))
        return np.array([float(row["level_m"]) for row in table])


def test_gev_of_port_pirie_coles_section_3_4_1(sea_level):
    """Coles (2001), p. 59 (read in the tests of an open R package and in a tutorial): 3.87, 0.198, -0.050 with the covariance printed there."""
    fit = extremes.gev_by_likelihood(sea_level, 1.0)
    assert len(sea_level) == 65
    assert fit.location == pytest.approx(3.87, abs=0.005)
    assert fit.scale == pytest.approx(0.198, abs=0.0005)
    assert fit.shape == pytest.approx(-0.050, abs=0.0005)
    printed = np.array([[0.000780, 0.000197, -0.00107], [0.000197, 0.000410, -0.000778], [-0.00107, -0.000778, 0.00965]])
    half_digit = np.array([[5e-7, 5e-7, 5e-6], [5e-7, 5e-7, 5e-7], [5e-6, 5e-7, 5e-6]])
    assert np.all(np.abs(fit.covariance - printed) <= half_digit * 1.05)
    assert (fit.location, fit.scale, fit.shape) == pytest.approx((3.87474692, 0.19804120, -0.05008773), abs=5e-5)  # package `ismev` (read)


def test_levels_of_port_pirie_coles_page_60(sea_level):
    """Coles (2001), p. 60 (read): 4.30 m in 10 years with variance 0.00303, 4.69 m in 100 years."""
    level, error = extremes.gev_by_likelihood(sea_level, 1.0).level([10.0, 100.0])
    assert level == pytest.approx([4.30, 4.69], abs=0.005)
    assert error[0] ** 2 == pytest.approx(0.00303, abs=0.000005)


def test_gumbel_of_port_pirie_coles_page_64(sea_level):
    """Coles (2001), Gumbel fit of the same data: 3.87 and 0.195, standard errors 0.03 and 0.019 (from memory)."""
    fit = extremes.gumbel_by_likelihood(sea_level, 1.0)
    assert (fit.location, fit.scale) == (pytest.approx(3.87, abs=0.005), pytest.approx(0.195, abs=0.0005))
    assert np.sqrt(np.diag(fit.covariance)) == pytest.approx([0.03, 0.019], abs=0.005)


@pytest.mark.parametrize("seed", range(5))
def test_gumbel_likelihood_against_scipy(seed):
    sample = stats.gumbel_r.rvs(500, 40, size=60, random_state=np.random.default_rng(seed))
    fit = extremes.gumbel_by_likelihood(sample, 1.0)
    assert (fit.location, fit.scale) == pytest.approx(stats.gumbel_r.fit(sample), rel=1e-5)


@pytest.mark.parametrize("shape", [-0.2, 0.0, 0.2])
def test_gev_likelihood_against_scipy(shape):
    sample = stats.genextreme.rvs(-shape, 500, 40, size=200, random_state=np.random.default_rng(9))
    fit = extremes.gev_by_likelihood(sample, 1.0)
    mine = stats.genextreme.nnlf((-fit.shape, fit.location, fit.scale), sample)
    c, location, scale = stats.genextreme.fit(sample, -fit.shape, loc=fit.location, scale=fit.scale)
    assert mine <= stats.genextreme.nnlf((c, location, scale), sample) + 1e-6
    assert (fit.location, fit.scale, fit.shape) == pytest.approx((location, scale, -c), rel=2e-3, abs=2e-3)


def test_gumbel_moments_against_an_l_moment_route_of_a_reference_library(sea_level):
    """scipy's `lmoment` and the closed forms of Hosking (1990): scale = l2/ln 2, location = l1 - 0.5772 scale."""
    if not hasattr(stats, "lmoment"):
        pytest.skip("this scipy has no L-moments")
    first, second, third = stats.lmoment(sea_level, order=[1, 2, 3], standardize=False)
    assert extremes.l_moments(sea_level) == pytest.approx((first, second, third), rel=1e-12)


def test_l_moments_of_a_gev_come_back():
    """Hosking (1990), GEV: l1, l2 by quadrature of the quantile function; the fit to 400 000 even quantiles finds the parameters."""
    for shape in (-0.3, 0.0, 0.15):
        even = (np.arange(400_000) + 0.5) / 400_000
        fit = extremes.gev_by_moments(stats.genextreme.ppf(even, -shape, 10, 2), 1.0)
        assert (fit.location, fit.scale, fit.shape) == pytest.approx((10, 2, shape), abs=2e-3)


def test_sampling_error_of_the_moment_fit_phien_1987():
    """n Cov/scale^2 = 1.1128, 0.2287, 0.8046 (Phien 1987, from memory), here from the covariance of the moments (Hosking et al. 1985):

    n Cov(b_r, b_s) = integral over x < y of [F(x)^r F(y)^s + F(x)^s F(y)^r] F(x)(1 - F(y)).
    """

    def covariance(r, s):
        def inner(y, x):
            f, g = np.exp(-np.exp(-x)), np.exp(-np.exp(-y))
            return (f**r * g**s + f**s * g**r) * f * (1 - g)

        return integrate.dblquad(inner, -5, 32, lambda x: x, lambda x: 32, epsabs=1e-7)[0]

    moments = np.array([[covariance(0, 0), covariance(0, 1)], [covariance(0, 1), covariance(1, 1)]])
    scale_from_moments = np.array([-1.0, 2.0]) / np.log(2)
    location_from_moments = np.array([1.0, 0.0]) - extremes.EULER * scale_from_moments
    to_parameters = np.stack((location_from_moments, scale_from_moments))
    assert to_parameters @ moments @ to_parameters.T == pytest.approx(extremes.MOMENT_COVARIANCE, abs=2e-4)


@pytest.mark.parametrize("method", [extremes.gumbel_by_moments, extremes.gumbel_by_likelihood])
def test_sampling_error_by_simulation(method):
    generator = np.random.default_rng(11)
    fits = [method(stats.gumbel_r.rvs(size=60, random_state=generator), 1.0) for _ in range(3000)]
    seen = np.cov(np.array([(fit.location, fit.scale) for fit in fits]).T)
    stated = np.mean([fit.covariance for fit in fits], axis=0)
    assert np.diag(stated) == pytest.approx(np.diag(seen), rel=0.08)


def test_peaks_over_a_threshold_against_the_theory():
    """Poisson peaks with exponential excess have a Gumbel yearly maximum (Coles 2001, ch. 4): 30 a year, threshold 500, mean excess 20."""
    generator = np.random.default_rng(12)
    years = 400.0
    peaks = 500 + generator.exponential(20, size=generator.poisson(30 * years))
    fit = annual_maximum.gumbel_from_peaks(peaks, 500.0, years)
    expected = np.array([500 + 20 * np.log(30), 20.0])
    assert np.all(np.abs([fit.location, fit.scale] - expected) < 3 * np.sqrt(np.diag(fit.covariance)))
