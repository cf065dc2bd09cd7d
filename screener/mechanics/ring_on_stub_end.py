"""Where the hub pushes on a loose ring once the pipe pulls: ring, collar and face as three parts, for pressure and restrained cooling.

At bolt-up `ring.hub_contact` is enough. Under pressure the pipe wall pulls on the collar inside the ring's bore and turns it inside out, so the
ring's support moves inward and the lever arm grows, while the face opens from the bore and its pressure gathers at the rim. SI; arrays broadcast.
"""

from dataclasses import dataclass

import numpy as np

from .ring import BLOCKING_REASONS, ring_rotational_stiffness, ring_validity

RING_SIDE_SQUASH_SHARE = 0.25
FACE_SIDE_SQUASH_SHARE = 0.5
"""Shares of the collar's thickness that squash under the ring and at the face, the rest turning as one piece; set on ten rings by finite
elements of ring, collar and pipe, and then checked on thirty others (tests/outside)."""


@dataclass(frozen=True, eq=False)
class StubEndContact:
    """lever_arm: bolt circle to the hub's reaction on the ring [m]; face_resultant_radius: of the face's pressure [m];
    face_open_width: width of face, from its inner edge, that carries nothing [m]; collar_rotation_per_load [rad/N]"""

    lever_arm: np.ndarray
    face_resultant_radius: np.ndarray
    face_open_width: np.ndarray
    collar_rotation_per_load: np.ndarray


def stub_end_contact(contact_inner_radius, contact_outer_radius, bolt_circle_radius, ring_bore_radius, ring_outer_radius, ring_thickness, ring_modulus,
                     hub_modulus, hub_thickness, pipe_bore_radius, pipe_outer_radius, face_inner_radius, pipe_pull_share, hub_poisson_ratio):  # fmt: skip
    """Contact of ring, collar and face when the pipe wall carries a share of the bolt load: `StubEndContact`.

    The first nine as in `ring.hub_contact`; pipe bore and outer radius, inner radius of the face that meets the mating face [m]; pipe_pull_share:
    axial tension in the pipe wall over total bolt load, 0 to below 1 [-]; Poisson's ratio of the PE [-]. The collar turns as one piece, held by its own
    twist E h^3 ln(r_o/r_bore)/12 and by the pipe's end, beta D per unit circumference (long cylinder, end free to move radially); beds
    of stiffness E/(h/4) under the ring and E/(h/2) at the face push only. Unknown: the ring's rotation relative to the collar, at which the
    collar's couples balance; that balance rises steadily with it. Own derivation, for the arm within 10 % of finite elements;
    a collar thinner than some 0.4 of its width bends, and the face's resultant then lies up to 0.2 of that width further in. NaN where `ring_validity` blocks or a further value is impossible.
    """
    values = np.broadcast_arrays(contact_inner_radius, contact_outer_radius, bolt_circle_radius, ring_bore_radius, ring_outer_radius, ring_thickness, ring_modulus,
                                 hub_modulus, hub_thickness, pipe_bore_radius, pipe_outer_radius, face_inner_radius, pipe_pull_share, hub_poisson_ratio)  # fmt: skip
    r_i, r_o, r_b, a, b, t, e_ring, e_hub, h, bore, pipe, face, share, poisson = (np.array(v, dtype=float) for v in values)
    usable = (ring_validity(r_i, r_o, r_b, a, b, t) & BLOCKING_REASONS) == 0
    usable &= (e_ring > 0) & (e_hub > 0) & (h > 0) & (bore > 0) & (pipe > bore) & (pipe < r_o) & (face > 0) & (face < r_o)
    usable &= (share >= 0) & (share < 1) & (poisson >= 0) & (poisson < 0.5)
    safe = (1.0, 1.2, 1.3, 1.0, 1.4, 0.1, 2e11, 5e8, 0.1, 0.8, 0.95, 0.8, 0.0, 0.45)
    r_i, r_o, r_b, a, b, t, e_ring, e_hub, h, bore, pipe, face, share, poisson = (
        np.where(usable, v, s) for v, s in zip((r_i, r_o, r_b, a, b, t, e_ring, e_hub, h, bore, pipe, face, share, poisson), safe)
    )
    ring_stiffness = ring_rotational_stiffness(e_ring, t, a, b)
    collar_stiffness = ring_rotational_stiffness(e_hub, h, bore, r_o) + pipe_end_stiffness(e_hub, poisson, bore, pipe)
    ring_bed, face_bed = e_hub / (RING_SIDE_SQUASH_SHARE * h), e_hub / (FACE_SIDE_SQUASH_SHARE * h)
    load = 1 / (2 * np.pi)

    def state(relative_rotation):
        """Reaction radius, collar rotation, face resultant and the collar's unbalanced couple per radian, for unit bolt load."""
        reaction = reaction_radius(relative_rotation, ring_bed, load, r_i, r_o)
        turned = load * (r_b - reaction) / ring_stiffness - relative_rotation
        resultant = reaction_radius(turned, face_bed, load * (1 - share), face, r_o)
        couple = load * (reaction - share * (bore + pipe) / 2 - (1 - share) * resultant) - collar_stiffness * turned
        return reaction, turned, resultant, couple

    relative = _rising_root(lambda x: state(x)[3], load * (r_b - r_o) / ring_stiffness)
    reaction, turned, resultant, _ = state(relative)
    open_width = _open_width(turned, face_bed, load * (1 - share), face, r_o)
    unknown = np.where(usable, 0.0, np.nan)
    return StubEndContact(r_b - reaction + unknown, resultant + unknown, open_width + unknown, turned + unknown)


def pipe_end_stiffness(modulus, poisson_ratio, bore_radius, outer_radius):
    """Couple per radian of circumference that turns the end of a long pipe by one radian, r beta D, the end free to move radially [N m].

    modulus [Pa]; radii [m]; r mean radius. Source: Timoshenko and Woinowsky-Krieger, Theory of Plates and Shells, long cylinder under edge moment.
    """
    wall, mean = outer_radius - bore_radius, (outer_radius + bore_radius) / 2
    beta = (3 * (1 - poisson_ratio**2)) ** 0.25 / np.sqrt(mean * wall)
    return mean * beta * modulus * wall**3 / (12 * (1 - poisson_ratio**2))


def _annulus(inner, outer):
    """Integral of r dr, centroid, and second moment of r dr about it, over an annulus per radian."""
    area = (outer**2 - inner**2) / 2
    centroid = (outer**3 - inner**3) / 3 / area
    return area, centroid, (outer**4 - inner**4) / 4 - area * centroid**2


def reaction_radius(rotation, bed_stiffness, load, inner, outer):
    """Radius of the resultant of a push-only bed on a rigid annulus turned by a small angle, outer edge deeper for positive rotation [m].

    rotation [rad], any sign; bed stiffness [Pa/m]; load per radian [N], > 0; annulus radii [m].
    """
    area, centroid, second = _annulus(inner, outer)
    tilt = bed_stiffness * rotation
    far = np.where(tilt > 0, centroid - inner, outer - centroid)
    whole = load / area >= np.abs(tilt) * far
    sign = np.where(tilt > 0, 1.0, -1.0)
    edge = np.where(tilt > 0, outer, inner)
    steep = np.where(whole, 1.0, np.abs(tilt))
    need = np.where(whole, edge * (outer - inner) ** 2 / 4, load / steep)
    u = _sunk_strip(need, edge, sign, outer - inner)
    part = (edge**2 * u**2 / 2 - sign * edge * u**3 / 3 + u**4 / 12) / need
    return np.where(whole, centroid + tilt * second / load, part)


def _sunk_strip(need, edge, sign, width):
    """Width u from the deeper edge with edge u^2/2 - sign u^3/6 = need: Newton on a rising convex cubic [m]."""
    u = np.sqrt(2 * need / edge)
    for _ in range(5):
        u = np.minimum(u - (edge * u**2 / 2 - sign * u**3 / 6 - need) / (edge * u - sign * u**2 / 2), width)
    return u


def _open_width(rotation, bed_stiffness, load, inner, outer):
    """Width of the annulus that has lifted off, zero while all of it is pushed or the inner edge is the deeper [m]."""
    area, centroid, _ = _annulus(inner, outer)
    tilt = bed_stiffness * rotation
    lifted = tilt * (centroid - inner) > load / area
    need = np.where(lifted, load / np.where(lifted, tilt, 1.0), outer * (outer - inner) ** 2 / 4)
    return np.where(lifted, outer - inner - _sunk_strip(need, outer, 1.0, outer - inner), 0.0)


def _rising_root(function, scale):
    """Root of a rising function of x = scale sinh(y), |y| <= 30: bisection to a short bracket, then regula falsi with Illinois halving."""
    low, high = np.full(np.shape(scale), -30.0), np.full(np.shape(scale), 30.0)
    for _ in range(10):
        y = (low + high) / 2
        rises = function(scale * np.sinh(y)) < 0
        low, high = np.where(rises, y, low), np.where(rises, high, y)
    at_low, at_high = function(scale * np.sinh(low)), function(scale * np.sinh(high))
    moved_low = np.zeros(np.shape(scale), dtype=bool)
    moved_high = np.zeros(np.shape(scale), dtype=bool)
    for _ in range(40):
        apart = at_high - at_low
        y_new = np.where(apart > 0, high - at_high * (high - low) / np.where(apart > 0, apart, 1.0), low)
        settled = np.all(np.abs(y_new - y) < 1e-11)
        y = y_new
        value = function(scale * np.sinh(y))
        rises = value < 0
        at_low, at_high = np.where(rises, value, np.where(moved_high, at_low / 2, at_low)), np.where(rises, np.where(moved_low, at_high / 2, at_high), value)
        low, high = np.where(rises, y, low), np.where(rises, high, y)
        moved_low, moved_high = rises, ~rises
        if settled:
            break
    return scale * np.sinh(y)
