"""What a run says, in sentences and small tables that workbook, page and terminal share."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd

from screener.limit_names import LIMIT_STATES
from screener.outputs.shown import number
from screener.screening import Screening


@dataclass(frozen=True)
class Summary:
    about: list[str]
    sentences: list[str]
    row_counts: list[tuple[str, int]]
    governing: list[tuple[str, int, int, float]]  # label, joints, above 1, median utilization
    rings: list[tuple[str, int, float, float, float, int]]  # label, joints, stated Pa, loose Pa, share, below


def summarize(screening: Screening, source: str) -> Summary:
    table = screening.table
    ranked = table[table["status"] == "ranked"]
    counts = screening.counts
    unit = "psi" if screening.settings.units == "us" else "bar"
    digits = 0 if unit == "psi" else 1
    about = [
        f"Inventory: {source}" + (f", {screening.inventory.raw.sheet}" if screening.inventory.raw.sheet else ""),
        f"Assessed for {screening.settings.assessment_year:.1f}, safety factor {screening.settings.safety_factor:g} on ring yield, ranked by {screening.settings.rank_by.replace('_', ' ')}.",
    ]
    rows = [("rows in the file", counts["rows"]), ("ranked", counts["ranked"]), ("not ranked", counts["not_ranked"])]
    reasons = table.loc[table["status"] != "ranked", "reason"].value_counts()
    rows += [(f"   {reason}", int(count)) for reason, count in reasons.items()]
    return Summary(about, _sentences(screening, ranked, unit, digits), rows, _governing(ranked), _rings(screening, ranked))


def _governing(ranked: pd.DataFrame) -> list[tuple[str, int, int, float]]:
    lines = []
    for name, state in LIMIT_STATES.items():
        some = ranked.loc[ranked["governing_limit_state"] == name, "utilization"]
        if len(some):
            lines.append((state.label, len(some), int((some > 1).sum()), float(some.median())))
    return sorted(lines, key=lambda line: -line[1])


def _ring_labels(ranked: pd.DataFrame) -> pd.Series:
    kind = ranked["ring_standard"].astype(str) + " " + ranked["ring_class"].fillna("").astype(str)
    kind = kind.where(ranked["ring_form"] == "flat plate", ranked["ring_form"].astype(str) + " ring")
    size = pd.cut(ranked["nominal_size"].astype(float), [0, 0.31, 0.62, 9], labels=["up to 12 in / 300 mm", "14 to 24 in / 600 mm", "above"])
    return kind.str.strip() + ", " + size.astype(str)


def _rings(screening: Screening, ranked: pd.DataFrame):
    if not len(ranked):
        return []
    lines = []
    for label, some in ranked.groupby(_ring_labels(ranked), sort=True):
        share = some["rating_share"].astype(float)
        lines.append(
            (
                str(label),
                len(some),
                _median(some["stated_rating"]),
                _median(some["loose_ring_rating"]),
                _median(share),
                int((share < 1).sum()),
            )
        )
    return lines


def _median(values) -> float:
    known = np.asarray(values, dtype=float)
    known = known[np.isfinite(known)]
    return float(np.median(known)) if len(known) else float("nan")


def _sentences(screening: Screening, ranked: pd.DataFrame, unit: str, digits: int) -> list[str]:
    total = len(ranked)
    if not total:
        return ["No joint could be ranked; the sheet 'Not ranked' says why."]
    lines = []
    beyond = int((ranked["utilization"] > 1).sum())
    lines.append(f"{beyond:,} of {total:,} ranked joints ({beyond / total:.0%}) are beyond at least one limit.")
    share = ranked["rating_share"].astype(float)
    known = share.notna()
    below = int((share < 1).sum())
    if known.any():
        lines.append(
            f"{below:,} of {int(known.sum()):,} rings ({below / known.sum():.0%}) carry less, used loose, than the rating on their paper; "
            f"the median ring carries {share.median():.2f} of it."
        )
    over = ranked["design_pressure"].astype(float) > ranked["loose_ring_rating"].astype(float)
    lines.append(
        f"{int(over.sum()):,} joints see an operating pressure plus recurrent surge above their loose-ring rating at a safety factor of "
        f"{screening.settings.safety_factor:g}."
    )
    governing = _governing(ranked)
    if governing:
        label, count, _beyond, _median_value = governing[0]
        lines.append(f"The limit state that governs most joints is '{label}' ({count / total:.0%}).")
    first = ranked.iloc[0]
    lines.append(
        f"First in the ranking: {first['joint_id']}, utilization {first['utilization']:.2f} ({LIMIT_STATES[first['governing_limit_state']].label}); "
        f"loose-ring rating {_shown(first['loose_ring_rating'], unit, digits)} against {_shown(first['design_pressure'], unit, digits)} operating plus recurrent surge."
    )
    assumed = ranked["assumed_inputs"].astype(float)
    lines.append(f"Half of the ranked joints rest on {assumed.median():.0f} or more assumed inputs; the sheet 'Assumptions' lists the rules.")
    return lines


def _shown(value, unit: str, digits: int) -> str:
    return number(value, unit, digits) if np.isfinite(value) else "an unknown value"
