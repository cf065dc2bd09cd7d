"""Order of the joints, and the tables that explain it."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import pandas as pd

from screener.columns import inventory_attributes
from screener.records import Ledger, Origin

SEVERITY_ORDER = ("blocks", "doubts", "notes")


def rank(score: np.ndarray, joint_id: np.ndarray) -> np.ndarray:
    """Rank 1..n by falling score, ties by joint id as text; float, NaN where the score is NaN."""
    ids = pd.Series(joint_id).astype(str).to_numpy(dtype=object)
    ranked = np.isfinite(score)
    frame = pd.DataFrame({"score": -score[ranked], "id": ids[ranked]})
    order = frame.sort_values(["score", "id"], kind="stable").index.to_numpy()
    places = np.empty(len(order))
    places[order] = np.arange(1, len(order) + 1)
    result = np.full(len(score), np.nan)
    result[ranked] = places
    return result


def findings_frame(
    ledger: Ledger, row_numbers: np.ndarray, joint_id: np.ndarray, sheet: str, column_of: dict[str, str]
) -> pd.DataFrame:
    """One line per finding: severity, joint, sheet, row and column as in the file, value, problem, action.

    column_of: attribute -> heading, for findings that name only the attribute.
    """
    parts = []
    for batch in ledger.findings:
        count = len(batch.positions)
        inside = batch.positions >= 0
        at = np.where(inside, batch.positions, 0)
        if len(row_numbers):
            row = np.where(inside, row_numbers[at], 0)
            joint = np.where(inside, joint_id[at], "")
        else:
            row, joint = np.zeros(count), np.full(count, "", dtype=object)
        values = batch.values if batch.values is not None else np.full(count, None, dtype=object)
        parts.append(
            pd.DataFrame(
                {
                    "severity": pd.Categorical([str(batch.severity)] * count, SEVERITY_ORDER, ordered=True),
                    "code": batch.code,
                    "joint_id": pd.Series(joint, dtype=object),
                    "sheet": sheet,
                    "row": pd.array(np.where(inside, row, 0), dtype="Int64"),
                    "column": batch.column or column_of.get(batch.attribute, ""),
                    "attribute": batch.attribute,
                    "value": pd.Series(values, dtype=object),
                    "problem": batch.problem,
                    "action": batch.action,
                    "position": batch.positions,
                }
            )
        )
    if not parts:
        return pd.DataFrame(
            columns=["severity", "code", "joint_id", "sheet", "row", "column", "attribute", "value", "problem", "action", "position"]
        )
    frame = pd.concat(parts, ignore_index=True)
    frame["severity"] = pd.Categorical(frame["severity"].astype(str), SEVERITY_ORDER, ordered=True)
    frame.loc[frame["position"] < 0, "row"] = pd.NA
    return frame.sort_values(["severity", "position", "code"], kind="stable", ignore_index=True)


ASSUMPTION_COLUMNS = ("row", "attribute", "origin", "value", "value_text", "rule", "source", "scatter", "low", "high")


def assumption_frames(ledger: Ledger, row_numbers: np.ndarray) -> Iterator[pd.DataFrame]:
    """One frame per rule: a line per joint filled, values SI. Together they may hold tens of millions of lines."""
    for batch in ledger.assumptions:
        count = len(batch.positions)
        numeric = batch.values.dtype.kind == "f"

        def same(word: str, count: int = count) -> pd.Categorical:
            return pd.Categorical.from_codes(np.zeros(count, dtype=np.int8), [word])

        yield pd.DataFrame(
            {
                "row": row_numbers[batch.positions],
                "attribute": same(batch.attribute),
                "origin": same(Origin(batch.origin).name.lower()),
                "value": batch.values if numeric else np.full(count, np.nan),
                "value_text": pd.Series([None] * count if numeric else batch.values, dtype=object),
                "rule": same(batch.rule),
                "source": same(batch.source),
                "scatter": batch.scatter.astype(np.float32),
                "low": batch.low.astype(np.float32),
                "high": batch.high.astype(np.float32),
            }
        )


def assumptions_frame(ledger: Ledger, row_numbers: np.ndarray, joint_id: np.ndarray) -> pd.DataFrame:
    """All lines of `assumption_frames` in one frame, with the joint's id."""
    frames = list(assumption_frames(ledger, row_numbers))
    for frame, batch in zip(frames, ledger.assumptions, strict=True):
        frame.insert(0, "joint_id", pd.Series(joint_id[batch.positions], dtype=object))
    if not frames:
        return pd.DataFrame(columns=["joint_id", *ASSUMPTION_COLUMNS])
    for name in ("attribute", "origin", "rule", "source"):
        merged = pd.api.types.union_categoricals([frame[name] for frame in frames])
        start = 0
        for frame in frames:
            frame[name] = pd.Categorical.from_codes(merged.codes[start : start + len(frame)], merged.categories)
            start += len(frame)
    return pd.concat(frames, ignore_index=True)


def rule_counts(ledger: Ledger, rows: int) -> pd.DataFrame:
    """How often each rule was used, with the typical value it gave (SI) and its scatter."""
    lines = []
    for batch in ledger.assumptions:
        numeric = batch.values.dtype.kind == "f"
        lines.append(
            {
                "attribute": batch.attribute,
                "origin": Origin(batch.origin).name.lower(),
                "joints": len(batch.positions),
                "share": len(batch.positions) / max(rows, 1),
                "typical_value": float(np.median(batch.values)) if numeric else np.nan,
                "typical_text": "" if numeric else str(batch.values[0]),
                "rule": batch.rule,
                "source": batch.source,
                "scatter": float(np.median(batch.scatter)),
            }
        )
    frame = pd.DataFrame(
        lines, columns=["attribute", "origin", "joints", "share", "typical_value", "typical_text", "rule", "source", "scatter"]
    )
    return frame


def coverage(origins: dict[str, np.ndarray], columns: dict[str, str]) -> pd.DataFrame:
    """Per attribute: how many cells were read, converted, looked up, derived, assumed, missing."""
    lines = []
    for name, attribute in inventory_attributes().items():
        origin = origins[name]
        counts = np.bincount(origin, minlength=len(Origin))
        lines.append(
            {
                "attribute": name,
                "label": attribute.label,
                "column": columns.get(name, ""),
                **{code.name.lower(): int(counts[code]) for code in Origin},
                "known_share": float((counts[Origin.READ] + counts[Origin.CONVERTED]) / max(len(origin), 1)),
            }
        )
    return pd.DataFrame(lines)
