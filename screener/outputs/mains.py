"""Mains as lines, for the map."""

from __future__ import annotations

from pathlib import Path

import geopandas
import pyogrio

from screener.records import InputError

LINES = ("LineString", "MultiLineString")


def read_mains(given: str | Path, inventory_path: str | Path, crs: str | None) -> geopandas.GeoDataFrame:
    """The line layer of a file, or a named layer of the inventory's own file, in the joints' reference system."""
    path, layer = (Path(given), None) if Path(given).exists() else (Path(inventory_path), str(given))
    try:
        layers = [str(name) for name in pyogrio.list_layers(path)[:, 0]]
        if layer is not None and layer not in layers:
            raise InputError(f"--mains {given}: is neither a file nor a layer of {inventory_path}; layers there: {', '.join(layers)}")
        for name in [layer] if layer else layers:
            frame = pyogrio.read_dataframe(path, layer=name, use_arrow=True)
            if isinstance(frame, geopandas.GeoDataFrame) and frame.geom_type.isin(LINES).any():
                break
        else:
            raise InputError(f"--mains {given}: has no layer of lines; layers there: {', '.join(layers)}")
    except (pyogrio.errors.DataSourceError, pyogrio.errors.DataLayerError) as problem:
        raise InputError(f"--mains {given}: can't be read as a GIS layer ({' '.join(str(problem).split())[:120]})") from None
    frame = frame[frame.geom_type.isin(LINES)]
    if crs and frame.crs is not None and frame.crs != crs:
        frame = frame.to_crs(crs)
    return frame.reset_index(drop=True)
