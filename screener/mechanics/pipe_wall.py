"""The PE pipe wall: its pressure rating and the axial force it brings to a joint. SI; arrays broadcast; NaN in, NaN out."""

import numpy as np

RECURRENT_ALLOWANCE = 1.5
"""Operating pressure plus recurrent surge over the rating, at most. AWWA M55 (read)."""
OCCASIONAL_ALLOWANCE = 2.0
"""Operating pressure plus occasional surge over the rating, at most. AWWA M55 (read)."""


def pressure_rating(hydrostatic_design_stress, dimension_ratio, temperature_factor):
    """Pressure rating of PE pipe, PR = 2 HDS F_T / (DR - 1) [Pa].

    hydrostatic_design_stress HDS at 73 F [Pa]; dimension ratio DR [-]; temperature factor F_T [-].
    Source: PPI Handbook of PE Pipe, AWWA M55. The ISO form PN = 20 MRS / (C (SDR - 1)) in bar is the same with HDS = MRS / C.
    """
    return 2 * hydrostatic_design_stress * temperature_factor / (dimension_ratio - 1)


def hoop_stress(pressure, dimension_ratio):
    """Mean hoop stress, P (DR - 1) / 2 [Pa]. Source: ISO equation, as in `pressure_rating`."""
    return pressure * (dimension_ratio - 1) / 2


def wall_area(outside_diameter, dimension_ratio):
    """Section of the pipe wall, pi D^2 (1/DR - 1/DR^2) [m2]. D [m]."""
    return np.pi * outside_diameter**2 * (1 / dimension_ratio - 1 / dimension_ratio**2)


def free_end_axial_force(pressure, bore_diameter):
    """Axial pull of a pipe whose far end is closed and free, P pi/4 D_b^2 [N]."""
    return pressure * np.pi / 4 * bore_diameter**2


def restrained_axial_force(pressure, outside_diameter, dimension_ratio, poisson_ratio, modulus, expansion, cooling):
    """Axial pull of a pipe that can't move, (nu P (DR - 1)/2 + E alpha dT) A_p [N].

    pressure [Pa]; D [m]; nu [-]; modulus E for the duration of the cooling [Pa]; expansion alpha [1/K]; cooling dT below the installation temperature [K].
    Source: PPI Handbook of PE Pipe ch. 6 and 8 (from memory).
    """
    stress = poisson_ratio * hoop_stress(pressure, dimension_ratio) + modulus * expansion * cooling
    return stress * wall_area(outside_diameter, dimension_ratio)
