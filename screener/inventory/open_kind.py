"""What a file is, by its content; its name is only compared with it."""

from __future__ import annotations

import zipfile
from enum import StrEnum
from pathlib import Path

from screener.records import InputError, Ledger, Severity

LARGEST_UNPACKED = 2_000_000_000
LARGEST_RATIO = 400
SMALL_UNPACKED = 50_000_000
READABLE = "a workbook (.xlsx, .xlsm, .xls, .ods), delimited text (.csv, .tsv, .txt), GeoPackage, shapefile (also zipped), GeoJSON, GeoParquet, Parquet or Feather"


class Kind(StrEnum):
    """Kinds of files that are read."""

    XLSX = "workbook"
    XLS = "old workbook"
    ODS = "OpenDocument workbook"
    TEXT = "delimited text"
    GEOPACKAGE = "GeoPackage"
    SHAPEFILE = "shapefile"
    ZIPPED_SHAPEFILE = "zipped shapefile"
    GEOJSON = "GeoJSON"
    PARQUET = "Parquet"
    FEATHER = "Feather"


ENDINGS = {
    Kind.XLSX: (".xlsx", ".xlsm", ".xltx", ".xltm"),
    Kind.XLS: (".xls", ".xlt"),
    Kind.ODS: (".ods", ".ots"),
    Kind.TEXT: (".csv", ".tsv", ".txt", ".tab", ".dat"),
    Kind.GEOPACKAGE: (".gpkg",),
    Kind.SHAPEFILE: (".shp",),
    Kind.ZIPPED_SHAPEFILE: (".zip", ".shz"),
    Kind.GEOJSON: (".geojson", ".json"),
    Kind.PARQUET: (".parquet", ".geoparquet", ".pq"),
    Kind.FEATHER: (".feather", ".arrow", ".ipc"),
}
WORKBOOKS = (Kind.XLSX, Kind.XLS, Kind.ODS)
LAYERS = (Kind.GEOPACKAGE, Kind.SHAPEFILE, Kind.ZIPPED_SHAPEFILE, Kind.GEOJSON)

_STARTS = (
    (b"SQLite format 3\x00", Kind.GEOPACKAGE),
    (b"PAR1", Kind.PARQUET),
    (b"ARROW1", Kind.FEATHER),
    (b"FEA1", Kind.FEATHER),
    (b"\x00\x00\x27\x0a", Kind.SHAPEFILE),
)
_OTHER_STARTS = (
    (b"%PDF", "a PDF document"),
    (b"\x89PNG", "a picture"),
    (b"\xff\xd8\xff", "a picture"),
    (b"GIF8", "a picture"),
    (b"II*\x00", "a picture"),
    (b"MM\x00*", "a picture"),
    (b"{\\rtf", "a text document"),
    (b"\x7fELF", "a program"),
    (b"MZ\x90", "a program"),
    (b"\x1f\x8b", "a compressed file; unpack it first"),
    (b"7z\xbc\xaf", "a compressed file; unpack it first"),
    (b"Rar!", "a compressed file; unpack it first"),
    (b"BZh", "a compressed file; unpack it first"),
    (b"PARE", "an encrypted Parquet file"),
)
_SIDE_FILES = (".dbf", ".shx", ".prj", ".cpg", ".sbn", ".sbx")


def file_kind(path: Path) -> Kind:
    """What the file is; InputError for one that can't be read."""
    head = _first_bytes(path)
    suffix = path.suffix.lower()
    if head.startswith(b"PK\x03\x04") or head.startswith(b"PK\x05\x06"):
        return _zip_kind(path)
    if head.startswith(b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"):
        return _ole_kind(path)
    for start, kind in _STARTS:
        if head.startswith(start) and not (kind is Kind.SHAPEFILE and suffix in _SIDE_FILES):
            return kind
    if suffix in _SIDE_FILES:
        raise InputError(f"{path}: is a side file of a shapefile; give the .shp, with the .dbf, .shx and .prj beside it")
    for start, words in _OTHER_STARTS:
        if head.startswith(start):
            raise InputError(f"{path}: is {words}; accepted are {READABLE}")
    return _text_kind(path, head, suffix)


def _first_bytes(path: Path) -> bytes:
    try:
        if path.is_dir():
            raise InputError(f"{path}: is a folder; give the inventory file itself, {READABLE}")
        if not path.exists():
            raise InputError(f"{path}: there is no such file")
        if not path.is_file():
            raise InputError(f"{path}: is not a regular file; accepted are {READABLE}")
        with open(path, "rb") as stream:
            head = stream.read(4096)
    except (OSError, ValueError) as problem:
        reason = getattr(problem, "strerror", None) or problem
        raise InputError(f"{str(path)[:200]}: can't be opened ({reason})") from None
    if not head:
        raise InputError(f"{path}: the file is empty (0 bytes)")
    return head


def _text_kind(path: Path, head: bytes, suffix: str) -> Kind:
    plain = head.replace(b"\x00", b"") if head.startswith((b"\xff\xfe", b"\xfe\xff")) else head
    start = plain.lstrip(b"\xef\xbb\xbf\xff\xfe \t\r\n").lower()
    if start.startswith((b"<!doctype", b"<html", b"<?xml", b"<table", b"<kml", b"<meta", b"<head")):
        raise InputError(f"{path}: is a web page or XML, whatever its name says; open it in a spreadsheet program or GIS and save it as .xlsx or .gpkg")
    if start.startswith(b"{") or (start.startswith(b"[") and suffix in ENDINGS[Kind.GEOJSON]):
        return Kind.GEOJSON
    for kind, endings in ENDINGS.items():
        if suffix in endings and kind is not Kind.TEXT:
            hint = "; if it is delimited text, call it .csv" if b"\x00" not in head else ""
            raise InputError(f"{path}: has the name of a {kind} file and is none{hint}; accepted are {READABLE}")
    return Kind.TEXT


def _ole_kind(path: Path) -> Kind:
    """Old workbooks and encrypted new ones have the same kind of container."""
    data = path.read_bytes() if path.stat().st_size <= LARGEST_UNPACKED else b""
    names = {name: name.encode("utf-16-le") in data for name in ("EncryptedPackage", "Workbook", "Book", "WordDocument")}
    if names["EncryptedPackage"] or not (names["Workbook"] or names["Book"]) or names["WordDocument"]:
        raise InputError(f"{path}: is password-protected or an old workbook; save it without a password as .xlsx")
    return Kind.XLS


def zip_items(path: Path) -> list[zipfile.ZipInfo]:
    """The archive's contents, after its sizes are measured."""
    try:
        with zipfile.ZipFile(path) as archive:
            items = archive.infolist()
    except (zipfile.BadZipFile, OSError, NotImplementedError, ValueError, EOFError):
        raise InputError(f"{path}: is a broken or unfinished archive; save or download it again") from None
    size = path.stat().st_size
    unpacked = sum(item.file_size for item in items)
    if unpacked > LARGEST_UNPACKED or unpacked > LARGEST_RATIO * size + SMALL_UNPACKED:
        raise InputError(f"{path}: claims to unpack to {unpacked / 1e9:,.2f} GB from {size / 1e6:,.2f} MB; not opened (at most {LARGEST_UNPACKED / 1e9:.0f} GB, and at most {LARGEST_RATIO} times its size)")
    if any(item.flag_bits & 1 for item in items):
        raise InputError(f"{path}: the archive is password-protected; save it without a password")
    return items


def _zip_kind(path: Path) -> Kind:
    names = [item.filename.lower() for item in zip_items(path)]
    if "xl/workbook.xml" in names:
        return Kind.XLSX
    if "xl/workbook.bin" in names:
        raise InputError(f"{path}: is a binary workbook (.xlsb); save it as .xlsx")
    if "content.xml" in names and not any(name.startswith("word/") for name in names):
        return Kind.ODS
    if any(name.endswith(".shp") for name in names):
        return Kind.ZIPPED_SHAPEFILE
    if "[content_types].xml" in names:
        raise InputError(f"{path}: is an office document without a worksheet, or a broken workbook; accepted are {READABLE}")
    raise InputError(f"{path}: is an archive without a workbook or shapefile in it; unpack it first; accepted are {READABLE}")


def note_wrong_ending(path: Path, kind: Kind, ledger: Ledger) -> None:
    """Say so where the file's name promises something else."""
    if path.suffix.lower() not in ENDINGS[kind]:
        name = path.suffix or "no ending"
        ledger.finding("wrong_ending", Severity.NOTES, None, problem=f"the file is {kind} by its content, and its name has {name}", action=f"read as {kind}")
