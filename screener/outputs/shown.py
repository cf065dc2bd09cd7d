"""Results as people see them: chosen units, units in the heading, sensible digits."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd

from screener.columns import inventory_attributes, result_columns
from screener.units import to_unit

MACHINE_UNITS = {"kpa": "kPa", "mpa": "MPa", "mm": "mm", "m": "m", "kn": "kN", "nm": "N m", "c": "C", "k": "K", "deg": "deg", "money": "money"}
CAUTIONS = (
    "This is a screening. It ranks joints by estimates; it does not design or certify a joint and does not replace an inspection.",
    "A licensed engineer decides, under local codes and the owner's procedures.",
    "Isolate, depressurise and verify before loosening or tightening bolts. Never tighten a leaking joint under pressure without the owner's procedure.",
    "Every estimate rests on the assumptions listed with it; the less is known of a joint, the less its rank says.",
)


@dataclass(frozen=True)
class Shown:
    """One column for people."""

    heading: str
    values: np.ndarray
    digits: int | None  # None: text
    width: float
    meaning: str


def machine_values(values_si: np.ndarray, unit: str) -> np.ndarray:
    """SI values in the unit of a machine name's suffix; unchanged where there is none."""
    return to_unit(values_si, MACHINE_UNITS[unit]) if unit else values_si


def shown_column(name: str, values_si, system: str, digits: int | None = None) -> Shown:
    """A result or attribute (machine name without unit) from SI values."""
    column = result_columns().get(name) or inventory_attributes()[name]
    unit = column.shown_unit(system)
    values = np.asarray(values_si)
    if values.dtype.kind == "f" and unit and unit != "money":
        values = to_unit(values, unit)
    heading = f"{column.label} ({unit})" if unit and unit != "money" else column.label
    if values.dtype.kind not in "fiu":
        longest = pd.Series(values, dtype=object).dropna().astype(str).str.len()
        typical = float(longest.quantile(0.95)) if len(longest) else 0.0
        return Shown(heading, values, None, min(max(typical + 2, 9), 44), column.meaning)
    if digits is None:
        digits = getattr(column, "digits", None)
        if digits is None:
            digits = _digits_for(values)
    return Shown(heading, values, digits, 11, column.meaning)


def _digits_for(values: np.ndarray) -> int:
    finite = np.abs(values[np.isfinite(values)])
    if not len(finite) or np.all(finite == np.round(finite)):
        return 0
    typical = np.median(finite)
    return 0 if typical >= 100 else 1 if typical >= 10 else 2 if typical >= 1 else 3


def number(value_si: float, dimension_unit: str, digits: int = 0) -> str:
    """A number with its unit for a sentence, such as '152 psi'."""
    value = float(to_unit(np.float64(value_si), dimension_unit))
    return f"{value:,.{digits}f} {dimension_unit}"
