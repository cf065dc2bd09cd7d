"""Where a table's headings stand, under title rows or over two rows."""

from __future__ import annotations

import re
from functools import cache

from screener.columns import inventory_attributes

MOST_COLUMNS = 2_000
LOOKED_AT = 40


def normal(text: str) -> str:
    """A heading for comparison: lower case, brackets and their contents out, letters and digits only."""
    text = re.sub(r"[(\[{].*?[)\]}]", " ", str(text).lower())
    text = re.sub(r"[^0-9a-z.#+]+", " ", text)
    return " ".join(text.replace(".", " ").split())


@cache
def known_words() -> frozenset[str]:
    """Every name, label and synonym of the dictionary, normalized."""
    words = set()
    for name, attribute in inventory_attributes().items():
        words |= {normal(name.replace("_", " ")), normal(attribute.label), normal(attribute.machine_name.replace("_", " "))}
        words |= {normal(synonym) for synonym in attribute.synonyms}
    words |= {sorted_words(word) for word in words}
    return frozenset(words)


def sorted_words(text: str) -> str:
    """Words in alphabetical order: "pressure operating" is "operating pressure"."""
    return " ".join(sorted(text.split()))


def header_score(cells: list) -> float:
    """How much a row looks like headings: known words count 3, other short texts a little, numbers against."""
    score = 0.0
    for cell in cells:
        if cell is None or cell == "":
            continue
        if isinstance(cell, str):
            word = normal(cell)
            if word in known_words() or sorted_words(word) in known_words() or any(word.startswith(k + " ") or word.endswith(" " + k) for k in _starts(word)):
                score += 3.0
            elif re.fullmatch(r"[-+\d.,/ ]+", cell.strip()):
                score -= 1.0
            elif len(cell) < 40:
                score += 0.3
        else:
            score -= 1.0
    return score


def _starts(word: str) -> list[str]:
    parts = word.split()
    return [k for n in range(1, len(parts)) for k in (" ".join(parts[:n]), " ".join(parts[n:])) if k in known_words() and len(k) > 3]


def find_header(rows: list[list]) -> tuple[int, int, float]:
    """(index of the first header row, number of header rows, score) among the first rows."""
    best = (0, 1, float("-inf"))
    for i, row in enumerate(rows[:LOOKED_AT]):
        single = header_score(row)
        if single > best[2]:
            best = (i, 1, single)
        if i + 1 < min(len(rows), LOOKED_AT):
            below = rows[i + 1]
            if any(isinstance(c, (int, float)) and not isinstance(c, bool) for c in below):
                continue
            joined = header_score(join_rows(row, below))
            if joined > best[2] + 2.0 and header_score(below) > 0:
                best = (i, 2, joined)
    below = best[0] + best[1]
    if below < len(rows) and is_unit_row(rows[below]):
        best = (best[0], best[1] + 1, best[2])
    return best


UNIT_ROW = re.compile(r"[(\[].*[)\]]|mm|m|cm|in|inch|inches|psi|bar|kpa|mpa|ksi|ft|c|f|°c|°f|deg c|deg f|nm|ft-lb|ft lb|-|text|date|no\.?", re.I)


def is_unit_row(row: list) -> bool:
    """A row below the headings that holds nothing but units."""
    filled = [str(cell).strip() for cell in row if cell not in (None, "")]
    return bool(filled) and all(UNIT_ROW.fullmatch(text) for text in filled) and any(text not in ("-",) for text in filled)


def joined_header(rows: list[list], at: int, height: int) -> list:
    """The headings of `height` header rows from row `at`, as one row."""
    header = list(rows[at])
    for below in rows[at + 1 : at + height]:
        header = join_rows(header, below)
    return header


def join_rows(upper: list, lower: list) -> list:
    """Two header rows as one; a merged upper cell reaches over the empty cells to its right."""
    joined, reach = [], ""
    width = max(len(upper), len(lower))
    upper = list(upper) + [None] * (width - len(upper))
    lower = list(lower) + [None] * (width - len(lower))
    for above, below in zip(upper, lower, strict=True):
        above = "" if above is None else str(above).strip()
        below = "" if below is None else str(below).strip()
        if above:
            reach = above
        elif not below:
            reach = ""
        head = above or reach
        if not below:
            joined.append(above)
        elif UNIT_ROW.fullmatch(below):
            joined.append(f"{head} ({below.strip('()[]')})")  # the lower row carries the unit
        elif head and not known_alone(below):
            joined.append(f"{head} {below}")
        else:
            joined.append(below)
    return joined


def known_alone(text: str) -> bool:
    """True where the lower heading says enough by itself."""
    word = normal(text)
    return word in known_words() and len(word.split()) > 1


def column_letters(k: int) -> str:
    """Spreadsheet name of column k (0-based): A, B, ... Z, AA."""
    letters = ""
    k += 1
    while k:
        k, rest = divmod(k - 1, 26)
        letters = chr(65 + rest) + letters
    return letters


def name_headings(cells: list) -> tuple[str, ...]:
    """Headings as text; an empty one is called by its column's letters."""
    names = []
    for k, cell in enumerate(cells):
        text = "" if cell is None else " ".join(str(cell).split())
        names.append(text[:200] or f"column {column_letters(k)}")
    return tuple(names)
