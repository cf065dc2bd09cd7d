"""Ring and flange dimensions of the published drilling standards, in SI."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np

from screener.standards.tables import INCH, PSI, codes, exact_rows, read_table

INCH_STANDARDS = ("AWWA C207", "ASME B16.5", "ASME B16.47 A", "ASME B16.1")
STANDARDS = [*INCH_STANDARDS, "EN 1092-1"]
CLASSES = ["B", "D", "E", "F", "150", "125", "25", "PN10", "PN16"]
CLASSES_OF = {
    "AWWA C207": ("B", "D", "E", "F"),
    "ASME B16.5": ("150",),
    "ASME B16.47 A": ("150",),
    "ASME B16.1": ("125", "25"),
    "EN 1092-1": ("PN10", "PN16"),
}


@dataclass(frozen=True, eq=False)
class RingTable:
    """One row per standard, class and flange size. m, Pa; NaN where the table has no value."""

    standard: np.ndarray
    ring_class: np.ndarray
    flange_size: np.ndarray
    outside_diameter: np.ndarray
    bore: np.ndarray
    thickness: np.ndarray
    bolt_circle_diameter: np.ndarray
    bolt_count: np.ndarray
    bolt_diameter: np.ndarray
    hole_diameter: np.ndarray
    stated_rating: np.ndarray
    source: np.ndarray
    status: np.ndarray
    rating_source: np.ndarray

    def __len__(self) -> int:
        return len(self.standard)


def _inch_rows(name, standard, ring_class, thickness, bore, rating, rating_source, keep=None):
    table = read_table(name)
    rows = np.arange(len(table)) if keep is None else np.flatnonzero(keep(table))
    empty = np.full(len(rows), np.nan)

    def inches(column):
        return table.number(column)[rows] * INCH

    size = table.number("nps_in")[rows]
    return {
        "standard": np.full(len(rows), standard, dtype=object),
        "ring_class": np.full(len(rows), ring_class, dtype=object),
        "flange_size": size * INCH,
        "outside_diameter": inches("od_in"),
        "bore": inches(bore) if bore else empty,
        "thickness": inches(thickness),
        "bolt_circle_diameter": inches("bolt_circle_in"),
        "bolt_count": table.number("n_bolts")[rows],
        "bolt_diameter": inches("bolt_dia_in"),
        "hole_diameter": inches("hole_dia_in"),
        "stated_rating": rating(table, size, rows) * PSI,
        "source": table.text("source")[rows],
        "status": table.text("status")[rows],
        "rating_source": np.full(len(rows), rating_source, dtype=object),
    }


def _metric_rows(pressure: int):
    table = read_table("en1092_1_pn10_pn16")
    rows = np.flatnonzero(table.text("pn_bar") == str(pressure))

    def metres(column):
        return table.number(column)[rows] / 1000.0

    return {
        "standard": np.full(len(rows), "EN 1092-1", dtype=object),
        "ring_class": np.full(len(rows), f"PN{pressure}", dtype=object),
        "flange_size": metres("dn"),
        "outside_diameter": metres("od_mm"),
        "bore": np.full(len(rows), np.nan),
        "thickness": metres("type02_loose_thickness_mm"),
        "bolt_circle_diameter": metres("bolt_circle_mm"),
        "bolt_count": table.number("n_bolts")[rows],
        "bolt_diameter": metres("bolt_dia_mm"),
        "hole_diameter": metres("hole_dia_mm"),
        "stated_rating": np.full(len(rows), pressure * 1.0e5),
        "source": table.text("source")[rows],
        "status": table.text("status")[rows],
        "rating_source": np.full(len(rows), "EN 1092-1 designation PN in bar", dtype=object),
    }


def _b16_1_rating(ring_class):
    # ASME B16.1 ambient ratings by size, from memory.
    def rating(_table, size, _rows):
        if ring_class == "125":
            return np.where(size <= 12, 200.0, 150.0)
        return np.where(size <= 36, 45.0, 25.0)

    return rating


@cache
def ring_table() -> RingTable:
    """All published rings in one table."""
    parts = [
        _inch_rows(
            "awwa_c207_ring_flanges",
            "AWWA C207",
            ring_class,
            "thickness_in",
            "id_in",
            lambda table, _size, rows: table.number("rated_pressure_psi")[rows],
            "AWWA C207 class pressure, welded to steel pipe (read in secondary summaries)",
            keep=lambda table, c=ring_class: table.text("awwa_class") == c,
        )
        for ring_class in ("B", "D", "E", "F")
    ]
    class_150 = "ASME class 150 at ambient temperature, 285 psi for carbon steel (from memory)"
    parts.append(
        _inch_rows(
            "asme_b16_5_class150_lap_joint",
            "ASME B16.5",
            "150",
            "lap_joint_thickness_min_in",
            "lap_joint_bore_min_in",
            lambda _table, size, _rows: np.full(len(size), 285.0),
            class_150,
        )
    )
    parts.append(
        _inch_rows(
            "asme_b16_47_series_a_class150",
            "ASME B16.47 A",
            "150",
            "thickness_min_excl_raised_face_in",
            None,
            lambda _table, size, _rows: np.full(len(size), 285.0),
            class_150,
        )
    )
    for iron in ("25", "125"):
        parts.append(
            _inch_rows(
                "asme_b16_1_class25_125",
                "ASME B16.1",
                iron,
                "thickness_min_in",
                None,
                _b16_1_rating(iron),
                "ASME B16.1 ambient rating (from memory)",
                keep=lambda table, c=iron: table.text("iron_class") == c,
            )
        )
    parts += [_metric_rows(10), _metric_rows(16)]
    return RingTable(**{key: np.concatenate([part[key] for part in parts]) for key in parts[0]})


def standard_codes(standard: np.ndarray) -> np.ndarray:
    """Position of each joint's standard in `STANDARDS`, -1 where it is none of them."""
    return codes(standard, STANDARDS)


def rows_by_code(standard: np.ndarray, ring_class: np.ndarray | int, flange_size: np.ndarray) -> np.ndarray:
    """As `ring_rows`, for positions in `STANDARDS` and `CLASSES`."""
    size = np.where(np.isfinite(flange_size), np.round(flange_size * 1.0e4), -1).astype(np.int64)
    key = (standard * len(CLASSES) + ring_class) * 1_000_000 + size
    return exact_rows(_table_keys(), np.where((standard < 0) | (np.asarray(ring_class) < 0) | (size < 0), -1, key))


@cache
def _table_keys() -> np.ndarray:
    table = ring_table()
    size = np.round(table.flange_size * 1.0e4).astype(np.int64)
    return (codes(table.standard, STANDARDS) * len(CLASSES) + codes(table.ring_class, CLASSES)) * 1_000_000 + size


def ring_rows(standard: np.ndarray, ring_class: np.ndarray, flange_size: np.ndarray) -> np.ndarray:
    """Row of `ring_table()` for each joint by exact standard, class and size (m); -1 where there is none."""
    return rows_by_code(standard_codes(standard), codes(ring_class, CLASSES), flange_size)
