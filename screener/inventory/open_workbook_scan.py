"""What a workbook's own XML says that its reader does not: how far its cells reach, errors, formulas without a result.

The reader lays a sheet out as a full grid, so one stray cell in the last
corner would take all memory: the reach is measured first.
"""

from __future__ import annotations

import re
import zipfile
import zlib
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path
from xml.etree import ElementTree

from screener.inventory.header_rows import column_letters
from screener.inventory.open_kind import SMALL_UNPACKED
from screener.records import InputError

LARGEST_GRID = 60_000_000
MOST_LISTED = 200_000
_CHUNK = 4 << 20

# The patterns begin with plain letters, so that they are looked for at the speed of memory.
_ROW = re.compile(rb"row [^>]*?\br=[\"'](\d{1,9})")
_WIDE = re.compile(rb"r=[\"'](?:[B-Z][A-Z]|[A-Z]{3})\d")  # beyond column AZ
_NARROW = 52
_COLUMN = re.compile(rb"r=[\"']([A-Z]{1,3})\d")
_PREFIXED_CELL = re.compile(rb"<\w+:c[\s>]")
_FILLED = re.compile(rb"<(?:\w+:)?c\s[^>]*?\br=[\"']([A-Z]{1,3})(\d{1,9})[^>]*?[^/]>")
_PLACE = re.compile(rb"\br=[\"']([A-Z]{1,3})(\d{1,9})[\"']")
_ERROR = re.compile(rb"\bt=[\"']e[\"']")
_TEXT_RESULT = re.compile(rb"\bt=[\"']str[\"']")
_FORMULA = re.compile(rb"<(?:\w+:)?f[\s/>]")
_SIGNS = (b"<f", b":f>", b":f ", b't="e"', b"t='e'")
_VALUE = re.compile(rb"<(?:\w+:)?v>([^<]+)<")
_IS_IN = re.compile(rb"<(?:\w+:)?is[\s>]")


@dataclass
class SheetScan:
    """errors: (row, column, text) of cells that show an error; unsolved: (row, column) of formulas without a stored result. 1-based row, 0-based column."""

    last_row: int = 0
    last_column: int = _NARROW - 1  # not looked for where it is no wider
    errors: list[tuple[int, int, str]] = field(default_factory=list)
    unsolved: list[tuple[int, int]] = field(default_factory=list)


def scan_workbook(path: Path) -> dict[str, SheetScan]:
    """A scan per worksheet of an .xlsx or .xlsm; refuses a sheet whose cells reach too far."""
    scans: dict[str, SheetScan] = {}
    try:
        with zipfile.ZipFile(path) as archive:
            parts = _parts(archive)
            for item in archive.infolist():
                name = parts.get(item.filename.lower())
                if name is None and not re.fullmatch(r"/?xl/worksheets/[^/]+\.xml", item.filename, re.IGNORECASE):
                    continue
                scan = _scan_part(_chunks(archive, item))
                _refuse_far(path, name or item.filename, scan, archive, item)
                if name is not None:
                    scans[name] = scan
    except (zipfile.BadZipFile, zlib.error, EOFError, NotImplementedError, RuntimeError, OSError) as problem:
        raise InputError(f"{path}: the workbook is damaged ({' '.join(str(problem).split())[:100]}); open and save it again as .xlsx") from None
    return scans


def _parts(archive: zipfile.ZipFile) -> dict[str, str]:
    """Worksheet file in the archive (lower case) -> name of the sheet; empty where the workbook is laid out unusually."""
    names = {item.filename.lower(): item for item in archive.infolist()}
    listing, links = names.get("xl/workbook.xml"), names.get("xl/_rels/workbook.xml.rels")
    if listing is None or links is None or max(listing.file_size, links.file_size) > SMALL_UNPACKED:
        return {}
    targets = {}
    for link in _elements(archive.read(links), "Relationship"):
        target = link.get("Target", "")
        targets[link.get("Id", "")] = (target.lstrip("/") if target.startswith("/") else f"xl/{target}").lower()
    found = {}
    for sheet in _elements(archive.read(listing), "sheet"):
        link = next((value for key, value in sheet.attrib.items() if key.endswith("}id")), "")
        if link in targets:
            found[targets[link]] = sheet.get("name", "")
    return found


def _elements(data: bytes, tag: str) -> list[ElementTree.Element]:
    if b"<!DOCTYPE" in data or b"<!ENTITY" in data:
        return []
    try:
        return [item for item in ElementTree.fromstring(data).iter() if item.tag.rsplit("}", 1)[-1] == tag]
    except ElementTree.ParseError:
        return []


def _chunks(archive: zipfile.ZipFile, item: zipfile.ZipInfo) -> Iterator[bytes]:
    """The part in pieces that end with a row, or at least with a tag."""
    rest = b""
    with archive.open(item) as stream:
        while data := stream.read(_CHUNK):
            data = rest + data
            cut = data.rfind(b"row>") + 4
            if cut < 4:
                cut = data.rfind(b">") + 1
            yield data[:cut]
            rest = data[cut:]
            if len(rest) > 16 * _CHUNK:
                yield rest
                rest = b""
    yield rest


def _scan_part(chunks: Iterator[bytes]) -> SheetScan:
    scan = SheetScan()
    for data in chunks:
        rows = _ROW.findall(data)
        if rows:
            scan.last_row = max(scan.last_row, max(map(int, rows)))
        if _WIDE.search(data):
            scan.last_column = max(scan.last_column, *(_column(letters) for letters in set(_COLUMN.findall(data))))
        if any(sign in data for sign in _SIGNS):
            for cell in _PREFIXED_CELL.split(data) if b":c " in data else data.split(b"<c "):
                _look_at(cell, scan)
    return scan


def _look_at(cell: bytes, scan: SheetScan) -> None:
    """Note an error or a formula without a result; `cell` begins after "<c " and may reach into what follows."""
    head, _, body = cell.partition(b">")
    error = _ERROR.search(head)
    if not error and (head.endswith(b"/") or not _FORMULA.search(body) or _TEXT_RESULT.search(head)):
        return
    value, place = _VALUE.search(body), _PLACE.search(head)
    if place is None or (not error and (value or _IS_IN.search(body))):
        return
    column, row = _column(place[1]), int(place[2])
    if error and len(scan.errors) < MOST_LISTED:
        scan.errors.append((row, column, value[1].decode("utf-8", "replace")[:40] if value else "error"))
    elif not error and len(scan.unsolved) < MOST_LISTED:
        scan.unsolved.append((row, column))


def _column(letters: bytes) -> int:
    number = 0
    for letter in letters:
        number = number * 26 + letter - 64
    return number - 1


def _refuse_far(path: Path, sheet: str, scan: SheetScan, archive: zipfile.ZipFile, item: zipfile.ZipInfo) -> None:
    """Refuse a sheet too large to lay out; only then is it worth looking which cells hold something."""
    if scan.last_row * (scan.last_column + 1) <= LARGEST_GRID:
        return
    last_row = last_column = 0
    for data in _chunks(archive, item):
        for letters, row in _FILLED.findall(data):
            last_row, last_column = max(last_row, int(row)), max(last_column, _column(letters))
    if last_row * (last_column + 1) > LARGEST_GRID:
        raise InputError(
            f"{path}, sheet {sheet!r}: its cells reach to {column_letters(last_column)}{last_row}, {last_row * (last_column + 1):,} places in all (at most {LARGEST_GRID:,}); clear stray cells far from the table, or save it as .csv"
        )


_REPEATED = re.compile(rb"number-(rows|columns)-repeated=[\"'](\d{1,12})[\"']")
_ODS_ITEM = re.compile(rb"<table:(table|table-row|table-cell|covered-table-cell)\b([^>]*)>")


def guard_opendocument(path: Path) -> None:
    """Refuse an OpenDocument workbook whose repeated cells would fill more than can be laid out."""
    try:
        with zipfile.ZipFile(path) as archive:
            data = archive.read("content.xml")
    except (zipfile.BadZipFile, KeyError, zlib.error, EOFError, NotImplementedError, RuntimeError, OSError) as problem:
        raise InputError(f"{path}: the workbook is damaged ({' '.join(str(problem).split())[:100]}); open and save it again") from None
    largest = rows = width = cells = repeat = 0
    for found in _ODS_ITEM.finditer(data):
        kind, attributes = found[1], found[2]
        times = _REPEATED.search(attributes)
        count = int(times[2]) if times else 1
        if kind == b"table":
            rows = width = 0
        elif kind == b"table-row":
            cells, repeat = 0, count
            rows += count if rows or repeat < LARGEST_GRID else 0
        else:
            cells += count
            if b"value-type" in attributes or not attributes.rstrip().endswith(b"/"):
                width = max(width, cells)
                largest = max(largest, rows * width)
        if largest > LARGEST_GRID:
            raise InputError(f"{path}: repeated cells fill {largest:,} places (at most {LARGEST_GRID:,}); clear cells far from the table, or save it as .csv")
