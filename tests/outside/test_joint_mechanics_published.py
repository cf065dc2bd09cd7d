"""Bolts, polyethylene, pipe wall and clamp against printed tables and independent solutions."""

import csv
from pathlib import Path

import numpy as np
import pytest

from screener.limits import HOUR, YEAR, modulus
from screener.mechanics import bolts, clamp, corrosion, pipe_wall, polyethylene
from screener.standards.tables import INCH, PSI, read_table

DATA = Path(__file__).parent / "data"
POUND_FORCE = PSI * INCH**2
SECONDS = {"h": HOUR, "y": YEAR}


def rows(name):
    with open(DATA / f"{name}.csv", encoding="utf-8") as stream:
        return list(csv.DictReader(stream))


# ---------------------------------------------------------------- bolts


def test_tensile_areas_of_asme_pcc_1_table_h_1():
    """ASME PCC-1 Table H-1 (read), inch and metric; printed to four figures, the table's own cross-check found 0.2 %."""
    inch = read_table("bolts_inch")
    printed = inch.number("tensile_area_pcc1_in2")
    use = np.isfinite(printed)
    made = bolts.tensile_area_inch(inch.number("bolt_dia_in") * INCH, inch.number("threads_per_in") / INCH) / INCH**2
    assert use.sum() >= 15
    assert np.allclose(made[use], printed[use], rtol=2e-3)
    metric = read_table("bolts_metric")
    printed = metric.number("tensile_area_pcc1_mm2")
    use = np.isfinite(printed)
    made = bolts.tensile_area_metric(metric.number("bolt_dia_mm") / 1000, metric.number("pitch_mm") / 1000) * 1e6
    assert np.allclose(made[use], printed[use], rtol=2e-3)


def test_torques_of_ppi_tn_38_table_3():
    """PPI TN-38 Table 3 (read): T = K F d with K = 0.16 and 1 200 to 1 800 psi on the face; printed torques are rounded, one row is a misprint."""
    table = read_table("tn38_table3_torque")
    area = np.pi / 4 * (table.number("hdpe_hub_od_in") ** 2 - table.number("steel_pipe_id_in") ** 2) * INCH**2
    size = table.number("bolt_dia_in") * INCH
    for stress, column in (("seating_stress_min_psi", "torque_min_lubed_ftlb"), ("seating_stress_max_psi", "torque_max_lubed_ftlb")):
        force = table.number(stress) * PSI * area / table.number("n_bolts")
        torque = table.number(column) * POUND_FORCE * 12 * INCH
        misfit = bolts.bolt_force_from_torque(torque, 0.16, size) / force - 1
        sound = table.text("nps_in") != "4"  # NPS 4 repeats the row above it
        assert np.abs(misfit[sound]).max() < 0.07


# ---------------------------------------------------------------- polyethylene


@pytest.mark.parametrize("family", ["PE2XXX", "PE3XXX", "PE4XXX"])
def test_apparent_modulus_of_ppi_handbook_table_b_1_1(family):
    """PPI Handbook ch. 3 Table B.1.1 (rows read or from memory as marked): the power law stays within 3.2 % of every row (PE4XXX 2 %)."""
    table = read_table("pe_apparent_modulus")
    for text, printed in zip(table.text("duration"), table.number(f"{family}_psi"), strict=True):
        value, unit = text.split()
        found = modulus(np.array([family], dtype=object), float(value) * SECONDS[unit], np.array([23.0]))[0] / PSI
        assert found == pytest.approx(printed, rel=0.032), text


def test_modulus_outside_the_tables_is_unknown():
    family = np.array(["PE4XXX"] * 3 + ["PE9XXX"], dtype=object)
    found = modulus(family, np.array([HOUR, 1000 * YEAR, HOUR, HOUR]), np.array([70.0, 23.0, np.nan, 23.0]))
    assert np.isnan(found).all()


def test_fitted_law_states_its_misfit():
    law = polyethylene.fit_modulus_law(np.array([1.0, 10.0, 100.0]), np.array([100.0, 50.0, 25.0]))
    assert law.exponent == pytest.approx(np.log10(2))
    assert law.largest_misfit == pytest.approx(0.0, abs=1e-12)


# ---------------------------------------------------------------- pipe wall


def test_surge_allowances_and_ratings_of_the_association_table():
    """PPI Handbook ch. 6 Tables 1-3A/B (from memory): PR of DR 7.3 to 32.5 for 1 000 and 800 psi; printed values are rounded."""
    for row in rows("surge_allowance_ppi"):
        stress = 1000.0 if row["material"] == "PE4710" else 800.0
        rating = pipe_wall.pressure_rating(stress * PSI, float(row["DR"]), 1.0) / PSI
        assert rating == pytest.approx(float(row["PR_or_PC_psi_tab"]), rel=0.016)
        recurring = (pipe_wall.RECURRENT_ALLOWANCE - 1) * rating
        assert recurring == pytest.approx(float(row["recurring_surge_psi_tab"]), rel=0.03)
        occasional = (pipe_wall.OCCASIONAL_ALLOWANCE - 1) * rating
        assert occasional == pytest.approx(float(row["occasional_surge_psi_tab"]), rel=0.016)


def test_iso_form_gives_pn_16_and_pn_10():
    """ISO 4427 / EN 12201: PE100 with C = 1.25 is PN 16 at SDR 11 and PN 10 at SDR 17."""
    assert pipe_wall.pressure_rating(10e6 / 1.25, np.array([11.0, 17.0]), 1.0) / 1e5 == pytest.approx([16.0, 10.0])


def test_a_cold_anchored_line_pulls_half_as_much_again_as_pressure_thrust():
    """Hand calculation from PPI Handbook ch. 6 and 8 inputs: DR 11, 200 psi, nu 0.45, 20 K below, 434 MPa, 1.44e-4/K: 1.56 times the thrust."""
    d, pressure = 0.3, 1.379e6
    bore = d * (1 - 2 / 11)
    thrust = pipe_wall.free_end_axial_force(pressure, bore)
    held = pipe_wall.restrained_axial_force(pressure, d, 11.0, 0.45, 434e6, 1.44e-4, 20.0)
    area = pipe_wall.wall_area(d, 11.0)
    assert thrust / area / 1e6 == pytest.approx(2.79, abs=0.005)
    assert held / area / 1e6 == pytest.approx(4.35, abs=0.01)
    assert held / thrust == pytest.approx(1.56, abs=0.005)


# ---------------------------------------------------------------- clamp


@pytest.mark.parametrize("elastic_share", [0.1, 0.5, 2.0, 8.0])
def test_relaxation_against_the_hereditary_integral(elastic_share):
    """Boltzmann superposition solved step by step for a spring in series with a power-law collar (independent of our closed form)."""
    exponent = 0.09  # of the PE4XXX table
    start, end = 0.5 * HOUR, 10 * YEAR
    times = np.concatenate([[0.0], np.geomspace(start, end, 700)])

    def creep(age):
        return (np.maximum(age, 1.0) / start) ** exponent

    elastic = elastic_share
    force = np.zeros(len(times))
    # Tightened at once: the collar answers with its compliance at the time scale of tightening.
    force[0] = 1.0
    stretch = elastic + 1.0
    steps = [force[0]]
    for k in range(1, len(times)):
        past = sum(step * creep(times[k] - times[j]) for j, step in enumerate(steps))
        rest = elastic * sum(steps) + past
        steps.append((stretch - rest) / (elastic + creep(times[k] - times[k - 1]) if k else 1.0))
        force[k] = sum(steps)
    closed = clamp.relaxation(elastic, 1.0, creep(times[1:]))
    assert np.abs(closed / force[1:] - 1).max() < 0.04


def test_limits_of_the_clamp():
    assert clamp.relaxation(1e9, 1.0, 3.0) == pytest.approx(1.0, abs=1e-6)  # a very springy ring keeps all
    assert clamp.relaxation(0.0, 1.0, 3.0) == pytest.approx(1 / 3)  # a stiff bolt loses as the modulus does
    assert clamp.load_factor(1e9, 1.0) == pytest.approx(0.0, abs=1e-6)
    assert clamp.load_factor(0.0, 1.0) == 1.0


def test_bolt_and_face_force_meet_where_the_face_opens():
    force, factor = 100.0, 0.3
    opening = clamp.opening_separating_load(force, factor)
    assert clamp.face_force(force, opening, factor) == pytest.approx(0.0, abs=1e-12)
    assert clamp.bolt_load(force, opening, factor) == pytest.approx(opening)
    assert clamp.bolt_load(force, 2 * opening, factor) == pytest.approx(2 * opening)
    below = 0.5 * opening
    assert clamp.bolt_load(force, below, factor) - clamp.face_force(force, below, factor) == pytest.approx(below)


@pytest.mark.parametrize(
    ("torque", "collapse", "proof", "cap"),
    [(100.0, 1e9, 1e9, clamp.Cap.TORQUE), (1e6, 1e4, 1e9, clamp.Cap.RING_COLLAPSE), (1e6, 1e9, 1e4, clamp.Cap.BOLT_PROOF)],
)
def test_what_holds_the_clamp_down(torque, collapse, proof, cap):
    found = clamp.assembly_clamp(torque, 0.16, 0.02, 8, collapse, proof)
    assert found.cap == cap
    assert found.clamp_force <= min(collapse, proof)


def test_tightening_again_at_once_changes_nothing_and_later_helps():
    kept = 0.6
    assert clamp.clamp_after_retightening(1.0, 1.0, kept, 1.0, kept) == pytest.approx(kept)
    assert clamp.clamp_after_retightening(1.0, 1.0, kept, 0.65, 0.9) > kept
    assert clamp.clamp_after_retightening(1.0, 0.5, kept, 0.65, 0.9) == pytest.approx(kept)  # a wrench does not slacken


def test_unknown_stays_unknown():
    assert np.isnan(clamp.assembly_clamp(np.nan, 0.16, 0.02, 8, 1e9, 1e9).clamp_force)
    assert clamp.assembly_clamp(np.nan, 0.16, 0.02, 8, 1e9, 1e9).cap == -1
    assert np.isnan(clamp.separating_load(1e6, 0.3, np.nan, 0.0, 0.0))
    assert np.isnan(pipe_wall.pressure_rating(np.nan, 11.0, 1.0))


def test_separating_load_of_a_free_end_is_the_pressure_on_the_whole_face():
    """Free body: P pi/4 (G^2 - D_b^2) on the face's inner part plus P pi/4 D_b^2 from the closed pipe."""
    bore, g, pressure = 0.25, 0.3, 1e6
    thrust = pipe_wall.free_end_axial_force(pressure, bore)
    assert clamp.separating_load(pressure, g, bore, thrust, 0.0) == pytest.approx(pressure * np.pi / 4 * g**2)


def test_corrosion_power_law_by_iso_9224_form():
    """ISO 9224: d = r t^b; no loss while the coating lives."""
    assert corrosion.power_law_loss(50e-6, 0.523, 20.0, 0.0) == pytest.approx(50e-6 * 20**0.523)
    assert corrosion.power_law_loss(50e-6, 0.523, 20.0, 25.0) == 0.0
