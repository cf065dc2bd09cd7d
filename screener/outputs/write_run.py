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
import pyarrow.parquet

import screener
from screener.columns import inventory_attributes
from screener.outputs.map_layer import write_geopackage, write_geoparquet
from screener.outputs.run_folder import file_hash, make_folder, whole_file, write_json
from screener.outputs.shown import CAUTIONS
from screener.outputs.summary import summarize
from screener.priority.ranking import assumption_frames
from screener.screening import Screening

WORKBOOK_ROWS = 250_000
LAYER_ROWS = 250_000
"""Above this many rows the map layer is GeoParquet and the workbook is left out."""


def write_run(
    screening: Screening,
    folder: str | Path,
    *,
    source: str | Path,
    workbook: bool = True,
    mains=None,
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
    lines = write_assumptions(screening, paths["assumptions"])
    progress("writing joints.parquet")
    paths["values"] = folder / "joints.parquet"
    with whole_file(paths["values"]) as temporary:
        pyarrow.parquet.write_table(run_values(screening), temporary, write_statistics=False)
    if screening.inventory.sections:
        paths["sections"] = folder / "ring_sections.csv"
        write_csv(section_frame(screening.inventory.sections), paths["sections"])
    if len(screening.table) <= LAYER_ROWS:
        progress("writing joints.gpkg")
        paths["layer"] = folder / "joints.gpkg"
        write_geopackage(screening, paths["layer"], mains)
    else:
        progress("writing joints_layer.parquet")
        paths["layer"] = folder / "joints_layer.parquet"
        write_geoparquet(screening, paths["layer"])
    from screener.outputs.capacity_plot import write_capacity_plot

    if write_capacity_plot(screening, folder / "ring_capacity.png"):
        paths["capacity_picture"] = folder / "ring_capacity.png"
    if workbook and len(screening.table) <= WORKBOOK_ROWS:
        from screener.outputs.workbook import write_workbook

        progress("writing ranking.xlsx")
        paths["workbook"] = folder / "ranking.xlsx"
        write_workbook(screening, paths["workbook"], summary)
    if len(screening.table) <= LAYER_ROWS:
        from screener.outputs.page import write_page

        progress("writing report.html")
        paths["page"] = folder / "report.html"
        write_page(screening, paths["page"], summary, mains)
    progress("writing run.json")
    write_json(folder / "run.json", run_record(screening, source, summary, paths, lines))
    return paths


def write_assumptions(screening: Screening, path: Path) -> int:
    """assumptions.parquet, one row group per rule, keyed by the row of the file; returns the number of lines."""
    raw = screening.inventory.raw
    text, number = pyarrow.string(), pyarrow.float32()
    word = pyarrow.dictionary(pyarrow.int8(), text)
    schema = pyarrow.schema(
        [("row", pyarrow.int64()), ("attribute", word), ("origin", word), ("value", pyarrow.float64()),
         ("value_text", text), ("rule", word), ("source", word), ("scatter", number), ("low", number), ("high", number)]
    )
    lines = 0
    words = ["attribute", "origin", "rule", "source", "value_text"]
    with whole_file(path) as temporary, pyarrow.parquet.ParquetWriter(temporary, schema, use_dictionary=words, write_statistics=False) as writer:
        for frame in assumption_frames(screening.inventory.ledger, raw.row_numbers):
            writer.write_table(pyarrow.Table.from_pandas(frame, schema=schema, preserve_index=False))
            lines += len(frame)
    return lines


def run_values(screening: Screening) -> pyarrow.Table:
    """Every attribute of every row, SI, with its origin code and the cell as written; what later commands read."""
    gaps = screening.inventory.gaps
    inventory = screening.inventory
    parts = {"position": pyarrow.array(np.arange(len(inventory))), "row": pyarrow.array(inventory.raw.row_numbers), "shown_id": arrow_text(inventory.joint_id)}
    for name in gaps.values:
        values = gaps[name]
        if name == "leak_dates":
            values = np.array(["; ".join(f"{d:.3f}" for d in v) if isinstance(v, tuple) else None for v in values], dtype=object)
        parts[name] = pyarrow.array(values, from_pandas=True) if values.dtype.kind == "f" else arrow_text(values)
        parts[f"{name}__origin"] = pyarrow.array(gaps.origin(name))
        if name in inventory.match.columns:
            parts[f"{name}__written"] = arrow_text(inventory.as_written(name))
    return pyarrow.table(parts)


def arrow_text(values) -> pyarrow.Array:
    """Text cells as an Arrow column that holds each distinct text once."""
    code, unique = pd.factorize(values)
    words = pyarrow.array([str(v) for v in unique], type=pyarrow.string())
    return pyarrow.DictionaryArray.from_arrays(pyarrow.array(code.astype(np.int32), mask=code < 0), words)


def section_frame(sections: dict[str, np.ndarray]) -> pd.DataFrame:
    """Ring sections as the table they are read from."""
    parts = [pd.DataFrame({"section": name, "r_mm": 1000 * c[:, 0], "z_mm": 1000 * c[:, 1]}) for name, c in sections.items()]
    return pd.concat(parts, ignore_index=True)


def guard_formulas(frame: pd.DataFrame) -> pd.DataFrame:
    """Text that a spreadsheet would run as a formula gets a leading apostrophe in CSV."""
    changed = {}
    for name in frame.columns:
        if frame[name].dtype.kind in "OUT" or isinstance(frame[name].dtype, (pd.StringDtype, pd.CategoricalDtype)):
            code, unique = pd.factorize(frame[name])
            unique = list(unique)
            risky = [isinstance(v, str) and v.startswith(("=", "+", "-", "@", "\t", "\r")) and not _is_number(v) for v in unique]
            if any(risky):
                guarded = ["'" + v if bad else v for v, bad in zip(unique, risky, strict=True)]
                changed[name] = pd.Series(np.array([*guarded, None], dtype=object)[code], index=frame.index, dtype=object)
    return frame.assign(**changed) if changed else frame


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
            columns[name] = arrow_text(values).dictionary_decode()
    with whole_file(path) as temporary:
        options = pyarrow.csv.WriteOptions(quoting_style="needed", quoting_header="needed")
        pyarrow.csv.write_csv(pyarrow.table(columns), temporary, options)


def seven_digits(values: np.ndarray) -> np.ndarray:
    """Values rounded to 7 significant digits."""
    size = np.where(np.isfinite(values) & (values != 0.0), np.abs(values), 1.0)
    scale = 10.0 ** (6 - np.floor(np.log10(size)))
    # Dividing by a whole power of ten keeps the shortest decimal form.
    return np.where(scale >= 1.0, np.round(values * scale) / scale, np.round(values * scale) * np.round(1.0 / np.minimum(scale, 1.0)))


def run_record(screening: Screening, source, summary, paths, assumption_lines: int) -> dict:
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
        "counts": {**screening.counts, "findings": {name: int(count) for name, count in severities.items()}, "assumptions": assumption_lines},
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
