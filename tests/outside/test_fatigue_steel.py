"""S-N curves, mean stress and damage sums against the standards' numbers and the package `fatpack`; sources beside each."""

import csv
from pathlib import Path

import numpy as np
import pytest

import screener
from screener.fatigue import damage, mean_stress, sn_curves
from screener.pressure.cycles import rainflow_cycles

DATA = Path(__file__).parent / "data"
TABLES = Path(screener.__file__).parent / "standards" / "data"
MPA = 1e6


def rows(path):
    with open(path, newline="", encoding="utf-8") as stream:
        return list(csv.DictReader(line for line in stream if not line.startswith("#")))


@pytest.mark.parametrize("row", rows(DATA / "en1993_1_9_check.csv"), ids=lambda row: row["detail_category_MPa"])
def test_en_1993_1_9_section_7_1_by_detail_category(row):
    """EN 1993-1-9:2005, 7.1 and Fig. 7.1: limits 0.737 and 0.405 of the category; lives worked out by hand from the slopes 3 and 5."""
    category = float(row["detail_category_MPa"]) * MPA
    assert float(sn_curves.en_constant_amplitude_limit(category)) / MPA == pytest.approx(float(row["CAFL_at_5e6_MPa"]), abs=6e-4)
    assert sn_curves.CUT_OFF_SHARE * category / MPA == pytest.approx(float(row["cutoff_at_1e8_MPa"]), abs=6e-4)
    for share, heading in ((1.0, "N_at_dS=cat"), (0.5, "N_at_dS=0.5cat"), (0.3, "N_at_dS=0.3cat"), (2.0, "N_at_dS=2cat")):
        assert float(sn_curves.en_life(share * category, category)) == pytest.approx(float(row[heading]), rel=2e-5)


def test_en_1993_1_9_against_fatpack():
    """Package `fatpack`, three-branch curve set to EN 1993-1-9 (2e6, 5e6, 1e8; slopes 3 and 5), on a rainflow-counted record."""
    library = pytest.importorskip("fatpack")
    curve = library.TriLinearEnduranceCurve(90.0)
    cycles = rainflow_cycles(np.random.default_rng(4).normal(scale=25, size=50_000))
    spans = cycles.range[cycles.range > 0]
    assert sn_curves.en_life(spans * MPA, 90 * MPA) == pytest.approx(curve.get_endurance(spans), rel=1e-9)
    mine = damage.miner_sum(cycles.range * MPA, cycles.count, lambda s: sn_curves.en_life(s, 90 * MPA))
    assert float(mine) == pytest.approx(curve.find_miner_sum(np.column_stack((cycles.range, cycles.count))), rel=1e-9)


def test_dnv_curves_of_2014_meet_at_their_knee():
    """DNVGL-RP-0005:2014 tables (read in an open library): D in air has its knee at 52.63 MPa and 1e7; all curves of the table meet."""
    table = [row for row in rows(TABLES / "dnv_sn_curves.csv") if row["environment"] in ("air", "seawater_CP") and float(row["m1"]) != float(row["m2"])]
    assert len(table) >= 25
    for row in table:
        steep, flat, knee = (float(row["log10_a1"]), float(row["m1"])), (float(row["log10_a2"]), float(row["m2"])), float(row["N_knee"])
        at_knee = float(row["knee_stress_range_MPa"]) * MPA
        assert float(sn_curves.two_slope_life(at_knee, *steep, *flat, knee)) == pytest.approx(knee, rel=0.012), row["curve"]
    assert float(sn_curves.two_slope_life(52.63 * MPA, 12.164, 3, 15.606, 5, 1e7)) == pytest.approx(1e7, rel=0.002)


def test_dnv_2024_copy_with_branches_that_do_not_meet_is_refused():
    """B1 as quoted in a code excerpt of the Oct 2024 edition: knees at 127 and 123 MPa (19 % apart in life)."""
    assert np.isnan(sn_curves.two_slope_life(100 * MPA, 15.117, 4, 17.146, 5, 5e6))
    assert np.isfinite(sn_curves.two_slope_life(100 * MPA, 13.64, 3.5, 16.615, 5, 5e6))  # C of the same excerpt meets


def test_free_corrosion_takes_a_third_of_the_life_in_air_dnv_c203():
    """DNV-RP-C203: factor 3.0 = 10^0.477 on life between D in air (12.164) and D in free corrosion (11.687), m = 3 part."""
    air, wet = (float(sn_curves.single_slope_life(80 * MPA, a, 3)) for a in (12.164, 11.687))
    assert air / wet == pytest.approx(3.0, abs=0.05)
    assert float(sn_curves.single_slope_life(1 * MPA, 11.687, 3)) == pytest.approx(10**11.687)


def test_mean_stress_worked_numbers():
    """s_a 50, s_m 100, s_u 400 MPa: Goodman 66.67, Gerber 53.33, Smith-Watson-Topper 86.60 (worked out after Dowling et al. 2009)."""
    assert float(mean_stress.goodman(50, 100, 400)) == pytest.approx(66.67, abs=0.005)
    assert float(mean_stress.gerber(50, 100, 400)) == pytest.approx(53.33, abs=0.005)
    assert float(mean_stress.walker(50, 100, 0.5)) == pytest.approx(86.60, abs=0.005)


def test_mean_stress_against_fatpack():
    """Package `fatpack` (which works in ranges): Goodman, Walker, Smith-Watson-Topper, reduced compression."""
    library = pytest.importorskip("fatpack")
    amplitude, mean = np.array([50.0, 20.0, 90.0]), np.array([100.0, 10.0, 30.0])
    cases = ((library.find_goodman_equivalent_stress, (400.0,), mean_stress.goodman(amplitude, mean, 400.0)),
             (library.find_walker_equivalent_stress, (0.65,), mean_stress.walker(amplitude, mean, 0.65)),
             (library.find_swt_equivalent_stress, (), mean_stress.walker(amplitude, mean, 0.5)))  # fmt: skip
    for function, more, mine in cases:
        assert mine == pytest.approx(function(2 * amplitude, mean, *more) / 2), function.__name__
    low, high = np.array([-80.0, -30.0, 10.0]), np.array([20.0, 10.0, 60.0])  # the package has no case for all compression
    reduced = library.find_reduced_compressive_stress(high - low, (high + low) / 2, 0.6)
    assert mean_stress.part_compressive_range(low, high, 0.6) == pytest.approx(reduced)


def test_bolts_of_steel_at_two_million_cycles_three_codes_agree_within_a_tenth_or_so():
    """Threaded steel at 2e6 cycles: EN category 50; AISC 360 App. 3, 3.9e8 ksi^3 and threshold 7 ksi = 48 MPa (both from memory)."""
    aisc = max((3.9e8 / 2e6) ** (1 / 3), 7.0) * 6.894757
    assert aisc == pytest.approx(48, abs=0.5)
    assert float(sn_curves.en_life(aisc * MPA, 50 * MPA)) == pytest.approx(2e6, rel=0.15)


def test_soft_joint_load_factor_of_one_bolt():
    """M24, 150 mm grip, kb = 4.8e5 N/mm against 0.7e5 N/mm of PE: C = 0.88 (derived); the steel rule kj = 3 kb gives 0.25 (read)."""
    for bolt, face, expected in ((4.8e8, 0.7e8, 0.87), (1.0, 3.0, 0.25)):
        share = bolt / (bolt + face)
        assert share == pytest.approx(expected, abs=0.006)
        rise = float(damage.bolt_load(50e3, share, 10e3) - damage.bolt_load(50e3, share, 0.0))
        assert rise == pytest.approx(share * 10e3)
