"""Laws that every formula of clamp, bolts, polyethylene and pipe wall must keep: unknown stays unknown, arrays and units make no difference."""

import inspect

import numpy as np
import pytest

from screener.mechanics import bolts, clamp, pipe_wall, polyethylene

# Unit of each argument as powers of (metre, newton, kelvin); everything else has none.
METRE, NEWTON, KELVIN = 0, 1, 2
UNITS = {
    "torque": (1, 1, 0), "bolt_diameter": (1, 0, 0), "ring_collapse_load": (0, 1, 0), "bolt_proof_load": (0, 1, 0), "thickness": (1, 0, 0),
    "modulus": (-2, 1, 0), "area": (2, 0, 0), "force": (0, 1, 0), "elastic_compliance": (1, -1, 0), "collar_compliance_then": (1, -1, 0),
    "collar_compliance_now": (1, -1, 0), "collar_compliance_fast": (1, -1, 0), "pressure": (-2, 1, 0), "pressure_diameter": (1, 0, 0),
    "bore_diameter": (1, 0, 0), "axial_force": (0, 1, 0), "bending_moment": (1, 1, 0), "clamp_force": (0, 1, 0), "separating": (0, 1, 0),
    "first_force": (0, 1, 0), "second_force": (0, 1, 0), "diameter": (1, 0, 0), "threads_per_metre": (-1, 0, 0), "pitch": (1, 0, 0),
    "grip_length": (1, 0, 0), "tensile_area": (2, 0, 0), "hydrostatic_design_stress": (-2, 1, 0), "outside_diameter": (1, 0, 0),
    "expansion": (0, 0, -1), "cooling": (0, 0, 1),
}  # fmt: skip
FORMULAS = {
    # formula: (unit of the result, arguments); the arguments give a result that answers to each of them
    clamp.collar_compliance: ((1, -1, 0), {"thickness": 0.05, "modulus": 4e8, "area": 0.08, "collars": 2.0}),
    clamp.gasket_compliance: ((1, -1, 0), {"thickness": 0.003, "modulus": 2e7, "area": 0.05}),
    clamp.retained_force: ((0, 1, 0), {"force": 1e6, "elastic_compliance": 1e-9, "collar_compliance_then": 1.3e-9, "collar_compliance_now": 4e-9}),
    clamp.relaxation: ((0, 0, 0), {"elastic_compliance": 1e-9, "collar_compliance_then": 1.3e-9, "collar_compliance_now": 4e-9}),
    clamp.load_factor: ((0, 0, 0), {"elastic_compliance": 1e-9, "collar_compliance_fast": 1.3e-9}),
    clamp.separating_load: (
        (0, 1, 0),
        {"pressure": 1e6, "pressure_diameter": 0.4, "bore_diameter": 0.25, "axial_force": 5e4, "bending_moment": 3e3},
    ),
    clamp.face_force: ((0, 1, 0), {"clamp_force": 1e6, "separating": 5e5, "factor": 0.3}),
    clamp.bolt_load: ((0, 1, 0), {"clamp_force": 1e6, "separating": 5e5, "factor": 0.3}),
    clamp.opening_separating_load: ((0, 1, 0), {"clamp_force": 1e6, "factor": 0.3}),
    clamp.clamp_after_retightening: (
        (0, 1, 0),
        {"first_force": 1e6, "second_force": 1.1e6, "kept_of_first_now": 0.5, "kept_of_first_then": 0.6, "kept_of_second_now": 0.8},
    ),
    bolts.tensile_area_inch: ((2, 0, 0), {"diameter": 0.0254, "threads_per_metre": 8 / 0.0254}),
    bolts.tensile_area_metric: ((2, 0, 0), {"diameter": 0.024, "pitch": 0.003}),
    bolts.bolt_force_from_torque: ((0, 1, 0), {"torque": 300.0, "nut_factor": 0.16, "diameter": 0.0254}),
    bolts.bolt_compliance: ((1, -1, 0), {"grip_length": 0.2, "number": 12.0, "modulus": 2e11, "tensile_area": 3.9e-4}),
    pipe_wall.pressure_rating: ((-2, 1, 0), {"hydrostatic_design_stress": 6.9e6, "dimension_ratio": 11.0, "temperature_factor": 0.9}),
    pipe_wall.hoop_stress: ((-2, 1, 0), {"pressure": 1e6, "dimension_ratio": 11.0}),
    pipe_wall.wall_area: ((2, 0, 0), {"outside_diameter": 0.3, "dimension_ratio": 11.0}),
    pipe_wall.free_end_axial_force: ((0, 1, 0), {"pressure": 1e6, "bore_diameter": 0.25}),
    pipe_wall.restrained_axial_force: (
        (0, 1, 0),
        {"pressure": 1e6, "outside_diameter": 0.3, "dimension_ratio": 11.0, "poisson_ratio": 0.45, "modulus": 4e8, "expansion": 1.5e-4, "cooling": 15.0},
    ),
}  # fmt: skip
CASES = list(FORMULAS.items())
NAMES = [formula.__name__ for formula, _ in CASES]
LAW = polyethylene.fit_modulus_law(np.array([1.8e3, 3.6e5, 3.2e7, 1.6e9]), np.array([565e6, 379e6, 276e6, 200e6]))
WARM = (np.array([38.0, 23.0, -29.0]), np.array([0.73, 1.0, 2.54]))


def assembly_force(**arguments):
    return clamp.assembly_clamp(**arguments).clamp_force


ASSEMBLY = {"torque": 300.0, "nut_factor": 0.16, "bolt_diameter": 0.0254, "number": 12.0, "ring_collapse_load": 1e6, "bolt_proof_load": 3e6}


def test_every_formula_is_here():
    written = [f for room in (clamp, bolts, pipe_wall) for _, f in inspect.getmembers(room, inspect.isfunction) if f.__module__ == room.__name__]
    assert {f.__name__ for f in written} - {"assembly_clamp", "clamp_after_tightenings"} == set(NAMES)


@pytest.mark.parametrize(("formula", "case"), [*CASES, (assembly_force, ((0, 1, 0), ASSEMBLY))], ids=[*NAMES, "assembly_clamp"])
def test_each_unknown_makes_the_result_unknown(formula, case):
    for name in case[1]:
        values = {other: np.array([value, value]) for other, value in case[1].items()}
        values[name] = np.array([np.nan, case[1][name]])
        found = formula(**values)
        assert np.isnan(found[0]) and np.isfinite(found[1]), name
        assert found[1] == formula(**case[1])


@pytest.mark.parametrize(("formula", "case"), [*CASES, (assembly_force, ((0, 1, 0), ASSEMBLY))], ids=[*NAMES, "assembly_clamp"])
def test_inches_pounds_and_fahrenheit_give_the_same_answer(formula, case):
    size = np.array([1 / 0.0254, 1 / 4.4482216, 1.8])

    def factor(powers):
        return float(np.prod(size ** np.array(powers)))

    unit, arguments = case
    changed = {name: value * factor(UNITS.get(name, (0, 0, 0))) for name, value in arguments.items()}
    assert formula(**changed) == pytest.approx(formula(**arguments) * factor(unit), rel=1e-12)


@pytest.mark.parametrize(("formula", "case"), CASES, ids=NAMES)
def test_each_argument_matters(formula, case):
    for name, value in case[1].items():
        assert formula(**{**case[1], name: 1.01 * value}) != formula(**case[1]), name


def test_polyethylene_unknown_and_outside_its_tables():
    one = polyethylene.apparent_modulus(3600.0, 23.0, LAW, *WARM)
    assert np.isfinite(one)
    for duration, temperature in ((np.nan, 23.0), (3600.0, np.nan), (0.5, 23.0), (3600.0, 40.0), (3600.0, -30.0), (6e9, 23.0)):
        assert np.isnan(polyethylene.apparent_modulus(duration, temperature, LAW, *WARM)), (duration, temperature)


def test_polyethylene_softens_with_time_and_warmth():
    duration, temperature = np.geomspace(1, 4e9, 30), np.linspace(-29, 38, 30)
    assert (np.diff(polyethylene.apparent_modulus(duration, 23.0, LAW, *WARM)) < 0).all()
    assert (np.diff(polyethylene.apparent_modulus(3600.0, temperature, LAW, *WARM)) < 0).all()
    assert polyethylene.apparent_modulus(3600.0, 38.0, LAW, *WARM) == pytest.approx(0.73 * polyethylene.apparent_modulus(3600.0, 23.0, LAW, *WARM))


def test_bolts_and_face_share_the_separating_load():
    """Face force is continuous, falls with the separating load, and bolts take all of it once the face is open."""
    load = np.linspace(0, 3e6, 3001)
    face, bolt = clamp.face_force(1e6, load, 0.3), clamp.bolt_load(1e6, load, 0.3)
    assert (np.diff(face) <= 0).all() and (np.diff(bolt) >= 0).all()
    np.testing.assert_allclose(bolt - face, load, atol=1e-6)
    opened = load > clamp.opening_separating_load(1e6, 0.3)
    assert (face[opened] == 0).all() and (bolt[opened] == load[opened]).all() and (face[~opened] >= 0).all()
