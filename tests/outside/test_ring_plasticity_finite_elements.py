"""Plastic limit, load against rotation and permanent dish of loose rings against elastic-plastic finite elements (scikit-fem; von Mises,
perfectly plastic, one-sided hub). `data/ring_fem_plastic.csv` is what `study()` wrote; two rings are recomputed by default, six when slow."""

from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from fem_plastic_ring import load_rotation_curve
from screener.mechanics import ring
from screener.mechanics import ring_plasticity as plasticity
from test_ring_finite_elements import GEOMETRY, rings_for_study

STORED = Path(__file__).parent / "data" / "ring_fem_plastic.csv"
STRENGTH = 220e6  # 32 ksi, the minimum yield of AWWA C207-01 as read in a secondary summary
RINGS = ["C207 D NPS 24", "C207 E NPS 12", "C207 B NPS 12", "C207 D NPS 4", "EN 1092-1 PN16 DN 300", "own, 1600 mm pipe, 40 mm thick"]
PATH = np.array([0.9, 1.3, 1.6, 2.0, 3.0, 4.0, 6.0, 8.0])  # shares of the first-yield rotation
HELD_AT = 2.0


def one_ring(name):
    """Load curve over formula, and permanent rotation after unbolting from twice the first-yield rotation."""
    rows = rings_for_study()
    x = rows[(rows.ring == name) & (rows.hub_modulus == 565e6)].iloc[0]
    geometry = [x[n] for n in GEOMETRY]
    a, b, t = geometry[3:]
    hub = (x.hub_modulus, x.hub_thickness)
    arm = ring.hub_contact(*geometry, x.modulus, *hub).lever_arm
    first = ring.first_yield_bolt_load(STRENGTH, arm, t, a, b, 1.0)
    plastic = ring.plastic_bolt_load(STRENGTH, arm, t, a, b, 0.0)
    yield_rotation = ring.ring_rotation(first, arm, t, a, b, x.modulus)

    def run(shares):
        return load_rotation_curve(*geometry, x.modulus, x.poisson, STRENGTH, *hub, x.load_width, np.array(shares) * yield_rotation)

    load, fem_arm = run(PATH)
    dish = plasticity.dished_ring(load, *geometry, x.modulus, *hub, STRENGTH)
    springback = plasticity.elastic_plastic_couple(HELD_AT * yield_rotation, STRENGTH, x.modulus, t, a, b) / ring.ring_rotational_stiffness(x.modulus, t, a, b) / yield_rotation
    down = HELD_AT - springback * np.array([0.6, 0.8])
    held, held_arm = run([1.0, 1.5, HELD_AT, *down])
    couple = (held * held_arm)[-2:]
    curve = pd.DataFrame({
        "ring": name, "rotation_over_first_yield": PATH, "load_over_plastic": load / plastic, "couple_over_plastic": load * fem_arm / (plastic * arm),
        "couple_over_formula": load * fem_arm / (2 * np.pi) / plasticity.elastic_plastic_couple(PATH * yield_rotation, STRENGTH, x.modulus, t, a, b),
        "rotation_formula_over_fem": dish.rotation / (PATH * yield_rotation), "arm_formula_over_fem": dish.lever_arm / fem_arm,
        "plastic_over_first_yield": plastic / first, "first_yield_rotation": yield_rotation,
    })  # fmt: skip
    curve["permanent_fem"] = down[0] - couple[0] * (down[1] - down[0]) / (couple[1] - couple[0])
    curve["permanent_from_rotation"] = HELD_AT - springback
    curve["permanent_from_load"] = plasticity.permanent_rotation(held[2], *geometry, x.modulus, *hub, STRENGTH) / yield_rotation
    return curve


def study(path):
    pd.concat([one_ring(name) for name in RINGS]).to_csv(path, index=False, float_format="%.5g")


def check(curve):
    last = curve.iloc[-1]
    assert last.couple_over_plastic == pytest.approx(1, abs=0.05)  # plastic limit within 5 %
    assert curve.couple_over_formula.to_numpy() == pytest.approx(1, abs=0.05)  # couple at a rotation: within 5 % all the way
    assert curve.arm_formula_over_fem.to_numpy() == pytest.approx(1, abs=0.015)
    # rotation at a load is ill-conditioned near the flat top of the curve; up to twice first yield it holds within 5 %
    modest = curve[curve.rotation_over_first_yield <= 2]
    assert modest.rotation_formula_over_fem.to_numpy() == pytest.approx(1, abs=0.05)
    assert last.permanent_from_rotation == pytest.approx(last.permanent_fem, abs=0.03)  # in first-yield rotations
    assert last.permanent_from_load == pytest.approx(last.permanent_fem, abs=0.08)
    # the hub's reaction moves to its rim, so the load climbs past the plastic load at the elastic arm
    assert last.load_over_plastic > 0.98


def test_stored_study_of_six_rings_meets_the_targets():
    stored = pd.read_csv(STORED)
    assert stored.ring.nunique() == 6
    for _, curve in stored.groupby("ring"):
        check(curve)
    assert stored.plastic_over_first_yield.between(1.6, 2.35).all()


@pytest.mark.parametrize("name", [name if i < 1 else pytest.param(name, marks=pytest.mark.slow) for i, name in enumerate(RINGS)])
def test_ring_recomputed(name):
    curve = one_ring(name)
    check(curve)
    stored = pd.read_csv(STORED).set_index("ring").loc[name]
    assert curve.couple_over_plastic.to_numpy() == pytest.approx(stored.couple_over_plastic.to_numpy(), rel=1e-3)
