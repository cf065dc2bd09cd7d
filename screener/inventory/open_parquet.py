"""Parquet, GeoParquet and Feather tables."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pyarrow as pa
import pyarrow.feather
import pyarrow.parquet

from screener.inventory.open_arrow import guard_size, table_of
from screener.inventory.open_gis import places_of, usable_crs
from screener.inventory.open_kind import Kind
from screener.records import InputError, Ledger, RawTable


def open_parquet(path: Path, kind: Kind, ledger: Ledger) -> RawTable:
    """A Parquet or Feather table; its geometry as points where it says that it has one."""
    try:
        if kind is Kind.PARQUET:
            metadata = pyarrow.parquet.read_metadata(path)
            guard_size(path, metadata.num_rows, metadata.num_columns)
            table = pyarrow.parquet.ParquetFile(path).read(use_threads=True)
        else:
            table = pyarrow.feather.read_table(path, memory_map=False)
    except (pa.ArrowException, OSError, ValueError, MemoryError) as problem:
        raise InputError(f"{path}: the {kind} file is damaged or of a kind that can't be read ({' '.join(str(problem).split())[:140]})") from None
    places = (None, None, None)
    table = _without_index(table)
    geo = _geometry(path, table.schema.metadata or {})
    if geo is not None:
        places = _places(path, kind, geo, ledger)
        table = table.select([name for name in table.column_names if name not in geo["columns"]])
    return table_of(path, "", table.replace_schema_metadata(None), np.arange(1, len(table) + 1), ledger, places)


def _without_index(table: pa.Table) -> pa.Table:
    """Without the row labels that a data-frame library adds of its own."""
    own = [name for name in table.column_names if name.startswith("__index_level_") and name.endswith("__")]
    return table.drop_columns(own) if own else table


def _geometry(path: Path, metadata: dict) -> dict | None:
    """The file's own note on its geometry columns."""
    if b"geo" not in metadata:
        return None
    try:
        geo = json.loads(metadata[b"geo"])
        usable = geo["primary_column"] in geo["columns"]
    except (ValueError, KeyError, TypeError, RecursionError):
        usable = False
    if not usable:
        raise InputError(f"{path}: its note on geometry is damaged; save it again as GeoParquet or GeoPackage")
    return geo


def _places(path: Path, kind: Kind, geo: dict, ledger: Ledger):
    import geopandas
    import shapely

    read = geopandas.read_parquet if kind is Kind.PARQUET else geopandas.read_feather
    try:
        frame = read(path, columns=[geo["primary_column"]])
        crs = frame.crs
    except (pa.ArrowException, shapely.errors.ShapelyError, OSError, ValueError, KeyError, TypeError, AttributeError) as problem:
        raise InputError(f"{path}: its geometry can't be read ({' '.join(str(problem).split())[:140]})") from None
    return (*places_of(np.asarray(frame.geometry), ledger), usable_crs(crs.to_wkt() if crs is not None else None, ledger))
