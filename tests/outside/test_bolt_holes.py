"""Bolt-hole factors against three-dimensional finite elements.

The stored table is our own study (bolt_hole_study.py); its solver is scikit-fem.
Here the formulas are held to the whole table, part of the table is solved
again, and the solver is held to closed forms of plate and ring theory.
"""

import csv
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

import bolt_hole_model as model
import bolt_hole_study as study
from screener.mechanics import bolt_holes

with open(Path(__file__).parent / "data" / "bolt_hole_study.csv", encoding="utf-8") as stream:
    ROWS = list(csv.DictReader(stream))


def column(name):
    return np.array([float(row[name]) for row in ROWS])


GEOMETRY = tuple(column(name) for name in ("hole_diameter_m", "bolts", "bolt_circle_radius_m", "bore_radius_m", "outer_radius_m", "thickness_m"))


def case_of(row):
    number = {key: float(row[key]) for key in study.FIELDS[2:11]}
    return model.DrilledRing(
        number["bore_radius_m"], number["outer_radius_m"], number["thickness_m"], number["bolt_circle_radius_m"], number["hole_diameter_m"],
        number["bolt_diameter_m"], int(number["bolts"]), number["contact_outer_m"], number["bed_stiffness_pa_per_m"],
    )


@pytest.mark.parametrize(
    ("formula", "stored", "median", "largest"),
    [
        (bolt_holes.bore_stress_factor, "bore_factor", 0.012, 0.085),
        (bolt_holes.hole_edge_stress_factor, "edge_factor", 0.022, 0.16),
        (bolt_holes.rotation_factor, "rotation_factor", 0.009, 0.03),
    ],
)
def test_formulas_against_the_whole_study(formula, stored, median, largest):
    misfit = np.abs(formula(*GEOMETRY) / column(stored) - 1)
    assert len(misfit) >= 60
    assert np.median(misfit) < median
    assert misfit.max() < largest


def test_bore_factor_with_eight_bolts_or_more():
    many = column("bolts") >= 8
    misfit = np.abs(bolt_holes.bore_stress_factor(*GEOMETRY) / column("bore_factor") - 1)
    assert misfit[many].max() < 0.06


def test_stated_scatter_is_that_of_the_study():
    for formula, stored, variation in (
        (bolt_holes.bore_stress_factor, "bore_factor", bolt_holes.BORE_FACTOR_VARIATION),
        (bolt_holes.hole_edge_stress_factor, "edge_factor", bolt_holes.EDGE_FACTOR_VARIATION),
        (bolt_holes.rotation_factor, "rotation_factor", bolt_holes.ROTATION_FACTOR_VARIATION),
    ):
        assert np.std(column(stored) / formula(*GEOMETRY)) == pytest.approx(variation, rel=0.35)


def test_the_study_lies_inside_the_validity_it_declares():
    assert bolt_holes.bolt_hole_validity(*GEOMETRY).all()


def test_leave_one_out():
    """The exponents refitted without each ring in turn change the bore factor by less than the stated scatter."""
    eta, share, stubby = bolt_holes._shares(*GEOMETRY)
    target = np.log(column("bore_factor") - 1)
    design = np.column_stack([np.ones(len(target)), np.log(eta), np.log(share), np.log(stubby)])
    worst = 0.0
    for i in range(len(target)):
        keep = np.arange(len(target)) != i
        fitted = np.linalg.lstsq(design[keep], target[keep], rcond=None)[0]
        worst = max(worst, abs((1 + np.exp(design[i] @ fitted)) / column("bore_factor")[i] - 1))
    assert worst < 0.12


def test_concentration_at_the_hole_lies_between_thin_and_thick_plates():
    """Hole in a bent plate: (5 + 3 nu)/(3 + nu) = 1.79 for a thin plate (Goodier 1936), 3 for a very thick one (Peterson; from memory)."""
    nu = model.POISSON
    thin = (5 + 3 * nu) / (3 + nu)
    concentration = column("edge_factor") / (column("bore_factor") * column("bore_radius_m") / column("bolt_circle_radius_m"))
    assert concentration.min() > 0.92 * thin
    assert concentration.max() < 3.0


@pytest.mark.parametrize("name", ["AWWA C207 D NPS 12", "AWWA C207 D NPS 24"])
def test_solver_without_a_hole_is_the_smooth_ring(name):
    """scikit-fem in three dimensions against the smooth ring's formulas (ASME VIII-1 App. 2 form, own arm)."""
    row = next(r for r in ROWS if r["name"] == name and r["hub"] == "0.5 h")
    case = replace(case_of(row), hole_diameter=0.0)
    bore, _edge, rotation, arm = study.factors(case)
    assert bore == pytest.approx(1.0, abs=0.02)
    assert rotation == pytest.approx(1.0, abs=0.03)
    assert arm == pytest.approx(1.0, abs=0.02)


@pytest.mark.parametrize("name", ["AWWA C207 D NPS 24", "EN 1092-1 PN10 DN 150"])
def test_part_of_the_study_solved_again_on_a_coarser_mesh(name):
    row = next(r for r in ROWS if r["name"] == name and r["hub"] == "0.5 h")
    case = case_of(row)
    mesh = model.sector_mesh(case, n_outer=4, n_side=6, n_inner=4, n_ray=5, n_thick=2)
    bore, edge, rotation, _arm = study.factors(case, mesh)
    assert bore == pytest.approx(float(row["bore_factor"]), rel=0.02)
    assert edge == pytest.approx(float(row["edge_factor"]), rel=0.05)
    assert rotation == pytest.approx(float(row["rotation_factor"]), rel=0.01)


@pytest.mark.slow
@pytest.mark.parametrize("k", range(0, len(ROWS), 6))
def test_the_study_on_a_finer_mesh(k):
    case = case_of(ROWS[k])
    mesh = model.sector_mesh(case, n_outer=8, n_side=12, n_inner=8, n_ray=8, n_thick=4)
    bore, edge, rotation, _arm = study.factors(case, mesh)
    assert bore == pytest.approx(float(ROWS[k]["bore_factor"]), rel=0.015)
    assert edge == pytest.approx(float(ROWS[k]["edge_factor"]), rel=0.03)
    assert rotation == pytest.approx(float(ROWS[k]["rotation_factor"]), rel=0.01)
