"""Several years and leak-free pasts: against the one-year estimate, against year-by-year simulation, and in their limits."""

import dataclasses
import sys
from pathlib import Path

import numpy as np
import pytest

sys.path.insert(0, str(Path(__file__).resolve().parents[1] / "outside"))

from test_reliability_openturns import invented_joints  # noqa: E402

from screener.likelihood.leak import leak_likelihood  # noqa: E402
from screener.likelihood.tightness import Doubt, margin  # noqa: E402
from screener.likelihood.years import likelihood_over_years  # noqa: E402
from screener.records import ModelError  # noqa: E402


@pytest.fixture(scope="module")
def joints():
    return invented_joints(60, 8)


def test_one_year_without_history_is_the_annual_likelihood(joints):
    sampled = leak_likelihood(joints, 2, samples=4000)
    years = likelihood_over_years(joints, 0.0, 1.0, 3, samples=2000)
    error = np.hypot(years.annual_error, 0.25 * (sampled.high - sampled.low))
    assert (np.abs(years.annual - sampled.likelihood) < 4 * error).all()
    np.testing.assert_allclose(years.within, years.annual, rtol=1e-9)
    np.testing.assert_allclose(years.survival, 1.0, atol=0.1)


def test_against_simulated_years(joints):
    """One joint's fixed quantities drawn, then 12 leak-free and 10 coming years one by one."""
    chosen = np.argsort(np.abs(leak_likelihood(joints, 1).likelihood - 0.05))[:4]
    generator = np.random.default_rng(5)
    draws, past, coming = 100_000, 12, 10
    for i in chosen:
        one = joints.take(np.full(draws, i))
        u = generator.standard_normal((draws, len(Doubt)))
        lived, leaked, first = np.ones(draws, dtype=bool), np.zeros(draws, dtype=bool), None
        for year in range(past + coming):
            u[:, [Doubt.SURGE_PEAK, Doubt.COOLING]] = generator.standard_normal((draws, 2))
            now = margin(one, one.space().physical(u)[0]) < 0
            if year < past:
                lived &= ~now
            else:
                first = now if first is None else first
                leaked |= now
        simulated = first[lived].mean(), leaked[lived].mean()
        errors = np.sqrt(np.array(simulated) / lived.sum())
        found = likelihood_over_years(joints.take(np.array([i])), past, coming, 6, samples=4000)
        assert found.annual[0] == pytest.approx(simulated[0], abs=4 * np.hypot(errors[0], found.annual_error[0]))
        assert found.within[0] == pytest.approx(simulated[1], abs=4 * np.hypot(errors[1], found.within_error[0]))
        assert found.survival[0] == pytest.approx(lived.mean(), abs=0.02)


def test_leak_free_years_lower_the_likelihood_and_the_horizon_raises_it(joints):
    annual = [likelihood_over_years(joints, years, 10.0, 1).annual for years in (0.0, 5.0, 30.0)]
    assert (annual[1] <= annual[0]).all() and (annual[2] <= annual[1]).all()
    within = [likelihood_over_years(joints, 5.0, horizon, 1).within for horizon in (0.0, 1.0, 10.0, 50.0)]
    assert (within[0] == 0).all() and all((b >= a).all() for a, b in zip(within, within[1:]))
    # What is fixed is shared by all years: ten years are less than ten times one.
    assert (within[2] <= 1 - (1 - within[1]) ** 10 + 1e-9).all()


def test_with_nothing_fixed_in_doubt_the_past_teaches_nothing(joints):
    certain = {name: np.zeros(60) for name in vars(joints) if name.endswith("_variation") and name != "surge_variation"}
    known = dataclasses.replace(joints, **certain)
    fresh, old = likelihood_over_years(known, 0.0, 10.0, 1), likelihood_over_years(known, 20.0, 10.0, 1)
    likely = old.survival > 1e-9
    np.testing.assert_allclose(old.annual[likely], fresh.annual[likely], rtol=1e-6)
    np.testing.assert_allclose(fresh.within, 1 - (1 - fresh.annual) ** 10, rtol=1e-6, atol=1e-12)


def test_no_surge_scatter_and_no_cold_leak_at_once_or_never(joints):
    still = dataclasses.replace(joints, surge_variation=np.zeros(60), pull_per_cooling=np.zeros(60))
    found = likelihood_over_years(still, 0.0, 10.0, 1)
    np.testing.assert_allclose(found.within, found.annual, rtol=1e-9)
    np.testing.assert_allclose(likelihood_over_years(still, 1.0, 10.0, 1).within, 0.0, atol=1e-12)


def test_a_leak_on_record_raises_the_likelihood_by_bayes_rule(joints):
    """Having leaked at least once in U years and not having leaked in them are the two halves of not knowing."""
    unknown = likelihood_over_years(joints, 4.0, 10.0, 1)
    leaked = likelihood_over_years(joints, 4.0, 10.0, 1, leaky_years=6.0)
    spared = likelihood_over_years(joints, 10.0, 10.0, 1)
    assert (leaked.within >= unknown.within * (1 - 1e-9)).all() and (leaked.within > spared.within).all()
    clear = unknown.survival < 1  # chances estimated above 1 by sampling are cut there
    total = (leaked.survival + spared.survival)[clear]
    np.testing.assert_allclose(total, unknown.survival[clear], rtol=1e-6)
    together = (leaked.survival * leaked.within + spared.survival * spared.within)[clear]
    np.testing.assert_allclose(together, (unknown.survival * unknown.within)[clear], rtol=1e-6)
    assert clear.sum() > 40


def test_company_does_not_matter_and_unknowns_stay_alone(joints):
    whole = likelihood_over_years(joints, np.arange(60.0), 10.0, 1)
    alone = likelihood_over_years(joints.take(np.array([33])), 33.0, 10.0, 1)
    assert alone.within[0] == pytest.approx(whole.within[33], rel=1e-12)
    kept = np.array(joints.kept)
    kept[4] = np.nan
    years = np.arange(60.0)
    years[5] = -1
    spoilt = likelihood_over_years(dataclasses.replace(joints, kept=kept), years, 10.0, 1)
    assert np.flatnonzero(np.isnan(spoilt.within)).tolist() == [4, 5]
    with pytest.raises(ModelError):
        likelihood_over_years(joints, 1.0, -1.0, 1)
