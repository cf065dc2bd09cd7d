"""Readings out of logger files, piece by piece: delimited text, Parquet, workbook; wide or long; one logger or many."""

from __future__ import annotations

import warnings
import zlib
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pandas as pd

from screener.pressure.log_layout import Layout, ValueColumn, find_roles, rows_layout, text_layout
from screener.pressure.log_settings import LogSettings, unit_of
from screener.pressure.log_times import UNKNOWN, TimeReader
from screener.pressure.water import ATMOSPHERIC_PRESSURE
from screener.records import InputError

TEXT = (".csv", ".txt", ".tsv", ".dat", ".log", ".gz")
PARQUET = (".parquet", ".pq")
WORKBOOK = (".xlsx", ".xlsm", ".xls", ".xlsb", ".ods")


@dataclass(frozen=True, eq=False)
class Piece:
    """Readings of one logger as they stand in a file. time: int64 ms, UNKNOWN where unreadable; written: numbers as in the file, NaN where
    the cell is empty; pressure: the same in Pa gauge; unreadable: cells that hold something that is no number (bool)."""

    logger: str
    time: np.ndarray
    written: np.ndarray
    pressure: np.ndarray
    unreadable: np.ndarray


class LogFile:
    """One file. problem: in words, when it can't be used at all. doubts: in words. absolute: some readings were absolute pressures."""

    def __init__(self, path: Path, settings: LogSettings) -> None:
        self.path, self.settings = path, settings
        self.times = TimeReader(settings)
        self.problem = ""
        self.absolute = False
        self.ragged_lines = 0
        self.unknown_units: dict[str, int] = {}
        self.ignored: tuple[str, ...] = ()

    def pieces(self) -> Iterator[Piece]:
        suffix = self.path.suffix.lower()
        try:
            if suffix in PARQUET:
                yield from self._parquet()
            elif suffix in WORKBOOK:
                yield from self._workbook()
            else:
                yield from self._text()
        except (OSError, EOFError, zlib.error, ValueError, pd.errors.ParserError) as problem:
            words = str(problem).splitlines() or [type(problem).__name__]
            self.problem = f"can't be read ({words[0][:160]})"

    def _usable(self, layout: Layout | None) -> bool:
        if layout is None or not layout.values:
            self.problem = "has no heading with a time and a pressure, such as 'time, pressure (kPa)'"
            return False
        self.ignored = layout.ignored
        nameless = [column.heading for column in layout.values if not column.unit]
        if nameless and layout.unit is None:
            self.problem = f"names no pressure unit in heading {nameless[0]!r}, nor do the settings (unit = 'kPa')"
            return False
        return True

    def _text(self) -> Iterator[Piece]:
        layout = text_layout(self.path, self.settings)
        if not self._usable(layout):
            return
        names = list(range(layout.columns + 4))  # a few more than the heading, so that a long line is seen and not lost
        decimal = "," if layout.delimiter == ";" else "."
        text = {k: "string" for k in (*layout.time, layout.logger, layout.unit) if k is not None}
        with warnings.catch_warnings(record=True) as seen:
            warnings.simplefilter("always")
            chunks = pd.read_csv(
                self.path, sep=layout.delimiter, skiprows=layout.skip, header=None, names=names, index_col=False, encoding=layout.encoding, encoding_errors="replace",
                dtype=text, decimal=decimal, chunksize=self.settings.chunk_rows, on_bad_lines="warn", skipinitialspace=True, comment="#" if layout.skip else None,
            )  # fmt: skip
            for frame in chunks:
                self.ragged_lines += int(frame[names[layout.columns :]].notna().any(axis=1).sum())
                yield from self._frame(frame, layout)
        self.ragged_lines += sum(str(warning.message).count("Skipping line") for warning in seen)

    def _parquet(self) -> Iterator[Piece]:
        import pyarrow.parquet

        with pyarrow.parquet.ParquetFile(self.path) as table:
            layout = find_roles([str(name) for name in table.schema_arrow.names], self.path.stem, {}, self.settings)
            if not self._usable(layout):
                return
            for batch in table.iter_batches(batch_size=self.settings.chunk_rows):
                frame = batch.to_pandas()
                if len(frame.columns) != layout.columns:  # times kept as the frame's index
                    frame = frame.reset_index()[list(table.schema_arrow.names)]
                frame.columns = range(layout.columns)
                yield from self._frame(frame, layout)

    def _workbook(self) -> Iterator[Piece]:
        usable, problem = 0, ""
        try:
            sheets = pd.read_excel(self.path, sheet_name=None, header=None, engine="calamine", dtype=object)
        except Exception as refused:  # the reader of workbooks has its own kinds of failure
            raise ValueError(str(refused) or type(refused).__name__) from refused
        for name, sheet in sheets.items():
            head = [[("" if pd.isna(cell) else str(cell)).strip() for cell in row] for row in sheet.head(60).itertuples(index=False)]
            stem = self.path.stem if len(sheets) == 1 else str(name)
            layout = rows_layout(head, [bool(row) and row[0].startswith("#") for row in head], stem, self.settings)
            if not self._usable(layout):
                problem = problem or self.problem
                continue
            usable += 1
            frame = sheet.iloc[layout.skip :]
            frame.columns = range(frame.shape[1])
            yield from self._frame(frame, layout)
        self.problem = "" if usable else problem or "holds no sheet with readings"

    def _frame(self, frame: pd.DataFrame, layout: Layout) -> Iterator[Piece]:
        when = frame[layout.time[0]]
        if len(layout.time) == 2:
            when = _joined(when, frame[layout.time[1]])
        time = self.times.read(when)
        for column in layout.values:
            written, unreadable = _numbers(frame[column.position], layout.delimiter == ";")
            units = np.full(len(frame), column.unit, dtype=object) if layout.unit is None else self._units(frame[layout.unit], column)
            pressure, known = self._pressure(written, units)
            written = np.where(known, written, np.nan)
            if layout.logger is None:
                yield Piece(column.logger, time, written, pressure, unreadable)
                continue
            codes, names = pd.factorize(frame[layout.logger].astype("string").str.strip().to_numpy(dtype=object, na_value=""))
            order = np.argsort(codes, kind="stable")
            for part in np.split(order, np.flatnonzero(np.diff(codes[order])) + 1):
                name = str(names[codes[part[0]]]) or f"{self.path.stem} (no name)"
                yield Piece(name, time[part], written[part], pressure[part], unreadable[part])

    def _units(self, column: pd.Series, value: ValueColumn) -> np.ndarray:
        return column.astype("string").str.strip().replace("", pd.NA).to_numpy(dtype=object, na_value=value.unit)

    def _pressure(self, written: np.ndarray, units: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        pressure, known = np.full(len(written), np.nan), np.zeros(len(written), dtype=bool)
        for unit in pd.unique(units):
            rows = units == unit
            meaning = unit_of(str(unit))
            if meaning is None:
                self.unknown_units[str(unit)] = self.unknown_units.get(str(unit), 0) + int(rows.sum())
                continue
            factor, absolute = meaning
            self.absolute |= absolute
            pressure[rows] = written[rows] * factor - (ATMOSPHERIC_PRESSURE if absolute else 0.0)
            known |= rows
        return pressure, known


def _numbers(column: pd.Series, decimal_comma: bool) -> tuple[np.ndarray, np.ndarray]:
    if pd.api.types.is_numeric_dtype(column):
        return column.to_numpy(dtype=float, na_value=np.nan), np.zeros(len(column), dtype=bool)
    texts = column.astype("string").str.strip().replace("", pd.NA)
    plain = texts.str.replace(",", ".", regex=False) if decimal_comma else texts
    numbers = pd.to_numeric(plain, errors="coerce").to_numpy(dtype=float, na_value=np.nan)
    return numbers, (np.isnan(numbers) & texts.notna().to_numpy())


def _joined(date: pd.Series, clock: pd.Series) -> pd.Series:
    days = date.astype("string").str.strip()
    if len(days) and days.dropna().str.fullmatch(r"\d{4}-\d\d-\d\d 00:00:00").all():
        days = days.str.slice(0, 10)  # a workbook's date
    return days + " " + clock.astype("string").str.strip()


def log_files(paths: str | Path | list[str | Path]) -> list[Path]:
    """The logger files of a folder, of its folders, or of a list of files and folders, in order of name."""
    given = [paths] if isinstance(paths, (str, Path)) else list(paths)
    found: list[Path] = []
    for path in map(Path, given):
        if path.is_dir():
            endings = TEXT + PARQUET + WORKBOOK
            found += sorted(p for p in path.rglob("*") if p.is_file() and p.suffix.lower() in endings and not p.name.startswith((".", "~$")))
        elif path.is_file():
            found.append(path)
        else:
            raise InputError(f"{path}: there is no such file or folder of pressure logs")
    if not found:
        raise InputError(f"{given[0]}: no pressure logs found; expected files ending in .csv, .txt, .parquet or .xlsx")
    return list(dict.fromkeys(found))
