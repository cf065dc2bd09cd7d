"""What the bolt-hole factors say of rings that cannot be or lie outside their study: rows of a messy inventory must pass through."""

import warnings

import numpy as np
import pytest

from screener.mechanics import bolt_holes as holes

NAMES = ("hole_diameter", "number_of_bolts", "bolt_circle_radius", "bore_radius", "outer_radius", "ring_thickness")
RING = dict(zip(NAMES, (0.035, 20, 0.375, 0.307, 0.406, 0.032), strict=True))
FACTORS = (holes.bore_stress_factor, holes.hole_edge_stress_factor, holes.rotation_factor)
IMPOSSIBLE = (
    {"hole_diameter": -0.01},
    {"hole_diameter": 0.2},
    {"hole_diameter": np.inf},
    {"number_of_bolts": 0},
    {"number_of_bolts": 200},
    {"bore_radius": 0.5},
    {"bore_radius": 0.406},
    {"bore_radius": -0.1},
    {"ring_thickness": 0.0},
    {"ring_thickness": -0.1},
    {"bolt_circle_radius": 0.0},
)


@pytest.mark.parametrize("wrong", IMPOSSIBLE)
@pytest.mark.parametrize("wrap", [float, lambda x: np.array([x])])
def test_a_ring_that_cannot_be_is_unknown_and_says_so_quietly(wrong, wrap):
    given = {name: wrap(value) for name, value in {**RING, **wrong}.items()}
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        for formula in FACTORS:
            assert np.isnan(formula(**given)).all()
        assert not np.any(holes.bolt_hole_validity(**given))


def test_without_a_hole_there_is_no_edge():
    assert np.isnan(holes.hole_edge_stress_factor(**{**RING, "hole_diameter": 0.0}))
    assert holes.bore_stress_factor(**{**RING, "hole_diameter": 0.0}) == 1.0


@pytest.mark.parametrize("outside", [{"number_of_bolts": 4, "hole_diameter": 0.045}, {"bolt_circle_radius": 0.395}, {"bolt_circle_radius": 0.33}])
def test_few_bolts_and_odd_bolt_circles_are_outside_the_study_but_have_a_value(outside):
    assert holes.bolt_hole_validity(**RING)
    assert not holes.bolt_hole_validity(**{**RING, **outside})
    assert all(np.isfinite(formula(**{**RING, **outside})) for formula in FACTORS)


@pytest.mark.parametrize("formula", FACTORS)
def test_one_ring_at_a_time_or_all_at_once(formula):
    sizes, counts = np.array([0.02, 0.03, np.nan]), np.array([[12], [20]])
    together = formula(**{**RING, "hole_diameter": sizes, "number_of_bolts": counts})
    assert together.shape == (2, 3)
    for i in range(2):
        for j in range(3):
            alone = formula(**{**RING, "hole_diameter": sizes[j], "number_of_bolts": counts[i, 0]})
            assert alone == pytest.approx(together[i, j], rel=1e-14, nan_ok=True)
