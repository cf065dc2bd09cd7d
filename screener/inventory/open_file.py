"""Open an inventory as it stands in its file; nothing is interpreted here."""

from __future__ import annotations

import zipfile
from pathlib import Path

from screener.records import InputError, Ledger, RawTable, Severity

MAGIC_ZIP, MAGIC_OLE, MAGIC_SQLITE, MAGIC_PARQUET = b"PK\x03\x04", b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1", b"SQLite format 3\x00", b"PAR1"
LARGEST_UNPACKED = 2_000_000_000
LARGEST_RATIO = 400
READABLE = "a workbook (.xlsx, .xlsm, .ods), delimited text (.csv, .tsv), GeoPackage, shapefile, GeoJSON, GeoParquet or Parquet"


def file_kind(path: Path) -> str:
    """What the file is, by its content: workbook, old workbook, geopackage, parquet, shapefile, geojson or text."""
    if not path.exists():
        raise InputError(f"{path}: there is no such file")
    if path.is_dir():
        raise InputError(f"{path}: is a folder; give the inventory file itself, {READABLE}")
    size = path.stat().st_size
    if size == 0:
        raise InputError(f"{path}: the file is empty (0 bytes)")
    with open(path, "rb") as stream:
        head = stream.read(4096)
    suffix = path.suffix.lower()
    if head.startswith(MAGIC_ZIP):
        return _zip_kind(path)
    if head.startswith(MAGIC_OLE):
        if suffix == ".xls":
            return "workbook"
        raise InputError(f"{path}: is password-protected or an old-format workbook; save it without a password as .xlsx")
    if head.startswith(MAGIC_SQLITE):
        return "geopackage"
    if head.startswith(MAGIC_PARQUET):
        return "parquet"
    if suffix == ".shp" or head.startswith(b"\x00\x00\x27\x0a"):
        return "shapefile"
    if suffix in (".xlsx", ".xlsm", ".ods", ".xls"):
        raise InputError(f"{path}: has the name of a workbook and is none; if it is text, call it .csv")
    if suffix in (".gpkg", ".parquet"):
        raise InputError(f"{path}: has the name of a {suffix[1:]} file and is none; accepted are {READABLE}")
    start = head.lstrip(b"\xef\xbb\xbf \t\r\n")
    if suffix in (".geojson", ".json") or start.startswith(b"{"):
        return "geojson"
    if start.startswith((b"%PDF", b"\x89PNG", b"\xff\xd8", b"GIF8", b"\x7fELF", b"MZ", b"{\\rtf")):
        raise InputError(f"{path}: is neither a table nor a GIS layer; accepted are {READABLE}")
    return "text"


def _zip_kind(path: Path) -> str:
    try:
        with zipfile.ZipFile(path) as archive:
            items = archive.infolist()
    except (zipfile.BadZipFile, OSError, NotImplementedError, ValueError, EOFError):
        raise InputError(f"{path}: is a broken or unfinished archive; save or download it again") from None
    unpacked = sum(item.file_size for item in items)
    if unpacked > LARGEST_UNPACKED or unpacked > LARGEST_RATIO * max(path.stat().st_size, 1) + 50_000_000:
        raise InputError(
            f"{path}: claims to unpack to {unpacked / 1e9:,.1f} GB from {path.stat().st_size / 1e6:,.1f} MB; not opened (at most {LARGEST_UNPACKED / 1e9:.0f} GB)"
        )
    names = {item.filename for item in items}
    if any(item.flag_bits & 1 for item in items):
        raise InputError(f"{path}: the archive is password-protected; save it without a password")
    if "[Content_Types].xml" in names or "content.xml" in names:
        return "workbook"
    if any(name.lower().endswith(".shp") for name in names):
        return "zipped shapefile"
    raise InputError(f"{path}: is an archive without a workbook or shapefile in it; accepted are {READABLE}")


def open_table(path: str | Path, *, sheet: str | None = None, ledger: Ledger) -> RawTable:
    """The table of `path` that looks most like an inventory (or the one named), as it stands."""
    path = Path(path)
    kind = file_kind(path)
    if kind == "workbook":
        from screener.inventory.open_workbook import open_workbook

        if path.suffix.lower() == ".xlsm":
            ledger.finding("macros_ignored", Severity.NOTES, None, problem="the workbook may carry macros", action="cells read, macros neither run nor kept")
        table = open_workbook(path, sheet, ledger)
    elif kind == "text":
        from screener.inventory.open_delimited import open_delimited

        table = open_delimited(path, ledger)
    elif kind == "parquet":
        from screener.inventory.open_gis import open_parquet

        table = open_parquet(path, ledger)
    else:
        from screener.inventory.open_gis import open_layer

        table = open_layer(path, kind, sheet, ledger)
    if len(table) == 0:
        raise InputError(f"{path}{_of(table.sheet)}: has headings and no rows below them")
    return table


def _of(sheet: str) -> str:
    return f", {sheet}" if sheet else ""
