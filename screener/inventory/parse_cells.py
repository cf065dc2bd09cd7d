"""Cells to values: SI numbers, dates as decimal years, choices; every refused cell is a finding."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from screener.columns import inventory_attributes
from screener.inventory.match_headers import HeaderMatch
from screener.inventory.parse_column import Column, written
from screener.inventory.parse_dates import day_first_of, read_date_lists, read_dates
from screener.inventory.parse_numbers import read_counts, read_plain_numbers, read_quantities
from screener.inventory.parse_words import read_categories, read_texts
from screener.records import Ledger, RawTable


@dataclass(frozen=True, eq=False)
class ParsedCells:
    """What a table says, by attribute, over the table's rows.

    values: float64 SI (quantity, number, count), decimal years (date), object
    arrays of tuples of decimal years (dates), of choices and of text; NaN or
    None where missing. origin: records.Origin codes, uint8.
    columns: attribute -> column index. as_written: attribute -> its cells as text.
    """

    values: dict[str, np.ndarray]
    origin: dict[str, np.ndarray]
    columns: dict[str, int]
    as_written: Callable[[str], np.ndarray]


READERS = {
    "quantity": read_quantities,
    "number": read_plain_numbers,
    "count": read_counts,
    "category": read_categories,
    "text": read_texts,
    "id": read_texts,
}
DATE_READERS = {"date": read_dates, "dates": read_date_lists}


def parse_cells(table: RawTable, match: HeaderMatch, ledger: Ledger) -> ParsedCells:
    """Parse every matched column. Only distinct cells are read one by one."""
    attributes = inventory_attributes()
    values: dict[str, np.ndarray] = {}
    origin: dict[str, np.ndarray] = {}

    def column_of(name: str) -> Column:
        k = match.columns[name]
        return Column(attributes[name], table.headings[k], match.matched[k].unit, table.cells.iloc[:, k], ledger)

    def as_written(name: str) -> np.ndarray:
        if name not in match.columns:
            return np.full(len(table), None, dtype=object)
        return written(table.cells.iloc[:, match.columns[name]])

    dated = {name: column_of(name) for name in match.columns if attributes[name].kind in DATE_READERS}
    order = day_first_of(dated.values())
    for name in match.columns:
        if name in dated:
            values[name], origin[name] = DATE_READERS[attributes[name].kind](dated[name], order)
        else:
            values[name], origin[name] = READERS[attributes[name].kind](column_of(name))
    return ParsedCells(values, origin, dict(match.columns), as_written)
