"""Workbooks, through calamine (some eight times faster than openpyxl on large sheets)."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import python_calamine

from screener.inventory.header_rows import LOOKED_AT, MOST_COLUMNS, find_header, joined_header, name_headings
from screener.records import InputError, Ledger, RawTable, Severity

ERROR_VALUES = ("#N/A", "#DIV/0!", "#REF!", "#VALUE!", "#NAME?", "#NUM!", "#NULL!")


def open_workbook(path: Path, sheet: str | None, ledger: Ledger) -> RawTable:
    """The sheet named, or the one that looks most like an inventory."""
    try:
        book = python_calamine.CalamineWorkbook.from_path(str(path))
    except python_calamine.PasswordError:
        raise InputError(f"{path}: the workbook is password-protected; save it without a password") from None
    except (python_calamine.CalamineError, OSError) as problem:
        raise InputError(f"{path}: the workbook can't be read ({_short(problem)}); open and save it again as .xlsx") from None
    names = [s.name for s in book.sheets_metadata if "WorkSheet" in str(s.typ)] or list(book.sheet_names)
    if not names:
        raise InputError(f"{path}: the workbook has no sheets")
    if sheet is not None:
        if sheet not in names:
            raise InputError(f"{path}: there is no sheet {sheet!r}; there are: {', '.join(names)}")
        names = [sheet]
    best = None
    for name in names:
        rows, start = _rows(book, path, name)
        if not rows:
            continue
        header = find_header(rows)
        # A list of a few words with good headings must not beat the inventory itself.
        weight = header[2] + min(len(rows), 50) * 0.1
        if best is None or weight > best[0]:
            best = (weight, name, rows, start, header)
    if best is None:
        raise InputError(f"{path}: no sheet has any cells" if sheet is None else f"{path}: sheet {sheet!r} has no cells")
    _, name, rows, start, (at, height, score) = best
    if len(names) > 1:
        others = ", ".join(n for n in names if n != name)
        ledger.finding("sheet_chosen", Severity.NOTES, None, problem=f"the workbook has several sheets; {name!r} looks most like the inventory", action=f"read {name!r}, not: {others}")
    if score <= 0.0:
        raise InputError(f"{path}, sheet {name!r}: no row of headings found in the first {LOOKED_AT} rows; expected headings such as 'Joint', 'Size', 'Operating pressure (psi)'")
    return _table(path, name, rows, start, at, height, ledger)


def _rows(book, path: Path, name: str) -> tuple[list, int]:
    try:
        rows = book.get_sheet_by_name(name)
        width = rows.width
        if width > MOST_COLUMNS:
            raise InputError(f"{path}, sheet {name!r}: has {width:,} columns; at most {MOST_COLUMNS:,} are read. Clear the empty formatted columns")
        start = rows.start
        return rows.to_python(skip_empty_area=True), start[0] if start else 0
    except python_calamine.CalamineError as problem:
        raise InputError(f"{path}, sheet {name!r}: can't be read ({_short(problem)})") from None


def _short(problem: Exception) -> str:
    return " ".join(str(problem).split())[:120]


def _table(path: Path, sheet: str, rows: list, start: int, at: int, height: int, ledger: Ledger) -> RawTable:
    header = joined_header(rows, at, height)
    body = rows[at + height :]
    numbers = np.arange(start + at + height + 1, start + at + height + 1 + len(body))
    frame = pd.DataFrame(body, dtype=object)
    headings = list(header) + [None] * (frame.shape[1] - len(header))
    frame = frame.reindex(columns=range(len(headings)))
    frame = frame.mask(frame == "")
    filled = frame.notna().to_numpy()
    rows_kept = filled.any(axis=1)
    columns_kept = filled.any(axis=0) | np.array([h not in (None, "") for h in headings])
    if (~rows_kept).any():
        ledger.finding("blank_rows", Severity.NOTES, None, problem=f"{int((~rows_kept).sum()):,} blank rows", action="passed over; they are not joints")
    frame = frame.loc[rows_kept, columns_kept].reset_index(drop=True)
    names = name_headings(headings)
    names = tuple(name for name, kept in zip(names, columns_kept, strict=True) if kept)
    numbers = numbers[rows_kept]
    frame.columns = range(len(names))
    _note_errors(frame, names, ledger)
    return RawTable(path.name, sheet, names, frame, numbers)


def _note_errors(frame: pd.DataFrame, names: tuple[str, ...], ledger: Ledger) -> None:
    for k, name in enumerate(names):
        bad = frame[k].isin(ERROR_VALUES)
        if bad.any():
            where = np.flatnonzero(bad.to_numpy())
            ledger.finding("cell_error", Severity.DOUBTS, where, column=name, values=frame[k].to_numpy()[where], problem="the cell shows a spreadsheet error", action="taken as empty")
            frame.loc[bad, k] = None
