"""Calibration and scores against closed forms, scipy, and simulated records of known truth."""

import numpy as np
import pytest
from scipy.optimize import minimize
from scipy.special import expit, logit
from scipy.stats import mannwhitneyu

from screener.likelihood import calibration as c


def records(intercept, slope, count=60_000, seed=0):
    generator = np.random.default_rng(seed)
    chance = expit(generator.normal(-4, 1.2, count))
    return chance, generator.random(count) < expit(intercept + slope * logit(chance))


@pytest.mark.parametrize(("intercept", "slope"), [(0.0, 1.0), (-1.0, 0.6), (1.5, 1.3)])
def test_known_distortion_is_found(intercept, slope):
    chance, leaked = records(intercept, slope)
    found = c.calibrate(chance, leaked)
    errors = np.sqrt(np.diag(found.covariance))
    assert found.usable
    assert abs(found.intercept - intercept) < 4 * errors[0] and abs(found.slope - slope) < 4 * errors[1]
    assert found.apply(chance).mean() == pytest.approx(leaked.mean(), rel=1e-2)


def test_fit_is_the_minimum_that_a_general_optimiser_finds():
    chance, leaked = records(-1.0, 0.6, 3000, 4)
    x, y = logit(chance), leaked.astype(float)

    def cost(v):
        eta = v[0] + v[1] * x
        return np.sum(np.logaddexp(0, eta) - y * eta) + 0.5 * (v[0] / c.INTERCEPT_DEVIATION) ** 2 + 0.5 * ((v[1] - 1) / c.SLOPE_DEVIATION) ** 2

    best = minimize(cost, [0.0, 1.0], method="Nelder-Mead", options={"xatol": 1e-9, "fatol": 1e-10, "maxiter": 5000}).x
    found = c.calibrate(chance, leaked)
    assert [found.intercept, found.slope] == pytest.approx(best, abs=1e-5)


def test_too_few_leaks_are_refused_with_the_reason():
    chance, leaked = records(0.0, 1.0, 300, 1)
    leaked = np.zeros_like(leaked)
    leaked[:5] = True
    found = c.calibrate(chance, leaked)
    assert not found.usable and "5 leaks" in found.reason and np.isnan(found.apply(chance)).all()
    assert not c.calibrate(chance, np.ones(300, dtype=bool)).usable


def test_perfect_separation_stays_finite():
    chance = expit(np.linspace(-6, 0, 200))
    found = c.calibrate(chance, chance > 0.2)
    assert found.usable and np.isfinite(found.slope) and 1.0 < found.slope < 10


def test_unknown_chances_are_left_out():
    chance, leaked = records(0.0, 1.0, 5000, 2)
    whole = c.calibrate(chance, leaked)
    more = c.calibrate(np.append(chance, [np.nan, np.nan]), np.append(leaked, [True, False]))
    assert more.slope == pytest.approx(whole.slope) and more.leaks == whole.leaks


def test_murphys_parts_make_the_brier_score():
    chance, leaked = records(-0.5, 0.8, 4000, 3)
    for bins in (1, 5, 10, 40):
        parts = c.murphy_decomposition(chance, leaked, bins)
        assert parts.reliability - parts.resolution + parts.uncertainty + parts.within == pytest.approx(c.brier_score(chance, leaked), abs=1e-14)


def test_murphy_by_hand():
    """Two chances, 0.2 (leaks 1 of 4) and 0.6 (3 of 4): reliability 0.0125, resolution 0.0625, uncertainty 0.25."""
    chance = np.repeat([0.2, 0.6], 4)
    leaked = np.array([1, 0, 0, 0, 1, 1, 1, 0], dtype=bool)
    parts = c.murphy_decomposition(chance, leaked, 2)
    assert [parts.reliability, parts.resolution, parts.uncertainty, parts.within] == pytest.approx([0.0125, 0.0625, 0.25, 0.0])


def test_concordance_against_scipys_rank_test():
    chance, leaked = records(0.0, 1.0, 2000, 5)
    score = np.round(chance, 2)  # many ties
    expected = mannwhitneyu(score[leaked], score[~leaked]).statistic / (leaked.sum() * (~leaked).sum())
    assert c.concordance(score, leaked) == pytest.approx(expected, abs=1e-12)
    assert c.concordance([1, 2, 3], [False, False, True]) == 1.0
    assert np.isnan(c.concordance([1, 2], [False, False]))


def test_gain_curve_limits():
    leaked = np.array([True] * 5 + [False] * 95)
    assert c.share_found(leaked.astype(float), leaked, 0.05) == pytest.approx(1.0)
    assert c.share_found(np.zeros(100), leaked, 0.3) == pytest.approx(0.3)
    assert c.share_found(-leaked.astype(float), leaked, 0.5) == pytest.approx(0.0)
    inspected, found = c.gain_curve(np.arange(100.0), leaked)
    assert inspected[0] == found[0] == 0.0 and inspected[-1] == found[-1] == 1.0
    assert np.isnan(c.share_found(np.arange(3.0), np.zeros(3, dtype=bool), 0.1))


def test_area_under_the_gain_curve_is_that_of_the_concordance():
    chance, leaked = records(0.0, 1.0, 3000, 6)
    area = np.trapezoid(*c.gain_curve(chance, leaked)[::-1])
    base = leaked.mean()
    assert area == pytest.approx((1 - base) * c.concordance(chance, leaked) + base / 2, abs=1e-9)


def test_reliability_curve_of_honest_chances_stays_in_its_interval():
    chance, leaked = records(0.0, 1.0, 60_000, 7)
    curve = c.reliability_curve(chance, leaked, 20)
    assert curve.joints.sum() == 60_000
    assert ((curve.predicted > curve.low) & (curve.predicted < curve.high)).mean() >= 0.75
    assert (np.diff(curve.predicted) > 0).all()


def test_wilson_interval_of_a_known_case():
    """0 of 10 at z = 1.645: upper end z^2 / (n + z^2) in closed form."""
    curve = c.reliability_curve(np.full(10, 0.1), np.zeros(10, dtype=bool), 1)
    assert curve.low[0] == 0.0 and curve.high[0] == pytest.approx(1.6448536**2 / (10 + 1.6448536**2))


@pytest.mark.parametrize(("mean", "said"), [(1e-3, ""), (1e-6, "below"), (0.2, "above"), (np.nan, "")])
def test_band_of_published_frequencies(mean, said):
    words = c.outside_band(mean)
    assert (words == "") == (said == "") and said in words
