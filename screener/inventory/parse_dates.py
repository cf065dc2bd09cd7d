"""Dates and years as people write them, as decimal years."""

from __future__ import annotations

import calendar
import datetime
import math
import re
from collections.abc import Iterable

import numpy as np
import pandas as pd

from screener.inventory.parse_column import Column
from screener.records import Origin, Severity
from screener.units import tidy

ACCEPTED = "1998, 1998-05-12, 12 May 1998"
MONTHS = {name.lower(): k for k, name in enumerate(calendar.month_name) if name} | {name.lower(): k for k, name in enumerate(calendar.month_abbr) if name} | {"sept": 9}
# Middles of the seasons of the northern half, as shares of a year.
SEASONS = {"winter": 0.04, "spring": 0.29, "summer": 0.54, "autumn": 0.79, "fall": 0.79}
FIRST_YEAR, LAST_YEAR = 1800.0, 2200.0
FIRST_SERIAL, LAST_SERIAL = 9000.0, 73000.0  # spreadsheet day numbers of 1924 to 2099
PIVOT = 50  # two-digit years below it are 20xx
_LOOSE = re.compile(r"^(?:circa|about|approx\.?|before|after|prior to|pre|post|ca\.?|c\.?|<|>|~|est\.?)[ -]*(?=[\da-z'])", re.I)
_TIME = r"(?:[T ]\s*\d{1,2}:\d{2}(?::\d{2}(?:\.\d+)?)?\s*(?:[ap]m|z|[-+]\d{2}:?\d{2})?)?"
_ISO = re.compile(rf"(\d{{4}})[-/.](\d{{1,2}})(?:[-/.](\d{{1,2}}))?{_TIME}", re.I)
_COMPACT = re.compile(r"(1[89]\d\d|20\d\d)(\d\d)(\d\d)")
_PARTS = re.compile(rf"(\d{{1,2}})\s*[-/. ]\s*(\d{{1,2}})\s*[-/. ]\s*(\d{{4}}|'?\d{{2}}){_TIME}", re.I)
_NAMED = re.compile(r"(?:(\d{1,2})(?:st|nd|rd|th)?[-./ ]*(?:of )?)?([A-Za-z]{3,9})\.?[-,./ ]*(?:(\d{1,2})(?:st|nd|rd|th)?,? +)?(\d{4}|'?\d{2})")
_BETWEEN = re.compile(r"[;|\n]|,(?!\s*\d{4}\b)|(?<=\d{4}),|(?<=[/-]\d\d),|\band\b|&")  # "May 12, 1998" stays whole
_SPAN = re.compile(r"((?:18|19|20)\d\d)\s*(?:-|/|to)\s*((?:18|19|20)?\d\d)", re.I)
_DECADE = re.compile(r"(early|mid|late)?[- ]*(?:the )?((?:18|19|20)?\d0)'?s", re.I)
_PART_OF_YEAR = re.compile(r"(early|mid|late|q([1-4])|h([12]))[- /]*((?:18|19|20)\d\d)", re.I)


def decimal_year(year: int, month: int, day: int) -> float:
    """A date as a decimal year; ValueError where the calendar has no such day."""
    start = datetime.date(year, 1, 1)
    return year + (datetime.date(year, month, day) - start).days / (366 if calendar.isleap(year) else 365)


def read_date(text: str, day_first: bool | None = None) -> tuple[float, str, str]:
    """(decimal year or NaN, doubt, error) of a written date or year. Never raises.

    day_first settles 03/04/2011; None: day first unless the second part is
    above 12. A month alone means its middle.
    """
    word = tidy(text)
    if len(word) > 60:
        return math.nan, "", "not a date or year"
    doubt = ""
    if word.endswith("?") or word.startswith("?"):
        word, doubt = word.strip("? "), "written with a question mark"
    loose = _LOOSE.match(word)
    if loose:
        word, doubt = word[loose.end() :], "written as approximate"
    try:
        found = _whole_date(word, day_first) or _loose_date(word)
    except ValueError:
        return math.nan, "", "no such day in the calendar"
    if found is None:
        return math.nan, "", "not a date or year"
    year, more = found
    if not FIRST_YEAR <= year <= LAST_YEAR:
        return math.nan, "", "not a date or year"
    return year, more or doubt, ""


def _whole_date(word: str, day_first: bool | None) -> tuple[float, str] | None:
    """A year, a month or a day of the calendar."""
    if re.fullmatch(r"(18|19|20|21)\d\d(\.\d+)?", word):
        return float(word), ""
    if found := _COMPACT.fullmatch(word):
        return decimal_year(*map(int, found.groups())), ""
    if found := _ISO.fullmatch(word):
        year, month, day = found.groups()
        if day or int(month) <= 12:
            return decimal_year(int(year), int(month), int(day or 15)), ""
    if found := _PARTS.fullmatch(word):
        a, b, year = int(found.group(1)), int(found.group(2)), _full_year(found.group(3))
        first_is_day = b <= 12 if day_first is None else day_first
        first_is_day = True if a > 12 else False if b > 12 else first_is_day
        return decimal_year(year, *((b, a) if first_is_day else (a, b))), ""
    if found := re.fullmatch(r"(\d{1,2})\s*[-/.]\s*(\d{4})", word):
        return decimal_year(int(found.group(2)), int(found.group(1)), 15), ""
    if found := re.fullmatch(r"(\d{5})", word):
        return from_serial(float(word)) if FIRST_SERIAL <= float(word) <= LAST_SERIAL else None
    if found := _NAMED.fullmatch(word):
        before, name, after, year = found.groups()
        month = MONTHS.get(name.lower()) or (MONTHS.get(name[:3].lower()) if any(m.startswith(name.lower()) for m in MONTHS) else None)
        if month and not (before and after):
            return decimal_year(_full_year(year), month, int(before or after or 15)), ""
    return None


def _loose_date(word: str) -> tuple[float, str] | None:
    """Seasons, decades, spans and parts of a year: a middle is used and doubted."""
    if (found := _NAMED.fullmatch(word)) and found.group(2).lower() in SEASONS and not found.group(1) and not found.group(3):
        return _full_year(found.group(4)) + SEASONS[found.group(2).lower()], "a season; its middle is used"
    if found := _DECADE.fullmatch(word):
        part, decade = found.groups()
        start = _full_year(decade) if len(decade) == 2 else int(decade)
        return start + {"early": 2.0, "mid": 5.0, "late": 8.0}.get((part or "mid").lower(), 5.0), "a decade; its middle is used"
    if found := _PART_OF_YEAR.fullmatch(word):
        part, quarter, half, year = found.groups()
        share = (int(quarter) - 0.5) / 4 if quarter else (int(half) - 0.5) / 2 if half else {"early": 1 / 6, "mid": 0.5, "late": 5 / 6}[part.lower()]
        return int(year) + share, "a part of a year; its middle is used"
    if found := _SPAN.fullmatch(word):
        first, last = int(found.group(1)), int(found.group(2))
        last = last if last > 99 else first // 100 * 100 + last
        if 0 < last - first <= 20:
            return 0.5 * (first + last), "a span of years; its middle is used"
    return None


def _full_year(text: str) -> int:
    year = int(text.lstrip("'"))
    return year if year > 99 else year + (2000 if year < PIVOT else 1900)


def from_datetime(value: datetime.date) -> float:
    """A decimal year from a date or datetime object."""
    return decimal_year(value.year, value.month, value.day)


def from_serial(value: float) -> tuple[float, str]:
    """(decimal year or NaN, doubt) of a number in a date column: a year, a compact date, or a spreadsheet's day number."""
    if FIRST_YEAR <= value <= LAST_YEAR:
        return value, ""
    if FIRST_SERIAL <= value <= LAST_SERIAL:
        return from_datetime(datetime.date(1899, 12, 30) + datetime.timedelta(days=int(value))), "a spreadsheet's day number, read as a date"
    if value == value and abs(value) < 1e9 and (found := _COMPACT.fullmatch(f"{value:.0f}")):
        try:
            return decimal_year(*map(int, found.groups())), ""
        except ValueError:
            return math.nan, ""
    return math.nan, ""


def day_first_of(columns: Iterable[Column]) -> bool | None:
    """The order of day and month that all date columns of a table show together; None where they don't."""
    texts = [text for column in columns if not column.numeric and not column.dated for text in column.texts]
    return _shown_order(_pieces(texts))


def _pieces(texts: list[str]) -> list[re.Match]:
    return [found for text in texts for part in re.split(r"[;,|\n]", text) if (found := _PARTS.match(tidy(part)))]


def _shown_order(pieces: list[re.Match]) -> bool | None:
    first = any(int(p.group(1)) > 12 for p in pieces)
    second = any(int(p.group(2)) > 12 for p in pieces)
    return None if first == second else first


def _settle_order(column: Column, of_table: bool | None) -> bool | None:
    """Day first or not for one column, by its own dates, else by those of the table's other columns; open cases noted."""
    own = _shown_order(_pieces(column.texts))
    if own is not None:
        return own
    unclear = [any(int(p.group(1)) <= 12 and int(p.group(2)) <= 12 and p.group(1) != p.group(2) for p in _pieces([text])) for text in column.texts]
    rows = column.rows_of(unclear)
    if of_table is None:
        column.note("day_or_month", Severity.NOTES, rows, "day and month could be the other way round", "read as day, month, year")
        return None
    order = "day, month, year" if of_table else "month, day, year"
    column.note("day_or_month", Severity.NOTES, rows, "day and month could be the other way round; the file's other date columns show the order", f"read as {order}")
    return of_table


def _with_origin(years: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    return years, np.where(np.isnan(years), Origin.MISSING, Origin.READ).astype(np.uint8)


def read_dates(column: Column, of_table: bool | None = None) -> tuple[np.ndarray, np.ndarray]:
    """(decimal years, origins)."""
    if column.numeric:
        return _numeric_dates(column)
    if column.dated:
        stamps = pd.to_datetime(column.cells)
        length = np.where(stamps.dt.is_leap_year, 366.0, 365.0)
        return _with_origin((stamps.dt.year + (stamps.dt.day_of_year - 1) / length).to_numpy(dtype=float, na_value=np.nan))
    order = _settle_order(column, of_table)
    reads = [(np.nan, "", "") if missing else _date_of(value, text, order) for value, text, missing in zip(column.unique, column.texts, column.missing, strict=True)]
    values, doubts, errors = (list(part) for part in zip(*reads, strict=True)) if reads else ([], [], [])
    column.note_each("unreadable", Severity.DOUBTS, errors, "cell not used", ACCEPTED)
    column.note_each("written_loosely", Severity.DOUBTS, doubts, "date used")
    return _with_origin(column.spread(values, float, np.nan))


def _numeric_dates(column: Column) -> tuple[np.ndarray, np.ndarray]:
    numbers = column.floats()
    years = np.where((numbers >= FIRST_YEAR) & (numbers <= LAST_YEAR), numbers, np.nan)
    other = np.isfinite(numbers) & np.isnan(years)
    if other.any():
        unique, inverse = np.unique(numbers[other], return_inverse=True)
        years[other] = np.array([from_serial(float(value))[0] for value in unique])[inverse]
    serial = other & (numbers <= LAST_SERIAL) & np.isfinite(years)
    column.note("day_numbers", Severity.NOTES, serial, "a spreadsheet's day number", "read as a date")
    column.note("unreadable", Severity.DOUBTS, ~np.isnan(numbers) & np.isnan(years), f"not a date or year; accepted: {ACCEPTED}", "cell not used")
    return _with_origin(years)


def _date_of(value: object, text: str, order: bool | None) -> tuple[float, str, str]:
    if isinstance(value, datetime.date):
        return from_datetime(value), "", ""
    if isinstance(value, (int, float, np.number)) and not isinstance(value, (bool, np.bool_)):
        year, doubt = from_serial(float(value))
        return year, doubt, "" if year == year else "not a date or year"
    return read_date(text, order)


def read_date_lists(column: Column, of_table: bool | None = None) -> tuple[np.ndarray, np.ndarray]:
    """(object array of tuples of decimal years or None, origins)."""
    if column.numeric or column.dated:
        years, origin = read_dates(column)
        lists = np.empty(len(years), dtype=object)
        known = np.flatnonzero(~np.isnan(years))
        for i in known:
            lists[i] = (float(years[i]),)
        return lists, origin
    order = _settle_order(column, of_table)
    values, doubts, errors = [], [], []
    for value, text, missing in zip(column.unique, column.texts, column.missing, strict=True):
        found, doubt, bad = ((), "", "") if missing else _dates_of(value, text, order)
        values.append(found or None)
        doubts.append(doubt)
        errors.append(bad)
    column.note_each("unreadable", Severity.DOUBTS, errors, "that part not used", "dates separated by semicolons")
    column.note_each("written_loosely", Severity.DOUBTS, doubts, "date used")
    lists = column.spread(values, object, None)
    known = np.array([value is not None for value in lists], dtype=bool)
    return lists, np.where(known, Origin.READ, Origin.MISSING).astype(np.uint8)


def _dates_of(value: object, text: str, order: bool | None) -> tuple[tuple[float, ...], str, str]:
    """(dates of one cell in order, doubt, error)."""
    if not isinstance(value, str):
        year, doubt, error = _date_of(value, text, order)
        return ((year,) if year == year else ()), doubt, error
    found, doubts, bad = [], "", ""
    for part in _BETWEEN.split(text):
        if part.strip():
            year, doubt, error = read_date(part, order)
            doubts = doubts or doubt
            if error:
                bad = bad or f"part of the cell is {error}"
            else:
                found.append(year)
    return tuple(sorted(found)), doubts, bad
