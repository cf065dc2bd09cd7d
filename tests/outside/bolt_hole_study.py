"""The bolt-hole study: which rings were solved, and the table they make.

    python tests/outside/bolt_hole_study.py          # writes data/bolt_hole_study.csv, some ten minutes on two cores

Rings are those of the published tables (a spread over standards, classes and
sizes, both hub moduli) and variations of them in hole, thickness and number of
bolts. The smooth ring each is compared with is `screener.mechanics.ring`,
itself held to axisymmetric finite elements elsewhere in this folder.
"""

from __future__ import annotations

import csv
import sys
from concurrent.futures import ProcessPoolExecutor
from dataclasses import replace
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parent))
import bolt_hole_model as model

from screener.mechanics import ring
from screener.standards import pipes
from screener.standards.rings import ring_table
from screener.standards.tables import INCH

RESULTS = Path(__file__).parent / "data" / "bolt_hole_study.csv"
HUB_MODULUS = {"0.5 h": 565.0e6, "1 y": 276.0e6}
FIELDS = (
    "name", "hub", "bore_radius_m", "outer_radius_m", "thickness_m", "bolt_circle_radius_m", "hole_diameter_m", "bolt_diameter_m", "bolts",
    "contact_outer_m", "bed_stiffness_pa_per_m", "bore_factor", "edge_factor", "rotation_factor", "arm_factor",
)


def table_rings() -> list[tuple[str, str, model.DrilledRing]]:
    """A spread of published rings on hubs of the published sizes; collar 1.25 times a DR 11 wall (common practice, no source)."""
    table = ring_table()
    picks = []
    for standard, ring_class, sizes in (
        ("AWWA C207", "D", (4, 6, 8, 12, 16, 20, 24, 30, 36, 48)),
        ("AWWA C207", "B", (8, 16, 30)),
        ("AWWA C207", "E", (8, 12, 24, 36)),
        ("AWWA C207", "F", (8, 12, 20, 30)),
        ("ASME B16.5", "150", (3, 6, 10, 16, 24)),
    ):
        for nps in sizes:
            row = np.flatnonzero((table.standard == standard) & (table.ring_class == ring_class) & (np.abs(table.flange_size - nps * INCH) < 1e-6))
            if len(row):
                picks.append((f"{standard} {ring_class} NPS {nps}", row[0], nps * INCH))
    for ring_class, sizes in (("PN10", (80, 150, 300, 500, 600)), ("PN16", (100, 200, 400, 600))):
        for dn in sizes:
            row = np.flatnonzero((table.ring_class == ring_class) & (np.abs(table.flange_size - dn / 1000) < 1e-6))
            picks.append((f"EN 1092-1 {ring_class} DN {dn}", row[0], dn / 1000))
    cases = []
    for k, (name, row, size) in enumerate(picks):
        metric = table.standard[row] == "EN 1092-1"
        if metric:
            stub = pipes.read_table("pe_flange_adapter_metric")
            at = np.flatnonzero(np.abs(stub.number("flange_dn") / 1000 - size) < 1e-6)[-1]
            outside, bore, hub = (stub.number(c)[at] / 1000 for c in ("dn_od_mm", "backing_bore_mm", "collar_od_mm"))
        else:
            outside = pipes.outside_diameter(np.array(["IPS"], dtype=object), np.array([size]))[0]
            bore = table.bore[row] if np.isfinite(table.bore[row]) else outside + 0.19 * INCH
            hub = pipes.inch_hub_outside_diameter(np.array([size]))[0]
        reach = table.bolt_circle_diameter[row] - table.bolt_diameter[row] - 0.25 * INCH
        hub = np.nanmin([hub, reach]) if np.isfinite(hub) else reach
        for hub_word in (("0.5 h", "1 y") if k % 3 == 0 else ("0.5 h",)):
            cases.append((name, hub_word, model.DrilledRing(
                bore / 2, table.outside_diameter[row] / 2, table.thickness[row], table.bolt_circle_diameter[row] / 2, table.hole_diameter[row],
                table.bolt_diameter[row], int(table.bolt_count[row]), hub / 2, HUB_MODULUS[hub_word] / (1.25 * outside / 11))))
    return cases


def varied_rings() -> list[tuple[str, str, model.DrilledRing]]:
    """Variations of two rings, to part the effects of hole, spacing, thickness and place."""
    base = {name: r for name, hub, r in table_rings() if hub == "0.5 h"}
    cases = []
    for name in ("AWWA C207 D NPS 12", "AWWA C207 D NPS 24"):
        r = base[name]
        for share in (0.6, 0.8, 1.2):
            cases.append((f"{name}, hole x {share}", "0.5 h", replace(r, hole_diameter=share * r.hole_diameter, bolt_diameter=share * r.bolt_diameter)))
        for share in (0.6, 1.4):
            cases.append((f"{name}, bolts x {share}", "0.5 h", replace(r, bolts=4 * round(share * r.bolts / 4))))
        for share in (0.6, 1.6, 2.2):
            cases.append((f"{name}, thickness x {share}", "0.5 h", replace(r, thickness=share * r.thickness)))
        shift = 0.06 * (r.outer_radius - r.bore_radius)
        cases.append((f"{name}, circle outward", "0.5 h", replace(r, bolt_circle_radius=r.bolt_circle_radius + shift)))
    return cases


def factors(ring_: model.DrilledRing, mesh=None) -> tuple[float, float, float, float]:
    """(bore, edge, rotation, arm) of the drilled ring over the smooth formulas."""
    r = ring_
    height = 0.01
    contact = ring.hub_contact(r.bore_radius, r.contact_outer, r.bolt_circle_radius, r.bore_radius, r.outer_radius, r.thickness, model.YOUNG, r.bed_stiffness * height, height)
    arm = contact.lever_arm
    stress = ring.loose_ring_stress(1.0, arm, r.thickness, r.bore_radius, r.outer_radius)
    turn = ring.ring_rotation(1.0, arm, r.thickness, r.bore_radius, r.outer_radius, model.YOUNG)
    solved = model.solve(r, mesh)
    return tuple(float(v) for v in (solved.bore_stress / stress, solved.edge_stress / stress, solved.rotation / turn, solved.arm / arm))


def row_of(case) -> dict:
    name, hub, r = case
    values = (name, hub, r.bore_radius, r.outer_radius, r.thickness, r.bolt_circle_radius, r.hole_diameter, r.bolt_diameter, r.bolts, r.contact_outer, r.bed_stiffness, *factors(r))
    return dict(zip(FIELDS, (f"{v:.6g}" if isinstance(v, float) else v for v in values), strict=True))


def main() -> None:
    cases = table_rings() + varied_rings()
    with ProcessPoolExecutor(2) as pool, open(RESULTS, "w", newline="", encoding="utf-8") as stream:
        writer = csv.DictWriter(stream, FIELDS, lineterminator="\n")
        writer.writeheader()
        for row in pool.map(row_of, cases):
            writer.writerow(row)
            stream.flush()
            print(row["name"], row["hub"], row["bore_factor"], row["edge_factor"], row["rotation_factor"], row["arm_factor"], flush=True)


if __name__ == "__main__":
    main()
