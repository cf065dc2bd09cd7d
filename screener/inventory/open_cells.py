"""From rows as a reader hands them over to typed columns, in chunks, so that a large table stays small."""

from __future__ import annotations

import datetime
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np
import pandas as pd
import pyarrow as pa
import pyarrow.compute as pc

from screener.inventory.header_rows import name_headings
from screener.records import InputError, Ledger, RawTable, Severity

CHUNK = 20_000
MOST_CELLS = 300_000_000
ERROR_VALUES = ("#N/A", "#DIV/0!", "#REF!", "#VALUE!", "#NAME?", "#NUM!", "#NULL!", "#SPILL!", "#CALC!", "#GETTING_DATA")
_STAMP = "datetime64[us]"


def without_blanks(texts: pa.ChunkedArray | pa.Array):
    """Text with its empty and white cells as null."""
    blank = pc.equal(pc.utf8_trim_whitespace(texts), "")
    return pc.if_else(blank, pa.scalar(None, texts.type), texts) if pc.any(blank).as_py() else texts


def _typed(column: tuple) -> tuple[str, object]:
    """(kind, array) of a part of a column; an empty cell is "" or None."""
    kinds = set(map(type, column))
    if kinds == {str}:
        texts = without_blanks(pa.array(column, pa.large_string()))
        return ("empty", len(column)) if texts.null_count == len(texts) else ("text", texts)
    cells = [None if cell is None or (type(cell) is str and (not cell or cell.isspace())) else cell for cell in column]
    kinds = set(map(type, cells)) - {type(None)}
    if not kinds:
        return "empty", len(column)
    if kinds <= {int, float}:
        return "number", np.array(cells, dtype=float)
    if kinds <= {datetime.date, datetime.datetime}:
        return "date", np.array(cells, dtype=_STAMP)
    if kinds == {str}:
        return "text", pa.array(cells, pa.large_string())
    mixed = np.empty(len(cells), dtype=object)
    mixed[:] = cells
    return "mixed", mixed


def _whole(parts: list[tuple[str, object]]) -> pd.Series:
    """One column from its parts: float64, text, dates, or objects where the file mixes them."""
    kinds = {kind for kind, _ in parts} - {"empty"}
    if not kinds:
        return pd.Series(np.full(sum(part for _, part in parts), None, dtype=object))
    if kinds == {"number"}:
        return pd.Series(np.concatenate([np.full(part, np.nan) if kind == "empty" else part for kind, part in parts]))
    if kinds == {"date"}:
        return pd.Series(np.concatenate([np.full(part, "NaT", dtype=_STAMP) if kind == "empty" else part for kind, part in parts]))
    if kinds == {"text"}:
        chunks = [pa.nulls(part, pa.large_string()) if kind == "empty" else part for kind, part in parts]
        return pa.chunked_array(chunks).to_pandas()
    return pd.Series(np.concatenate([_as_objects(kind, part) for kind, part in parts]))


def _as_objects(kind: str, part) -> np.ndarray:
    if kind == "empty":
        return np.full(part, None, dtype=object)
    if kind == "text":
        return np.array([*part.to_pylist(), None], dtype=object)[:-1]
    if kind == "mixed":
        return part
    values = part.astype(object)
    values[pd.isna(part)] = None
    return values


@dataclass
class Rows:
    """Collects the rows below the headings; blank rows and repeated headings are counted and left out."""

    width: int
    headings: list[list] = field(default_factory=list)
    blank: int = 0
    repeated: int = 0
    _rows: list[list] = field(default_factory=list)
    _numbers: list[int] = field(default_factory=list)
    _parts: list[list] = field(default_factory=list)
    _all_numbers: list[np.ndarray] = field(default_factory=list)

    def add(self, row: list, number: int) -> None:
        """One row of exactly `width` cells; number: the row in the file, 1-based."""
        if row.count("") == self.width:
            self.blank += 1
        elif row in self.headings:
            self.repeated += 1
        else:
            self._rows.append(row)
            self._numbers.append(number)
            if len(self._rows) >= CHUNK:
                self._pack()

    def _pack(self) -> None:
        if self._rows:
            self._parts.append([_typed(column) for column in zip(*self._rows, strict=True)])
            self._all_numbers.append(np.array(self._numbers, dtype=np.int64))
            if sum(map(len, self._all_numbers)) * self.width > MOST_CELLS:
                raise InputError(f"more than {MOST_CELLS:,} cells; give it as Parquet or in parts")
            self._rows, self._numbers = [], []

    def columns(self) -> tuple[list[pd.Series], np.ndarray]:
        """(columns, row numbers); the collection is emptied on the way."""
        self._pack()
        if not self._parts:
            return [pd.Series(np.empty(0, dtype=object)) for _ in range(self.width)], np.empty(0, dtype=np.int64)
        whole = []
        for k in range(self.width):
            whole.append(_whole([parts[k] for parts in self._parts]))
            for parts in self._parts:
                parts[k] = None
        return whole, np.concatenate(self._all_numbers)


@dataclass(frozen=True, eq=False)
class Finished:
    """A table with its place in the file. kept: file column (0-based) of each column of the table."""

    table: RawTable
    kept: np.ndarray


def finish(path: Path, sheet: str, header: list, rows: Rows, ledger: Ledger, *, first_column: int = 0) -> Finished:
    """Name the columns, leave out what is empty, and say so."""
    columns, numbers = rows.columns()
    filled = [column.notna().to_numpy() for column in columns]
    some = np.logical_or.reduce(filled) if filled else np.empty(0, dtype=bool)
    if not some.all():  # rows of nothing but spaces
        rows.blank += int((~some).sum())
        columns, numbers = [column[some].reset_index(drop=True) for column in columns], numbers[some]
    named = [str(cell).strip() != "" if cell is not None else False for cell in header]
    kept = np.array([k for k in range(rows.width) if named[k] or filled[k].any()], dtype=np.int64)
    names = name_headings([header[k] for k in range(rows.width)], first_column)
    names = tuple(names[k] for k in kept)
    _note_rows(rows, ledger)
    _note_headings(names, [names[i] for i, k in enumerate(kept) if not named[k]], rows.width - len(kept), ledger)
    frame = pd.DataFrame({i: columns[k] for i, k in enumerate(kept)}, index=range(len(numbers)), columns=range(len(kept)))
    note_error_texts(frame, names, ledger)
    return Finished(RawTable(path.name, sheet, names, frame, numbers), kept + first_column)


def _note_rows(rows: Rows, ledger: Ledger) -> None:
    if rows.blank:
        ledger.finding("blank_rows", Severity.NOTES, None, problem=f"{rows.blank:,} blank rows", action="passed over; they are not joints")
    if rows.repeated:
        ledger.finding("headings_repeated", Severity.NOTES, None, problem=f"{rows.repeated:,} rows repeat the headings", action="passed over; they are not joints")


def _note_headings(names: tuple[str, ...], unnamed: list[str], empty: int, ledger: Ledger) -> None:
    if empty:
        ledger.finding("empty_columns", Severity.NOTES, None, problem=f"{empty:,} columns have neither heading nor cells", action="left out")
    if unnamed:
        ledger.finding("heading_missing", Severity.NOTES, None, problem=f"{len(unnamed):,} columns have cells and no heading", action=f"called by their letters: {some_of(unnamed)}")
    note_twice(names, ledger)


def note_twice(names: tuple[str, ...], ledger: Ledger) -> None:
    """Say which headings stand above more than one column."""
    twice = sorted(name for name, count in pd.Series(names, dtype=object).value_counts().items() if count > 1)
    if twice:
        ledger.finding("heading_used_twice", Severity.NOTES, None, problem=f"several columns have the same heading: {some_of(twice)}", action="all kept; told apart by their column")


def some_of(names: list[str], most: int = 8) -> str:
    """Some names in one line, for a message."""
    shown = ", ".join(name[:40] for name in names[:most])
    return shown + (f" and {len(names) - most:,} more" if len(names) > most else "")


def note_error_texts(frame: pd.DataFrame, names: tuple[str, ...], ledger: Ledger) -> None:
    """Spreadsheet errors that stand in the file as text: a finding, and the cell is empty."""
    for k, name in enumerate(names):
        if frame[k].dtype.kind in "iufMb":
            continue
        bad = frame[k].isin(ERROR_VALUES).to_numpy()
        if bad.any():
            where = np.flatnonzero(bad)
            ledger.finding("cell_error", Severity.DOUBTS, where, column=name, values=frame[k].to_numpy(dtype=object)[where], problem="the cell shows a spreadsheet error", action="taken as empty")
            frame[k] = frame[k].mask(bad)
