"""What a column's values say about its meaning, where the heading alone says too little."""

from __future__ import annotations

import re

import numpy as np
import pandas as pd

from screener.columns import Attribute
from screener.inventory.parse_column import cell_text, factorize
from screener.inventory.parse_values import could_be
from screener.units import from_unit, is_missing_word, read_quantity

SAMPLE = 60
# Values that name what they are.
SIGNS = {
    "dimension_ratio": re.compile(r"s?dr\s?-?\d{1,2}(?:[.,]\d+)?", re.I),
    "pe_material": re.compile(r"(?:hd|md)?pe\s?-?(?:\d{4}|100|80)(?:\s?-?rc)?", re.I),
    "pipe_pressure_class": re.compile(r"pc\s?\d{2,3}", re.I),
    "nominal_size": re.compile(r"(?:dn|nps)\s?\d{1,4}", re.I),
    "bolt_grade": re.compile(r"(?:astm )?a193[ -]?b\d\w*|(?:gr(?:ade)?\.? ?)?(?:4\.6|8\.8|10\.9)|b7", re.I),
}
LEAST_SIGNS, SHARE_OF_SIGNS = 3, 0.8


def sample_of(cells: pd.Series) -> list:
    """Some of the filled cells, spread over the column."""
    known = cells[cells.notna()]
    return list(known.iloc[:: max(1, len(known) // SAMPLE)].head(SAMPLE))


def agreement(cells: pd.Series, attribute: Attribute, unit: str, ranged: bool) -> float:
    """Share of a sample of the cells that could belong to the attribute; 0.5 for an empty column.

    ranged: a number must also be usual for the attribute in `unit` (or in one
    of the usual units where that is ""); otherwise being a number is enough.
    """
    sample = sample_of(cells)
    if not sample:
        return 0.5
    return sum(could_be(value, attribute, unit, ranged) for value in sample) / len(sample)


def names_apart(cells: pd.Series) -> bool:
    """Whether a column could name joints: (nearly) all its values differ, and none is a decimal number or a size."""
    code, unique = factorize(cells)
    filled = int((code >= 0).sum())
    if not filled or len(unique) < 0.9 * filled:
        return False
    sample = sample_of(pd.Series(unique, dtype=object))
    return not any(_is_measure(value) for value in sample)


def _is_measure(value: object) -> bool:
    if isinstance(value, (float, np.floating)):
        return not float(value).is_integer()
    text = cell_text(value)
    read = read_quantity(text, "length")
    return not read.error and (bool(read.unit) or "." in text)


def by_values(cells: pd.Series) -> str:
    """The attribute that the values name by themselves, such as "DR 11"; "" when none."""
    texts = [value.strip() for value in sample_of(cells) if isinstance(value, str) and not is_missing_word(value)]
    if len(texts) < LEAST_SIGNS:
        return ""
    for attribute, sign in SIGNS.items():
        if sum(bool(sign.fullmatch(text)) for text in texts) >= SHARE_OF_SIGNS * len(texts):
            return attribute
    return ""


def lengths_of(cells: pd.Series, unit: str) -> tuple[np.ndarray, np.ndarray]:
    """(numbers, metres or NaN where no unit is known) of a column's cells."""
    numbers, metres = np.full(len(cells), np.nan), np.full(len(cells), np.nan)
    for i, value in enumerate(cells):
        if value is None or value is pd.NA or value != value:
            continue
        read = read_quantity(cell_text(value), "length")
        numbers[i] = read.number
        if read.unit or unit:
            metres[i] = float(from_unit(read.number, read.unit or unit, "length"))
    return numbers, metres


def share_of_pipe_diameters(diameter: pd.Series, diameter_unit: str, size: pd.Series, size_unit: str) -> float:
    """Share of outside diameters that lie as close above the nominal size as a pipe's do; NaN where none can be compared.

    A pipe's outside diameter is at most 1.25 times its nominal size (1.1 from
    14 in up); a ring's is more: IPS and DIPS sizes, AWWA C207 rings.
    """
    both = np.flatnonzero((diameter.notna() & size.notna()).to_numpy())[:200]
    if not len(both):
        return float("nan")
    number, metre = lengths_of(diameter.iloc[both], diameter_unit)
    size_number, size_metre = lengths_of(size.iloc[both], size_unit)
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = metre / size_metre
        for factor in (1.0, 25.4, 1 / 25.4):
            bare = number * factor / size_number
            ratio = np.where(np.isnan(ratio) & (bare > 0.9) & (bare < 3.2), bare, ratio)
    known = np.isfinite(ratio)
    if not known.any():
        return float("nan")
    large = np.where(np.isfinite(size_metre), size_metre >= 0.35, np.where(size_number < 66, size_number >= 14, size_number >= 350))
    return float((ratio[known] <= np.where(large[known], 1.1, 1.25)).mean())
