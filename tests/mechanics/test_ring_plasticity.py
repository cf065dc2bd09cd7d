"""The yielded ring: closed form against quadrature, elastic and collapse limits, NaN law."""

import numpy as np
import pytest
from scipy.integrate import dblquad

from screener.mechanics import ring
from screener.mechanics import ring_plasticity as plasticity

GEOMETRY = dict(
    contact_inner_radius=0.310, contact_outer_radius=0.3556, bolt_circle_radius=0.3747, ring_bore_radius=0.307, ring_outer_radius=0.4064,
    ring_thickness=0.03175, ring_modulus=200e9, hub_modulus=400e6, hub_thickness=0.055,
)  # fmt: skip
STRENGTH = 220e6
ELASTIC_ARM = float(ring.hub_contact(**GEOMETRY).lever_arm)
SECTION = (GEOMETRY["ring_thickness"], GEOMETRY["ring_bore_radius"], GEOMETRY["ring_outer_radius"])
PLASTIC_LOAD = ring.plastic_bolt_load(STRENGTH, ELASTIC_ARM, *SECTION, 0.0)


@pytest.mark.parametrize("rotation", [0.002, 0.022, 0.024, 0.03, 0.2])
def test_couple_is_the_section_integral_of_capped_hoop_stress(rotation):
    t, a, b = SECTION
    by_quadrature = 2 * dblquad(lambda z, r: z * min(200e9 * rotation * z / r, STRENGTH), a, b, 0, t / 2, epsrel=1e-8)[0]
    assert plasticity.elastic_plastic_couple(rotation, STRENGTH, 200e9, *SECTION) == pytest.approx(by_quadrature, rel=1e-6)


def test_couple_starts_elastic_and_ends_fully_plastic():
    couple = plasticity.elastic_plastic_couple(np.array([0.0, 1e-4, 1e3]), STRENGTH, 200e9, *SECTION)
    assert couple[0] == 0
    assert couple[1] == pytest.approx(1e-4 * ring.ring_rotational_stiffness(200e9, *SECTION), rel=1e-12)
    assert couple[2] == pytest.approx(plasticity.plastic_couple(STRENGTH, *SECTION), rel=1e-9)
    assert 2 * np.pi * couple[2] / ELASTIC_ARM == pytest.approx(PLASTIC_LOAD, rel=1e-9)


def test_below_yield_the_dish_is_elastic_and_leaves_nothing():
    dish = plasticity.dished_ring(0.3 * PLASTIC_LOAD, **GEOMETRY, yield_strength=STRENGTH)
    assert dish.lever_arm == pytest.approx(ELASTIC_ARM)
    assert dish.rotation == pytest.approx(ring.ring_rotation(0.3 * PLASTIC_LOAD, ELASTIC_ARM, *SECTION, 200e9))
    assert dish.permanent_rotation == 0


def test_beyond_yield_load_and_couple_balance_and_the_arm_shrinks():
    loads = np.linspace(0.5, 1.3, 200) * PLASTIC_LOAD
    dish = plasticity.dished_ring(loads, **GEOMETRY, yield_strength=STRENGTH)
    couple = plasticity.elastic_plastic_couple(dish.rotation, STRENGTH, 200e9, *SECTION)
    assert loads * dish.lever_arm / (2 * np.pi) == pytest.approx(couple, rel=1e-6)
    assert np.all(np.diff(dish.rotation) > 0)
    assert np.all(np.diff(dish.permanent_rotation) >= 0) and dish.permanent_rotation[-1] > 0
    assert np.all(np.diff(dish.lever_arm) <= 1e-12)


def test_collapse_onto_the_rim_has_no_finite_rotation():
    rim_arm = GEOMETRY["bolt_circle_radius"] - GEOMETRY["contact_outer_radius"]
    rim_load = PLASTIC_LOAD * ELASTIC_ARM / rim_arm
    dish = plasticity.dished_ring(rim_load * np.array([0.9, 1.001]), **GEOMETRY, yield_strength=STRENGTH)
    assert np.isfinite(dish.rotation[0]) and np.isinf(dish.rotation[1]) and np.isinf(dish.permanent_rotation[1])
    assert dish.lever_arm[1] == pytest.approx(rim_arm)


def test_holes_take_their_share_of_the_width():
    net = plasticity.net_section_yield_strength(STRENGTH, 0.3, 0.4, np.array([0.0, 0.025, 0.11]))
    assert net[:2] == pytest.approx([STRENGTH, 0.75 * STRENGTH]) and np.isnan(net[2])


@pytest.mark.parametrize("name", [*GEOMETRY, "yield_strength", "bolt_load"])
def test_an_unknown_input_stays_unknown(name):
    inputs = {**GEOMETRY, "yield_strength": STRENGTH, "bolt_load": PLASTIC_LOAD}
    inputs[name] = np.array([np.nan, inputs[name]])
    assert list(np.isnan(plasticity.permanent_rotation(**inputs))) == [True, False]
