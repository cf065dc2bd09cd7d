"""The whole chain, from a class and a size to a rating, against facts of the trade (common practice, no source) and AWWA C207's own numbers."""

import numpy as np
import pytest

from screener import Settings
from screener.limits import modulus
from screener.mechanics import ring
from screener.outputs.capacity_plot import class_ratings
from screener.standards.tables import INCH, PSI

CURVES = class_ratings(Settings(safety_factor=2.0, assessment_date="2026-01-01"))


def class_d():
    some = CURVES[(CURVES["standard"] == "AWWA C207") & (CURVES["ring_class"] == "D")].sort_values("flange_size")
    return (some["flange_size"] / INCH).to_numpy(), (some["loose_ring_rating"] / PSI).to_numpy(), (some["stated_rating"] / PSI).to_numpy()


def test_most_class_d_sizes_fall_below_their_stated_rating_and_a_small_one_stays_above():
    """common practice, no source: AWWA C207 D is stated at 175/150 psi; loose, most sizes carry less, some small ones more."""
    size, loose, stated = class_d()
    assert (loose < stated).mean() > 0.8
    assert loose[np.argmin(size)] > stated[np.argmin(size)]
    assert (loose[size >= 8] < stated[size >= 8]).all()


def test_24_inch_class_d_at_200_psi():
    """common practice, no source: finite elements show about 35 700 psi von Mises at the bore of a 24 in Class D ring used loose on
    HDPE at 200 psi, against 16 000 psi allowed; the smooth ring (no bolt holes) must come within 25 %."""
    a, b, t, rb, hub = (v * INCH for v in (24.19 / 2, 16.0, 1.25, 29.5 / 2, 28.0 / 2))
    wall = 24.0 * INCH / 11
    hub_modulus = float(modulus(np.array(["PE4XXX"], dtype=object), 1800.0, np.array([23.0]))[0])
    arm = ring.hub_contact(a, hub, rb, a, b, t, 200.0e9, hub_modulus, 1.25 * wall).lever_arm
    bore = 24.0 * INCH - 2 * wall
    area = np.pi / 4 * ((2 * hub) ** 2 - bore**2)
    load = ring.app2_bolt_load(200 * PSI, 0.5 * (2 * hub + bore), area, 1.0)
    stress = float(ring.loose_ring_stress(load, arm, t, a, b)) / PSI
    assert stress == pytest.approx(35_700, rel=0.25)
    assert stress > 2 * 16_000


def test_a_ring_rated_160_psi_at_a_factor_of_2_has_1_6_at_200_psi():
    """common practice, no source: N = P_r N_r / P."""
    assert ring.stated_rating_safety_factor(160.0, 2.0, 200.0) == pytest.approx(1.6)


def test_published_classes_rank_as_their_thickness():
    """AWWA C207: at one size the classes' loose ratings rise from B over D to E, as their thickness does (tables read)."""
    table = CURVES[CURVES["standard"] == "AWWA C207"].pivot_table(index="flange_size", columns="ring_class", values="loose_ring_rating")
    assert (table["B"] <= table["D"] * 1.0001).all()
    assert (table["D"] < table["E"]).all()
