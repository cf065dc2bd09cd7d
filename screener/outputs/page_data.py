"""What the page shows of a screening: which joints, which columns, in which units."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd

from screener.columns import inventory_attributes
from screener.limit_names import LIMIT_STATES
from screener.outputs.shown import shown_column
from screener.records import Origin
from screener.screening import SHOWN_ATTRIBUTES, Screening

PAGE_JOINTS = 20_000
"""Joints a page carries; of a larger fleet the worst and a sample of the others."""
WORST_SHARE = 0.75
EDGES = (0.5, 1.0, 1.5, 2.0)
CLASS_LABELS = ("below 0.5", "0.5 to 1", "1 to 1.5", "1.5 to 2", "2 and above")
TABLE_COLUMNS = (
    "rank",
    "joint_id",
    "main_id",
    "zone",
    "utilization",
    "governing_limit_state",
    "likelihood",
    "expected_loss",
    "loose_ring_rating",
    "stated_rating",
    "design_pressure",
    "opening_pressure",
    "nominal_size",
    "ring_standard",
    "ring_class",
    "year_installed",
    "assumed_inputs",
    "doubts",
)
CARD_COLUMNS = ("main_doubt", "rating_share", "retained_share", "clamp_force", "operating_pressure", "recurrent_surge", "setting", "customers", "row")
ALWAYS = ("rank", "joint_id", "utilization", "governing_limit_state")
COUNTS = ("rank", "assumed_inputs", "doubts", "customers", "row", "year_installed")
LABELS = {"row": "Row of the file"}


@dataclass(frozen=True)
class PageColumn:
    """One column of the page's table or of the card of a joint."""

    name: str
    heading: str
    meaning: str
    digits: int | None  # None: text
    significant: bool = False  # digits are significant ones
    grouped: bool = True  # thousands parted


@dataclass(frozen=True, eq=False)
class PageData:
    """The joints on the page, worst last, so that they are drawn on top.

    joints: in shown units. columns: of the table. card: also on the card of a joint.
    limits: columns of utilization by limit state, as (name, label).
    """

    joints: pd.DataFrame
    columns: list[PageColumn]
    card: list[PageColumn]
    limits: list[tuple[str, str]]
    ranked: int
    note: str


def page_data(screening: Screening, most: int = PAGE_JOINTS) -> PageData:
    """The ranked joints as the page shows them."""
    ranked = screening.table[screening.table["status"] == "ranked"]
    some, note = thinned(ranked, most, screening.settings.seed)
    some = some.iloc[::-1].reset_index(drop=True)
    system = screening.settings.units
    parts: dict[str, np.ndarray] = {}
    columns = [_add(parts, some, name, system) for name in TABLE_COLUMNS if _worth(some, name)]
    card = [_add(parts, some, name, system) for name in CARD_COLUMNS if _worth(some, name)]
    limits = []
    for name, state in LIMIT_STATES.items():
        if f"utilization_{name}" in some:
            parts[f"utilization_{name}"] = some[f"utilization_{name}"].to_numpy(dtype=np.float32)
            limits.append((f"utilization_{name}", state.label))
    parts["class"] = utilization_class(some["utilization"].to_numpy(dtype=float))
    parts["position"] = some["position"].to_numpy()
    return PageData(pd.DataFrame(parts), columns, card, limits, len(ranked), note)


def thinned(ranked: pd.DataFrame, most: int, seed: int) -> tuple[pd.DataFrame, str]:
    """At most `most` joints in rank order, and the note that says what was left out."""
    if len(ranked) <= most:
        return ranked, ""
    worst = int(most * WORST_SHARE)
    others = np.random.default_rng(seed).choice(np.arange(worst, len(ranked)), most - worst, replace=False)
    note = (
        f"The pictures and the table hold {most:,} of {len(ranked):,} ranked joints: the first {worst:,} of the ranking and "
        f"{most - worst:,} of the others drawn at random (seed {seed}). Counts and bars speak of all joints; ranking.csv lists them all."
    )
    return ranked.iloc[np.concatenate([np.arange(worst), np.sort(others)])], note


def utilization_class(utilization: np.ndarray) -> np.ndarray:
    """Index of each joint's class in CLASS_LABELS."""
    return np.searchsorted(EDGES, utilization, side="right")


def class_counts(screening: Screening) -> list[int]:
    """Ranked joints by class, of the whole fleet."""
    utilization = screening.table.loc[screening.table["status"] == "ranked", "utilization"].to_numpy(dtype=float)
    return np.bincount(utilization_class(utilization), minlength=len(CLASS_LABELS)).tolist()


def coverage(screening: Screening) -> list[tuple[str, list[float]]]:
    """(attribute, shares of the rows read, looked up, derived, assumed, missing), best known first."""
    rows = max(len(screening.inventory), 1)
    lines = []
    for name in SHOWN_ATTRIBUTES:
        counts = np.bincount(screening.inventory.gaps.origin(name), minlength=len(Origin))
        if counts[Origin.MISSING] == rows:
            continue
        read = counts[Origin.READ] + counts[Origin.CONVERTED]
        order = (read, counts[Origin.LOOKED_UP], counts[Origin.DERIVED], counts[Origin.ASSUMED], counts[Origin.MISSING])
        lines.append((inventory_attributes()[name].label, [float(n) / rows for n in order]))
    return sorted(lines, key=lambda line: (-line[1][0], line[1][3]))


def doubt_counts(screening: Screening) -> list[tuple[str, int]]:
    """How many ranked joints owe most of their doubt to each quantity; empty without a likelihood."""
    if "main_doubt" not in screening.table:
        return []
    ranked = screening.table[screening.table["status"] == "ranked"]
    return [(str(words), int(count)) for words, count in ranked["main_doubt"].dropna().value_counts().items()]


def _worth(frame: pd.DataFrame, name: str) -> bool:
    return name in frame and (name in ALWAYS or bool(frame[name].notna().any()))


def _add(parts: dict, frame: pd.DataFrame, name: str, system: str) -> PageColumn:
    """Put a column into the parts, numbers in shown units, and describe it."""
    values = frame[name].to_numpy()
    if name == "governing_limit_state":
        labels = {key: state.label for key, state in LIMIT_STATES.items()}
        values = np.array([labels.get(v, "") for v in values], dtype=object)
    if name in LABELS:
        heading, meaning, digits = LABELS[name], "", 0
    else:
        shown = shown_column(name, values, system)
        heading, values, digits, meaning = shown.heading, shown.values, shown.digits, shown.meaning
    if values.dtype.kind in "fiu":
        parts[name] = np.asarray(values, dtype=np.float32 if name != "row" else np.float64)
        if name == "likelihood":
            return PageColumn(name, heading, meaning, 2, significant=True)
        return PageColumn(name, heading, meaning, 0 if name in COUNTS else digits, grouped=name not in ("row", "year_installed"))
    parts[name] = np.array(["" if v is None or v != v else str(v) for v in values], dtype=object)
    return PageColumn(name, heading, meaning, None)
