"""The register as a workbook: titles, a heading over two rows, blank rows, section rows, notes, lists."""

from __future__ import annotations

import datetime
from pathlib import Path

import pandas as pd
import xlsxwriter
from xlsxwriter.utility import xl_col_to_name

from .errors import Formula
from .network import INVENTED, UTILITY, ZONES
from .wording import COLUMNS, KEYS

CREATED = datetime.datetime(2026, 3, 14, 9, 0, 0)
SHEET = "Flange register"
FOOTER = "END OF REGISTER - INVENTED DATA"
FOOTER_GAP = 3
HEADER_ROW = 5  # 0-based: under four title rows and a blank one
READ_ME = (
    INVENTED,
    "",
    f"{UTILITY} (invented): register of flanged joints on HDPE pressure mains, as it has grown since 1985.",
    "The sheet 'Flange register' is a copy of what the office keeps. Nobody has cleaned it.",
    "Harbour, Upland, Trunk and Meadow are in US units; Fenside came from another (invented) district and is metric.",
    "Pressures are gauge. Where a cell has no unit the heading may have one; where neither has, ask.",
    "Torque was not written down before 1997. Ring classes are from paint marks and delivery notes.",
    "Coordinates: EPSG:32631, in the open North Sea on purpose.",
    "Errors have been planted: they are listed beside the tests of the program that this file is for.",
)
LISTS = {
    "Ring class": ("B", "D", "E", "F", "150", "PN10", "PN16"),
    "Pipe material": ("PE3408", "PE3608", "PE4710", "PE100"),
    "Location type": ("buried", "chamber", "above ground"),
    "Mates with": ("HDPE", "DI", "steel", "valve", "blind"),
    "Crew": ("C1", "C2", "C3", "C4", "C5", "C6", "C7", "C8", "D1", "D2"),
}


def write_cell(sheet, row: int, column: int, value, formats) -> None:
    """Text always as text, so that nothing in it turns into a formula."""
    if value is None:
        return
    if isinstance(value, Formula):
        names = {key: xl_col_to_name(k) for k, key in enumerate(KEYS)}
        sheet.write_formula(row, column, value.text.format(row=row + 1, **names), None, value.value)
    elif isinstance(value, datetime.datetime):
        sheet.write_datetime(row, column, value, formats["date"])
    elif isinstance(value, str):
        sheet.write_string(row, column, value)
    else:
        sheet.write_number(row, column, value)


def write_headings(sheet, formats) -> None:
    sheet.merge_range(0, 0, 0, 11, f"{UTILITY} - INVENTED, no such utility exists", formats["title"])
    sheet.write_string(1, 0, "Register of flanged joints, HDPE pressure mains (all values made up by a script; evidence of nothing)")
    sheet.write_string(2, 0, "Printed 14 March 2026. US units unless the cell says otherwise.")
    sheet.write_string(3, 0, "Queries: Asset Records, ext. 000")
    starts = [k for k, (_, upper, _) in enumerate(COLUMNS) if upper]
    for i, first in enumerate(starts):
        last = (starts[i + 1] if i + 1 < len(starts) else len(COLUMNS)) - 1
        if not COLUMNS[first][2]:
            sheet.merge_range(HEADER_ROW, first, HEADER_ROW + 1, first, COLUMNS[first][1], formats["head"])
            first += 1
            if first > last:
                continue
        elif last > first:
            sheet.merge_range(HEADER_ROW, first, HEADER_ROW, last, COLUMNS[first][1], formats["head"])
        else:
            sheet.write_string(HEADER_ROW, first, COLUMNS[first][1], formats["head"])
    for k, (_, _, lower) in enumerate(COLUMNS):
        if lower:
            sheet.write_string(HEADER_ROW + 1, k, lower, formats["head"])


def write_register(sheet, cells: pd.DataFrame, order: list[int], formats) -> list[int]:
    """Writes the rows; returns the sheet row (1-based) of each entry of `order`."""
    write_headings(sheet, formats)
    at, zone, main, rows = HEADER_ROW + 2, "", "", []
    table = cells.to_numpy()
    for index in order:
        joint_zone, joint_main = str(cells.at[index, "zone"]).title(), cells.at[index, "main"]
        if joint_zone != zone and zone:
            at += 2
        elif joint_main != main and main:
            at += 1
        zone, main = joint_zone, joint_main
        for k, value in enumerate(table[index]):
            write_cell(sheet, at, k, value, formats)
        rows.append(at + 1)
        at += 1
    sheet.write_string(at - 1 + FOOTER_GAP, 0, FOOTER)
    sheet.freeze_panes(HEADER_ROW + 2, 1)
    sheet.set_landscape()
    sheet.set_paper(8)  # A3
    sheet.fit_to_pages(2, 0)
    sheet.repeat_rows(HEADER_ROW, HEADER_ROW + 1)
    sheet.set_row(HEADER_ROW + 1, 30)
    sheet.set_header("&LINVENTED DATA&R&P of &N")
    sheet.set_column(0, 0, 16)
    sheet.set_column(1, len(COLUMNS) - 1, 11)
    return rows


def write_workbook(path: Path, cells: pd.DataFrame, order: list[int]) -> list[int]:
    """The whole workbook; returns sheet rows as `write_register`."""
    book = xlsxwriter.Workbook(str(path), {"default_date_format": "dd/mm/yyyy"})
    book.set_properties({"title": f"{UTILITY} (invented)", "comments": INVENTED, "created": CREATED})
    formats = {
        "title": book.add_format({"bold": True, "font_size": 14, "font_color": "#9C2A00", "text_wrap": True}),
        "head": book.add_format({"bold": True, "text_wrap": True, "valign": "top", "align": "center", "bg_color": "#E4E4DC", "border": 1}),
        "date": book.add_format({"num_format": "dd/mm/yyyy"}),
        "wrap": book.add_format({"text_wrap": True, "valign": "top"}),
    }
    notes = book.add_worksheet("Read me")
    notes.set_column(0, 0, 100)
    notes.fit_to_pages(1, 0)
    notes.set_row(0, 60)
    for k, line in enumerate(READ_ME):
        notes.write_string(k, 0, line, formats["title"] if k == 0 else formats["wrap"])
    register = book.add_worksheet(SHEET)
    rows = write_register(register, cells, order, formats)
    lists = book.add_worksheet("Lists")
    for k, (heading, words) in enumerate({**LISTS, "Supply zone": tuple(ZONES)}.items()):
        lists.write_string(0, k, heading, formats["head"])
        for i, word in enumerate(words):
            lists.write_string(i + 1, k, word)
    register.activate()
    book.close()
    return rows
