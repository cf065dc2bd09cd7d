"""Textbook equations that following a wave along a main needs beside those in `surge` and `water`: friction, creep, the common time step.

SI throughout; arguments are floats or arrays that broadcast. NaN in, NaN out. Equations quoted from memory are marked so; the
checks beside them are in tests/outside/test_transients_textbook.py.
"""

from __future__ import annotations

import numpy as np

from screener.pressure import water


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
    """Kinematic viscosity of water [m2/s], 0 to 60 C: 2.414e-5 10^(247.8/(T - 140)) Pa s over the density (Vogel form, from memory; within 2.5 %)."""
    kelvin = np.asarray(temperature_c, dtype=float) + 273.15
    return 2.414e-5 * 10 ** (247.8 / (kelvin - 140)) / water.density(temperature_c)
