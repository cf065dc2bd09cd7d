"""Columns of quantities, numbers and counts."""

from __future__ import annotations

import datetime
import re

import numpy as np
import pandas as pd

from screener.columns import Attribute
from screener.inventory.bare_numbers import CANDIDATES, STRAYS, USUAL, decide_units
from screener.inventory.parse_column import Column, is_plain
from screener.records import Origin, Severity
from screener.units import UNITS, accepted, from_unit, is_missing_word, read_quantity, separators_in, show, to_unit

SI_UNITS = ("m", "Pa", "N m", "C", "K", "rad", "money")
# "150#" on a ring's paper is the class 150 of its drilling; such a ring is not rated 150 psi by that name.
CLASS_NAME = re.compile(r"(?:class|cl\.?)\s*\d+|\d+\s*(?:#|lbs?\.?)|#\s*\d+", re.I)
CURRENCIES = {"$": "$", "usd": "$", "us$": "$", "€": "€", "eur": "€", "£": "£", "gbp": "£", "¥": "¥", "cad": "CAD", "aud": "AUD", "nzd": "NZD", "chf": "CHF", "a$": "AUD", "c$": "CAD"}
CURRENCY = re.compile(r"[a-z]{0,2}[$€£¥]|\b(?:usd|eur|gbp|cad|aud|nzd|chf)\b", re.I)


def decimal_comma_of(column: Column) -> bool | None:
    """Whether the column writes decimals with commas, decided from all its cells; open cases are findings."""
    with_comma = [i for i, text in enumerate(column.texts) if "," in text and isinstance(column.unique[i], str)]
    if not with_comma:
        return None
    seen = {i: separators_in(column.texts[i]) for i in with_comma}
    dotted = [text for text, value in zip(column.texts, column.unique, strict=True) if isinstance(value, str) and "." in text and "," not in text][:2000]
    comma = any(s.decimal_comma for s in seen.values())
    dot = any(s.decimal_dot for s in seen.values()) or any(separators_in(text).decimal_dot for text in dotted)
    unclear = np.zeros(len(column.unique), dtype=bool)
    unclear[[i for i, s in seen.items() if s.open_comma]] = True
    if comma and not dot:
        return True
    if not unclear.any():
        return None
    decided, severity, why = False, Severity.NOTES, ""
    if comma and dot:
        severity, why = Severity.DOUBTS, "; the column writes decimals both with commas and with dots"
    elif not dot:
        decided, severity, why = _comma_by_range(column, unclear)
    rows = column.rows_of(unclear)
    taken = "decimal" if decided else "thousands"
    column.note(f"comma_read_as_{taken}", severity, rows, f"a lone comma before three digits{why}", "read as a decimal comma" if decided else "read as a thousands separator")
    return decided


def _comma_by_range(column: Column, unclear: np.ndarray) -> tuple[bool, Severity, str]:
    """(decimal?, severity, words): only one reading may be possible for the attribute."""
    attribute = column.attribute
    if not attribute.possible or attribute.dimension in ("", "money"):
        return False, Severity.NOTES, ""
    fits = {False: 0, True: 0}
    for i in np.flatnonzero(unclear):
        for decimal in fits:
            read = read_quantity(column.texts[i], attribute.dimension, decimal)
            unit = read.unit or column.unit
            if not read.error and unit:
                fits[decimal] += attribute.possible[0] <= float(from_unit(read.number, unit, attribute.dimension)) <= attribute.possible[1]
    if fits[True] and not fits[False]:
        return True, Severity.NOTES, "; as thousands it would not be possible"
    if fits[False] and not fits[True]:
        return False, Severity.NOTES, "; as decimals it would not be possible"
    return False, Severity.DOUBTS, "; nothing in the column tells thousands from decimals"


def is_class_name(text: str, attribute: Attribute) -> bool:
    """Whether a text names a class ("150#", "class 150") where a pressure is meant."""
    if attribute.dimension != "pressure" or attribute.name == "pipe_pressure_class" or text[-1:].lower() == "i":
        return False
    name = CLASS_NAME.fullmatch(text.strip())
    return bool(name) and (attribute.name == "stated_rating" or name.group().lower().startswith("cl"))


def _read_cell(column: Column, value: object, text: str, comma: bool | None) -> tuple[float, str, str, str, str]:
    """(number, unit, doubt, remark, error) of one distinct cell."""
    attribute = column.attribute
    if isinstance(value, (bool, np.bool_)):
        return np.nan, "", "", "", "yes or no where a number is expected"
    if isinstance(value, (int, float, np.number)):
        return float(value) if abs(value) < 1e300 else np.inf, "", "", "", ""
    if isinstance(value, (datetime.date, datetime.time)):
        return np.nan, "", "", "", "a date where a number is expected; the spreadsheet may have turned a fraction into a date"
    if is_class_name(text, attribute):
        return np.nan, "", "", "", "a class name, not a pressure"
    read = read_quantity(text, attribute.dimension, comma)
    return read.number, read.unit or "", read.doubt, read.remark, read.error


def _plain_cells(column: Column, comma: bool | None) -> np.ndarray:
    """Which distinct cells are texts of plain numbers, so that they need no closer look."""
    if comma or not column.unique:
        return np.zeros(len(column.unique), dtype=bool)
    texts = pd.Series([value if isinstance(value, str) else "-" for value in column.unique], dtype="str")
    return is_plain(texts)


def _read_numbers(column: Column) -> tuple[np.ndarray, np.ndarray]:
    """(numbers, unit per row: "" bare) of a column with text in it; unreadable cells noted."""
    comma = decimal_comma_of(column)
    empty = (np.nan, "", "", "", "")
    plain = _plain_cells(column, comma)
    reads = [
        (float(text), "", "", "", "") if simple else empty if is_missing_word(text) else _read_cell(column, value, text, comma)
        for value, text, simple in zip(column.unique, column.texts, plain, strict=True)
    ]
    numbers, units, doubts, remarks, errors = (list(part) for part in zip(*reads, strict=True)) if reads else ([], [], [], [], [])
    column.note_each("unreadable", Severity.DOUBTS, errors, "cell not used", accepted(column.attribute.dimension))
    column.note_each("written_loosely", Severity.DOUBTS, doubts, "number used")
    column.note_each("written_with_words", Severity.NOTES, remarks, "number used")
    if column.attribute.dimension == "money":
        _note_currencies(column)
    return column.spread(numbers, float, np.nan), column.spread(units, object, "")


def _note_currencies(column: Column) -> None:
    found = sorted({CURRENCIES.get(mark.lower(), mark) for text in column.texts for mark in CURRENCY.findall(text)})
    if len(found) > 1:
        column.note_column("currencies", Severity.DOUBTS, f"amounts in more than one currency: {', '.join(found)}", "all taken as the owner's currency; nothing is converted")


def _slips(attribute: Attribute, values: np.ndarray, suspect: np.ndarray, units: np.ndarray | str):
    """(why in words, mask) of impossible SI values whose number would be usual in another unit, or with a decimal point."""
    usual = USUAL.get(attribute.name)
    if usual is None or attribute.dimension.startswith("temperature") or not suspect.any():
        return
    places = np.flatnonzero(suspect)
    written = np.broadcast_to(np.asarray(units, dtype=object), values.shape)[places]
    left = np.ones(len(places), dtype=bool)

    def taken(here: np.ndarray) -> np.ndarray:
        left[here] = False
        mask = np.zeros(len(values), dtype=bool)
        mask[places[here]] = True
        return mask

    for meant in CANDIDATES.get(attribute.dimension, ()):
        for unit in _distinct(written[left & (written != meant)]):
            here = left & (written == unit)
            moved = from_unit(to_unit(values[places], unit, attribute.dimension), meant, attribute.dimension)
            here &= (moved >= usual[0]) & (moved <= usual[1])
            if here.any():
                yield f"it would be usual in {meant}, so perhaps the unit is wrong", taken(here)
    for share, words in ((10, "a tenth"), (100, "a hundredth"), (1000, "a thousandth")):
        here = left & (values[places] / share >= usual[0]) & (values[places] / share <= usual[1])
        if here.any():
            yield f"{words} of it would be usual, so perhaps a decimal point is missing", taken(here)


def _limit(column: Column, values: np.ndarray, origin: np.ndarray | Origin, units: np.ndarray | str = "") -> tuple[np.ndarray, np.ndarray]:
    """Drop what is impossible, doubt what is unusual; units: in which each value was taken."""
    attribute = column.attribute
    infinite = np.isinf(values)
    values = np.where(infinite, np.nan, values)
    out = infinite
    if attribute.possible:
        low, high = attribute.possible
        out = (values < low * (1 - 1e-9) - 1e-12) | (values > high * (1 + 1e-9) + 1e-12)
        for why, here in _slips(attribute, values, out, units):
            column.note("unit_slip", Severity.DOUBTS, here, f"not possible for {attribute.label.lower()}; {why}", "cell not used")
            out &= ~here
            values = np.where(here, np.nan, values)
        column.note("out_of_range", Severity.DOUBTS, out | infinite, f"not possible for {attribute.label.lower()}; accepted: {_span(attribute, low, high)}", "cell not used")
        values = np.where(out, np.nan, values)
    else:
        column.note("out_of_range", Severity.DOUBTS, infinite, "not a finite number", "cell not used")
    if attribute.plausible:
        low, high = attribute.plausible
        odd = (values < low * (1 - 1e-9)) | (values > high * (1 + 1e-9))
        column.note("unusual", Severity.DOUBTS, odd, f"unusual for {attribute.label.lower()}; usual: {_span(attribute, low, high)}", "used as written")
    return values, np.where(np.isnan(values), np.uint8(Origin.MISSING), np.asarray(origin, dtype=np.uint8))


def _span(attribute: Attribute, low: float, high: float) -> str:
    if not attribute.dimension or attribute.dimension == "money":
        return f"{low:g} to {high:g}"
    return f"{show(low, attribute.dimension, attribute.metric)} to {show(high, attribute.dimension, attribute.metric)}"


def read_quantities(column: Column) -> tuple[np.ndarray, np.ndarray]:
    """(SI values, origins): each cell's own unit, else the heading's, else one decided from the values."""
    attribute = column.attribute
    default = column.unit or ("money" if attribute.dimension == "money" else "")
    if column.numeric and default:
        values = from_unit(column.floats(), default, attribute.dimension)
        return _limit(column, values, Origin.READ if default in SI_UNITS else Origin.CONVERTED, default)
    if column.numeric:
        numbers, units = column.floats(), np.full(len(column), "", dtype=object)
    else:
        numbers, units = _read_numbers(column)
    known = np.isfinite(numbers)
    bare = known & (units == "")
    if bare.any():
        units = np.where(bare, default or _units_of_bare(column, numbers, units, bare), units)
    values = np.where(np.isinf(numbers), numbers, np.nan)
    origin = np.full(len(numbers), Origin.CONVERTED, dtype=np.uint8)
    left = known.copy()
    for unit in _distinct(units[known]):
        here = left & (units == unit)
        left &= ~here
        values[here] = from_unit(numbers[here], unit, attribute.dimension)
        if unit in SI_UNITS:
            origin[here] = Origin.READ
    column.note("unit_unknown", Severity.DOUBTS, left, f"a bare number, and no unit makes it a usual {attribute.label.lower()}", "cell not used; write the unit in the heading or the cell")
    return _limit(column, values, origin, units)


def _units_of_bare(column: Column, numbers: np.ndarray, units: np.ndarray, bare: np.ndarray) -> np.ndarray:
    """A unit per bare number: that of the column's other cells where it suits them all, else decided from their size."""
    attribute = column.attribute
    nought = bare & (numbers == 0.0) if attribute.dimension != "temperature" else np.zeros(len(bare), dtype=bool)
    sized = bare & ~nought
    made = np.full(len(bare), "", dtype=object)
    if sized.any():
        others = _unit_of_others(column, numbers, units, sized)
        made = np.where(sized, others or decide_units(column, numbers, sized), "")
        if not others:
            _note_either(column, numbers, made, sized)
    made[nought] = next(iter(UNITS[attribute.dimension]))  # nought is nought in any unit
    return made


def _unit_of_others(column: Column, numbers: np.ndarray, units: np.ndarray, sized: np.ndarray) -> str:
    """The unit that nearly all cells with a unit name, where it makes nearly all bare numbers usual; "" otherwise."""
    named, counts = np.unique(units[units != ""].astype(str), return_counts=True)
    usual = USUAL.get(column.attribute.name)
    if not len(named) or usual is None or counts.max() < 0.9 * counts.sum():
        return ""
    unit = str(named[counts.argmax()])
    moved = from_unit(numbers[sized], unit, column.attribute.dimension)
    if ((moved >= usual[0]) & (moved <= usual[1])).mean() < 1.0 - STRAYS:
        return ""
    column.note_column("unit_taken", Severity.NOTES, f"{int(sized.sum()):,} bare numbers, and the heading names no unit", f"all taken as {unit}, the unit of the column's other cells")
    return unit


def _note_either(column: Column, numbers: np.ndarray, made: np.ndarray, sized: np.ndarray) -> None:
    """In a column of several units, bare numbers that would be usual in more than one of them."""
    used = _distinct(made[sized])
    usual = USUAL.get(column.attribute.name)
    if len(used) < 2 or usual is None:
        return
    moved = np.array([from_unit(numbers, unit, column.attribute.dimension) for unit in used])
    either = sized & (((moved >= usual[0]) & (moved <= usual[1])).sum(axis=0) > 1)
    for unit in used:
        column.note("unit_open", Severity.DOUBTS, either & (made == unit), f"a bare number in a column of {' and '.join(used)} that would be usual in more than one of them", f"taken as {unit}; write the unit in the cell")


def _distinct(units: np.ndarray) -> list[str]:
    return sorted(set(units.tolist()) - {""})


def _plain_numbers(column: Column) -> np.ndarray:
    return column.floats() if column.numeric else _read_numbers(column)[0]


def read_plain_numbers(column: Column) -> tuple[np.ndarray, np.ndarray]:
    """(numbers without a dimension, origins)."""
    return _limit(column, _plain_numbers(column), Origin.READ)


def read_counts(column: Column) -> tuple[np.ndarray, np.ndarray]:
    """(whole numbers, origins)."""
    numbers = _plain_numbers(column)
    broken = np.isfinite(numbers) & (numbers != np.round(numbers))
    column.note("not_whole", Severity.DOUBTS, broken, "not a whole number", "cell not used")
    return _limit(column, np.where(broken, np.nan, numbers), Origin.READ)


