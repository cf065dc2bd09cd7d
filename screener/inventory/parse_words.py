"""Columns of choices, text and names."""

from __future__ import annotations

import difflib
import re
from functools import lru_cache

import numpy as np

from screener.columns import Attribute, inventory_attributes
from screener.inventory.parse_column import Column, cell_text
from screener.records import Origin, Severity
from screener.units import is_missing_word, tidy

LONGEST = 120
LIKENESS = 0.8
CLEARLY = 0.05
LOOKED_AT = 2_000
"""Distinct cells of a column that are compared by likeness; beyond them only wording counts."""
DENIALS = frozenset("not no non un without never ex removed missing lacking isnt isn't instead former".split())
_DECIMAL, _LOOSE_DOT, _OTHER = re.compile(r"(?<=\d),(?=\d)"), re.compile(r"\.(?!\d)|(?<!\d)\."), re.compile(r"[^0-9a-z?#+.]+")
_BETWEEN = re.compile(r"[^0-9a-z?#+.']+")
GRADES = frozenset({"gr", "grade", "gd"})
BY_PART = "by a part of the text"
NAMES_NOT_MISSING = frozenset({"x", "nd", "na", "."})


def compact(text: str) -> str:
    """A wording for comparison: lower case, letters, digits and a few signs only; a dot stays between digits."""
    text = _DECIMAL.sub(".", text.lower())
    return _LOOSE_DOT.sub("", _OTHER.sub("", text))


def _signature(text: str) -> tuple:
    """What likeness must not change: the digits and the letters that stand alone."""
    return tuple(re.findall(r"\d+", text)), tuple(sorted(re.findall(r"(?<![a-z])[a-z](?![a-z])", text)))


@lru_cache(maxsize=256)
def _vocabulary(attribute_name: str) -> tuple[dict[str, str], dict[str, tuple]]:
    """(compact wording -> choice, compact wording -> signature) of an attribute."""
    words: dict[str, str] = {}
    signatures: dict[str, tuple] = {}
    choices = inventory_attributes()[attribute_name].choices
    for text, choice in [*((c, c) for c in choices), *((text, c) for c, synonyms in choices.items() for text in synonyms)]:
        plain = compact(text) or text.strip()
        words.setdefault(plain, choice)
        signatures.setdefault(plain, _signature(text.lower()))
    return words, signatures


def read_category(text: str, attribute: Attribute, likeness: bool = True) -> tuple[str | None, str, str]:
    """(choice or None, doubt, error): by wording, then by wording inside the text, then by likeness. Never raises."""
    words, signatures = _vocabulary(attribute.name)
    plain = tidy(text)
    if len(plain) > LONGEST:
        return None, "", "not one of the choices"
    whole = compact(plain) or plain
    if whole in words:
        return words[whole], "", ""
    doubt = ""
    if plain.endswith("?") or plain.startswith(("?", "~")):
        plain, doubt = plain.strip("?~ "), "written with a question mark"
        if compact(plain) in words:
            return words[compact(plain)], doubt, ""
    inside, denied, other_grade = _inside(plain.lower(), words)
    choices = sorted(set(inside))
    if denied and choices:
        return None, "", f"says what it is not ({choices[0]})"
    if len(choices) > 1:
        return None, "", f"more than one choice ({' and '.join(choices[:3])})"
    if choices and other_grade:
        return None, "", "a grade that is not one of the choices"
    if choices:
        return choices[0], doubt or f"taken for {choices[0]!r} {BY_PART}", ""
    if likeness and not denied and (like := _alike(plain.lower(), words, signatures)):
        return like, f"taken for {like!r} by likeness", ""
    return None, "", "not one of the choices"


def _inside(text: str, words: dict[str, str]) -> tuple[list[str], bool, bool]:
    """(choices whose wording stands in the text, longest first and not overlapping; whether what is left denies; whether it names a grade)."""
    text = _DECIMAL.sub(".", text)
    tokens = [t for t in map(compact, _BETWEEN.split(text)) if t]
    taken = [False] * len(tokens)
    found = []
    for length in range(min(6, len(tokens)), 0, -1):
        for start in range(len(tokens) - length + 1):
            piece = "".join(tokens[start : start + length])
            if len(piece) > 1 and piece in words and _says(piece, tokens) and not any(taken[start : start + length]):
                taken[start : start + length] = [True] * length
                found.append(words[piece])
    left = [token for token, used in zip(tokens, taken, strict=True) if not used]
    if found:
        found += [words[token] for token in left if len(token) == 1 and token in words and token not in "yn?"]
    graded = any(token in GRADES and any(c.isdigit() for c in after) for token, after in zip(left, left[1:], strict=False))
    return found, any(token in DENIALS for token in left), graded


def _says(piece: str, tokens: list[str]) -> bool:
    """Whether a wording inside a text says enough; a bare number needs a text of hardly more than itself."""
    return piece not in DENIALS and not (piece.isdigit() and len(tokens) > 2)


def _alike(text: str, words: dict[str, str], signatures: dict[str, tuple]) -> str | None:
    """The choice whose wording a text resembles, where no other choice's does nearly as much."""
    plain, signature = compact(text), _signature(text)
    if len(plain) <= 3:
        return None
    same = [word for word in words if len(word) > 3 and signatures[word] == signature]
    close = difflib.get_close_matches(plain, same, n=4, cutoff=LIKENESS)
    if not close:
        return None
    ratios = [difflib.SequenceMatcher(None, plain, word).ratio() for word in close]
    rivals = [ratio for word, ratio in zip(close, ratios, strict=True) if words[word] != words[close[0]]]
    return None if rivals and ratios[0] - max(rivals) < CLEARLY else words[close[0]]


def _words_of(value: object, text: str) -> str:
    if isinstance(value, (bool, np.bool_)):
        return "yes" if value else "no"
    return text


def read_categories(column: Column) -> tuple[np.ndarray, np.ndarray]:
    """(choices or None, origins); a choice is in the dictionary's own wording."""
    attribute = column.attribute
    values, doubts, errors, same = [], [], [], []
    likeness = len(column.unique) <= LOOKED_AT
    for value, text, missing in zip(column.unique, column.texts, column.missing, strict=True):
        choice, doubt, error = read_category(_words_of(value, text), attribute, likeness)
        if missing and (doubt or error):  # "none" is a choice of some attributes and a gap in others
            choice, doubt, error = None, "", ""
        values.append(choice)
        doubts.append(doubt)
        errors.append(error)
        same.append(choice == text)
    column.note_each("not_a_choice", Severity.DOUBTS, errors, "cell not used", ", ".join(attribute.choices))
    column.note_each("read_by_likeness", Severity.NOTES, [d if d.endswith(BY_PART) else "" for d in doubts], "used as said")
    column.note_each("read_by_likeness", Severity.DOUBTS, ["" if d.endswith(BY_PART) else d for d in doubts], "used as said")
    chosen = column.spread(values, object, None)
    origin = np.where(column.rows_of(same), Origin.READ, Origin.CONVERTED)
    known = np.append([choice is not None for choice in values], False).astype(bool)[column.code]
    return chosen, np.where(known, origin, Origin.MISSING).astype(np.uint8)


def read_texts(column: Column) -> tuple[np.ndarray, np.ndarray]:
    """(text or None, origins): trimmed, otherwise kept exactly; 417.0 is "417"."""
    names = column.attribute.kind == "id"
    if column.numeric:
        values = _whole_numbers_as_text(column)
        if values is not None:
            return values, np.full(len(values), Origin.READ, dtype=np.uint8)

    def kept(value: object) -> str | None:
        text = (value if isinstance(value, str) else cell_text(value)).strip()
        missing = not text or (len(text) <= 24 and is_missing_word(text) and not (names and text.lower() in NAMES_NOT_MISSING))
        return None if missing else text

    values = np.array([*(kept(value) for value in column.unique), None], dtype=object)
    known = np.array([value is not None for value in values], dtype=bool)
    return values[column.code], np.where(known[column.code], Origin.READ, Origin.MISSING).astype(np.uint8)


def _whole_numbers_as_text(column: Column) -> np.ndarray | None:
    """A column of whole numbers without gaps as text, at once; None for any other column."""
    numbers = column.floats()
    if not (np.isfinite(numbers).all() and (np.abs(numbers) < 2**53).all() and (numbers == np.floor(numbers)).all()):
        return None
    return np.array(list(map(str, numbers.astype(np.int64).tolist())), dtype=object)
