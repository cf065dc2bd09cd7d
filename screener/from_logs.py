"""Pressures of the joints from the utility's loggers, in place of what would be assumed."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pandas as pd

from screener.inventory.build_fleet import build_fleet
from screener.inventory.read import Inventory
from screener.pressure import water
from screener.pressure.log_settings import LogSettings
from screener.pressure.logs import read_logs
from screener.pressure.stations import read_stations
from screener.pressure.stations_to_joints import Doubts, JointPressures, joint_pressures
from screener.records import Origin, Severity

EULER = 0.5772156649015329
DIFFERS = 0.2
"""Relative difference between file and logger from which a finding says so."""


def with_logs(
    inventory: Inventory, logs: str | Path, stations: str | Path, progress: Callable[[str], None] = lambda words: None
) -> Inventory:
    """The inventory with pressures, surges and cycles from logs where the file has none.

    A value read in the file stays; where it and the logs differ much, a finding says so.
    """
    gaps, ledger = inventory.gaps, inventory.ledger
    found = read_stations(stations, ledger)
    summaries = read_logs(logs, LogSettings(), ledger, progress)
    temperature = gaps["temperature"]
    known = np.isfinite(temperature) & (temperature >= 0) & (temperature <= 60)
    density = float(np.median(water.density(temperature[known]))) if known.any() else float(water.density(18.0))
    pressures = joint_pressures(
        _as_named(gaps["main_id"], found.main),
        gaps["chainage"],
        _as_named(gaps["zone"], found.zone),
        gaps["elevation"],
        found,
        summaries,
        density,
        Doubts(),
    )
    _fill(inventory, pressures)
    rows = np.flatnonzero(inventory.reason == "")
    fleet = build_fleet(gaps, inventory.joint_id, rows, inventory.settings.assessment_year)
    return replace(inventory, fleet=fleet)


def _as_named(joints: np.ndarray, stations: np.ndarray) -> np.ndarray:
    """Names of the joints as the stations write them, compared without case; "" where unknown."""
    names = {str(name).strip().casefold(): str(name) for name in stations if str(name)}
    code, unique = pd.factorize(joints)
    given = [names.get(str(word).strip().casefold(), str(word)) for word in unique]
    return np.array([*given, ""], dtype=object)[code]


def _fill(inventory: Inventory, pressures: JointPressures) -> None:
    gaps, ledger = inventory.gaps, inventory.ledger
    level = pressures.level
    yearly = pressures.annual_location + EULER * pressures.annual_scale - level
    values = {
        "operating_pressure": level,
        "recurrent_surge": pressures.daily_rise,
        "occasional_surge": np.fmax(yearly, pressures.daily_rise),
        "cycles_per_day": pressures.cycles_per_day,
        "cycle_range": pressures.cycle_range,
    }
    with np.errstate(invalid="ignore", divide="ignore"):
        scatter = np.where(level > 0, pressures.doubt / level, np.nan)
    for attribute, logged in values.items():
        usable = np.isfinite(logged) & (logged >= 0) & np.isfinite(scatter)
        here = usable & ~gaps.is_read(attribute)
        gaps.reject(attribute, here)
        for rule in np.unique(pressures.assignment.rule[here].astype(str)):
            gaps.fill(
                attribute,
                logged,
                where=here & (pressures.assignment.rule == rule),
                origin=Origin.DERIVED,
                rule=f"from loggers: {rule}",
                source="the utility's pressure logs and stations",
                scatter=np.where(usable, scatter, 0.0),
            )
        if attribute == "operating_pressure":
            given = gaps[attribute]
            differs = gaps.is_read(attribute) & usable & (np.abs(given - logged) > np.maximum(DIFFERS * given, 3.0 * pressures.doubt))
            ledger.finding(
                "log_differs",
                Severity.DOUBTS,
                differs,
                attribute=attribute,
                column=inventory.column_of.get(attribute, ""),
                values=inventory.as_written(attribute)[differs],
                problem="the loggers' usual pressure at this joint differs by more than a fifth",
                action="used as written in the file",
            )
