"""The story of a screening, from an inventory to a ranked fleet."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import pandas as pd

from screener.columns import inventory_attributes, result_columns
from screener.inventory.read import Inventory
from screener.likelihood.step import Likelihood, assess_likelihood
from screener.likelihood.tightness import DOUBT_LABELS
from screener.limits import assess_limits
from screener.pressure.step import with_surge_by_formula
from screener.priority import ranking as order
from screener.records import Fleet, LimitStates, Origin, Severity
from screener.settings import Settings
from screener.units import to_unit

# Attributes shown beside the results, in this order; the rest follow in the run's joints file.
SHOWN_ATTRIBUTES = (
    "main_id",
    "zone",
    "chainage",
    "nominal_size",
    "size_system",
    "dimension_ratio",
    "pe_material",
    "ring_standard",
    "ring_class",
    "ring_form",
    "ring_material",
    "ring_thickness",
    "bolt_count",
    "bolt_diameter",
    "bolt_grade",
    "assembly_torque",
    "mating_side",
    "gasket",
    "setting",
    "temperature",
    "operating_pressure",
    "recurrent_surge",
    "occasional_surge",
    "year_installed",
    "last_tightened",
    "customers",
    "consequence_cost",
    "consequence_points",
    "access_group",
    "retrofit_cost",
)


@dataclass(frozen=True, eq=False)
class Screening:
    """A screened inventory. `table` is SI with names without units; `ranking` carries units in its names."""

    inventory: Inventory
    settings: Settings
    fleet: Fleet
    limits: LimitStates
    likelihood: Likelihood
    table: pd.DataFrame
    findings: pd.DataFrame

    @property
    def assumptions(self) -> pd.DataFrame:
        """One line per joint and attribute filled; made when asked for, as it can be long."""
        raw = self.inventory.raw
        return order.assumptions_frame(self.inventory.ledger, raw.row_numbers, self.inventory.joint_id)

    @property
    def ranking(self) -> pd.DataFrame:
        return with_units(self.table)

    @property
    def counts(self) -> dict[str, int]:
        """Rows of the table, ranked and not; the first is the sum of the others."""
        ranked = int((self.table["status"] == "ranked").sum())
        return {"rows": len(self.inventory), "ranked": ranked, "not_ranked": len(self.table) - ranked}


def screen(
    inventory: Inventory,
    settings: Settings | None = None,
    *,
    progress: Callable[[str], None] = lambda words: None,
) -> Screening:
    """Rank the joints of an inventory. Every row ends ranked or with a reason."""
    settings = settings or inventory.settings
    fleet = with_surge_by_formula(
        inventory.fleet,
        inventory.ledger,
        recurrent_velocity_change=settings.recurrent_velocity_change,
        occasional_velocity_change=settings.occasional_velocity_change,
    )
    progress(f"limit states of {len(fleet):,} joints")
    limits = assess_limits(fleet, settings.safety_factor, inventory.ledger, inventory.sections, settings.horizon_years)
    progress(f"likelihood of {len(fleet):,} joints")
    likelihood = assess_likelihood(fleet, limits, settings.seed, sections=inventory.sections)
    progress("ranking")
    table = result_table(inventory, fleet, limits, likelihood, settings.rank_by)
    rows = inventory.raw.row_numbers
    findings = order.findings_frame(inventory.ledger, rows, inventory.joint_id, inventory.raw.sheet, inventory.column_of)
    table["doubts"] = _count_by_row(findings, table["position"], Severity.DOUBTS)
    return Screening(inventory, settings, fleet, limits, likelihood, table, findings)


NO_SCORE = {
    "utilization": "no limit state could be evaluated",
    "likelihood": "the likelihood of a leak can't be estimated: an input is unknown",
    "expected_loss": "the expected loss can't be estimated: no cost of a leak, or an input is unknown",
}


def result_table(inventory: Inventory, fleet: Fleet, limits: LimitStates, likelihood: Likelihood, rank_by: str) -> pd.DataFrame:
    """Every row of the inventory, ranked ones first in order, SI."""
    count = len(inventory)
    at = fleet.position
    scores = {
        "utilization": _spread(limits.utilization[np.arange(len(fleet)), limits.governing] if len(fleet) else np.empty(0), at, count),
        "likelihood": _spread(likelihood.likelihood, at, count),
    }
    utilization = scores["utilization"]
    scores["expected_loss"] = scores["likelihood"] * inventory.gaps["consequence_cost"]
    ranks = {name: order.rank(score, inventory.joint_id) for name, score in scores.items()}
    rank = ranks[rank_by]
    reason = np.where((inventory.reason == "") & np.isnan(rank), NO_SCORE[rank_by], inventory.reason)
    governing = np.full(count, None, dtype=object)
    governing[at] = np.array(limits.names, dtype=object)[limits.governing]
    parts: dict[str, np.ndarray] = {
        "joint_id": inventory.joint_id,
        "rank": rank,
        "status": np.where(np.isnan(rank), "not ranked", "ranked").astype(object),
        "reason": reason,
        "utilization": utilization,
        "governing_limit_state": governing,
    }
    for name in result_columns():
        if name in limits.details:
            parts[name] = _spread(limits.details[name], at, count)
    parts["likelihood"] = scores["likelihood"]
    parts["likelihood_low"] = _spread(likelihood.low, at, count)
    parts["likelihood_high"] = _spread(likelihood.high, at, count)
    doubts = np.array([*DOUBT_LABELS, None], dtype=object)
    parts["main_doubt"] = _spread(doubts[likelihood.most_doubt], at, count)
    parts["expected_loss"] = scores["expected_loss"]
    for name, values in ranks.items():
        parts[f"rank_by_{name}"] = values
    for k, name in enumerate(limits.names):
        parts[f"utilization_{name}"] = _spread(limits.utilization[:, k], at, count)
    parts["assumed_inputs"] = sum(
        (inventory.gaps.origins[name] == Origin.ASSUMED).astype(float) for name in inventory_attributes()
    )
    surge = {"recurrent_surge": fleet.loads.recurrent_surge, "occasional_surge": fleet.loads.occasional_surge}
    for name in SHOWN_ATTRIBUTES:
        values = inventory.gaps[name]
        parts[name] = _spread(surge[name], at, count) if name in surge else values
    parts["row"] = inventory.raw.row_numbers
    parts["position"] = np.arange(count)
    table = pd.DataFrame({name: as_series(values) for name, values in parts.items()})
    return table.sort_values(["rank", "position"], kind="stable", na_position="last", ignore_index=True)


def with_units(table: pd.DataFrame) -> pd.DataFrame:
    """The table with machine names: values in the unit that stands in the name."""
    known = {**inventory_attributes(), **result_columns()}
    parts = {}
    for name in table.columns:
        if name == "position":
            continue
        column = known.get(name)
        if column is None or not column.unit:
            parts[name] = table[name]
        else:
            parts[column.machine_name] = to_unit(table[name].to_numpy(dtype=float), column.unit)
    frame = pd.DataFrame({name: as_series(values) for name, values in parts.items()})
    for name in ("rank", "rank_by_utilization", "rank_by_likelihood", "rank_by_expected_loss", "row", "assumed_inputs", "doubts"):
        if name in frame:
            frame[name] = frame[name].astype("Int64")
    return frame


def as_series(values) -> pd.Series:
    """A column as it is; text stays an object column, which pandas would otherwise convert cell by cell."""
    if isinstance(values, pd.Series):
        return values
    values = np.asarray(values)
    return pd.Series(values, dtype=object if values.dtype == object else None)


def _spread(values: np.ndarray, at: np.ndarray, count: int) -> np.ndarray:
    values = np.asarray(values)
    if values.dtype.kind == "f":
        full = np.full(count, np.nan)
    else:
        full = np.full(count, None, dtype=object)
    full[at] = values
    return full


def _count_by_row(findings: pd.DataFrame, positions: pd.Series, severity: Severity) -> np.ndarray:
    some = findings[(findings["severity"] == str(severity)) & (findings["position"] >= 0)]
    counts = some["position"].value_counts()
    return positions.map(counts).fillna(0).to_numpy(dtype=float)
