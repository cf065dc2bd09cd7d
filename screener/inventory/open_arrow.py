"""Arrow tables to cells: compact types, nothing interpreted."""

from __future__ import annotations

import json

import numpy as np
import pandas as pd
import pyarrow as pa
import pyarrow.compute as pc

from screener.inventory.header_rows import MOST_COLUMNS, name_headings
from screener.inventory.open_cells import MOST_CELLS, note_error_texts, note_twice, some_of, without_blanks
from screener.records import InputError, Ledger, RawTable, Severity

EXACT_AS_FLOAT = 2**53


def guard_size(path, rows: int, columns: int) -> None:
    """Refuse more cells than can be held, before they are read."""
    if columns > MOST_COLUMNS:
        raise InputError(f"{path}: has {columns:,} columns; at most {MOST_COLUMNS:,} are read")
    if rows * columns > MOST_CELLS:
        raise InputError(f"{path}: has {rows:,} rows and {columns:,} columns; at most {MOST_CELLS:,} cells are read; give it in parts")


def table_of(path, layer: str, table: pa.Table, numbers: np.ndarray, ledger: Ledger, places=(None, None, None)) -> RawTable:
    """An Arrow table without its geometry, as a RawTable."""
    guard_size(path, len(table), table.num_columns)
    names, columns, binary, recoded = [], [], [], []
    for name, column in zip(table.column_names, table.columns, strict=True):
        cells, odd = cells_of(column)
        if cells is None:
            binary.append(name)
            continue
        if odd:
            recoded.append(name)
        names.append(name)
        columns.append(cells)
    if binary:
        ledger.finding("binary_columns", Severity.NOTES, None, problem=f"{len(binary)} columns hold binary data: {some_of(binary)}", action="left out")
    if recoded:
        ledger.finding("encoding_guessed", Severity.NOTES, None, problem=f"text that is not UTF-8 in {some_of(recoded)}", action="read as Western European (Windows-1252); check accents in names")
    if not columns:
        raise InputError(f"{path}{', ' + repr(layer) if layer else ''}: has shapes and no attributes")
    headings = name_headings(names)
    note_twice(headings, ledger)
    frame = pd.DataFrame(dict(enumerate(columns)), index=range(len(table)), columns=range(len(columns)))
    note_error_texts(frame, headings, ledger)
    return RawTable(path.name, layer, headings, frame, numbers, *places)


def cells_of(column: pa.ChunkedArray) -> tuple[pd.Series | None, bool]:
    """(cells, whether text had to be decoded from another encoding); None for binary data that is no text."""
    kind = column.type
    if isinstance(kind, pa.BaseExtensionType):
        column = pa.chunked_array([chunk.storage for chunk in column.chunks], type=kind.storage_type)
        kind = column.type
    if pa.types.is_null(kind):
        return pd.Series(np.full(len(column), None, dtype=object)), False
    if pa.types.is_string(kind) or pa.types.is_large_string(kind) or pa.types.is_string_view(kind):
        return _text(column.cast(pa.large_string()))
    if pa.types.is_binary(kind) or pa.types.is_large_binary(kind) or pa.types.is_fixed_size_binary(kind) or pa.types.is_binary_view(kind):
        return _text_in_bytes(column.cast(pa.large_binary()))
    if pa.types.is_dictionary(kind):
        plain = pa.types.is_string(kind.value_type) or pa.types.is_large_string(kind.value_type)
        if not plain:
            return cells_of(column.cast(kind.value_type))
        return column.to_pandas(), False
    if pa.types.is_integer(kind):
        return _whole_numbers(column), False
    if pa.types.is_decimal(kind):
        return column.cast(pa.float64()).to_pandas(), False
    if pa.types.is_timestamp(kind) or pa.types.is_date(kind):
        return _dates(column), False
    if pa.types.is_floating(kind) or pa.types.is_boolean(kind):
        return column.to_pandas(), False
    return _described(column), False


def _text(column: pa.ChunkedArray) -> tuple[pd.Series, bool]:
    try:
        column.validate(full=True)
    except pa.ArrowInvalid:
        return _decoded(column.cast(pa.large_binary()), "cp1252"), True
    return without_blanks(column).to_pandas(), False


def _text_in_bytes(column: pa.ChunkedArray) -> tuple[pd.Series | None, bool]:
    try:
        return _decoded(column, "utf-8"), False
    except UnicodeDecodeError:
        return None, False


def _decoded(column: pa.ChunkedArray, encoding: str) -> pd.Series:
    errors = "strict" if encoding == "utf-8" else "replace"
    distinct = pc.unique(column)
    words = pa.array([None if value is None else value.decode(encoding, errors) for value in distinct.to_pylist()], pa.large_string())
    return without_blanks(words.take(pc.index_in(column, value_set=distinct).combine_chunks())).to_pandas()


def _whole_numbers(column: pa.ChunkedArray) -> pd.Series:
    """Integers; with empty cells as floats where those are exact."""
    if not column.null_count:
        return column.to_pandas()
    ends = pc.min_max(column).as_py()
    if ends["min"] is None or max(abs(ends["min"]), abs(ends["max"])) < EXACT_AS_FLOAT:
        return column.to_pandas()
    return without_blanks(column.cast(pa.large_string())).to_pandas()


def _dates(column: pa.ChunkedArray) -> pd.Series:
    """Dates and times as the file shows them, without a time zone."""
    zone = column.type.tz if pa.types.is_timestamp(column.type) else None
    if zone:
        column = pc.local_timestamp(column)
    if pa.types.is_date(column.type):
        column = column.cast(pa.timestamp("ms"))
    return column.to_pandas()


def _described(column: pa.ChunkedArray) -> pd.Series:
    """Times of day, durations, lists and structures: as text."""
    if pa.types.is_nested(column.type):
        texts = [None if value is None else json.dumps(value, default=str, ensure_ascii=False) for value in column.to_pylist()]
    else:
        texts = [None if value is None else str(value) for value in column.to_pylist()]
    return pa.chunked_array([pa.array(texts, pa.large_string())]).to_pandas()
