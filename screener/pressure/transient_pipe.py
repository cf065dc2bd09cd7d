"""Textbook equations of water hammer in one pipe: water, wave speed, friction, reflection, and the common time step.

SI throughout; arguments are floats or arrays that broadcast. NaN in, NaN out. Equations quoted from memory are marked so; the
checks beside them are in tests/outside/test_transients_textbook.py.
"""

from __future__ import annotations

import numpy as np

GRAVITY = 9.80665
"""Standard acceleration of free fall [m/s2]."""

ATMOSPHERE = 101_325.0
"""Standard atmospheric pressure [Pa]; gauge pressures here are above it."""

RESTRAINTS = ("anchored", "anchored upstream", "expansion joints")
"""How the main is held along its axis: throughout, at its upstream end only, or not at all."""


def water_density(temperature_c):
    """Density of water at atmospheric pressure [kg/m3], 0 to 100 C.

    Kell (1975), J. Chem. Eng. Data 20, 97-105 (coefficients from memory; agrees with IAPWS-95 within 0.01 kg/m3).
    """
    t = np.asarray(temperature_c, dtype=float)
    rise = 999.83952 + t * (16.945176 + t * (-7.9870401e-3 + t * (-46.170461e-6 + t * (105.56302e-9 - t * 280.54253e-12))))
    return np.where((t >= 0) & (t <= 100), rise / (1 + 16.879850e-3 * t), np.nan)


def water_bulk_modulus(temperature_c):
    """Isothermal bulk modulus of water at atmospheric pressure [Pa], 0 to 100 C; the isentropic one is 0 to 3 % higher.

    Kell (1975), J. Chem. Eng. Data 20, 97-105 (coefficients from memory).
    """
    t = np.asarray(temperature_c, dtype=float)
    rise = 50.88496 + t * (0.6163813 + t * (1.459187e-3 + t * (20.08438e-6 + t * (-58.47727e-9 + t * 410.4110e-12))))
    return np.where((t >= 0) & (t <= 100), (1 + 19.67348e-3 * t) / rise * 1e11, np.nan)


def vapour_pressure(temperature_c):
    """Saturation pressure of water [Pa absolute], 0 to 370 C. Wagner and Pruss (1993), as in IAPWS SR1-86 (from memory)."""
    t = np.asarray(temperature_c, dtype=float)
    kelvin = np.where((t >= 0) & (t <= 370), t + 273.15, np.nan)
    x = 1 - kelvin / 647.096
    terms = -7.85951783 * x + 1.84408259 * x**1.5 - 11.7866497 * x**3 + 22.6807411 * x**3.5 - 15.9618719 * x**4 + 1.80122502 * x**7.5
    return 22.064e6 * np.exp(647.096 / kelvin * terms)


def restraint_factor(inside_diameter, wall, poisson, restraint: str):
    """Factor c of the wave speed and of the hoop strain [-], thick wall.

    c = (2 e/D)(1 + nu) + D/(D + e) k, with k = 1 - nu^2 anchored throughout, 1 - nu/2 anchored upstream, 1 with expansion joints.
    inside_diameter D, wall e [m], poisson nu [-]. Wylie and Streeter (from memory). Some texts print 5/4 - nu for the second case.
    """
    d, e, nu = (np.asarray(x, dtype=float) for x in (inside_diameter, wall, poisson))
    k = {"anchored": 1 - nu**2, "anchored upstream": 1 - nu / 2, "expansion joints": np.ones_like(nu)}[restraint]
    return 2 * e / d * (1 + nu) + d / (d + e) * k


def wave_speed(density, bulk_modulus, modulus, inside_diameter, wall, factor):
    """Speed of a pressure wave [m/s]: a = sqrt(K/rho) / sqrt(1 + c (K/E)(D/e)).

    density rho [kg/m3], bulk_modulus K and modulus E of the wall for fast loading [Pa], inside_diameter D and wall e [m],
    factor c from `restraint_factor`. Wylie and Streeter (1993), as quoted by Ghidaoui et al. (2005).
    """
    return np.sqrt(bulk_modulus / density) / np.sqrt(1 + factor * (bulk_modulus / modulus) * (inside_diameter / wall))


def relaxed_wave_speed(quick_wave_speed, density, inside_diameter, wall, factor, compliance):
    """Wave speed after the wall has crept by `compliance` [1/Pa] more [m/s]: 1/a'^2 = 1/a^2 + rho c (D/e) J (derived)."""
    return (quick_wave_speed**-2 + density * factor * inside_diameter / wall * compliance) ** -0.5


def friction_factor(reynolds, relative_roughness):
    """Darcy friction factor [-] in all regimes; reynolds > 0, relative_roughness = roughness / inside diameter.

    Churchill (1977), Chem. Eng. 84(24), 91-92 (from memory). NaN at rest, where no factor is defined.
    """
    re = np.where(np.asarray(reynolds, dtype=float) > 0, reynolds, np.nan)
    a = (-2.457 * np.log((7 / re) ** 0.9 + 0.27 * np.asarray(relative_roughness, dtype=float))) ** 16
    return 8 * ((8 / re) ** 12 + (a + (37530 / re) ** 16) ** -1.5) ** (1 / 12)


def shear_decay_coefficient(reynolds):
    """Vardy and Brown's C* [-]: 0.00476 laminar (Re up to 2000), 7.41 / Re^log10(14.3/Re^0.05) turbulent."""
    re = np.maximum(np.asarray(reynolds, dtype=float), 1.0)
    return np.where(re <= 2000, 0.00476, 7.41 / re ** np.log10(14.3 / re**0.05))


def unsteady_friction_coefficient(reynolds):
    """Brunone's k [-] = sqrt(C*)/2, for the loss k/(2g) (dV/dt + a sign(V) |dV/dx|) per metre.

    Bergant, Simpson and Vitkovsky (2001) (from memory). One open documentation prints k = C*/2, which lacks the root.
    """
    return np.sqrt(shear_decay_coefficient(reynolds)) / 2


def transmission(area_in, wave_speed_in, area_out, wave_speed_out):
    """Share of a head wave that passes from one pipe into the next [-]: T = 2 (A1/a1) / (A1/a1 + A2/a2); reflected T - 1."""
    admittance_in, admittance_out = area_in / wave_speed_in, area_out / wave_speed_out
    return 2 * admittance_in / (admittance_in + admittance_out)


def front_attenuation(friction, velocity, distance, diameter, speed):
    """What steady friction leaves of a full-stop front after a distance [-]: 1 - tanh(f V x / (4 D a)) (derived; Leslie and Tijsseling 2000, from memory)."""
    return 1 - np.tanh(friction * velocity * distance / (4 * diameter * speed))


def common_time_step(travel_time, reaches, weight=1.0):
    """Time step for pipes in series, and the change of wave speed that each then needs.

    travel_time: L/a per pipe [s]; reaches: whole number of reaches per pipe. With a' = a (1 + phi) = L/(N dt), the step that makes
    sum(w phi^2) least is dt = sum(w c^2)/sum(w c), c = travel_time/reaches; phi = c/dt - 1. Wave-speed adjustment of Wylie and
    Streeter, where the weights w are one.
    """
    c = np.asarray(travel_time, dtype=float) / np.asarray(reaches)
    step = np.sum(weight * c**2) / np.sum(weight * c)
    return float(step), c / step - 1


def kinematic_viscosity(temperature_c):
    """Kinematic viscosity of water [m2/s], 0 to 100 C: 2.414e-5 10^(247.8/(T - 140)) Pa s over the density (Vogel form, from memory; within 2.5 %)."""
    kelvin = np.asarray(temperature_c, dtype=float) + 273.15
    return 2.414e-5 * 10 ** (247.8 / (kelvin - 140)) / water_density(temperature_c)
