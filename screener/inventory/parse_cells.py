"""Cells to values: SI numbers, dates as decimal years, choices; every refused cell is a finding."""

from __future__ import annotations

import datetime
import re
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import pandas as pd

from screener.columns import Attribute, inventory_attributes
from screener.inventory import parse_values as one
from screener.inventory.bare_numbers import decide_units, slips
from screener.inventory.match_headers import HeaderMatch
from screener.records import Ledger, Origin, RawTable, Severity
from screener.units import accepted, from_unit, is_missing_word, read_quantity


@dataclass(frozen=True, eq=False)
class ParsedCells:
    """values, origin: arrays over the table's rows by attribute; columns: attribute -> column index."""

    values: dict[str, np.ndarray]
    origin: dict[str, np.ndarray]
    columns: dict[str, int]
    as_written: Callable[[str], np.ndarray]


def parse_cells(table: RawTable, match: HeaderMatch, ledger: Ledger) -> ParsedCells:
    """Parse every matched column. Only distinct cells are read one by one."""
    values, origin = {}, {}

    def as_written(attribute: str) -> np.ndarray:
        if attribute not in match.columns:
            return np.full(len(table), None, dtype=object)
        return written(table.cells.iloc[:, match.columns[attribute]])

    for name, k in match.columns.items():
        attribute = inventory_attributes()[name]
        cells = table.cells.iloc[:, k]
        column = Column(attribute, table.headings[k], match.matched[k].unit, cells, ledger)
        values[name], origin[name] = READERS[attribute.kind](column)
    return ParsedCells(values, origin, dict(match.columns), as_written)


def written(cells: pd.Series) -> np.ndarray:
    """Cells as text for people: 417.0 as 417, dates as ISO, empty as None."""
    code, unique = pd.factorize(cells)
    texts = np.array([*(_text(value) for value in unique), None], dtype=object)
    return texts[code]


def _text(value: object) -> str:
    if isinstance(value, (datetime.datetime, pd.Timestamp)):
        return value.date().isoformat() if value.time() == datetime.time(0) else value.isoformat(sep=" ")
    if isinstance(value, datetime.date):
        return value.isoformat()
    if isinstance(value, (float, np.floating)):
        return f"{value:.12g}"
    return str(value)


def _as_numbers(cells: pd.Series) -> pd.Series:
    """A column of mixed objects as floats where every filled cell is a number, so that no cell is read one by one."""
    if cells.dtype != object:
        return cells
    kinds = set(map(type, cells.array))
    if kinds <= {int, float, type(None), type(pd.NA), type(pd.NaT)} and kinds & {int, float}:
        return cells.astype(float)
    return cells


class Column:
    """One column with its distinct cells; gives findings their rows and wording."""

    def __init__(self, attribute: Attribute, heading: str, unit: str, cells: pd.Series, ledger: Ledger) -> None:
        self.attribute, self.heading, self.unit, self.ledger = attribute, heading, unit, ledger
        self.cells = cells = _as_numbers(cells) if attribute.kind not in ("id", "text") else cells
        self.numeric = cells.dtype.kind in "iuf" and not isinstance(cells.dtype, pd.CategoricalDtype)
        if not self.numeric and attribute.kind not in ("id", "text"):
            self.code, unique = pd.factorize(cells)
            self.unique = list(unique)
            texts = [_text(value) for value in self.unique]
            self.missing = np.array([is_missing_word(text) for text in texts], dtype=bool)
            self.texts = texts

    def spread(self, per_unique: list | np.ndarray, dtype, empty) -> np.ndarray:
        """Values of the distinct cells, over the rows."""
        table = np.empty(len(self.unique) + 1, dtype=dtype)
        for i, value in enumerate(per_unique):
            table[i] = value
        table[-1] = empty
        return table[self.code]

    def rows_of(self, which: np.ndarray) -> np.ndarray:
        """Row mask of the distinct cells marked in `which`."""
        return np.append(which, False)[self.code]

    def note(self, code: str, severity: Severity, rows: np.ndarray, problem: str, action: str) -> None:
        where = np.flatnonzero(rows)
        if len(where):
            self.ledger.finding(code, severity, where, attribute=self.attribute.name, column=self.heading, values=written(self.cells.iloc[where]), problem=problem, action=action)

    def note_column(self, code: str, severity: Severity, problem: str, action: str) -> None:
        """A finding about the column as a whole."""
        self.ledger.finding(code, severity, None, attribute=self.attribute.name, column=self.heading, problem=problem, action=action)

    def note_each(self, code: str, severity: Severity, words: list[str], action: str) -> None:
        """One finding per distinct wording, over the rows that have it."""
        for text in sorted({word for word in words if word}):
            self.note(code, severity, self.rows_of(np.array([word == text for word in words], dtype=bool)), text, action)


def _decimal_comma(column: Column) -> bool | None:
    """True where the column writes decimals with commas beyond doubt."""
    texts = column.texts
    certain = any(re.search(r"\d,\d{1,2}(?!\d)", t) or re.search(r"\d\.\d{3},\d", t) or re.search(r"(?<!\d)0,\d", t) for t in texts)
    against = any(re.search(r"\d\.\d", t) and not re.fullmatch(r".*\d\.\d{3}(,.*)?", t) for t in texts)
    lone = [bool(re.search(r"(?<![\d,])\d{1,3},\d{3}(?![\d,])", t)) for t in texts]
    if certain and not against:
        return True
    if any(lone) and not certain:
        column.note(
            "comma_read_as_thousands",
            Severity.NOTES,
            column.rows_of(np.array(lone, dtype=bool)),
            "a lone comma before three digits",
            "read as a thousands separator",
        )
        return False
    return None


def _read_numbers(column: Column) -> tuple[np.ndarray, np.ndarray]:
    """(numbers, unit per row: "" bare) with unreadable cells noted."""
    attribute = column.attribute
    if column.numeric:
        return column.cells.to_numpy(dtype=float), np.full(len(column.cells), "", dtype=object)
    comma = _decimal_comma(column)
    numbers, units, doubts, errors = [], [], [], []
    for value, text, missing in zip(column.unique, column.texts, column.missing, strict=True):
        if missing:
            read = (np.nan, "", "", "")
        elif isinstance(value, bool):
            read = (np.nan, "", "", "yes or no where a number is expected")
        elif isinstance(value, (int, float, np.number)):
            read = (float(value), "", "", "")
        elif isinstance(value, (datetime.date, datetime.time)):
            read = (np.nan, "", "", "a date where a number is expected; the spreadsheet may have turned a fraction into a date")
        else:
            found = read_quantity(text, attribute.dimension, comma)
            read = (found.number, found.unit or "", found.doubt, found.error)
        numbers.append(read[0])
        units.append(read[1])
        doubts.append(read[2])
        errors.append(f"{read[3]}; accepted: {accepted(attribute.dimension)}" if read[3] else "")
    column.note_each("unreadable", Severity.DOUBTS, errors, "cell not used")
    column.note_each("written_loosely", Severity.NOTES, doubts, "number used")
    return column.spread(numbers, float, np.nan), column.spread(units, object, "")


def _limit(column: Column, values: np.ndarray, origin: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Drop what is impossible, doubt what is unusual."""
    attribute = column.attribute
    infinite = np.isinf(values)
    values = np.where(infinite, np.nan, values)
    if attribute.possible:
        low, high = attribute.possible
        out = (values < low * (1 - 1e-9) - 1e-12) | (values > high * (1 + 1e-9) + 1e-12)
        for unit, here in slips(attribute, values, out):
            column.note("unit_slip", Severity.DOUBTS, here, f"not possible for {attribute.label.lower()}; it would be usual in {unit}, so perhaps the unit is wrong", "cell not used")
            out &= ~here
            values = np.where(here, np.nan, values)
        column.note("out_of_range", Severity.DOUBTS, out | infinite, f"not possible for {attribute.label.lower()}; accepted: {_span(attribute, low, high)}", "cell not used")
        values = np.where(out, np.nan, values)
    if attribute.plausible:
        low, high = attribute.plausible
        odd = (values < low * (1 - 1e-9)) | (values > high * (1 + 1e-9))
        column.note("unusual", Severity.DOUBTS, odd, f"unusual for {attribute.label.lower()}; usual: {_span(attribute, low, high)}", "used as written")
    origin = np.where(np.isnan(values), Origin.MISSING, origin).astype(np.uint8)
    return values, origin


def _span(attribute: Attribute, low: float, high: float) -> str:
    if not attribute.dimension or attribute.dimension == "money":
        return f"{low:g} to {high:g}"
    from screener.units import to_unit

    unit = attribute.metric
    return f"{float(to_unit(low, unit)):.4g} to {float(to_unit(high, unit)):.4g} {unit}"


def read_quantities(column: Column) -> tuple[np.ndarray, np.ndarray]:
    numbers, units = _read_numbers(column)
    attribute = column.attribute
    bare = np.isfinite(numbers) & (units == "")
    if column.unit:
        units = np.where(bare, column.unit, units)
    elif bare.any() and attribute.dimension != "money":
        units = np.where(bare, decide_units(column, numbers, bare), units)
    elif attribute.dimension == "money":
        units = np.where(bare, "money", units)
    values = np.full(len(numbers), np.nan)
    for unit in {u for u in units[np.isfinite(numbers)] if u}:
        here = units == unit
        values[here] = from_unit(numbers[here], unit, attribute.dimension)
    undecided = np.isfinite(numbers) & (units == "")
    column.note("unit_unknown", Severity.DOUBTS, undecided, f"a bare number, and no unit makes it a usual {attribute.label.lower()}", "cell not used; write the unit in the heading or the cell")
    plain = {"m": 1.0, "Pa": 1.0, "N m": 1.0, "C": 1.0, "K": 1.0, "rad": 1.0, "money": 1.0}
    origin = np.where(np.isin(units, list(plain)), Origin.READ, Origin.CONVERTED)
    return _limit(column, values, origin)


def read_plain_numbers(column: Column) -> tuple[np.ndarray, np.ndarray]:
    numbers, _units = _read_numbers(column)
    return _limit(column, numbers, np.full(len(numbers), Origin.READ))


def read_counts(column: Column) -> tuple[np.ndarray, np.ndarray]:
    numbers, _units = _read_numbers(column)
    broken = np.isfinite(numbers) & (numbers != np.round(numbers))
    column.note("not_whole", Severity.DOUBTS, broken, "not a whole number", "cell not used")
    numbers = np.where(broken, np.nan, numbers)
    return _limit(column, numbers, np.full(len(numbers), Origin.READ))


def _day_first(texts: list[str]) -> tuple[bool | None, np.ndarray]:
    """(order of day and month that the column itself shows, mask of texts that stay ambiguous)."""
    parts = [re.match(r"^(\d{1,2})[-/. ](\d{1,2})[-/. ]\d{2,4}", t.strip()) for t in texts]
    first = any(p and int(p.group(1)) > 12 for p in parts)
    second = any(p and int(p.group(2)) > 12 for p in parts)
    unclear = np.array([bool(p) and int(p.group(1)) <= 12 and int(p.group(2)) <= 12 and p.group(1) != p.group(2) for p in parts], dtype=bool)
    if first and not second:
        return True, np.zeros(len(texts), dtype=bool)
    if second and not first:
        return False, np.zeros(len(texts), dtype=bool)
    return None, unclear


def read_dates(column: Column) -> tuple[np.ndarray, np.ndarray]:
    if column.numeric:
        numbers = column.cells.to_numpy(dtype=float)
        serial = (numbers >= 9000) & (numbers <= 73000)
        years = np.where((numbers >= 1800) & (numbers <= 2200), numbers, np.nan)
        if serial.any():
            unique, inverse = np.unique(numbers[serial], return_inverse=True)
            years[serial] = np.array([one.from_serial(v)[0] for v in unique])[inverse]
            column.note("day_numbers", Severity.NOTES, serial, "a spreadsheet's day number", "read as a date")
        bad = np.isfinite(numbers) & np.isnan(years)
        column.note("unreadable", Severity.DOUBTS, bad, "not a date or year; accepted: 1998, 1998-05-12, 12 May 1998", "cell not used")
        return years, np.where(np.isnan(years), Origin.MISSING, Origin.READ).astype(np.uint8)
    if column.cells.dtype.kind == "M":
        stamps = pd.to_datetime(column.cells)
        length = np.where(stamps.dt.is_leap_year, 366.0, 365.0)
        years = (stamps.dt.year + (stamps.dt.dayofyear - 1) / length).to_numpy(dtype=float)
        return years, np.where(np.isnan(years), Origin.MISSING, Origin.READ).astype(np.uint8)
    order, unclear = _day_first(column.texts)
    values, doubts, errors = [], [], []
    for value, text, missing in zip(column.unique, column.texts, column.missing, strict=True):
        found = (np.nan, "", "")
        if missing:
            pass
        elif isinstance(value, (datetime.date, datetime.datetime)):
            found = (one.from_datetime(value), "", "")
        elif isinstance(value, (int, float, np.number)) and not isinstance(value, bool):
            year, doubt = one.from_serial(float(value))
            found = (year, doubt, "" if year == year else "not a date or year")
        else:
            found = one.read_date(text, order)
        values.append(found[0])
        doubts.append(found[1])
        errors.append(f"{found[2]}; accepted: 1998, 1998-05-12, 12 May 1998" if found[2] else "")
    column.note_each("unreadable", Severity.DOUBTS, errors, "cell not used")
    column.note_each("written_loosely", Severity.NOTES, doubts, "date used")
    column.note("day_or_month", Severity.NOTES, column.rows_of(unclear), "day and month could be the other way round", "read as day, month, year")
    years = column.spread(values, float, np.nan)
    return years, np.where(np.isnan(years), Origin.MISSING, Origin.READ).astype(np.uint8)


def read_date_lists(column: Column) -> tuple[np.ndarray, np.ndarray]:
    if column.numeric or column.cells.dtype.kind == "M":
        years, origin = read_dates(column)
        lists = np.empty(len(years), dtype=object)
        for i, year in enumerate(years):
            lists[i] = (float(year),) if year == year else None
        return lists, origin
    order, _unclear = _day_first([part for text in column.texts for part in re.split(r"[;,|\n]", text)])
    values, errors = [], []
    for value, text, missing in zip(column.unique, column.texts, column.missing, strict=True):
        found, bad = [], ""
        if missing:
            pass
        elif isinstance(value, (datetime.date, datetime.datetime)):
            found = [one.from_datetime(value)]
        else:
            for part in re.split(r"[;|\n]|,(?!\s*\d{4}\b)", text):
                if part.strip():
                    year, _doubt, error = one.read_date(part, order)
                    if error:
                        bad = f"{part.strip()[:30]!r} is {error}; accepted: dates separated by semicolons"
                    else:
                        found.append(year)
        values.append(tuple(sorted(found)) or None)
        errors.append(bad)
    column.note_each("unreadable", Severity.DOUBTS, errors, "that part not used")
    lists = column.spread(values, object, None)
    known = np.array([value is not None for value in lists], dtype=bool)
    return lists, np.where(known, Origin.READ, Origin.MISSING).astype(np.uint8)


def read_categories(column: Column) -> tuple[np.ndarray, np.ndarray]:
    if column.numeric:
        column = Column(column.attribute, column.heading, column.unit, pd.Series(written(column.cells), dtype=object), column.ledger)
    values, doubts, errors, same = [], [], [], []
    for text, missing in zip(column.texts, column.missing, strict=True):
        choice, doubt, error = one.read_category(text, column.attribute)
        if missing and (doubt or error):  # "none" is a choice of some attributes and a gap in others
            choice, doubt, error = None, "", ""
        values.append(choice)
        doubts.append(doubt)
        errors.append(f"{error}; accepted: {', '.join(column.attribute.choices)}" if error else "")
        same.append(choice == text)
    column.note_each("not_a_choice", Severity.DOUBTS, errors, "cell not used")
    column.note_each("read_by_likeness", Severity.DOUBTS, doubts, "used as said")
    chosen = column.spread(values, object, None)
    origin = np.where(column.rows_of(np.array(same, dtype=bool)), Origin.READ, Origin.CONVERTED)
    return chosen, np.where(pd.isna(chosen), Origin.MISSING, origin).astype(np.uint8)


def read_texts(column: Column) -> tuple[np.ndarray, np.ndarray]:
    cells = column.cells
    code, unique = pd.factorize(cells if cells.dtype.kind not in "fM" and cells.dtype != object else pd.Series(written(cells), dtype=object))
    unique = [text if isinstance(text, str) else _text(text) for text in unique]
    kept = [None if column.attribute.kind == "id" and is_missing_word(t) or not t.strip() else t.strip() for t in unique]
    if column.attribute.kind == "text":
        kept = [None if t is not None and is_missing_word(t) else t for t in kept]
    values = np.array([*kept, None], dtype=object)[code]
    return values, np.where(pd.isna(values), Origin.MISSING, Origin.READ).astype(np.uint8)


READERS = {
    "quantity": read_quantities,
    "number": read_plain_numbers,
    "count": read_counts,
    "date": read_dates,
    "dates": read_date_lists,
    "category": read_categories,
    "text": read_texts,
    "id": read_texts,
}
