"""Evidence: conjugate updates against brute force, order independence, impossible observations."""

import numpy as np
import pytest
from scipy import stats

from screener.likelihood.evidence import (
    cohort_sums,
    log_leaks,
    log_measured,
    log_survived,
    mixed_likelihood,
    prior_factor,
    scaled_likelihood,
    scenario_weights,
    updated_factor,
)


def test_factor_against_brute_force_bayes():
    factor = updated_factor(prior_factor(1), 4, 1.3)
    grid = np.linspace(1e-6, 40, 400_001)
    density = stats.gamma.pdf(grid, 0.25, scale=4.0) * stats.poisson.pmf(4, 1.3 * grid)
    density /= np.trapezoid(density, grid)
    mean = np.trapezoid(grid * density, grid)
    assert factor.mean[0] == pytest.approx(mean, rel=1e-4)
    deviation = np.sqrt(np.trapezoid((grid - mean) ** 2 * density, grid))
    assert factor.variation[0] == pytest.approx(deviation / mean, rel=1e-4)
    low, high = factor.interval(0.9)
    inside = (grid > low[0]) & (grid < high[0])
    assert np.trapezoid(density[inside], grid[inside]) == pytest.approx(0.9, abs=1e-3)


def test_order_and_portions_of_evidence_do_not_matter():
    at_once = updated_factor(prior_factor(3), [3, 0, 1], [2.0, 0.5, 4.0])
    pieces = [([0, 0, 1], [0.4, 0.1, 1.0]), ([3, 0, 0], [1.0, 0.4, 1.0]), ([0, 0, 0], [0.6, 0.0, 2.0])]
    for order in ([0, 1, 2], [2, 0, 1], [1, 2, 0]):
        factor = prior_factor(3)
        for k in order:
            factor = updated_factor(factor, *pieces[k])
        np.testing.assert_allclose(factor.shape, at_once.shape)
        np.testing.assert_allclose(factor.rate, at_once.rate)


def test_much_evidence_gives_the_plain_ratio_and_none_the_prior():
    assert updated_factor(prior_factor(1), 5000, 10_000.0).mean[0] == pytest.approx(0.5, rel=1e-3)
    assert updated_factor(prior_factor(1), 0, 0.0).mean[0] == pytest.approx(1.0)
    assert updated_factor(prior_factor(1), 0, 5.0).mean[0] < 0.06


@pytest.mark.parametrize(("leaks", "predicted"), [(-1, 2.0), (1.5, 2.0), (2, -1.0), (3, 0.0), (np.nan, 1.0)])
def test_impossible_counts_are_unknown(leaks, predicted):
    assert np.isnan(updated_factor(prior_factor(1), leaks, predicted).mean[0])


def test_cohort_sums_and_scaling():
    labels, sums = cohort_sums(["b", "a", "b"], [1.0, 2.0, 5.0])
    assert list(labels) == ["a", "b"] and list(sums) == [2.0, 6.0]
    assert scaled_likelihood(1e-4, 3.0) == pytest.approx(3e-4, rel=2e-4)
    assert scaled_likelihood(0.5, 50.0) <= 1.0
    assert scaled_likelihood(1.0, 0.5) == 1.0


def test_weights_against_bayes_by_hand():
    # Two scenarios, 50:50; ten leak-free years at 1 % and 20 % a year.
    annual = np.array([[0.01, 0.20]])
    found = scenario_weights([[0.5, 0.5]], log_survived(annual, 10))
    by_hand = 0.99**10 / (0.99**10 + 0.80**10)
    assert found.weights[0] == pytest.approx([by_hand, 1 - by_hand])
    assert mixed_likelihood(found.weights, annual)[0] == pytest.approx(by_hand * 0.01 + (1 - by_hand) * 0.2)


def test_leak_free_years_never_raise_the_likelihood():
    generator = np.random.default_rng(0)
    annual = generator.uniform(0, 1, (200, 4))
    prior = generator.dirichlet(np.ones(4), 200)
    before = mixed_likelihood(prior, annual)
    for years in (1, 5, 40):
        after = mixed_likelihood(scenario_weights(prior, log_survived(annual, years)).weights, annual)
        assert (after <= before + 1e-12).all()
        before = after


def test_order_of_findings_does_not_matter():
    generator = np.random.default_rng(1)
    prior = generator.dirichlet(np.ones(3), 50)
    annual = generator.uniform(0.001, 0.5, (50, 3))
    terms = [log_survived(annual, 7), log_leaks(annual, 1, 3), log_measured(np.full((50, 1), 120.0), np.array([[90.0, 130.0, 200.0]]), 0.3)]
    whole = scenario_weights(prior, *terms).weights
    np.testing.assert_allclose(scenario_weights(prior, *terms[::-1]).weights, whole, rtol=1e-12)
    step = prior
    for term in (terms[1], terms[2], terms[0]):
        step = scenario_weights(step, term).weights
    np.testing.assert_allclose(step, whole, rtol=1e-10)
    np.testing.assert_allclose(whole.sum(axis=1), 1.0)


def test_impossible_observation_is_reported_and_touches_no_other_joint():
    annual = np.array([[0.0, 0.0], [0.0, 0.1]])
    found = scenario_weights(np.full((2, 2), 0.5), log_leaks(annual, 1, 5))
    assert found.impossible.tolist() == [True, False]
    assert np.isnan(found.weights[0]).all()
    assert found.weights[1] == pytest.approx([0.0, 1.0])
    certain = scenario_weights([[0.5, 0.5]], log_survived(np.array([[1.0, 1.0]]), 3))
    assert certain.impossible[0]
    assert not scenario_weights([[0.5, 0.5]], log_survived(np.array([[1.0, 1.0]]), 0)).impossible[0]


def test_extreme_evidence_does_not_underflow():
    found = scenario_weights([[0.5, 0.5]], [[-5000.0, -5003.0]])
    assert found.weights[0] == pytest.approx([1 / (1 + np.exp(-3)), np.exp(-3) / (1 + np.exp(-3))])


def test_nothing_measured_changes_nothing():
    assert log_measured(np.nan, 100.0, 0.2) == 0.0
