"""Written numbers: groups, decimal commas, odd digits and spaces, words for "no value"."""

from __future__ import annotations

import math
import re
import unicodedata
from dataclasses import dataclass

MISSING_WORDS = frozenset(
    "|-|--|---|n/a|na|n.a.|#n/a|nan|none|null|nil|unknown|unk|unkn|not known|?|??|???|tbc|tbd|t.b.c.|t.b.d.|tba|not recorded|no record|no data|not available|missing|x|nd|n.d.|.|..|blank|(blank)|<null>|not measured|to be confirmed|to be determined".split("|")
)

# One written number; groups of three only where they are whole, so that "12 34" is not 1234.
NUMBER = (
    r"[-+]?(?:\d{1,3}(?:[ ']\d{3})+(?:[.,]\d+)?|\d{1,3}(?:,\d{3})+(?:\.\d+)?|\d{1,3}(?:\.\d{3})+(?:,\d+)?"
    r"|\d+(?:[.,]\d+|\.)?|[.,]\d+)(?:e[-+]?\d{1,3}(?!\d))?(?!\d|[.,']\d| \d{3}(?!\d))"
)
_FIND = re.compile(rf"(?<![\d.,'/]){NUMBER}", re.I)
_ODD = str.maketrans(
    {
        **dict.fromkeys("\u2010\u2011\u2012\u2013\u2014\u2015\u2212\ufe63\uff0d", "-"),
        **dict.fromkeys("\u2018\u2019\u201a\u201b\u2032\u00b4\uff07`", "'"),
        **dict.fromkeys("\u201c\u201d\u201e\u201f\u2033\uff02", '"'),
        **dict.fromkeys("\u00ba\u02da", "°"),
        **dict.fromkeys("\u200b\u200c\u200d\u2060\ufeff\u00ad\u200e\u200f\u202a\u202b\u202c\u202d\u202e", None),
        "\u2044": "/",
        "\u2215": "/",
        "\u00d7": "x",
        "\u2300": "Ø",
        "\u00f8": "Ø",
        "\u066b": ".",
        "\u066c": ",",
    }
)
_VULGAR = re.compile(r"(\d?)([\u00bc-\u00be\u2150-\u215e])")


def _split_vulgar(found: re.Match) -> str:
    return f"{found.group(1)} {unicodedata.normalize('NFKC', found.group(2))}".strip()


def tidy(text: str) -> str:
    """One kind of digit, space, dash, quote and fraction; trimmed. Every parser starts from it."""
    if text.isascii():
        return " ".join(text.split())
    text = _VULGAR.sub(_split_vulgar, text).translate(_ODD)
    text = unicodedata.normalize("NFKC", text).translate(_ODD)
    text = "".join(str(unicodedata.decimal(c, c)) if c.isdecimal() else c for c in text)
    return " ".join(text.split())


def is_missing_word(text: str) -> bool:
    """Whether a cell's text says that there is no value."""
    if len(text) > 24 or "0" <= text[:1] <= "9":
        return False
    word = text.strip().lower()
    return word in MISSING_WORDS or (not word.isascii() and tidy(text).lower() in MISSING_WORDS)


def number_of(text: str, decimal_comma: bool | None = None) -> float | None:
    """A written number: 1,234.5 and 1.234,5, thin spaces, apostrophes. None when it is none.

    decimal_comma settles a lone comma or dot before three digits: True: comma
    is decimal and dot groups; False or None: comma groups and dot is decimal.
    """
    word = text.replace(" ", "").replace("'", "")
    commas, dots = word.count(","), word.count(".")
    if commas and dots:
        comma_last = word.rfind(",") > word.rfind(".")
        word = word.replace(".", "").replace(",", ".") if comma_last else word.replace(",", "")
    elif commas == 1:
        grouped = re.fullmatch(r"[-+]?[1-9]\d{0,2},\d{3}", word) and not decimal_comma
        word = word.replace(",", "" if grouped else ".")
    elif commas > 1:
        if not re.fullmatch(r"[-+]?\d{1,3}(,\d{3})+", word):
            return None
        word = word.replace(",", "")
    elif dots > 1:
        if not re.fullmatch(r"[-+]?\d{1,3}(\.\d{3})+", word):
            return None
        word = word.replace(".", "")
    elif dots == 1 and decimal_comma and re.fullmatch(r"[-+]?[1-9]\d{0,2}\.\d{3}", word):
        word = word.replace(".", "")
    try:
        value = float(word)
    except ValueError:
        return None
    return value if math.isfinite(value) else None


@dataclass(frozen=True)
class Separators:
    """What the numbers of one text show: a decimal comma, a decimal dot, or a comma that could be either."""

    decimal_comma: bool = False
    decimal_dot: bool = False
    open_comma: bool = False


def separators_in(text: str) -> Separators:
    """Look at the separators of a text's numbers, so that a column can be decided as a whole."""
    comma = dot = unsettled = False
    for found in _FIND.finditer(tidy(text)[:80]):
        word = found.group().lstrip("+-").replace(" ", "").replace("'", "")
        word = re.split(r"e", word, flags=re.I)[0]
        commas, dots = word.count(","), word.count(".")
        if commas and dots:
            comma |= word.rfind(",") > word.rfind(".")
            dot |= word.rfind(",") < word.rfind(".")
        elif commas == 1:
            open_here = bool(re.fullmatch(r"[1-9]\d{0,2},\d{3}", word))
            unsettled |= open_here
            comma |= not open_here
        elif commas > 1:
            dot = True
        elif dots == 1:
            dot |= not re.fullmatch(r"[1-9]\d{0,2}\.\d{3}", word)
        elif dots > 1:
            comma = True
    return Separators(comma, dot, unsettled)
