"""Quantities at the edges: read what people write, show what people read. SI inside.

Factors are exact by definition (inch, pound, standard gravity, standard
atmosphere) after NIST SP 811; water columns are conventional water at 4 C.
"""

from __future__ import annotations

import math
import re
import unicodedata
from dataclasses import dataclass

import numpy as np

INCH = 0.0254
POUND_FORCE = 0.45359237 * 9.80665
PSI = POUND_FORCE / INCH**2
WATER_METRE = 1000.0 * 9.80665

# dimension -> unit as shown -> (factor to SI, offset to SI)
UNITS: dict[str, dict[str, tuple[float, float]]] = {
    "length": {"m": (1, 0), "mm": (1e-3, 0), "cm": (1e-2, 0), "km": (1e3, 0), "in": (INCH, 0), "ft": (12 * INCH, 0), "yd": (36 * INCH, 0), "mi": (63360 * INCH, 0)},
    "pressure": {
        "Pa": (1, 0), "kPa": (1e3, 0), "MPa": (1e6, 0), "bar": (1e5, 0), "mbar": (1e2, 0), "psi": (PSI, 0), "ksi": (1e3 * PSI, 0),
        "atm": (101325.0, 0), "kgf/cm2": (98066.5, 0), "m head": (WATER_METRE, 0), "ft head": (WATER_METRE * 12 * INCH, 0),
    },
    "torque": {"N m": (1, 0), "ft lb": (POUND_FORCE * 12 * INCH, 0), "in lb": (POUND_FORCE * INCH, 0), "kgf m": (9.80665, 0), "kN m": (1e3, 0)},
    "force": {"N": (1, 0), "kN": (1e3, 0), "lbf": (POUND_FORCE, 0), "kip": (1e3 * POUND_FORCE, 0)},
    "temperature": {"C": (1, 0), "F": (5 / 9, -32 * 5 / 9), "K": (1, -273.15)},
    "temperature_difference": {"K": (1, 0), "C difference": (1, 0), "F difference": (5 / 9, 0)},
    "angle": {"rad": (1, 0), "deg": (math.pi / 180, 0)},
    "money": {"money": (1, 0)},
}
UNITS["stress"] = UNITS["pressure"]

# Spellings, compared after NFKC, lower case, without dots and inner spaces.
SPELLINGS: dict[str, dict[str, str]] = {
    "length": {"m": "m", "metre": "m", "meter": "m", "metres": "m", "meters": "m", "mm": "mm", "millimetres": "mm", "millimeters": "mm", "cm": "cm", "km": "km", "in": "in", "inch": "in", "inches": "in", "ins": "in", '"': "in", "''": "in", "”": "in", "″": "in", "ft": "ft", "feet": "ft", "foot": "ft", "'": "ft", "mi": "mi", "yd": "yd"},
    "pressure": {"pa": "Pa", "kpa": "kPa", "kpag": "kPa", "kpa(g)": "kPa", "mpa": "MPa", "bar": "bar", "bars": "bar", "barg": "bar", "bar(g)": "bar", "mbar": "mbar", "psi": "psi", "psig": "psi", "psi(g)": "psi", "lb/in2": "psi", "lbf/in2": "psi", "lbs": "psi", "#": "psi", "ksi": "ksi", "atm": "atm", "kg/cm2": "kgf/cm2", "kgf/cm2": "kgf/cm2", "mh2o": "m head", "mwc": "m head", "mhead": "m head", "m": "m head", "mofhead": "m head", "metreshead": "m head", "fthead": "ft head", "fth2o": "ft head", "ft": "ft head", "ftofhead": "ft head", "n/mm2": "MPa", "kn/m2": "kPa"},
    "torque": {"nm": "N m", "n-m": "N m", "n*m": "N m", "newtonmetres": "N m", "ft-lb": "ft lb", "ftlb": "ft lb", "ft-lbs": "ft lb", "ftlbs": "ft lb", "lb-ft": "ft lb", "lbft": "ft lb", "lbf-ft": "ft lb", "lbfft": "ft lb", "ft-lbf": "ft lb", "ftlbf": "ft lb", "in-lb": "in lb", "inlb": "in lb", "inlbs": "in lb", "in-lbs": "in lb", "kgm": "kgf m", "kgfm": "kgf m", "knm": "kN m"},
    "force": {"n": "N", "kn": "kN", "lbf": "lbf", "lb": "lbf", "kip": "kip", "kips": "kip"},
    "temperature": {"c": "C", "°c": "C", "degc": "C", "celsius": "C", "f": "F", "°f": "F", "degf": "F", "fahrenheit": "F", "k": "K"},
    "temperature_difference": {"k": "K", "c": "K", "°c": "K", "degc": "K", "cdifference": "K", "f": "F difference", "°f": "F difference", "degf": "F difference", "fdifference": "F difference"},
    "angle": {"deg": "deg", "degree": "deg", "degrees": "deg", "°": "deg", "rad": "rad"},
    "money": {"money": "money", "usd": "money", "eur": "money", "gbp": "money", "$": "money", "€": "money", "£": "money"},
}
SPELLINGS["stress"] = SPELLINGS["pressure"]
# Machine suffixes are units too.
MACHINE = {"kpa": ("pressure", "kPa"), "mpa": ("pressure", "MPa"), "mm": ("length", "mm"), "m": ("length", "m"), "kn": ("force", "kN"), "nm": ("torque", "N m"), "c": ("temperature", "C"), "k": ("temperature_difference", "K"), "deg": ("angle", "deg"), "money": ("money", "money")}

MISSING_WORDS = frozenset({"", "-", "--", "—", "–", "n/a", "na", "#n/a", "nan", "none", "null", "nil", "unknown", "unk", "?", "??", "tbc", "tbd", "not known", "not recorded", "missing", "x", "nd", "n.d.", "not available", ".", "blank"})


def _factor(unit: str) -> tuple[float, float]:
    for units in UNITS.values():
        if unit in units:
            return units[unit]
    if unit in MACHINE:
        dimension, shown = MACHINE[unit]
        return UNITS[dimension][shown]
    raise KeyError(unit)


def to_unit(values_si, unit: str):
    """SI values in `unit` (a shown unit or a machine suffix). Temperatures: from deg C."""
    factor, offset = _factor(unit)
    return (np.asarray(values_si, dtype=float) - offset) / factor


def from_unit(values, unit: str):
    """Values in `unit` as SI. Temperatures: to deg C."""
    factor, offset = _factor(unit)
    return np.asarray(values, dtype=float) * factor + offset


def find_unit(text: str, dimension: str) -> str | None:
    """The unit that a spelling means in a dimension, or None."""
    if not dimension:
        return None
    word = unicodedata.normalize("NFKC", text).lower().replace("²", "2").replace("·", "").replace(" ", "").strip()
    spelled = SPELLINGS[dimension]
    for candidate in (word, word.rstrip("."), word.replace(".", "")):
        if candidate in spelled:
            return spelled[candidate]
    return None


def tidy(text: str) -> str:
    """NFKC, one kind of space and dash, trimmed; what every parser below starts from."""
    text = unicodedata.normalize("NFKC", text)
    text = text.replace("\u2013", "-").replace("\u2014", "-").replace("\u2212", "-").replace("\u00d7", "x")
    return " ".join(text.split())


def is_missing_word(text: str) -> bool:
    """Whether a cell's text says that there is no value."""
    if len(text) > 24:
        return False
    word = text.strip().lower()
    return word in MISSING_WORDS or (not word.isascii() and tidy(text).lower() in MISSING_WORDS)


@dataclass(frozen=True)
class Read:
    """One cell read: number in its own unit (None: bare), doubt in words, or an error in words."""

    number: float = math.nan
    unit: str | None = None
    doubt: str = ""
    error: str = ""


_NUMBER = r"[-+]?(?:\d[\d ,.']*\d|\d|\.\d+|\d+\.)(?:[eE][-+]?\d+)?"
_FRACTION = re.compile(r"^(?:([-+]?\d{1,3})[ -])?(\d{1,4})\s*/\s*(\d{1,4})(.*)$")
_PLAIN = re.compile(rf"^({_NUMBER})(.*)$")
_RANGE = re.compile(rf"^(\d[\d.,]*)\s*(?:-|to|\.\.)\s*(\d[\d.,]*)\s*([^\d/]*)$", re.I)
_PREFIX = re.compile(r"^(dn|nps|nb|od|ø|⌀|sdr|dr|pc|pn|m|class|approx\.?|about|ca\.?|c\.|usd|eur|gbp|\$|€|£)\s*(?=[\d.])", re.I)


def number_of(text: str, decimal_comma: bool | None = None) -> float | None:
    """A written number: 1,234.5 and 1.234,5, thin spaces, apostrophes. None when it is none.

    decimal_comma settles a lone comma: True decimal, False thousands; None:
    thousands when exactly three digits follow it, otherwise decimal.
    """
    word = text.replace(" ", "").replace("'", "").replace("\u2019", "")
    commas, dots = word.count(","), word.count(".")
    if commas and dots:
        last_comma = word.rfind(",") > word.rfind(".")
        word = word.replace(".", "").replace(",", ".") if last_comma else word.replace(",", "")
    elif commas == 1:
        thousands = bool(re.fullmatch(r"[-+]?[1-9]\d{0,2},\d{3}", word))
        as_decimal = decimal_comma if decimal_comma is not None else not thousands
        word = word.replace(",", "." if as_decimal else "")
    elif commas > 1:
        if not re.fullmatch(r"[-+]?\d{1,3}(,\d{3})+", word):
            return None
        word = word.replace(",", "")
    elif dots > 1:
        if not re.fullmatch(r"[-+]?\d{1,3}(\.\d{3})+", word):
            return None
        word = word.replace(".", "")
    try:
        value = float(word)
    except ValueError:
        return None
    return value if math.isfinite(value) else None


def read_quantity(text: str, dimension: str = "", decimal_comma: bool | None = None) -> Read:
    """Read one written quantity: '150 psi', '1-1/4"', 'DN300', 'PN16', '~150', '100-120'."""
    word = tidy(text)
    doubt = ""
    if word.startswith(("~", "≈")):
        word, doubt = word[1:].strip(), "written as approximate"
    if word.startswith(("<", ">")):
        word, doubt = word[1:].lstrip("= ").strip(), f"written as a bound ({text.strip()[:1]})"
    if word.endswith("?"):
        word, doubt = word.rstrip("? "), "written with a question mark"
    prefix = _PREFIX.match(word)
    unit = None
    if prefix:
        mark = prefix.group(1).lower().rstrip(".")
        word = word[prefix.end() :]
        if mark in ("approx", "about", "ca", "c"):
            doubt = "written as approximate"
        elif mark in ("dn", "m") and dimension == "length":
            unit = "mm"
        elif mark in ("nps", "nb") and dimension == "length":
            unit = "in"
        elif mark == "pc" and dimension == "pressure":
            unit = "psi"
        elif mark == "pn" and dimension == "pressure":
            unit = "bar"
    feet = re.fullmatch(r"(\d+(?:\.\d+)?)\s*(?:'|ft)\s*-?\s*(\d+(?:\.\d+)?)\s*(?:\"|''|in\.?)", word)
    if feet and dimension == "length":
        return Read(float(feet.group(1)) * 12 + float(feet.group(2)), "in", doubt)
    fraction = _FRACTION.match(word)
    if fraction and int(fraction.group(3)):
        whole, top, bottom, rest = fraction.groups()
        value = (abs(int(whole)) if whole else 0) + int(top) / int(bottom)
        if whole and whole.startswith("-"):
            value = -value
        if dimension == "length" and not rest.strip():
            rest = "in"
    else:
        between = _RANGE.match(word)
        if between and number_of(between.group(1)) is not None and number_of(between.group(2)) is not None:
            low, high = number_of(between.group(1), decimal_comma), number_of(between.group(2), decimal_comma)
            if low is not None and high is not None and low < high:
                value, rest, doubt = 0.5 * (low + high), between.group(3), "written as a range; its middle is used"
            else:
                return Read(error="not a number")
        else:
            plain = _PLAIN.match(word)
            if not plain:
                return Read(error="not a number")
            found = number_of(plain.group(1).strip(), decimal_comma)
            if found is None:
                return Read(error="not a number")
            value, rest = found, plain.group(2)
    rest = rest.strip()
    if rest[:1] in "([" and rest[-1:] in ")]":
        rest = rest[1:-1].strip()
    rest = re.sub(r"^(?:unc|8un|un|unf|nps|nom\.?|nominal|ips|dips|iso|od|id|thk|thick|dia\.?)\b\s*|\s+(?:unc|8un|un|unf|nom\.?|nominal|ips|dips|od|id|thk|thick|dia\.?|approx\.?)$", "", rest, flags=re.I).strip()
    if rest:
        found_unit = find_unit(rest, dimension)
        if found_unit is None:
            rest_head = re.split(r"\s+(?=[(\[a-z])", rest, maxsplit=1, flags=re.I)
            found_unit = find_unit(rest_head[0], dimension) if rest_head else None
            if found_unit is None:
                return Read(error=f"unit {rest[:20]!r} not known" if dimension else f"{rest[:20]!r} behind the number")
            doubt = doubt or "words behind the unit"
        unit = found_unit
    return Read(value, unit, doubt)


def accepted(dimension: str) -> str:
    """What a message says would be accepted."""
    if not dimension:
        return "a number"
    return "a number with or without a unit (" + ", ".join(UNITS[dimension]) + ")"
