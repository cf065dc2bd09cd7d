"""The ranked joints as a GIS layer."""

from __future__ import annotations

import warnings
from pathlib import Path

import geopandas
import numpy as np
import pandas as pd
import pyogrio
import shapely

from screener.outputs.map_style import describe_layers
from screener.outputs.run_folder import whole_file
from screener.outputs.shown import CAUTIONS
from screener.screening import Screening


def layer_frame(screening: Screening) -> tuple[geopandas.GeoDataFrame, pd.DataFrame]:
    """(joints with a place, joints without), machine names, the file's own columns kept with the prefix file_."""
    inventory = screening.inventory
    ranking = screening.ranking
    position = screening.table["position"].to_numpy()
    own = {}
    taken = {name.lower() for name in ranking.columns} | {"fid", "geom", "geometry"}
    for k, heading in enumerate(inventory.raw.headings):
        name = f"file_{heading}".replace('"', "'")
        while name.lower() in taken:
            name += "_"
        taken.add(name.lower())
        own[name] = _plain(inventory.raw.cells.iloc[:, k]).iloc[position].reset_index(drop=True)
    frame = ranking.assign(**own)
    x, y = inventory.place
    if x is None:
        x = y = np.full(len(inventory), np.nan)
    x, y = np.asarray(x)[position], np.asarray(y)[position]
    placed = np.isfinite(x) & np.isfinite(y)
    points = shapely.points(x[placed], y[placed])
    joints = geopandas.GeoDataFrame(frame[placed].reset_index(drop=True), geometry=points, crs=inventory.crs)
    return joints, frame[~placed].reset_index(drop=True)


def _plain(cells: pd.Series) -> pd.Series:
    """A column of the file as one type: numbers stay numbers, anything mixed becomes text as written."""
    if cells.dtype != object:
        return cells
    kinds = set(map(type, cells.array)) - {type(None), type(pd.NA), type(pd.NaT)}
    if kinds <= {int, float}:
        return cells.astype(float)
    if kinds == {str}:
        return cells
    code, unique = pd.factorize(cells)
    return pd.Series(np.array([*(str(v) for v in unique), None], dtype=object)[code], dtype=object)


def write_geoparquet(screening: Screening, path: Path) -> None:
    """The joints as GeoParquet, for fleets too large for a GeoPackage; joints without a place have an empty geometry."""
    joints, placeless = layer_frame(screening)
    if len(placeless):
        joints = pd.concat([joints, geopandas.GeoDataFrame(placeless, geometry=[None] * len(placeless), crs=joints.crs)], ignore_index=True)
    with whole_file(path) as temporary:
        joints.to_parquet(temporary, index=False)


def write_geopackage(screening: Screening, path: Path, mains: geopandas.GeoDataFrame | None = None) -> None:
    """joints.gpkg: layer joints, table joints_without_place, layer mains where given, cautions."""
    joints, placeless = layer_frame(screening)
    with whole_file(path) as temporary:
        metadata = {"layer_metadata": {"cautions": " ".join(CAUTIONS)}}
        with warnings.catch_warnings():
            # A file without a reference system gives a layer without one; the finding says so already.
            warnings.filterwarnings("ignore", message="'crs' was not provided")
            pyogrio.write_dataframe(joints, temporary, layer="joints", driver="GPKG", **metadata)
        if mains is not None:
            pyogrio.write_dataframe(mains, temporary, layer="mains", driver="GPKG", append=True)
        if len(placeless):
            pyogrio.write_dataframe(placeless, temporary, layer="joints_without_place", driver="GPKG", append=True)
        cautions = pd.DataFrame({"caution": list(CAUTIONS)})
        pyogrio.write_dataframe(cautions, temporary, layer="cautions", driver="GPKG", append=True)
        describe_layers(temporary)
