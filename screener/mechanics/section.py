"""Loose rings whose section is not a flat rectangle (contoured, convoluted): the section as a polygon of (radius, height) corners.

Height is measured along the pipe, the hub below and the nuts above. Two routes: Timoshenko's section integrals (the section turns
without distorting) and a compact axisymmetric finite-element solution on a one-sided elastic hub. Bolt holes are not in either. SI units.
"""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from scipy.sparse.linalg import splu

from . import section_elements as elements
from .section_mesh import SectionError, checked_polygon, mesh_section

__all__ = ["SectionError", "SectionIntegrals", "SectionResult", "checked_polygon", "equivalent_flat_thickness", "section_integrals", "section_stress", "solve_section"]


@dataclass(frozen=True)
class SectionIntegrals:
    """area [m2]; neutral_height: where turning strains nothing [m]; twist_integral: J = integral of z^2/r dA about it [m3]; bore, outer radius [m]"""

    area: float
    neutral_height: float
    twist_integral: float
    bore_radius: float
    outer_radius: float


def section_integrals(polygon):
    """Area, neutral height and J of a section: `SectionIntegrals`. Corners (n, 2) in m; raises `SectionError` for an impossible polygon.

    Source: Timoshenko, Strength of Materials, part II, twist of a circular ring; the integrals of z^m / r over the polygon are turned into
    line integrals -z^(m+1)/((m+1) r) dr round it (Green) and taken side by side with Gauss points. Flat plate: J = t^3 ln(b/a)/12.
    """
    corners = checked_polygon(polygon)
    ahead = np.roll(corners, -1, axis=0)
    position, weight = np.polynomial.legendre.leggauss(20)
    share = (position[:, None] + 1) / 2
    datum = corners[:, 1].mean()
    r = corners[:, 0] + share * (ahead[:, 0] - corners[:, 0])
    z = corners[:, 1] + share * (ahead[:, 1] - corners[:, 1]) - datum
    run = weight[:, None] / 2 * (ahead[:, 0] - corners[:, 0])
    zeroth, first, second = (-np.sum(run * z ** (m + 1) / ((m + 1) * r)) for m in range(3))
    area = -np.sum(run * z)
    return SectionIntegrals(float(area), float(datum + first / zeroth), float(second - first**2 / zeroth), float(corners[:, 0].min()), float(corners[:, 0].max()))


def equivalent_flat_thickness(twist_integral, bore_radius, outer_radius):
    """Thickness of the flat ring of equal bore, outer radius and rotational stiffness, (12 J / ln(b/a))^(1/3) [m]; J [m3], radii [m]."""
    return (12 * twist_integral / np.log(outer_radius / bore_radius)) ** (1 / 3)


def section_stress(bolt_load, lever_arm, polygon):
    """Largest hoop stress by the section integrals, W e |z| / (2 pi r J) [Pa]; W [N] and e [m] scalar or array.

    |z|/r is largest at a corner because along a straight side it has no maximum in between.
    """
    integrals, corners = section_integrals(polygon), checked_polygon(polygon)
    farthest = np.abs((corners[:, 1] - integrals.neutral_height) / corners[:, 0]).max()
    return bolt_load * lever_arm * farthest / (2 * np.pi * integrals.twist_integral)


@dataclass(frozen=True)
class SectionResult:
    """Finite-element solution of a section for unit total bolt load.

    lever_arm [m]; rotation_per_load: of the best-fitting rigid rotation [rad/N]; rotational_stiffness: couple per radian of circumference over
    that rotation [N m]; peak_stress_per_load: largest von Mises stress at a node, re-entrant corners left out [Pa/N]; peak_radius, peak_height:
    where it is [m]; full_contact; reentrant_corner: True if the outline has a sharp inner corner, whose stress no mesh can tell
    """

    lever_arm: float
    rotation_per_load: float
    rotational_stiffness: float
    peak_stress_per_load: float
    peak_radius: float
    peak_height: float
    full_contact: bool
    reentrant_corner: bool


def solve_section(polygon, contact_inner_radius, contact_outer_radius, bolt_circle_radius, load_width, ring_modulus, poisson_ratio, hub_modulus, hub_thickness):
    """Arm, rotation and peak stress of a section on a hub that pushes but does not pull: `SectionResult`.

    polygon: corners (n, 2) in m; contact radii, bolt circle, width of the nut or washer band, hub thickness [m]; moduli [Pa]; Poisson's ratio [-].
    The contact face is the lowest face square to the axis that looks down within the contact radii; the nuts sit on the highest that looks up at
    the bolt circle. The section is meshed and factored once per distinct section and kept, so other moduli cost little. Raises `SectionError`.
    """
    numbers = (contact_inner_radius, contact_outer_radius, bolt_circle_radius, load_width, ring_modulus, poisson_ratio, hub_modulus, hub_thickness)
    if not np.isfinite(numbers).all():
        raise SectionError("a radius, width or modulus of the section's joint is unknown; give all of them as numbers")
    if min(ring_modulus, hub_modulus, hub_thickness, load_width) <= 0 or not 0 <= poisson_ratio < 0.5:
        raise SectionError("moduli, hub thickness and nut width must be larger than zero and Poisson's ratio at least 0 and below 0.5")
    corners = checked_polygon(polygon)
    key = tuple(map(tuple, corners.tolist()))
    return _factored(key, *map(float, numbers[:4]), float(poisson_ratio)).on_hub(ring_modulus, hub_modulus / hub_thickness)


@lru_cache(maxsize=64)
def _factored(corners, contact_inner_radius, contact_outer_radius, bolt_circle_radius, load_width, poisson_ratio):
    return FactoredSection(np.array(corners), contact_inner_radius, contact_outer_radius, bolt_circle_radius, load_width, poisson_ratio)


def face_height(corners, upward, inner_radius, outer_radius):
    """Height [m] of the highest upward or lowest downward face square to the axis that overlaps two radii, and that face's radii. Anticlockwise corners."""
    ahead = np.roll(corners, -1, axis=0)
    square = np.abs(ahead[:, 1] - corners[:, 1]) <= 1e-6 * np.abs(ahead[:, 0] - corners[:, 0])
    looks = (ahead[:, 0] < corners[:, 0]) if upward else (ahead[:, 0] > corners[:, 0])
    low, high = np.minimum(corners[:, 0], ahead[:, 0]), np.maximum(corners[:, 0], ahead[:, 0])
    found = square & looks & (low < outer_radius) & (high > inner_radius)
    if not found.any():
        side, between = ("nut side", "at the bolt circle") if upward else ("hub side", "between the hub's contact radii")
        raise SectionError(f"the section has no face square to the axis on its {side} {between} ({inner_radius:.4f} to {outer_radius:.4f} m)")
    height = corners[found, 1].max() if upward else corners[found, 1].min()
    level = found & (np.abs(corners[:, 1] - height) <= 1e-6 * np.ptp(corners[:, 1]))
    return float(height), float(low[level].min()), float(high[level].max())


def with_face_points(corners, height, radii):
    """The outline with extra corners at the given radii on its faces at a height, so that the mesh has nodes there."""
    result = []
    for start, end in zip(corners, np.roll(corners, -1, axis=0)):
        result.append(start)
        if abs(start[1] - height) + abs(end[1] - height) <= 1e-6 * abs(end[0] - start[0]):
            between = [r for r in radii if min(start[0], end[0]) < r - 1e-6 * height_scale(corners) and max(start[0], end[0]) > r + 1e-6 * height_scale(corners)]
            result += [np.array([r, height]) for r in sorted(set(between), reverse=bool(end[0] < start[0]))]
    return np.array(result)


def height_scale(corners):
    """Larger of the section's width and height [m], for tolerances."""
    return float(np.ptp(corners, axis=0).max())


class FactoredSection:
    """A meshed, factored section: its response to the bolts and to the hub's push at each node of the contact face, for unit modulus."""

    def __init__(self, corners, contact_inner_radius, contact_outer_radius, bolt_circle_radius, load_width, poisson_ratio):
        contact_height, face_inner, face_outer = face_height(corners, False, contact_inner_radius, contact_outer_radius)
        inner, outer = max(contact_inner_radius, face_inner), min(contact_outer_radius, face_outer)
        if outer >= bolt_circle_radius:
            raise SectionError("the hub's contact reaches the bolt circle, so the bolts have no lever arm")
        nut_height, nut_inner, nut_outer = face_height(corners, True, bolt_circle_radius, bolt_circle_radius)
        half = min(load_width / 2, bolt_circle_radius - nut_inner, nut_outer - bolt_circle_radius)
        outline = with_face_points(corners, contact_height, [inner, outer])
        outline = with_face_points(outline, nut_height, [bolt_circle_radius - half, bolt_circle_radius + half])
        self.bolt_circle_radius, self.poisson_ratio = bolt_circle_radius, poisson_ratio
        self.mesh = mesh_section(outline)
        self.smooth = ~_near_reentrant(self.mesh, corners)
        self._respond(*self._loads(contact_height, inner, outer, nut_height, half))

    def _loads(self, contact_height, inner, outer, nut_height, half):
        """Bolt load vector (1/2 pi in all, even per unit radius); contact points' radii, weights and their nodes' shares."""
        points = self.mesh.points
        shares = elements.line_shape_functions(elements.LINE_POINTS)
        nuts = elements.sides_on_face(self.mesh, nut_height, self.bolt_circle_radius - half, self.bolt_circle_radius + half)
        load = np.zeros(2 * len(points))
        run = points[nuts[:, 1], 0] - points[nuts[:, 0], 0]
        np.add.at(load, 2 * nuts + 1, -run[:, None] * (elements.LINE_WEIGHTS @ shares))
        load /= -load.sum() * 2 * np.pi
        under = elements.sides_on_face(self.mesh, contact_height, inner, outer)
        run = points[under[:, 1], 0] - points[under[:, 0], 0]
        radius = points[under[:, 0], 0][:, None] + run[:, None] * elements.LINE_POINTS
        weight = (run[:, None] * elements.LINE_WEIGHTS * radius).ravel()
        nodes = np.unique(under)
        share = np.zeros((radius.size, len(nodes)))
        rows = np.arange(radius.size).reshape(radius.shape)
        share[rows[:, :, None], np.searchsorted(nodes, under)[:, None, :]] = shares
        return load, nodes, radius.ravel(), weight, share

    def _respond(self, load, nodes, radius, weight, share):
        """Solve for the bolt load and a unit push at each contact node, one node held against moving along the axis."""
        self.contact_radius, self.contact_weight = radius, weight
        free = np.delete(np.arange(len(load)), 2 * nodes[0] + 1)
        matrix = elements.stiffness(self.mesh, self.poisson_ratio)[free][:, free]
        right = np.zeros((len(load), len(nodes) + 1))
        right[:, 0] = load
        right[2 * nodes + 1, np.arange(len(nodes)) + 1] = 1.0
        answer = np.zeros_like(right)
        answer[free] = splu(matrix.tocsc(), permc_spec="MMD_AT_PLUS_A", options={"SymmetricMode": True}, diag_pivot_thresh=0.01).solve(right[free])
        self.by_load, self.by_push = answer[:, 0], answer[:, 1:] @ share.T
        self.sink_by_load = -share @ self.by_load[2 * nodes + 1]
        self.lift_by_push = share @ self.by_push[2 * nodes + 1]

    def on_hub(self, ring_modulus, bed_stiffness):
        """`SectionResult` for a ring modulus [Pa] and a bed stiffness, hub modulus over hub thickness [Pa/m]."""
        push, pushing = self._contact_push(ring_modulus, bed_stiffness)
        arm = self.bolt_circle_radius - np.sum(push * self.contact_radius) / np.sum(push)
        displacement = (self.by_load + self.by_push @ push) / ring_modulus
        rotation = _rigid_rotation(self.mesh.points, displacement)
        stress = elements.von_mises(elements.nodal_stress(self.mesh, self.poisson_ratio, displacement * ring_modulus))
        peak = int(np.nanargmax(np.where(self.smooth, stress, np.nan)))
        r, z = self.mesh.points[peak]
        return SectionResult(float(arm), float(rotation), float(arm / (2 * np.pi * rotation)), float(stress[peak]), float(r), float(z), bool(pushing.all()), bool((~self.smooth).any()))

    def _contact_push(self, ring_modulus, bed_stiffness):
        """Push at the contact points [N per radian] that balances the unit bolt load, and which points push.

        Sinking s = (sink by load - lift by push q)/E + d with q = k w s where s > 0 and the sum of q equal to the load; d is the ring's own sinking.
        """
        count = len(self.contact_weight)
        pushing = np.ones(count, dtype=bool)
        bed = bed_stiffness * self.contact_weight
        for _ in range(100):
            active = bed * pushing
            matrix = np.zeros((count + 1, count + 1))
            matrix[:count, :count] = np.eye(count) + self.lift_by_push * active / ring_modulus
            matrix[:count, count] = -1.0
            matrix[count, :count] = active / bed.max()
            answer = np.linalg.solve(matrix, np.append(self.sink_by_load / ring_modulus, 1 / (2 * np.pi) / bed.max()))
            now = answer[:count] > 0
            if np.array_equal(now, pushing):
                return active * answer[:count], pushing
            pushing = now
        raise SectionError("the section's contact with the hub did not settle; its contact face may be split in a way the hub cannot follow")


def _rigid_rotation(points, displacement):
    """Rotation of the rigid motion that fits the nodes' displacements best: u_r = theta z + c, u_z = -theta r + d [rad]."""
    r, z = points.T - points.mean(axis=0)[:, None]
    u, w = displacement[0::2], displacement[1::2]
    return np.sum(z * (u - u.mean()) - r * (w - w.mean())) / np.sum(z**2 + r**2)


def _near_reentrant(mesh, corners):
    """Nodes within one and a half side lengths of a corner where the outline turns inward by more than 10 degrees."""
    before, ahead = corners - np.roll(corners, 1, axis=0), np.roll(corners, -1, axis=0) - corners
    turn = np.arctan2(before[:, 0] * ahead[:, 1] - before[:, 1] * ahead[:, 0], (before * ahead).sum(axis=1))
    sharp = corners[turn < -np.radians(10)]
    if len(sharp) == 0:
        return np.zeros(len(mesh.points), dtype=bool)
    return (np.sqrt(((mesh.points[:, None] - sharp[None]) ** 2).sum(axis=2)) < 1.5 * mesh.size).any(axis=1)
