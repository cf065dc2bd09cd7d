"""The loose ring bolted up beyond first yield: how far it turns, where the hub then pushes, and the dish that stays after unbolting.

Ring of rectangular section that keeps its shape and turns about a circumferential axis, elastic and perfectly plastic in hoop stress;
hub as in `ring.hub_contact`. As the ring gives way its contact moves out to the hub's rim and the lever arm shrinks, so the bolt load
can rise above the plastic load at the elastic arm. Small rotations. SI; arrays broadcast; NaN in, NaN out.
"""

from dataclasses import dataclass

import numpy as np

from .ring import _contact_integrals, _positive, hub_contact, ring_rotational_stiffness

BISECTIONS = 60
"""Halvings of the bracket on the logarithm of the contact width, from one millionth of the elastic width up: to rounding."""


@dataclass(frozen=True, eq=False)
class DishedRing:
    """A ring under a bolt load that may have yielded it.

    rotation: under load [rad], infinite if the ring collapses onto the hub's rim; lever_arm: bolt circle to hub reaction under load [m];
    permanent_rotation: after all bolt load is taken off [rad]
    """

    rotation: np.ndarray
    lever_arm: np.ndarray
    permanent_rotation: np.ndarray


def net_section_yield_strength(yield_strength, bore_radius, outer_radius, hole_diameter):
    """Yield strength that gives the whole width the plastic couple of the net section through a bolt hole, sigma_y (1 - d_h/(b - a)) [Pa]."""
    return yield_strength * _positive(1 - hole_diameter / _positive(outer_radius - bore_radius))


def plastic_couple(yield_strength, thickness, bore_radius, outer_radius):
    """Fully plastic twisting couple per radian of circumference, sigma_y t^2 (b - a) / 4 [N m]. Pa, m. Source: limit analysis."""
    return yield_strength * thickness**2 * (outer_radius - bore_radius) / 4


def elastic_plastic_couple(rotation, yield_strength, ring_modulus, thickness, bore_radius, outer_radius):
    """Twisting couple per radian of circumference that holds a ring at a rotation [N m].

    rotation theta [rad], >= 0; sigma_y, E [Pa]; t, a, b [m]. Hoop strain is theta z / r, so fibres inside the radius
    r_y = E theta t / (2 sigma_y) yield beyond z_y = sigma_y r / (E theta), and
    m = E theta t^3/12 ln(b/r_y) + sigma_y [ (r_y - a) t^2/4 - (sigma_y/(E theta))^2 (r_y^3 - a^3)/9 ].
    Own integration, verified by quadrature and finite elements in the tests.
    """
    a, b, t = bore_radius, outer_radius, thickness
    strain_radius = ring_modulus * rotation / _positive(yield_strength)
    yielded_to = np.clip(strain_radius * t / 2, a, b)
    elastic = ring_modulus * rotation * t**3 / 12 * np.log(b / yielded_to)
    core = np.where(yielded_to > a, yielded_to**3 - a**3, 0.0) / np.where(yielded_to > a, strain_radius, 1.0) ** 2 / 9
    return elastic + yield_strength * ((yielded_to - a) * t**2 / 4 - core)


def dished_ring(bolt_load, contact_inner_radius, contact_outer_radius, bolt_circle_radius, ring_bore_radius, ring_outer_radius, ring_thickness, ring_modulus, hub_modulus, hub_thickness, yield_strength):
    """Rotation, arm and permanent rotation of a ring under a total bolt load: `DishedRing`.

    bolt_load [N]; the contact's arguments as in `hub_contact`; yield_strength [Pa], from `net_section_yield_strength` where bolt holes count.
    For a contact width u the bolt load gives the rotation, theta = W / (2 pi k N(u)); u is where the ring's elastic-plastic couple equals
    the hub's, k theta C(u). The couple comes off elastically: permanent rotation = theta - m / D.
    """
    values = np.broadcast_arrays(bolt_load, contact_inner_radius, contact_outer_radius, bolt_circle_radius, ring_bore_radius, ring_outer_radius, ring_thickness, ring_modulus, hub_modulus, hub_thickness, yield_strength)
    load, r_i, r_o, r_b, a, b, t, modulus, hub_modulus, hub_thickness, strength = (np.array(v, dtype=float) for v in values)
    strength = _positive(strength)
    arm = hub_contact(r_i, r_o, r_b, a, b, t, modulus, hub_modulus, hub_thickness)
    stiffness = ring_rotational_stiffness(modulus, t, a, b)
    rotation = load * arm.lever_arm / (2 * np.pi * stiffness)
    lever_arm = np.array(arm.lever_arm)
    permanent = np.where(np.isfinite(rotation + strength), 0.0, np.nan)
    yielded = np.asarray(modulus * rotation * t > 2 * strength * a)
    if np.any(yielded):
        some = [np.asarray(v)[yielded] for v in (load, r_i, r_o, r_b, a, b, t, modulus, hub_modulus, hub_thickness, strength)]
        turned, new_arm, couple = _yielded_equilibrium(np.asarray(r_o - arm.neutral_radius)[yielded], *some)
        rotation, lever_arm = np.array(rotation), np.array(lever_arm)
        rotation[yielded], lever_arm[yielded] = turned, new_arm
        permanent[yielded] = turned - couple / stiffness[yielded]
    return DishedRing(rotation, lever_arm, permanent)


def _yielded_equilibrium(elastic_sunk_width, load, r_i, r_o, r_b, a, b, t, modulus, hub_modulus, hub_thickness, strength):
    """Rotation, arm and couple per radian of yielded rings. The sunk width lies below the elastic one, because a yielded ring turns further."""
    bed, gap, width = hub_modulus / hub_thickness, r_b - r_o, r_o - r_i

    def state(sunk):
        force, couple, _, _ = _contact_integrals(sunk, np.minimum(sunk, width), gap, r_o)
        turned = load / (2 * np.pi * bed * force)
        return turned, couple / force, elastic_plastic_couple(turned, strength, modulus, t, a, b)

    low, high = np.log(1e-6 * elastic_sunk_width), np.log(elastic_sunk_width)
    for _ in range(BISECTIONS):
        middle = (low + high) / 2
        _, lever, couple = state(np.exp(middle))
        ring_wins = couple > load * lever / (2 * np.pi)
        low, high = np.where(ring_wins, middle, low), np.where(ring_wins, high, middle)
    turned, lever, couple = state(np.exp((low + high) / 2))
    collapses = load * gap >= 2 * np.pi * plastic_couple(strength, t, a, b)
    return np.where(collapses, np.inf, turned), np.where(collapses, gap, lever), np.where(collapses, plastic_couple(strength, t, a, b), couple)


def permanent_rotation(bolt_load, contact_inner_radius, contact_outer_radius, bolt_circle_radius, ring_bore_radius, ring_outer_radius, ring_thickness, ring_modulus, hub_modulus, hub_thickness, yield_strength):
    """Dish that stays after bolting up to a total bolt load and unbolting [rad]: `dished_ring(...).permanent_rotation`, same arguments.

    Zero below first yield, infinite at collapse. The gap it shows over the ring's width is this times (b - a).
    """
    geometry = (contact_inner_radius, contact_outer_radius, bolt_circle_radius, ring_bore_radius, ring_outer_radius, ring_thickness)
    return dished_ring(bolt_load, *geometry, ring_modulus, hub_modulus, hub_thickness, yield_strength).permanent_rotation
