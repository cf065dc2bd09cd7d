"""Sections that are not flat: polygon checks, section integrals by other routes, and the finite-element solution's own limits."""

import numpy as np
import pytest
from scipy.integrate import dblquad

from screener.mechanics import ring, section
from screener.mechanics.section_mesh import SectionError, checked_polygon, inside, mesh_section

FLAT = [(0.30, 0.0), (0.40, 0.0), (0.40, 0.03), (0.30, 0.03)]
TAPERED = [(0.30, 0.0), (0.40, 0.0), (0.40, 0.02), (0.36, 0.02), (0.34, 0.045), (0.30, 0.045)]
JOINT = dict(contact_inner_radius=0.302, contact_outer_radius=0.35, bolt_circle_radius=0.375, load_width=0.03, ring_modulus=200e9, poisson_ratio=0.3, hub_modulus=565e6, hub_thickness=0.055)


def test_flat_plate_integrals_are_the_printed_ones():
    found = section.section_integrals(FLAT)
    assert found.area == pytest.approx(0.1 * 0.03, rel=1e-12)
    assert found.neutral_height == pytest.approx(0.015, rel=1e-12)
    assert found.twist_integral == pytest.approx(0.03**3 * np.log(4 / 3) / 12, rel=1e-12)
    assert section.equivalent_flat_thickness(found.twist_integral, 0.3, 0.4) == pytest.approx(0.03, rel=1e-12)
    by_formula = 3 * 1e5 * 0.04 / (np.pi * 0.03**2 * 0.3 * np.log(4 / 3))
    assert section.section_stress(1e5, 0.04, FLAT) == pytest.approx(by_formula, rel=1e-12)


def test_triangle_integrals_by_area_quadrature():
    corners = np.array([(0.2, 0.01), (0.3, 0.0), (0.25, 0.06)])

    def over(weight):
        def inner(s, t):
            r, z = corners[0] + s * (corners[1] - corners[0]) + t * (corners[2] - corners[0])
            return weight(r, z) * 0.0055

        return dblquad(lambda s, t: inner(s, t), 0, 1, 0, lambda t: 1 - t, epsabs=0, epsrel=1e-11)[0]

    zeroth, first = over(lambda r, z: 1 / r), over(lambda r, z: z / r)
    found = section.section_integrals(corners)
    assert found.area == pytest.approx(over(lambda r, z: 1.0), rel=1e-9)
    assert found.neutral_height == pytest.approx(first / zeroth, rel=1e-8)
    assert found.twist_integral == pytest.approx(over(lambda r, z: (z - first / zeroth) ** 2 / r), rel=1e-8)


def test_integrals_do_not_care_for_height_direction_start_or_closing():
    base = section.section_integrals(TAPERED).twist_integral
    shifted = [(r, z + 7.0) for r, z in TAPERED]
    assert section.section_integrals(shifted).twist_integral == pytest.approx(base, rel=1e-9)
    assert section.section_integrals(TAPERED[::-1]).twist_integral == pytest.approx(base, rel=1e-12)
    assert section.section_integrals(TAPERED[2:] + TAPERED[:2]).twist_integral == pytest.approx(base, rel=1e-12)
    assert section.section_integrals([*TAPERED, TAPERED[0]]).twist_integral == pytest.approx(base, rel=1e-12)


def test_rescaling_the_section_rescales_its_answers():
    size = 39.37
    grown = section.section_integrals([(size * r, size * z) for r, z in TAPERED])
    assert grown.twist_integral == pytest.approx(size**3 * section.section_integrals(TAPERED).twist_integral, rel=1e-12)
    here = section.solve_section(TAPERED, **JOINT)
    lengths = {k: v * size for k, v in JOINT.items() if k not in ("ring_modulus", "poisson_ratio", "hub_modulus")}
    there = section.solve_section([(size * r, size * z) for r, z in TAPERED], **{**JOINT, **lengths})
    assert there.lever_arm == pytest.approx(size * here.lever_arm, rel=1e-3)
    assert there.peak_stress_per_load == pytest.approx(here.peak_stress_per_load / size**2, rel=5e-3)


def test_a_flat_section_agrees_with_the_flat_ring_formulas():
    found = section.solve_section(FLAT, **JOINT)
    contact = ring.hub_contact(0.302, 0.35, 0.375, 0.30, 0.40, 0.03, 200e9, 565e6, 0.055)
    assert found.lever_arm == pytest.approx(contact.lever_arm, rel=0.01)
    assert found.rotation_per_load == pytest.approx(ring.ring_rotation(1.0, contact.lever_arm, 0.03, 0.30, 0.40, 200e9), rel=0.02)
    assert found.rotational_stiffness == pytest.approx(ring.ring_rotational_stiffness(200e9, 0.03, 0.30, 0.40), rel=0.02)
    assert found.peak_stress_per_load == pytest.approx(ring.loose_ring_stress(1.0, contact.lever_arm, 0.03, 0.30, 0.40), rel=0.02)
    assert (found.peak_radius, found.peak_height) == pytest.approx((0.30, 0.03))
    assert not found.reentrant_corner


def test_rigid_hub_pushes_at_the_rim_and_a_soft_one_everywhere():
    stiff = section.solve_section(FLAT, **{**JOINT, "hub_modulus": 1e13})
    assert not stiff.full_contact
    assert 0.025 < stiff.lever_arm < 0.028
    soft = section.solve_section(FLAT, **{**JOINT, "hub_modulus": 1e6})
    assert soft.full_contact
    even = 2 / 3 * (0.35**3 - 0.302**3) / (0.35**2 - 0.302**2)
    assert soft.lever_arm == pytest.approx(0.375 - even, rel=0.01)


def test_a_finer_mesh_changes_little(monkeypatch):
    coarse = section.solve_section(TAPERED, **JOINT)
    section._factored.cache_clear()
    monkeypatch.setattr("screener.mechanics.section_mesh.ELEMENTS_THROUGH_MEAN_THICKNESS", 10)
    fine = section.solve_section(TAPERED, **JOINT)
    section._factored.cache_clear()
    assert coarse.lever_arm == pytest.approx(fine.lever_arm, rel=1e-3)
    assert coarse.rotation_per_load == pytest.approx(fine.rotation_per_load, rel=0.01)
    assert coarse.peak_stress_per_load == pytest.approx(fine.peak_stress_per_load, rel=0.02)
    assert fine.reentrant_corner


@pytest.mark.parametrize("seed", range(6))
def test_mesh_fills_random_star_shaped_outlines(seed):
    rng = np.random.default_rng(seed)
    angle = np.sort(rng.uniform(0, 2 * np.pi, 14))
    angle = angle[np.diff(angle, append=angle[0] + 2 * np.pi) > 0.12]
    reach = rng.uniform(0.02, 0.05, len(angle))
    corners = checked_polygon(np.column_stack([0.3 + reach * np.cos(angle), reach * np.sin(angle)]))
    mesh = mesh_section(corners)
    p = mesh.points[mesh.triangles[:, :3]]
    doubled = (p[:, 1, 0] - p[:, 0, 0]) * (p[:, 2, 1] - p[:, 0, 1]) - (p[:, 1, 1] - p[:, 0, 1]) * (p[:, 2, 0] - p[:, 0, 0])
    assert (doubled > 0).all()
    assert doubled.sum() / 2 == pytest.approx(section.section_integrals(corners).area, rel=1e-9)
    assert inside(corners, p.mean(axis=1)).all()


@pytest.mark.parametrize(
    ("polygon", "complaint"),
    [
        ([(0.3, 0), (0.4, 0)], "3 to"),
        ([(0.3, 0), (0.4, 0.03), (0.4, 0), (0.3, 0.03)], "crosses"),
        ([(0.3, 0), (0.4, 0), (0.35, 0)], "doubles back"),
        ([(0.3, 0), (0.4, 0), (0.4, np.nan), (0.3, 0.03)], "unknown"),
        ([(-0.1, 0), (0.4, 0), (0.4, 0.03)], "axis"),
        ([(0.3, 0), (0.3, 0), (0.4, 0), (0.4, 0.03)], "same place"),
        ([(0.3, 0), (0.4, 0), (0.4, 0.03), (0.35, 0.03), (0.35, 0.0), (0.3, 0.03)], "touches"),
        ([1, 2, 3], "list of"),
        ([(0.3, 0), (0.4, 0), (0.4, 1e-6), (0.3, 1e-6)], "too thin"),
        ([(0.3, 0), (0.4, 0), (0.4, 0.02), (0.3, 0.03)], "nut side"),
        ([(0.3, 0), (0.4, 0.01), (0.4, 0.03), (0.3, 0.03)], "hub side"),
    ],
)
def test_impossible_sections_are_refused_in_words(polygon, complaint):
    with pytest.raises(SectionError, match=complaint):
        section.solve_section(polygon, **JOINT)


@pytest.mark.parametrize("name", JOINT)
def test_an_unknown_joint_value_is_refused(name):
    with pytest.raises(SectionError, match="unknown"):
        section.solve_section(FLAT, **{**JOINT, name: np.nan})


@pytest.mark.parametrize(("name", "value"), [("hub_modulus", 0.0), ("poisson_ratio", 0.5), ("load_width", -1.0), ("contact_outer_radius", 0.38)])
def test_an_impossible_joint_value_is_refused(name, value):
    with pytest.raises(SectionError):
        section.solve_section(FLAT, **{**JOINT, name: value})
