"""The flat ring's arm, rotation and bore stress against axisymmetric finite elements (scikit-fem) with one-sided contact.

Ring dimensions: AWWA C207 classes B, D, E, F; ASME B16.5 class 150 lap joint; EN 1092-1 PN10 and PN16 type 02 (the tables in the
package, whose rows say what was read and what is from memory). Stated assumptions of the study, not evidence: hub thickness 1.0 to 1.25
of the DR 11 wall, hub outside diameter beyond the tables from the bolt circle, nut band 1.6 bolt diameters wide, 1/16 in chamfer at
the bore. `data/ring_fem_study.csv` is what `study()` wrote; the default run recomputes a part of it, the slow run all.
"""

from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from fem_axisymmetric import solve_elastic_ring
from screener.mechanics import ring

HERE = Path(__file__).parent
TABLES = Path(ring.__file__).parents[1] / "standards" / "data"
INCH, MM = 0.0254, 0.001
MATERIALS = [("steel", 200e9, 0.30), ("ductile iron", 169e9, 0.275), ("stainless steel", 193e9, 0.30)]
HUB_MODULI = (565e6, 207e6)  # PE4710 at 0.5 h and PE2xxx at one year, 23 C: PPI handbook, chapter 3, table B.1.1
GEOMETRY = ["contact_inner_radius", "contact_outer_radius", "bolt_circle_radius", "ring_bore_radius", "ring_outer_radius", "ring_thickness"]
KEYS = ["ring", "material", "hub_modulus"]


def one_ring(name, bore, outer, bolt_circle, thickness, bolt, hub_od, pipe_od, wall_share, material):
    """Row of the study from diameters in m."""
    kind, modulus, poisson = MATERIALS[material]
    return {
        "ring": name, "material": kind, "modulus": modulus, "poisson": poisson,
        "contact_inner_radius": bore / 2 + 0.0625 * INCH, "contact_outer_radius": hub_od / 2, "bolt_circle_radius": bolt_circle / 2,
        "ring_bore_radius": bore / 2, "ring_outer_radius": outer / 2, "ring_thickness": thickness,
        "hub_thickness": wall_share * pipe_od / 11, "load_width": 1.6 * bolt,
    }  # fmt: skip


def inch_rings():
    hub = pd.read_csv(TABLES / "pe_flange_adapter_inch.csv").set_index("nps_in")
    rows = pd.read_csv(TABLES / "awwa_c207_ring_flanges.csv")
    sizes = [4, 6, 8, 10, 12, 16, 20, 24, 30, 36, 42, 54]
    for i, x in enumerate(rows[rows.nps_in.isin(sizes)].itertuples()):
        pipe = hub.pipe_od_in.get(x.nps_in, x.nps_in)
        hub_od = hub.hub_od_in.get(x.nps_in, x.bolt_circle_in - x.hole_dia_in - 0.5)
        if hub_od > x.bolt_circle_in - x.bolt_dia_in:
            continue
        bore = x.id_in if np.isfinite(x.id_in) else pipe + 0.25
        yield one_ring(f"C207 {x.awwa_class} NPS {x.nps_in:g}", bore * INCH, x.od_in * INCH, x.bolt_circle_in * INCH, x.thickness_in * INCH, x.bolt_dia_in * INCH, hub_od * INCH, pipe * INCH, (1.0, 1.25)[i % 2], i % 3)
    lap = pd.read_csv(TABLES / "asme_b16_5_class150_lap_joint.csv")
    for i, x in enumerate(lap[lap.nps_in.isin(sizes)].itertuples()):
        yield one_ring(f"B16.5 lap NPS {x.nps_in:g}", x.lap_joint_bore_min_in * INCH, x.od_in * INCH, x.bolt_circle_in * INCH, x.lap_joint_thickness_min_in * INCH, x.bolt_dia_in * INCH, hub.hub_od_in[x.nps_in] * INCH, hub.pipe_od_in[x.nps_in] * INCH, 1.1, i % 3)


def metric_rings():
    hub = pd.read_csv(TABLES / "pe_flange_adapter_metric.csv")
    flange = pd.read_csv(TABLES / "en1092_1_pn10_pn16.csv")
    for i, h in enumerate(hub[hub.dn_od_mm.isin([110, 160, 200, 250, 315, 400, 500, 630, 710, 900, 1000, 1200])].itertuples()):
        for x in flange[flange.dn == h.flange_dn].itertuples():
            thickness = x.type02_loose_thickness_mm if np.isfinite(x.type02_loose_thickness_mm) else 0.045 * x.od_mm
            yield one_ring(f"EN 1092-1 PN{x.pn_bar} DN {x.dn}", h.backing_bore_mm * MM, x.od_mm * MM, x.bolt_circle_mm * MM, thickness * MM, x.bolt_dia_mm * MM, h.collar_od_mm * MM, h.dn_od_mm * MM, 1.0, i % 3)
    for thickness in (40, 90):  # 1600 mm (63 in): dimensions of our own, in proportion to DN 1200
        yield one_ring(f"own, 1600 mm pipe, {thickness} mm thick", 1.66, 1.92, 1.82, thickness * MM, 52 * MM, 1.75, 1.6, 1.0, 0)


def rings_for_study():
    rows = pd.DataFrame([*inch_rings(), *metric_rings()]).drop_duplicates("ring")
    return pd.concat([rows.assign(hub_modulus=m) for m in HUB_MODULI], ignore_index=True)


def compare(rows):
    """Finite elements over formula, for each row."""
    found = []
    for x in rows.itertuples():
        geometry = [getattr(x, name) for name in GEOMETRY]
        t, a, b = geometry[5], geometry[3], geometry[4]
        contact = ring.hub_contact(*geometry, x.modulus, x.hub_modulus, x.hub_thickness)
        fem = solve_elastic_ring(*geometry, x.modulus, x.poisson, x.hub_modulus, x.hub_thickness, x.load_width)
        rotation = ring.ring_rotation(1.0, contact.lever_arm, t, a, b, x.modulus)
        found.append({
            "lever_arm": contact.lever_arm, "part_contact": not contact.full_contact, "part_contact_fem": fem.lifted,
            "thickness_to_width": t / (b - a), "radius_ratio": b / a, "reasons": int(ring.ring_validity(*geometry)),
            "arm_ratio": fem.lever_arm / contact.lever_arm, "energy_rotation_ratio": fem.energy_rotation / rotation,
            "mean_slope_ratio": fem.mean_slope / rotation, "stress_ratio": fem.corner_stress / ring.loose_ring_stress(1.0, contact.lever_arm, t, a, b),
            "peak_over_corner": fem.peak_stress / fem.corner_stress,
        })  # fmt: skip
    return pd.concat([rows.reset_index(drop=True), pd.DataFrame(found)], axis=1)


def study(path):
    compare(rings_for_study()).to_csv(path, index=False, float_format="%.6g")


RATIOS = ["arm_ratio", "mean_slope_ratio", "stress_ratio"]


def assert_targets(found):
    """Median within 1 %, largest within 5 % for arm, rotation and bore-corner stress."""
    error = (found[RATIOS] - 1).abs()
    report = pd.DataFrame({"median": error.median(), "largest": error.max()})
    print(f"\n{len(found)} cases\n{report.map('{:.2%}'.format)}")
    assert (error.median() < 0.01).all(), report
    assert (error.max() < 0.05).all(), report
    # the ring's stored energy, which sets its share of the clamp's compliance, holds shear and squash as well
    energy = (found.energy_rotation_ratio - 1).abs()
    assert energy.median() < 0.02 and energy.max() < 0.06
    assert (found.peak_over_corner < 1).all()  # no point of the smooth ring is stressed above its bore corner


def test_stored_study_of_flat_rings_meets_the_targets():
    found = pd.read_csv(HERE / "data" / "ring_fem_study.csv")
    assert found.ring.nunique() >= 60
    assert (found.reasons & int(ring.BLOCKING_REASONS) == 0).all()
    assert (found.reasons != 0).mean() < 0.05  # doubted rings, though still within the targets
    assert_targets(found)


def test_study_recomputed_in_part():
    rows = rings_for_study().iloc[::9]
    found = compare(rows)
    assert_targets(found)
    stored = pd.read_csv(HERE / "data" / "ring_fem_study.csv").set_index(KEYS).loc[list(found[KEYS].itertuples(index=False, name=None)), RATIOS]
    assert found[RATIOS].to_numpy() == pytest.approx(stored.to_numpy(), rel=1e-4)


@pytest.mark.slow
def test_study_recomputed_in_full():
    assert_targets(compare(rings_for_study()))


def proportioned_ring(radius_ratio, thickness, contact_share, bolt_share, bore=0.2):
    """Finite elements over formula for a ring given by proportions; thickness, contact rim and bolt circle as shares of the radial width."""
    width = bore * (radius_ratio - 1)
    values = (bore + 0.02 * width, bore + contact_share * width, bore + bolt_share * width, bore, bore + width, thickness)
    row = dict(zip(GEOMETRY, values), modulus=200e9, poisson=0.3, hub_modulus=400e6, hub_thickness=0.3 * width, load_width=0.12 * width)
    return compare(pd.DataFrame([row])).iloc[0]


@pytest.mark.parametrize("radius_ratio", [1.1, 1.3, 1.6, 2.0])
@pytest.mark.parametrize(("contact_share", "bolt_share"), [(0.45, 0.6), (0.7, 0.85), (0.3, 0.8)])
def test_at_the_stubby_limit_the_formulas_are_still_within_seven_percent_and_twice_beyond_they_are_not(radius_ratio, contact_share, bolt_share):
    limit = ring.STUBBY_LIMIT * 0.2 * np.sqrt(radius_ratio - 1)
    at_limit = proportioned_ring(radius_ratio, 0.999 * limit, contact_share, bolt_share)
    assert at_limit.reasons == 0
    assert (at_limit[RATIOS].astype(float) - 1).abs().max() < 0.07
    beyond = proportioned_ring(radius_ratio, 2 * limit, contact_share, bolt_share)
    assert beyond.reasons == ring.RingReason.STUBBY_SECTION
    assert beyond.mean_slope_ratio > 1.07


@pytest.mark.parametrize("thickness_share", [0.02, 0.1, 0.3])
def test_a_wide_ring_is_overestimated_most_when_hub_rim_and_bolts_lie_far_out(thickness_share):
    wide = proportioned_ring(1.99, thickness_share * 0.99 * 0.2, 0.7, 0.85)
    assert 0.89 < wide.stress_ratio < 1.0
    wider = proportioned_ring(2.6, thickness_share * 1.6 * 0.2, 0.7, 0.85)
    assert wider.reasons == ring.RingReason.WIDE_SECTION
    assert wider.stress_ratio < wide.stress_ratio


def test_finite_element_mesh_is_fine_enough():
    row = rings_for_study().iloc[5]
    geometry = [row[name] for name in GEOMETRY]
    coarse, fine = (solve_elastic_ring(*geometry, row.modulus, row.poisson, row.hub_modulus, row.hub_thickness, row.load_width, n) for n in (8, 16))
    assert coarse.corner_stress == pytest.approx(fine.corner_stress, rel=1e-3)
    assert coarse.lever_arm == pytest.approx(fine.lever_arm, rel=1e-4)
    assert coarse.mean_slope == pytest.approx(fine.mean_slope, rel=1e-4)
