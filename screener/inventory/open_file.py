"""Open an inventory as it stands in its file; nothing is interpreted here."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from screener.inventory.open_kind import LAYERS, WORKBOOKS, Kind, file_kind, note_wrong_ending
from screener.records import InputError, Ledger, RawTable


@dataclass(frozen=True)
class Listed:
    """One table of a file. known: headings the dictionary knows; hidden: a sheet that its program hides."""

    name: str
    rows: int
    columns: int
    known: int
    hidden: bool = False


def open_table(path: str | Path, *, sheet: str | None = None, ledger: Ledger) -> RawTable:
    """The table of `path` that looks most like an inventory (or the one named), as it stands."""
    path = Path(path)
    kind = file_kind(path)
    note_wrong_ending(path, kind, ledger)
    if sheet and kind not in WORKBOOKS + LAYERS:
        raise InputError(f"{path}: a {kind} file has no sheets or layers; leave out the sheet {sheet!r}")
    if kind in WORKBOOKS:
        from screener.inventory.open_workbook import open_workbook

        table = open_workbook(path, kind, sheet, ledger)
    elif kind is Kind.TEXT:
        from screener.inventory.open_delimited import open_delimited

        table = open_delimited(path, ledger)
    elif kind in LAYERS:
        from screener.inventory.open_gis import open_layer

        table = open_layer(path, kind, sheet, ledger)
    else:
        from screener.inventory.open_parquet import open_parquet

        table = open_parquet(path, kind, ledger)
    if len(table) == 0:
        where = f", {table.sheet!r}" if table.sheet else ""
        raise InputError(f"{path}{where}: has headings and no rows below them")
    return table


def list_tables(path: str | Path) -> tuple[Listed, ...]:
    """The sheets or layers of a file, in its own order; a file with one table gives one without a name."""
    path = Path(path)
    kind = file_kind(path)
    if kind in WORKBOOKS:
        from screener.inventory.open_workbook import list_sheets

        return tuple(Listed(*sheet) for sheet in list_sheets(path, kind))
    if kind in LAYERS:
        from screener.inventory.open_gis import list_layers

        return tuple(Listed(*layer) for layer in list_layers(path, kind))
    from screener.inventory.header_rows import count_known

    table = open_table(path, ledger=Ledger())
    return (Listed("", len(table), len(table.headings), count_known(list(table.headings))),)
