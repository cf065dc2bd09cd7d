"""Large sheets: rows written straight as SpreadsheetML into a workbook made by xlsxwriter.

xlsxwriter makes headings, formats, filters and the first data row; that row
tells which style each column has, and the remaining rows are put behind it.
Text is always inline text, so a cell that begins with = + - @ stays text.
"""

from __future__ import annotations

import re
import zipfile
from collections.abc import Iterator
from pathlib import Path
from xml.sax.saxutils import escape

import numpy as np
import pandas as pd

from screener.outputs.shown import Shown

ROWS_AT_ONCE = 20_000
EXCEL_ROWS = 1_048_576
EXCEL_TEXT = 32_767
# Characters XML 1.0 can't carry.
_UNPRINTABLE = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\ud800-\udfff\ufffe\uffff]")


def clean_text(value: object) -> str:
    """A cell's text: characters that a workbook can't hold become a replacement character."""
    return _UNPRINTABLE.sub("�", str(value))[:EXCEL_TEXT]


def cell_texts(column: Shown, style: str) -> np.ndarray:
    """The <c> elements of one column, as an object array of text."""
    mark = f' s="{style}"' if style else ""
    empty = f"<c{mark}/>"
    values = np.asarray(column.values)
    if values.dtype.kind in "fiu":
        numbers = values.astype(float)
        code, unique = pd.factorize(np.round(numbers, 10))
        made = [f"<c{mark}><v>{value:.8g}</v></c>" if np.isfinite(value) else empty for value in unique]
    else:
        code, unique = pd.factorize(pd.Series(values, dtype=object))
        made = []
        for value in unique:
            text = clean_text(value)
            keep = ' xml:space="preserve"' if text != text.strip() or "\n" in text else ""
            made.append(f'<c{mark} t="inlineStr"><is><t{keep}>{escape(text)}</t></is></c>' if text else empty)
    return np.array([*made, empty], dtype=object)[code]


def rows_xml(columns: list[Shown], styles: list[str], first_row: int, skip: int) -> Iterator[str]:
    """<row> elements for the data rows after the first `skip`; `first_row` is the sheet row of data row 0."""
    count = len(columns[0].values)
    for start in range(skip, count, ROWS_AT_ONCE):
        stop = min(start + ROWS_AT_ONCE, count)
        part = [
            cell_texts(Shown(c.heading, c.values[start:stop], c.digits, c.width, c.meaning), style)
            for c, style in zip(columns, styles, strict=True)
        ]
        lines = [f'<row r="{first_row + start + i}">{"".join(cells)}</row>' for i, cells in enumerate(zip(*part, strict=True))]
        yield "".join(lines)


def styles_of_row(sheet_xml: str, row: int, columns: int) -> list[str]:
    """Style index of each cell of a row that xlsxwriter has written, "" where none."""
    found = re.search(rf'<row r="{row}"[^>]*>(.*?)</row>', sheet_xml, re.S)
    styles = [""] * columns
    if found:
        for reference, style in re.findall(r'<c r="([A-Z]+)\d+"(?: s="(\d+)")?', found.group(1)):
            at = 0
            for letter in reference:
                at = at * 26 + ord(letter) - 64
            styles[at - 1] = style
    return styles


def put_rows(workbook: Path, target: Path, sheets: dict[str, tuple[list[Shown], int]]) -> None:
    """Copy a workbook, adding rows to some sheets.

    sheets: sheet XML name ("xl/worksheets/sheet2.xml") -> (columns, sheet row of
    the first data row, which xlsxwriter has written already).
    """
    with zipfile.ZipFile(workbook) as source, zipfile.ZipFile(target, "w", zipfile.ZIP_DEFLATED, compresslevel=2) as result:
        for item in source.infolist():
            entry = zipfile.ZipInfo(item.filename, (1980, 1, 1, 0, 0, 0))
            entry.compress_type = zipfile.ZIP_DEFLATED
            if item.filename not in sheets:
                result.writestr(entry, source.read(item))
                continue
            columns, first_row = sheets[item.filename]
            xml = source.read(item).decode("utf-8")
            head, tail = xml.split("</sheetData>", 1)
            styles = styles_of_row(head, first_row, len(columns))
            last = first_row + len(columns[0].values) - 1
            head = re.sub(r'<dimension ref="([A-Z]+\d+:[A-Z]+)\d+"/>', rf'<dimension ref="\g<1>{last}"/>', head)
            with result.open(entry, "w", force_zip64=True) as stream:
                stream.write(head.encode("utf-8"))
                for piece in rows_xml(columns, styles, first_row, skip=1):
                    stream.write(piece.encode("utf-8"))
                stream.write(("</sheetData>" + tail).encode("utf-8"))
