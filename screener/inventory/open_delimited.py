"""Delimited text: encoding, delimiter, headings and ragged rows."""

from __future__ import annotations

import csv
import io
from pathlib import Path

import numpy as np
import pandas as pd

from screener.inventory.header_rows import LOOKED_AT, MOST_COLUMNS, find_header, joined_header, name_headings
from screener.records import InputError, Ledger, RawTable, Severity

DELIMITERS = (",", ";", "\t", "|")
LARGEST_TEXT = 3_000_000_000
LONGEST_CELL = 1_000_000


def open_delimited(path: Path, ledger: Ledger) -> RawTable:
    """A delimited text file as text cells."""
    if path.stat().st_size > LARGEST_TEXT:
        raise InputError(f"{path}: is larger than {LARGEST_TEXT / 1e9:.0f} GB; give it as Parquet")
    text = _decode(path, ledger)
    delimiter = _delimiter(text)
    csv.field_size_limit(LONGEST_CELL)
    rows, numbers = [], []
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=delimiter)
    line = 1
    try:
        for row in reader:
            if any(cell.strip() for cell in row):
                rows.append(row)
                numbers.append(line)
            line = reader.line_num + 1
    except csv.Error as problem:
        raise InputError(f"{path}, line {line:,}: can't be split into cells ({problem}); check the quotes there") from None
    if not rows:
        raise InputError(f"{path}: has no rows")
    width = max(len(row) for row in rows[:LOOKED_AT])
    if width > MOST_COLUMNS:
        raise InputError(f"{path}: has {width:,} columns; at most {MOST_COLUMNS:,} are read")
    at, height, score = find_header(rows)
    if score <= 0.0:
        raise InputError(f"{path}: no row of headings found in the first {LOOKED_AT} rows; expected headings such as 'Joint', 'Size', 'Operating pressure (psi)'")
    header = joined_header(rows, at, height)
    return _table(path, header, rows[at + height :], np.array(numbers[at + height :], dtype=np.int64), ledger)


def _decode(path: Path, ledger: Ledger) -> str:
    data = path.read_bytes()
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        encoding = "utf-16"
    elif data.startswith(b"\xef\xbb\xbf"):
        encoding = "utf-8-sig"
    else:
        encoding = "utf-8"
    try:
        text = data.decode(encoding)
    except UnicodeDecodeError:
        if encoding == "utf-16":
            raise InputError(f"{path}: is marked as UTF-16 text and can't be read as such; save it as UTF-8") from None
        text = data.decode("cp1252", errors="replace")
        ledger.finding("encoding_guessed", Severity.NOTES, None, problem="the file is not UTF-8", action="read as Western European (Windows-1252); check accents in names")
    if "\x00" in text:
        count = text.count("\x00")
        if count > 0.2 * len(text):
            raise InputError(f"{path}: is not a text file ({count:,} NUL bytes); save it as UTF-8 text")
        ledger.finding("nul_bytes", Severity.DOUBTS, None, problem=f"{count:,} NUL bytes in the text", action="left out")
        text = text.replace("\x00", "")
    return text


def _delimiter(text: str) -> str:
    """The delimiter that cuts the first lines into the most equal, largest number of cells."""
    lines = [line for line in text[:200_000].splitlines() if line.strip()][:LOOKED_AT]
    best, best_score = ",", -1.0
    for delimiter in DELIMITERS:
        counts = [len(row) for row in csv.reader(lines, delimiter=delimiter)]
        if not counts:
            continue
        common = max(set(counts), key=lambda n: (counts.count(n) * (n > 1), n))
        score = counts.count(common) / len(counts) * np.log2(common) if common > 1 else 0.0
        if score > best_score:
            best, best_score = delimiter, score
    return best


def _table(path: Path, header: list, body: list, numbers: np.ndarray, ledger: Ledger) -> RawTable:
    width = len(header)
    while width and not str(header[width - 1] or "").strip():
        width -= 1  # trailing delimiters make empty headings
    lengths = np.array([len(row) for row in body], dtype=np.int64)
    long = np.array([any(cell.strip() for cell in row[width:]) for row in body], dtype=bool) if (lengths > width).any() else np.zeros(len(body), dtype=bool)
    if long.any():
        where = np.flatnonzero(long)
        extra = np.array([" | ".join(body[i][width:])[:200] for i in where], dtype=object)
        ledger.finding("row_too_long", Severity.DOUBTS, where, values=extra, problem=f"the row has more cells than the {width} headings", action="extra cells not used; check for a delimiter inside a value")
    short = lengths < width
    few = short & (lengths < width - 1)
    ledger.finding("row_too_short", Severity.DOUBTS, few, problem=f"the row has fewer cells than the {width} headings", action="missing cells at its end taken as empty")
    padded = [row[:width] + [""] * (width - len(row)) for row in body]
    frame = pd.DataFrame(padded, columns=range(width), dtype="str")
    frame = frame.mask(frame == "")
    names = name_headings(header[:width])
    return RawTable(path.name, "", names, frame, numbers)
