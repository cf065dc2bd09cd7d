"""Gap rules for bolts, faces and the torque at assembly."""

from __future__ import annotations

import numpy as np

from screener.inventory.fill_pipe import PRACTICE
from screener.inventory.gaps import Gaps, among
from screener.records import Origin
from screener.settings import Settings
from screener.standards import materials, pipes
from screener.standards.rings import STANDARDS
from screener.standards.tables import INCH, PSI

# Nut factor by lubrication: lubricated 0.16 (PPI TN-38, read); dry and coated from memory.
NUT_FACTOR = {"lubricated": 0.16, "dry": 0.20, "coated": 0.12}
# Coefficient of variation of a joint's clamp force by tightening method, from memory.
PRELOAD_SCATTER = {
    "torque wrench": 0.25,
    "hydraulic torque": 0.20,
    "tensioner": 0.10,
    "impact wrench": 0.45,
    "by feel": 0.50,
}
# Required face stress over pressure (the m of App. 2). None between PE faces: METHODS default 1.
# Rubber 1.0 and fibre 2.0: ASME VIII-1 App. 2 Table 2-5.1, from memory. Profiled rubber: tests needed
# less than 60 % of the usual torque (PPCA 2016 abstract, read).
REQUIRED_STRESS_FACTOR = {"none": 1.0, "flat rubber": 1.0, "profiled rubber with steel core": 0.6, "compressed fibre": 2.0}


def fill_faces(gaps: Gaps) -> None:
    for attribute in ("mating_side", "gasket"):
        unknown = (gaps[attribute] == "unknown")
        gaps.reject(attribute, unknown)
    chamber = gaps["setting"] == "chamber"
    gaps.fill("mating_side", "valve", where=chamber, rule="in a chamber: a valve", source=PRACTICE, scatter=0.4)
    gaps.fill("mating_side", "PE", rule="PE on PE where nothing says otherwise", source=PRACTICE, scatter=0.4)
    gaps.fill("gasket", "none", where=gaps["mating_side"] == "PE", rule="PE faces are joined without a gasket", source=PRACTICE, scatter=0.3)
    gaps.fill("gasket", "none", rule="no gasket where nothing says otherwise", source=PRACTICE, scatter=0.5)
    gaps.add("mating_bore")
    pe = gaps["mating_side"] == "PE"
    bore = gaps["pipe_outside_diameter"] * (1.0 - 2.0 / gaps["dimension_ratio"])
    gaps.fill("mating_bore", bore, where=pe, origin=Origin.DERIVED, rule="bore of the PE pipe", source="dimension ratio")
    steel = pipes.steel_pipe_bore(gaps["flange_size"])
    gaps.fill("mating_bore", steel, origin=Origin.LOOKED_UP, rule="bore of the steel pipe opposite", source="PPI TN-38 Table 3 (read)")
    gaps.fill(
        "mating_bore",
        gaps["flange_size"] * 0.97,
        rule="0.97 x flange size",
        source="median of PPI TN-38 Table 3 bores over size",
        scatter=0.02,
    )


def fill_bolts(gaps: Gaps) -> None:
    metric_bolt = np.isfinite(gaps["bolt_diameter"]) & (
        np.abs(gaps["bolt_diameter"] * 1000 - np.round(gaps["bolt_diameter"] * 1000)) < 1e-6
    )
    year = gaps["year_installed"]
    era = np.digitize(np.where(np.isnan(year), 0.0, year), [1990, 2005])
    vote, agreement = gaps.group_vote("bolt_grade", [metric_bolt, era, "zone"], 5, 0.6)
    gaps.fill(
        "bolt_grade",
        vote,
        rule="grade of most joints on record of the same zone, era and thread system",
        source="this inventory",
        scatter=1.0 - np.where(np.isnan(agreement), 1.0, agreement),
    )
    large = gaps["bolt_diameter"] > 1.001 * INCH
    for where, grade, rule, source in (
        (metric_bolt, "ISO 898-1 8.8", "metric bolts: 8.8", PRACTICE),
        (era == 0, "ASTM A307 B", "inch bolts before 1990: A307", "AWWA C207-86 era (read in a secondary summary)"),
        (large, "ASTM A193 B7", "inch bolts over 1 in: A193 B7", "AWWA C207-18 (read)"),
        (~large, "ASTM A307 B", "inch bolts up to 1 in: A307 B", PRACTICE),
    ):
        gaps.fill("bolt_grade", grade, where=where, rule=rule, source=source, scatter=0.3)
    strength, proof = materials.bolt_strength(gaps["bolt_grade"], gaps["bolt_diameter"])
    area, _pitch = materials.thread_areas(gaps["bolt_diameter"])
    for name, values, rule, source in (
        ("bolt_yield", strength, "least yield of the grade", "bolt grades table (each row with its status)"),
        ("bolt_allowed_stress", proof, "proof stress of the grade", "bolt grades table"),
        ("bolt_tensile_area", area, "tensile area of the thread", "ASME B1.1 / ISO 898-1, checked against ASME PCC-1"),
    ):
        gaps.add(name)
        gaps.fill(name, values, origin=Origin.LOOKED_UP, rule=rule, source=source)
    gaps.fill("bolt_allowed_stress", 0.7 * strength, origin=Origin.DERIVED, rule="0.7 x yield, no proof stress printed", source=PRACTICE)
    gaps.fill(
        "bolt_tensile_area",
        0.75 * np.pi / 4.0 * gaps["bolt_diameter"] ** 2,
        rule="0.75 x shank area, diameter is in neither thread series",
        source=PRACTICE,
        scatter=0.05,
    )


def fill_torque(gaps: Gaps, settings: Settings) -> None:
    """Nut factor, tightening, and the torque where none is on record."""
    for attribute in ("bolt_lubrication", "tightening_method"):
        gaps.reject(attribute, (gaps[attribute] == "unknown"))
    known = gaps.is_read("assembly_torque")
    gaps.add("torque_is_known")
    gaps["torque_is_known"][:] = known
    gaps.fill("bolt_lubrication", "lubricated", rule="lightly greased, as the torque note assumes", source="PPI TN-38 (read)", scatter=0.3)
    gaps.fill("tightening_method", "torque wrench", where=known, rule="a torque on record was set with a wrench", source=PRACTICE, scatter=0.1)
    year = gaps["year_installed"]
    gaps.fill("tightening_method", "by feel", where=year < 1997, rule="no torque on record before 1997: by feel", source=PRACTICE, scatter=0.3)
    gaps.fill("tightening_method", "torque wrench", rule="torque wrench where nothing says otherwise", source=PRACTICE, scatter=0.3)
    gaps.add("nut_factor")
    gaps.add("preload_scatter")
    for word, factor in NUT_FACTOR.items():
        gaps.fill(
            "nut_factor",
            factor,
            where=gaps["bolt_lubrication"] == word,
            rule=f"nut factor of {word} threads",
            source="PPI TN-38 (read)" if word == "lubricated" else "from memory",
            scatter=0.12,
        )
    for word, scatter in PRELOAD_SCATTER.items():
        gaps.fill("preload_scatter", scatter, where=gaps["tightening_method"] == word, rule=f"scatter of clamp force, {word}", source="from memory")
    # The torque note seats the face at 1 200 to 1 800 psi over the overlap of hub and mating steel.
    inner = np.fmax(np.where(gaps["mating_side"] == "PE", pipes.steel_pipe_bore(gaps["flange_size"]), gaps["mating_bore"]), 0.0)
    inner = np.where(np.isfinite(inner), inner, gaps["mating_bore"])
    area = np.pi / 4.0 * (gaps["hub_outside_diameter"] ** 2 - inner**2)
    force = settings.seating_stress_psi * PSI * area
    torque = gaps["nut_factor"] * gaps["bolt_diameter"] * force / gaps["bolt_count"]
    by_feel = gaps["tightening_method"] == "by feel"
    gaps.fill(
        "assembly_torque",
        torque * settings.torque_by_feel_share,
        where=by_feel,
        rule=f"{settings.torque_by_feel_share:g} x the torque note's seating stress, tightened by feel",
        source=f"PPI TN-38 (read); share: {PRACTICE}",
        scatter=0.5,
    )
    gaps.fill(
        "assembly_torque",
        torque,
        rule=f"torque that seats the face at {settings.seating_stress_psi:g} psi",
        source="PPI TN-38 (read)",
        scatter=0.3,
    )
    gaps.fill(
        "last_tightened",
        gaps["year_installed"],
        rule="not tightened again since it was installed",
        source=PRACTICE,
        scatter=0.0,
    )


def grip_length(gaps: Gaps) -> np.ndarray:
    """Distance between the nuts, m: ring and hub, then the same again or a mating flange of ring thickness."""
    side = gaps["ring_thickness"] + gaps["hub_thickness"]
    pe = gaps["mating_side"] == "PE"
    return np.where(pe, 2.0 * side, side + gaps["ring_thickness"])


def required_stress_factor(gaps: Gaps) -> np.ndarray:
    factor = np.full(gaps.rows, np.nan)
    for word, value in REQUIRED_STRESS_FACTOR.items():
        factor[gaps["gasket"] == word] = value
    return factor


def drilling_is_standard(gaps: Gaps) -> np.ndarray:
    return among(gaps["ring_standard"], STANDARDS)
