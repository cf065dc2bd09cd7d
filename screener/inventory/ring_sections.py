"""Sections of rings that are not flat plates, as polygons in a table beside the inventory."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd

from screener.records import InputError, Ledger, Severity
from screener.units import from_unit

FILE_NAME = "ring_sections.csv"
WANTED = "columns 'section', 'r_mm' and 'z_mm' (or r_in, z_in), one corner a row in order, hub below and nuts above"


def read_sections(path: str | Path, ledger: Ledger) -> dict[str, np.ndarray]:
    """Section name -> corners (n, 2) in m: radius and height. Raises InputError when the table can't be one of sections."""
    try:
        frame = pd.read_csv(path, dtype=str, keep_default_na=False, encoding="utf-8-sig")
    except FileNotFoundError:
        raise InputError(f"{path}: there is no such file of ring sections") from None
    except (OSError, UnicodeDecodeError, pd.errors.ParserError, pd.errors.EmptyDataError) as problem:
        raise InputError(f"{path}: can't be read as a table of ring sections ({' '.join(str(problem).split())[:100]}); wanted: {WANTED}") from None
    unit = next((u for u in ("mm", "in") if {f"r_{u}", f"z_{u}"} <= set(frame.columns)), None)
    if unit is None or "section" not in frame.columns:
        raise InputError(f"{path}: headings are {', '.join(frame.columns[:6])}; wanted: {WANTED}")
    sections = {}
    for name, some in frame.groupby("section", sort=False):
        corners = np.column_stack([from_unit(pd.to_numeric(some[f"{axis}_{unit}"], errors="coerce").to_numpy(dtype=float), unit) for axis in "rz"])
        if not np.isfinite(corners).all() or len(corners) < 3:
            ledger.finding("section_unusable", Severity.DOUBTS, None, attribute="ring_section", problem=f"section {name!r} has fewer than three corners or a corner that is not a number", action="section not used")
            continue
        sections[str(name)] = corners
    return sections


def find_sections(inventory_path: str | Path, given: str | Path | None, ledger: Ledger) -> dict[str, np.ndarray]:
    """Sections of the file named, else of `ring_sections.csv` beside the inventory, else none."""
    if given is not None:
        return read_sections(given, ledger)
    beside = Path(inventory_path).with_name(FILE_NAME)
    if beside.is_file():
        ledger.finding("sections_found", Severity.NOTES, None, problem=f"{FILE_NAME} lies beside the inventory", action="ring sections read from it")
        return read_sections(beside, ledger)
    return {}



