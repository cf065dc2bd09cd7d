"""Published tables against each other and against the values printed for them."""

import numpy as np
import pytest

from screener.standards import materials, pipes
from screener.standards.rings import CLASSES_OF, ring_rows, ring_table
from screener.standards.tables import INCH, KSI, PSI, read_table

TABLE = ring_table()


def rows(standard, ring_class):
    return np.flatnonzero((TABLE.standard == standard) & (TABLE.ring_class == ring_class))


def test_awwa_c207_class_pressures_read_in_two_secondary_summaries():
    """AWWA C207-01: class B 86, D 175 (small) / 150 (large), E 275, F 300 psi."""
    for ring_class, allowed in (("B", {86}), ("D", {175, 150}), ("E", {275}), ("F", {300})):
        found = {round(v) for v in TABLE.stated_rating[rows("AWWA C207", ring_class)] / PSI}
        assert found == allowed
    d = rows("AWWA C207", "D")
    small = TABLE.flange_size[d] < 12 * INCH - 1e-6
    large = TABLE.flange_size[d] > 12 * INCH + 1e-6
    assert np.allclose(TABLE.stated_rating[d][small] / PSI, 175)
    assert np.allclose(TABLE.stated_rating[d][large] / PSI, 150)


def test_awwa_c207_01_steel_and_design_stress():
    """AWWA C207-01 sections 1.3 and 4.1: 32 ksi yield, 16 ksi design stress, so a factor of 2."""
    basis = read_table("awwa_c207_design_basis")
    value = dict(zip(basis.text("edition") + ": " + basis.text("item"), basis.text("value"), strict=True))
    assert value["C207-01: minimum yield, plate or bar"] == "32000"
    assert value["C207-01: design stress at working pressure"] == "16000"
    strength, _modulus = materials.ring_strength(np.array(["carbon steel"], dtype=object), np.array([0.03]))
    assert strength[0] == pytest.approx(32 * KSI, abs=0.5e6)  # table prints 221 MPa
    assert strength[0] / 2 == pytest.approx(16 * KSI, abs=0.3e6)


@pytest.mark.parametrize(("standard", "ring_class"), [("ASME B16.5", "150"), ("ASME B16.47 A", "150"), ("ASME B16.1", "125")])
def test_awwa_c207_class_d_shares_the_drilling_of_the_asme_flanges(standard, ring_class):
    """C207 D, B16.5 and B16.47 A class 150 and B16.1 class 125 mate: outside, circle, bolts are equal at common sizes."""
    other = rows(standard, ring_class)
    d = ring_rows(np.full(len(other), "AWWA C207", dtype=object), np.full(len(other), "D", dtype=object), TABLE.flange_size[other])
    common = d >= 0
    assert common.sum() >= 10
    for field in ("outside_diameter", "bolt_circle_diameter", "bolt_count", "bolt_diameter"):
        a, b = getattr(TABLE, field)[other][common], getattr(TABLE, field)[d[common]]
        assert np.allclose(a, b, atol=1e-6), field


def test_ring_look_up_finds_every_row_of_its_own_table():
    found = ring_rows(TABLE.standard, TABLE.ring_class, TABLE.flange_size)
    assert np.array_equal(found, np.arange(len(TABLE)))
    nothing = ring_rows(np.array(["AWWA C207", "AWWA C207", None], dtype=object), np.array(["150", "D", "D"], dtype=object), np.array([0.3048, np.nan, 0.3048]))
    assert (nothing == -1).all()


def test_every_ring_is_a_ring():
    assert (TABLE.bolt_circle_diameter + TABLE.hole_diameter < TABLE.outside_diameter).all()
    assert (TABLE.hole_diameter > TABLE.bolt_diameter).all()
    known = np.isfinite(TABLE.bore)
    assert (TABLE.bore[known] < TABLE.bolt_circle_diameter[known] - TABLE.hole_diameter[known]).all()
    for standard, classes in CLASSES_OF.items():
        for ring_class in classes:
            thickness = TABLE.thickness[rows(standard, ring_class)]
            assert len(thickness) and (np.diff(thickness[np.isfinite(thickness)]) > -0.005).all(), (standard, ring_class)


def test_thread_areas_of_asme_pcc_1_table_h_1():
    """ASME PCC-1 Table H-1 prints four significant figures; 0.2 % as the table's cross-check found."""
    table = read_table("bolts_inch")
    printed = table.number("tensile_area_pcc1_in2") * INCH**2
    size = table.number("bolt_dia_in") * INCH
    use = np.isfinite(printed)
    area, _pitch = materials.thread_areas(size[use])
    assert np.allclose(area, printed[use], rtol=2e-3)


def test_outside_diameters():
    """IPS 12 in is 12.75 in (ASTM F714); DIPS 12 in is 13.20 in (AWWA C151); ISO 315 is 315 mm."""
    system = np.array(["IPS", "DIPS", "ISO", "IPS"], dtype=object)
    found = pipes.outside_diameter(system, np.array([12 * INCH, 12 * INCH, 0.315, 13 * INCH]))
    assert np.allclose(found[:3], [12.75 * INCH, 13.2 * INCH, 0.315])
    assert np.isnan(found[3])


def test_pressure_class_by_designation_codes():
    """PC = 2 HDS/(DR - 1): PE4710 DR 11 is PC 200, DR 17 PC 125; PE3408 DR 11 PC 160 (AWWA C906 / PPI, read); PE100 SDR 11 PN 16."""
    material = np.array(["PE4710", "PE4710", "PE3408", "PE100"], dtype=object)
    ratio = np.array([11.0, 17.0, 11.0, 11.0])
    rating = 2 * pipes.design_stress(material) / (ratio - 1)
    assert np.allclose(rating[:3] / PSI, [200, 125, 160])
    assert rating[3] == pytest.approx(16e5)


def test_temperature_factor_of_the_handbook_table():
    """PPI Handbook ch. 3 Table A.2 (from memory): 90 F 0.86, 100 F 0.78; not above 1; beyond 100 F none."""
    found = pipes.temperature_factor(np.array([5.0, 22.8, 32.2, 37.8, 45.0]))
    assert np.allclose(found[:4], [1.0, 1.0, 0.86, 0.78], atol=0.005)
    assert np.isnan(found[4])


def test_bolt_strengths_read_in_grade_tables():
    """ASTM A193 B7 105 ksi to 2.5 in; SAE J429 grade 5 proof 85 ksi to 1 in, 74 above; ISO 898-1 8.8 by diameter."""
    grade = np.array(["ASTM A193 B7", "SAE J429 grade 5", "SAE J429 grade 5", "ISO 898-1 8.8", "ISO 898-1 8.8", "no such"], dtype=object)
    size = np.array([1.25 * INCH, 1.0 * INCH, 1.25 * INCH, 0.016, 0.020, 0.02])
    strength, proof = materials.bolt_strength(grade, size)
    assert strength[0] / KSI == pytest.approx(105)
    assert proof[1] / KSI == pytest.approx(85)
    assert proof[2] / KSI == pytest.approx(74)
    assert strength[3] / 1e6 == pytest.approx(640, rel=1e-3)
    assert strength[4] / 1e6 == pytest.approx(660, rel=1e-3)
    assert np.isnan(strength[5])
