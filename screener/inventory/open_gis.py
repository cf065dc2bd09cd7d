"""GIS layers: GeoPackage, shapefile, GeoJSON. Shapes become points, the reference system is kept as stated."""

from __future__ import annotations

import warnings
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import numpy as np
import pyarrow as pa
import pyogrio
import shapely
from pyproj import CRS
from pyproj.exceptions import CRSError

from screener.inventory.header_rows import count_known, inventory_weight
from screener.inventory.open_arrow import guard_size, table_of
from screener.inventory.open_cells import some_of
from screener.inventory.open_kind import Kind, zip_items
from screener.records import InputError, Ledger, RawTable, Severity

WGS84 = "EPSG:4326"
_FAILURES = (pyogrio.errors.DataSourceError, pyogrio.errors.DataLayerError, pyogrio.errors.FeatureError, pyogrio.errors.CRSError, pa.ArrowException, UnicodeDecodeError)


def open_layer(path: Path, kind: Kind, layer: str | None, ledger: Ledger) -> RawTable:
    """The layer named, or the one whose fields look most like an inventory."""
    said: list[str] = []
    with _reading(path, said):
        layers = _layers(path, kind)
        source, name = _choose(path, layers, layer, ledger)
        info = pyogrio.read_info(source, layer=name)
        guard_size(path, max(info["features"], 0), len(info["fields"]))
        meta, table = pyogrio.read_arrow(source, layer=name, return_fids=True)
    for words in dict.fromkeys(said):
        ledger.finding("layer_warning", Severity.NOTES, None, problem=f"the GIS reader says: {words[:200]}", action="read as far as possible")
    fid = meta.get("fid_column") or "OGC_FID"
    numbers = table.column(fid).to_numpy().astype(np.int64) if fid in table.column_names else np.arange(len(table))
    geometry = meta.get("geometry_name") or "wkb_geometry"
    places = (None, None, None)
    if meta.get("geometry_type") and geometry in table.column_names:
        shapes = _shapes(table.column(geometry))
        crs = usable_crs(meta.get("crs"), ledger)
        places = (*places_of(shapes, ledger), crs)
        _check_degrees(*places, kind, ledger)
    rest = table.select([k for k, column in enumerate(table.column_names) if column not in (fid, geometry)])
    return table_of(path, name, rest, numbers, ledger, places)


def list_layers(path: Path, kind: Kind) -> list[tuple[str, int, int, int]]:
    """(name, features, fields, known headings) per layer."""
    with _reading(path, []):
        infos = [(name, pyogrio.read_info(source, layer=name)) for source, name in _layers(path, kind)]
    return [(name, max(info["features"], 0), len(info["fields"]), count_known([str(f) for f in info["fields"]])) for name, info in infos]


@contextmanager
def _reading(path: Path, said: list[str]) -> Iterator[None]:
    """The reader's own failures as one sentence, its warnings collected."""
    try:
        with warnings.catch_warnings(record=True) as caught:
            warnings.simplefilter("always")
            yield
        said += [" ".join(str(item.message).split()) for item in caught if issubclass(item.category, RuntimeWarning)]
    except _FAILURES as problem:
        reason = " ".join(str(problem).split()).replace(f"'{path}' ", "").split("; It might help")[0]
        raise InputError(f"{path}: can't be read as a GIS layer ({reason[:140]})") from None


def _layers(path: Path, kind: Kind) -> list[tuple[str, str]]:
    """(what to open, layer) of each layer."""
    if kind is Kind.SHAPEFILE:
        _check_side_files(path, [p.name for p in path.parent.iterdir() if p.stem == path.stem])
    if kind is not Kind.ZIPPED_SHAPEFILE:
        source = str(path.resolve())  # absolute, so that no part of the name is taken for a kind of source
        return [(source, str(name)) for name in pyogrio.list_layers(source)[:, 0]]
    found = []
    names = [item.filename for item in zip_items(path) if "__MACOSX" not in item.filename]
    for name in names:
        if name.lower().endswith(".shp"):
            _check_side_files(path, [other for other in names if other.rsplit(".", 1)[0] == name.rsplit(".", 1)[0]])
            source = f"/vsizip/{{{path.resolve()}}}/{name}"
            found += [(source, str(layer)) for layer in pyogrio.list_layers(source)[:, 0]]
    return found


def _check_side_files(path: Path, names: list[str]) -> None:
    endings = {name.rsplit(".", 1)[-1].lower() for name in names}
    missing = [f".{ending}" for ending in ("dbf", "shx") if ending not in endings]
    if missing:
        raise InputError(f"{path}: the shapefile is not whole, {' and '.join(missing)} missing; give all its files together (.shp, .shx, .dbf, .prj)")


def _choose(path: Path, layers: list[tuple[str, str]], wanted: str | None, ledger: Ledger) -> tuple[str, str]:
    if not layers:
        raise InputError(f"{path}: has no layers")
    names = [name for _, name in layers]
    if wanted is not None:
        for source, name in layers:
            if name == wanted:
                return source, name
        raise InputError(f"{path}: there is no layer {wanted!r}; there are: {some_of(names, 20)}")
    if len(layers) == 1:
        return layers[0]
    source, chosen = max(layers, key=_weight)
    others = some_of([name for name in names if name != chosen])
    ledger.finding("sheet_chosen", Severity.NOTES, None, problem=f"the file has {len(names)} layers; {chosen!r} looks most like the inventory", action=f"read {chosen!r}, not: {others}")
    return source, chosen


def _weight(layer: tuple[str, str]) -> tuple:
    info = pyogrio.read_info(layer[0], layer=layer[1])
    features = max(info["features"], 0)
    return inventory_weight(count_known([str(f) for f in info["fields"]]), features), "Point" in str(info["geometry_type"]), features


def _shapes(column: pa.ChunkedArray) -> np.ndarray:
    if isinstance(column.type, pa.BaseExtensionType):
        column = pa.chunked_array([chunk.storage for chunk in column.chunks], type=column.type.storage_type)
    return shapely.from_wkb(column.to_numpy(), on_invalid="ignore")


def places_of(shapes: np.ndarray, ledger: Ledger) -> tuple[np.ndarray, np.ndarray]:
    """Representative points; empty, missing and unreadable shapes are NaN and noted."""
    points = np.where(shapely.is_empty(shapes), None, shapes)
    other = shapely.get_type_id(points) > 0
    if other.any():
        points[other] = _points_in(points[other])
    x, y = shapely.get_x(points), shapely.get_y(points)
    unknown = ~(np.isfinite(x) & np.isfinite(y))
    x[unknown] = y[unknown] = np.nan
    ledger.finding("no_place", Severity.NOTES, unknown, problem="the feature has no shape, or one that can't be read", action="kept without a place")
    ledger.finding("place_from_shape", Severity.NOTES, other & ~unknown, problem="the feature is not a point", action="placed at a point on or inside its shape")
    return x, y


def _points_in(shapes: np.ndarray) -> np.ndarray:
    try:
        return shapely.point_on_surface(shapes)
    except shapely.errors.GEOSException:
        return np.array([*(_point_in(shape) for shape in shapes), None], dtype=object)[:-1]


def _point_in(shape) -> shapely.Geometry | None:
    try:
        return shapely.point_on_surface(shape)
    except shapely.errors.GEOSException:
        return None


def usable_crs(stated: str | None, ledger: Ledger) -> str | None:
    """The reference system as "EPSG:code" where it has one, else as WKT; None with a finding where the file gives none."""
    problem = "the layer does not say its coordinate reference system"
    if stated:
        try:
            crs = CRS.from_user_input(stated)
            code = crs.to_epsg()
            return f"EPSG:{code}" if code else crs.to_wkt()
        except CRSError:
            problem = "the layer's coordinate reference system can't be understood"
    ledger.finding("no_reference_system", Severity.DOUBTS, None, problem=problem, action="coordinates kept as written; the output layer carries none either")
    return None


def _check_degrees(x: np.ndarray, y: np.ndarray, crs: str | None, kind: Kind, ledger: Ledger) -> None:
    if crs == WGS84 and kind is Kind.GEOJSON:
        ledger.finding("geojson_reference_system", Severity.NOTES, None, problem="GeoJSON is in longitude and latitude (WGS 84) by its standard, RFC 7946", action=f"taken as {WGS84}")
    if crs == WGS84:
        beyond = (np.abs(x) > 180.0) | (np.abs(y) > 90.0)
        ledger.finding("beyond_degrees", Severity.DOUBTS, beyond, problem="the file says longitude and latitude, and the coordinates are beyond 180 and 90 degrees", action="coordinates kept as written; check the reference system")
