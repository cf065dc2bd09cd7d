"""Where a table's headings stand: under title rows, over two rows, or above a row of units."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache, lru_cache
from math import log10

from screener.columns import inventory_attributes
from screener.units import dimensions_of

MOST_COLUMNS = 2_000
LOOKED_AT = 40
LONGEST_HEADING = 200
EXPECTED = "expected headings such as 'Joint', 'Size (in)', 'Operating pressure (psi)'"

_NUMBER = re.compile(r"[-+]?[\d.,/ ]*\d[\d.,/ ]*%?")
_NOT_UNITS = frozenset({"-", "text", "date", "no", "no.", "yes/no", "count"})


@dataclass(frozen=True)
class Header:
    """at: index of the first heading row; height: how many rows; known: headings the dictionary knows."""

    at: int
    height: int
    known: int


@dataclass(frozen=True)
class _Facts:
    """What a row consists of."""

    known: int
    texts: int
    numbers: int
    filled: int
    with_digits: int

    @property
    def score(self) -> float:
        return 3.0 * self.known + 0.3 * self.texts - self.numbers

    @property
    def could_head(self) -> bool:
        return self.texts > 0 and self.numbers <= 0.3 * self.filled

    @property
    def speaks(self) -> bool:
        """Enough known headings to be sure."""
        return self.could_head and (self.known >= 2 or (self.known == 1 and self.filled <= 2))


@lru_cache(maxsize=20_000)
def normal(text: str) -> str:
    """A heading for comparison: lower case, brackets and their contents out, letters and digits only."""
    text = re.sub(r"[(\[{].*?[)\]}]", " ", text[:LONGEST_HEADING].lower())
    text = re.sub(r"[^0-9a-z.#+]+", " ", text)
    return " ".join(text.replace(".", " ").split())


def sorted_words(text: str) -> str:
    """Words in alphabetical order: "pressure operating" is "operating pressure"."""
    return " ".join(sorted(text.split()))


@cache
def known_words() -> frozenset[str]:
    """Every name, label and synonym of the dictionary, normalized."""
    words = set()
    for name, attribute in inventory_attributes().items():
        words |= {normal(name.replace("_", " ")), normal(attribute.label), normal(attribute.machine_name.replace("_", " "))}
        words |= {normal(synonym) for synonym in attribute.synonyms}
    words |= {sorted_words(word) for word in words}
    return frozenset(words - {""})


@lru_cache(maxsize=20_000)
def is_known(text: str) -> bool:
    """Whether a heading is, starts with or ends with words of the dictionary."""
    word = normal(text)
    if not word:
        return False
    if word in known_words() or sorted_words(word) in known_words():
        return True
    parts = word.split()[:12]
    ends = (" ".join(part) for n in range(1, len(parts)) for part in (parts[:n], parts[n:]))
    return any(len(end) > 3 and end in known_words() for end in ends)


def known_alone(text: str) -> bool:
    """True where the lower heading says enough by itself."""
    word = normal(text)
    return word in known_words() and len(word.split()) > 1


def count_known(headings: list) -> int:
    """How many different headings of a row the dictionary knows."""
    return len({normal(cell) for cell in headings if isinstance(cell, str) and is_known(cell)})


def inventory_weight(known: int, rows: int) -> float:
    """How much a sheet or layer looks like the inventory: known headings, and rows in tenfolds."""
    return known * (1.0 + log10(1.0 + max(rows, 0)))


def _empty(cell: object) -> bool:
    return cell is None or (isinstance(cell, str) and (not cell or cell.isspace()))


def _facts(row: list) -> _Facts:
    cells = [cell for cell in row if not _empty(cell)]
    words = [cell for cell in cells if isinstance(cell, str)]
    written = [word for word in words if len(word) < 40 and _NUMBER.fullmatch(word.strip())]
    numbers = len(cells) - len(words) + len(written)
    short = [word for word in words if len(word) < 40 or is_known(word)]
    digits = sum(any(c.isdigit() for c in word) for word in words) + len(cells) - len(words)
    return _Facts(count_known(words), len(short) - len(written), numbers, len(cells), digits)


def find_header(rows: list[list], spans: Mapping[tuple[int, int], int] | None = None) -> Header | None:
    """The heading rows among the first rows of a table, or None.

    rows: rows that are not blank. spans: (row, column) of a merged cell's top
    left corner -> its width, where the file says so.
    """
    rows, spans = rows[:LOOKED_AT], spans or {}
    facts = [_facts(row) for row in rows]
    at = _single(facts)
    if at is None:
        return None
    top, height = _with_neighbour(rows, facts, spans, at)
    below = top + height
    if below < len(rows) and is_unit_row(rows[below]):
        height += 1
    return Header(top, height, count_known(joined_header(rows, top, height, spans)))


def _single(facts: list[_Facts]) -> int | None:
    """The one row that looks most like headings."""
    sure = [i for i, row in enumerate(facts) if row.speaks]
    if sure:
        return max(sure, key=lambda i: (facts[i].score, -i))
    # No word is known: headings are the first row of words that is about as wide as the rows below it.
    for i, row in enumerate(facts):
        widths = sorted(below.filled for below in facts[i + 1 :]) or [row.filled]
        if row.could_head and row.filled >= 0.6 * widths[len(widths) // 2]:
            return i
    return None


def _with_neighbour(rows: list[list], facts: list[_Facts], spans: Mapping, at: int) -> tuple[int, int]:
    """(first row, number of rows) of headings that may go on in the row below or begin in the row above."""
    best, height, best_score = at, 1, facts[at].score
    for upper in (at - 1, at):
        lower = upper + 1
        if upper < 0 or lower >= len(rows) or not _could_be_lower(facts[lower]) or not facts[upper].texts:
            continue
        joined = join_rows(rows[upper], rows[lower], _spans_of(spans, upper))
        both = _facts(joined)
        groups = any(1 < width < 0.8 * len(rows[lower]) for width in _spans_of(spans, upper).values())
        gained = both.score > best_score + 2.0 and both.known > facts[at].known
        apart = _repeats(joined) < _repeats(rows[at]) and both.known >= facts[at].known
        if gained or apart or (groups and facts[lower].texts > 1 and both.known >= facts[at].known):
            best, height, best_score = upper, 2, max(both.score, best_score)
    return best, height


def _could_be_lower(row: _Facts) -> bool:
    return row.texts > 0 and row.numbers == 0 and row.with_digits <= 0.3 * row.filled


def _repeats(row: list) -> int:
    names = [normal(str(cell)) for cell in row if not _empty(cell)]
    return len(names) - len(set(names))


def _spans_of(spans: Mapping[tuple[int, int], int], row: int) -> dict[int, int]:
    return {column: width for (at, column), width in spans.items() if at == row}


def is_unit_row(row: list) -> bool:
    """A row below the headings that holds nothing but units."""
    filled = [str(cell).strip() for cell in row if not _empty(cell)]
    if not filled or not all(_is_unit(text) for text in filled):
        return False
    bracketed = all(text[0] in "([" for text in filled)
    return (bracketed or len(filled) > 1) and any(text not in _NOT_UNITS for text in filled)


def _is_unit(text: str) -> bool:
    bare = text.strip("()[] ")
    return len(bare) <= 12 and (bare.lower() in _NOT_UNITS or bool(dimensions_of(bare)))


def joined_header(rows: list[list], at: int, height: int, spans: Mapping[tuple[int, int], int] | None = None) -> list:
    """The headings of `height` heading rows from row `at`, as one row."""
    header = list(rows[at])
    for step, below in enumerate(rows[at + 1 : at + height]):
        header = join_rows(header, below, _spans_of(spans or {}, at) if step == 0 else {})
    return header


def join_rows(upper: list, lower: list, spans: Mapping[int, int] | None = None) -> list:
    """Two heading rows as one.

    spans: column -> width of the upper row's merged cells. Where it has none,
    an upper heading reaches over the empty cells to its right.
    """
    width = max(len(upper), len(lower))
    upper = list(upper) + [None] * (width - len(upper))
    lower = list(lower) + [None] * (width - len(lower))
    joined: list[object] = []
    reach, ends = "", 0
    for k, (above, below) in enumerate(zip(upper, lower, strict=True)):
        above = "" if _empty(above) else " ".join(str(above).split())
        below = "" if _empty(below) else " ".join(str(below).split())
        if above:
            reach, ends = above, k + (spans or {}).get(k, 1)
        elif (spans and k >= ends) or not below:
            reach = ""
        head = above or reach
        if not below or below == head:
            joined.append(above or below)
        elif _is_unit(below):
            joined.append(f"{head} ({below.strip('()[] ')})".strip())  # the lower row carries the unit
        elif head and not known_alone(below):
            joined.append(f"{head} {below}")
        else:
            joined.append(below)
    return joined


def column_letters(k: int) -> str:
    """Spreadsheet name of column k (0-based): A, B, ... Z, AA."""
    letters = ""
    k += 1
    while k:
        k, rest = divmod(k - 1, 26)
        letters = chr(65 + rest) + letters
    return letters


def name_headings(cells: list, first_column: int = 0) -> tuple[str, ...]:
    """Headings as text; an empty one is called by its column's letters. first_column: of the file, 0-based."""
    names = []
    for k, cell in enumerate(cells):
        text = "" if _empty(cell) else " ".join(str(cell).split())
        names.append(text[:LONGEST_HEADING] or f"column {column_letters(first_column + k)}")
    return tuple(names)
