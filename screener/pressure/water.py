"""Water at atmospheric pressure, 0 to 60 C: density, bulk moduli, speed of sound, vapour pressure.

Functions of the temperature in deg C, SI out. Outside 0 to 60 C the answer is NaN: the correlations are not vouched for there.
Coefficients are from memory; the agreement stated beside each is measured in tests/outside/test_water.py against IAPWS-95.
"""

import numpy as np

GRAVITY = 9.80665
"""Standard acceleration of free fall [m/s2]."""

ATMOSPHERIC_PRESSURE = 101_325.0
"""Standard atmosphere [Pa]; gauge pressures are counted from it."""

COLDEST, WARMEST = 0.0, 60.0
"""Range of validity [deg C]."""

DENSITY_RISE = (999.83952, 16.945176, -7.9870401e-3, -46.170461e-6, 105.56302e-9, -280.54253e-12)
DENSITY_FALL = 16.879850e-3
COMPRESSIBILITY_RISE = (50.88496, 0.6163813, 1.459187e-3, 20.08438e-6, -58.47727e-9, 410.4110e-12)
COMPRESSIBILITY_FALL = 19.67348e-3
SOUND = (1402.385, 5.038813, -5.799136e-2, 3.287156e-4, -1.398845e-6, 2.787860e-9)
SATURATION = ((-7.85951783, 1.0), (1.84408259, 1.5), (-11.7866497, 3.0), (22.6807411, 3.5), (-15.9618719, 4.0), (1.80122502, 7.5))


def _valid(temperature):
    t = np.asarray(temperature, dtype=float)
    return np.where((t >= COLDEST) & (t <= WARMEST), t, np.nan)


def _polynomial(coefficients, t):
    total = np.zeros_like(t)
    for coefficient in reversed(coefficients):
        total = total * t + coefficient
    return total


def density(temperature):
    """Density rho [kg/m3] at temperature t [deg C], 0 to 60 C, 101.325 kPa.

    Kell (1975), J. Chem. Eng. Data 20, 97-105: a fifth-order polynomial over (1 + b t). Within 0.005 kg/m3 of IAPWS-95.
    """
    t = _valid(temperature)
    return _polynomial(DENSITY_RISE, t) / (1 + DENSITY_FALL * t)


def isothermal_bulk_modulus(temperature):
    """Bulk modulus at constant temperature K_T [Pa] at t [deg C], 0 to 60 C, 101.325 kPa.

    Kell (1975), same place: the reciprocal of the compressibility (polynomial over (1 + b t), printed in 1e-6 per bar).
    Within 0.05 % of IAPWS-95. Slow packing of a line; a wave is faster than heat, see `isentropic_bulk_modulus`.
    """
    t = _valid(temperature)
    return (1 + COMPRESSIBILITY_FALL * t) / _polynomial(COMPRESSIBILITY_RISE, t) * 1e11


def speed_of_sound(temperature):
    """Speed of sound in unbounded water w [m/s] at t [deg C], 0 to 60 C, 101.325 kPa.

    Marczak (1997), J. Acoust. Soc. Am. 102, 2776-2779, fifth-order polynomial. Within 0.1 m/s of IAPWS-95.
    """
    return _polynomial(SOUND, _valid(temperature))


def isentropic_bulk_modulus(temperature):
    """Bulk modulus of a pressure wave K_S = rho w^2 [Pa] at t [deg C], 0 to 60 C, 101.325 kPa.

    Newton-Laplace equation. 0 to 5 % above the isothermal one; the modulus meant in the wave speed of a pipe.
    """
    return density(temperature) * speed_of_sound(temperature) ** 2


def vapour_pressure(temperature):
    """Saturation pressure p_v [Pa absolute] at t [deg C], 0 to 60 C.

    Wagner and Pruss (1993), J. Phys. Chem. Ref. Data 22, 783-787 (IAPWS SR1-86). Within 0.02 % of IAPWS-95.
    """
    kelvin = _valid(temperature) + 273.15
    x = 1 - kelvin / 647.096
    return 22.064e6 * np.exp(647.096 / kelvin * sum(a * x**power for a, power in SATURATION))
