"""The single equations of water hammer against published tables and worked numbers; the source is beside each."""

import csv
import re
from pathlib import Path

import numpy as np
import pytest

import screener
from screener.pressure import transient_pipe as pipe
from screener.pressure.transient_grid import make_grid
from test_transients_helpers import DATA, Reservoir, SetFlow, pipes, run

WATER = Path(screener.__file__).parent / "standards" / "data" / "water_properties.csv"


def rows(path):
    with open(path, newline="", encoding="utf-8") as stream:
        return list(csv.DictReader(line for line in stream if not line.startswith("#")))


@pytest.mark.parametrize(("celsius", "saturation_kpa", "density", "bulk_gpa"), [
    (5, 0.8726, 999.967, 2.034),
    (20, 2.3393, 998.207, 2.179),
    (30, 4.2470, 995.649, 2.234),
    (40, 7.3849, 992.216, 2.261),
])  # fmt: skip
def test_water_iapws95_at_101_kpa(celsius, saturation_kpa, density, bulk_gpa):
    """IAPWS-95 as computed by two reference libraries (read). Density within 0.005 kg/m3 of Kell's equation's own agreement."""
    assert float(pipe.vapour_pressure(celsius)) / 1e3 == pytest.approx(saturation_kpa, abs=0.0005)
    assert float(pipe.water_density(celsius)) == pytest.approx(density, abs=0.005)
    assert float(pipe.water_bulk_modulus(celsius)) / 1e9 == pytest.approx(bulk_gpa, abs=0.001)


def test_viscosity_iapws_1_0016_mpa_s_at_20_c():
    """IAPWS 2008: 1.0016 mPa s at 20 C and one atmosphere (from memory); the Vogel form used here claims 2.5 %."""
    assert float(pipe.kinematic_viscosity(20) * pipe.water_density(20)) == pytest.approx(1.0016e-3, rel=0.025)


def test_celerity_thick_anchored_table():
    """Celerities by dimension ratio worked out independently of this code (derived), thick wall, anchored, nu 0.45, K 300 000 psi."""
    for row in rows(DATA / "celerity_variants_mps.csv"):
        ratio = float(row["DR"])
        for column, expected in row.items():
            if not (found := re.match(r"E([\d.]+)GPa_thick_anchored", column)):
                continue
            bore, wall = 1 - 2 / ratio, 1 / ratio
            factor = pipe.restraint_factor(bore, wall, 0.45, "anchored")
            speed = pipe.wave_speed(998.2, 300_000 * 6894.757, float(found[1]) * 1e9, bore, wall, factor)
            assert float(speed) == pytest.approx(float(expected), rel=0.004), (ratio, column)


def test_celerity_laboratory_hdpe_395():
    """HDPE rig in London: 50.6 mm bore, 6.25 mm wall, E0 1.43 GPa, nu 0.46; wave speed found by measurement 395 m/s (Covas et al. 2004, from memory)."""
    factor = pipe.restraint_factor(0.0506, 0.00625, 0.46, "anchored")
    assert float(pipe.wave_speed(998.2, 2.19e9, 1.43e9, 0.0506, 0.00625, factor)) == pytest.approx(395, rel=0.01)


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
    assert float(pipe.transmission(1.0, speeds[0], bore**2, speeds[1])) == pytest.approx(expected, abs=rounding)
    # the same in a run: a flow step sends a front of known height to the junction, and later its reflection arrives at the source
    first, second = 600.0, 900.0 * speeds[1] / 1000
    sections = pipes([first, second], [0.3, 0.3 * bore], list(speeds))
    impedance = speeds[0] / (pipe.GRAVITY * sections.area[0])
    step = SetFlow((np.array([0.0, 0.0]), np.array([0.0, 100.0 / impedance])))
    node = 60
    result = run(sections, 120, step, Reservoir(0.0), 1.6 * first / speeds[0] + 0.05, keep=(0, node))
    junction = np.searchsorted(result.grid.chainage, first - 1e-6)
    at_junction = result.maximum_head[junction]
    assert at_junction == pytest.approx(100 * expected, abs=100 * rounding + 0.1)


def test_junction_reflection_returns_to_source():
    """The reflected share T - 1 of the same published case (D2 = 2 D1: -0.6), seen at a point before the junction."""
    sections = pipes([600.0, 900.0], [0.3, 0.6], 1000.0)
    impedance = 1000.0 / (pipe.GRAVITY * sections.area[0])
    step = SetFlow((np.array([0.0, 0.0]), np.array([0.0, 100.0 / impedance])))
    result = run(sections, 150, step, Reservoir(0.0), 1.1, keep=(30,))
    head = result.history_head[:, 0]
    assert head[np.searchsorted(result.time, 0.6)] == pytest.approx(100.0, abs=1e-6)
    assert head[np.searchsorted(result.time, 1.0)] == pytest.approx(100.0 - 60.0, abs=1e-6)


FORMULAS = [
    (pipe.water_density, (15.0,)),
    (pipe.water_bulk_modulus, (15.0,)),
    (pipe.vapour_pressure, (15.0,)),
    (pipe.kinematic_viscosity, (15.0,)),
    (lambda d, e, nu: pipe.restraint_factor(d, e, nu, "anchored"), (0.3, 0.03, 0.45)),
    (pipe.wave_speed, (998.0, 2.2e9, 1e9, 0.3, 0.03, 1.0)),
    (pipe.relaxed_wave_speed, (300.0, 998.0, 0.3, 0.03, 1.0, 1e-10)),
    (pipe.friction_factor, (1e5, 1e-4)),
    (pipe.unsteady_friction_coefficient, (1e5,)),
    (pipe.transmission, (0.1, 400.0, 0.1, 1200.0)),
    (pipe.front_attenuation, (0.015, 1.5, 2000.0, 0.3, 300.0)),
]


@pytest.mark.parametrize(("formula", "values"), FORMULAS, ids=[getattr(f, "__name__", "?") for f, _ in FORMULAS])
def test_unknown_in_unknown_out(formula, values):
    assert np.isfinite(formula(*values))
    for k in range(len(values)):
        assert np.isnan(formula(*(np.nan if i == k else v for i, v in enumerate(values)))), k


def test_formulas_rescale():
    """In other units of length (x 3.28), time and mass the answers rescale as their dimensions say."""
    m, kg = 3.2808, 2.2046
    stress = kg / m  # Pa carries kg/(m s2)
    assert pipe.wave_speed(998 * kg / m**3, 2.2e9 * stress, 1e9 * stress, 0.3 * m, 0.03 * m, 1.1) == pytest.approx(m * pipe.wave_speed(998, 2.2e9, 1e9, 0.3, 0.03, 1.1))
    assert pipe.front_attenuation(0.015, 1.5 * m, 2000 * m, 0.3 * m, 300 * m) == pytest.approx(pipe.front_attenuation(0.015, 1.5, 2000, 0.3, 300))
    slow = pipe.relaxed_wave_speed(300 * m, 998 * kg / m**3, 0.3 * m, 0.03 * m, 1.1, 1e-10 / stress)
    assert slow == pytest.approx(m * pipe.relaxed_wave_speed(300, 998, 0.3, 0.03, 1.1, 1e-10))
