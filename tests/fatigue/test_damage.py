"""Limits, meeting routes, the law of the unknown and rescaling in the fatigue room."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from screener.fatigue import damage, mean_stress, pe_fatigue, sn_curves


def en(category):
    return lambda s: sn_curves.en_life(s, category)


def test_en_life_is_continuous_at_the_knee_and_ends_at_the_cut_off():
    category = 100e6
    for share, cycles in ((sn_curves.CONSTANT_AMPLITUDE_SHARE, 5e6), (sn_curves.CUT_OFF_SHARE, 1e8)):
        assert sn_curves.en_life(share * category * (1 + 1e-9), category) == pytest.approx(cycles, rel=1e-6)
    below = sn_curves.en_life(category * np.array([sn_curves.CONSTANT_AMPLITUDE_SHARE * (1 - 1e-9), 0.404, 0.0]), category)
    assert below[0] == pytest.approx(5e6, rel=1e-6) and np.isinf(below[1:]).all()


@given(st.floats(1, 500), st.floats(1.001, 3))
def test_a_larger_range_never_lives_longer(span, growth):
    for life in (en(90e6), lambda s: sn_curves.single_slope_life(s, 11.687, 3), lambda s: sn_curves.two_slope_life(s, 12.164, 3, 15.606, 5, 1e7)):
        assert life(span * growth * 1e6) <= life(span * 1e6)


def test_unknown_in_unknown_out():
    assert np.isnan(sn_curves.en_life(np.nan, 90e6)) and np.isnan(sn_curves.en_life(90e6, np.nan))
    assert np.isnan(sn_curves.en_bolt_size_factor(np.nan)) and np.isnan(sn_curves.dnv_thickness_factor(np.nan, 0.025, 0.2))
    assert np.isnan(damage.bolt_load(np.nan, 0.3, 1.0)) and np.isnan(damage.bolt_load(1.0, np.nan, 1.0)) and np.isnan(damage.bolt_load(1.0, 0.3, np.nan))
    assert np.isnan(damage.miner_sum([np.nan, 50e6], [1, 1], en(90e6)))
    assert np.isnan(damage.miner_sum([60e6, 50e6], [np.nan, 1], en(90e6)))
    assert damage.miner_sum([np.nan, 60e6], [0, 1], en(90e6)) > 0
    life = damage.remaining_life(np.array([np.nan, 0.01]), np.array([5.0, np.nan]), 10.0, 1.0)
    assert np.isnan(life.remaining_years).all() and all("unknown" in r for r in life.reason)


def test_bolt_load_is_continuous_where_the_face_opens():
    force, factor = 100e3, 0.3
    opening = force / (1 - factor)
    below, above = damage.bolt_load(force, factor, opening * (1 - 1e-9)), damage.bolt_load(force, factor, opening * (1 + 1e-9))
    assert below == pytest.approx(above) and above == pytest.approx(opening)


def test_stress_range_follows_the_load_factor_then_the_whole_load():
    held = damage.stress_range(100e3, 0.3, 10e3, 50e3, 2e3)
    opened = damage.stress_range(100e3, 0.3, 150e3, 190e3, 2e3)
    across = damage.stress_range(100e3, 0.3, 10e3, 190e3, 2e3)
    assert held == pytest.approx(0.3 * 40e3 * 2e3) and opened == pytest.approx(40e3 * 2e3)
    opening = 100e3 / 0.7
    assert across == pytest.approx((0.3 * (opening - 10e3) + 190e3 - opening) * 2e3)
    assert damage.stress_range(0.0, 0.3, 10e3, 50e3, 2e3) == pytest.approx(40e3 * 2e3)


def test_fleet_sum_meets_the_plain_sum():
    generator = np.random.default_rng(1)
    spans, counts = np.linspace(1e4, 5e5, 40), generator.integers(0, 1000, (7, 40)).astype(float)
    factor = generator.uniform(50, 300, 7)
    fleet = damage.miner_sum_of_joints(spans, counts, factor, en(90e6))
    plain = [damage.miner_sum(spans * f, c, en(90e6)) for f, c in zip(factor, counts, strict=True)]
    assert fleet == pytest.approx(plain)
    assert damage.miner_sum_of_joints(spans, counts[0], factor, en(90e6))[0] == pytest.approx(plain[0])
    each = np.linspace(50e6, 120e6, 7)
    own = damage.miner_sum_of_joints(spans, counts, factor, lambda s: sn_curves.en_life(s, each))
    assert own[3] == pytest.approx(damage.miner_sum(spans * factor[3], counts[3], en(each[3])))


def test_equivalent_range_does_the_same_damage():
    spans, counts = np.array([100e6, 150e6, 200e6]), np.array([1e5, 2e4, 3e3])
    whole = damage.miner_sum(spans, counts, en(90e6))
    one = counts.sum() / en(90e6)(damage.equivalent_range(spans, counts, 3.0))
    assert one == pytest.approx(whole)
    assert np.isnan(damage.equivalent_range(spans, np.zeros(3), 3.0))


def test_bin_range_does_the_damage_of_ranges_spread_over_the_bin():
    inside = np.linspace(20.0, 30.0, 200_001)
    assert damage.bin_ranges([20.0, 30.0], 3.0)[0] == pytest.approx(np.mean(inside**3) ** (1 / 3), rel=1e-6)
    assert 25 < damage.bin_ranges([20.0, 30.0], 5.0)[0] < 30


def test_remaining_life_and_its_reasons():
    life = damage.remaining_life(np.array([0.0, 1e-5, 0.01, 0.05]), np.array([20.0, 20, 20, 20]), 10.0, 1.0)
    assert life.to_date == pytest.approx([0, 2e-4, 0.2, 1.0]) and life.at_horizon == pytest.approx([0, 3e-4, 0.3, 1.5])
    assert life.remaining_years.tolist() == [np.inf, np.inf, pytest.approx(80.0), 0.0]
    assert "cut-off" in life.reason[0] and "endless" in life.reason[1] and life.reason[2] == "" and "used up" in life.reason[3]


def test_mean_stress_without_answer_is_unknown():
    assert np.isnan(mean_stress.goodman(50, 400, 400)) and np.isnan(mean_stress.gerber(50, -100, 400)) and np.isnan(mean_stress.walker(50, -60, 0.5))
    assert np.isnan(mean_stress.mean_with_shakedown(0, 300, 250)) and np.isnan(mean_stress.mean_with_shakedown(np.nan, 30, 250))


def test_without_mean_every_correction_leaves_the_amplitude():
    for corrected in (mean_stress.goodman(50, 0, 400), mean_stress.gerber(50, 0, 400), mean_stress.walker(50, 0, 0.6)):
        assert corrected == pytest.approx(50)


def test_compression_counts_at_its_share():
    assert mean_stress.part_compressive_range(-30.0, -10.0, 0.6) == pytest.approx(12.0)
    assert mean_stress.part_compressive_range(10.0, 30.0, 0.6) == pytest.approx(20.0)
    assert mean_stress.part_compressive_range(-10.0, 30.0, 0.6) == pytest.approx(36.0)


def test_shakedown_keeps_the_peak_at_yield():
    mean = mean_stress.mean_with_shakedown(np.array([300.0, 100.0, -400.0]), 40.0, 250.0)
    assert mean.tolist() == [210.0, 100.0, -210.0]


def test_size_factors_begin_where_they_should():
    assert sn_curves.en_bolt_size_factor(np.array([0.024, 0.030, 0.060])) == pytest.approx([1, 1, 2**-0.25])
    assert sn_curves.en_plate_size_factor(np.array([0.020, 0.050])) == pytest.approx([1, 2**-0.2])
    assert sn_curves.dnv_thickness_factor(np.array([0.020, 0.050]), 0.025, 0.2) == pytest.approx([1, 2**0.2])


def test_pe_figures_stay_with_their_generation():
    peak = np.array([8e6, 8e6, 8e6, np.nan])
    material = np.array(["PE4710", "PE3408", "unknown", "PE4710"])
    cycles = pe_fatigue.life(peak, material, pe_fatigue.HIGH_TOUGHNESS_LIFE)
    assert np.isnan(cycles).tolist() == [False, True, True, True]
    table = [36_500.0, 3e5, 1e7], [1.0, 1.0, 0.68]
    factor = pe_fatigue.rerating_factor(np.array([1e6, 1e6, 1e8, -1.0]), np.array(["PE80", "PE3408", "PE100", "PE100"]), *table)
    assert np.isnan(factor).tolist() == [False, True, True, True]
    reason = pe_fatigue.reason_without_number(material, peak)
    assert "rarely governs" in reason[0] and "no published" in reason[1] and reason[3] == "pressure range unknown"
    assert pe_fatigue.reason_without_number("PE100", 12e6).item() == ""
    assert pe_fatigue.rerating_utilization(5e5, 0.5, 1e6) == pytest.approx(1.0) and pe_fatigue.misalignment_factor(0.1, 1.0) == pytest.approx(1.3)


def test_zero_range_does_no_damage_on_any_curve():
    for life in (en(90e6), lambda s: sn_curves.single_slope_life(s, 11.687, 3), lambda s: sn_curves.two_slope_life(s, 12.164, 3, 15.606, 5, 1e7)):
        assert damage.miner_sum([0.0], [1e9], life) == 0


def test_stress_rescales():
    """Ranges and category in another unit: the sum does not change."""
    spans, counts = np.array([60e6, 90e6]), np.array([1e5, 1e4])
    assert damage.miner_sum(spans / 6894.757, counts, en(90e6 / 6894.757)) == pytest.approx(damage.miner_sum(spans, counts, en(90e6)))
