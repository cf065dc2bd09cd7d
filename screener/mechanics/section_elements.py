"""Six-node axisymmetric triangles on a section mesh: stiffness, line loads, stress. Modulus 1: divide displacements by the true modulus.

Source: the isoparametric six-node triangle and axisymmetric strains of any finite-element text, e.g. Zienkiewicz and Taylor. The factor
2 pi of the circumference is left out of stiffness and loads alike, so loads are per radian.
"""

import numpy as np
from scipy.sparse import coo_matrix

# symmetric rule of 6 points, exact for polynomials of degree 4 (Dunavant 1985)
_A, _B, _WA, _WB = 0.445948490915965, 0.091576213509771, 0.223381589678011, 0.109951743655322
STIFFNESS_POINTS = np.array([[_A, _A], [1 - 2 * _A, _A], [_A, 1 - 2 * _A], [_B, _B], [1 - 2 * _B, _B], [_B, 1 - 2 * _B]])
STIFFNESS_WEIGHTS = np.array([_WA] * 3 + [_WB] * 3) / 2
STRESS_POINTS = np.array([[1 / 6, 1 / 6], [2 / 3, 1 / 6], [1 / 6, 2 / 3]])
LINE_POINTS, LINE_WEIGHTS = (np.array([-np.sqrt(0.6), 0, np.sqrt(0.6)]) + 1) / 2, np.array([5, 8, 5]) / 18


def shape_functions(points):
    """Values (points, 6) and slopes (points, 6, 2) of the six-node triangle's shape functions at local coordinates (points, 2)."""
    x, y = points.T
    s = 1 - x - y
    value = np.stack([s * (2 * s - 1), x * (2 * x - 1), y * (2 * y - 1), 4 * s * x, 4 * x * y, 4 * y * s], axis=1)
    zero = np.zeros_like(x)
    by_x = np.stack([1 - 4 * s, 4 * x - 1, zero, 4 * (s - x), 4 * y, -4 * y], axis=1)
    by_y = np.stack([1 - 4 * s, zero, 4 * y - 1, -4 * x, 4 * x, 4 * (s - y)], axis=1)
    return value, np.stack([by_x, by_y], axis=2)


def line_shape_functions(position):
    """Values (points, 3) at positions 0..1 along a side: first end, second end, middle."""
    p = np.asarray(position)
    return np.stack([(1 - p) * (1 - 2 * p), p * (2 * p - 1), 4 * p * (1 - p)], axis=1)


def elasticity(poisson_ratio):
    """Stress from strain (radial, axial, hoop, shear) for unit modulus, (4, 4)."""
    c = 1 / ((1 + poisson_ratio) * (1 - 2 * poisson_ratio))
    d = np.zeros((4, 4))
    d[:3, :3] = c * poisson_ratio
    d[range(3), range(3)] = c * (1 - poisson_ratio)
    d[3, 3] = 1 / (2 * (1 + poisson_ratio))
    return d


def strain_matrices(mesh, local_points):
    """Strain by nodal displacement (elements, points, 4, 12), radius and area weight (elements, points); sides are straight."""
    value, slope = shape_functions(local_points)
    corners = mesh.points[mesh.triangles[:, :3]]
    edge1, edge2 = corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0]
    determinant = edge1[:, 0] * edge2[:, 1] - edge1[:, 1] * edge2[:, 0]
    inverse = np.stack([np.stack([edge2[:, 1], -edge2[:, 0]], 1), np.stack([-edge1[:, 1], edge1[:, 0]], 1)], 1) / determinant[:, None, None]
    gradient = np.einsum("pnl,elx->epnx", slope, inverse)
    radius = np.einsum("pn,en->ep", value, mesh.points[mesh.triangles, 0])
    b = np.zeros((*radius.shape, 4, 12))
    b[:, :, 0, 0::2] = b[:, :, 3, 1::2] = gradient[..., 0]
    b[:, :, 1, 1::2] = b[:, :, 3, 0::2] = gradient[..., 1]
    b[:, :, 2, 0::2] = value[None] / radius[..., None]
    return b, radius, determinant


def stiffness(mesh, poisson_ratio):
    """Stiffness matrix for unit modulus, per radian, (2 nodes, 2 nodes) sparse; unknowns radial, axial at each node."""
    b, radius, determinant = strain_matrices(mesh, STIFFNESS_POINTS)
    weight = radius * determinant[:, None] * STIFFNESS_WEIGHTS
    element = np.einsum("epij,epik->ejk", np.einsum("ij,epjk->epik", elasticity(poisson_ratio), b) * weight[..., None, None], b, optimize=True)
    unknowns = np.stack([2 * mesh.triangles, 2 * mesh.triangles + 1], axis=2).reshape(len(b), 12)
    rows, columns = np.repeat(unknowns, 12, axis=1), np.tile(unknowns, (1, 12))
    size = 2 * len(mesh.points)
    return coo_matrix((element.ravel(), (rows.ravel(), columns.ravel())), shape=(size, size)).tocsc()


def nodal_stress(mesh, poisson_ratio, displacement):
    """Stress (radial, axial, hoop, shear) at the triangles' corners for unit modulus, (nodes, 4); NaN at mid-side nodes.

    Taken at three points inside each triangle, continued linearly to its corners and averaged there.
    """
    b, _, _ = strain_matrices(mesh, STRESS_POINTS)
    unknowns = np.stack([2 * mesh.triangles, 2 * mesh.triangles + 1], axis=2).reshape(len(b), 12)
    at_points = np.einsum("ij,epjk,ek->epi", elasticity(poisson_ratio), b, displacement[unknowns], optimize=True)
    to_corners = np.full((3, 3), -1 / 3) + np.eye(3) * 2
    at_corners = np.einsum("cp,epi->eci", to_corners, at_points)
    total, count = np.zeros((len(mesh.points), 4)), np.zeros(len(mesh.points))
    np.add.at(total, mesh.triangles[:, :3], at_corners)
    np.add.at(count, mesh.triangles[:, :3], 1.0)
    return total / np.where(count > 0, count, np.nan)[:, None]


def von_mises(stress):
    """Von Mises stress of (n, 4) radial, axial, hoop, shear."""
    r, z, h, s = stress.T
    return np.sqrt(((r - z) ** 2 + (z - h) ** 2 + (h - r) ** 2) / 2 + 3 * s**2)


def sides_on_face(mesh, height, inner_radius, outer_radius):
    """Sides (n, 3: ends then middle) lying at a height between two radii, ordered outward; only outline sides can lie there if it is a face."""
    tolerance = 1e-6 * mesh.size
    triples = mesh.triangles[:, [[0, 1, 3], [1, 2, 4], [2, 0, 5]]].reshape(-1, 3)
    triples = np.where((mesh.points[triples[:, 0], 0] > mesh.points[triples[:, 1], 0])[:, None], triples[:, [1, 0, 2]], triples)
    r, z = mesh.points[triples[:, :2], 0], mesh.points[triples[:, :2], 1]
    on = (np.abs(z - height) < tolerance).all(axis=1) & (r[:, 0] > inner_radius - tolerance) & (r[:, 1] < outer_radius + tolerance)
    triples = np.unique(triples[on], axis=0)
    return triples[np.argsort(mesh.points[triples[:, 0], 0])]
