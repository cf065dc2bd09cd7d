"""Gap rules for the pipe and the stub end."""

from __future__ import annotations

import numpy as np

from screener.inventory.gaps import Gaps, among
from screener.records import Origin, Severity
from screener.settings import Settings
from screener.standards import pipes
from screener.standards.tables import INCH

PRACTICE = "common practice, no source"


def fill_year_installed(gaps: Gaps) -> None:
    for group, words in (("main_id", "the same main"), ("zone", "the same zone")):
        gaps.fill(
            "year_installed",
            gaps.group_median("year_installed", group),
            rule=f"median year of joints on {words}",
            source="this inventory",
            scatter=5.0 / 2000.0 if group == "main_id" else 8.0 / 2000.0,
        )
    known = gaps["year_installed"][gaps.is_read("year_installed")]
    if len(known):
        gaps.fill(
            "year_installed",
            np.median(known),
            rule="median year of the whole inventory",
            source="this inventory",
            scatter=10.0 / 2000.0,
        )


def fill_size_system(gaps: Gaps) -> None:
    """Which table the size belongs to: what the file says, else what else the row says."""
    metric_material = among(gaps["pe_material"], ["PE80", "PE100"])
    inch_material = among(gaps["pe_material"], ["PE4710", "PE3608", "PE3408"])
    metric_ring = gaps["ring_standard"] == "EN 1092-1"
    size = gaps["nominal_size"]
    inches = size / INCH
    on_inch = np.isfinite(size) & (np.abs(inches - np.round(inches * 2.0) / 2.0) < 1.0e-3)
    on_metric = np.isfinite(pipes.outside_diameter(np.full(gaps.rows, "ISO", dtype=object), size))
    for where, system, rule in (
        (on_metric & ~on_inch & (metric_material | metric_ring), "ISO", "size is an ISO size and the material or ring is metric"),
        (on_metric & ~on_inch & ~inch_material, "ISO", "size in mm is an ISO outside diameter"),
        (metric_material, "ISO", "material has a metric designation"),
    ):
        gaps.fill("size_system", system, where=where, rule=rule, source=PRACTICE, scatter=0.05)
    outside = gaps["pipe_outside_diameter"]
    for system in ("IPS", "DIPS"):
        table = pipes.outside_diameter(np.full(gaps.rows, system, dtype=object), size)
        close = np.abs(outside - table) < 0.005 * table
        gaps.fill(
            "size_system",
            system,
            where=close,
            origin=Origin.DERIVED,
            rule=f"the outside diameter given is that of {system} pipe of this size",
            source="ASTM F714 / AWWA C906 (outside diameters)",
        )
    vote, agreement = gaps.group_vote("size_system", ["zone"], 5, 0.6)
    gaps.fill(
        "size_system",
        vote,
        where=vote != "ISO",
        rule="as most joints of the zone with a size system on record",
        source="this inventory",
        scatter=1.0 - np.where(np.isnan(agreement), 1.0, agreement),
    )
    gaps.fill("size_system", "IPS", where=~metric_material, rule="IPS where nothing says otherwise", source=PRACTICE, scatter=0.2)


def fill_flange_size(gaps: Gaps) -> None:
    """Nominal size of the flange (m) that the stub end is drilled for; a working attribute."""
    gaps.add("flange_size")
    metric_pipe = gaps["size_system"] == "ISO"
    metric_ring = gaps["ring_standard"] == "EN 1092-1"
    size = gaps["nominal_size"]
    stub = pipes.metric_stub_end(np.where(metric_pipe, gaps["pipe_outside_diameter"], np.nan), "flange_dn")
    # DN 80 and up: DN / 25 is the inch size; below, 65 and 50 pair with 2.5 and 2.
    inch_of_dn = np.where(stub * 1000.0 >= 80.0, np.round(stub * 1000.0 / 25.0), np.round(stub * 1000.0 / 25.4 * 2) / 2)
    inches = np.round(size / INCH, 2)
    dn_of_inch = np.where(inches >= 3.0, inches * 25.0, np.where(inches == 2.5, 65.0, 50.0))
    dn_of_inch = np.where(inches == 3.0, 80.0, dn_of_inch) / 1000.0
    for where, values, rule in (
        (metric_pipe & metric_ring, stub, "flange DN of the stub end"),
        (metric_pipe & ~metric_ring, inch_of_dn * INCH, "inch size paired with the stub end's flange DN"),
        (~metric_pipe & metric_ring, dn_of_inch, "DN paired with the inch size"),
        (~metric_pipe & ~metric_ring, size, "flange size equals pipe size"),
    ):
        gaps.fill(
            "flange_size",
            values,
            where=where,
            origin=Origin.LOOKED_UP,
            rule=rule,
            source="ISO 9624 / DIN 16963-4 (from memory)" if rule.startswith(("flange DN", "inch size")) else PRACTICE,
        )


def fill_outside_diameter(gaps: Gaps) -> None:
    size = gaps["nominal_size"]
    gaps.fill(
        "pipe_outside_diameter",
        pipes.outside_diameter(gaps["size_system"], size),
        origin=Origin.LOOKED_UP,
        rule="outside diameter by size system and size",
        source="ASTM F714 / AWWA C906, ISO 4427",
    )
    # A metric pipe bought by flange size: DN 300 on paper is the 315 mm pipe.
    metric = gaps["size_system"] == "ISO"
    table = pipes.read_table("pe_flange_adapter_metric")
    flange = table.number("flange_dn") / 1000.0
    outside = table.number("dn_od_mm") / 1000.0
    largest = np.full(gaps.rows, np.nan)
    for dn in np.unique(flange):
        largest[metric & (np.abs(size - dn) < 1.0e-6)] = outside[flange == dn].max()
    gaps.fill(
        "pipe_outside_diameter",
        largest,
        rule="size is a flange DN; the larger pipe of that flange",
        source="ISO 9624 / DIN 16963-4 (from memory)",
        scatter=0.05,
    )
    # And where only the outside diameter is known, the nominal size follows.
    known = gaps["pipe_outside_diameter"]
    for system in ("IPS", "DIPS"):
        nominal, diameters = pipes.inch_outside_diameters(system)
        nearest = np.abs(np.where(np.isfinite(known), known, 0.0)[:, None] - diameters[None, :]).argmin(axis=1)
        close = np.abs(known - diameters[nearest]) < 0.01 * diameters[nearest]
        gaps.fill(
            "nominal_size",
            np.where(close, nominal[nearest], np.nan),
            where=gaps["size_system"] == system,
            origin=Origin.DERIVED,
            rule=f"{system} size within 1 % of the outside diameter",
            source="ASTM F714 / AWWA C906 (outside diameters)",
        )
    gaps.fill("nominal_size", known, where=metric, origin=Origin.DERIVED, rule="ISO size is the outside diameter", source="ISO 4427")


def fill_material(gaps: Gaps) -> None:
    year = gaps["year_installed"]
    metric = gaps["size_system"] == "ISO"
    for where, material, rule in (
        (metric & (year < 1995), "PE80", "metric pipe before 1995"),
        (metric, "PE100", "metric pipe from 1995"),
        (~metric & (year < 2006), "PE3408", "inch pipe before 2006"),
        (~metric & (year >= 2006), "PE4710", "inch pipe from 2006"),
        (~metric, "PE3408", "inch pipe of unknown year"),
    ):
        gaps.fill("pe_material", material, where=where, rule=rule, source="era of the designation, from memory", scatter=0.25)


def _standard_ratio(ratio: np.ndarray) -> np.ndarray:
    steps = np.array(pipes.STANDARD_RATIOS)
    nearest = np.abs(np.where(np.isfinite(ratio), ratio, 0.0)[:, None] - steps[None, :]).argmin(axis=1)
    return np.where(np.isfinite(ratio), steps[nearest], np.nan)


def fill_dimension_ratio(gaps: Gaps) -> None:
    stress = pipes.design_stress(gaps["pe_material"])
    derived = _standard_ratio(2.0 * stress / gaps["pipe_pressure_class"] + 1.0)
    gaps.fill(
        "dimension_ratio",
        derived,
        origin=Origin.DERIVED,
        rule="standard ratio nearest to 2 HDS / PC + 1",
        source="pipe pressure class; " + pipes.DESIGN_STRESS_SOURCE,
        scatter=0.03,
    )
    for group, words in (("main_id", "the same main"), ("zone", "the same zone")):
        vote, _agreement = gaps.group_vote("dimension_ratio", [group], 1, 0.0)
        gaps.fill(
            "dimension_ratio",
            vote.astype(float),
            where=gaps.known(group),
            rule=f"commonest ratio on {words}",
            source="this inventory",
            scatter=0.1 if group == "main_id" else 0.2,
        )
    gaps.fill("dimension_ratio", 17.0, rule="DR 17 where nothing else is known", source=PRACTICE, scatter=0.25, low=11.0, high=21.0)


def fill_stub_end(gaps: Gaps, settings: Settings) -> None:
    metric = gaps["size_system"] == "ISO"
    outside = gaps["pipe_outside_diameter"]
    clearance = gaps["bolt_circle_diameter"] - gaps["bolt_diameter"]
    gaps.fill(
        "hub_outside_diameter",
        np.where(metric, pipes.metric_stub_end(outside, "collar_od_mm"), pipes.inch_hub_outside_diameter(gaps["nominal_size"])),
        origin=Origin.LOOKED_UP,
        rule="collar diameter of the stub end by size",
        source="PPI TN-38 Table 3 (inch, read); ISO 9624 / DIN 16963-4 (metric, from memory)",
        scatter=0.005,
    )
    # Median gap between bolts and hub over the sizes the torque table prints: 0.375 in.
    gaps.fill(
        "hub_outside_diameter",
        clearance - 0.375 * INCH,
        rule="bolt circle less bolt diameter less 0.375 in, the median clearance of the printed sizes",
        source="PPI TN-38 Table 3 (sizes 2 to 34 in, read)",
        scatter=0.01,
    )
    # A hub can't reach the bolts: a printed hub on a smaller drilling is cut to clear them.
    reach = gaps["hub_outside_diameter"] > clearance
    tight = reach & ~gaps.is_read("hub_outside_diameter")
    if tight.any():
        gaps.reject("hub_outside_diameter", tight)
        gaps.fill(
            "hub_outside_diameter",
            clearance - 0.25 * INCH,
            rule="hub cut to clear the bolts by 1/8 in all round, since the printed hub would touch them",
            source=PRACTICE,
            scatter=0.01,
        )
    wall = outside / gaps["dimension_ratio"]
    tabulated = pipes.metric_stub_end(np.where(metric, outside, np.nan), "collar_thickness_sdr17_mm")
    by_wall = settings.hub_thickness_to_wall * wall
    thickness = np.where(np.isfinite(tabulated), np.fmax(tabulated, by_wall), by_wall)
    gaps.fill(
        "hub_thickness",
        np.fmax(thickness, 0.012),
        rule=f"{settings.hub_thickness_to_wall:g} x pipe wall, not below 12 mm; metric: not below the tabulated collar",
        source=f"{PRACTICE}; ISO 9624 / DIN 16963-4 collar, from memory",
        scatter=0.2,
    )


def fill_setting(gaps: Gaps, settings: Settings) -> None:
    def settle(attribute, value, where, rule, scatter=0.3):
        unknown = (gaps[attribute] == "unknown")
        if unknown.any():
            gaps.reject(attribute, unknown)
        gaps.fill(attribute, value, where=where, rule=rule, source=PRACTICE, scatter=scatter)

    everywhere = np.ones(gaps.rows, dtype=bool)
    valve = gaps["mating_side"] == "valve"
    settle("setting", "chamber", valve, "a valve is taken to stand in a chamber")
    settle("setting", "buried", everywhere, "buried where nothing says otherwise")
    place = gaps["setting"]
    settle("environment_class", "moderate soil", place == "buried", "buried: moderate soil")
    settle("environment_class", "wet chamber", place == "chamber", "chamber: taken as wet")
    settle("environment_class", "sea water", place == "submerged", "submerged: sea water")
    settle("environment_class", "C3", everywhere, "above ground: ISO 9223 C3")
    settle("restraint", "free", place == "above ground", "above ground: free to move")
    settle("restraint", "restrained", everywhere, "long buried runs hold the pipe")
    gaps.fill(
        "temperature",
        settings.default_temperature_c,
        rule="usual pipe temperature of the settings",
        source=PRACTICE,
        scatter=5.0 / max(abs(settings.default_temperature_c), 1.0),
    )
    for group, words in (("zone", "the same zone"),):
        gaps.fill(
            "seasonal_range",
            gaps.group_median("seasonal_range", group),
            rule=f"median of joints in {words}",
            source="this inventory",
            scatter=0.25,
        )
    gaps.fill(
        "seasonal_range",
        settings.default_seasonal_range_k,
        rule="seasonal range of the settings",
        source=PRACTICE,
        scatter=0.4,
    )


def check_sizes(gaps: Gaps, blocked: dict[str, np.ndarray]) -> None:
    """Sizes that no table has end the row, with the reason."""
    no_size = gaps.missing("pipe_outside_diameter")
    blocked["neither a nominal size nor an outside diameter can be used"] = no_size & gaps.missing("nominal_size")
    gaps.ledger.finding(
        "no_size",
        Severity.BLOCKS,
        no_size & gaps.missing("nominal_size"),
        attribute="nominal_size",
        problem="the joint has no size that can be used",
        action="not ranked; give a nominal size or an outside diameter",
    )
    unknown = no_size & gaps.known("nominal_size")
    blocked["nominal size is not in the tables of its size system and no outside diameter is given"] = unknown
    gaps.ledger.finding(
        "size_not_tabulated",
        Severity.BLOCKS,
        unknown,
        attribute="nominal_size",
        problem="no pipe of this size in the tables (IPS, DIPS or ISO)",
        action="not ranked; give the outside diameter and the ring's dimensions",
    )
