"""From a file to an Inventory: rows understood, audited, filled, and made into a Fleet."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import numpy as np

from screener.inventory import audit, fill_bolts, fill_loads, fill_pipe, fill_ring
from screener.inventory.build_fleet import build_fleet
from screener.inventory.gaps import Gaps
from screener.inventory.mapping_file import read_mapping
from screener.inventory.match_headers import HeaderMatch, match_headers
from screener.inventory.open_file import open_table
from screener.inventory.parse_cells import parse_cells, written
from screener.inventory.ring_sections import find_sections
from screener.records import Fleet, Ledger, RawTable, Severity
from screener.settings import Settings


@dataclass(frozen=True, eq=False)
class Inventory:
    """An inventory as read: every row of the table is in `fleet` or has a `reason`.

    reason: object array over the table's rows, "" for joints that can be assessed.
    gaps: values (SI) and origin codes by attribute, over the table's rows.
    """

    raw: RawTable
    match: HeaderMatch
    joint_id: np.ndarray
    reason: np.ndarray
    gaps: Gaps
    fleet: Fleet
    ledger: Ledger
    settings: Settings
    sections: dict[str, np.ndarray]

    def __len__(self) -> int:
        return len(self.raw)

    @property
    def column_of(self) -> dict[str, str]:
        """Heading of the column each attribute was read from."""
        return {name: self.raw.headings[k] for name, k in self.match.columns.items()}

    def as_written(self, attribute: str) -> np.ndarray:
        """The attribute's cells as text as they stand in the file; None where empty or without a column."""
        if attribute not in self.match.columns:
            return np.full(len(self), None, dtype=object)
        return written(self.raw.cells.iloc[:, self.match.columns[attribute]])

    @property
    def place(self) -> tuple[np.ndarray | None, np.ndarray | None]:
        """(x, y) of each row in the file's own coordinates: its geometry, else its coordinate columns."""
        if self.raw.x is not None:
            return self.raw.x, self.raw.y
        x, y = self.gaps["x_coordinate"], self.gaps["y_coordinate"]
        known = np.isfinite(x) & np.isfinite(y)
        if not known.any():
            return None, None
        return np.where(known, x, np.nan), np.where(known, y, np.nan)

    @property
    def crs(self) -> str | None:
        """Coordinate reference system of `place`, None where the file does not say."""
        return self.raw.crs


def read_inventory(
    path: str | Path,
    settings: Settings | None = None,
    *,
    mapping: str | Path | None = None,
    sections: str | Path | None = None,
) -> Inventory:
    """Read, audit and fill an inventory. Raises InputError when the file can't be used at all."""
    settings = settings or Settings()
    ledger = Ledger()
    raw = open_table(path, sheet=settings.sheet or None, ledger=ledger)
    given = read_mapping(mapping) if mapping is not None else None
    polygons = find_sections(path, sections, ledger)
    return understand(raw, settings, ledger, mapping=given, sections=polygons)


def understand(raw: RawTable, settings: Settings, ledger: Ledger, *, mapping: dict | None, sections: dict) -> Inventory:
    """Match, parse, audit and fill a table, and build its Fleet."""
    match = match_headers(raw, mapping, ledger)
    parsed = parse_cells(raw, match, ledger)
    gaps = Gaps(parsed.values, parsed.origin, len(raw), ledger)
    column_of = {attribute: raw.headings[k] for attribute, k in parsed.columns.items()}
    joint_id, repeat = audit.settle_identities(gaps, ledger, raw.row_numbers, column_of, raw.cells)
    x, y = (raw.x, raw.y) if raw.x is not None else (gaps["x_coordinate"], gaps["y_coordinate"])
    audit.audit_places(ledger, x, y, repeat, gaps["main_id"])
    if raw.x is None and gaps.known("x_coordinate").any():
        ledger.finding(
            "coordinates_without_system",
            Severity.NOTES,
            None,
            attribute="x_coordinate",
            column=column_of.get("x_coordinate", ""),
            problem="the file does not say which coordinate reference system its coordinates are in",
            action="coordinates kept as written; the layer carries no reference system",
        )
    audit.audit_rows(gaps, column_of, parsed.as_written, settings)
    blocked = {"repeats an earlier row exactly": repeat}
    blocked["holds nothing but a name; a note, not a joint"] = audit.rows_without_a_joint(gaps, ledger, column_of)
    fill_gaps(gaps, settings, column_of, parsed.as_written, blocked)
    reason = _first_reason(blocked, len(raw))
    rows = np.flatnonzero(reason == "")
    fleet = build_fleet(gaps, joint_id, rows, settings.assessment_year)
    return Inventory(raw, match, joint_id, reason, gaps, fleet, ledger, settings, sections)


def fill_gaps(gaps: Gaps, settings: Settings, column_of, as_written, blocked: dict[str, np.ndarray]) -> None:
    """Every gap rule in the order in which one needs another's result."""
    fill_pipe.fill_year_installed(gaps)
    fill_pipe.fill_size_system(gaps)
    fill_pipe.fill_outside_diameter(gaps)
    fill_pipe.check_sizes(gaps, blocked)
    audit.audit_ring(gaps, column_of, as_written)
    fill_pipe.fill_material(gaps)
    fill_pipe.fill_dimension_ratio(gaps)
    fill_ring.fill_ring_standard(gaps)
    fill_ring.check_ring_class(gaps)
    fill_pipe.fill_flange_size(gaps)
    fill_ring.fill_ring_class(gaps, settings)
    ring_row = fill_ring.fill_ring_dimensions(gaps)
    audit.audit_bolts(gaps, ring_row, column_of, as_written)
    fill_ring.fill_ring_rest(gaps, ring_row)
    fill_pipe.fill_stub_end(gaps, settings)
    fill_ring.check_ring_geometry(gaps, blocked)
    fill_pipe.fill_setting(gaps, settings)
    fill_bolts.fill_faces(gaps)
    fill_bolts.fill_bolts(gaps)
    fill_bolts.fill_torque(gaps, settings)
    fill_loads.fill_rating_inputs(gaps)
    fill_loads.fill_operating_pressure(gaps, settings)
    fill_loads.fill_surge_from_neighbours(gaps)
    fill_loads.fill_cycles(gaps, settings)
    fill_loads.fill_consequence(gaps)


def _first_reason(blocked: dict[str, np.ndarray], rows: int) -> np.ndarray:
    reason = np.full(rows, "", dtype=object)
    for words, mask in blocked.items():
        reason[(reason == "") & mask] = words
    return reason
