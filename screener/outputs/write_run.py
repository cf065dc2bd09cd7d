"""Everything a screening leaves behind: the run's folder."""

from __future__ import annotations

import platform
import sys
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pandas as pd
import pyarrow
import pyarrow.csv

import screener
from screener.columns import inventory_attributes
from screener.outputs.map_layer import write_geopackage
from screener.outputs.run_folder import file_hash, make_folder, whole_file, write_json
from screener.outputs.shown import CAUTIONS
from screener.outputs.summary import summarize
from screener.screening import Screening

CSV_ASSUMPTIONS = 200_000
WORKBOOK_ROWS = 250_000


def write_run(
    screening: Screening,
    folder: str | Path,
    *,
    source: str | Path,
    workbook: bool = True,
    progress: Callable[[str], None] = lambda words: None,
) -> dict[str, Path]:
    """Write the run; returns the paths by role."""
    folder = make_folder(folder)
    summary = summarize(screening, Path(source).name)
    paths = {}
    progress("writing ranking.csv")
    paths["ranking"] = folder / "ranking.csv"
    write_csv(guard_formulas(screening.ranking), paths["ranking"])
    paths["findings"] = folder / "findings.csv"
    write_csv(guard_formulas(screening.findings.drop(columns="position")), paths["findings"])
    paths["assumptions"] = folder / "assumptions.parquet"
    with whole_file(paths["assumptions"]) as temporary:
        screening.assumptions.to_parquet(temporary, index=False)
    progress("writing joints.parquet")
    paths["values"] = folder / "joints.parquet"
    with whole_file(paths["values"]) as temporary:
        run_values(screening).to_parquet(temporary, index=False)
    progress("writing joints.gpkg")
    paths["layer"] = folder / "joints.gpkg"
    write_geopackage(screening, paths["layer"])
    if workbook and len(screening.table) <= WORKBOOK_ROWS:
        from screener.outputs.workbook import write_workbook

        progress("writing ranking.xlsx")
        paths["workbook"] = folder / "ranking.xlsx"
        write_workbook(screening, paths["workbook"], summary)
    progress("writing run.json")
    write_json(folder / "run.json", run_record(screening, source, summary, paths))
    return paths


def run_values(screening: Screening) -> pd.DataFrame:
    """Every attribute of every row, SI, with its origin code; what later commands read."""
    gaps = screening.inventory.gaps
    parts = {"position": np.arange(len(screening.inventory)), "row": screening.inventory.raw.row_numbers, "shown_id": screening.inventory.joint_id}
    for name in gaps.values:
        values = gaps[name]
        if name == "leak_dates":
            values = np.array(["; ".join(f"{d:.3f}" for d in v) if isinstance(v, tuple) else None for v in values], dtype=object)
        parts[name] = values
        parts[f"{name}__origin"] = gaps.origin(name)
    return pd.DataFrame(parts)


def guard_formulas(frame: pd.DataFrame) -> pd.DataFrame:
    """Text that a spreadsheet would run as a formula gets a leading apostrophe in CSV."""
    frame = frame.copy()
    for name in frame.columns:
        if frame[name].dtype.kind in "OUT" or isinstance(frame[name].dtype, (pd.StringDtype, pd.CategoricalDtype)):
            text = frame[name].astype(object)
            risky = text.map(lambda v: isinstance(v, str) and v.startswith(("=", "+", "-", "@", "\t", "\r")) and not _is_number(v))
            if risky.any():
                frame[name] = text.where(~risky, "'" + text.astype(str))
    return frame


def _is_number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True


def write_csv(frame: pd.DataFrame, path: Path) -> None:
    """CSV with numbers to 7 significant digits, so that equal runs give equal bytes."""
    columns = {}
    for name in frame.columns:
        values = frame[name]
        if values.dtype.kind == "f":
            columns[name] = pyarrow.array(seven_digits(values.to_numpy(dtype=float)), from_pandas=True)
        elif values.dtype.kind in "iub" or isinstance(values.dtype, pd.Int64Dtype):
            columns[name] = pyarrow.Array.from_pandas(values)
        else:
            columns[name] = pyarrow.array([None if v is None or v is pd.NA or v != v else str(v) for v in values.astype(object)], type=pyarrow.string())
    with whole_file(path) as temporary:
        options = pyarrow.csv.WriteOptions(quoting_style="needed", quoting_header="needed")
        pyarrow.csv.write_csv(pyarrow.table(columns), temporary, options)


def seven_digits(values: np.ndarray) -> np.ndarray:
    """Values rounded to 7 significant digits."""
    size = np.where(np.isfinite(values) & (values != 0.0), np.abs(values), 1.0)
    scale = 10.0 ** (6 - np.floor(np.log10(size)))
    # Dividing by a whole power of ten keeps the shortest decimal form.
    return np.where(scale >= 1.0, np.round(values * scale) / scale, np.round(values * scale) * np.round(1.0 / np.minimum(scale, 1.0)))


def run_record(screening: Screening, source, summary, paths) -> dict:
    """run.json: what went in, what came out, with what settings and versions."""
    inventory = screening.inventory
    severities = screening.findings["severity"].astype(str).value_counts()
    packages = {name: _version(name) for name in ("numpy", "pandas", "scipy", "geopandas", "pyogrio", "pyarrow")}
    return {
        "made_by": f"joint-screener {screener.__version__}",
        "input": {
            "file": Path(source).name,
            "sha256": file_hash(source),
            "sheet": inventory.raw.sheet,
            "columns": inventory.column_of,
        },
        "settings": {**screening.settings.as_dict(), "assessment_year": round(screening.settings.assessment_year, 4)},
        "seed": screening.settings.seed,
        "counts": {**screening.counts, "findings": {name: int(count) for name, count in severities.items()}, "assumptions": len(screening.assumptions)},
        "not_ranked_reasons": dict(summary.row_counts[3:]),
        "summary": summary.sentences,
        "files": {role: path.name for role, path in paths.items()},
        "versions": {"python": platform.python_version(), **packages},
        "crs": str(inventory.crs) if inventory.crs is not None else None,
        "attributes": list(inventory_attributes()),
        "cautions": list(CAUTIONS),
    }


def _version(name: str) -> str:
    from importlib.metadata import version

    return version(name)


def print_summary(screening: Screening, folder: str | Path) -> None:
    """A screenful on stdout: counts that add up, what stands out, the first joints."""
    counts = screening.counts
    summary = summarize(screening, "")
    out = sys.stdout
    out.write(f"{counts['rows']:,} rows = {counts['ranked']:,} ranked + {counts['not_ranked']:,} not ranked\n")
    for words, count in summary.row_counts[3:]:
        out.write(f"  not ranked: {words.strip()}: {count:,}\n")
    out.write("\n")
    for line in summary.sentences:
        out.write(f"- {line}\n")
    out.write("\n rank  joint                 utilization  governing limit state\n")
    for _, row in screening.table[screening.table["status"] == "ranked"].head(10).iterrows():
        from screener.limit_names import LIMIT_STATES

        name = "".join(c if c.isprintable() else "?" for c in str(row["joint_id"]))[:20]
        out.write(f"{row['rank']:5.0f}  {name:20s}  {row['utilization']:11.2f}  {LIMIT_STATES[row['governing_limit_state']].label}\n")
    out.write(f"\nWritten to {folder}. {CAUTIONS[0]} {CAUTIONS[2]}\n")
