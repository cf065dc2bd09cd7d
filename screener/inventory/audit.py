"""Contradictions inside a row, and rows that say the same thing twice."""

from __future__ import annotations

import numpy as np
import pandas as pd

from screener.inventory.gaps import Gaps
from screener.records import Severity
from screener.settings import Settings
from screener.standards import pipes


class Audit:
    """Runs the checks on values as read, before any gap is filled."""

    def __init__(self, gaps: Gaps, column_of: dict[str, str], as_written) -> None:
        self.gaps = gaps
        self.column_of = column_of
        self.as_written = as_written

    def note(self, code, severity, where, attribute, problem, action) -> None:
        positions = np.flatnonzero(where)
        if not len(positions):
            return
        self.gaps.ledger.finding(
            code,
            severity,
            positions,
            attribute=attribute,
            column=self.column_of.get(attribute, ""),
            values=self.as_written(attribute)[positions],
            problem=problem,
            action=action,
        )

    def refuse(self, code, where, attribute, problem, action="value not used; filled by rule") -> None:
        """A value that another one of the row rules out is not used, and the finding says so."""
        self.note(code, Severity.DOUBTS, where, attribute, problem, action)
        self.gaps.reject(attribute, where)


def audit_rows(gaps: Gaps, column_of: dict[str, str], as_written, settings: Settings) -> None:
    audit = Audit(gaps, column_of, as_written)
    _check_unit_slips(audit)
    _check_pipe(audit)
    _check_pressures(audit)
    _check_dates(audit, settings)


def _outside(gaps: Gaps) -> np.ndarray:
    """Outside diameter as read, or roughly the nominal size; for comparisons only."""
    outside = gaps["pipe_outside_diameter"]
    return np.where(np.isfinite(outside), outside, gaps["nominal_size"])


def _check_unit_slips(audit: Audit) -> None:
    gaps = audit.gaps
    pipe = _outside(gaps)
    for attribute, low, high in (
        ("ring_outside_diameter", 1.05, 3.2),
        ("ring_bore", 0.85, 1.6),
        ("bolt_circle_diameter", 1.0, 2.6),
        ("hub_outside_diameter", 0.95, 2.2),
    ):
        ratio = gaps[attribute] / pipe
        slip = (ratio > high) | (ratio < low)
        for factor, words in ((25.4, "mm written as inches"), (1 / 25.4, "inches written as mm"), (10.0, "cm and mm mixed"), (0.1, "cm and mm mixed")):
            likely = slip & (ratio / factor > low) & (ratio / factor < high)
            audit.refuse(
                "unit_slip",
                likely,
                attribute,
                f"does not fit the pipe size; it would as {words}",
            )
            slip &= ~likely
        audit.refuse("does_not_fit_pipe", slip, attribute, "far too large or too small for the pipe size")
    thick = gaps["ring_thickness"] / pipe
    audit.refuse("does_not_fit_pipe", thick > 0.6, "ring_thickness", "thicker than 0.6 of the pipe diameter")
    audit.refuse("does_not_fit_pipe", gaps["hub_thickness"] / pipe > 0.6, "hub_thickness", "thicker than 0.6 of the pipe diameter")
    bolt = gaps["bolt_diameter"] / pipe
    audit.refuse("does_not_fit_pipe", (bolt > 0.4) | (bolt < 0.015), "bolt_diameter", "far too large or too small for the pipe size")
    rating = 6.0e6 / 2.0
    audit.note(
        "unit_slip",
        Severity.DOUBTS,
        gaps["operating_pressure"] > rating,
        "operating_pressure",
        "above any PE pipe's rating; perhaps another unit",
        "used as written",
    )


def audit_ring(gaps: Gaps, column_of: dict[str, str], as_written) -> None:
    """The ring's own dimensions against each other and the pipe, once the pipe's diameter is known."""
    audit = Audit(gaps, column_of, as_written)
    circle, outside, bore = gaps["bolt_circle_diameter"], gaps["ring_outside_diameter"], gaps["ring_bore"]
    hub, hole, bolt = gaps["hub_outside_diameter"], gaps["hole_diameter"], gaps["bolt_diameter"]
    pipe = gaps["pipe_outside_diameter"]
    audit.refuse("bore_inside_pipe", bore < 0.995 * pipe, "ring_bore", "ring bore is smaller than the pipe")
    audit.refuse("bore_outside_ring", bore >= outside, "ring_bore", "ring bore is not inside the ring")
    audit.refuse("circle_outside_ring", circle + np.where(np.isnan(hole), 0.0, hole) > outside, "bolt_circle_diameter", "bolt circle and holes lie outside the ring")
    audit.refuse("circle_inside_hub", circle - np.where(np.isnan(bolt), 0.0, bolt) < 0.97 * hub, "bolt_circle_diameter", "bolt circle lies inside the hub")
    audit.refuse("bolt_larger_than_hole", bolt > hole * 1.001, "hole_diameter", "bolt is larger than its hole")


def _check_pipe(audit: Audit) -> None:
    gaps = audit.gaps
    stress = pipes.design_stress(gaps["pe_material"])
    rating = 2.0 * stress / (gaps["dimension_ratio"] - 1.0)
    stated = gaps["pipe_pressure_class"]
    audit.note(
        "ratio_against_class",
        Severity.DOUBTS,
        (stated > 1.3 * rating) | (stated < 0.6 * rating),
        "pipe_pressure_class",
        "pressure class does not belong to this dimension ratio and material",
        "dimension ratio used, class only noted",
    )
    outside, size = gaps["pipe_outside_diameter"], gaps["nominal_size"]
    audit.refuse(
        "diameter_against_size",
        (outside > 1.25 * size) | (outside < 0.9 * size),
        "pipe_outside_diameter",
        "outside diameter does not belong to the nominal size",
    )


def _check_pressures(audit: Audit) -> None:
    gaps = audit.gaps
    operating = gaps["operating_pressure"]
    audit.note(
        "test_below_operating",
        Severity.DOUBTS,
        gaps["test_pressure"] < operating,
        "test_pressure",
        "test pressure is below the operating pressure",
        "both used as written",
    )
    audit.note(
        "occasional_below_recurrent",
        Severity.DOUBTS,
        gaps["occasional_surge"] < gaps["recurrent_surge"],
        "occasional_surge",
        "the rare surge is smaller than the daily one",
        "both used as written",
    )
    audit.note(
        "surge_looks_absolute",
        Severity.DOUBTS,
        gaps["recurrent_surge"] > 1.5 * operating,
        "recurrent_surge",
        "larger than 1.5 x operating pressure; perhaps the peak, not the rise",
        "used as the rise above operating pressure",
    )


def _check_dates(audit: Audit, settings: Settings) -> None:
    gaps = audit.gaps
    today = settings.assessment_year
    future = gaps["year_installed"] > today + 1.0
    audit.refuse("date_in_future", future, "year_installed", "installed after the assessment date")
    audit.refuse("date_too_old", gaps["year_installed"] < 1955.0, "year_installed", "before PE pressure pipe was made")
    for attribute in ("last_tightened", "inspection_date"):
        audit.refuse("date_in_future", gaps[attribute] > today + 0.01, attribute, "after the assessment date")
        audit.refuse(
            "date_before_installation",
            np.floor(gaps[attribute]) < np.floor(gaps["year_installed"]),
            attribute,
            "before the joint was installed",
        )
    first_leak = np.array([min(d) if isinstance(d, tuple) and d else np.nan for d in gaps["leak_dates"]])
    early = np.floor(first_leak) < np.floor(gaps["year_installed"])
    last_leak = np.array([max(d) if isinstance(d, tuple) and d else np.nan for d in gaps["leak_dates"]])
    audit.note("date_before_installation", Severity.DOUBTS, early, "leak_dates", "a leak before the joint was installed", "kept; check both dates")
    audit.note("date_in_future", Severity.DOUBTS, last_leak > today + 0.01, "leak_dates", "a leak after the assessment date", "kept; check the date")


def audit_bolts(gaps: Gaps, ring_row: np.ndarray, column_of: dict[str, str], as_written) -> None:
    """Bolts against the class's, once the class is known."""
    from screener.standards.rings import ring_table

    table = ring_table()
    audit = Audit(gaps, column_of, as_written)
    found = (ring_row >= 0) & gaps.is_read("ring_class")
    count = np.where(found, table.bolt_count[ring_row], np.nan)
    diameter = np.where(found, table.bolt_diameter[ring_row], np.nan)
    circle = np.where(found, table.bolt_circle_diameter[ring_row], np.nan)
    outside = np.where(found, table.outside_diameter[ring_row], np.nan)
    for attribute, expected, slack, words in (
        ("bolt_count", count, 0.5, "number of bolts is not the class's"),
        ("bolt_diameter", diameter, 0.0021, "bolt diameter is not the class's"),
        ("bolt_circle_diameter", circle, 0.004, "bolt circle is not the class's"),
        ("ring_outside_diameter", outside, 0.008, "ring diameter is not the class's"),
    ):
        differs = gaps.is_read(attribute) & (np.abs(gaps[attribute] - expected) > slack)
        audit.note("not_the_class", Severity.DOUBTS, differs, attribute, words, "used as written; the class may be wrong")


def settle_identities(gaps: Gaps, ledger, row_numbers, column_of, cells) -> tuple[np.ndarray, np.ndarray]:
    """(joint id to show, mask of rows that repeat another row exactly).

    A missing id becomes "row N"; an id used twice keeps its first row and gets
    " (row N)" on later ones, so that every joint can be named.
    """
    given = pd.Series(gaps["joint_id"], dtype=object)
    missing = given.isna().to_numpy()
    column = column_of.get("joint_id", "")
    ledger.finding(
        "id_missing",
        Severity.DOUBTS,
        missing,
        attribute="joint_id",
        column=column,
        problem="no joint id",
        action="called by its row in the file",
    )
    numbers = pd.Series(row_numbers).astype(str)
    shown = given.where(~missing, "row " + numbers)
    twice = shown.duplicated(keep="first").to_numpy()
    repeat = np.zeros(gaps.rows, dtype=bool)
    if twice.any():
        same_id = np.flatnonzero(shown.duplicated(keep=False).to_numpy())
        repeat[same_id] = cells.iloc[same_id].astype(str).duplicated(keep="first").to_numpy()
        ledger.finding(
            "id_used_twice",
            Severity.DOUBTS,
            twice & ~repeat,
            attribute="joint_id",
            column=column,
            values=shown[twice & ~repeat].to_numpy(),
            problem="another row has this id and other values",
            action="both rows ranked; the later one carries its row number",
        )
        ledger.finding(
            "row_repeated",
            Severity.BLOCKS,
            repeat,
            attribute="joint_id",
            column=column,
            values=shown[repeat].to_numpy(),
            problem="the row repeats an earlier one exactly",
            action="not ranked; the earlier row is",
        )
        shown = shown.where(~twice, shown + " (row " + numbers + ")")
        # Names made here may meet names in the file; the row number settles it.
        while shown.duplicated().any():
            again = shown.duplicated().to_numpy()
            shown = shown.where(~again, shown + " (row " + numbers + ")")
    return shown.to_numpy(dtype=object), repeat


def rows_without_a_joint(gaps: Gaps, ledger, column_of) -> np.ndarray:
    """Mask of rows that hold a name and nothing else: a note under the table, not a joint."""
    filled = sum((gaps.is_read(name).astype(int) for name in column_of if name != "joint_id"), np.zeros(gaps.rows, dtype=int))
    empty = filled == 0
    ledger.finding(
        "not_a_joint",
        Severity.BLOCKS,
        empty,
        attribute="joint_id",
        values=gaps["joint_id"][empty],
        problem="the row holds nothing but a name",
        action="taken as a note under the table, not ranked",
    )
    return empty


def audit_places(ledger, x, y, repeat, main) -> None:
    """Joints at the very same place, and joints far from the rest of their main."""
    frame = pd.DataFrame({"x": x, "y": y})
    groups = frame.groupby(pd.Series(main, dtype=object))
    apart = np.hypot(*(frame[axis] - groups[axis].transform("median") for axis in ("x", "y"))).to_numpy(dtype=float)
    usual = pd.Series(apart).groupby(pd.Series(main, dtype=object)).transform("median").to_numpy(dtype=float)
    enough = groups["x"].transform("count").to_numpy() >= 5
    far = enough & (apart > 20.0 * np.maximum(usual, 1e-9))
    ledger.finding(
        "place_far_from_main",
        Severity.DOUBTS,
        far,
        attribute="x_coordinate",
        problem="more than 20 times as far from the main's middle as its other joints; perhaps swapped or missing coordinates",
        action="kept where the file puts it; check the position",
    )
    known = frame.notna().all(axis=1).to_numpy() & ~repeat
    twice = np.zeros(len(frame), dtype=bool)
    twice[known] = frame[known].duplicated(keep="first").to_numpy()
    ledger.finding(
        "place_used_twice",
        Severity.NOTES,
        twice,
        problem="another joint has exactly the same coordinates",
        action="both kept; check the position of one of them",
    )
