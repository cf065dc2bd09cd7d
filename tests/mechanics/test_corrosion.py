"""Loss of metal: limits, coating, the standard's tables, and impossible ages."""

import csv
from pathlib import Path

import numpy as np
import pytest

from screener.mechanics.corrosion import exposed_years, power_law_loss, tabled_loss

TABLE = Path(__file__).parents[1] / "outside" / "data" / "steel_loss_in_soil.csv"
AGES = np.array([5.0, 25.0, 50.0, 75.0, 100.0, 125.0])


def soils():
    with open(TABLE, encoding="utf-8") as stream:
        return {row["soil"]: np.array([float(row[f"loss_{age:.0f}y_mm"]) for age in AGES]) / 1000 for row in csv.DictReader(stream)}


@pytest.mark.parametrize("soil", list(soils()))
def test_every_row_of_en_1993_5_table_4_1_is_met_and_ends_unknown(soil):
    """BS EN 1993-5:2007 with its UK National Annex, Table 4.1 (read)."""
    losses = soils()[soil]
    np.testing.assert_allclose(tabled_loss(AGES, losses, AGES, 0.0), losses)
    assert tabled_loss(AGES, losses, 0.0, 0.0) == 0
    assert tabled_loss(AGES, losses, 37.5, 0.0) == pytest.approx((losses[1] + losses[2]) / 2)
    assert np.isnan(tabled_loss(AGES, losses, 126.0, 0.0))
    assert tabled_loss(AGES, losses, 126.0, 26.0) == pytest.approx(losses[4])


def test_power_law_in_its_first_twenty_years_and_on_its_tangent_after_them():
    rate, b = 50e-6, 0.523
    assert power_law_loss(rate, b, 1.0, 0.0) == pytest.approx(rate)
    assert power_law_loss(rate, b, 20.0, 0.0) == pytest.approx(rate * 20**b)
    ages = np.array([20 - 1e-3, 20.0, 20 + 1e-3])
    left, right = np.diff(power_law_loss(rate, b, ages, 0.0))
    assert left == pytest.approx(right, rel=1e-4)
    # The tangent of a law that slows down loses more than the law itself.
    assert power_law_loss(rate, b, 60.0, 0.0) > rate * 60**b
    assert power_law_loss(rate, 1.0, 60.0, 0.0) == pytest.approx(60 * rate)


def test_iso_9224_attack_after_twenty_years_in_the_worst_of_category_c3():
    """ISO 9224:2012 Table of attack by category (from memory): carbon steel, upper limit of C3, 50 um in the first year, 20 years: 240 um."""
    assert power_law_loss(50e-6, 0.523, 20.0, 0.0) == pytest.approx(240e-6, abs=0.5e-6)


def test_nothing_is_lost_while_the_coating_lives():
    for b in (0.0, 0.523, 1.0):
        assert power_law_loss(50e-6, b, 9.9, 10.0) == 0
    assert power_law_loss(50e-6, 0.523, 14.0, 10.0) == pytest.approx(power_law_loss(50e-6, 0.523, 4.0, 0.0))


def test_what_is_unknown_or_cannot_be_stays_unknown():
    good = {"first_year_rate": 50e-6, "exponent": 0.523, "age": 12.0, "coating_life": 3.0}
    assert np.isfinite(power_law_loss(**good))
    for name in good:
        assert np.isnan(power_law_loss(**{**good, name: np.nan})), name
    # Also under a coating that still lives.
    assert np.isnan(power_law_loss(np.nan, 0.523, 5.0, 10.0))
    assert np.isnan(exposed_years(-1.0, 0.0)) and np.isnan(power_law_loss(50e-6, 0.523, -1.0, 0.0))
    assert np.isnan(tabled_loss(AGES, AGES, np.nan, 0.0)) and np.isnan(tabled_loss(AGES, AGES, 4.0, np.nan))
