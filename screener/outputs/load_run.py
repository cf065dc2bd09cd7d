"""Some joints of a run, back as a Fleet with everything known about their inputs."""

from __future__ import annotations

import difflib
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pandas as pd
import pyarrow.compute
import pyarrow.parquet

from screener.columns import inventory_attributes
from screener.inventory.build_fleet import build_fleet
from screener.inventory.gaps import Gaps
from screener.inventory.ring_sections import read_sections
from screener.outputs.run_folder import read_run
from screener.pressure.step import with_surge_by_formula
from screener.records import Fleet, Ledger, ModelError
from screener.settings import Settings


@dataclass(frozen=True, eq=False)
class LoadedJoints:
    """record: run.json. values: joints.parquet rows. ranking: their lines of ranking.csv. assumptions, findings: by row number."""

    folder: Path
    record: dict
    settings: Settings
    values: pd.DataFrame
    ranking: pd.DataFrame
    assumptions: pd.DataFrame
    findings: pd.DataFrame
    fleet: Fleet
    sections: dict[str, np.ndarray]


def load_joints(folder: str | Path, joints: list[str]) -> LoadedJoints:
    """Joints of a run by id; ModelError names ids that are not in it or not ranked."""
    folder = Path(folder)
    record = read_run(folder)
    settings = Settings(**{k: v for k, v in record["settings"].items() if k != "assessment_year"})
    path = folder / "joints.parquet"
    ids = pyarrow.parquet.read_table(path, columns=["shown_id"]).column("shown_id").to_pandas().astype(object)
    place = pd.Series(np.arange(len(ids)), index=ids)
    unknown = [joint for joint in joints if joint not in place.index]
    if unknown:
        close = difflib.get_close_matches(unknown[0], list(place.index[:200_000]), n=3)
        hint = f"; did you mean {', '.join(close)}?" if close else ""
        raise ModelError(f"{folder}: joint {unknown[0]!r} is not in this run{hint}")
    rows = place.loc[joints].to_numpy()
    values = pyarrow.parquet.read_table(path).take(pyarrow.array(rows)).to_pandas()
    for name in values.columns:
        if isinstance(values[name].dtype, pd.CategoricalDtype):
            values[name] = values[name].astype(object)
    numbers = values["row"].tolist()
    ranking = _lines(folder / "ranking.csv", numbers)
    for joint, row in zip(joints, ranking.to_dict("records"), strict=True):
        if row["status"] != "ranked":
            raise ModelError(f"{folder}: joint {joint!r} is not ranked: {row['reason']}")
    assumptions = pyarrow.parquet.read_table(folder / "assumptions.parquet", filters=[("row", "in", numbers)]).to_pandas()
    findings = pd.read_csv(folder / "findings.csv", dtype=str, keep_default_na=False)
    sections = read_sections(folder / "ring_sections.csv", Ledger()) if "sections" in record["files"] else {}
    fleet = fleet_of(values, joints, record, settings)
    return LoadedJoints(folder, record, settings, values, ranking, assumptions, findings, fleet, sections)


def _lines(path: Path, numbers: list[int]) -> pd.DataFrame:
    table = pd.read_csv(path, low_memory=False)
    return table.set_index("row").loc[numbers].reset_index()


def fleet_of(values: pd.DataFrame, joints: list[str], record: dict, settings: Settings) -> Fleet:
    """The joints' Fleet, as the screening had it."""
    known = inventory_attributes()
    count = len(values)
    names = [c for c in values.columns if f"{c}__origin" in values.columns]
    given = {n: values[n].to_numpy(dtype=float if values[n].dtype.kind == "f" else object) for n in names}
    gaps = Gaps({n: given[n] for n in names if n in known and n != "leak_dates"}, {n: values[f"{n}__origin"].to_numpy() for n in names}, count, Ledger())
    for name in names:
        if name not in known:
            gaps.add(name, numeric=given[name].dtype == float)
            gaps[name][:] = given[name]
    fleet = build_fleet(gaps, np.array(joints, dtype=object), np.arange(count), record["settings"]["assessment_year"])
    return with_surge_by_formula(
        fleet,
        Ledger(),
        recurrent_velocity_change=settings.recurrent_velocity_change,
        occasional_velocity_change=settings.occasional_velocity_change,
    )
