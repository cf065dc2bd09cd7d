"""Limits of the bolt-hole factors."""

import numpy as np
import pytest

from screener.mechanics import bolt_holes as holes

RING = dict(number_of_bolts=20, bolt_circle_radius=0.375, bore_radius=0.307, outer_radius=0.406, ring_thickness=0.032)
ALL = (holes.bore_stress_factor, holes.rotation_factor, holes.hole_edge_stress_factor)


def test_no_hole_changes_nothing():
    assert holes.bore_stress_factor(0.0, **RING) == 1.0
    assert holes.rotation_factor(0.0, **RING) == 1.0


@pytest.mark.parametrize("formula", ALL[:2])
def test_larger_and_closer_holes_weaken_more(formula):
    sizes = formula(np.array([0.02, 0.03, 0.04]), **RING)
    assert (np.diff(sizes) > 0).all()
    closer = formula(0.03, **{**RING, "number_of_bolts": np.array([12, 20, 28])})
    assert (np.diff(closer) > 0).all()


@pytest.mark.parametrize("formula", ALL)
def test_only_ratios_of_lengths_count(formula):
    inches = {key: value / 0.0254 if key != "number_of_bolts" else value for key, value in RING.items()}
    assert formula(0.035 / 0.0254, **inches) == pytest.approx(formula(0.035, **RING))


@pytest.mark.parametrize("formula", ALL)
@pytest.mark.parametrize("name", [*RING, "hole_diameter"])
def test_unknown_stays_unknown(formula, name):
    given = {**RING, "hole_diameter": 0.035}
    given[name] = np.nan
    assert np.isnan(formula(**given))
    assert not holes.bolt_hole_validity(**given)


def test_outside_the_study_is_said():
    assert holes.bolt_hole_validity(0.035, **RING)
    assert not holes.bolt_hole_validity(0.035, **{**RING, "outer_radius": 0.7})
