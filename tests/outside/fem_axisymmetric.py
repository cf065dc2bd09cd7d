"""Axisymmetric finite elements with scikit-fem (a general-purpose library) to check the ring formulas: quadratic quadrilaterals,
linear elastic ring, hub as an elastic bed that pushes but does not pull, bolts as a band of pressure round the bolt circle."""

from dataclasses import dataclass

import numpy as np
from scipy.sparse.linalg import splu
from skfem import Basis, BilinearForm, ElementQuad2, ElementTriP2, ElementVector, FacetBasis, LinearForm, MeshQuad, MeshTri


@dataclass
class RingResult:
    lever_arm: float
    energy_rotation: float
    mean_slope: float
    corner_stress: float
    peak_stress: float
    lifted: bool


def grid_lines(points, size, grading=1.0):
    """Grid lines through the given points, spaced no wider than `size`."""
    points = sorted(set(points))
    lines = [np.linspace(p, q, max(1, int(np.ceil((q - p) / size - 1e-9))) + 1)[:-1] for p, q in zip(points, points[1:])]
    return np.concatenate([*lines, [points[-1]]])


def strain(u, w):
    """Radial, axial, hoop and shear (engineering) strain of a displacement field at quadrature points; w.x[0] is the radius."""
    g = u.grad
    return np.array([g[0, 0], g[1, 1], u[0] / w.x[0], g[0, 1] + g[1, 0]])


def stiffness_matrix(modulus, poisson):
    c = modulus / ((1 + poisson) * (1 - 2 * poisson))
    d = np.full((4, 4), c * poisson)
    d[3, :] = d[:, 3] = 0
    d[range(3), range(3)] = c * (1 - poisson)
    d[3, 3] = modulus / (2 * (1 + poisson))
    return d


def von_mises(s):
    return np.sqrt(0.5 * ((s[0] - s[1]) ** 2 + (s[1] - s[2]) ** 2 + (s[2] - s[0]) ** 2) + 3 * s[3] ** 2)


def ring_basis(r_i, r_o, r_b, a, b, t, load_width, elements_through):
    """Mesh of the ring's section (hub below, nuts above), its basis, and facet bases of contact annulus and nut band."""
    half = min(load_width / 2, 0.98 * (b - r_b), 0.98 * (r_b - a))
    size = t / elements_through
    r_lines = grid_lines([a, r_i, r_o, r_b - half, r_b + half, b], min(size, (r_o - r_i) / 8, (b - a) / 16))
    mesh = MeshQuad.init_tensor(r_lines, np.linspace(0, t, elements_through + 1))
    element = ElementVector(ElementQuad2())
    basis = Basis(mesh, element, intorder=4)
    edge = 1e-9 * b
    contact = mesh.facets_satisfying(lambda x: (np.abs(x[1]) < edge) & (x[0] > r_i) & (x[0] < r_o), boundaries_only=True)
    nuts = mesh.facets_satisfying(lambda x: (np.abs(x[1] - t) < edge) & (np.abs(x[0] - r_b) < half), boundaries_only=True)
    return mesh, basis, FacetBasis(mesh, element, facets=contact, intorder=6), FacetBasis(mesh, element, facets=nuts, intorder=4), half


def load_vector(nut_basis, half):
    """Unit total load downward, spread so that its resultant lies on the bolt circle."""

    @LinearForm
    def load(v, w):
        return -v[1] / (2 * np.pi * 2 * half)  # pressure times radius is even over the band

    return load.assemble(nut_basis)


def contact_form(bed_stiffness):
    @BilinearForm
    def contact(u, v, w):
        return bed_stiffness * w["pushing"] * u[1] * v[1] * w.x[0]

    return contact


def solve_elastic_ring(r_i, r_o, r_b, a, b, t, modulus, poisson, hub_modulus, hub_thickness, load_width, elements_through=8):
    """Ring under unit total bolt load (1 N); everything in m, Pa. The forms leave the common factor 2 pi out."""
    mesh, basis, contact_basis, nut_basis, half = ring_basis(r_i, r_o, r_b, a, b, t, load_width, elements_through)
    u, sinking, stiffness, d = settle(basis, contact_basis, nut_basis, half, modulus, poisson, hub_modulus / hub_thickness)
    return ring_result(mesh, basis, contact_basis, d, stiffness, u, sinking, r_b, t)


def solve_polygon_ring(points, triangles, contact_height, r_i, r_o, r_b, nut_height, half, modulus, poisson, bed_stiffness):
    """Any section on a given triangle mesh: lever arm [m], best-fitting rotation [rad/N], nodal displacements' basis, hoop stress at the nodes."""
    mesh = MeshTri(points.T, triangles.T)
    element = ElementVector(ElementTriP2())
    basis = Basis(mesh, element, intorder=4)
    edge = 1e-6 * np.ptp(points)
    facets = [
        mesh.facets_satisfying(lambda x, z=z, low=low, high=high: (np.abs(x[1] - z) < edge) & (x[0] > low) & (x[0] < high), boundaries_only=True)
        for z, low, high in ((contact_height, r_i, r_o), (nut_height, r_b - half, r_b + half))
    ]
    contact_basis, nut_basis = (FacetBasis(mesh, element, facets=f, intorder=6) for f in facets)
    u, sinking, _, d = settle(basis, contact_basis, nut_basis, half, modulus, poisson, bed_stiffness)
    r = contact_basis.global_coordinates()[0]
    push = sinking * r * contact_basis.dx
    x, weight = basis.global_coordinates(), basis.dx
    shift = [np.sum(weight * c) / np.sum(weight) for c in x]
    field = np.asarray(basis.interpolate(u))
    mean = [np.sum(weight * f) / np.sum(weight) for f in field]
    rotation = np.sum(weight * ((x[1] - shift[1]) * (field[0] - mean[0]) - (x[0] - shift[0]) * (field[1] - mean[1]))) / np.sum(weight * ((x[0] - shift[0]) ** 2 + (x[1] - shift[1]) ** 2))
    stress = von_mises(np.einsum("ij,j...->i...", d, strain(basis.interpolate(u), _Coordinates(basis))))
    return r_b - np.sum(push * r) / np.sum(push), rotation, x, stress


def settle(basis, contact_basis, nut_basis, half, modulus, poisson, bed_stiffness):
    """Displacements, sinking at the contact points, ring stiffness and elasticity once the one-sided contact has settled."""
    d = stiffness_matrix(modulus, poisson)

    @BilinearForm
    def elastic(u, v, w):
        return np.einsum("i...,ij,j...->...", strain(v, w), d, strain(u, w)) * w.x[0]

    stiffness = elastic.assemble(basis)
    load = load_vector(nut_basis, half)
    bed = contact_form(bed_stiffness)
    pushing = np.ones(contact_basis.global_coordinates()[0].shape)
    for _ in range(50):
        u = splu((stiffness + bed.assemble(contact_basis, pushing=pushing)).tocsc()).solve(load)
        sinking = -np.asarray(contact_basis.interpolate(u))[1]
        now = (sinking > 0).astype(float)
        if np.array_equal(now, pushing):
            break
        pushing = now
    else:
        raise AssertionError("contact did not settle")
    return u, np.maximum(sinking, 0), stiffness, d


def ring_result(mesh, basis, contact_basis, d, stiffness, u, sinking, r_b, t):
    r = contact_basis.global_coordinates()[0]
    push = sinking * r * contact_basis.dx
    arm = r_b - np.sum(push * r) / np.sum(push)
    corner = basis_at(basis, mesh, (mesh.p[0].min(), t))
    stress = np.einsum("ij,j...->i...", d, corner(u))
    # all over the ring but at the nut band's own pressure: the peak is at the bore
    everywhere = np.einsum("ij,j...->i...", d, strain(basis.interpolate(u), _Coordinates(basis)))
    bottom = np.argsort(mesh.p[0] + 1e-6 * mesh.p[1])
    u_z = u[basis.nodal_dofs[1]]
    inner, outer = bottom[0], bottom[-1]
    slope = -(u_z[outer] - u_z[inner]) / (mesh.p[0, outer] - mesh.p[0, inner])
    energy = 2 * np.pi * u @ (stiffness @ u)
    return RingResult(arm, energy / arm, slope, float(von_mises(stress)), float(von_mises(everywhere).max()), bool((sinking == 0).any()))


class _Coordinates:
    def __init__(self, basis):
        self.x = basis.global_coordinates()


def basis_at(basis, mesh, point):
    """Strain at a corner of the mesh, from the one element there."""
    element_at = np.argmin(np.abs(mesh.p[0, mesh.t] - point[0]).min(axis=0) + np.abs(mesh.p[1, mesh.t] - point[1]).min(axis=0))
    local = mesh.mapping().invF(np.array(point).reshape(2, 1, 1), tind=np.array([element_at]))
    one = Basis(mesh, basis.elem, elements=np.array([element_at]), quadrature=(local[:, 0, :], np.ones(1)))
    return lambda u: strain(one.interpolate(u), _Coordinates(one))[:, 0, 0]
