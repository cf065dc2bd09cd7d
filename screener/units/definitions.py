"""Units: factors to SI, how people spell them, and how they are shown.

Factors are exact by definition, after NIST Special Publication 811 (2008),
Appendix B: inch 0.0254 m, pound 0.453 592 37 kg, standard gravity
9.806 65 m/s2, standard atmosphere 101 325 Pa. Water columns are conventional
water: 1000 kg/m3 under standard gravity. Temperatures are deg C inside.
"""

from __future__ import annotations

import math
import unicodedata
from functools import lru_cache

import numpy as np

INCH = 0.0254
FOOT = 12 * INCH
GRAVITY = 9.80665
POUND_FORCE = 0.45359237 * GRAVITY
PSI = POUND_FORCE / INCH**2
ATMOSPHERE = 101325.0
WATER_METRE = 1000.0 * GRAVITY

# dimension -> unit -> (factor to SI, offset to SI)
UNITS: dict[str, dict[str, tuple[float, float]]] = {
    "length": {
        "m": (1, 0), "mm": (1e-3, 0), "cm": (1e-2, 0), "km": (1e3, 0), "um": (1e-6, 0),
        "in": (INCH, 0), "ft": (FOOT, 0), "yd": (3 * FOOT, 0), "mi": (5280 * FOOT, 0), "mil": (1e-3 * INCH, 0),
    },
    "pressure": {
        "Pa": (1, 0), "kPa": (1e3, 0), "MPa": (1e6, 0), "bar": (1e5, 0), "mbar": (1e2, 0), "psi": (PSI, 0), "ksi": (1e3 * PSI, 0),
        "atm": (ATMOSPHERE, 0), "kgf/cm2": (1e4 * GRAVITY, 0), "m head": (WATER_METRE, 0), "ft head": (WATER_METRE * FOOT, 0),
    },
    "torque": {
        "N m": (1, 0), "ft lb": (POUND_FORCE * FOOT, 0), "in lb": (POUND_FORCE * INCH, 0), "kgf m": (GRAVITY, 0), "kN m": (1e3, 0), "daN m": (10, 0),
    },
    "force": {"N": (1, 0), "kN": (1e3, 0), "lbf": (POUND_FORCE, 0), "kip": (1e3 * POUND_FORCE, 0)},
    "temperature": {"C": (1, 0), "F": (5 / 9, -32 * 5 / 9), "K": (1, -273.15)},
    "temperature_difference": {"K": (1, 0), "C difference": (1, 0), "F difference": (5 / 9, 0)},
    "angle": {"rad": (1, 0), "deg": (math.pi / 180, 0)},
    "money": {"money": (1, 0)},
}
UNITS["stress"] = UNITS["pressure"]

# Spellings by dimension and unit, separated by "|"; compared in lower case, without spaces and dots in them.
_SPELLED: dict[str, dict[str, str]] = {
    "length": {
        "m": "m|metre|meter|metres|meters|mtr|mtrs", "mm": "mm|mms|millimetre|millimeter|millimetres|millimeters", "cm": "cm|centimetres|centimeters",
        "km": "km|kilometre|kilometer|kilometres|kilometers", "um": "um|µm|μm|micron|microns", "mil": "mil|mils|thou",
        "in": "in|inch|inches|ins|\"|''|-in|-inch", "ft": "ft|feet|foot|'|-ft|-foot", "yd": "yd|yard|yards", "mi": "mi|mile|miles",
    },
    "pressure": {
        "Pa": "pa|pascal|pascals", "kPa": "kpa|kpag|kpa(g)|kpagauge|kn/m2", "MPa": "mpa|mpag|mpa(g)|n/mm2|mn/m2",
        "bar": "bar|bars|barg|bar(g)|bargauge", "mbar": "mbar|millibar",
        "psi": "psi|psig|psi(g)|psigauge|lb/in2|lbf/in2|lbs/in2|lb/sqin|lbs/sqin|lbf/sqin|lb|lbs|#",
        "ksi": "ksi|kpsi", "atm": "atm", "kgf/cm2": "kg/cm2|kgf/cm2|kp/cm2|at|kg/sqcm|kgf/sqcm",
        "m head": "m|mh2o|mwc|mwg|mws|mhead|mofhead|mheadofwater|metreshead|metershead|metresofhead|metersofhead|mofwater|mwater",
        "ft head": "ft|fth2o|fthead|ftofhead|feethead|feetofhead|ftofwater|ftwater|ftwc",
    },
    "torque": {
        "N m": "nm|n-m|n*m|newtonmetre|newtonmeter|newtonmetres|newtonmeters",
        "ft lb": "ft-lb|ftlb|ft-lbs|ftlbs|lb-ft|lbft|lbs-ft|lbsft|lbf-ft|lbfft|ft-lbf|ftlbf|ft/lb|ft/lbs|ft*lb|lb*ft|ft*lbf|lbf*ft|footpounds|footpound|foot-pounds|ftpounds|poundfeet|pound-feet|poundft",
        "in lb": "in-lb|inlb|inlbs|in-lbs|in-lbf|inlbf|lb-in|lbin|lbf-in|lbfin|inch-pounds|inchpounds",
        "kgf m": "kgm|kgfm|kg-m|kgf-m|kg*m|mkg|m-kg|kpm", "kN m": "knm|kn-m", "daN m": "danm|dan-m",
    },
    "force": {"N": "n", "kN": "kn", "lbf": "lbf|lb", "kip": "kip|kips"},
    "temperature": {
        "C": "c|°c|degc|degreec|degreesc|degcelsius|degreescelsius|degreecelsius|celsius|centigrade",
        "F": "f|°f|degf|degreef|degreesf|degfahrenheit|degreesfahrenheit|fahrenheit", "K": "k|kelvin",
    },
    "temperature_difference": {
        "K": "k|kelvin|c|°c|degc|degreesc|degreec|celsius|cdifference|°cdifference|degcdifference|deltac",
        "F difference": "f|°f|degf|degreesf|degreef|fahrenheit|fdifference|°fdifference|degfdifference|deltaf",
    },
    "angle": {"deg": "deg|degs|degree|degrees|°", "rad": "rad|radian|radians"},
    "money": {"money": "money|usd|us$|eur|gbp|cad|aud|nzd|chf|sek|nok|dkk|pln|zar|inr|jpy|cny|brl|mxn|$|€|£|¥|dollars|euro|euros|pounds"},
}
_SPELLED["stress"] = {unit: words for unit, words in _SPELLED["pressure"].items() if unit not in ("m head", "ft head", "mbar", "atm")}
_SPELLED["stress"]["psi"] = "psi|lb/in2|lbf/in2|lbs/in2|lb/sqin|lbf/sqin"
SPELLINGS = {dimension: {word: unit for unit, words in units.items() for word in words.split("|")} for dimension, units in _SPELLED.items()}

LONGEST = 40
_ALIKE = str.maketrans({"º": "°", "˚": "°", "″": '"', "”": '"', "′": "'", "’": "'", "·": None, "⋅": None, "•": None})

# Machine suffixes are units too.
MACHINE = {
    "kpa": ("pressure", "kPa"), "mpa": ("pressure", "MPa"), "mm": ("length", "mm"), "m": ("length", "m"), "kn": ("force", "kN"), "nm": ("torque", "N m"),
    "c": ("temperature", "C"), "k": ("temperature_difference", "K"), "deg": ("angle", "deg"), "money": ("money", "money"),
}  # fmt: skip
_LABELS = {
    "N m": "N·m", "kN m": "kN·m", "daN m": "daN·m", "kgf m": "kgf·m", "ft lb": "ft·lb", "in lb": "in·lb", "kgf/cm2": "kgf/cm²",
    "C": "°C", "F": "°F", "F difference": "°F", "C difference": "K", "deg": "°", "money": "", "um": "µm",
}  # fmt: skip


def _factor(unit: str, dimension: str = "") -> tuple[float, float]:
    if unit == "K" and dimension != "temperature":
        return UNITS["temperature_difference"]["K"]
    for units in [UNITS[dimension]] if dimension else UNITS.values():
        if unit in units:
            return units[unit]
    if unit in MACHINE:
        of, shown = MACHINE[unit]
        return UNITS[of][shown]
    raise KeyError(unit)


def to_unit(values_si, unit: str, dimension: str = ""):
    """SI values in `unit` (a shown unit or a machine suffix). Temperatures: from deg C.

    dimension is needed only for "K": a difference, unless "temperature" is said.
    """
    factor, offset = _factor(unit, dimension)
    return (np.asarray(values_si, dtype=float) - offset) / factor


def from_unit(values, unit: str, dimension: str = ""):
    """Values in `unit` as SI. Temperatures: to deg C."""
    factor, offset = _factor(unit, dimension)
    return np.asarray(values, dtype=float) * factor + offset


@lru_cache(maxsize=4096)
def find_unit(text: str, dimension: str) -> str | None:
    """The unit that a spelling means in a dimension, or None."""
    if dimension not in SPELLINGS:
        return None
    if len(text) > LONGEST:
        return None
    word = text if text.isascii() else unicodedata.normalize("NFKC", text.translate(_ALIKE))
    word = "".join(word.lower().replace("^2", "2").split())
    spelled = SPELLINGS[dimension]
    for candidate in (word, word.replace(".", "")):
        if candidate in spelled:
            return spelled[candidate]
    return None


def dimensions_of(text: str) -> tuple[str, ...]:
    """Every dimension in which a spelling is a unit."""
    return tuple(dimension for dimension in SPELLINGS if find_unit(text, dimension))


def same_quantity(first: float, first_unit: str, second: float, second_unit: str, dimension: str, tolerance: float = 0.04) -> bool:
    """Whether one quantity written twice in two units is the same within rounding (relative)."""
    a, b = (float(from_unit(value, unit, dimension)) for value, unit in ((first, first_unit), (second, second_unit)))
    return abs(a - b) <= tolerance * max(abs(a), abs(b), 1e-30)


def unit_label(unit: str) -> str:
    """A unit as printed for people: N·m, °F, kgf/cm²."""
    return _LABELS.get(unit, unit)


def show(value_si: float, dimension: str, unit: str, digits: int = 4) -> str:
    """A quantity for people, e.g. show(1.034e6, "pressure", "psi") is "150 psi"; "unknown" for NaN.

    digits: significant digits. What it shows, read_quantity reads back.
    """
    value = float(to_unit(value_si, unit, dimension))
    if not math.isfinite(value):
        return "unknown"
    places = 0 if value == 0 else max(0, digits - 1 - math.floor(math.log10(abs(value))))
    text = f"{value:.{min(places, 12)}f}"
    if "." in text:
        text = text.rstrip("0").rstrip(".")
    label = unit_label(unit)
    return f"{'0' if text == '-0' else text} {label}".strip()
