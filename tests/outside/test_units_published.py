"""Conversion factors against NIST SP 811 (2008), Appendix B.8, and against scipy.constants (CODATA).

SP 811 was read in a copy of its table kept in the comments of an open-source unit library, not in the original.
The copy leaves moment of force out; torque is checked from the printed force and length, and by scipy.
"""

import math

import numpy as np
import pytest
import scipy.constants as reference

from screener.units import from_unit, read_quantity, to_unit

# (unit, dimension, factor as printed in SP 811 B.8: digits, power of ten)
PRINTED = [
    ("in", "length", "2.54", -2),
    ("ft", "length", "3.048", -1),
    ("yd", "length", "9.144", -1),
    ("mi", "length", "1.609344", 3),
    ("mil", "length", "2.54", -5),
    ("um", "length", "1.0", -6),
    ("psi", "pressure", "6.894757", 3),
    ("bar", "pressure", "1.0", 5),
    ("atm", "pressure", "1.01325", 5),
    ("kgf/cm2", "pressure", "9.80665", 4),  # atmosphere, technical
    ("m head", "pressure", "9.80665", 3),  # millimetre of water, conventional: 9.806 65 Pa
    ("ft head", "pressure", "2.989067", 3),  # foot of water, conventional
    ("lbf", "force", "4.448222", 0),
    ("kip", "force", "4.448222", 3),
]
EXACT = {"in", "ft", "yd", "mi", "mil", "um", "bar", "atm", "kgf/cm2", "m head"}


@pytest.mark.parametrize(("unit", "dimension", "digits", "power"), PRINTED, ids=[p[0] for p in PRINTED])
def test_nist_sp811_appendix_b8(unit, dimension, digits, power):
    decimals = len(digits.split(".")[1])
    factor = float(from_unit(1.0, unit, dimension)) / 10.0**power
    tolerance = 1e-12 if unit in EXACT else 0.5 * 10.0**-decimals
    assert abs(factor - float(digits)) <= tolerance


def test_nist_sp811_torque_from_printed_force_and_length():
    """lbf is printed as 4.448 222 N: half a unit of its last digit is carried to the product."""
    assert float(from_unit(1, "ft lb", "torque")) == pytest.approx(4.448222 * 0.3048, abs=0.5e-6 * 0.3048 + 1e-12)
    assert float(from_unit(1, "in lb", "torque")) == pytest.approx(4.448222 * 0.0254, abs=0.5e-6 * 0.0254 + 1e-12)
    assert float(from_unit(1, "kgf m", "torque")) == pytest.approx(9.80665, abs=1e-12)


@pytest.mark.parametrize(
    ("unit", "dimension", "value"),
    [
        ("in", "length", reference.inch),
        ("ft", "length", reference.foot),
        ("yd", "length", reference.yard),
        ("mi", "length", reference.mile),
        ("mil", "length", reference.mil),
        ("psi", "pressure", reference.psi),
        ("ksi", "stress", 1e3 * reference.psi),
        ("bar", "pressure", reference.bar),
        ("atm", "pressure", reference.atm),
        ("kgf/cm2", "pressure", reference.kgf * 1e4),
        ("m head", "pressure", 1e3 * reference.g),
        ("ft head", "pressure", 1e3 * reference.g * reference.foot),
        ("ft lb", "torque", reference.lbf * reference.foot),
        ("in lb", "torque", reference.lbf * reference.inch),
        ("kgf m", "torque", reference.kgf),
        ("lbf", "force", reference.lbf),
        ("deg", "angle", reference.degree),
        ("F difference", "temperature_difference", reference.degree_Fahrenheit),
    ],
)
def test_scipy_constants(unit, dimension, value):
    assert float(from_unit(1.0, unit, dimension)) == pytest.approx(value, rel=1e-14)


@pytest.mark.parametrize(("unit", "name"), [("C", "Celsius"), ("F", "Fahrenheit"), ("K", "Kelvin")])
def test_scipy_temperatures(unit, name):
    written = np.array([-40.0, 0.0, 32.0, 59.0, 100.0])
    expected = reference.convert_temperature(written, name, "Celsius")
    np.testing.assert_allclose(from_unit(written, unit, "temperature"), expected, rtol=0, atol=1e-12)
    np.testing.assert_allclose(to_unit(expected, unit, "temperature"), written, rtol=0, atol=1e-12)


def test_nist_sp811_fahrenheit_formula():
    """SP 811 B.8: t/C = (t/F - 32)/1.8."""
    assert float(from_unit(64.0, "F", "temperature")) == pytest.approx((64.0 - 32.0) / 1.8, abs=1e-13)


def test_pressure_of_a_water_column_by_hand():
    """231 ft of conventional water: 231 x 12 x 0.0254 m x 9806.65 Pa/m, close to the trade's 2.31 ft a psi."""
    read = read_quantity("231 ft head", "pressure")
    pascals = float(from_unit(read.number, read.unit, "pressure"))
    assert pascals == pytest.approx(231 * 0.3048 * 9806.65, rel=1e-12)
    assert math.isclose(pascals / reference.psi, 100.0, rel_tol=2e-3)
