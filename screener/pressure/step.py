"""Our method: surge by formula where neither the file nor logs say anything."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from screener.pressure import surge, water
from screener.records import Fleet, Ledger

SURGE_SCATTER = 0.5
"""Relative scatter of a surge from a supposed velocity change; common practice, no source."""


def with_surge_by_formula(
    fleet: Fleet, ledger: Ledger, *, recurrent_velocity_change: float, occasional_velocity_change: float
) -> Fleet:
    """The fleet with unknown surges filled by Joukowsky's rise for a supposed velocity change (m/s)."""
    celerity = surge.association_celerity(fleet.pipe.dimension_ratio)
    density = water.density(fleet.pipe.temperature)
    parts = {}
    scatter = dict(fleet.scatter)
    for attribute, change in (
        ("recurrent_surge", recurrent_velocity_change),
        ("occasional_surge", occasional_velocity_change),
    ):
        known = getattr(fleet.loads, attribute)
        rise = surge.joukowsky(density, celerity, change)
        missing = np.isnan(known)
        parts[attribute] = np.where(missing, rise, known)
        spread = np.array(scatter.get(attribute, np.zeros(len(fleet))))
        spread[missing] = SURGE_SCATTER
        scatter[attribute] = spread
        ledger.assumption(
            attribute,
            fleet.position[missing],
            rise[missing],
            rule=f"Joukowsky rise for a velocity change of {change:g} m/s in PE of this dimension ratio",
            source="celerity: PPI Handbook ch. 6 / AWWA M55 (from memory); velocity change: common practice, no source",
            scatter=SURGE_SCATTER,
        )
    # A rare surge is at least the daily one.
    low = np.isnan(fleet.loads.occasional_surge) & (parts["occasional_surge"] < parts["recurrent_surge"])
    parts["occasional_surge"] = np.where(low, parts["recurrent_surge"], parts["occasional_surge"])
    return replace(fleet, loads=replace(fleet.loads, **parts), scatter=scatter)
