"""The blank inventory workbook: headings with units, lists of choices, and the dictionary behind them."""

from __future__ import annotations

import datetime
from pathlib import Path

import xlsxwriter

from screener.columns import Attribute, inventory_attributes
from screener.files import whole_file
from screener.units import show, unit_label

ROWS = 20_000  # rows that get a drop-down list
NEEDED = ("joint_id", "nominal_size")
MADE_ON = datetime.datetime(2000, 1, 1)  # fixed, so that equal templates are equal files
INTRODUCTION = (
    "One row per flanged joint on the sheet 'Inventory'. Leave a cell empty where the value is not known; never write 0 for it. "
    "A cell may carry its own unit (150 psi, 10 bar, 7/8 in), which then counts instead of the heading's. "
    "Columns that you don't keep can be deleted, columns of your own can be added. Only the joint's name and a size are needed; what is missing is filled by stated rules."
)
CAUTION = "Screening, not design. The examples are invented."
FORMS = {
    "id": "text, each joint its own",
    "text": "text",
    "count": "whole number",
    "number": "number",
    "quantity": "number",
    "date": "date (2016-05-12) or year",
    "dates": "dates separated by semicolons",
    "category": "one of the choices",
}


def heading_of(attribute: Attribute, units: str) -> str:
    """Heading of an attribute's column, with the unit of a bare number below it."""
    unit = unit_label(attribute.shown_unit(units)) if attribute.dimension else ""
    return f"{attribute.label} ({unit})" if unit else attribute.label


def write_template(path: str | Path, units: str = "us") -> None:
    """Write the blank workbook; units: "us" or "metric"."""
    if units not in ("us", "metric"):
        raise ValueError(f"units: {units!r} is neither 'us' nor 'metric'")
    with whole_file(path) as temporary:
        book = xlsxwriter.Workbook(str(temporary), {"strings_to_formulas": False, "strings_to_urls": False})
        book.set_properties({"title": "Inventory of flanged joints", "created": MADE_ON})
        formats = _formats(book)
        inventory, dictionary, lists = (book.add_worksheet(name) for name in ("Inventory", "Dictionary", "Lists"))
        ranges = _write_lists(lists, formats)
        _write_inventory(inventory, formats, units, ranges)
        _write_dictionary(dictionary, formats, units)
        book.close()


def _formats(book) -> dict:
    base = {"font_name": "Calibri", "font_size": 10, "valign": "top"}
    heading = {**base, "bold": True, "text_wrap": True, "valign": "vcenter", "bottom": 1, "bottom_color": "#9AA5B1"}
    return {
        "plain": book.add_format(base),
        "text": book.add_format({**base, "num_format": "@"}),
        "wrapped": book.add_format({**base, "text_wrap": True}),
        "heading": book.add_format({**heading, "bg_color": "#EEF1F4"}),
        "needed": book.add_format({**heading, "bg_color": "#D3DEEA"}),
        "group": book.add_format({**base, "bold": True, "font_size": 11, "top": 1, "top_color": "#9AA5B1"}),
        "title": book.add_format({**base, "bold": True, "font_size": 16}),
    }


def _write_lists(sheet, formats: dict) -> dict[str, str]:
    """One column of choices per category; returns the range of each."""
    ranges = {}
    for name, attribute in inventory_attributes().items():
        if attribute.kind != "category":
            continue
        k = len(ranges)
        sheet.set_column(k, k, max(14, *(len(choice) + 2 for choice in attribute.choices)))
        sheet.write_string(0, k, f"Choices: {attribute.label}", formats["heading"])
        for row, choice in enumerate(attribute.choices, start=1):
            sheet.write_string(row, k, choice, formats["text"])
        column = xlsxwriter.utility.xl_col_to_name(k)
        ranges[name] = f"=Lists!${column}$2:${column}${len(attribute.choices) + 1}"
    sheet.freeze_panes(1, 0)
    return ranges


def _write_inventory(sheet, formats: dict, units: str, ranges: dict[str, str]) -> None:
    sheet.set_row(0, 48)
    for k, (name, attribute) in enumerate(inventory_attributes().items()):
        text = attribute.kind in ("id", "text", "category")
        sheet.set_column(k, k, max(11, min(24, len(attribute.label) * 0.8 + 2)), formats["text" if text else "plain"])
        sheet.write_string(0, k, heading_of(attribute, units), formats["needed" if name in NEEDED else "heading"])
        sheet.write_comment(0, k, f"{attribute.meaning}\nExample (invented): {attribute.example}", {"x_scale": 1.8, "author": ""})
        if name in ranges:
            sheet.data_validation(
                1,
                k,
                ROWS,
                k,
                {
                    "validate": "list",
                    "source": ranges[name],
                    "error_type": "warning",
                    "error_title": attribute.label[:32],
                    "error_message": "Not one of the choices on the sheet 'Lists'. Keep it anyway?",
                },
            )
    sheet.freeze_panes(1, 1)


def _write_dictionary(sheet, formats: dict, units: str) -> None:
    columns = (("What", 30), ("What it says", 60), ("Written as", 26), ("Bare number means", 18), ("Usual", 26), ("Choices", 60), ("Example (invented)", 24))
    for k, (_, width) in enumerate(columns):
        sheet.set_column(k, k, width, formats["wrapped"])
    sheet.write_string(0, 0, "What each column says", formats["title"])
    sheet.merge_range(1, 0, 1, len(columns) - 1, INTRODUCTION, formats["wrapped"])
    sheet.set_row(1, 44)
    sheet.write_string(2, 0, CAUTION, formats["plain"])
    for k, (text, _) in enumerate(columns):
        sheet.write_string(4, k, text, formats["heading"])
    row, group = 5, ""
    for name, attribute in inventory_attributes().items():
        if attribute.group != group:
            group = attribute.group
            for k in range(len(columns)):
                sheet.write_string(row, k, group if k == 0 else "", formats["group"])
            row += 1
        needed = " (needed)" if name in NEEDED else ""
        unit = unit_label(attribute.shown_unit(units)) if attribute.dimension else ""
        cells = (attribute.label + needed, attribute.meaning, FORMS[attribute.kind], unit, _usual(attribute, units), "; ".join(attribute.choices), attribute.example)
        for k, text in enumerate(cells):
            sheet.write_string(row, k, text, formats["wrapped"])
        row += 1
    sheet.freeze_panes(5, 1)


def _usual(attribute: Attribute, units: str) -> str:
    """The range that is read without a doubt, in the units of the template."""
    limits = attribute.plausible or attribute.possible
    if not limits:
        return ""
    low, high = limits
    if not attribute.dimension:
        return f"{low:g} to {high:g}"
    unit = attribute.shown_unit(units)
    return f"{show(low, attribute.dimension, unit, 3)} to {show(high, attribute.dimension, unit, 3)}"
