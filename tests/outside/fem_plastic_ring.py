"""Axisymmetric elastic-plastic finite elements (scikit-fem): von Mises, perfectly plastic, backward-Euler return mapping with its
consistent tangent, one-sided elastic hub; the ring's rotation is prescribed and the bolt load found."""

import numpy as np
from scipy.sparse.linalg import splu
from skfem import BilinearForm, LinearForm

from fem_axisymmetric import _Coordinates, contact_form, load_vector, ring_basis, stiffness_matrix, strain

DEVIATOR = np.eye(4)
DEVIATOR[:3, :3] -= 1 / 3


def return_mapping(total_strain, plastic_strain, d, shear_modulus, yield_strength):
    """Stress, new plastic strain (engineering shear) and consistent tangent at all quadrature points."""
    trial = np.einsum("ij,j...->i...", d, total_strain - plastic_strain)
    deviator = np.einsum("ij,j...->i...", DEVIATOR, trial)
    weight = np.array([1, 1, 1, 2])[:, None, None]
    norm = np.sqrt((weight * deviator**2).sum(axis=0))
    radius = np.sqrt(2 / 3) * yield_strength
    yields = norm > radius
    safe_norm = np.where(yields, norm, 1.0)
    n = deviator / safe_norm
    slip = np.where(yields, (norm - radius) / (2 * shear_modulus), 0.0)
    stress = trial - 2 * shear_modulus * slip * n
    plastic = plastic_strain + slip * n * weight
    share = np.where(yields, 2 * shear_modulus * slip / safe_norm, 0.0)
    deviatoric_stiffness = 2 * shear_modulus * DEVIATOR @ np.diag([1, 1, 1, 0.5])
    tangent = d[:, :, None, None] - share * deviatoric_stiffness[:, :, None, None] - 2 * shear_modulus * np.where(yields, 1 - share, 0.0) * n[:, None] * n[None, :]
    return stress, plastic, tangent


def load_rotation_curve(r_i, r_o, r_b, a, b, t, modulus, poisson, yield_strength, hub_modulus, hub_thickness, load_width, rotations, elements_through=6):
    """Total bolt load [N] and lever arm [m] at each prescribed mean slope [rad] of the ring's underside; a falling rotation unloads."""
    mesh, basis, contact_basis, nut_basis, half = ring_basis(r_i, r_o, r_b, a, b, t, load_width, elements_through)
    d, shear_modulus = stiffness_matrix(modulus, poisson), modulus / (2 * (1 + poisson))
    load = load_vector(nut_basis, half)
    bed_stiffness = hub_modulus / hub_thickness
    bed = contact_form(bed_stiffness)
    underside = np.argsort(mesh.p[0] + 1e-6 * mesh.p[1])[[0, -1]]
    slope = np.zeros(basis.N)
    slope[basis.nodal_dofs[1, underside]] = np.array([1, -1]) / (b - a)

    @LinearForm
    def push_back(v, w):
        return bed_stiffness * w["sinking"] * v[1] * w.x[0]

    u, level = np.zeros(basis.N), 0.0
    plastic = np.zeros((4, *basis.global_coordinates().shape[1:]))
    where = _Coordinates(basis)
    found = []
    for rotation in rotations:
        for iteration in range(40):
            stress, new_plastic, tangent = return_mapping(strain(basis.interpolate(u), where), plastic, d, shear_modulus, yield_strength)
            sinking = np.maximum(-np.asarray(contact_basis.interpolate(u))[1], 0)

            @BilinearForm
            def stiffness(u, v, w):
                return np.einsum("i...,ij...,j...->...", strain(v, w), tangent, strain(u, w)) * w.x[0]

            @LinearForm
            def inner(v, w):
                return np.einsum("i...,i...->...", strain(v, w), stress) * w.x[0]

            pushing = np.ones_like(sinking) if not u.any() else (sinking > 0).astype(float)
            matrix = stiffness.assemble(basis) + bed.assemble(contact_basis, pushing=pushing)
            residual = inner.assemble(basis) - push_back.assemble(contact_basis, sinking=sinking)
            solver = splu(matrix.tocsc())
            by_load, by_residual = solver.solve(load), solver.solve(residual)
            new_level = (rotation - slope @ (u - by_residual)) / (slope @ by_load)
            change = -by_residual + new_level * by_load
            u, level = u + change, new_level
            if np.abs(change).max() < 1e-7 * np.abs(u).max():
                break
        else:
            raise AssertionError(f"no equilibrium found at rotation {rotation}")
        plastic = new_plastic
        r = contact_basis.global_coordinates()[0]
        push = np.maximum(-np.asarray(contact_basis.interpolate(u))[1], 0) * r * contact_basis.dx
        found.append((level, r_b - np.sum(push * r) / np.sum(push)))
    return np.array(found).T
