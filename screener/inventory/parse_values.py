"""Whether cells could belong to an attribute; used to tell columns apart."""

from __future__ import annotations

import datetime
import math
import re

import numpy as np

from screener.columns import Attribute
from screener.inventory.bare_numbers import CANDIDATES
from screener.inventory.parse_column import cell_text
from screener.inventory.parse_dates import from_serial, read_date
from screener.inventory.parse_numbers import is_class_name
from screener.inventory.parse_words import read_category
from screener.units import from_unit, is_missing_word, read_quantity


def could_be(value: object, attribute: Attribute, unit: str = "", ranged: bool = False) -> bool:
    """Whether one cell could belong to an attribute.

    unit: of bare numbers, where the heading names one; ranged: a number must also be usual.
    """
    kind = attribute.kind
    if isinstance(value, (bool, np.bool_)):
        return kind == "text" or (kind == "category" and read_category("yes" if value else "no", attribute, False)[0] is not None)
    if isinstance(value, (datetime.date, datetime.datetime)):
        return kind in ("date", "dates", "text")
    number = float(value) if isinstance(value, (int, float, np.number)) and abs(value) < 1e300 else None
    text = cell_text(value)
    if is_missing_word(text):
        return True
    if kind == "text":
        return True
    if kind == "id":
        return len(text) <= 60 and (number is None or number == int(number))
    if kind in ("date", "dates"):
        return _is_date(number, text)
    if kind == "category":
        return read_category(text, attribute)[0] is not None
    return _is_number(number, text, attribute, unit, ranged)


def _is_date(number: float | None, text: str) -> bool:
    if number is not None:
        return not math.isnan(from_serial(number)[0])
    return any(not math.isnan(read_date(part)[0]) for part in re.split(r"[;,|\n]", text))


def _is_number(number: float | None, text: str, attribute: Attribute, unit: str, ranged: bool) -> bool:
    own = ""
    if number is None:
        read = read_quantity(text, attribute.dimension)
        if read.error or is_class_name(text, attribute):
            return False
        number, own = read.number, read.unit or ""
    if attribute.kind == "count" and number != round(number):
        return False
    if not attribute.possible:
        return True
    low, high = (attribute.plausible or attribute.possible) if ranged else attribute.possible
    if not attribute.dimension:
        return low <= number <= high
    if not ranged:
        return True
    units = [own or unit] if own or unit else CANDIDATES.get(attribute.dimension, ())
    return not units or any(low <= float(from_unit(number, u, attribute.dimension)) <= high for u in units)
