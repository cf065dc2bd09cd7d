"""Gap rules for pressures, cycles and movements."""

from __future__ import annotations

import numpy as np

from screener.inventory.fill_pipe import PRACTICE
from screener.inventory.gaps import Gaps
from screener.records import Origin
from screener.settings import Settings
from screener.standards import pipes


def fill_rating_inputs(gaps: Gaps) -> None:
    gaps.add("hydrostatic_design_stress")
    gaps.fill(
        "hydrostatic_design_stress",
        pipes.design_stress(gaps["pe_material"]),
        origin=Origin.LOOKED_UP,
        rule="hydrostatic design stress of the designation",
        source=pipes.DESIGN_STRESS_SOURCE,
    )
    gaps.add("temperature_factor")
    gaps.fill(
        "temperature_factor",
        pipes.temperature_factor(gaps["temperature"]),
        origin=Origin.LOOKED_UP,
        rule="pressure-rating factor at the operating temperature",
        source="PPI Handbook ch. 3 Table A.2 (from memory); not above 1, as AWWA M55",
    )


def fill_operating_pressure(gaps: Gaps, settings: Settings) -> None:
    for group, words, scatter in (("main_id", "the same main", 0.12), ("zone", "the same zone", 0.2)):
        gaps.fill(
            "operating_pressure",
            gaps.group_median("operating_pressure", group),
            rule=f"median operating pressure of joints on {words}",
            source="this inventory",
            scatter=scatter,
        )
    gaps.fill(
        "operating_pressure",
        gaps["test_pressure"] / 1.5,
        rule="test pressure / 1.5",
        source=PRACTICE,
        scatter=0.2,
    )
    rating = 2.0 * gaps["hydrostatic_design_stress"] * gaps["temperature_factor"] / (gaps["dimension_ratio"] - 1.0)
    gaps.fill(
        "operating_pressure",
        settings.operating_share_of_rating * rating,
        rule=f"{settings.operating_share_of_rating:g} x pipe pressure rating, nothing else known",
        source=PRACTICE,
        scatter=0.35,
    )


def fill_surge_from_neighbours(gaps: Gaps) -> None:
    """Surge of the same main or zone; what stays open is filled by the surge formula later."""
    for attribute in ("recurrent_surge", "occasional_surge"):
        for group, words, scatter in (("main_id", "the same main", 0.25), ("zone", "the same zone", 0.4)):
            gaps.fill(
                attribute,
                gaps.group_median(attribute, group),
                rule=f"median of joints on {words}",
                source="this inventory",
                scatter=scatter,
            )


def fill_cycles(gaps: Gaps, settings: Settings) -> None:
    for attribute in ("cycles_per_day", "cycle_range"):
        gaps.fill(
            attribute,
            gaps.group_median(attribute, "main_id"),
            rule="median of joints on the same main",
            source="this inventory",
            scatter=0.3,
        )
    gaps.fill(
        "cycles_per_day",
        settings.default_cycles_per_day,
        rule="daily demand cycles of the settings",
        source=PRACTICE,
        scatter=0.5,
    )
    gaps.fill(
        "cycle_range",
        0.15 * gaps["operating_pressure"],
        rule="0.15 x operating pressure",
        source=PRACTICE,
        scatter=0.5,
    )
    gaps.add("cooling")
    gaps.fill(
        "cooling",
        0.5 * gaps["seasonal_range"],
        origin=Origin.DERIVED,
        rule="half the seasonal range: installed at the year's mean",
        source=PRACTICE,
        scatter=0.4,
    )


def fill_consequence(gaps: Gaps) -> None:
    """A missing cost of a leak: the zone's median, else the inventory's; none where no joint has one."""
    gaps.fill(
        "consequence_cost",
        gaps.group_median("consequence_cost", "zone"),
        rule="median cost of joints in the same zone",
        source="this inventory",
        scatter=0.6,
    )
    known = gaps["consequence_cost"][gaps.is_read("consequence_cost")]
    if len(known):
        gaps.fill("consequence_cost", np.median(known), rule="median cost of the whole inventory", source="this inventory", scatter=0.8)
