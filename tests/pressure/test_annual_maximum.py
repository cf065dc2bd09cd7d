"""Blocks, peaks, the step to a year, and what a short record does."""

import numpy as np
import pytest
from scipy import stats

from screener.pressure import annual_maximum, extremes


def test_block_maxima_and_their_cover():
    time = np.array([0.0, 1, 2, 10, 11, 35])
    number, largest, covered = annual_maximum.block_maxima(time, [1.0, 5, 2, 3, 9, 4], np.ones(6), 10.0)
    assert number.tolist() == [0, 1, 3] and largest.tolist() == [5, 9, 4]
    assert covered == pytest.approx([0.3, 0.2, 0.1])
    assert all(len(x) == 0 for x in annual_maximum.block_maxima([], [], [], 10.0))


def test_block_maximum_unknown_stays_unknown():
    assert np.isnan(annual_maximum.block_maxima([0.0, 1.0], [np.nan, 2.0], [1.0, 1.0], 10.0)[1]).all()


def test_peaks_that_belong_together_count_once():
    time = np.arange(12.0)
    value = np.array([0, 6, 0, 7, 0, 0, 0, 0, 8, 8, 0, 6.0])
    when, peak = annual_maximum.peaks_over_threshold(time, value, 5.0, 2.0)
    assert when.tolist() == [3, 8] and peak.tolist() == [7, 8]
    when, peak = annual_maximum.peaks_over_threshold(time, value, 9.0, 2.0)
    assert len(when) == len(peak) == 0


def test_twelve_months_make_a_year():
    """The maximum of twelve Gumbel months has the distribution `yearly` gives."""
    monthly = extremes.gumbel_by_moments(stats.gumbel_r.rvs(600, 30, size=48, random_state=np.random.default_rng(1)), 1 / 12)
    year = annual_maximum.yearly(monthly)
    x = np.linspace(550, 900, 50)
    assert stats.gumbel_r.cdf(x, year.location, year.scale) == pytest.approx(stats.gumbel_r.cdf(x, monthly.location, monthly.scale) ** 12)
    assert year.covariance[0, 0] > monthly.covariance[0, 0]  # carried further out, less sure
    assert year.level(50.0) == pytest.approx(monthly.level(50.0), rel=1e-9)


def test_short_records_widen_and_long_ones_do_not():
    sample = stats.gumbel_r.rvs(600, 30, size=4000, random_state=np.random.default_rng(2))
    few, many = (extremes.gumbel_by_moments(sample[:size], 1.0) for size in (6, 4000))
    assert annual_maximum.widened(few)[1] > 1.1 * few.scale
    assert annual_maximum.widened(many) == pytest.approx((many.location, many.scale), rel=1e-3)
    assert few.reason and not many.reason


def test_widened_matches_a_simulated_predictive_distribution():
    fit = extremes.gumbel_by_moments(stats.gumbel_r.rvs(600, 30, size=15, random_state=np.random.default_rng(3)), 1.0)
    generator = np.random.default_rng(4)
    location, scale = generator.multivariate_normal([fit.location, fit.scale], fit.covariance, size=400_000).T
    maximum = location + scale * stats.gumbel_r.rvs(size=400_000, random_state=generator)
    wide = stats.gumbel_r(*annual_maximum.widened(fit))
    assert (wide.mean(), wide.std()) == pytest.approx((maximum.mean(), maximum.std()), rel=3e-3)


@pytest.mark.parametrize("maxima", [[], [5.0], [5.0, 6.0], [np.nan] * 9, [7.0] * 20])
def test_no_fit_without_enough_different_maxima(maxima):
    for method in (extremes.gumbel_by_moments, extremes.gumbel_by_likelihood, extremes.gev_by_moments, extremes.gev_by_likelihood):
        fit = method(maxima, 1.0)
        assert np.isnan(fit.location) and np.isnan(fit.covariance).all() and fit.reason


def test_gev_meets_gumbel_at_shape_nought():
    covariance = np.diag([1.0, 0.5, 0.01])
    heavy = extremes.ExtremeFit(10, 2, 1e-5, covariance, 20, 1.0, "")
    none = extremes.ExtremeFit(10, 2, 0.0, covariance[:2, :2], 20, 1.0, "")
    assert heavy.level(100.0)[0] == pytest.approx(none.level(100.0)[0], rel=1e-4)
    flat = extremes.ExtremeFit(10, 2, 0.0, covariance, 20, 1.0, "")
    assert heavy.level(100.0)[1] == pytest.approx(flat.level(100.0)[1], rel=1e-3)


def test_a_fit_rescales_with_its_unit():
    sample = stats.gumbel_r.rvs(600, 30, size=40, random_state=np.random.default_rng(5))
    for method in (extremes.gumbel_by_moments, extremes.gumbel_by_likelihood, extremes.gev_by_likelihood):
        kpa, psi = method(sample, 1.0), method(sample * 0.145038, 1.0)
        assert (psi.location, psi.scale) == pytest.approx((kpa.location * 0.145038, kpa.scale * 0.145038), rel=1e-5)
        assert psi.covariance[0, 0] == pytest.approx(kpa.covariance[0, 0] * 0.145038**2, rel=1e-3)
