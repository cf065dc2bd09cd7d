"""Where the joints lie on the page's map, in metres or feet."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pyproj
import shapely

from screener.outputs.page_data import PageData
from screener.screening import Screening

METRES_PER_DEGREE = 111_320.0
"""Of latitude, on the mean sphere; the map is drawn, not surveyed."""
METRES_PER_FOOT = 0.3048
MOST_VERTICES = 200_000
NAMED = 5


@dataclass(frozen=True, eq=False)
class Places:
    """x, y per joint of the page (NaN without a place), mains as lists of lines, and the scale.

    frame: west, south, east, north of the first view, which leaves out joints far from all others.
    unit: "m" or "ft", "" where it is not known and no scale bar may be drawn. words: what the reader must know.
    """

    x: np.ndarray
    y: np.ndarray
    mains_x: list[np.ndarray]
    mains_y: list[np.ndarray]
    unit: str
    frame: tuple[float, float, float, float]
    words: str


def page_places(screening: Screening, data: PageData, mains=None) -> Places | None:
    """Places of the page's joints; None when no joint has one."""
    x, y = screening.inventory.place
    if x is None:
        return None
    position = data.joints["position"].to_numpy()
    x, y = np.asarray(x, dtype=float)[position], np.asarray(y, dtype=float)[position]
    placed = np.isfinite(x) & np.isfinite(y)
    if not placed.any():
        return None
    x, y = np.where(placed, x, np.nan), np.where(placed, y, np.nan)
    scale_x, scale_y, metres = _metres(screening.inventory.crs, float(np.nanmedian(y)))
    unit = "" if not metres else "ft" if screening.settings.units == "us" else "m"
    if unit == "ft":
        scale_x, scale_y = scale_x / METRES_PER_FOOT, scale_y / METRES_PER_FOOT
    lines_x, lines_y, note = _lines(mains, scale_x, scale_y)
    x, y = x * scale_x, y * scale_y
    frame, far = first_view(x, y)
    words = [] if metres else ["The file does not say which coordinate reference system it is in, so the map has no scale."]
    if not placed.all():
        words.append(f"{int((~placed).sum()):,} joints have no place and are only in the table.")
    if far.any():
        some = ", ".join(data.joints["joint_id"].to_numpy()[far][::-1][:NAMED])
        words.append(f"{int(far.sum()):,} joints lie far from all others, outside the first view; their coordinates may be wrong: {some}{', ...' if far.sum() > NAMED else ''}.")
    return Places(x, y, lines_x, lines_y, unit, frame, " ".join([*words, note]).strip())


def first_view(x: np.ndarray, y: np.ndarray) -> tuple[tuple[float, float, float, float], np.ndarray]:
    """(west, south, east, north) around the mass of the joints, and which lie far outside it.

    Far: beyond the middle nine tenths of the joints, along either axis, by more than twice their width.
    """
    near = np.isfinite(x) & np.isfinite(y)
    for values in (x, y):
        low, high = np.nanquantile(values, [0.05, 0.95])
        reach = 2 * (high - low)
        if reach > 0:
            near &= (values >= low - reach) & (values <= high + reach)
    frame = (float(x[near].min()), float(y[near].min()), float(x[near].max()), float(y[near].max()))
    return frame, np.isfinite(x) & np.isfinite(y) & ~near


def _metres(crs, latitude: float) -> tuple[float, float, bool]:
    """(factor of x, factor of y, whether the products are metres)."""
    if crs is None:
        return 1.0, 1.0, False
    system = pyproj.CRS.from_user_input(crs)
    if system.is_geographic:
        return METRES_PER_DEGREE * float(np.cos(np.radians(np.clip(latitude, -85, 85)))), METRES_PER_DEGREE, True
    axes = system.axis_info
    factor = float(axes[0].unit_conversion_factor) if axes else 0.0
    return (factor, factor, True) if factor > 0 else (1.0, 1.0, False)


def _lines(mains, scale_x: float, scale_y: float) -> tuple[list[np.ndarray], list[np.ndarray], str]:
    if mains is None:
        return [], [], ""
    geometry = mains.geometry.dropna()
    lines = shapely.get_parts(np.asarray(geometry.array, dtype=object))
    vertices = int(shapely.get_num_coordinates(lines).sum())
    if vertices > MOST_VERTICES:
        west, south, east, north = shapely.total_bounds(lines)
        lines = shapely.simplify(lines, max(east - west, north - south) / 4000)
    xs, ys = [], []
    for line in lines:
        corners = shapely.get_coordinates(line)
        if len(corners) > 1 and np.isfinite(corners).all():
            xs.append(corners[:, 0] * scale_x)
            ys.append(corners[:, 1] * scale_y)
    return xs, ys, "Mains are drawn simplified." if vertices > MOST_VERTICES else ""
