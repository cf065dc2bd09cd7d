"""Bolt holes in a loose flat ring: how much they raise its stress and soften it.

The formulas of a smooth ring are multiplied by the factors here. They rest on
65 three-dimensional finite-element models of half a bolt pitch (own study,
tests/outside/bolt_hole_study.py): rings of AWWA C207 B, D, E, F, ASME B16.5
and EN 1092-1 PN10, PN16 from 3 to 48 in and variations in hole, spacing,
thickness and place, hub at 0.5 h and 1 y. Three numbers carry the effect:
eta = d_h / (b - a), the width a hole takes; lambda = n d_h / (2 pi r_b), the
share of the bolt circle that is hole; t / (b - a), since a thick ring turns as
a whole and a thin one bends around the holes.

With few bolts the ring bends between them as well, hole or no hole: by statics the
hoop bending midway is (r_b x/sin x - r_c)/(r_b - r_c) times the mean, x = pi/n, for a
hub that pushes evenly at r_c. The formulas do not hold that; rings of fewer than eight
bolts are outside the validity.

Lengths in m, any shape; arrays broadcast; NaN in, NaN out, and NaN where a size
cannot be (a hole as wide as the ring, holes that overlap). A hole of zero gives 1,
but for the hole edge NaN: there is no edge.
"""

import numpy as np

from .ring import _positive

BORE_FACTOR_VARIATION = 0.025
"""Coefficient of variation of true over estimated bore factor in the study; largest misfit 6 % with 8 bolts or more, 9 % (unsafe) with 4."""
EDGE_FACTOR_VARIATION = 0.045
"""The same for the hole edge; largest misfit 15 %."""
ROTATION_FACTOR_VARIATION = 0.011
"""The same for the rotation; largest misfit 3 %."""


def _shares(hole_diameter, number_of_bolts, bolt_circle_radius, bore_radius, outer_radius, ring_thickness):
    """eta, lambda and t / (b - a) [-]; NaN where the ring or its holes cannot be."""
    width = np.where(np.real(bore_radius) > 0, _positive(outer_radius - bore_radius), np.nan)
    hole = np.where(np.real(hole_diameter) >= 0, hole_diameter, np.nan)
    eta, share = hole / width, _positive(number_of_bolts) * hole / (2 * np.pi * _positive(bolt_circle_radius))
    possible = (np.real(eta) < 1) & (np.real(share) < 1)
    return np.where(possible, eta, np.nan), np.where(possible, share, np.nan), _positive(ring_thickness) / width


def bore_stress_factor(hole_diameter, number_of_bolts, bolt_circle_radius, bore_radius, outer_radius, ring_thickness):
    """Bore-corner stress of a drilled ring over that of a smooth one, 1 + 4.1 eta^2 lambda^0.5 (t/w)^0.25 [-].

    d_h, r_b, a, b, t [m]; n [-]; w = b - a. Largest von Mises stress along the bore corner over the smooth ring's formula.
    Source: own study of 65 models; median misfit 1 %. Valid as `bolt_hole_validity` says.
    """
    eta, share, stubby = _shares(hole_diameter, number_of_bolts, bolt_circle_radius, bore_radius, outer_radius, ring_thickness)
    return 1 + 4.1 * eta**2 * share**0.5 * stubby**0.25


def hole_edge_stress_factor(hole_diameter, number_of_bolts, bolt_circle_radius, bore_radius, outer_radius, ring_thickness):
    """Peak stress at the edge of a bolt hole over the smooth ring's bore-corner stress, 1.97 (t/d_h)^0.13 (a/r_b) bore factor [-].

    d_h, r_b, a, b, t [m]; n [-]. Hoop bending falls off as 1/r from bore to bolt circle; there a hole in a bent plate
    concentrates it by 1.8 (thin) to 2.4 (thick). NaN for d_h = 0. Source: own study of 65 models; median misfit 2 %.
    """
    concentration = 1.97 * (_positive(ring_thickness) / _positive(hole_diameter)) ** 0.13
    bore = bore_stress_factor(hole_diameter, number_of_bolts, bolt_circle_radius, bore_radius, outer_radius, ring_thickness)
    return concentration * bore_radius / _positive(bolt_circle_radius) * bore


def rotation_factor(hole_diameter, number_of_bolts, bolt_circle_radius, bore_radius, outer_radius, ring_thickness):
    """Rotation of a drilled ring over that of a smooth one, 1 + 4.6 eta^1.5 lambda (t/w)^0.5 [-].

    d_h, r_b, a, b, t [m]; n [-]; w = b - a. The mean turn of the underside; the give at the
    bolts holds the bending between bolts as well and is larger, the more so the fewer they are.
    Source: own study of 65 models; median misfit 0.7 %, largest 3 %.
    """
    eta, share, stubby = _shares(hole_diameter, number_of_bolts, bolt_circle_radius, bore_radius, outer_radius, ring_thickness)
    return 1 + 4.6 * eta**1.5 * share * stubby**0.5


def bolt_hole_validity(hole_diameter, number_of_bolts, bolt_circle_radius, bore_radius, outer_radius, ring_thickness):
    """True where the ring lies inside the study: eta 0.15 to 0.5, lambda 0.1 to 0.45, t/w 0.12 to 0.75, b/a up to 2.1, 8 bolts or more,
    bolt circle at (r_b - a)/w from 0.5 to 0.75. False where anything is unknown."""
    eta, share, stubby = _shares(hole_diameter, number_of_bolts, bolt_circle_radius, bore_radius, outer_radius, ring_thickness)
    place = (bolt_circle_radius - bore_radius) / _positive(outer_radius - bore_radius)
    ratio = outer_radius / _positive(bore_radius)
    inside = (eta >= 0.15) & (eta <= 0.5) & (share >= 0.1) & (share <= 0.45) & (stubby >= 0.12) & (stubby <= 0.75)
    return inside & (ratio <= 2.1) & (np.asarray(number_of_bolts) >= 8) & (place >= 0.5) & (place <= 0.75)
