"""One written quantity to a number and a unit. Nothing is evaluated; what is not understood is an error in words."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass, replace

from screener.units.definitions import ATMOSPHERE, UNITS, dimensions_of, find_unit, from_unit, same_quantity
from screener.units.numbers import NUMBER, number_of, tidy

LONGEST = 80
_SIMPLE = re.compile(r"([-+]?\d{1,15}(?:\.\d{1,15})?) ?([a-zA-Z][a-zA-Z0-9/-]*)?")
_PLAIN = re.compile(NUMBER, re.I)
_FRACTION = re.compile(r"([-+]?)(?:(\d{1,3})(?:\s*-\s*|\s+|\.))?(\d{1,3})\s*/\s*(\d{1,2})(?![\d.,/])")
_FEET = re.compile(r"(\d+(?:\.\d+)?)\s*(?:'|ft\.?|feet|foot)\s*-?\s*([\d][\d ./-]*?)\s*(?:\"|''|in\.?|inch(?:es)?)?")
_STATION = re.compile(r"(?:sta\.?|station|ch\.?|chainage|km)?\s*(\d{1,4})\s*\+\s*(\d{2,3})(\.\d+)?(?:\s*(m|ft))?", re.I)
_MINUTES = re.compile(r"(\d+)\s*°\s*(\d{1,2})\s*'(?:\s*(\d{1,2})\s*\")?")
_PREFIX = re.compile(r"(dn|nps|nb|od|id|dia\.?|diam\.?|Ø|d|sdr|dr|pc|pn|m|class|cl\.?|usd|eur|gbp|cad|aud|[a-z]{0,2}[$€£¥])\s*[:=-]?\s*(?=[\d.])", re.I)
_THREAD = re.compile(r"(?:\s*-\s*\d{1,2})?\s*(?:8\s?un|unc|unf|unr|un|bsw|bsf|all\s?thread)\b.*$", re.I)
_METRIC_THREAD = re.compile(r"^(m\s?\d+(?:\.\d+)?)\s*(?:x\s*\d+(?:\.\d+)?)+\s*(?:mm|lg|long)?$", re.I)
_LEADING = re.compile(r"(?:(approximately|approx\.?|about|around|circa|ca\.?|c\.|est\.?|estimated|say|nom\.?|nominal(?:ly)?)\s*|([~≈±]|\?)\s*|(max\.?|maximum|min\.?|minimum|up to|<=|>=|[<>≤≥])\s*)(?=[^a-z]|dn|pn|pc|nps|od|m\d)", re.I)
_TRAILING = re.compile(r"\s*(?:(\?+)|\(?\b(approx(?:imately)?\.?|est\.?|estimated|assumed|tbc|tbd|or so)\)?|\(?\b(max\.?|maximum|min\.?|minimum)\)?|(\+))$", re.I)
_TOLERANCE = re.compile(r"\s*(?:±|\+\s?/\s?-)\s*[\d.,]+\s*%?")
_IDLE = re.compile(r"\(?(?:nom\.?|nominal|ips|dips|iso|od|o\.d\.|dia\.?|diam\.?|thk\.?|thick|long|lg|wide|gauge|gage|g|static)\)?", re.I)
_COUNTED = re.compile(r"(?:\(?s?dr\)?|no\.?|nos\.?|off|ea\.?|each|pcs\.?|x|bolts?|studs?|sets?|times|points?|pts\.?|customers?|connections?|properties|cycles|starts)?\s*(?:(?:per|/|a|each)\s*(?:day|d))?", re.I)
_LARGE = {"k": 1e3, "thousand": 1e3, "m": 1e6, "mn": 1e6, "million": 1e6}
_PREFIX_UNITS = {"length": {"dn": "mm", "m": "mm", "nps": "in", "nb": "in"}, "pressure": {"pc": "psi", "pn": "bar"}}
_PREFIX_PLAIN = {"length": {"od", "id", "dia", "diam", "ø", "d"}, "": {"sdr", "dr"}, "pressure": {"class", "cl"}}


@dataclass(frozen=True)
class Read:
    """One cell read: number in its own unit (None: bare).

    doubt: words when the number is used and doubted; remark: words worth a
    note only; error: words when there is no number to use.
    """

    number: float = math.nan
    unit: str | None = None
    doubt: str = ""
    error: str = ""
    remark: str = ""


def read_quantity(text: str, dimension: str = "", decimal_comma: bool | None = None) -> Read:
    """Read one written quantity: '150 psi', '1-1/4"', 'DN300', 'PN16', '~150', '100-120'. Never raises."""
    if simple := _simple(text, dimension, decimal_comma):
        return simple
    word = tidy(text)
    if len(word) > LONGEST:
        return Read(error="too long for a number")
    word, doubt = _marks(word)
    if dimension == "length":
        special = _special_length(word)
        if special:
            return replace(special, doubt=special.doubt or doubt)
        word = _without_thread(word)
    if dimension == "angle" and (found := _MINUTES.fullmatch(word)):
        degrees, minutes, seconds = (float(part or 0) for part in found.groups())
        return Read(degrees + minutes / 60 + seconds / 3600, "deg", doubt)
    word = _TOLERANCE.sub(lambda _: " ", word) if (toleranced := bool(_TOLERANCE.search(word))) else word
    found, rest = _leading_quantity(word, dimension, decimal_comma)
    if not found.error:
        found = _with_rest(found, rest, dimension, decimal_comma)
    if found.error:
        return found
    doubt = doubt or found.doubt
    if dimension == "pressure" and found.unit == "psi" and re.search(r"\d\s*(?:lbs?\b(?!\s*[/f])|#)", word, re.I):
        doubt = doubt or "pounds taken for psi"
    return replace(found, doubt=doubt, remark=found.remark or ("written with a tolerance" if toleranced else ""))


def _simple(text: str, dimension: str, decimal_comma: bool | None) -> Read | None:
    """The common case, quickly: a plain number, or a plain number and a unit."""
    found = _SIMPLE.fullmatch(text)
    if not found or not text.isascii() or (decimal_comma and "." in text):
        return None
    number, word = found.groups()
    if not word:
        return Read(float(number))
    if dimension == "money" or word.lower() in ("lb", "lbs"):
        return None
    unit = find_unit(word, dimension)
    return Read(float(number), unit) if unit else None


def _marks(word: str) -> tuple[str, str]:
    """The text without its marks of doubt, and the doubt in words."""
    doubt = ""
    for _ in range(3):
        lead, trail = _LEADING.match(word), _TRAILING.search(word)
        if lead and lead.end() < len(word):
            about, sign, bound = lead.groups()
            doubt = "written as a bound" if bound else "written with a question mark" if sign == "?" else "written as approximate"
            doubt = "" if about and about.lower().startswith("nom") else doubt
            word = word[lead.end() :]
        elif trail and trail.start() > 0:
            mark, _about, bound, plus = trail.groups()
            doubt = "written with a question mark" if mark else "written as a bound" if bound or plus else "written as approximate"
            word = word[: trail.start()]
        else:
            break
    return word.strip(), doubt


def _special_length(word: str) -> Read | None:
    """Feet and inches, and stationing such as 12+40."""
    feet = _FEET.fullmatch(word)
    if feet:
        inches = _number_or_fraction(feet.group(2).strip())
        if inches is not None and 0 <= inches < 12:
            return Read(float(feet.group(1)) * 12 + inches, "in")
    station = _STATION.fullmatch(word)
    if station:
        whole, part, decimals, unit = station.groups()
        step = 10 ** len(part)
        return Read(float(whole) * step + float(part + (decimals or "")), (unit or ("ft" if step == 100 else "m")).lower())
    return None


def _number_or_fraction(text: str) -> float | None:
    fraction = _FRACTION.fullmatch(text)
    return _fraction_value(fraction)[0] if fraction else number_of(text) if _PLAIN.fullmatch(text) else None


def _without_thread(word: str) -> str:
    metric = _METRIC_THREAD.match(word)
    if metric:
        return metric.group(1)
    thread = _THREAD.search(word)
    if not thread or not thread.start():
        return word
    word = word[: thread.start()]
    return word if re.search(r"[a-z\"']", word, re.I) else f"{word} in"


def _fraction_value(found: re.Match) -> tuple[float | None, str]:
    """(value or None, error) of a fraction; denominators are those of a rule."""
    sign, whole, top, bottom = found.groups()
    top, bottom = int(top), int(bottom)
    if bottom not in (2, 3, 4, 8, 16, 32, 64):
        return None, "not a fraction of an inch rule"
    if top >= bottom:
        return None, "a fraction that could be read two ways; write 1-1/4 or 1.25"
    return (-1.0 if sign == "-" else 1.0) * ((int(whole) if whole else 0) + top / bottom), ""


def _leading_quantity(word: str, dimension: str, decimal_comma: bool | None) -> tuple[Read, str]:
    """(the quantity at the start of `word`, what follows it)."""
    unit, doubt = None, ""
    prefix = _PREFIX.match(word)
    if prefix:
        mark = prefix.group(1).lower().rstrip(".")
        unit, doubt, error = _prefix_meaning(mark, dimension)
        if error:
            return Read(error=error), ""
        word = word[prefix.end() :]
    fraction = _FRACTION.match(word)
    if fraction and not (prefix and mark == "dn"):
        value, error = _fraction_value(fraction)
        if value is None:
            return Read(error=error), ""
        rest = word[fraction.end() :]
        if dimension == "length" and unit is None:
            unit = "in"
    else:
        plain = _PLAIN.match(word)
        value = number_of(plain.group(), decimal_comma) if plain else None
        if value is None:
            return Read(error="not a number"), ""
        rest = word[plain.end() :]
    if prefix and mark == "nb" and value > 60:
        unit = "mm"
    if dimension == "money":
        value, rest = _large_money(value, rest)
    found, rest, error = _leading_unit(rest, dimension)
    if error:
        return Read(error=error), ""
    value, remark, rest = _gauge(value, found or unit, rest, dimension)
    return Read(value, found or unit, doubt, remark=remark), rest


def _prefix_meaning(mark: str, dimension: str) -> tuple[str | None, str, str]:
    """(unit, doubt, error) of the letters before a number."""
    if mark[-1:] in "$€£¥" or mark in ("usd", "eur", "gbp", "cad", "aud"):
        return ("money", "", "") if dimension == "money" else (None, "", "an amount of money")
    unit = _PREFIX_UNITS.get(dimension, {}).get(mark)
    if unit:
        return unit, "", ""
    if mark in _PREFIX_PLAIN.get(dimension, ()):
        return None, "a class number taken for a pressure" if mark in ("class", "cl") else "", ""
    return None, "", f"{mark.upper()} does not belong to {_a(dimension)}"


def _a(dimension: str) -> str:
    name = dimension.replace("_", " ") or "plain number"
    return f"an {name}" if name[0] in "aeiou" else f"a {name}"


def _large_money(value: float, rest: str) -> tuple[float, str]:
    found = re.match(r"\s*(thousand|million|mn|k|m)\b", rest, re.I)
    return (value * _LARGE[found.group(1).lower()], rest[found.end() :]) if found else (value, rest)


def _leading_unit(rest: str, dimension: str) -> tuple[str | None, str, str]:
    """(unit at the start of `rest` or None, what follows it, error)."""
    spread = re.sub(r"(?<=[^\s(])(?=\((?!g\)))", " ", re.sub(r"\s*([;=@]|/(?=\s*[(\d.]|\s*(?:dn|nps|pn|pc)\b))\s*", r" \1 ", rest, flags=re.I))
    spread = re.sub(r"(?<=[^\s\d-])-(?=\s*\d)", " - ", spread)
    words = spread.split()
    if dimension:
        for count in range(min(4, len(words)), 0, -1):
            joined = " ".join(words[:count])
            unit = find_unit(joined.strip("()[]") if joined[:1] in "([" else joined.rstrip(",:"), dimension)
            if unit:
                return unit, " ".join(words[count:]), ""
        head = words[0].strip("()[],.") if words else ""
        others = dimensions_of(head) if head and not head.isdigit() else ()
        if others and re.match(r"[a-z°]", head, re.I):
            return None, "", f"a unit of {others[0].replace('_', ' ')}, not of {dimension.replace('_', ' ')}"
    return None, spread.strip(), ""


def _gauge(value: float, unit: str | None, rest: str, dimension: str) -> tuple[float, str, str]:
    """(gauge pressure, remark, rest): an absolute pressure loses one standard atmosphere."""
    if dimension != "pressure":
        return value, "", rest
    absolute = re.match(r"\(?(?:abs\.?|absolute|a)\)?(?![a-z])\s*", rest, re.I)
    if absolute and unit:
        return value - ATMOSPHERE / float(from_unit(1.0, unit)), "written as absolute pressure; one standard atmosphere taken off", rest[absolute.end() :]
    glued = re.match(r"(psi|bar|kpa|mpa)\s*(?:a|\(a\)|\(abs\))(?![a-z])\s*", rest, re.I)
    if glued and not unit:
        unit = find_unit(glued.group(1), dimension)
        return value - ATMOSPHERE / float(from_unit(1.0, unit)), f"absolute {unit}", rest[glued.end() :]
    return value, "", rest


def _with_rest(found: Read, rest: str, dimension: str, decimal_comma: bool | None) -> Read:
    """The quantity once what follows it has been understood: a range, the same again in another unit, words."""
    if found.remark.startswith("absolute "):
        found = replace(found, unit=found.remark.split()[1], remark="written as absolute pressure; one standard atmosphere taken off")
    rest = rest.strip(" ,;.")
    if not rest or _IDLE.fullmatch(rest):
        return found
    between = re.match(r"(?:-|to\b|\.\.+|and\b)\s*(?=[-+\d.,]|dn|pn)", rest, re.I)
    if between:
        return _range(found, rest[between.end() :], dimension, decimal_comma)
    again = re.match(r"(?:/|\(|=|or\b|\[)\s*(?=[\d.,]|dn|pn|pc|nps)", rest, re.I)
    if again:
        return _written_twice(found, rest[again.end() :].rstrip(")] "), dimension, decimal_comma)
    if not dimension and _COUNTED.fullmatch(rest):
        return found
    if found.unit and not re.match(r"[x*+/\d%]", rest, re.I):
        return replace(found, remark=found.remark or "words behind it")
    short = rest[:20]
    if re.match(r"(?:\d|x\s*\d)", rest, re.I):
        return Read(error="more than one number")
    return Read(error=f"unit {short!r} not known" if dimension else f"{short!r} behind the number")


def _range(low: Read, text: str, dimension: str, decimal_comma: bool | None) -> Read:
    high, rest = _leading_quantity(text, dimension, decimal_comma)
    if high.error or not (not rest.strip(" .,)") or _IDLE.fullmatch(rest.strip())):
        return Read(error="not a range of two numbers")
    unit = low.unit if low.unit == high.unit else (low.unit or high.unit if not (low.unit and high.unit) else None)
    if low.unit and high.unit and low.unit != high.unit:
        return Read(error="a range in two units")
    if low.number >= high.number:
        return Read(error="a range whose second number is not the larger")
    return Read(0.5 * (low.number + high.number), unit, "written as a range; its middle is used")


def _written_twice(first: Read, text: str, dimension: str, decimal_comma: bool | None) -> Read:
    second, rest = _leading_quantity(text, dimension, decimal_comma)
    if second.error or rest.strip(" .,)"):
        if first.unit or re.match(r"p[nc]\s?\d", text, re.I):
            return replace(first, remark="words behind it")
        return Read(error="more than one number")
    if not dimension or not second.unit:
        return Read(error="more than one number")
    if not first.unit:
        return replace(second, doubt="two numbers; the one with a unit is used")
    if same_quantity(first.number, first.unit, second.number, second.unit, dimension):
        return first
    return Read(error="two quantities that disagree")


def accepted(dimension: str) -> str:
    """What a message says would be accepted."""
    if not dimension:
        return "a number"
    units = [unit for unit in UNITS[dimension] if dimension != "stress" or "head" not in unit]
    return "a number with or without a unit (" + ", ".join(units) + ")"
