"""GIS layers and Parquet tables."""

from __future__ import annotations

from pathlib import Path

import geopandas
import numpy as np
import pandas as pd
import pyarrow
import pyarrow.parquet
import pyogrio

from screener.inventory.header_rows import MOST_COLUMNS, header_score
from screener.records import InputError, Ledger, RawTable, Severity


def open_layer(path: Path, kind: str, sheet: str | None, ledger: Ledger) -> RawTable:
    """A vector layer: the one named, or the one whose fields look most like an inventory."""
    source = f"/vsizip/{path}" if kind == "zipped shapefile" else str(path)
    try:
        layers = [str(name) for name in pyogrio.list_layers(source)[:, 0]]
    except (pyogrio.errors.DataSourceError, pyogrio.errors.DataLayerError) as problem:
        raise InputError(f"{path}: can't be read as a GIS layer ({_short(problem)})") from None
    if not layers:
        raise InputError(f"{path}: has no layers")
    if sheet is not None and sheet not in layers:
        raise InputError(f"{path}: there is no layer {sheet!r}; there are: {', '.join(layers)}")
    chosen = sheet or max(layers, key=lambda name: _layer_score(source, name))
    if sheet is None and len(layers) > 1:
        others = ", ".join(name for name in layers if name != chosen)
        ledger.finding("sheet_chosen", Severity.NOTES, None, problem=f"the file has several layers; {chosen!r} looks most like the inventory", action=f"read {chosen!r}, not: {others}")
    try:
        frame = pyogrio.read_dataframe(source, layer=chosen, use_arrow=True, fid_as_index=True)
    except (pyogrio.errors.DataSourceError, pyogrio.errors.DataLayerError, pyogrio.errors.FeatureError, pyarrow.ArrowInvalid, ValueError, UnicodeDecodeError) as problem:
        raise InputError(f"{path}, layer {chosen!r}: can't be read ({_short(problem)})") from None
    return _from_frame(path, chosen, frame, np.asarray(frame.index, dtype=np.int64), ledger)


def _layer_score(source: str, layer: str) -> float:
    info = pyogrio.read_info(source, layer=layer)
    return header_score([str(f) for f in info["fields"]]) + (1.0 if "Point" in str(info.get("geometry_type")) else 0.0) + min(max(info.get("features", 0), 0), 50) * 0.1


def open_parquet(path: Path, ledger: Ledger) -> RawTable:
    """A Parquet table, with geometry where it is GeoParquet."""
    try:
        schema = pyarrow.parquet.read_schema(path)
        if schema.metadata and b"geo" in schema.metadata:
            frame = geopandas.read_parquet(path)
        else:
            frame = pd.read_parquet(path)
    except (pyarrow.ArrowException, OSError, ValueError) as problem:
        raise InputError(f"{path}: the Parquet file is damaged or of a kind that can't be read ({_short(problem)})") from None
    return _from_frame(path, "", frame.reset_index(drop=True), np.arange(1, len(frame) + 1), ledger)


def _from_frame(path: Path, layer: str, frame: pd.DataFrame, numbers: np.ndarray, ledger: Ledger) -> RawTable:
    x = y = crs = None
    if isinstance(frame, geopandas.GeoDataFrame) and frame.columns.size:
        try:
            geometry = frame.geometry
        except AttributeError:
            geometry = None
        if geometry is not None:
            x, y, crs = _places(geometry, ledger)
            frame = pd.DataFrame(frame.drop(columns=geometry.name))
    if frame.shape[1] > MOST_COLUMNS:
        raise InputError(f"{path}: has {frame.shape[1]:,} columns; at most {MOST_COLUMNS:,} are read")
    if frame.shape[1] == 0:
        raise InputError(f"{path}{', ' + layer if layer else ''}: has shapes and no attributes")
    headings = tuple(str(name)[:200] for name in frame.columns)
    cells = frame.reset_index(drop=True)
    cells.columns = range(len(headings))
    return RawTable(path.name, layer, headings, cells, numbers, x, y, crs)


def _places(geometry: geopandas.GeoSeries, ledger: Ledger):
    """Representative points; empty and missing shapes are NaN and noted."""
    empty = np.asarray(geometry.isna() | geometry.is_empty)
    ledger.finding("no_place", Severity.NOTES, empty, problem="the feature has no shape", action="ranked; it appears in the table of joints without a place")
    x = np.full(len(geometry), np.nan)
    y = np.full(len(geometry), np.nan)
    kinds = geometry.geom_type
    point = np.asarray(kinds == "Point") & ~empty
    if point.any():
        x[point], y[point] = geometry[point].x.to_numpy(), geometry[point].y.to_numpy()
    other = ~point & ~empty
    if other.any():
        inner = geometry[other].representative_point()
        x[other], y[other] = inner.x.to_numpy(), inner.y.to_numpy()
        ledger.finding("place_from_shape", Severity.NOTES, other, problem="the feature is not a point", action="placed at a point on or inside its shape")
    crs = geometry.crs
    if crs is None:
        ledger.finding("no_reference_system", Severity.DOUBTS, None, problem="the layer does not say its coordinate reference system", action="coordinates kept as written; the output layer carries none either")
        return x, y, None
    code = crs.to_epsg()
    return x, y, f"EPSG:{code}" if code else crs.to_wkt()


def _short(problem: Exception) -> str:
    return " ".join(str(problem).split())[:140]
