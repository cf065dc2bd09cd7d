"""The leak limit state and a fleet's likelihood: derivatives, limits, directions, the NaN law, and the words."""

import dataclasses
from pathlib import Path

import numpy as np
import pytest
from scipy.stats import norm, spearmanr

from screener import Settings, read_inventory, screen
from screener.likelihood import leak as leak_module
from screener.likelihood.explain import expected, explain, explain_record, odds
from screener.likelihood.form import first_order
from screener.likelihood.leak import Method, leak_likelihood
from screener.likelihood.step import assess_likelihood, joint_doubts
from screener.likelihood.tightness import DOUBT_LABELS, Doubt, HeldBy, assembly_clamps, limit_state, log_margin, margin, needed_clamp
from screener.likelihood.years import likelihood_over_years

SAMPLE = Path(__file__).resolve().parents[2] / "sample_inventory" / "inventory.xlsx"


@pytest.fixture(scope="module")
def screening():
    return screen(read_inventory(SAMPLE, Settings(assessment_date="2026-06-30")))


@pytest.fixture(scope="module")
def assessed(screening):
    return assess_likelihood(screening.fleet, screening.limits, 1, sections=screening.inventory.sections)


@pytest.fixture(scope="module")
def joints(assessed):
    return assessed.joints.take(np.arange(0, len(assessed), 7))


def test_every_doubt_has_its_words():
    assert len(DOUBT_LABELS) == len(Doubt)


@pytest.mark.parametrize("held_by", list(HeldBy))
def test_gradient_is_the_derivative(joints, held_by):
    u = np.random.default_rng(2).normal(size=(len(joints), len(Doubt)))
    function = limit_state(joints, held_by)
    rows = np.arange(len(joints))
    _, gradient = function(u, rows)
    for k in range(len(Doubt)):
        step = np.zeros(len(Doubt))
        step[k] = 1e-6
        numeric = (function(u + step, rows)[0] - function(u - step, rows)[0]) / 2e-6
        np.testing.assert_allclose(gradient[:, k], numeric, rtol=1e-4, atol=1e-7)


def test_margin_is_negative_exactly_when_a_part_is(joints):
    u = np.random.default_rng(3).normal(size=(len(joints), len(Doubt)))
    x, _ = joints.space().physical(u)
    parts = np.min([log_margin(joints, x, held_by)[0] for held_by in HeldBy], axis=0)
    np.testing.assert_array_equal(margin(joints, x) < 0, parts < 0)


def test_at_its_means_the_margin_is_the_face_utilization(screening, assessed):
    """Two routes: the deterministic limit state and this room's own parts, at the occasional surge."""
    x = expected(assessed.joints)
    ratio = needed_clamp(assessed.joints, x) / (assembly_clamps(assessed.joints, x).min(axis=1) * assessed.joints.kept)
    used = screening.limits.utilization[:, screening.limits.names.index("face_occasional")]
    np.testing.assert_allclose(ratio, used, rtol=1e-9)


def test_rank_follows_face_utilization_but_not_blindly(screening, assessed):
    used = screening.limits.utilization[:, screening.limits.names.index("face_occasional")]
    known = np.isfinite(used) & np.isfinite(assessed.likelihood)
    assert 0.85 < spearmanr(used[known], assessed.likelihood[known]).statistic < 0.999


def test_shares_sum_to_one_and_bounds_hold(assessed):
    known = assessed.leak.method == Method.FIRST_ORDER
    assert known.mean() > 0.95 and assessed.leak.converged[known].all()
    np.testing.assert_allclose(assessed.leak.alpha2[known].sum(axis=1), 1.0, atol=1e-9)
    assert (assessed.low[known] <= assessed.likelihood[known]).all() and (assessed.likelihood[known] <= assessed.high[known]).all()
    # The governing part alone can't be likelier than the whole.
    assert (norm.cdf(-assessed.beta[known]) <= assessed.high[known] * (1 + 1e-9)).all()


def test_first_order_is_near_sampling(joints):
    some = joints.take(np.arange(0, len(joints), 12))
    plane, sampled = leak_likelihood(some, 3), leak_likelihood(some, 3, samples=3000)
    assert (sampled.method == Method.SAMPLED).all()
    large = sampled.likelihood > 1e-6
    ratio = plane.likelihood[large] / sampled.likelihood[large]
    assert np.median(ratio) == pytest.approx(0.95, abs=0.12) and ratio.min() > 0.55 and ratio.max() < 1.3


def test_joint_without_design_point_is_sampled_and_not_dropped(joints, monkeypatch):
    some = joints.take(np.flatnonzero(np.abs(leak_likelihood(joints, 1).likelihood - 0.05) < 0.02)[:3])
    honest = leak_likelihood(some, 1, samples=20_000)

    def lost(*arguments):
        found = first_order(*arguments)
        return dataclasses.replace(found, converged=np.zeros_like(found.converged), point=0.3 * found.point)

    monkeypatch.setattr(leak_module, "first_order", lost)
    fallback = leak_likelihood(some, 1)
    assert (fallback.method == Method.SAMPLED).all() and not fallback.converged.any()
    np.testing.assert_allclose(fallback.likelihood, honest.likelihood, rtol=0.12)
    np.testing.assert_allclose(fallback.beta, -norm.ppf(fallback.likelihood))


@pytest.mark.parametrize(
    ("name", "factor", "safer"),
    [
        ("torque_clamp", 1.2, True),
        ("collapse_load", 1.2, True),
        ("proof_load", 1.5, True),
        ("kept", 1.1, True),
        ("load_factor", 1.1, True),
        ("surge_peak", 1.2, False),
        ("operating_pressure", 1.2, False),
        ("required_stress_factor", 1.2, False),
        ("thrust_per_pressure", 1.2, False),
    ],
)
def test_better_joints_leak_less(joints, name, factor, safer):
    before = leak_likelihood(joints, 1).high
    after = leak_likelihood(dataclasses.replace(joints, **{name: getattr(joints, name) * factor}), 1).high
    slack = 1e-6 + 1e-3 * before
    assert ((after <= before + slack) if safer else (after >= before - slack)).all()
    assert (after != before).any()


def test_units_of_force_do_not_matter(joints):
    forces = ("torque_clamp", "collapse_load", "proof_load", "thrust_per_pressure", "pull_per_cooling", "contact_area")
    larger = dataclasses.replace(joints, **{name: 1000 * getattr(joints, name) for name in forces})
    np.testing.assert_allclose(leak_likelihood(larger, 1).likelihood, leak_likelihood(joints, 1).likelihood, rtol=1e-6)


def test_order_and_company_do_not_matter(joints):
    backwards = leak_likelihood(joints.take(np.arange(len(joints))[::-1]), 1)
    np.testing.assert_array_equal(backwards.likelihood[::-1], leak_likelihood(joints, 1).likelihood)
    alone = leak_likelihood(joints.take(np.array([5])), 1, samples=500)
    np.testing.assert_allclose(alone.likelihood[0], leak_likelihood(joints, 1, samples=500).likelihood[5], rtol=1e-12)


@pytest.mark.parametrize("name", ["torque_clamp", "collapse_load", "kept", "contact_area", "operating_pressure", "surge_peak", "preload_variation"])
def test_an_unknown_makes_only_its_joint_unknown(joints, name):
    some = joints.take(np.arange(6))
    values = np.array(getattr(some, name))
    values[2] = np.nan
    found = leak_likelihood(dataclasses.replace(some, **{name: values}), 1)
    assert np.isnan(found.likelihood[2]) and found.method[2] == Method.UNKNOWN and found.held_by[2] == -1
    np.testing.assert_array_equal(np.delete(found.likelihood, 2), np.delete(leak_likelihood(some, 1).likelihood, 2))


def test_impossible_numbers_are_unknown(screening):
    fleet = screening.fleet.take(np.arange(4))
    limits = dataclasses.replace(screening.limits.take(np.arange(4)), details={})
    pressure = np.array([-1.0, 0.0, np.nan, 8e5])
    fleet = dataclasses.replace(fleet, scatter={}, loads=dataclasses.replace(fleet.loads, operating_pressure=pressure))
    doubts = joint_doubts(fleet, limits)
    found = leak_likelihood(doubts, 1)
    assert np.isnan(found.likelihood[:3]).all()


def test_empty_fleet(screening):
    none = np.array([], dtype=int)
    limits = dataclasses.replace(screening.limits.take(none), details={})
    fleet = dataclasses.replace(screening.fleet.take(none), scatter={})
    assert len(assess_likelihood(fleet, limits, 1)) == 0


def test_explanations_are_sentences_with_numbers(assessed):
    order = np.argsort(-assessed.likelihood)
    for i in order[[0, 300, 1000, 1800, 2300]]:
        said = explain(assessed, int(i))
        assert len(said) == 4 and all(s.endswith(".") and s[0].isupper() for s in said)
        assert "Most of the doubt is" in said[1] and DOUBT_LABELS[assessed.most_doubt[i]] in said[1]
        assert "bar" in said[2] and "nan" not in " ".join(said)


def test_a_record_against_the_estimates_is_told(assessed):
    worst = int(np.argmax(assessed.likelihood))
    middle = int(np.argsort(assessed.likelihood)[len(assessed) // 3])
    some = assessed.joints.take(np.array([worst, middle]))
    years = likelihood_over_years(some, 30.0, 10.0, 1)
    assert "not what its row says" in explain_record(years, 0, 30.0, 10.0)
    assert explain_record(years, 1, 30.0, 10.0).startswith("After 30 leak-free years the chance of a leak is 1 in ")


def test_the_story_happens_on_the_edge_of_leaking(assessed):
    held = assessed.leak.held_by
    x = assessed.leak.design_point
    rows = np.arange(len(assessed))
    edge = np.array([log_margin(assessed.joints, x, cap)[0] for cap in HeldBy])[held, rows]
    np.testing.assert_allclose(edge, 0.0, atol=1e-5)


@pytest.mark.parametrize(("chance", "words"), [(0.5, "50 %"), (0.999, "more than 99 %"), (1 / 234, "1 in 230"), (3.21e-5, "1 in 31 000"), (1e-12, "less than 1 in a thousand million")])
def test_odds_in_words(chance, words):
    assert odds(chance) == words
