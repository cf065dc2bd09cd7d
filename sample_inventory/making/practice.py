"""What each joint truly is: ring, bolts, tightening and loads by the practice of its era.

Sizes come from the package's tables of published standards; the mix of practices is invented.
Lengths of the ring, hub and bolts in inches (mm for metric joints); torque ft-lb (N m); pressures psi.
"""

from __future__ import annotations

import csv
from functools import cache
from pathlib import Path

import numpy as np
import pandas as pd

from .network import ZONES, stream

TABLES = Path(__file__).resolve().parents[2] / "screener" / "standards" / "data"
PSI_PER_METRE = 9.80665 / 6.894757
NEW_YEAR = 2026

# Share of each ring (standard, class, form, material) by practice.
RINGS = {
    "early": ((0.55, "AWWA C207", "B", "flat plate", "ASTM A283 grade C"), (0.45, "AWWA C207", "D", "flat plate", "ASTM A36")),
    "big": ((0.88, "AWWA C207", "D", "flat plate", "ASTM A36"), (0.12, "AWWA C207", "E", "flat plate", "ASTM A36")),
    "mixed": (
        (0.50, "ASME B16.5", "150", "contoured", "ASTM A536 65-45-12"),
        (0.35, "AWWA C207", "D", "flat plate", "ASTM A36"),
        (0.15, "ASME B16.5", "150", "flat plate", "ASTM A240 304L / 316L"),
    ),
    "loose": (
        (0.70, "AWWA C207", "E", "flat plate", "ASTM A516 grade 70"),
        (0.15, "AWWA C207", "F", "flat plate", "ASTM A516 grade 70"),
        (0.15, "ASME B16.5", "150", "contoured", "ASTM A536 65-45-12"),
    ),
}
SECTIONS = {8.0: "cast-8", 12.0: "cast-12"}
TORQUE_SHARE = {"early": (0.50, 0.30), "big": (0.85, 0.22), "mixed": (1.0, 0.12), "loose": (1.05, 0.08), "metric": (0.75, 0.25)}
"""Torque really applied, as a share of the torque that seats the face at 1 500 psi, and its scatter between joints."""
METHODS = {
    "early": (("by feel", 0.8), ("impact wrench", 0.2)),
    "big": (("torque wrench", 0.55), ("impact wrench", 0.30), ("hydraulic torque", 0.15)),
    "mixed": (("torque wrench", 0.75), ("hydraulic torque", 0.25)),
    "loose": (("torque wrench", 0.60), ("hydraulic torque", 0.35), ("tensioner", 0.05)),
    "metric": (("torque wrench", 0.5), ("by feel", 0.5)),
}
LUBRICATED = {"early": 0.35, "big": 0.6, "mixed": 0.9, "loose": 0.97, "metric": 0.5}
CREWS = {"early": ("C1", "C2", "C3"), "big": ("C4", "C5"), "mixed": ("C5", "C6", "C7"), "loose": ("C7", "C8"), "metric": ("D1", "D2")}


@cache
def table(name: str) -> list[dict[str, str]]:
    with (TABLES / f"{name}.csv").open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


@cache
def lookup(name: str, value: str, **keys) -> float:
    """A number of a table, at the row whose keys agree; NaN where the cell is empty."""
    for row in table(name):
        if all(float(row[k]) == v if isinstance(v, float) else row[k] == v for k, v in keys.items()):
            return float(row[value]) if row[value] else np.nan
    raise KeyError((name, keys))


def _choose(rng: np.random.Generator, pairs) -> str:
    words, weights = zip(*pairs, strict=True)
    return str(rng.choice(words, p=np.array(weights) / sum(weights)))


def inch_ring(joint, rng) -> dict:
    """Ring, hub and bolts of an inch joint; a class 150 ring above 24 in is one of ASME B16.47."""
    size = joint.size
    choices = RINGS[joint.practice]
    if joint.practice == "early" and joint.zone != "Harbour":
        choices = ((1.0, *choices[1][1:]),)  # the low class was bought for the low zone only
    pick = choices[int(rng.choice(len(choices), p=[c[0] for c in choices]))]
    _, standard, ring_class, form, material = pick
    if standard == "AWWA C207":
        name, keys, thick = "awwa_c207_ring_flanges", {"awwa_class": ring_class, "nps_in": size}, "thickness_in"
    else:
        name, keys, thick = "asme_b16_5_class150_lap_joint", {"nps_in": size}, "lap_joint_thickness_min_in"
    outside = lookup("pe_pipe_dips", "od_in", nominal_in=size) if joint.system == "DIPS" else lookup("pe_pipe_ips", "od_in", nps_in=size)
    bore = lookup(name, "id_in", **keys) if standard == "AWWA C207" else lookup(name, "lap_joint_bore_min_in", **keys)
    if not bore > outside:  # no bore printed, or the pipe does not pass
        bore = round(outside + 0.19, 2)
    bolt = lookup(name, "bolt_dia_in", **keys)
    circle = lookup(name, "bolt_circle_in", **keys)
    hub = lookup("pe_flange_adapter_inch", "hub_od_in", nps_in=size) if size <= 34 else round(circle - bolt - 0.45, 2)
    wall = outside / joint.ratio
    grade = {"early": "ASTM A307 B", "big": "ASTM A193 B7" if bolt > 1.0 else "ASTM A307 B"}.get(joint.practice, "ASTM A193 B7")
    if material.startswith("ASTM A240"):
        grade = "ASTM A193 B8M class 1"
    return {
        "ring_standard": standard,
        "ring_class": ring_class,
        "ring_form": form,
        "ring_material": material,
        "ring_section": SECTIONS.get(size, "") if form == "contoured" else "",
        "ring_outside": lookup(name, "od_in", **keys),
        "ring_bore": bore,
        "ring_thickness": lookup(name, thick, **keys),
        "bolt_circle": circle,
        "bolt_count": int(lookup(name, "n_bolts", **keys)),
        "bolt_diameter": bolt,
        "bolt_grade": grade,
        "hub_outside": hub,
        "hub_thickness": round(1.25 * wall, 2),
        "pipe_outside": outside,
        "stated_rating": {"B": 86, "D": 175 if size <= 12 else 150, "E": 275, "F": 300, "150": 160 if form == "contoured" else 285}[ring_class],
        "rating_basis": "loose" if form == "contoured" else "welded",
        "stated_safety_factor": 2.0 if form == "contoured" else np.nan,
        "yield_mpa": {"ASTM A283 grade C": 205, "ASTM A36": 250, "ASTM A516 grade 70": 260, "ASTM A536 65-45-12": 310}.get(material, 170),
    }


def metric_ring(joint, rng) -> dict:
    """Ring, hub and bolts of a metric joint, drilled PN10 or PN16."""
    size = joint.size
    ring_class = "PN16" if joint.ratio < 14 else _choose(rng, (("PN10", 0.8), ("PN16", 0.2)))
    dn = lookup("pe_flange_adapter_metric", "flange_dn", dn_od_mm=size)
    keys = {"pn_bar": float(ring_class[2:]), "dn": dn}
    name = "en1092_1_pn10_pn16"
    hub = lookup("pe_flange_adapter_metric", "collar_od_mm", dn_od_mm=size)
    return {
        "ring_standard": "EN 1092-1",
        "ring_class": ring_class,
        "ring_form": "flat plate",
        "ring_material": _choose(rng, (("EN 10025-2 S235JR", 0.8), ("EN-GJS-400-15", 0.2))),
        "ring_section": "",
        "ring_outside": lookup(name, "od_mm", **keys),
        "ring_bore": lookup("pe_flange_adapter_metric", "backing_bore_mm", dn_od_mm=size),
        "ring_thickness": lookup(name, "type02_loose_thickness_mm", **keys),
        "bolt_circle": lookup(name, "bolt_circle_mm", **keys),
        "bolt_count": int(lookup(name, "n_bolts", **keys)),
        "bolt_diameter": lookup(name, "bolt_dia_mm", **keys),
        "bolt_grade": _choose(rng, (("ISO 898-1 8.8", 0.75), ("ISO 3506-1 A2-70", 0.15), ("ISO 898-1 4.6", 0.10))),
        "hub_outside": hub,
        "hub_thickness": lookup("pe_flange_adapter_metric", "collar_thickness_sdr17_mm", dn_od_mm=size) * (1.4 if joint.ratio < 14 else 1.0),
        "pipe_outside": size,
        "stated_rating": float(ring_class[2:]),
        "rating_basis": "welded",
        "stated_safety_factor": np.nan,
        "yield_mpa": 225,
    }


def add_rings(joints: pd.DataFrame) -> pd.DataFrame:
    rng = stream("rings")
    made = []
    previous: dict[str, dict] = {}
    for joint in joints.itertuples(index=False):
        # Rings come by the batch: mostly the same as at the main's last joint.
        if joint.main_id not in previous or rng.random() < 0.25:
            previous[joint.main_id] = metric_ring(joint, rng) if joint.practice == "metric" else inch_ring(joint, rng)
        made.append(previous[joint.main_id])
    return pd.concat([joints, pd.DataFrame(made)], axis=1)


def add_assembly(joints: pd.DataFrame) -> pd.DataFrame:
    """Tightening: the torque really applied, how, with what on the threads, and when last."""
    rng = stream("assembly")
    n = len(joints)
    practice = joints["practice"]
    metric = (practice == "metric").to_numpy()
    joints["tightening_method"] = [_choose(rng, METHODS[p]) for p in practice]
    joints["bolt_lubrication"] = np.where(rng.random(n) < practice.map(LUBRICATED), "lubricated", "dry")
    inch = np.where(metric, 25.4, 1.0)
    area = np.pi / 4.0 * ((joints["hub_outside"] / inch) ** 2 - (0.97 * joints["pipe_outside"] / inch * (1 - 2 / joints["ratio"]) ** 0.5) ** 2)
    seating = 0.16 * (joints["bolt_diameter"] / inch) * 1500.0 * area / joints["bolt_count"] / 12.0
    share = practice.map(lambda p: TORQUE_SHARE[p][0]) * np.exp(rng.normal(0.0, 1.0, n) * practice.map(lambda p: TORQUE_SHARE[p][1]))
    torque = np.maximum(5.0 * np.round(seating * share / 5.0), 15.0)
    joints["torque_ftlb"] = torque
    joints["torque"] = np.where(metric, 5.0 * np.round(torque * 1.355818 / 5.0), torque)
    late = {"early": 0.06, "big": 0.12, "mixed": 0.55, "loose": 0.45, "metric": 0.15}
    again = rng.random(n) < practice.map(late)
    after = joints["year"] + np.ceil(rng.exponential(3.0, n)).astype(int)
    joints["last_tightened"] = np.where(again & (after < NEW_YEAR), after, 0)
    joints["crew"] = [str(rng.choice(CREWS[p])) for p in practice]
    return joints


def add_setting(joints: pd.DataFrame) -> pd.DataFrame:
    rng = stream("setting")
    n = len(joints)
    chamber = (joints["setting"] == "chamber").to_numpy()
    above = (joints["setting"] == "above ground").to_numpy()
    mates = rng.choice(["valve", "ductile iron", "steel", "PE", "blind"], size=n, p=[0.62, 0.18, 0.12, 0.05, 0.03])
    joints["mating_side"] = np.where(chamber, mates, np.where(above, "steel", np.where(rng.random(n) < 0.9, "PE", "ductile iron")))
    rubber = rng.choice(["flat rubber", "profiled rubber with steel core", "none", "compressed fibre"], size=n, p=[0.45, 0.25, 0.25, 0.05])
    joints["gasket"] = np.where(joints["mating_side"] == "PE", "none", rubber)
    wet_by_group = {g: rng.random() < 0.4 for g in joints["access_group"].unique()}
    wet = joints["access_group"].map(wet_by_group).to_numpy()
    soil = np.array([str(rng.choice(ZONES[z].soil)) for z in joints["zone"]])
    joints["environment"] = np.where(chamber, np.where(wet, "wet chamber", "dry chamber"), np.where(above, "C3", soil))
    coats = {"early": ("none", "paint"), "big": ("paint", "paint", "galvanized"), "mixed": ("galvanized", "epoxy"), "loose": ("epoxy", "galvanized"), "metric": ("galvanized", "paint")}
    joints["coating"] = [str(rng.choice(coats[p])) for p in joints["practice"]]
    joints["restraint"] = np.where(chamber, np.where(rng.random(n) < 0.6, "restrained", "free"), np.where(above, "free", "restrained"))
    return joints


def add_loads(joints: pd.DataFrame) -> pd.DataFrame:
    """Pressures (psi) from the zone's grade line and the joint's level; surges and cycles by zone and main."""
    rng = stream("loads")
    zone = joints["zone"].map(ZONES)
    # Upland water loses head along the main, the others hardly do at the usual highest pressure.
    grade = zone.map(lambda z: z.hydraulic_grade) - zone.map(lambda z: z.grade_loss) * joints["chainage"] / 1000.0
    joints["operating"] = np.round((grade - joints["elevation"]) * PSI_PER_METRE, 0)
    per_main = {m: rng.random() for m in joints["main_id"].unique()}
    share = joints["main_id"].map(per_main)
    for name in ("recurrent", "occasional"):
        low = zone.map(lambda z, k=name: getattr(z, k)[0])
        high = zone.map(lambda z, k=name: getattr(z, k)[1])
        joints[name] = np.round(low + share * (high - low), 0)
    joints["test"] = 5.0 * np.round(1.5 * joints["operating"] / 5.0)
    cycles = {m: rng.lognormal(0.0, 0.25) for m in joints["main_id"].unique()}
    joints["cycles"] = np.maximum(np.round(zone.map(lambda z: z.cycles) * joints["main_id"].map(cycles)), 2)
    joints["cycle_range"] = np.round(zone.map(lambda z: z.cycle_range) * (0.7 + 0.6 * share), 0)
    joints["temperature"] = zone.map(lambda z: z.warm) + rng.choice([-1.0, 0.0, 0.0, 1.0], len(joints))
    joints["season"] = zone.map(lambda z: z.season)
    return joints


def add_consequence(joints: pd.DataFrame) -> pd.DataFrame:
    rng = stream("consequence")
    n = len(joints)
    inches = np.where(joints["practice"] == "metric", joints["size"] / 25.4, joints["size"])
    crossing = rng.choice(["none", "road", "rail", "river", "building"], size=n, p=[0.80, 0.13, 0.02, 0.03, 0.02])
    joints["crossing"] = crossing
    joints["customers"] = 10 * np.round(3.0 * inches**1.6 * rng.lognormal(0.0, 0.5, n) / 10.0).astype(int)
    factor = pd.Series(crossing).map({"none": 1.0, "road": 1.7, "rail": 4.0, "river": 2.2, "building": 3.0}).to_numpy()
    joints["leak_cost"] = 500 * np.round((6000.0 + 260.0 * inches**1.7 + 9.0 * joints["customers"]) * factor * rng.lognormal(0.0, 0.2, n) / 500.0).astype(int)
    dig = np.where(joints["setting"] == "buried", 5500.0, 1500.0)
    joints["retrofit_cost"] = 100 * np.round((dig + 120.0 * inches**1.35) * rng.lognormal(0.0, 0.12, n) / 100.0).astype(int)
    return joints


def true_joints(joints: pd.DataFrame) -> pd.DataFrame:
    """Every attribute of every joint, complete and right."""
    for step in (add_rings, add_assembly, add_setting, add_loads, add_consequence):
        joints = step(joints)
    return joints
