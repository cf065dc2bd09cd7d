"""The loose backing ring: where the hub pushes on it, its stress, its rotation and the pressure it can be rated for.

The ring is a circular ring of rectangular section turned inside out by the bolts; the hub is an elastic bed that can push
but not pull. SI throughout (m, N, Pa, rad); every argument may be an array and broadcasts against the others. NaN in, NaN out.
"""

from dataclasses import dataclass
from enum import IntFlag

import numpy as np

STUBBY_LIMIT = 0.6
"""t / sqrt(a (b - a)) above which rotation exceeds the flat ring's by more than some 5 % (finite elements, tests/outside)."""

WIDE_LIMIT = 2.0
"""b / a above which the bore stress is overestimated by more than some 10 % (finite elements, tests/outside)."""


class RingReason(IntFlag):
    """Why a ring's results are missing or doubtful; reasons add up as bits."""

    VALID = 0
    UNKNOWN_DIMENSION = 1
    DIMENSION_NOT_POSITIVE = 2
    OUTER_DIAMETER_INSIDE_BORE = 4
    HUB_DOES_NOT_REACH_RING = 8
    HUB_BEYOND_BOLT_CIRCLE = 16
    BOLT_CIRCLE_OFF_RING = 32
    CONTACT_OFF_RING = 64
    STUBBY_SECTION = 128
    WIDE_SECTION = 256


BLOCKING_REASONS = RingReason(127)
"""Reasons that leave the result NaN; the others leave a value that is doubted."""

RING_REASON_TEXT = {
    RingReason.UNKNOWN_DIMENSION: "a dimension of the ring, hub or bolt circle is unknown",
    RingReason.DIMENSION_NOT_POSITIVE: "a dimension of the ring, hub or bolt circle is zero or negative",
    RingReason.OUTER_DIAMETER_INSIDE_BORE: "the ring's outside diameter is not larger than its bore",
    RingReason.HUB_DOES_NOT_REACH_RING: "the hub's outside diameter is not larger than the inner edge of its contact with the ring",
    RingReason.HUB_BEYOND_BOLT_CIRCLE: "the hub reaches the bolt circle, so the bolts have no lever arm",
    RingReason.BOLT_CIRCLE_OFF_RING: "the bolt circle does not lie between the ring's bore and its outside diameter",
    RingReason.CONTACT_OFF_RING: "the contact with the hub reaches beyond the ring's bore or outside diameter",
    RingReason.STUBBY_SECTION: "the ring is so thick for its radial width that its rotation and stress exceed the flat-ring formulas by more than 5 %",
    RingReason.WIDE_SECTION: "the ring is so wide for its bore that the flat-ring formulas overestimate its stress by up to 15 %",
}


def ring_validity(contact_inner_radius, contact_outer_radius, bolt_circle_radius, ring_bore_radius, ring_outer_radius, ring_thickness):
    """Reasons, as an integer array of `RingReason` bits, why the formulas here do not or do not safely apply.

    All arguments are in m, scalar or array. `result & BLOCKING_REASONS` non-zero means NaN results; the rest is a doubt.
    """
    r_i, r_o, r_b, a, b, t = np.broadcast_arrays(
        *(np.real(x) for x in (contact_inner_radius, contact_outer_radius, bolt_circle_radius, ring_bore_radius, ring_outer_radius, ring_thickness))
    )
    rounding = 1e-9
    checks = {
        RingReason.UNKNOWN_DIMENSION: ~np.isfinite(r_i + r_o + r_b + a + b + t),
        RingReason.DIMENSION_NOT_POSITIVE: (r_i <= 0) | (r_o <= 0) | (r_b <= 0) | (a <= 0) | (b <= 0) | (t <= 0),
        RingReason.OUTER_DIAMETER_INSIDE_BORE: b <= a,
        RingReason.HUB_DOES_NOT_REACH_RING: r_o <= r_i,
        RingReason.HUB_BEYOND_BOLT_CIRCLE: r_o >= r_b,
        RingReason.BOLT_CIRCLE_OFF_RING: (r_b <= a) | (r_b >= b),
        RingReason.CONTACT_OFF_RING: (r_i < a * (1 - rounding)) | (r_o > b * (1 + rounding)),
        RingReason.STUBBY_SECTION: t * np.abs(t) > STUBBY_LIMIT**2 * a * (b - a),
        RingReason.WIDE_SECTION: b > WIDE_LIMIT * a,
    }
    return sum(np.where(failed, int(reason), 0) for reason, failed in checks.items())


def _positive(value):
    """The value where it is larger than zero and finite, NaN elsewhere: a size that cannot be is unknown."""
    return np.where((np.real(value) > 0) & np.isfinite(value), value, np.nan)


def _radius_ratio(outer_radius, bore_radius):
    """Outer over bore radius where larger than one, NaN elsewhere [-]."""
    ratio = _positive(outer_radius) / _positive(bore_radius)
    return np.where(np.real(ratio) > 1, ratio, np.nan)


# ---------------------------------------------------------------- contact with the hub


@dataclass(frozen=True, eq=False)
class HubContact:
    """Where the hub pushes on the ring. Independent of the bolt load, because ring and hub are elastic.

    lever_arm: from the bolt circle in to the resultant of the contact pressure [m]
    neutral_radius: radius at which the ring neither sinks into the hub nor leaves it [m]; may lie inside the contact's inner edge
    full_contact: True where the ring bears on the whole contact annulus; False also where the other two are NaN
    """

    lever_arm: np.ndarray
    neutral_radius: np.ndarray
    full_contact: np.ndarray


def ring_rotational_stiffness(ring_modulus, thickness, bore_radius, outer_radius):
    """Twisting couple per radian of circumference that turns a flat ring by unit rotation, E t^3 ln(b/a) / 12 [N m].

    E ring modulus [Pa]; t thickness, a bore radius, b outer radius [m].
    Source: Timoshenko, Strength of Materials, part II, twist of a circular ring by couples along its centre line (section does not distort).
    """
    return _positive(ring_modulus) * _positive(thickness) ** 3 * np.log(_radius_ratio(outer_radius, bore_radius)) / 12


def hub_contact(contact_inner_radius, contact_outer_radius, bolt_circle_radius, ring_bore_radius, ring_outer_radius, ring_thickness, ring_modulus, hub_modulus, hub_thickness):
    """Lever arm of the bolts about the hub's reaction, for a ring on a hub that pushes but does not pull: `HubContact`.

    Radii, thicknesses [m]; moduli [Pa], the hub's for the load duration and temperature in question. Contact pressure is k theta (r - r_n)
    where positive, with k = hub modulus / hub thickness; r_n follows from the couple about the bolt circle equalling the ring's rotational
    stiffness times its rotation. Own derivation, verified by finite elements in the tests. NaN where `ring_validity` blocks.
    """
    dimensions = (contact_inner_radius, contact_outer_radius, bolt_circle_radius, ring_bore_radius, ring_outer_radius, ring_thickness)
    r_i, r_o, r_b, a, b, t, e_ring, e_hub, h = np.broadcast_arrays(*dimensions, ring_modulus, hub_modulus, hub_thickness)
    usable = (ring_validity(r_i, r_o, r_b, a, b, t) & BLOCKING_REASONS) == 0
    usable = usable & np.isfinite(_positive(e_ring) + _positive(e_hub) + _positive(h))
    r_i, r_o, r_b, a, b, t, e_ring, e_hub, h = (
        np.where(usable, x, safe) for x, safe in zip((r_i, r_o, r_b, a, b, t, e_ring, e_hub, h), (1.0, 1.2, 1.3, 1.0, 1.4, 0.1, 1.0, 1.0, 1.0))
    )
    stiffness_ratio = ring_rotational_stiffness(e_ring, t, a, b) * h / e_hub
    width, gap = r_o - r_i, r_b - r_o
    sunk_width, full = _sunk_width(stiffness_ratio, width, gap, r_o)
    force, _, _, _ = _contact_integrals(sunk_width, np.where(full, width, sunk_width), gap, r_o)
    unknown = np.where(usable, 0.0, np.nan)
    return HubContact(stiffness_ratio / force + unknown, r_o - sunk_width + unknown, full & usable)


def _contact_integrals(u, c, g, r_o):
    """Integrals over the contact width, x from 0 at the hub's rim to c: weights (u - x) r, (u - x)(g + x) r, r, (g + x) r with r = r_o - x.

    u: distance from the rim in to the neutral radius; g: from the rim out to the bolt circle; all [m].
    """
    c2, c3, c4 = c * c, c**3, c**4
    reach = r_o * c - c2 / 2
    reach_lever = g * reach + r_o * c2 / 2 - c3 / 3
    force = u * reach - r_o * c2 / 2 + c3 / 3
    couple = u * reach_lever - g * (r_o * c2 / 2 - c3 / 3) - r_o * c3 / 3 + c4 / 4
    return force, couple, reach, reach_lever


def _sunk_width(stiffness_ratio, width, gap, r_o):
    """Distance from the hub's rim in to the neutral radius [m], and whether that lies beyond the contact's inner edge.

    With part of the annulus in contact the couple is the quartic g r_o u^2/2 + (r_o - g) u^3/6 - u^4/12. Its second derivative
    (g + u)(r_o - u) is positive, so Newton's steps come down to the root from any start above it and cannot leave (0, width].
    """
    _, couple_at_width, _, reach_lever = _contact_integrals(width, width, gap, r_o)
    full = np.real(stiffness_ratio) >= np.real(couple_at_width)
    linear = width + (stiffness_ratio - couple_at_width) / reach_lever

    u = np.array(linear)
    part = ~full
    if np.any(part):
        u[part] = _sunk_width_of_part_contact(*(np.asarray(x)[part] for x in np.broadcast_arrays(stiffness_ratio, width, gap, r_o)))
    return u, full


def _sunk_width_of_part_contact(stiffness_ratio, width, gap, r_o):
    """Root of the quartic of `_sunk_width` in (0, width] [m]."""
    by_gap = np.sqrt(2 * stiffness_ratio / (gap * r_o))
    by_width = (6 * stiffness_ratio / r_o) ** (1 / 3)
    u = np.where(np.real(by_gap) < np.real(by_width), by_gap, by_width)
    u = np.where(np.real(u) < np.real(width), u, width)
    for _ in range(60):
        couple = u * u * (gap * r_o / 2 + u * ((r_o - gap) / 6 - u / 12))
        slope = u * (gap * r_o + u * ((r_o - gap) / 2 - u / 3))
        step = (couple - stiffness_ratio) / slope
        u = u - step
        u = np.where(np.real(u) > np.real(width), width, u)
        if np.all(np.abs(step) <= 1e-13 * np.abs(u)):
            break
    return u


def hub_contact_pressure(radius, rotation, neutral_radius, hub_modulus, hub_thickness):
    """Pressure of the ring on the hub at a radius of the contact annulus, E_pe/h * theta * (r - r_n), never negative [Pa].

    radius, neutral radius, hub thickness [m]; rotation [rad]; hub modulus [Pa]. Largest at the hub's rim.
    """
    sinking = radius - neutral_radius
    return hub_modulus / hub_thickness * rotation * np.where(sinking < 0, 0.0, sinking)


# ---------------------------------------------------------------- stress and rotation


def taylor_forge_y(radius_ratio):
    """ASME's factor Y(K) for the tangential stress of a ring flange of loose type, Poisson's ratio 0.3 [-]. NaN for K <= 1.

    radius_ratio: K, outer over bore radius [-]. Source: ASME BPVC VIII-1, Appendix 2, Figure 2-7.1 (form from memory; the tests
    rederive it from the annular plate: 0.66845 = 3(1 - nu)/pi, 5.71690 = 6(1 + nu) ln(10)/pi).
    """
    ratio = np.where(np.real(radius_ratio) > 1, radius_ratio, np.nan)
    squared = ratio * ratio
    return (0.66845 + 5.71690 * squared * np.log10(ratio) / (squared - 1)) / (ratio - 1)


def taylor_forge_y_slope(radius_ratio):
    """dY/dK of `taylor_forge_y` [-]. NaN for K <= 1."""
    ratio = np.where(np.real(radius_ratio) > 1, radius_ratio, np.nan)
    squared = ratio * ratio
    bracket_slope = 5.71690 * (ratio / np.log(10) / (squared - 1) - 2 * ratio * np.log10(ratio) / (squared - 1) ** 2)
    return (bracket_slope - taylor_forge_y(ratio)) / (ratio - 1)


def loose_ring_stress(bolt_load, lever_arm, ring_thickness, bore_radius, outer_radius):
    """Tangential stress at the bore corner of a smooth loose ring, Y W e / (t^2 2a) [Pa].

    W total bolt load [N]; e lever arm, t thickness, a bore radius, b outer radius [m].
    Source: ASME BPVC VIII-1, Appendix 2, loose-type ring flange, with the arm to the hub's true reaction. Bolt holes are not in it.
    """
    return taylor_forge_y(_radius_ratio(outer_radius, bore_radius)) * bolt_load * lever_arm / (_positive(ring_thickness) ** 2 * 2 * _positive(bore_radius))


def ring_rotation(bolt_load, lever_arm, thickness, bore_radius, outer_radius, modulus):
    """Elastic rotation of a loose ring, 6 W e / (pi E t^3 ln(b/a)) [rad].

    W [N]; e, t, a, b [m]; E [Pa]. Source: Timoshenko as in `ring_rotational_stiffness`; in degrees it is
    109.4 M / (E t^3 ln K), the rigidity rule of ASME BPVC VIII-1, 2-14.
    """
    return bolt_load * lever_arm / (2 * np.pi * ring_rotational_stiffness(modulus, thickness, bore_radius, outer_radius))


def ring_compliance(lever_arm, thickness, bore_radius, outer_radius, modulus):
    """How far the bolts draw in at the bolt circle for unit total bolt load by the ring's rotation alone, e^2 6/(pi E t^3 ln(b/a)) [m/N]."""
    return lever_arm * ring_rotation(1.0, lever_arm, thickness, bore_radius, outer_radius, modulus)


def first_yield_bolt_load(yield_strength, lever_arm, ring_thickness, bore_radius, outer_radius, hole_factor):
    """Total bolt load at which the bore corner reaches yield, sigma_y t^2 2a / (Y e hole_factor) [N].

    yield strength [Pa]; lever arm, thickness, radii [m]; hole_factor: bore-corner stress with bolt holes over without, 1 for a smooth ring [-].
    """
    return yield_strength / (_positive(hole_factor) * loose_ring_stress(1.0, _positive(lever_arm), ring_thickness, bore_radius, outer_radius))


def plastic_bolt_load(yield_strength, lever_arm, ring_thickness, bore_radius, outer_radius, hole_diameter):
    """Total bolt load at which the whole net section through a bolt hole yields, 2 pi sigma_y t^2/4 (b - a - d_h) / e [N]. NaN if no net width is left.

    yield strength [Pa]; lever arm, thickness, radii, hole diameter (0 for a smooth ring) [m]. Source: limit analysis; the hoop bending
    moment W e / 2 pi is the same in every radial section, so the weakest one governs.
    """
    net_width = _positive(outer_radius - bore_radius - hole_diameter)
    return np.pi / 2 * yield_strength * ring_thickness**2 * net_width / _positive(lever_arm)


# ---------------------------------------------------------------- rating


def app2_bolt_load(pressure, pressure_diameter, face_area, gasket_factor):
    """Operating bolt load W_m1 = pi/4 G^2 P + m P A_f [N].

    P pressure [Pa]; G effective pressure diameter of the face [m]; A_f face contact area [m2]; m gasket factor [-].
    Source: ASME BPVC VIII-1, Appendix 2, 2-5(c), with the area of the face in place of 2b pi G.
    """
    return pressure * (np.pi / 4 * pressure_diameter**2 + gasket_factor * face_area)


def loose_ring_rating(yield_strength, safety_factor, hole_factor, lever_arm, ring_thickness, bore_radius, outer_radius, pressure_diameter, face_area, gasket_factor):
    """Pressure at which the bore-corner stress under W_m1 reaches yield / safety factor [Pa].

    Arguments as in `loose_ring_stress` and `app2_bolt_load`; hole_factor as in `first_yield_bolt_load`; safety_factor [-].
    """
    allowed_bolt_load = first_yield_bolt_load(yield_strength, lever_arm, ring_thickness, bore_radius, outer_radius, hole_factor) / _positive(safety_factor)
    return allowed_bolt_load / _positive(app2_bolt_load(1.0, pressure_diameter, face_area, gasket_factor))


def stated_rating_safety_factor(stated_rating, stated_safety_factor, pressure):
    """Safety factor at a pressure of a ring whose loose-ring rating and its safety factor are stated, N = P_r N_r / P [-]. NaN for P <= 0.

    stated_rating, pressure [Pa]; stated_safety_factor [-]. Common practice, no source; not for ratings of welded flanges.
    """
    return stated_rating * stated_safety_factor / _positive(pressure)


def stated_rating_pressure(stated_rating, stated_safety_factor, safety_factor):
    """Pressure at which a ring of stated rating keeps a wanted safety factor, the inverse of `stated_rating_safety_factor` [Pa]."""
    return stated_rating * stated_safety_factor / _positive(safety_factor)


def welded_flange_comparison_stress(bolt_load, lever_arm, ring_thickness, bore_radius, outer_radius, modulus, pipe_wall_thickness, poisson_ratio):
    """Tangential stress at the bore corner of the same ring welded to a long steel pipe [Pa].

    W [N]; e (here from the bolt circle to the middle of the pipe wall), t, a, b, pipe wall s [m]; E [Pa]; nu [-]. The pipe's end turns with the
    ring and its radial movement is held, so it takes a moment 2 beta D theta and a shear 2 beta^2 D theta per unit circumference, the shear at
    half the ring's thickness from its middle.
    Source: Timoshenko, Strength of Materials, part II, flanged pipe. For comparison only; pipe of the same modulus as the ring, mean radius a - s/2.
    """
    mean_radius, lateral = _positive(bore_radius - pipe_wall_thickness / 2), _positive(1 - poisson_ratio**2)
    beta = (3 * lateral) ** 0.25 / np.sqrt(mean_radius * _positive(pipe_wall_thickness))
    wall_rigidity = modulus * pipe_wall_thickness**3 / (12 * lateral)
    pipe_stiffness = bore_radius * 2 * beta * wall_rigidity * (1 + beta * ring_thickness / 2)
    ring_stiffness = ring_rotational_stiffness(modulus, ring_thickness, bore_radius, outer_radius)
    ring_share = ring_stiffness / (ring_stiffness + pipe_stiffness)
    return ring_share * loose_ring_stress(bolt_load, lever_arm, ring_thickness, bore_radius, outer_radius)
