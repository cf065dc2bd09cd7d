"""Delimited text: encoding, delimiter, headings and ragged rows. Every cell stays text."""

from __future__ import annotations

import codecs
import csv
import re
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass, field
from itertools import islice
from math import log2
from pathlib import Path

import numpy as np

from screener.inventory.header_rows import EXPECTED, LOOKED_AT, MOST_COLUMNS, Header, count_known, find_header, joined_header
from screener.inventory.open_cells import Rows, finish
from screener.records import InputError, Ledger, RawTable, Severity

DELIMITERS = (",", ";", "\t", "|")
LARGEST_TEXT = 3_000_000_000
LONGEST_CELL = 1_000_000
MOST_LINES = 500
"""Lines one quoted cell may have."""
SAMPLE_LINES = 400
LONGEST_SHOWN = 500
_PIECE = 4 << 20
_SAYS_DELIMITER = re.compile(r"\ufeff?sep=(.)", re.IGNORECASE)


@dataclass(frozen=True)
class _Text:
    """How the file is written. said: the delimiter its first line names, as in "sep=;"."""

    path: Path
    encoding: str
    errors: str
    nul: int

    def lines(self) -> Iterator[str]:
        with open(self.path, encoding=self.encoding, errors=self.errors, newline="") as stream:
            while line := stream.readline(LONGEST_CELL * 2):
                yield line.replace("\x00", "") if self.nul else line


@dataclass
class _Records:
    """Rows of cells with their numbers; keeps what is odd about them.

    A row's number is the one a spreadsheet program shows: blank lines count,
    a line break inside a quoted cell does not.
    """

    text: _Text
    delimiter: str
    skip: int
    multiline: int = 0
    swallowed: list[int] = field(default_factory=list)
    _open: list[str] = field(default_factory=list)
    _line: int = 0

    def _fed(self) -> Iterator[str]:
        for line in islice(self.text.lines(), self.skip, None):
            self._line += 1
            self._open.append(line)
            if len(self._open) > MOST_LINES:
                raise self._unclosed()
            yield line

    def __iter__(self) -> Iterator[tuple[int, list[str]]]:
        reader = csv.reader(self._fed(), delimiter=self.delimiter)
        number = 0
        while True:
            self._open.clear()
            try:
                row = next(reader, None)
            except csv.Error as problem:
                raise InputError(f"{self.text.path}, line {self._first_line:,}: can't be split into cells ({problem}); check the quotes there") from None
            if row is None:
                return
            number += 1
            if len(self._open) > 1:
                self._look_at_lines(number, row)
            yield number, row

    @property
    def _first_line(self) -> int:
        return self.skip + self._line - len(self._open) + 1

    def _unclosed(self) -> InputError:
        return InputError(f'{self.text.path}, line {self._first_line:,}: a quote (") opens there and is not closed within the next rows; close it, or double it where it means inches')

    def _look_at_lines(self, number: int, row: list[str]) -> None:
        if "".join(self._open).count('"') % 2:
            raise self._unclosed()
        self.multiline += 1
        commas = max(cell.count(self.delimiter) for cell in row)
        if commas >= max(len(row) - 1, 2):
            self.swallowed.append(number)


def open_delimited(path: Path, ledger: Ledger) -> RawTable:
    """A delimited text file as text cells."""
    if path.stat().st_size > LARGEST_TEXT:
        raise InputError(f"{path}: is larger than {LARGEST_TEXT / 1e9:.0f} GB; give it as Parquet")
    csv.field_size_limit(LONGEST_CELL)
    text = _how_written(path, ledger)
    sample = [line.rstrip("\r\n") for line in islice(text.lines(), SAMPLE_LINES)]
    said = _SAYS_DELIMITER.fullmatch(sample[0]) if sample else None
    delimiter = said[1] if said else _delimiter(sample)
    records = _Records(text, delimiter, 1 if said else 0)
    top = list(islice(((number, row) for number, row in records if any(cell.strip() for cell in row)), LOOKED_AT))
    if not top:
        raise InputError(f"{path}: has no cells")
    rows = [row for _, row in top]
    header = find_header(rows)
    width = max(map(len, rows))
    if width > MOST_COLUMNS:
        raise InputError(f"{path}: has {width:,} columns; at most {MOST_COLUMNS:,} are read")
    if header is None:
        raise InputError(f"{path}: no row of headings found in the first {LOOKED_AT} filled rows; {EXPECTED}")
    return _table(path, _Records(text, delimiter, records.skip), top, header, ledger)


def _how_written(path: Path, ledger: Ledger) -> _Text:
    """Encoding and NUL bytes, found in one pass."""
    encoding, valid, zeros, size = "utf-8", True, 0, 0
    with open(path, "rb") as stream:
        start = stream.read(4)
        stream.seek(0)
        if start.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)):
            encoding = "utf-32" if start == codecs.BOM_UTF32_LE else "utf-16"
        elif start.startswith(codecs.BOM_UTF8):
            encoding = "utf-8-sig"
        decoder = codecs.getincrementaldecoder(encoding)()
        while piece := stream.read(_PIECE):
            size += len(piece)
            if valid:
                try:
                    characters = decoder.decode(piece)
                    zeros += characters.count("\x00") if encoding.startswith("utf-16") else piece.count(b"\x00")
                    continue
                except UnicodeDecodeError:
                    valid = False
            zeros += piece.count(b"\x00")
    if encoding.startswith(("utf-16", "utf-32")) and not valid:
        raise InputError(f"{path}: is marked as {encoding.upper()} text and can't be read as such; save it as UTF-8")
    if zeros > 0.2 * size:
        raise InputError(f"{path}: is not a text file, or UTF-16 without its mark ({zeros:,} NUL bytes); save it as UTF-8 text")
    if zeros:
        ledger.finding("nul_bytes", Severity.DOUBTS, None, problem=f"{zeros:,} NUL bytes in the text", action="left out")
    if not valid:
        ledger.finding("encoding_guessed", Severity.NOTES, None, problem="the file is not UTF-8", action="read as Western European (Windows-1252); check accents in names")
        return _Text(path, "cp1252", "replace", zeros)
    return _Text(path, encoding, "strict" if not encoding.startswith("utf-8") else "replace", zeros)


def _delimiter(lines: list[str]) -> str:
    """The delimiter that cuts the first lines into known headings and into equal numbers of cells."""
    lines = [line[: LONGEST_CELL // 2] for line in lines if line.strip()][: LOOKED_AT * 2]
    best, best_score = ",", -1.0
    for delimiter in DELIMITERS:
        try:
            rows = list(csv.reader(lines, delimiter=delimiter))
        except csv.Error:
            continue
        counts = Counter(len(row) for row in rows if len(row) > 1)
        if not counts:
            continue
        common, often = max(counts.items(), key=lambda item: (item[1], item[0]))
        known = max(count_known(row[:MOST_COLUMNS]) for row in rows[:LOOKED_AT])
        score = often / len(rows) * log2(common) + known
        if score > best_score:
            best, best_score = delimiter, score
    return best


def _table(path: Path, records: _Records, top: list, header: Header, ledger: Ledger) -> RawTable:
    rows = [row for _, row in top]
    heads = rows[header.at : header.at + header.height]
    headings = joined_header(rows, header.at, header.height)
    width = len(headings)
    while width and not str(headings[width - 1] or "").strip():
        width -= 1  # trailing delimiters make empty headings
    store = Rows(width, [_cut(row, width) for row in heads if count_known(row) or header.height == 1])
    long: list[tuple[int, str]] = []
    short: list[int] = []
    last = top[header.at + header.height - 1][0]
    for number, row in records:
        if number <= last:
            continue
        if len(row) != width:
            if len(row) > width:
                extra = [cell for cell in row[width:] if cell.strip()]
                if extra:
                    long.append((number, " | ".join(row[width:])))
            elif any(row):
                short.append(number)
            row = _cut(row, width)
        store.add(row, number)
    table = finish(path, "", headings[:width], store, ledger).table
    _note_ragged(table, width, long, short, ledger)
    _note_quotes(table, records, ledger)
    return table


def _cut(row: list[str], width: int) -> list[str]:
    return row[:width] + [""] * (width - len(row))


def _positions(table: RawTable, numbers: list[int]) -> np.ndarray:
    return np.flatnonzero(np.isin(table.row_numbers, np.array(numbers, dtype=np.int64)))


def _note_ragged(table: RawTable, width: int, long: list[tuple[int, str]], short: list[int], ledger: Ledger) -> None:
    if long:
        kept = dict(long)
        where = _positions(table, list(kept))
        extra = [kept[int(number)][:LONGEST_SHOWN] for number in table.row_numbers[where]]
        ledger.finding("row_too_long", Severity.DOUBTS, where, values=np.array([*extra, None], dtype=object)[:-1], problem=f"the row has more cells than the {width} headings", action="extra cells not used; check for a delimiter inside a value")
    if short:
        where = _positions(table, short)
        usual = len(where) > 0.5 * len(table)  # some programs leave out the empty cells at a row's end
        ledger.finding("row_too_short", Severity.NOTES if usual else Severity.DOUBTS, where, problem=f"the row has fewer cells than the {width} headings", action="missing cells at its end taken as empty")


def _note_quotes(table: RawTable, records: _Records, ledger: Ledger) -> None:
    if records.multiline:
        ledger.finding("line_breaks_in_cells", Severity.NOTES, None, problem=f"{records.multiline:,} rows have line breaks inside quoted cells", action="rows are numbered as a spreadsheet program shows them, not as lines of the text")
    if records.swallowed:
        ledger.finding("row_in_a_cell", Severity.DOUBTS, _positions(table, records.swallowed), problem="a quoted cell holds what looks like whole rows; a quote may be missing", action="kept as one cell; check the quotes of this row")
