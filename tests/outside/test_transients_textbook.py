"""The single equations of water hammer against published tables and worked numbers; the source is beside each."""

import csv

import numpy as np
import pytest

from screener.pressure import surge, water
from screener.pressure import transient_pipe as pipe
from screener.pressure.transient_grid import make_grid
from test_transients_helpers import DATA, Reservoir, SetFlow, pipes, run


def rows(path):
    with open(path, newline="", encoding="utf-8") as stream:
        return list(csv.DictReader(line for line in stream if not line.startswith("#")))


def test_viscosity_iapws_1_0016_mpa_s_at_20_c():
    """IAPWS 2008: 1.0016 mPa s at 20 C and one atmosphere (from memory); the Vogel form used here claims 2.5 %."""
    assert float(pipe.kinematic_viscosity(20) * water.density(20)) == pytest.approx(1.0016e-3, rel=0.025)


def test_time_step_three_pipes_940_60_2000():
    """Open transient-solver documentation, choice of time step (read): pipes 940, 60, 2000 m, a 1000 m/s, two reaches in the shortest.

    Printed: dt 0.03006 s, N 31, 2, 67, changes of wave speed 0.877, -0.196, 0.693 %. The third must be negative with the sign of the
    other two (67 reaches in 2000 m leave less than one step's travel), so the printed sign is a misprint.
    """
    travel = np.array([940.0, 60.0, 2000.0]) / 1000
    reaches = np.rint(travel / (0.060 / 2)).astype(int)
    assert reaches.tolist() == [31, 2, 67]
    step, change = pipe.common_time_step(travel, reaches)
    assert step == pytest.approx(0.03006, abs=0.000005)
    assert (100 * change).round(3).tolist() == pytest.approx([0.877, -0.196, -0.693], abs=0.0015)
    grid = make_grid(pipes([940, 60, 2000], 0.3, 1000.0), 100, 0.05, 1000)
    assert grid.reaches.tolist() == [31, 2, 67] and grid.time_step == pytest.approx(0.03006, rel=0.01)  # weighted by travel time there


def test_friction_factor_poiseuille_64_over_re():
    assert pipe.friction_factor(np.array([10.0, 500.0, 1500.0]), 0.0) == pytest.approx(64 / np.array([10.0, 500.0, 1500.0]), rel=1e-3)


@pytest.mark.parametrize("reynolds", [1e4, 1e5, 1e6])
@pytest.mark.parametrize("roughness", [1e-5, 1e-4, 1e-3])
def test_friction_factor_colebrook_white(reynolds, roughness):
    """Colebrook (1939), solved by iteration. Churchill's form is known to lie within about 3 % of it."""
    f = 0.02
    for _ in range(60):
        f = (-2 * np.log10(roughness / 3.7 + 2.51 / (reynolds * np.sqrt(f)))) ** -2
    assert float(pipe.friction_factor(reynolds, roughness)) == pytest.approx(f, rel=0.03)


def test_brunone_laminar_limit_0_0345():
    """k = sqrt(0.00476)/2 = 0.0345 for laminar flow (Bergant, Simpson and Vitkovsky 2001, from memory)."""
    assert float(pipe.unsteady_friction_coefficient(1000.0)) == pytest.approx(0.0345, abs=0.00005)


SERIES = [row for row in rows(DATA / "junction_checks.csv") if row["case"].startswith(("2 pipes", "iron", "PE"))]


@pytest.mark.parametrize("row", SERIES, ids=[row["case"] for row in SERIES])
def test_junction_transmission_formula_and_run(row):
    """Answers printed with the supplementary problems to chapter 1 of "Surge Analysis and the Wave Plan Method" (read), and equal-bore PE/iron."""
    ratio = {"D2=2 D1": 2.0, "D2=0.5 D1": 0.5, "D2=5 D1": 5.0}
    bore = next((value for text, value in ratio.items() if text in row["case"]), 1.0)
    speeds = (1200.0, 400.0) if "iron a=1200 ->" in row["case"] else (400.0, 1200.0) if "PE a=400 ->" in row["case"] else (1000.0, 1000.0)
    expected, rounding = float(row["T"]), 0.5 * 10.0 ** -len(row["T"].partition(".")[2])
    assert float(surge.junction_transmission([1.0, bore**2], speeds, 0)) == pytest.approx(expected, abs=rounding)
    # the same in a run: a flow step sends a front of known height to the junction, and later its reflection arrives at the source
    first, second = 600.0, 900.0 * speeds[1] / 1000
    sections = pipes([first, second], [0.3, 0.3 * bore], list(speeds))
    impedance = speeds[0] / (water.GRAVITY * sections.area[0])
    step = SetFlow((np.array([0.0, 0.0]), np.array([0.0, 100.0 / impedance])))
    node = 60
    result = run(sections, 120, step, Reservoir(0.0), 1.6 * first / speeds[0] + 0.05, keep=(0, node))
    junction = np.searchsorted(result.grid.chainage, first - 1e-6)
    at_junction = result.maximum_head[junction]
    assert at_junction == pytest.approx(100 * expected, abs=100 * rounding + 0.1)


def test_junction_reflection_returns_to_source():
    """The reflected share T - 1 of the same published case (D2 = 2 D1: -0.6), seen at a point before the junction."""
    sections = pipes([600.0, 900.0], [0.3, 0.6], 1000.0)
    impedance = 1000.0 / (water.GRAVITY * sections.area[0])
    step = SetFlow((np.array([0.0, 0.0]), np.array([0.0, 100.0 / impedance])))
    result = run(sections, 150, step, Reservoir(0.0), 1.1, keep=(30,))
    head = result.history_head[:, 0]
    assert head[np.searchsorted(result.time, 0.6)] == pytest.approx(100.0, abs=1e-6)
    assert head[np.searchsorted(result.time, 1.0)] == pytest.approx(100.0 - 60.0, abs=1e-6)


FORMULAS = [
    (pipe.kinematic_viscosity, (15.0,)),
    (pipe.relaxed_wave_speed, (300.0, 998.0, 0.3, 0.03, 1.0, 1e-10)),
    (pipe.friction_factor, (1e5, 1e-4)),
    (pipe.unsteady_friction_coefficient, (1e5,)),
]


@pytest.mark.parametrize(("formula", "values"), FORMULAS, ids=[getattr(f, "__name__", "?") for f, _ in FORMULAS])
def test_unknown_in_unknown_out(formula, values):
    assert np.isfinite(formula(*values))
    for k in range(len(values)):
        assert np.isnan(formula(*(np.nan if i == k else v for i, v in enumerate(values)))), k


def test_relaxed_wave_speed_rescales():
    """In other units of length (x 3.28) and mass the answer rescales as its dimension says."""
    m, kg = 3.2808, 2.2046
    stress = kg / m  # Pa carries kg/(m s2)
    slow = pipe.relaxed_wave_speed(300 * m, 998 * kg / m**3, 0.3 * m, 0.03 * m, 1.1, 1e-10 / stress)
    assert slow == pytest.approx(m * pipe.relaxed_wave_speed(300, 998, 0.3, 0.03, 1.1, 1e-10))
