"""The loose ring's formulas: limits, two routes meeting, rescaling, exact derivatives, and what happens outside their range."""

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.optimize import brentq

from screener.mechanics import ring
from screener.mechanics.ring_sensitivity import lever_arm_sensitivity, loose_ring_stress_sensitivity

NAMES = ("contact_inner_radius", "contact_outer_radius", "bolt_circle_radius", "ring_bore_radius", "ring_outer_radius", "ring_thickness", "ring_modulus", "hub_modulus", "hub_thickness")
BASE = dict(zip(NAMES, (0.310, 0.3556, 0.3747, 0.307, 0.4064, 0.03175, 200e9, 400e6, 0.055)))


def random_joints(count, seed=7):
    """Joints from full contact (soft hub, thick ring) to a bare rim (stiff hub, thin ring)."""
    rng = np.random.default_rng(seed)
    bore = rng.uniform(0.05, 0.8, count)
    inner = bore * rng.uniform(1.0, 1.02, count)
    rim = inner * rng.uniform(1.03, 1.5, count)
    bolts = rim * rng.uniform(1.002, 1.2, count)
    outer = bolts * rng.uniform(1.02, 1.2, count)
    thickness = (outer - bore) * rng.uniform(0.03, 0.7, count)
    return dict(zip(NAMES, (inner, rim, bolts, bore, outer, thickness, rng.uniform(150e9, 210e9, count), 10 ** rng.uniform(7, 11, count), rng.uniform(0.01, 0.1, count))))


def test_neutral_radius_balances_the_couple_by_quadrature_and_bracketing():
    joints = random_joints(200)
    contact = ring.hub_contact(**joints)
    assert 40 < contact.full_contact.sum() < 160
    for i in range(200):
        r_i, r_o, r_b, a, b, t, modulus, hub_modulus, h = (joints[name][i] for name in NAMES)
        target = modulus * t**3 * np.log(b / a) / 12 * h / hub_modulus

        def couple(neutral):
            return quad(lambda r: (r - neutral) * (r_b - r) * r, max(neutral, r_i), r_o, epsabs=0, epsrel=1e-12)[0]

        low = r_o - 2 * (r_o - r_i)
        while couple(low) < target:
            low -= 2 * (r_o - low)
        neutral = brentq(lambda x: couple(x) - target, low, r_o - 1e-9 * (r_o - r_i), xtol=1e-15, rtol=1e-13)
        force = quad(lambda r: (r - neutral) * r, max(neutral, r_i), r_o, epsabs=0, epsrel=1e-12)[0]
        assert contact.neutral_radius[i] == pytest.approx(neutral, rel=1e-9)
        assert contact.lever_arm[i] == pytest.approx(couple(neutral) / force, rel=1e-7)
        assert contact.full_contact[i] == (neutral <= r_i)


def test_couple_residual_is_at_rounding():
    joints = random_joints(20_000, seed=3)
    contact = ring.hub_contact(**joints)
    sunk = joints["contact_outer_radius"] - contact.neutral_radius
    width = np.where(contact.full_contact, joints["contact_outer_radius"] - joints["contact_inner_radius"], sunk)
    _, couple, _, _ = ring._contact_integrals(sunk, width, joints["bolt_circle_radius"] - joints["contact_outer_radius"], joints["contact_outer_radius"])
    stiffness = ring.ring_rotational_stiffness(joints["ring_modulus"], joints["ring_thickness"], joints["ring_bore_radius"], joints["ring_outer_radius"])
    target = stiffness * joints["hub_thickness"] / joints["hub_modulus"]
    sunk_error = np.abs(couple / target - 1)
    assert np.median(sunk_error) < 1e-14
    assert np.quantile(sunk_error, 0.999) < 1e-9  # contact width found by subtracting two near radii


def test_rigid_hub_pushes_at_its_rim_and_rigid_ring_presses_evenly():
    stiff_hub = ring.hub_contact(**{**BASE, "hub_modulus": 1e22})
    assert stiff_hub.lever_arm == pytest.approx(BASE["bolt_circle_radius"] - BASE["contact_outer_radius"], rel=1e-4)
    assert not stiff_hub.full_contact
    rigid_ring = ring.hub_contact(**{**BASE, "ring_modulus": 1e22})
    r_i, r_o = BASE["contact_inner_radius"], BASE["contact_outer_radius"]
    even_pressure_radius = 2 / 3 * (r_o**3 - r_i**3) / (r_o**2 - r_i**2)
    assert rigid_ring.full_contact
    assert rigid_ring.lever_arm == pytest.approx(BASE["bolt_circle_radius"] - even_pressure_radius, rel=1e-6)


def test_arm_falls_as_the_hub_stiffens_and_grows_with_the_ring():
    moduli = np.geomspace(1e6, 1e13, 200)
    arms = ring.hub_contact(**{**BASE, "hub_modulus": moduli}).lever_arm
    assert np.all(np.diff(arms) < 0)
    thicknesses = np.linspace(0.005, 0.07, 100)
    assert np.all(np.diff(ring.hub_contact(**{**BASE, "ring_thickness": thicknesses}).lever_arm) > 0)


def test_the_two_contact_forms_meet_where_the_inner_edge_just_lifts():
    moduli = brentq(lambda m: ring.hub_contact(**{**BASE, "hub_modulus": m}).neutral_radius - BASE["contact_inner_radius"], 1e7, 1e11)
    near = ring.hub_contact(**{**BASE, "hub_modulus": moduli * np.array([1 - 1e-7, 1 + 1e-7])})
    assert list(near.full_contact) == [True, False]
    assert near.lever_arm[0] == pytest.approx(near.lever_arm[1], rel=1e-6)


def test_pressure_over_the_contact_balances_the_bolt_load():
    contact = ring.hub_contact(**BASE)
    load = 1e5
    rotation = ring.ring_rotation(load, contact.lever_arm, BASE["ring_thickness"], BASE["ring_bore_radius"], BASE["ring_outer_radius"], BASE["ring_modulus"])

    def push(r):
        return 2 * np.pi * r * ring.hub_contact_pressure(r, rotation, contact.neutral_radius, BASE["hub_modulus"], BASE["hub_thickness"])

    assert quad(push, BASE["contact_inner_radius"], BASE["contact_outer_radius"])[0] == pytest.approx(load, rel=1e-9)


def test_rescaling_lengths_and_moduli_rescales_the_answers():
    lengths = {name: 39.37 * BASE[name] if name not in ("ring_modulus", "hub_modulus") else BASE[name] / 6894.757 for name in NAMES}
    assert ring.hub_contact(**lengths).lever_arm == pytest.approx(39.37 * ring.hub_contact(**BASE).lever_arm, rel=1e-12)


@pytest.mark.parametrize("hub_modulus", [1e8, 4e8, 3e9, 5e10])
@pytest.mark.parametrize("name", NAMES)
def test_arm_derivatives_equal_complex_step(name, hub_modulus):
    joint = {**BASE, "hub_modulus": hub_modulus}
    step = 1e-30 * joint[name]
    by_complex_step = ring.hub_contact(**{**joint, name: joint[name] + 1j * step}).lever_arm.imag / step
    assert getattr(lever_arm_sensitivity(**joint), name) == pytest.approx(by_complex_step, rel=1e-9, abs=1e-12 * BASE["ring_thickness"] / joint[name])


@pytest.mark.parametrize("hub_modulus", [1e8, 3e9])
@pytest.mark.parametrize("name", NAMES + ("bolt_load",))
def test_stress_derivatives_equal_complex_step(name, hub_modulus):
    joint = {**BASE, "hub_modulus": hub_modulus, "bolt_load": 5e5}

    def stress(bolt_load, **geometry):
        arm = ring.hub_contact(**geometry).lever_arm
        return ring.loose_ring_stress(bolt_load, arm, geometry["ring_thickness"], geometry["ring_bore_radius"], geometry["ring_outer_radius"])

    step = 1e-30 * joint[name]
    by_complex_step = stress(**{**joint, name: joint[name] + 1j * step}).imag / step
    assert getattr(loose_ring_stress_sensitivity(**joint), name) == pytest.approx(by_complex_step, rel=1e-9, abs=1e-9 * stress(**joint) / joint[name])


def test_rating_is_the_pressure_that_uses_the_allowed_stress():
    arm, thickness, bore, outer = 0.035, 0.03, 0.3, 0.4
    rating = ring.loose_ring_rating(220e6, 2.0, 1.15, arm, thickness, bore, outer, 0.61, 0.19, 1.0)
    stress = ring.loose_ring_stress(ring.app2_bolt_load(rating, 0.61, 0.19, 1.0), arm, thickness, bore, outer)
    assert 1.15 * stress == pytest.approx(110e6)


def test_stated_rating_and_safety_factor_are_each_others_inverse():
    factor = ring.stated_rating_safety_factor(160.0, 2.0, 200.0)
    assert ring.stated_rating_pressure(160.0, 2.0, factor) == pytest.approx(200.0)
    assert np.isnan(ring.stated_rating_safety_factor(160.0, 2.0, 0.0))


def test_plastic_load_lies_above_first_yield_and_holes_reduce_it():
    first = ring.first_yield_bolt_load(220e6, 0.035, 0.03, 0.3, 0.4, 1.0)
    smooth = ring.plastic_bolt_load(220e6, 0.035, 0.03, 0.3, 0.4, 0.0)
    holed = ring.plastic_bolt_load(220e6, 0.035, 0.03, 0.3, 0.4, 0.03)
    assert 1.5 < smooth / first < 2.0
    assert holed == pytest.approx(0.7 * smooth)
    assert np.isnan(ring.plastic_bolt_load(220e6, 0.035, 0.03, 0.3, 0.4, 0.11))


def test_welded_ring_with_no_pipe_wall_is_a_loose_ring():
    loose = ring.loose_ring_stress(1e5, 0.05, 0.03, 0.3, 0.4)
    assert ring.welded_flange_comparison_stress(1e5, 0.05, 0.03, 0.3, 0.4, 200e9, 1e-7, 0.3) == pytest.approx(loose, rel=1e-6)
    walls = np.geomspace(1e-4, 0.02, 20)
    assert np.all(np.diff(ring.welded_flange_comparison_stress(1e5, 0.05, 0.03, 0.3, 0.4, 200e9, walls, 0.3)) < 0)


@pytest.mark.parametrize("name", NAMES)
def test_an_unknown_input_stays_unknown(name):
    contact = ring.hub_contact(**{**BASE, name: np.array([np.nan, BASE[name]])})
    assert list(np.isnan(contact.lever_arm)) == [True, False]
    assert list(np.isnan(contact.neutral_radius)) == [True, False]
    assert not contact.full_contact[0]
    if name in NAMES[:6]:
        geometry = [BASE[n] if n != name else np.nan for n in NAMES[:6]]
        assert ring.ring_validity(*geometry) & ring.RingReason.UNKNOWN_DIMENSION


@pytest.mark.parametrize(
    ("change", "reason"),
    [
        ({"ring_thickness": 0.0}, ring.RingReason.DIMENSION_NOT_POSITIVE),
        ({"ring_outer_radius": 0.30}, ring.RingReason.OUTER_DIAMETER_INSIDE_BORE),
        ({"contact_outer_radius": 0.3099}, ring.RingReason.HUB_DOES_NOT_REACH_RING),
        ({"contact_outer_radius": 0.3747}, ring.RingReason.HUB_BEYOND_BOLT_CIRCLE),
        ({"bolt_circle_radius": 0.41}, ring.RingReason.BOLT_CIRCLE_OFF_RING),
        ({"contact_inner_radius": 0.30}, ring.RingReason.CONTACT_OFF_RING),
        ({"ring_thickness": 0.11}, ring.RingReason.STUBBY_SECTION),
        ({"ring_outer_radius": 0.63}, ring.RingReason.WIDE_SECTION),
    ],
)
def test_outside_its_range_the_ring_says_why(change, reason):
    joint = {**BASE, **change}
    reasons = ring.ring_validity(*(joint[name] for name in NAMES[:6]))
    assert reasons & reason
    assert np.isnan(ring.hub_contact(**joint).lever_arm) == bool(reason & ring.BLOCKING_REASONS)


def test_every_reason_has_a_sentence():
    assert set(ring.RING_REASON_TEXT) == set(ring.RingReason) - {ring.RingReason.VALID}


def test_shapes_broadcast():
    contact = ring.hub_contact(**{**BASE, "hub_modulus": np.array([2e8, 5e8])[:, None], "ring_thickness": np.array([0.02, 0.03, 0.04])})
    assert contact.lever_arm.shape == contact.neutral_radius.shape == contact.full_contact.shape == (2, 3)


@pytest.mark.filterwarnings("error")
@pytest.mark.parametrize("bad", [0.0, -1.0, np.nan, np.inf])
@pytest.mark.parametrize(
    ("formula", "good"),
    [
        (ring.loose_ring_stress, (1e5, 0.03, 0.03, 0.3, 0.4)),
        (ring.ring_rotation, (1e5, 0.03, 0.03, 0.3, 0.4, 2e11)),
        (ring.ring_compliance, (0.03, 0.03, 0.3, 0.4, 2e11)),
        (ring.first_yield_bolt_load, (2e8, 0.03, 0.03, 0.3, 0.4, 1.1)),
        (ring.plastic_bolt_load, (2e8, 0.03, 0.03, 0.3, 0.4, 0.02)),
        (ring.loose_ring_rating, (2e8, 2.0, 1.1, 0.03, 0.03, 0.3, 0.4, 0.6, 0.2, 1.0)),
        (ring.stated_rating_safety_factor, (1e6, 2.0, 1e6)),
        (ring.stated_rating_pressure, (1e6, 2.0, 2.0)),
        (ring.welded_flange_comparison_stress, (1e5, 0.05, 0.03, 0.3, 0.4, 2e11, 0.01, 0.3)),
        (ring.hub_contact, tuple(BASE.values())),
    ],
)
def test_impossible_values_neither_warn_nor_harm_their_neighbours(formula, good, bad):
    expected = formula(*good)
    for i in range(len(good)):
        found = formula(*(np.array([bad, value]) if i == j else value for j, value in enumerate(good)))
        if formula is ring.hub_contact:
            assert not np.isinf(found.lever_arm[0]) and found.lever_arm[1] == pytest.approx(expected.lever_arm)
        else:
            assert found[1] == pytest.approx(expected)
            if np.isnan(bad):
                assert np.isnan(found[0])
