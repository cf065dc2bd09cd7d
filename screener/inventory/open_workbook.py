"""Workbooks, through calamine (several times faster than openpyxl on large sheets)."""

from __future__ import annotations

import io
import zipfile
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from itertools import islice
from pathlib import Path

import numpy as np
import python_calamine

from screener.inventory.header_rows import EXPECTED, LOOKED_AT, MOST_COLUMNS, Header, count_known, find_header, inventory_weight, joined_header
from screener.inventory.open_cells import Finished, Rows, finish, some_of
from screener.inventory.open_kind import ENDINGS, Kind
from screener.inventory.open_workbook_scan import SheetScan, guard_opendocument, scan_workbook
from screener.records import InputError, Ledger, RawTable, Severity

BLANK_TOP = 2_000
"""Rows looked through for the first filled ones."""


@dataclass(frozen=True, eq=False)
class _Sheet:
    """A worksheet with its first filled rows. top: (row in the file, cells), left: its first column, 0-based."""

    name: str
    sheet: python_calamine.CalamineSheet
    top: list[tuple[int, list]]
    left: int
    spans: dict[tuple[int, int], int]
    header: Header | None
    hidden: bool

    @property
    def rows_below(self) -> int:
        """Rows below the headings, blank ones included."""
        end = self.sheet.end
        if end is None or self.header is None:
            return 0
        return end[0] + 1 - self.top[self.header.at + self.header.height - 1][0]

    @property
    def weight(self) -> tuple:
        known = self.header.known if self.header else 0
        return inventory_weight(known, self.rows_below) * (0.5 if self.hidden else 1.0), self.rows_below


def open_workbook(path: Path, kind: Kind, sheet: str | None, ledger: Ledger) -> RawTable:
    """The sheet named, or the one that looks most like an inventory."""
    scans = _survey(path, kind, ledger)
    with _reading(path):
        book = _book(path, kind)
        names = _names(path, book, sheet)
        best = None
        for name, hidden in names:
            found = _look(path, book, name, hidden)
            if found is not None and (best is None or found.weight > best.weight):
                best = found
    if best is None:
        raise InputError(f"{path}: no sheet has any cells" if sheet is None else f"{path}, sheet {sheet!r}: has no cells")
    if len(names) > 1:
        others = some_of([name for name, _ in names if name != best.name])
        ledger.finding("sheet_chosen", Severity.NOTES, None, problem=f"the workbook has {len(names)} sheets; {best.name!r} looks most like the inventory", action=f"read {best.name!r}, not: {others}")
    if best.hidden:
        ledger.finding("sheet_hidden", Severity.NOTES, None, problem=f"the sheet {best.name!r} is hidden in the workbook", action="read all the same")
    if best.header is None:
        raise InputError(f"{path}, sheet {best.name!r}: no row of headings found in the first {LOOKED_AT} filled rows; {EXPECTED}")
    with _reading(path):
        finished = _table(path, best, ledger)
    _note_scan(finished, scans.get(best.name), ledger)
    _note_merged(finished, best, ledger)
    return finished.table


def list_sheets(path: Path, kind: Kind) -> list[tuple[str, int, int, int, bool]]:
    """(name, rows below the headings, columns, known headings, hidden) per worksheet."""
    _survey(path, kind, Ledger())
    with _reading(path):
        book = _book(path, kind)
        found = [(name, hidden, _look(path, book, name, hidden)) for name, hidden in _names(path, book, None)]
    return [(name, s.rows_below if s else 0, s.sheet.width if s else 0, s.header.known if s and s.header else 0, hidden) for name, hidden, s in found]


def _survey(path: Path, kind: Kind, ledger: Ledger) -> dict[str, SheetScan]:
    """Measure the workbook before it is opened, and say what can't be seen in it."""
    if kind is Kind.ODS:
        guard_opendocument(path)
    if kind is Kind.XLSX:
        with zipfile.ZipFile(path) as archive:
            macros = any(name.lower().endswith("vbaproject.bin") for name in archive.namelist())
        if macros or path.suffix.lower() in (".xlsm", ".xltm"):
            ledger.finding("macros_ignored", Severity.NOTES, None, problem="the workbook may carry macros", action="cells read, macros neither run nor kept")
        return scan_workbook(path)
    ledger.finding("errors_not_listed", Severity.NOTES, None, problem=f"in an {kind} a cell that shows an error can't be told from an empty one", action="read as empty; save it as .xlsx to have such cells listed")
    return {}


@contextmanager
def _reading(path: Path) -> Iterator[None]:
    """The reader's own failures, as one sentence."""
    try:
        yield
    except python_calamine.PasswordError:
        raise InputError(f"{path}: the workbook is password-protected; save it without a password") from None
    except (python_calamine.CalamineError, OSError) as problem:
        raise InputError(f"{path}: the workbook can't be read ({' '.join(str(problem).split())[:120]}); open and save it again as .xlsx") from None
    except BaseException as problem:
        if type(problem).__name__ != "PanicException":  # how the reader's compiled core gives up
            raise
        raise InputError(f"{path}: the workbook is damaged and can't be read; open and save it again as .xlsx") from None


def _book(path: Path, kind: Kind) -> python_calamine.CalamineWorkbook:
    if path.suffix.lower() in ENDINGS[kind]:
        return python_calamine.CalamineWorkbook.from_path(str(path))
    return python_calamine.CalamineWorkbook.from_filelike(io.BytesIO(path.read_bytes()))


def _names(path: Path, book: python_calamine.CalamineWorkbook, sheet: str | None) -> list[tuple[str, bool]]:
    """(name, hidden) of the worksheets to look at."""
    visible = python_calamine.SheetVisibleEnum.Visible
    names = [(s.name, s.visible != visible) for s in book.sheets_metadata if s.typ == python_calamine.SheetTypeEnum.WorkSheet]
    if not names:
        raise InputError(f"{path}: the workbook has no sheets with cells")
    if sheet is None:
        return names
    chosen = [item for item in names if item[0] == sheet] or [item for item in names if item[0].strip().casefold() == sheet.strip().casefold()]
    if not chosen:
        raise InputError(f"{path}: there is no sheet {sheet!r}; there are: {some_of([name for name, _ in names], 20)}")
    return chosen[:1]


def _look(path: Path, book: python_calamine.CalamineWorkbook, name: str, hidden: bool) -> _Sheet | None:
    """A sheet's first filled rows and its headings; None for a sheet without cells."""
    sheet = book.get_sheet_by_name(name)
    if sheet.start is None or sheet.width == 0:
        return None
    if sheet.width > MOST_COLUMNS:
        raise InputError(f"{path}, sheet {name!r}: has {sheet.width:,} columns; at most {MOST_COLUMNS:,} are read; clear stray cells to the right of the table")
    first, left = sheet.start
    top = []
    for i, row in enumerate(islice(sheet.iter_rows(), BLANK_TOP)):
        if any(not (isinstance(cell, str) and not cell.strip()) for cell in row):
            top.append((first + i + 1, row))
            if len(top) == LOOKED_AT:
                break
    spans = _spans(sheet, [number for number, _ in top], left)
    return _Sheet(name, sheet, top, left, spans, find_header([row for _, row in top], spans), hidden)


def _spans(sheet: python_calamine.CalamineSheet, numbers: list[int], left: int) -> dict[tuple[int, int], int]:
    """(index of the row in `numbers`, column in the sheet's own cells) of merged cells -> width."""
    index = {number: i for i, number in enumerate(numbers)}
    ranges = sheet.merged_cell_ranges or []
    return {(index[top + 1], start - left): end - start + 1 for (top, start), (_, end) in ranges if top + 1 in index and start >= left}


def _table(path: Path, best: _Sheet, ledger: Ledger) -> Finished:
    rows = [row for _, row in best.top]
    at, height = best.header.at, best.header.height
    header = joined_header(rows, at, height, best.spans)
    store = Rows(len(header), [row for row in rows[at : at + height] if count_known(row) or height == 1])
    above = best.top[at + height - 1][0] - best.sheet.start[0]
    for number, row in enumerate(islice(best.sheet.iter_rows(), above, None), best.top[at + height - 1][0] + 1):
        store.add(row, number)
    return finish(path, best.name, header, store, ledger, first_column=best.left)


def _note_scan(finished: Finished, scan: SheetScan | None, ledger: Ledger) -> None:
    """Cells the reader gives as empty though they are not: errors, and formulas without a stored result."""
    if scan is None:
        return
    errors, unsolved = scan.errors, [(row, column, "formula") for row, column in scan.unsolved]
    for position, column, texts in _by_column(finished, errors):
        ledger.finding("cell_error", Severity.DOUBTS, position, column=column, values=texts, problem="the cell shows a spreadsheet error", action="taken as empty")
    for position, column, _ in _by_column(finished, unsolved):
        ledger.finding("formula_without_result", Severity.DOUBTS, position, column=column, problem="the file stores a formula without its result", action="taken as empty; open and save the file in a spreadsheet program to store the results")


def _by_column(finished: Finished, cells: list[tuple[int, int, str]]) -> Iterator[tuple[np.ndarray, str, np.ndarray]]:
    """(positions, heading, texts) for each column of the table that has such cells."""
    if not cells:
        return
    rows, columns = (np.array([cell[i] for cell in cells], dtype=np.int64) for i in (0, 1))
    texts = np.array([*(cell[2] for cell in cells), None], dtype=object)[:-1]
    numbers = finished.table.row_numbers
    place = np.minimum(np.searchsorted(numbers, rows), max(len(numbers) - 1, 0))
    inside = numbers[place] == rows if len(numbers) else np.zeros(len(rows), dtype=bool)
    for k, column in enumerate(finished.kept):
        here = inside & (columns == column)
        if here.any():
            yield place[here], finished.table.headings[k], texts[here]


def _note_merged(finished: Finished, best: _Sheet, ledger: Ledger) -> None:
    """Merged cells below the headings hold their value once; the rest of them is empty and stays so."""
    numbers = finished.table.row_numbers
    ranges = [r for r in best.sheet.merged_cell_ranges or [] if len(numbers) and r[1][0] + 1 >= numbers[0]]
    covered: dict[int, list[np.ndarray]] = {}
    for (top, left), (bottom, right) in ranges:
        for k in np.flatnonzero((finished.kept >= left) & (finished.kept <= right)):
            first = top + 2 if finished.kept[k] == left else top + 1
            rows = np.flatnonzero((numbers >= first) & (numbers <= bottom + 1))
            if len(rows):
                covered.setdefault(int(k), []).append(rows)
    for k, rows in sorted(covered.items()):
        ledger.finding("cell_merged", Severity.DOUBTS, np.unique(np.concatenate(rows)), column=finished.table.headings[k], problem="the cell is part of merged cells, whose value stands in their first cell only", action="left empty; unmerge and fill the cells if the value holds for every row")
