"""Ring, collar and face under pipe pull: pieces against quadrature, balance of the whole, trends and NaN law."""

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.optimize import brentq

from screener.mechanics import ring
from screener.mechanics import ring_on_stub_end as stub

NAMES = ("contact_inner_radius", "contact_outer_radius", "bolt_circle_radius", "ring_bore_radius", "ring_outer_radius", "ring_thickness", "ring_modulus", "hub_modulus", "hub_thickness", "pipe_bore_radius", "pipe_outer_radius", "face_inner_radius", "pipe_pull_share", "hub_poisson_ratio")
BASE = dict(zip(NAMES, (0.310, 0.3556, 0.3747, 0.307, 0.4064, 0.03175, 200e9, 565e6, 0.055, 0.249, 0.3048, 0.249, 0.3, 0.45)))


@pytest.mark.parametrize("rotation", [-0.1, -0.01, -0.001, 0.0, 0.001, 0.01, 0.1])
def test_reaction_radius_by_quadrature_and_bracketing(rotation):
    inner, outer, bed, load = 0.3, 0.36, 2e10, 2e5

    def moment(depth, power):
        lift = float(np.clip(0.33 - depth / rotation, inner, outer)) if rotation else inner
        low, high = (lift, outer) if rotation >= 0 and lift > inner else (inner, lift) if rotation < 0 and lift < outer else (inner, outer)
        return quad(lambda r: bed * (depth + rotation * (r - 0.33)) * r**power, low, high, epsabs=0, epsrel=1e-9)[0]

    depth = brentq(lambda x: moment(x, 1) - load, -0.03 * abs(rotation) + 1e-12, 0.1, xtol=1e-17, rtol=1e-13)
    assert stub.reaction_radius(rotation, bed, load, inner, outer) == pytest.approx(moment(depth, 2) / load, rel=1e-8)


@pytest.mark.parametrize("share", [0.0, 0.3, 0.8])
def test_collar_and_ring_balance(share):
    found = stub.stub_end_contact(**{**BASE, "pipe_pull_share": share})
    reaction = BASE["bolt_circle_radius"] - found.lever_arm
    held = ring.ring_rotational_stiffness(565e6, 0.055, 0.249, 0.3556) + stub.pipe_end_stiffness(565e6, 0.45, 0.249, 0.3048)
    couple = reaction - share * (0.249 + 0.3048) / 2 - (1 - share) * found.face_resultant_radius
    assert couple / (2 * np.pi) == pytest.approx(held * found.collar_rotation_per_load, rel=1e-7)
    ring_rotation = ring.ring_rotation(1.0, found.lever_arm, 0.03175, 0.307, 0.4064, 200e9)
    relative = ring_rotation - found.collar_rotation_per_load
    assert stub.reaction_radius(relative, 565e6 / (stub.RING_SIDE_SQUASH_SHARE * 0.055), 1 / (2 * np.pi), 0.310, 0.3556) == pytest.approx(reaction, rel=1e-9)


def test_pull_moves_the_support_in_and_opens_the_face_from_the_bore():
    found = stub.stub_end_contact(**{**BASE, "pipe_pull_share": np.linspace(0, 0.95, 40)})
    assert np.all(np.diff(found.lever_arm) > 0)
    assert np.all(np.diff(found.face_resultant_radius) > 0)
    assert np.all(np.diff(found.face_open_width) >= 0)
    assert found.lever_arm[-1] < BASE["bolt_circle_radius"] - BASE["contact_inner_radius"]


def test_bolt_up_arm_is_near_the_bed_arm():
    bed = ring.hub_contact(*(BASE[n] for n in NAMES[:9])).lever_arm
    assert stub.stub_end_contact(**{**BASE, "pipe_pull_share": 0.0}).lever_arm == pytest.approx(bed, rel=0.12)


def test_a_ring_far_stiffer_than_the_collar_turns_little_and_the_reverse_bears_on_the_rim():
    rigid = stub.stub_end_contact(**{**BASE, "ring_modulus": 1e16, "pipe_pull_share": 0.0})
    assert ring.ring_rotation(1.0, rigid.lever_arm, 0.03175, 0.307, 0.4064, 1e16) < 0.01 * abs(rigid.collar_rotation_per_load)
    limp = stub.stub_end_contact(**{**BASE, "ring_modulus": 1e5, "pipe_pull_share": 0.0})
    assert limp.lever_arm == pytest.approx(0.3747 - 0.3556, rel=0.01)


def test_rescaling_lengths_and_moduli_rescales_the_answers():
    pure = ("pipe_pull_share", "hub_poisson_ratio")
    scaled = {n: BASE[n] if n in pure else BASE[n] / 6894.757 if "modulus" in n else BASE[n] * 39.37 for n in NAMES}
    assert stub.stub_end_contact(**scaled).lever_arm == pytest.approx(39.37 * stub.stub_end_contact(**BASE).lever_arm, rel=1e-8)


@pytest.mark.parametrize("name", NAMES)
def test_an_unknown_input_stays_unknown(name):
    found = stub.stub_end_contact(**{**BASE, name: np.array([np.nan, BASE[name]])})
    for value in vars(found).values():
        assert list(np.isnan(value)) == [True, False]


@pytest.mark.parametrize(("name", "value"), [("pipe_pull_share", 1.0), ("pipe_pull_share", -0.1), ("pipe_bore_radius", 0.31), ("face_inner_radius", 0.36), ("hub_poisson_ratio", 0.5), ("hub_modulus", 0.0), ("contact_outer_radius", 0.38)])
def test_impossible_values_give_nan(name, value):
    assert np.isnan(stub.stub_end_contact(**{**BASE, name: value}).lever_arm)
