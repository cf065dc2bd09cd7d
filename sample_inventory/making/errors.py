"""Errors planted in the register on purpose, each written down, so that a check of the audit knows what it should find."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
import pandas as pd

from .network import stream


@dataclass
class Formula:
    """A cell with a formula ({row} stands for the sheet row) and the value the spreadsheet last computed."""

    text: str
    value: float


@dataclass
class Planter:
    cells: pd.DataFrame
    joints: pd.DataFrame
    rng: np.random.Generator
    used: set[int] = field(default_factory=set)
    planted: list[dict] = field(default_factory=list)

    def pick(self, where, count: int, apart: bool = True) -> list[int]:
        """Rows to spoil, no row twice."""
        rows = [int(k) for k in self.rng.permutation(np.flatnonzero(np.asarray(where, dtype=bool))) if int(k) not in self.used][:count]
        if len(rows) < count:
            raise ValueError(f"only {len(rows)} rows for {count} errors")
        if apart:
            self.used.update(rows)
        return rows

    def write(self, row: int, column: str, kind: str, written, truth=None) -> None:
        self.planted.append({"row": row, "column": column, "kind": kind, "written": written, "truth": self.cells.at[row, column] if truth is None else truth})
        self.cells.at[row, column] = written


def plant_geometry(p: Planter) -> None:
    j = p.joints
    inch = (j["practice"] != "metric").to_numpy()
    for row in p.pick(inch & (j["size"] >= 8), 4):
        p.write(row, "hub_outside", "circle_inside_hub", float(j.at[row, "hub_outside"]), j.at[row, "hub_outside"])
        p.write(row, "bolt_circle", "circle_inside_hub", round(float(j.at[row, "hub_outside"]) - 1.5, 2), j.at[row, "bolt_circle"])
    for row in p.pick(inch & (j["size"] >= 8), 3):
        p.write(row, "ring_outside", "unit_slip", round(float(j.at[row, "ring_outside"]) * 25.4, 1), j.at[row, "ring_outside"])
    for row in p.pick(inch & (j["size"] == 12), 1):
        p.write(row, "ring_outside", "does_not_fit_pipe", 300, j.at[row, "ring_outside"])
    for row in p.pick(inch & (j["size"] >= 6), 2):
        p.write(row, "ring_bore", "bore_inside_pipe", round(float(j.at[row, "pipe_outside"]) - 0.4, 2), j.at[row, "ring_bore"])
    for row in p.pick((j["practice"] == "metric") & (j["size"] > 200), 2):
        p.write(row, "ring_thickness", "does_not_fit_pipe", "24 in", f"{j.at[row, 'ring_thickness']:g} mm")
    for row in p.pick(inch & (j["size"] > 10) & p.cells["ring_class"].notna(), 3):
        p.write(row, "bolt_count", "not_the_class", int(j.at[row, "bolt_count"]) + 4, j.at[row, "bolt_count"])
    for row in p.pick(inch & (j["ring_standard"] == "AWWA C207"), 3):
        p.write(row, "ring_standard", "class_not_in_standard", "AWWA C207", "AWWA C207")
        p.write(row, "ring_class", "class_not_in_standard", "PN16", j.at[row, "ring_class"])


def plant_pipe(p: Planter) -> None:
    j, cells = p.joints, p.cells
    inch = (j["practice"] != "metric").to_numpy()
    for row in p.pick(inch & (j["ratio"] == 11) & cells["ratio"].notna() & cells["material"].notna() & (j["material"] != "PE4710"), 5):
        p.write(row, "pressure_class", "ratio_against_class", "PC 80", cells.at[row, "pressure_class"])
    for row in p.pick(cells["zone"] == "Meadow", 3):
        p.write(row, "size", "size_missing", None)
    for row in p.pick(inch & cells["ratio"].notna(), 1):
        p.write(row, "ratio", "out_of_range", 110, j.at[row, "ratio"])
    for row, text in zip(p.pick(inch & cells["material"].notna(), 5), ("PE4170", "HDPE", "PE", "poly", "PE 48"), strict=True):
        p.write(row, "material", "category_doubtful", text, j.at[row, "material"])


def plant_loads(p: Planter) -> None:
    j, cells = p.joints, p.cells
    inch = (j["practice"] != "metric").to_numpy()
    for row in p.pick(inch, 2):
        p.write(row, "operating", "test_below_operating", int(j.at[row, "operating"]), int(j.at[row, "operating"]))
        p.write(row, "test", "test_below_operating", int(0.6 * j.at[row, "operating"]), int(j.at[row, "test"]))
    for row in p.pick(inch, 3):
        p.write(row, "recurrent", "occasional_below_recurrent", "60 psi", f"{j.at[row, 'recurrent']:.0f} psi")
        p.write(row, "occasional", "occasional_below_recurrent", "20 psi", f"{j.at[row, 'occasional']:.0f} psi")
    for row in p.pick(j["practice"] == "loose", 2):
        p.write(row, "operating", "surge_looks_absolute", f"{j.at[row, 'operating']:.0f} psi", int(j.at[row, "operating"]))
        p.write(row, "recurrent", "surge_looks_absolute", f"{1.8 * j.at[row, 'operating']:.0f} psi", f"{j.at[row, 'recurrent']:.0f} psi")
    for row, text in zip(p.pick(inch & cells["operating"].notna(), 3), ("118000 psi", "-95 psi", "1180 psi"), strict=True):
        p.write(row, "operating", "out_of_range" if text != "1180 psi" else "unit_slip", text, f"{j.at[row, 'operating']:.0f} psi")
    for row in p.pick(inch & cells["temperature"].notna(), 1):
        p.write(row, "temperature", "out_of_range", 580, round(j.at[row, "temperature"] * 1.8 + 32))
    for row, text in zip(p.pick(inch & cells["operating"].notna(), 2), (1, 2), strict=True):
        value = float(j.at[row, "operating"])
        p.write(row, "operating", "formula_cell", Formula(f"=ROUND({value - text}+{text},0)", value), int(value))


def plant_dates(p: Planter) -> None:
    j, cells = p.joints, p.cells
    for row, year in zip(p.pick(cells["year"].notna(), 3), (2061, 2091, 2105), strict=True):
        p.write(row, "year", "date_in_future", year, int(j.at[row, "year"]))
    for row in p.pick(cells["year"].notna(), 1):
        p.write(row, "year", "date_too_old", 1908, int(j.at[row, "year"]))
    for row in p.pick(cells["year"].notna() & (j["year"] > 1999), 3):
        p.write(row, "last_tightened", "date_before_installation", "12 May 1984", cells.at[row, "last_tightened"])
    for row in p.pick(cells["leaks"].notna(), 1):
        p.write(row, "leaks", "date_before_installation", "1979-04", cells.at[row, "leaks"])
    for row in p.pick(cells["year"].notna(), 2):
        p.write(row, "inspected", "unreadable", "31 Feb 2018")


def plant_unreadable(p: Planter) -> None:
    j, cells = p.joints, p.cells
    inch = (j["practice"] != "metric").to_numpy()
    for column, text in (
        ("operating", "see hydraulic model"),
        ("operating", "1O8 psi"),
        ("torque", "tight"),
        ("torque", "??? ft-lb"),
        ("ring_thickness", "2O mm"),
        ("bolt_count", "twelve"),
        ("bolt_diameter", "3 quarter"),
        ("leak_cost", "lots"),
        ("stated_rating", "ask supplier"),
    ):
        for row in p.pick(inch & cells[column].notna(), 1):
            p.write(row, column, "unreadable", text)
    for column, text in (("setting", "see dwg 14"), ("mating_side", "other"), ("ring_material", "metal"), ("bolt_grade", "strong"), ("gasket", "yes")):
        for row in p.pick(cells[column].notna(), 1):
            p.write(row, column, "not_a_choice", text)
    for column, text in (("ring_material", "ductle iron"), ("mating_side", "buterfly valve"), ("setting", "chambre"), ("method", "torqe wrench"), ("ring_form", "contuored")):
        for row in p.pick(cells[column].notna(), 1):
            p.write(row, column, "category_typo", text)
    for row in p.pick(cells["retrofit_cost"].notna(), 2):
        p.write(row, "retrofit_cost", "cell_error", "#REF!")


HOSTILE = (
    "<b onmouseover=alert(1)>U-77</b>",
    '=HYPERLINK("http://example.invalid","joint")',
    "../../joint 4\\..\\x",
    "Fl\u00e4nsch \u2116 12 \u202eabc",
    "+1+1|cmd",
)


def plant_identities(p: Planter) -> None:
    """Ids used twice, missing, or written to do harm; places that are wrong or taken."""
    cells = p.cells
    for row in p.pick(np.arange(len(cells)) > 50, 4):
        p.write(row, "joint_id", "id_used_twice", cells.at[row - 3, "joint_id"])
        p.used.add(row - 3)
    for row in p.pick(np.ones(len(cells)), 2):
        p.write(row, "joint_id", "id_missing", None)
    for row, text in zip(p.pick(cells["zone"] == "Upland", len(HOSTILE)), HOSTILE, strict=True):
        p.write(row, "joint_id", "hostile_text", text)
    for row in p.pick(np.arange(len(cells)) > 50, 5):
        for column in ("x", "y"):
            p.write(row, column, "place_used_twice", cells.at[row - 1, column])
        p.used.add(row - 1)
    for row in p.pick(np.ones(len(cells)), 2):
        x, y = cells.at[row, "x"], cells.at[row, "y"]
        p.write(row, "x", "coordinates_swapped", y)
        p.write(row, "y", "coordinates_swapped", x)
    for row in p.pick(np.ones(len(cells)), 2):
        p.write(row, "x", "place_at_zero", 0)
        p.write(row, "y", "place_at_zero", 0)


def office_formulas(cells: pd.DataFrame) -> None:
    """A column of the office's own that nobody else knows: a formula with its value on one main."""
    for row in np.flatnonzero((cells["main"] == "U-01") & cells["leak_cost"].notna() & cells["customers"].notna()):
        cost = cells.at[row, "leak_cost"]
        if isinstance(cost, int) and cells.at[row, "customers"] > 0:
            cells.at[row, "book"] = Formula("={leak_cost}{row}/{customers}{row}", round(cost / cells.at[row, "customers"], 4))


def plant_errors(cells: pd.DataFrame, joints: pd.DataFrame) -> tuple[pd.DataFrame, list[dict], list[int]]:
    """(cells with errors, the list of them, rows of `cells` in the order written: a few stand twice)."""
    planter = Planter(cells.copy(), joints.reset_index(drop=True), stream("errors"))
    for step in (plant_geometry, plant_pipe, plant_loads, plant_dates, plant_unreadable, plant_identities):
        step(planter)
    office_formulas(planter.cells)
    order = list(range(len(cells)))
    plain = [not any(isinstance(v, Formula) for v in row) for row in planter.cells.to_numpy()]
    for row in planter.pick(plain, 3):
        order.insert(order.index(row) + 1, row)
        planter.planted.append({"row": row, "column": "joint_id", "kind": "row_repeated", "written": cells.at[row, "joint_id"], "truth": ""})
    return planter.cells, planter.planted, order
