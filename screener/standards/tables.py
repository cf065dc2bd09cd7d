"""Published tables as they ship with the package, each row with its source and status."""

from __future__ import annotations

import csv
from dataclasses import dataclass
from functools import cache
from importlib.resources import files

import numpy as np

INCH = 0.0254
PSI = 6894.757293168361  # lbf/in2 in Pa, from the exact inch, pound and standard gravity
KSI = 1000.0 * PSI


@dataclass(frozen=True, eq=False)
class Table:
    """A published table; cells are text until asked for as numbers."""

    name: str
    columns: dict[str, np.ndarray]

    def __len__(self) -> int:
        return len(next(iter(self.columns.values())))

    def text(self, column: str) -> np.ndarray:
        return self.columns[column]

    def number(self, column: str) -> np.ndarray:
        """The column as floats; an empty cell is NaN, other text is an error of ours."""
        return np.array([float(cell) if cell else np.nan for cell in self.columns[column]])


@cache
def read_table(name: str) -> Table:
    """Table `name` (without .csv) of the package."""
    text = files("screener.standards").joinpath("data", f"{name}.csv").read_text(encoding="utf-8")
    rows = list(csv.DictReader(text.splitlines()))
    columns = {key: np.array([row[key].strip() for row in rows], dtype=object) for key in rows[0]}
    return Table(name, columns)


def codes(values: np.ndarray, vocabulary: list[str]) -> np.ndarray:
    """Position of each value in the vocabulary, -1 where it is not in it."""
    found = np.full(len(values), -1, dtype=np.int64)
    for code, word in enumerate(vocabulary):
        found[values == word] = code
    return found


def exact_rows(keys: np.ndarray, wanted: np.ndarray) -> np.ndarray:
    """Row of each wanted integer key among `keys` (unique, any order), -1 where there is none."""
    order = np.argsort(keys)
    place = np.searchsorted(keys[order], wanted)
    place = np.minimum(place, len(keys) - 1)
    row = order[place]
    return np.where(keys[row] == wanted, row, -1)
