"""Bare numbers: which unit a column without one is in, decided openly from its values."""

from __future__ import annotations

import numpy as np

from screener.records import Severity
from screener.units import from_unit

# Units that inventories write a bare number in, most usual first.
CANDIDATES = {
    "length": ("in", "mm", "m", "ft"),
    "pressure": ("psi", "bar", "kPa", "MPa", "m head"),
    "stress": ("ksi", "MPa", "psi"),
    "torque": ("ft lb", "N m"),
    "temperature": ("C", "F"),
    "temperature_difference": ("K", "F difference"),
    "angle": ("deg",),
}
LONG = ("chainage", "elevation")
# Ranges (SI) in which the great mass of each attribute's values lies; tighter than "plausible".
USUAL = {
    "nominal_size": (0.05, 1.65),
    "pipe_outside_diameter": (0.06, 1.65),
    "hub_outside_diameter": (0.09, 1.9),
    "hub_thickness": (0.01, 0.15),
    "ring_outside_diameter": (0.15, 2.2),
    "ring_bore": (0.06, 1.7),
    "ring_thickness": (0.01, 0.14),
    "bolt_circle_diameter": (0.11, 2.1),
    "hole_diameter": (0.013, 0.08),
    "bolt_diameter": (0.012, 0.077),
    "operating_pressure": (1.5e5, 2.0e6),
    "test_pressure": (3.0e5, 3.5e6),
    "recurrent_surge": (2.0e4, 1.0e6),
    "occasional_surge": (4.0e4, 2.0e6),
    "cycle_range": (1.0e4, 1.0e6),
    "pipe_pressure_class": (3.0e5, 2.5e6),
    "stated_rating": (4.0e5, 2.5e6),
    "temperature": (2.0, 40.0),
    "seasonal_range": (2.0, 40.0),
    "assembly_torque": (25.0, 1500.0),
    "measured_torque": (10.0, 1500.0),
    "measured_gap": (0.0, 0.006),
    "corrosion_loss": (0.0, 0.02),
}
STRAYS = 0.02
"""Share of values that a single unit may leave outside the usual range before the column counts as mixed."""


def decide_units(column, numbers: np.ndarray, bare: np.ndarray) -> np.ndarray:
    """Unit per row for bare numbers of a column whose heading names none; "" where none fits.

    One unit for all when it makes (nearly) all values usual: the candidate that
    fits most, the more usual unit on a tie. Otherwise value by value, taking
    each in the first candidate that makes it usual. The decision is a finding.
    """
    attribute = column.attribute
    if attribute.name in LONG:
        column.note_column("unit_taken", Severity.NOTES, f"{int(bare.sum()):,} bare numbers without a unit", "all taken as metres")
        return np.where(bare, "m", "")
    candidates = CANDIDATES[attribute.dimension]
    low, high = USUAL.get(attribute.name) or attribute.plausible or attribute.possible or (-np.inf, np.inf)
    fits = np.array([_usual(from_unit(numbers, unit), low, high) for unit in candidates])
    share = fits[:, bare].mean(axis=1)
    best = int(share.argmax())
    units = np.full(len(numbers), "", dtype=object)
    if share[best] >= 1.0 - STRAYS:
        units[bare] = candidates[best]
        others = [candidates[i] for i in range(len(candidates)) if i != best and share[i] >= share[best] - STRAYS]
        doubt = f"; {', '.join(others)} would fit as well" if others else ""
        column.note_column(
            "unit_taken",
            Severity.DOUBTS if others else Severity.NOTES,
            f"{int(bare.sum()):,} bare numbers, and neither heading nor cell names a unit{doubt}",
            f"all taken as {candidates[best]} from their size",
        )
        return units
    order = np.argsort(-share, kind="stable")
    for place, i in enumerate(order):
        here = bare & (units == "") & fits[i]
        units[here] = candidates[i]
        if place == 0:
            column.note_column(
                "unit_taken_by_value",
                Severity.DOUBTS,
                f"{int(bare.sum()):,} bare numbers of more than one unit in this column",
                f"{int(here.sum()):,} taken as {candidates[i]} from their size; the others are listed by row",
            )
        else:
            column.note(
                "unit_taken_by_value",
                Severity.DOUBTS,
                here,
                f"a bare number that would not be usual in {candidates[order[0]]}, the unit of the column's other bare numbers",
                f"taken as {candidates[i]} from its size",
            )
    return units


def _usual(values: np.ndarray, low: float, high: float) -> np.ndarray:
    return (values >= low) & (values <= high)


def slips(attribute, values: np.ndarray, suspect: np.ndarray):
    """(unit, mask) for suspect SI values that would be usual had their number been meant in another usual unit.

    Two usual units of a dimension differ by a factor; a value is a likely slip
    when that factor, applied either way, brings it into the usual range.
    """
    span = USUAL.get(attribute.name)
    units = CANDIDATES.get(attribute.dimension, ())
    if span is None or attribute.dimension.startswith("temperature") or not suspect.any():
        return
    left = suspect.copy()
    for meant in units:
        for written in units:
            if meant != written:
                moved = values * float(from_unit(1.0, meant)) / float(from_unit(1.0, written))
                here = left & _usual(moved, *span)
                if here.any():
                    left &= ~here
                    yield meant, here
