"""One column with its distinct cells: what the readers below look at, and how they say what they found."""

from __future__ import annotations

import datetime
from functools import cached_property

import numpy as np
import pandas as pd

from screener.columns import Attribute
from screener.records import Ledger, Severity
from screener.units import is_missing_word

PLAIN = r"[-+]?[0-9]{1,15}(?:\.[0-9]{1,15})?"
MOST_WORDINGS = 30
"""Distinct wordings of one kind of finding in a column; what goes beyond is one finding of its own."""


def cell_text(value: object) -> str:
    """A cell as text for people: 417.0 is 417, a date is ISO."""
    if isinstance(value, (datetime.datetime, pd.Timestamp)):
        return value.date().isoformat() if value.time() == datetime.time(0) else value.isoformat(sep=" ")
    if isinstance(value, (datetime.date, datetime.time)):
        return value.isoformat()
    if isinstance(value, (float, np.floating)):
        return str(int(value)) if abs(value) < 2**53 and value == int(value) else f"{value:.12g}"
    return str(value)


def factorize(cells: pd.Series) -> tuple[np.ndarray, list]:
    """(code per row, distinct cells); -1 is an empty cell. Cells that can't be compared are taken as text."""
    try:
        code, unique = pd.factorize(cells)
    except TypeError:
        code, unique = pd.factorize(cells.map(str, na_action="ignore"))
    return code, list(unique)


def written(cells: pd.Series) -> np.ndarray:
    """Cells as text for people; None where empty."""
    code, unique = factorize(cells)
    texts = np.array([*(cell_text(value) for value in unique), None], dtype=object)
    return texts[code]


def is_plain(texts: pd.Series) -> np.ndarray:
    """Which texts are plain numbers, digits with at most a decimal dot, or empty cells."""
    return (texts.str.fullmatch(PLAIN).to_numpy(dtype=bool, na_value=False)) | texts.isna().to_numpy()


def as_numbers(cells: pd.Series) -> pd.Series:
    """A column as floats where every filled cell is a number or a plainly written one, so that no cell is read one by one."""
    if isinstance(cells.dtype, pd.StringDtype):
        return cells.astype(float) if len(cells) and is_plain(cells).all() else cells
    if cells.dtype != object:
        return cells
    objects = cells.to_numpy()
    if any(isinstance(value, str) for value in objects[:200]):
        return cells
    kinds = set(map(type, objects))
    if kinds <= {int, float, type(None), type(pd.NA), type(pd.NaT)} and kinds & {int, float}:
        try:
            return cells.astype(float)
        except OverflowError:
            return cells
    return cells


class Column:
    """One column. numeric: all its cells are numbers; otherwise it is read through its distinct cells."""

    def __init__(self, attribute: Attribute, heading: str, unit: str, cells: pd.Series, ledger: Ledger) -> None:
        self.attribute, self.heading, self.unit, self.ledger = attribute, heading, unit, ledger
        self.cells = cells = as_numbers(cells) if attribute.kind not in ("id", "text", "category") else cells
        self.numeric = cells.dtype.kind in "iuf" and not isinstance(cells.dtype, pd.CategoricalDtype)
        self.dated = cells.dtype.kind == "M"

    @cached_property
    def _distinct(self) -> tuple[np.ndarray, list]:
        return factorize(self.cells)

    @property
    def code(self) -> np.ndarray:
        """Per row, the place of its cell in `unique`; -1 where empty."""
        return self._distinct[0]

    @property
    def unique(self) -> list:
        return self._distinct[1]

    @cached_property
    def texts(self) -> list[str]:
        """The distinct cells as text."""
        return [cell_text(value) for value in self.unique]

    @cached_property
    def missing(self) -> list[bool]:
        """Which distinct cells say that there is no value."""
        return [is_missing_word(text) for text in self.texts]

    def __len__(self) -> int:
        return len(self.cells)

    def floats(self) -> np.ndarray:
        """The cells of a numeric column."""
        return self.cells.to_numpy(dtype=float, na_value=np.nan)

    def spread(self, per_unique: list | np.ndarray, dtype, empty) -> np.ndarray:
        """Values of the distinct cells, over the rows."""
        table = np.empty(len(self.unique) + 1, dtype=dtype)
        for i, value in enumerate(per_unique):
            table[i] = value
        table[-1] = empty
        return table[self.code]

    def rows_of(self, which) -> np.ndarray:
        """Row mask of the distinct cells marked in `which`."""
        return np.append(np.asarray(which, dtype=bool), False)[self.code]

    def note(self, code: str, severity: Severity, rows: np.ndarray, problem: str, action: str) -> None:
        """A finding on rows (mask), with the cells as written."""
        where = np.flatnonzero(rows)
        if len(where):
            self.ledger.finding(code, severity, where, attribute=self.attribute.name, column=self.heading, values=written(self.cells.iloc[where]), problem=problem, action=action)

    def note_column(self, code: str, severity: Severity, problem: str, action: str) -> None:
        """A finding about the column as a whole."""
        self.ledger.finding(code, severity, None, attribute=self.attribute.name, column=self.heading, problem=problem, action=action)

    def note_each(self, code: str, severity: Severity, words: list[str], action: str, accepted: str = "") -> None:
        """One finding per distinct wording, over the rows that have it; words: per distinct cell, "" for none."""
        kinds, names = pd.factorize(np.array([*words, ""], dtype=object))
        rows = kinds[self.code]
        counts = np.bincount(rows, minlength=len(names))
        order = sorted((i for i in range(len(names)) if names[i]), key=lambda i: (-counts[i], names[i]))
        tail = f"; accepted: {accepted}" if accepted else ""
        for i in order[:MOST_WORDINGS]:
            self.note(code, severity, rows == i, names[i] + tail, action)
        if order[MOST_WORDINGS:]:
            self.note(code, severity, np.isin(rows, order[MOST_WORDINGS:]), f"{len(order) - MOST_WORDINGS:,} other wordings of the same kind, such as: {names[order[MOST_WORDINGS]]}" + tail, action)
