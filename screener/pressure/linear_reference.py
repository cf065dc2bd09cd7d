"""Chainage of joints on lines of mains. Coordinates in m of one projected system; the caller has brought them there."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import shapely


@dataclass(frozen=True, eq=False)
class Place:
    """Per joint: main ("" none), chainage from the start of the line and offset from it [m] (NaN none), reason where there is none."""

    main: np.ndarray
    chainage: np.ndarray
    offset: np.ndarray
    reason: np.ndarray


def chainage_on_main(line_names, lines, joint_main, x, y, largest_offset: float) -> Place:
    """Nearest point of its main for every joint; of any main where the joint names none.

    line_names, lines: mains and their (Multi)LineStrings; joint_main: text, "" unknown; largest_offset [m]: a joint further away lies on
    none. A main in several lines is joined end to end; one that stays in parts has no chainage. Of mains equally near the first in order
    of name counts; of points of one line equally near the first along it.
    """
    names, shapes, broken = _joined(line_names, lines)
    wanted = np.asarray(joint_main, dtype=object).astype(str)
    x, y = np.asarray(x, dtype=float), np.asarray(y, dtype=float)
    placed = np.isfinite(x) & np.isfinite(y)
    row = np.full(len(wanted), -1)
    if len(names):
        at = np.searchsorted(names, wanted)
        at = np.where(at < len(names), at, 0)
        row = np.where((wanted != "") & (names[at] == wanted), at, -1)
    points = np.full(len(wanted), None, dtype=object)
    points[placed] = shapely.points(x[placed], y[placed])
    open_rows = np.flatnonzero(placed & (wanted == ""))
    if len(open_rows) and len(names):
        joint, line = shapely.STRtree(shapes).query_nearest(points[open_rows], max_distance=np.nextafter(largest_offset, np.inf), all_matches=True)
        order = np.lexsort((line, joint))
        joint, first = np.unique(joint[order], return_index=True)
        row[open_rows[joint]] = line[order][first]
    found = placed & (row >= 0)
    chainage, offset = np.full(len(wanted), np.nan), np.full(len(wanted), np.nan)
    if found.any():
        chainage[found] = shapely.line_locate_point(shapes[row[found]], points[found])
        offset[found] = shapely.distance(shapes[row[found]], points[found])
    far = found & ~(offset <= largest_offset)
    reason = np.full(len(wanted), "", dtype=object)
    reason[~placed] = "no coordinates"
    reason[placed & ~found & (wanted == "")] = f"no main within {largest_offset:g} m"
    reason[placed & ~found & (wanted != "")] = "its main has no line"
    reason[placed & np.isin(wanted, sorted(broken))] = "the line of its main lies in separate parts"
    reason[far] = f"more than {largest_offset:g} m from its main"
    good = found & ~far
    main = np.full(len(wanted), "", dtype=object)
    main[good] = names[row[good]]
    return Place(main, np.where(good, chainage, np.nan), offset, reason)


def _joined(line_names, lines) -> tuple[np.ndarray, np.ndarray, set[str]]:
    """(names in order, one LineString each, names of mains that stay in parts)."""
    by_name: dict[str, list] = {}
    for name, line in zip(np.asarray(line_names, dtype=object), lines, strict=True):
        if line is not None and not shapely.is_empty(line):
            by_name.setdefault(str(name), []).append(line)
    whole, broken = {}, set()
    for name, parts in sorted(by_name.items()):
        merged = parts[0] if len(parts) == 1 else shapely.union_all(np.array(parts))
        if shapely.get_type_id(merged) != shapely.GeometryType.LINESTRING:
            merged = shapely.line_merge(merged)
        if shapely.get_type_id(merged) == shapely.GeometryType.LINESTRING:
            whole[name] = merged
        else:
            broken.add(name)
    shapes = np.empty(len(whole), dtype=object)
    shapes[:] = list(whole.values())
    return np.array(list(whole), dtype=str), shapes, broken
