"""How the hub's lever arm and the loose ring's stress move with each dimension and modulus: exact derivatives through the contact."""

from dataclasses import dataclass

import numpy as np

from .ring import _contact_integrals, hub_contact, loose_ring_stress, ring_rotational_stiffness, taylor_forge_y, taylor_forge_y_slope


@dataclass(frozen=True, eq=False)
class RingSensitivity:
    """Derivatives of one result by each input, all else held: unit of the result per m or per Pa (per N for `bolt_load`)."""

    contact_inner_radius: np.ndarray
    contact_outer_radius: np.ndarray
    bolt_circle_radius: np.ndarray
    ring_bore_radius: np.ndarray
    ring_outer_radius: np.ndarray
    ring_thickness: np.ndarray
    ring_modulus: np.ndarray
    hub_modulus: np.ndarray
    hub_thickness: np.ndarray
    bolt_load: np.ndarray


def lever_arm_sensitivity(contact_inner_radius, contact_outer_radius, bolt_circle_radius, ring_bore_radius, ring_outer_radius, ring_thickness, ring_modulus, hub_modulus, hub_thickness):
    """Derivatives of `hub_contact(...).lever_arm` by its arguments: `RingSensitivity` [m/m, m/Pa]. Same arguments, units and validity.

    Source: implicit differentiation of the couple balance: the force and couple integrals N and C over the contact, C = D h / E_pe, e = C / N.
    The derivative by the ring's bore holds the contact's inner radius; add that field where the two move together.
    """
    r_i, r_o, r_b, a, b, t = contact_inner_radius, contact_outer_radius, bolt_circle_radius, ring_bore_radius, ring_outer_radius, ring_thickness
    contact = hub_contact(r_i, r_o, r_b, a, b, t, ring_modulus, hub_modulus, hub_thickness)
    u = r_o - contact.neutral_radius
    full = contact.full_contact
    width, gap = np.where(full, r_o - r_i, u), r_b - r_o
    force, couple, reach, reach_lever = _contact_integrals(u, width, gap, r_o)
    sink = u * width - width**2 / 2
    sink_lever = gap * sink + u * width**2 / 2 - width**3 / 3
    edge = np.where(full, (u - width) * (r_o - width), 0.0)
    edge_lever = edge * (gap + width)
    stiffness_ratio = ring_rotational_stiffness(ring_modulus, t, a, b) * hub_thickness / hub_modulus

    def arm_slope(ratio_slope, force_slope, couple_slope):
        sunk_slope = (ratio_slope - couple_slope) / reach_lever
        return (ratio_slope - contact.lever_arm * (force_slope + reach * sunk_slope)) / force

    ratio_log_slope = arm_slope(stiffness_ratio, 0.0, 0.0)
    log_ratio = np.log(b / a)
    return RingSensitivity(
        contact_inner_radius=arm_slope(0.0, -edge, -edge_lever),
        contact_outer_radius=arm_slope(0.0, sink + edge, sink_lever - force + edge_lever),
        bolt_circle_radius=arm_slope(0.0, 0.0, force),
        ring_bore_radius=-ratio_log_slope / (a * log_ratio),
        ring_outer_radius=ratio_log_slope / (b * log_ratio),
        ring_thickness=3 * ratio_log_slope / t,
        ring_modulus=ratio_log_slope / ring_modulus,
        hub_modulus=-ratio_log_slope / hub_modulus,
        hub_thickness=ratio_log_slope / hub_thickness,
        bolt_load=np.zeros_like(contact.lever_arm),
    )


def loose_ring_stress_sensitivity(bolt_load, contact_inner_radius, contact_outer_radius, bolt_circle_radius, ring_bore_radius, ring_outer_radius, ring_thickness, ring_modulus, hub_modulus, hub_thickness):
    """Derivatives of the loose ring's bore-corner stress, its arm from `hub_contact`, by every input: `RingSensitivity` [Pa/m, Pa/Pa, Pa/N].

    bolt_load [N]; the others as in `hub_contact`. Source: product rule on Y W e / (t^2 2a).
    """
    a, b, t = ring_bore_radius, ring_outer_radius, ring_thickness
    geometry = (contact_inner_radius, contact_outer_radius, bolt_circle_radius, a, b, t, ring_modulus, hub_modulus, hub_thickness)
    arm = hub_contact(*geometry).lever_arm
    arm_slopes = lever_arm_sensitivity(*geometry)
    stress = loose_ring_stress(bolt_load, arm, t, a, b)
    per_arm = loose_ring_stress(bolt_load, 1.0, t, a, b)
    y_log_slope = taylor_forge_y_slope(b / a) / taylor_forge_y(b / a)
    direct = {
        "ring_bore_radius": -stress * (1 + y_log_slope * b / a) / a,
        "ring_outer_radius": stress * y_log_slope / a,
        "ring_thickness": -2 * stress / t,
        "bolt_load": loose_ring_stress(1.0, arm, t, a, b),
    }
    return RingSensitivity(**{name: per_arm * slope + direct.get(name, 0.0) for name, slope in vars(arm_slopes).items()})
