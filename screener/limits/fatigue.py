"""Miner's sums of ring, bolts and pipe under the joint's usual pressure cycle, to date and at the horizon."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.fatigue import damage, pe_fatigue, sn_curves
from screener.limits.states import ClampState, RingState, separating_load
from screener.mechanics import pipe_wall
from screener.records import Fleet
from screener.standards.tables import read_table

RING_CATEGORY = 140.0e6
"""Machined or drilled edge of rolled plate, used with the peak stress at the hole's edge. EN 1993-1-9 Table 8.1 (from memory)."""
BOLT_CATEGORY = 50.0e6
"""Bolt in tension. EN 1993-1-9 Table 8.1 (from memory)."""
CORRODING = ("aggressive soil", "wet chamber", "sea water")
BARE = ("none", "paint")
FREE_CORROSION_CURVE = "C"
"""DNV-RP-C203 curve of a machined edge in free corrosion: one slope, no limit (read in open-source code)."""
DAYS_A_YEAR = 365.25


@dataclass(frozen=True, eq=False)
class FatigueSums:
    """Arrays (n,): Miner's sums at the horizon and to date, and the pipe's re-rated demand over capacity."""

    ring: np.ndarray
    bolts: np.ndarray
    pipe: np.ndarray
    ring_to_date: np.ndarray
    bolts_to_date: np.ndarray
    ring_range: np.ndarray


def fatigue_sums(fleet: Fleet, state: RingState, clamped: ClampState, edge_over_bore: np.ndarray, horizon_years: float) -> FatigueSums:
    """Sums for the cycle of the joint's loads: `cycle_range` below operating pressure, `cycles_per_day` times a day.

    edge_over_bore: peak stress at the hole's edge over that at the bore corner.
    """
    loads, b = fleet.loads, fleet.bolts
    upper = separating_load(fleet, loads.operating_pressure)
    lower = separating_load(fleet, np.maximum(loads.operating_pressure - loads.cycle_range, 0.0))
    per_load = fleet.ring.yield_strength / state.first_yield_load * edge_over_bore
    ring_range = damage.stress_range(clamped.force_now, clamped.load_factor, lower, upper, per_load)
    bolt_range = damage.stress_range(clamped.force_now, clamped.load_factor, lower, upper, 1.0 / (b.count * b.tensile_area))
    corroding = np.isin(fleet.ring.environment, CORRODING) & np.isin(fleet.ring.coating, BARE)
    ring_life = np.where(corroding, _free_corrosion(ring_range), sn_curves.en_life(ring_range, RING_CATEGORY))
    bolt_category = BOLT_CATEGORY * sn_curves.en_bolt_size_factor(b.diameter)
    no_limit = sn_curves.EN_REFERENCE_CYCLES * (bolt_category / np.maximum(bolt_range, 1.0)) ** 3
    bolt_life = np.where(corroding, no_limit, sn_curves.en_life(bolt_range, bolt_category))
    yearly = loads.cycles_per_day * DAYS_A_YEAR
    to_date = fleet.age.assessment_year - fleet.age.installed_year
    rating = pipe_wall.pressure_rating(fleet.pipe.hydrostatic_design_stress, fleet.pipe.dimension_ratio, fleet.pipe.temperature_factor)
    table = read_table("plastic_fatigue_load_factors")
    factor = pe_fatigue.rerating_factor(yearly * 100.0, fleet.pipe.material, table.number("total_cycles_100y"), table.number("f_PE80_PE100"))
    return FatigueSums(
        ring=yearly * (to_date + horizon_years) / ring_life,
        bolts=yearly * (to_date + horizon_years) / bolt_life,
        pipe=pe_fatigue.rerating_utilization(loads.cycle_range, factor, rating),
        ring_to_date=yearly * to_date / ring_life,
        bolts_to_date=yearly * to_date / bolt_life,
        ring_range=ring_range,
    )


def _free_corrosion(stress_range: np.ndarray) -> np.ndarray:
    table = read_table("dnv_sn_curves")
    row = np.flatnonzero((table.text("curve") == FREE_CORROSION_CURVE) & (table.text("environment") == "free_corrosion"))[0]
    return sn_curves.single_slope_life(stress_range, table.number("log10_a1")[row], table.number("m1")[row])
