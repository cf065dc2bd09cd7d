"""Triangle mesh of a ring's section given as a polygon in the (r, z) plane: checks of the polygon, Delaunay triangles, mid-side nodes."""

from dataclasses import dataclass

import numpy as np
from scipy.spatial import Delaunay, QhullError

MOST_TRIANGLES = 8000
MOST_CORNERS = 500
ELEMENTS_THROUGH_MEAN_THICKNESS = 4


class SectionError(ValueError):
    """The polygon or what is asked of it cannot be a backing ring's section; the text says what, where and what would do."""


@dataclass(frozen=True, eq=False)
class SectionMesh:
    """points: (nodes, 2) radius and height [m]; triangles: (elements, 6) corners then mid-sides 01, 12, 20; size: wanted side length [m]"""

    points: np.ndarray
    triangles: np.ndarray
    size: float


def checked_polygon(polygon):
    """The polygon as an array of corners (n, 2) of (radius, height) [m], anticlockwise, without a repeated last corner.

    Raises `SectionError` if it is not closed by at least three corners, has unknown or non-positive radii, no area, or crosses itself.
    """
    corners = np.array(polygon, dtype=float)
    if corners.ndim != 2 or corners.shape[1] != 2:
        raise SectionError("a section needs a list of (radius, height) corners in m")
    if not np.isfinite(corners).all():
        raise SectionError("the section has a corner with an unknown radius or height; give every corner as two numbers in m")
    scale = np.ptp(corners, axis=0).max() if len(corners) else 0.0
    if len(corners) > 1 and np.abs(corners[0] - corners[-1]).max() <= 1e-9 * scale:
        corners = corners[:-1]
    if not 3 <= len(corners) <= MOST_CORNERS:
        raise SectionError(f"a section needs 3 to {MOST_CORNERS} different corners; this one has {len(corners)}")
    if corners[:, 0].min() <= 0:
        raise SectionError("the section reaches the axis; every corner's radius must be larger than zero")
    ahead = np.roll(corners, -1, axis=0)
    if np.any(np.abs(ahead - corners).max(axis=1) <= 1e-9 * scale):
        raise SectionError("the section has two neighbouring corners in the same place; leave one out")
    doubled_area = np.sum(corners[:, 0] * ahead[:, 1] - ahead[:, 0] * corners[:, 1])
    side, last = ahead - corners, corners - np.roll(corners, 1, axis=0)
    folded = (np.abs(_cross(last, side)) <= 1e-9 * scale**2) & ((last * side).sum(axis=1) < 0)
    if folded.any():
        raise SectionError(f"the section's outline doubles back on itself at corner {np.argmax(folded) + 1}")
    crossing = _first_crossing(corners)
    if crossing is not None:
        raise SectionError(f"the section crosses or touches itself between corners {crossing[0] + 1} and {crossing[1] + 1}; list the corners in order round the outline")
    if abs(doubled_area) <= 1e-9 * scale**2:
        raise SectionError("the section has no area; list the corners in order round the outline")
    return corners if doubled_area > 0 else corners[::-1]


def _cross(u, v):
    return u[..., 0] * v[..., 1] - u[..., 1] * v[..., 0]


def _first_crossing(corners):
    """Indices of the first two sides, not neighbours, that meet; None if none do."""
    start, end = corners, np.roll(corners, -1, axis=0)
    count = len(corners)
    for i in range(count - 1):
        others = np.arange(i + 2, count - (i == 0))
        if len(others) == 0:
            continue
        side = end[i] - start[i]
        a, b = _cross(side, start[others] - start[i]), _cross(side, end[others] - start[i])
        other = end[others] - start[others]
        c, d = _cross(other, start[i] - start[others]), _cross(other, end[i] - start[others])
        overlap = np.all((np.maximum(start[others], end[others]) >= np.minimum(start[i], end[i])) & (np.minimum(start[others], end[others]) <= np.maximum(start[i], end[i])), axis=1)
        meets = (a * b <= 0) & (c * d <= 0) & overlap
        if meets.any():
            return i, int(others[np.argmax(meets)])
    return None


def inside(corners, points):
    """Which of the points (m, 2) lie inside the polygon: crossings of a ray to larger radius, odd."""
    x, y = points[:, 0][:, None], points[:, 1][:, None]
    (x1, y1), (x2, y2) = corners.T, np.roll(corners, -1, axis=0).T
    rise = np.where(y2 == y1, 1.0, y2 - y1)
    crossed = ((y1 > y) != (y2 > y)) & (x < x1 + (y - y1) / rise * (x2 - x1))
    return crossed.sum(axis=1) % 2 == 1


def distance_to_outline(corners, points):
    """Distance of each point (m, 2) from the polygon's sides [m]."""
    side = np.roll(corners, -1, axis=0) - corners
    offset = points[:, None, :] - corners[None]
    along = np.clip((offset * side).sum(axis=2) / (side**2).sum(axis=1), 0, 1)
    return np.sqrt(((offset - along[..., None] * side) ** 2).sum(axis=2)).min(axis=1)


def mesh_section(corners, size=None):
    """Mesh of a checked polygon: `SectionMesh`. Corners in the middle of straight sides are kept as nodes. `size` in m; by default a quarter
    of the mean thickness (area over half the outline). Raises `SectionError` if the outline is too fine to mesh within the element limit."""
    ahead = np.roll(corners, -1, axis=0)
    area = np.sum(_cross(corners, ahead)) / 2
    lengths = np.sqrt(((ahead - corners) ** 2).sum(axis=1))
    if size is None:
        size = 2 * area / lengths.sum() / ELEMENTS_THROUGH_MEAN_THICKNESS
    if 2.5 * area / size**2 > MOST_TRIANGLES:
        raise SectionError("the section is too thin for its width to be meshed; describe it with a thicker outline or as a flat ring")
    outline = np.concatenate([start + (end - start) * np.arange(n)[:, None] / n for start, end, n in zip(corners, ahead, np.ceil(lengths / size - 1e-9).astype(int))])
    inner = _inner_points(corners, size)
    triangles, outline = _conforming_triangles(corners, outline, inner, area)
    points = np.concatenate([outline, inner])
    return _with_mid_sides(points, triangles, size)


def _inner_points(corners, size):
    """Points of a triangular lattice inside the outline and at least 0.6 of a side length away from it."""
    low, high = corners.min(axis=0), corners.max(axis=0)
    rows = np.arange(low[1], high[1], size * np.sqrt(3) / 2)
    columns = np.arange(low[0], high[0] + size, size)
    r = columns[None, :] + np.where(np.arange(len(rows)) % 2, size / 2, 0.0)[:, None]
    points = np.column_stack([r.ravel(), np.broadcast_to(rows[:, None], r.shape).ravel()])
    points = points[inside(corners, points)]
    return points[distance_to_outline(corners, points) > 0.6 * size] if len(points) else points


def _conforming_triangles(corners, outline, inner, area):
    """Delaunay triangles inside the outline; an outline segment that is missing is halved until all are there."""
    for _ in range(12):
        points = np.concatenate([outline, inner])
        try:
            triangles = Delaunay(points).simplices
        except QhullError as error:
            raise SectionError("the section could not be divided into triangles; check its corners") from error
        p, q, s = (points[triangles[:, i]] for i in range(3))
        doubled = _cross(q - p, s - p)
        triangles = np.where((doubled < 0)[:, None], triangles[:, [0, 2, 1]], triangles)
        kept = (np.abs(doubled) > 1e-9 * area / len(triangles)) & inside(corners, (p + q + s) / 3)
        sides = np.sort(triangles[kept][:, [[0, 1], [1, 2], [2, 0]]].reshape(-1, 2), axis=1)
        count = len(outline)
        wanted = np.sort(np.column_stack([np.arange(count), (np.arange(count) + 1) % count]), axis=1)
        width = len(points)
        missing = ~np.isin(wanted @ [width, 1], sides @ [width, 1])
        if not missing.any():
            if abs(np.abs(doubled[kept]).sum() / 2 / area - 1) < 1e-6:
                return triangles[kept], outline
            break
        where = np.flatnonzero(missing)
        middle = (outline[where] + outline[(where + 1) % count]) / 2
        outline = np.insert(outline, where + 1, middle, axis=0)
    raise SectionError("the section could not be divided into triangles; its corners are too sharp or too close together")


def _with_mid_sides(points, triangles, size):
    sides = np.sort(triangles[:, [[0, 1], [1, 2], [2, 0]]].reshape(-1, 2), axis=1)
    unique, number = np.unique(sides, axis=0, return_inverse=True)
    middles = (points[unique[:, 0]] + points[unique[:, 1]]) / 2
    all_points = np.concatenate([points, middles])
    return SectionMesh(all_points, np.column_stack([triangles, len(points) + number.reshape(-1, 3)]), size)
