"""Ring and stub end as two elastic bodies (scikit-fem, axisymmetric quadratic quadrilaterals): frictionless one-sided contact between ring and
collar and between the collar's face and a rigid plane (the mirror plane of two equal stub ends, or a steel face), pipe attached to the collar."""

from dataclasses import dataclass

import numpy as np
from scipy.sparse import block_diag, coo_matrix
from scipy.sparse.linalg import splu
from skfem import Basis, BilinearForm, ElementQuad2, ElementVector, FacetBasis, LinearForm, MeshQuad

from fem_axisymmetric import grid_lines, load_vector, stiffness_matrix, strain


@dataclass
class HubBodyResult:
    lever_arm: float
    mean_slope: float
    contact_share: float
    face_share: float
    face_mean_radius: float


def stub_end_mesh(pipe_bore, pipe_outer, rim, collar_thickness, pipe_length, r_points, size):
    """Collar from height -h to 0 under the ring, pipe wall from the face up through the ring's bore."""
    r_lines = grid_lines([pipe_bore, pipe_outer, *r_points, rim], size)
    z_lines = np.concatenate([grid_lines([-collar_thickness, 0.0], size), np.linspace(0, pipe_length, int(np.ceil(pipe_length / (2 * size))) + 1)[1:]])
    mesh = MeshQuad.init_tensor(r_lines, z_lines)
    middle = mesh.p[:, mesh.t].mean(axis=1)
    return mesh.remove_elements(np.flatnonzero((middle[0] > pipe_outer) & (middle[1] > 0)))


def elastic_matrix(basis, modulus, poisson):
    d = stiffness_matrix(modulus, poisson)

    @BilinearForm
    def elastic(u, v, w):
        return np.einsum("i...,ij,j...->...", strain(v, w), d, strain(u, w)) * w.x[0]

    return elastic.assemble(basis)


def line_nodes(basis, height, inner, outer):
    """Axial unknowns, radii and integration weights (Simpson, times radius) of nodes on a horizontal line, in order of radius."""
    x = basis.doflocs
    axial = np.concatenate([basis.nodal_dofs[1], basis.facet_dofs[1]])
    scale = np.ptp(x[0])
    on = axial[(np.abs(x[1, axial] - height) < 1e-9 * scale) & (x[0, axial] > inner - 1e-9 * scale) & (x[0, axial] < outer + 1e-9 * scale)]
    on = on[np.argsort(x[0, on])]
    r = x[0, on]
    weight = np.zeros_like(r)
    length = r[2::2] - r[:-2:2]
    for offset, share in ((0, 1 / 6), (1, 4 / 6), (2, 1 / 6)):
        np.add.at(weight, np.arange(len(length)) * 2 + offset, share * length)
    return on, r, weight * r


def solve_ring_on_stub_end(r_i, r_o, r_b, a, b, t, modulus, poisson, load_width, pipe_bore, pipe_outer, collar_thickness, hub_modulus, hub_poisson, face_inner, face_outer, pipe_pull=0.0, bore_pressure=0.0, size_share=8):
    """Unit bolt load (1 N); `pipe_pull` is the share of it carried by tension in the pipe wall, the rest by the face; pressure in the bore [Pa]."""
    ring_size, hub_size = min(t / 6, (r_o - r_i) / 12), collar_thickness / size_share
    half = min(load_width / 2, 0.98 * (b - r_b), 0.98 * (r_b - a))
    nut_edge = r_b - half
    shared = grid_lines([r_i, *([nut_edge] if r_i < nut_edge < r_o else []), r_o], min(ring_size, hub_size))
    beyond = grid_lines([r_o, *([nut_edge] if nut_edge > r_o else []), r_b + half, b], ring_size)
    ring_mesh = MeshQuad.init_tensor(np.unique(np.concatenate([grid_lines([a, r_i], ring_size), shared, beyond])), np.linspace(0, t, 7))
    wall = pipe_outer - pipe_bore
    pipe_length = 6 * np.sqrt(pipe_outer * wall)
    hub_mesh = stub_end_mesh(pipe_bore, pipe_outer, r_o, collar_thickness, pipe_length, [*shared, face_inner, face_outer], hub_size)
    element = ElementVector(ElementQuad2())
    ring_basis, hub_basis = Basis(ring_mesh, element, intorder=4), Basis(hub_mesh, element, intorder=4)
    matrix = block_diag([elastic_matrix(ring_basis, modulus, poisson), elastic_matrix(hub_basis, hub_modulus, hub_poisson)]).tocsr()

    nut_facets = ring_mesh.facets_satisfying(lambda x: (np.abs(x[1] - t) < 1e-9) & (np.abs(x[0] - r_b) < half), boundaries_only=True)
    load = np.concatenate([load_vector(FacetBasis(ring_mesh, element, facets=nut_facets), half), pipe_loads(hub_mesh, element, pipe_length, pipe_bore, pipe_outer, pipe_pull, bore_pressure)])
    above, r_contact, w_contact = line_nodes(ring_basis, 0.0, r_i, r_o)
    below, r_below, _ = line_nodes(hub_basis, 0.0, r_i, r_o)
    np.testing.assert_allclose(r_contact, r_below, rtol=1e-9)
    face, r_face, w_face = line_nodes(hub_basis, -collar_thickness, face_inner, face_outer)
    penalty = 3e3 * hub_modulus / collar_thickness
    shift = ring_basis.N
    u, push, press = settle_two_bodies(matrix, load, above, shift + below, w_contact * penalty, shift + face, w_face * penalty)
    underside = np.argsort(ring_mesh.p[0] + 1e-6 * ring_mesh.p[1])[[0, -1]]
    u_z = u[ring_basis.nodal_dofs[1, underside]]
    return HubBodyResult(
        r_b - np.sum(push * r_contact) / np.sum(push), -(u_z[1] - u_z[0]) / (b - a), np.sum((push > 0) * w_contact) / np.sum(w_contact),
        np.sum((press > 0) * w_face) / np.sum(w_face), np.sum(press * r_face) / max(np.sum(press), 1e-300),
    )  # fmt: skip


def pipe_loads(mesh, element, pipe_length, pipe_bore, pipe_outer, pull, pressure):
    """Upward tension at the pipe's end, even over its wall, `pull` in all; pressure outward on the bore."""
    end = mesh.facets_satisfying(lambda x: np.abs(x[1] - pipe_length) < 1e-9, boundaries_only=True)
    bore = mesh.facets_satisfying(lambda x: np.abs(x[0] - pipe_bore) < 1e-9, boundaries_only=True)

    @LinearForm
    def tension(v, w):
        return pull / (np.pi * (pipe_outer**2 - pipe_bore**2)) * v[1] * w.x[0]

    @LinearForm
    def burst(v, w):
        return pressure * v[0] * w.x[0]

    return tension.assemble(FacetBasis(mesh, element, facets=end)) + burst.assemble(FacetBasis(mesh, element, facets=bore))


def settle_two_bodies(matrix, load, above, below, contact_spring, face, face_spring):
    """Displacements and nodal forces of ring on collar and collar on plane, both one-sided, by active sets."""
    size = matrix.shape[0]
    touching, seated = np.ones(len(above), bool), np.ones(len(face), bool)
    for _ in range(80):
        k, f = contact_spring * touching, face_spring * seated
        rows = np.concatenate([above, above, below, below, face])
        columns = np.concatenate([above, below, above, below, face])
        springs = coo_matrix((np.concatenate([k, -k, -k, k, f]), (rows, columns)), shape=(size, size))
        u = splu((matrix + springs).tocsc()).solve(load)
        closing, sinking = u[below] - u[above], -u[face]
        if np.array_equal(closing > 0, touching) and np.array_equal(sinking > 0, seated):
            return u, contact_spring * np.maximum(closing, 0), face_spring * np.maximum(sinking, 0)
        touching, seated = closing > 0, sinking > 0
    raise AssertionError("contact did not settle")
