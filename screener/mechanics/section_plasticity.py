"""The load at which a whole section of any outline yields under a uniform twisting couple."""

import numpy as np

from .section_mesh import checked_polygon


def section_plastic_couple(polygon, strips=2000):
    """Fully plastic hoop bending moment for unit yield stress, integral of |z - z_p| dA with z_p halving the area [m3].

    Corners (n, 2) of radius and height in m. Source: plastic bending of a section (any strength-of-materials text); flat plate: t^2 (b - a)/4.
    The widths are taken on `strips` heights, exact to about 1/strips.
    """
    corners = checked_polygon(polygon)
    ahead = np.roll(corners, -1, axis=0)
    low, high = corners[:, 1].min(), corners[:, 1].max()
    height = low + (np.arange(strips) + 0.5) / strips * (high - low)
    # Signed crossings of each level with each side add up to the width there.
    z0, z1 = corners[:, 1], ahead[:, 1]
    crosses = (z0[None, :] <= height[:, None]) != (z1[None, :] <= height[:, None])
    run = np.where(z1 == z0, 1.0, z1 - z0)
    radius = corners[:, 0] + (height[:, None] - z0) / run * (ahead[:, 0] - corners[:, 0])
    width = np.abs(np.where(crosses, radius * np.sign(z1 - z0), 0.0).sum(axis=1))
    area = np.cumsum(width)
    middle = height[np.searchsorted(area, area[-1] / 2)]
    return float((width * np.abs(height - middle)).sum() * (high - low) / strips)
