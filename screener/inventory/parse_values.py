"""One written cell to one value: numbers, counts, dates, categories."""

from __future__ import annotations

import calendar
import datetime
import difflib
import math
import re
from functools import cache

from screener.columns import Attribute
from screener.inventory.header_rows import normal
from screener.units import is_missing_word, read_quantity, tidy

MONTHS = {name.lower(): k for k, name in enumerate(calendar.month_name) if name} | {name.lower(): k for k, name in enumerate(calendar.month_abbr) if name}
SEASONS = {"winter": 0.04, "spring": 0.29, "summer": 0.54, "autumn": 0.79, "fall": 0.79}


def decimal_year(year: int, month: int, day: int) -> float:
    """A date as a decimal year."""
    start = datetime.date(year, 1, 1)
    length = 366 if calendar.isleap(year) else 365
    return year + (datetime.date(year, month, day) - start).days / length


def read_date(text: str, day_first: bool | None = None) -> tuple[float, str, str]:
    """(decimal year or NaN, doubt, error) of a written date or year.

    day_first settles 03/04/2011; None: day first unless the second part is above 12.
    """
    word = tidy(text)
    doubt = ""
    loose = re.match(r"^(?:c\.?|ca\.?|circa|about|approx\.?|~|before|after|pre|post)[ -]?\s*(?=\d)", word, re.I)
    if loose:
        word, doubt = word[loose.end() :], "written as approximate"
    word = word.rstrip("?").strip() if word.endswith("?") else word
    if text.strip().endswith("?"):
        doubt = "written with a question mark"
    try:
        if re.fullmatch(r"(1[89]|20|21)\d\d(\.0+)?", word):
            return float(word), doubt, ""
        if re.fullmatch(r"(1[89]|20)\d0'?s", word):
            return float(word[:4]) + 5.0, "a decade; its middle is used", ""
        span = re.fullmatch(r"((?:19|20)\d\d)\s*[-/]\s*((?:19|20)?\d\d)", word)
        if span:
            first = int(span.group(1))
            last = int(span.group(2)) if len(span.group(2)) == 4 else first // 100 * 100 + int(span.group(2))
            if 0 <= last - first <= 20 and not (len(span.group(2)) == 2 and int(span.group(2)) <= 12):
                return 0.5 * (first + last), "a span of years; its middle is used", ""
        iso = re.match(r"^(\d{4})[-/.](\d{1,2})(?:[-/.](\d{1,2}))?(?:[T ]\d{1,2}:\d{2}.*)?$", word)
        if iso:
            return decimal_year(int(iso.group(1)), int(iso.group(2)), int(iso.group(3) or 15)), doubt, ""
        parts = re.match(r"^(\d{1,2})[-/. ](\d{1,2})[-/. ](\d{4}|\d{2})(?:\s+\d{1,2}:\d{2}.*)?$", word)
        if parts:
            a, b, year = int(parts.group(1)), int(parts.group(2)), int(parts.group(3))
            if year < 100:
                year += 2000 if year < 50 else 1900
            first_is_day = day_first if day_first is not None else b <= 12
            if a > 12:
                first_is_day = True
            if b > 12:
                first_is_day = False
            day, month = (a, b) if first_is_day else (b, a)
            return decimal_year(year, month, day), doubt, ""
        month_year = re.match(r"^(\d{1,2})[-/.](\d{4})$", word)
        if month_year:
            return decimal_year(int(month_year.group(2)), int(month_year.group(1)), 15), doubt, ""
        named = re.match(r"^(?:(\d{1,2})(?:st|nd|rd|th)?[-. ]+)?([A-Za-z]{3,9})\.?[-, ]+(?:(\d{1,2})(?:st|nd|rd|th)?,? +)?(\d{4}|'?\d{2})$", word)
        if named:
            year = int(named.group(4).lstrip("'"))
            if year < 100:
                year += 2000 if year < 50 else 1900
            name = named.group(2).lower()
            if name in SEASONS:
                return year + SEASONS[name], "a season; its middle is used", ""
            month = MONTHS.get(name) or MONTHS.get(name[:3])
            if month:
                day = int(named.group(1) or named.group(3) or 15)
                return decimal_year(year, month, day), doubt, ""
    except ValueError:
        return math.nan, "", "no such day in the calendar"
    return math.nan, "", "not a date or year"


def from_datetime(value: object) -> float:
    """A decimal year from a date or datetime object."""
    return decimal_year(value.year, value.month, value.day)


def from_serial(value: float) -> tuple[float, str]:
    """(decimal year, doubt) of a number in a date column: a year, or a spreadsheet's day number."""
    if 1800.0 <= value <= 2200.0:
        return value, ""
    if 9000.0 <= value <= 73000.0:
        day = datetime.date(1899, 12, 30) + datetime.timedelta(days=int(value))
        return decimal_year(day.year, day.month, day.day), "a spreadsheet's day number, read as a date"
    return math.nan, ""


@cache
def _choice_words(choices: tuple[tuple[str, tuple[str, ...]], ...]) -> dict[str, str]:
    words = {}
    for choice, synonyms in choices:
        for text in synonyms:
            words.setdefault(_category_word(text), choice)
    for choice, _synonyms in choices:
        words[_category_word(choice)] = choice
    return words


def _category_word(text: str) -> str:
    return re.sub(r"[^0-9a-z?#+.]+", "", text.lower()) or text.strip()


def read_category(text: str, attribute: Attribute) -> tuple[str | None, str, str]:
    """(choice or None, doubt, error): by wording, then wording inside the text, then likeness."""
    words = _choice_words(tuple(attribute.choices.items()))
    plain = _category_word(tidy(text))
    if plain in words:
        return words[plain], "", ""
    for separator in ("(", ",", ";", " - ", "/"):
        head = _category_word(tidy(text).split(separator)[0])
        if head and head in words:
            return words[head], "", ""
    inside = [(len(w), c) for w, c in words.items() if len(w) >= 3 and w in plain]
    if inside:
        longest = max(inside)
        if all(choice == longest[1] for length, choice in inside if length == longest[0]):
            return longest[1], f"taken for {longest[1]!r} by a part of the text", ""
    close = difflib.get_close_matches(plain, words, n=1, cutoff=0.8)
    if close and len(plain) > 3:
        return words[close[0]], f"taken for {words[close[0]]!r} by likeness", ""
    return None, "", "not one of the choices"


def could_be(value: object, attribute: Attribute) -> bool:
    """Whether a cell could belong to an attribute; used to tell columns apart."""
    kind = attribute.kind
    if isinstance(value, (datetime.date, datetime.datetime)):
        return kind in ("date", "dates")
    if isinstance(value, bool):
        return kind in ("category", "text")
    number = float(value) if isinstance(value, (int, float)) else None
    text = str(value)
    if number is None and is_missing_word(text):
        return True
    if kind in ("text", "id"):
        return kind == "text" or bool(normal(text))
    if kind in ("date", "dates"):
        if number is not None:
            return not math.isnan(from_serial(number)[0])
        return any(not math.isnan(read_date(part)[0]) for part in re.split(r"[;,|\n]", text))
    if kind == "category":
        return read_category(_number_text(value), attribute)[0] is not None
    if number is None:
        read = read_quantity(text, attribute.dimension)
        if read.error:
            return False
        number = read.number
        if read.unit:
            return True
    if kind == "count" and not float(number).is_integer():
        return False
    if attribute.possible and kind in ("number", "count"):
        return attribute.possible[0] <= number <= attribute.possible[1]
    return math.isfinite(number)


def _number_text(value: object) -> str:
    """417.0 in an id or a category is 417."""
    if isinstance(value, float) and value.is_integer():
        return str(int(value))
    return str(value)
