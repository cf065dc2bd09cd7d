"""The model factors of the flat ring are those of the stored finite-element studies (`ring_fem_study.csv`, `ring_fem_plastic.csv`)."""

from pathlib import Path

import pandas as pd
import pytest

from screener.mechanics import ring_model_factor as factor

DATA = Path(__file__).parent / "data"


@pytest.mark.parametrize(
    ("table", "column", "stated"),
    [
        ("ring_fem_study.csv", "stress_ratio", factor.FLAT_RING_STRESS),
        ("ring_fem_study.csv", "mean_slope_ratio", factor.FLAT_RING_ROTATION),
        ("ring_fem_plastic.csv", "couple_over_plastic", factor.PLASTIC_COUPLE),
    ],
)
def test_stated_factor_is_the_studys(table, column, stated):
    rows = pd.read_csv(DATA / table)
    ratios = rows[rows.rotation_over_first_yield == 8][column] if "rotation_over_first_yield" in rows else rows[column]
    assert stated.mean == pytest.approx(ratios.mean(), abs=0.006)
    assert stated.variation == pytest.approx(ratios.std(), abs=0.005)
