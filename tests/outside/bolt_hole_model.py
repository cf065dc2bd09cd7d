"""Three-dimensional finite elements of a drilled loose ring on an elastic hub that can't pull; half a bolt pitch.

One block of hexahedra runs around the half hole from its edge out to the
sector's boundary and is drawn out through the thickness; triquadratic
displacements. The two radial planes are planes of symmetry, the washer presses
evenly on its ring, the hub is a one-sided elastic bed on the other face.
"""

from dataclasses import dataclass

import numpy as np
import skfem
from scipy.sparse.linalg import splu
from skfem.helpers import ddot, sym_grad, trace

YOUNG, POISSON = 200.0e9, 0.3
WASHER = 1.5  # bearing diameter of nut or washer over bolt diameter; heavy hex nuts are 1.5 d + 1/8 in across flats (ASME B18.2.2, from memory)


@dataclass(frozen=True)
class DrilledRing:
    """m, Pa. contact from the bore to `contact_outer`; hole_diameter 0 for a smooth ring with a smeared bolt load."""

    bore_radius: float
    outer_radius: float
    thickness: float
    bolt_circle_radius: float
    hole_diameter: float
    bolt_diameter: float
    bolts: int
    contact_outer: float
    bed_stiffness: float


@dataclass(frozen=True)
class Solved:
    """Per unit total bolt load: stresses 1/m2, rotation rad/N; arm in m."""

    bore_stress: float
    edge_stress: float
    rotation: float
    arm: float
    unknowns: int


def _outline(ring, n_outer, n_side, n_inner):
    """Points from the outer end of the bolt's plane around the sector to its inner end."""
    a, b, half = ring.bore_radius, ring.outer_radius, np.pi / ring.bolts
    out = [(b * np.cos(p), b * np.sin(p)) for p in np.linspace(0, half, n_outer + 1)]
    side = [(r * np.cos(half), r * np.sin(half)) for r in np.linspace(b, a, n_side + 1)[1:]]
    inner = [(a * np.cos(p), a * np.sin(p)) for p in np.linspace(half, 0, n_inner + 1)[1:]]
    return np.array(out + side + inner)


def sector_mesh(ring, n_outer=6, n_side=8, n_inner=6, n_ray=6, n_thick=3, grading=1.35):
    """Hexahedra around the half hole."""
    outline = _outline(ring, n_outer, n_side, n_inner)
    centre = np.array([ring.bolt_circle_radius, 0.0])
    reach = outline - centre
    angle = np.unwrap(np.arctan2(reach[:, 1], reach[:, 0]))
    angle[0], angle[-1] = 0.0, np.pi
    # Between the outline's own angles and even ones: good shapes at hole and boundary alike.
    even = np.linspace(0.0, np.pi, len(angle))
    hole_angle = 0.5 * angle + 0.5 * even
    hole = centre + 0.5 * ring.hole_diameter * np.column_stack([np.cos(hole_angle), np.sin(hole_angle)])
    steps = np.concatenate([[0.0], np.cumsum(grading ** np.arange(n_ray))])
    steps /= steps[-1]
    plane = hole[:, None, :] * (1 - steps)[None, :, None] + outline[:, None, :] * steps[None, :, None]
    heights = np.linspace(0.0, ring.thickness, n_thick + 1)
    points = np.concatenate([np.dstack([plane, np.full(plane.shape[:2], z)]).reshape(-1, 3) for z in heights])
    rays, rings = plane.shape[:2]
    layer = rays * rings
    i, j, k = np.meshgrid(np.arange(rays - 1), np.arange(rings - 1), np.arange(n_thick), indexing="ij")
    base = (i * rings + j + k * layer).ravel()
    # MeshHex order: (0,0,0),(0,0,1),(0,1,0),(1,0,0),(0,1,1),(1,0,1),(1,1,0),(1,1,1)
    di, dj, dk = rings, 1, layer
    cells = np.array([base, base + dk, base + dj, base + di, base + dj + dk, base + di + dk, base + di + dj, base + di + dj + dk])
    return skfem.MeshHex(points.T.copy(), cells)


def smooth_mesh(ring, n_radial=10, n_angle=2, n_thick=4):
    """Hexahedra of a sector without a hole."""
    r = np.linspace(ring.bore_radius, ring.outer_radius, n_radial + 1)
    phi = np.linspace(0.0, np.pi / ring.bolts, n_angle + 1)
    z = np.linspace(0.0, ring.thickness, n_thick + 1)
    mesh = skfem.MeshHex.init_tensor(r, phi, z)
    radius, angle, height = mesh.p
    return skfem.MeshHex(np.array([radius * np.cos(angle), radius * np.sin(angle), height]), mesh.t)


def solve(ring: DrilledRing, mesh=None, most_rounds: int = 25) -> Solved:
    """Solve the drilled (or smooth) ring for unit total bolt load."""
    drilled = ring.hole_diameter > 0
    if mesh is None:
        mesh = sector_mesh(ring) if drilled else smooth_mesh(ring)
    element = skfem.ElementVector(skfem.ElementHex2())
    basis = skfem.Basis(mesh, element, intorder=4)
    mu = YOUNG / (2 * (1 + POISSON))
    lame = YOUNG * POISSON / ((1 + POISSON) * (1 - 2 * POISSON))

    @skfem.BilinearForm
    def elastic(u, v, _w):
        e, f = sym_grad(u), sym_grad(v)
        return 2 * mu * ddot(e, f) + lame * trace(e) * trace(f)

    stiffness = elastic.assemble(basis)
    half = np.pi / ring.bolts
    tiny = 1e-6 * ring.thickness
    bottom = mesh.facets_satisfying(lambda x: np.abs(x[2]) < tiny, boundaries_only=True)
    top = mesh.facets_satisfying(lambda x: np.abs(x[2] - ring.thickness) < tiny, boundaries_only=True)
    bed = skfem.FacetBasis(mesh, element, facets=bottom, intorder=8)
    face = skfem.FacetBasis(mesh, element, facets=top, intorder=8)

    @skfem.LinearForm
    def washer(v, w):
        r = np.hypot(w.x[0], w.x[1])
        if drilled:
            rho = np.hypot(w.x[0] - ring.bolt_circle_radius, w.x[1])
            here = rho <= 0.5 * WASHER * ring.bolt_diameter
        else:
            here = np.abs(r - ring.bolt_circle_radius) <= 0.5 * ring.bolt_diameter
        return -1.0 * here * v[2]

    load = washer.assemble(face)
    # Total load on the half pitch is 1 / (2 n); scaled by what the quadrature found of the washer's area.
    rigid = basis.project(lambda x: np.array([0 * x[0], 0 * x[0], 1 + 0 * x[0]]))
    load *= -1.0 / (2 * ring.bolts) / (load @ rigid)
    radius = np.hypot(bed.global_coordinates()[0], bed.global_coordinates()[1])
    inside = np.asarray(radius <= ring.contact_outer)
    active = inside.copy()

    # Symmetry planes: no displacement across them. The second plane is turned, so its dofs are combined.
    plane_one = mesh.facets_satisfying(lambda x: np.abs(x[1]) < tiny, boundaries_only=True)
    plane_two = mesh.facets_satisfying(lambda x: np.abs(x[0] * np.sin(half) - x[1] * np.cos(half)) < tiny, boundaries_only=True)
    fixed = basis.get_dofs(plane_one).all("u^2")
    two = basis.get_dofs(plane_two)
    x_dofs, y_dofs = two.all("u^1"), two.all("u^2")
    penalty = 1e4 * YOUNG * ring.thickness
    import scipy.sparse as sp

    s, c = np.sin(half), np.cos(half)
    rows = np.concatenate([x_dofs, x_dofs, y_dofs, y_dofs])
    cols = np.concatenate([x_dofs, y_dofs, x_dofs, y_dofs])
    vals = penalty * np.concatenate([np.full(len(x_dofs), v) for v in (s * s, -s * c, -s * c, c * c)])
    stiffness = stiffness + sp.csr_matrix((vals, (rows, cols)), shape=stiffness.shape)
    free = np.setdiff1d(np.arange(basis.N), fixed)

    @skfem.BilinearForm
    def spring(u, v, w):
        return ring.bed_stiffness * w.active * u[2] * v[2]

    u = np.zeros(basis.N)
    for _round in range(most_rounds):
        matrix = (stiffness + spring.assemble(bed, active=active.astype(float))).tocsc()
        u[free] = splu(matrix[free][:, free], permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=0.0, options={"SymmetricMode": True}).solve(load[free])
        sunk = np.asarray(bed.interpolate(u))[2]
        now = inside & (sunk < 0)
        if (now != active).mean() < 2e-3:
            break
        active = now
    else:
        raise RuntimeError("contact did not settle")
    pressure = np.where(active, -ring.bed_stiffness * sunk, 0.0)
    force = (pressure * bed.dx).sum()
    arm = ring.bolt_circle_radius - (pressure * radius * bed.dx).sum() / force
    stress = _vertex_stress(mesh, element, u, mu, lame)
    r = np.hypot(mesh.p[0], mesh.p[1])
    bore = np.abs(r - ring.bore_radius) < 1e-3 * ring.bore_radius
    corner = bore & ((np.abs(mesh.p[2]) < tiny) | (np.abs(mesh.p[2] - ring.thickness) < tiny))
    edge = 0.0
    if drilled:
        rho = np.hypot(mesh.p[0] - ring.bolt_circle_radius, mesh.p[1])
        edge = stress[np.abs(rho - 0.5 * ring.hole_diameter) < 1e-3 * ring.hole_diameter].max()
    nodal = basis.nodal_dofs[2]
    low = np.abs(mesh.p[2]) < tiny
    slope = np.polyfit(r[low], u[nodal][low], 1)[0]
    return Solved(float(stress[corner].max()), float(edge), float(-slope) if slope < 0 else float(slope), float(arm), basis.N)


def _vertex_stress(mesh, element, u, mu, lame):
    """Von Mises stress at the vertices, averaged over the cells that share one."""
    corners = skfem.ElementHex1().doflocs.T  # the reference cube, in the order of the cell's vertices
    at = skfem.Basis(mesh, element, quadrature=(np.asarray(corners, dtype=float), np.ones(8)))
    gradient = np.asarray(at.interpolate(u).grad)
    strain = 0.5 * (gradient + gradient.swapaxes(0, 1))
    spherical = strain[0, 0] + strain[1, 1] + strain[2, 2]
    s = 2 * mu * strain + lame * spherical * np.eye(3)[:, :, None, None]
    mises = np.sqrt(0.5 * ((s[0, 0] - s[1, 1]) ** 2 + (s[1, 1] - s[2, 2]) ** 2 + (s[2, 2] - s[0, 0]) ** 2) + 3 * (s[0, 1] ** 2 + s[1, 2] ** 2 + s[0, 2] ** 2))
    total, count = np.zeros(mesh.p.shape[1]), np.zeros(mesh.p.shape[1])
    np.add.at(total, mesh.t.T, mises)
    np.add.at(count, mesh.t.T, 1.0)
    return total / count
