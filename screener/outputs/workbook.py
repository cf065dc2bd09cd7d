"""The ranked workbook, for people."""

from __future__ import annotations

import tempfile
from pathlib import Path

import numpy as np
import pandas as pd
import xlsxwriter

from screener.columns import inventory_attributes, result_columns
from screener.limit_names import LIMIT_STATES
from screener.outputs.run_folder import whole_file
from screener.outputs.sheet_rows import EXCEL_ROWS, clean_text, put_rows
from screener.outputs.shown import CAUTIONS, Shown, shown_column
from screener.outputs.summary import Summary
from screener.priority.ranking import coverage, rule_counts
from screener.screening import Screening
from screener.units import to_unit

INK, PALE, BAR, RULE = "#1F2A37", "#EEF1F4", "#7C9CBF", "#9AA5B1"
NUMBER_FORMATS = {0: "#,##0", 1: "#,##0.0", 2: "#,##0.00", 3: "#,##0.000"}
MADE_ON = "2000-01-01"  # the workbook's own date, fixed so that equal runs give equal files


class Book:
    """An xlsxwriter workbook with our formats, and the sheets whose rows are added afterwards."""

    def __init__(self, path: Path) -> None:
        import datetime

        self.file = xlsxwriter.Workbook(str(path), {"strings_to_formulas": False, "strings_to_urls": False, "strings_to_numbers": False})
        self.file.set_properties({"title": "Ranking of flanged joints", "created": datetime.datetime.fromisoformat(MADE_ON)})
        base = {"font_name": "Calibri", "font_size": 10, "font_color": INK}
        add = self.file.add_format
        self.plain = add({**base, "valign": "top"})
        self.text = add({**base, "valign": "top", "indent": 1})
        self.wrapped = add({**base, "text_wrap": True, "valign": "top"})
        self.title = add({**base, "bold": True, "font_size": 16})
        self.section = add({**base, "bold": True, "font_size": 12, "bottom": 1, "bottom_color": RULE})
        self.heading = add({**base, "bold": True, "text_wrap": True, "valign": "vcenter", "bg_color": PALE, "bottom": 1, "bottom_color": RULE})
        self.caution = add({**base, "text_wrap": True, "valign": "top", "left": 5, "left_color": INK, "indent": 1})
        self.numbers = {digits: add({**base, "num_format": code, "valign": "top"}) for digits, code in NUMBER_FORMATS.items()}
        self.year = add({**base, "num_format": "0.0", "valign": "top"})
        self.share = add({**base, "num_format": "0 %", "valign": "top"})
        self.later: dict[str, tuple[list[Shown], int]] = {}

    def format_of(self, column: Shown):
        if column.digits is None:
            return self.text
        if "ear installed" in column.heading or column.heading.startswith("Last tightened"):
            return self.year
        return self.numbers[min(column.digits, 3)]

    def table(self, name: str, columns: list[Shown], frozen_columns: int = 0, note: str = ""):
        """A sheet with one table: a note line, headings, rows; frozen, filtered, ready to print."""
        rows = len(columns[0].values) if columns else 0
        cut = EXCEL_ROWS - 3
        if rows > cut:
            note = f"{note} Cut to {cut:,} of {rows:,} rows, the most a sheet holds; the run's CSV and Parquet files have all."
            columns = [Shown(c.heading, c.values[:cut], c.digits, c.width, c.meaning) for c in columns]
            rows = cut
        sheet = self.file.add_worksheet(name)
        sheet.hide_gridlines(2)
        sheet.write_string(0, 0, note, self.plain)
        sheet.set_row(1, 44, self.heading)
        for k, column in enumerate(columns):
            sheet.set_column(k, k, column.width, self.format_of(column))
            sheet.write_string(1, k, column.heading, self.heading)
            if rows:
                value = column.values[0]
                if column.digits is None:
                    text = "" if pd.isna(value) else clean_text(value)
                    sheet.write_string(2, k, text, self.format_of(column))
                elif np.isfinite(value):
                    sheet.write_number(2, k, float(value), self.format_of(column))
                else:
                    sheet.write_blank(2, k, None, self.format_of(column))
        sheet.freeze_panes(2, frozen_columns)
        sheet.autofilter(1, 0, max(rows + 1, 1), max(len(columns) - 1, 0))
        sheet.repeat_rows(1)
        sheet.set_landscape()
        sheet.set_paper(9)
        sheet.fit_to_pages(1, 0)
        sheet.set_footer("&L&8Screening, not design: a licensed engineer decides.&R&8&A, page &P of &N")
        if rows > 1:
            self.later[f"xl/worksheets/sheet{len(self.file.worksheets())}.xml"] = (columns, 3)
        return sheet


def write_workbook(screening: Screening, path: Path, summary: Summary) -> None:
    """Write ranking.xlsx. Sheets: Summary, Ranking, Not ranked, Findings, Assumptions, Coverage, Dictionary, Method."""
    with whole_file(path) as temporary, tempfile.TemporaryDirectory() as folder:
        draft = Path(folder) / "draft.xlsx"
        book = Book(draft)
        _summary_sheet(book, screening, summary)
        _ranking_sheet(book, screening)
        _not_ranked_sheet(book, screening)
        _findings_sheet(book, screening)
        _assumptions_sheet(book, screening)
        _coverage_sheet(book, screening)
        _dictionary_sheet(book, screening.settings.units)
        _method_sheet(book, screening)
        book.file.close()
        put_rows(draft, temporary, book.later)


def _summary_sheet(book: Book, screening: Screening, summary: Summary) -> None:
    sheet = book.file.add_worksheet("Summary")
    sheet.hide_gridlines(2)
    sheet.set_column(0, 0, 34, book.plain)
    sheet.set_column(1, 7, 13, book.plain)
    sheet.set_portrait()
    sheet.set_paper(9)
    sheet.fit_to_pages(1, 0)
    sheet.write_string(0, 0, "Which joints first", book.title)
    row = 1
    for line in summary.about:
        sheet.write_string(row, 0, clean_text(line), book.plain)
        row += 1
    row = _section(book, sheet, row + 1, "What stands out")
    for line in summary.sentences:
        sheet.merge_range(row, 0, row, 7, "", book.wrapped)
        sheet.write_string(row, 0, clean_text(line), book.wrapped)
        sheet.set_row(row, 15 * (1 + len(line) // 140))
        row += 1
    row = _section(book, sheet, row + 1, "Rows of the file")
    for words, count in summary.row_counts:
        sheet.write_string(row, 0, words, book.plain)
        sheet.write_number(row, 1, count, book.numbers[0])
        row += 1
    row = _section(book, sheet, row + 1, "Governing limit state")
    first = row
    for words, counts in (("Limit state", ("joints", "above 1", "median")),):
        sheet.write_string(row, 0, words, book.heading)
        for k, word in enumerate(counts, 1):
            sheet.write_string(row, k, word, book.heading)
    row += 1
    for label, count, beyond, median in summary.governing:
        sheet.write_string(row, 0, label, book.plain)
        sheet.write_number(row, 1, count, book.numbers[0])
        sheet.write_number(row, 2, beyond, book.numbers[0])
        sheet.write_number(row, 3, median, book.numbers[2])
        row += 1
    if summary.governing:
        chart = book.file.add_chart({"type": "bar"})
        chart.add_series(
            {
                "name": "joints",
                "categories": ["Summary", first + 1, 0, row - 1, 0],
                "values": ["Summary", first + 1, 1, row - 1, 1],
                "fill": {"color": BAR},
                "gap": 60,
                "data_labels": {"value": True},
            }
        )
        chart.set_title({"name": "Joints by governing limit state", "name_font": {"size": 10, "color": INK}})
        chart.set_legend({"none": True})
        chart.set_y_axis({"reverse": True, "num_font": {"size": 9}})
        chart.set_x_axis({"major_gridlines": {"visible": False}, "visible": False})
        chart.set_size({"width": 640, "height": 60 + 26 * len(summary.governing)})
        sheet.insert_chart(row + 1, 0, chart)
        row += 3 + (60 + 26 * len(summary.governing)) // 20
    row = _section(book, sheet, row + 1, "Rings: paper against loose use")
    unit = "psi" if screening.settings.units == "us" else "bar"
    heads = ("Ring", "joints", f"stated rating ({unit})", f"loose-ring rating, median ({unit})", "loose / stated, median", "below the paper")
    for k, word in enumerate(heads):
        sheet.write_string(row, k, word, book.heading)
    sheet.set_row(row, 44)
    row += 1
    for label, count, stated, loose, share, below in summary.rings:
        sheet.write_string(row, 0, clean_text(label), book.plain)
        sheet.write_number(row, 1, count, book.numbers[0])
        for k, value in ((2, stated), (3, loose)):
            if np.isfinite(value):
                sheet.write_number(row, k, float(to_unit(value, unit)), book.numbers[0 if unit == "psi" else 1])
        if np.isfinite(share):
            sheet.write_number(row, 4, share, book.numbers[2])
        sheet.write_number(row, 5, below, book.numbers[0])
        row += 1
    row = _section(book, sheet, row + 1, "Cautions")
    for line in CAUTIONS:
        sheet.merge_range(row, 0, row, 7, "", book.caution)
        sheet.write_string(row, 0, line, book.caution)
        sheet.set_row(row, 15 * (1 + len(line) // 135))
        row += 1


def _section(book: Book, sheet, row: int, words: str) -> int:
    for k in range(8):
        sheet.write_blank(row, k, None, book.section)
    sheet.write_string(row, 0, words, book.section)
    return row + 1


# What a printed page holds; the other columns follow on screen.
PRINTED = (
    "rank",
    "joint_id",
    "utilization",
    "governing_limit_state",
    "main_id",
    "zone",
    "nominal_size",
    "dimension_ratio",
    "ring_class",
    "loose_ring_rating",
    "stated_rating",
    "rating_share",
    "operating_pressure",
    "recurrent_surge",
    "year_installed",
    "assumed_inputs",
)


def ranking_columns(screening: Screening, table: pd.DataFrame) -> list[Shown]:
    """The ranking's columns for people, in order: result, limit states, inputs."""
    system = screening.settings.units
    shown: list[Shown] = []
    names = list(PRINTED) + [n for n in table.columns if n not in (*PRINTED, "status", "reason", "position", "row")]
    labels = {name: state.label for name, state in LIMIT_STATES.items()}
    for name in names:
        values = table[name].to_numpy()
        if name == "governing_limit_state":
            values = np.array([labels.get(v, "") for v in values], dtype=object)
            shown.append(Shown("Governing limit state", values, None, 22, result_columns()[name].meaning))
        elif name.startswith("utilization_"):
            state = LIMIT_STATES[name.removeprefix("utilization_")]
            shown.append(Shown(f"Utilization: {state.label}", values.astype(float), 2, 11, state.meaning))
        elif name in result_columns() or name in inventory_attributes():
            shown.append(shown_column(name, values, system))
        else:
            raise KeyError(name)
    shown.append(Shown("Row in file", table["row"].to_numpy(dtype=float), 0, 9, "Row of the joint in the inventory file."))
    return shown


def _ranking_sheet(book: Book, screening: Screening) -> None:
    table = screening.table[screening.table["status"] == "ranked"]
    columns = ranking_columns(screening, table)
    sheet = book.table("Ranking", columns, frozen_columns=2, note="Rank 1 is the joint to look at first. Utilization above 1 is beyond the limit. Screening, not design.")
    last = len(table) + 1
    top = float(np.nanquantile(table["utilization"], 0.99)) if len(table) else 2.0
    sheet.print_area(0, 0, max(last, 2), len(PRINTED) - 1)
    for k, column in enumerate(columns):
        if column.heading.startswith("Utilization"):
            sheet.conditional_format(2, k, max(last, 2), k, {"type": "data_bar", "bar_solid": True, "bar_color": BAR, "min_type": "num", "min_value": 0, "max_type": "num", "max_value": max(2.0, round(top, 1)), "bar_border_color": INK})


def _not_ranked_sheet(book: Book, screening: Screening) -> None:
    table = screening.table[screening.table["status"] != "ranked"]
    columns = [
        Shown("Joint", table["joint_id"].to_numpy(dtype=object), None, 16, ""),
        Shown("Row in file", table["row"].to_numpy(dtype=float), 0, 9, ""),
        Shown("Reason", table["reason"].to_numpy(dtype=object), None, 80, ""),
    ]
    book.table("Not ranked", columns, frozen_columns=1, note="Every row of the file that is not in the ranking, and why.")


def _findings_sheet(book: Book, screening: Screening) -> None:
    frame = screening.findings
    texts = {"severity": ("Severity", 10), "joint_id": ("Joint", 16), "row": ("Row in file", 9), "column": ("Column in file", 20), "value": ("As written", 18), "problem": ("What is wrong", 52), "action": ("What was done", 44), "code": ("Kind", 22)}
    columns = []
    for name, (heading, width) in texts.items():
        if name == "row":
            columns.append(Shown(heading, frame[name].to_numpy(dtype=float, na_value=np.nan), 0, width, ""))
        else:
            columns.append(Shown(heading, frame[name].astype(object).to_numpy(), None, width, ""))
    book.table("Findings", columns, note="blocks: the row can't be ranked; doubts: ranked, less certain; notes: worth knowing. Nothing was changed silently.")


def _assumptions_sheet(book: Book, screening: Screening) -> None:
    rules = rule_counts(screening.inventory.ledger, len(screening.inventory))
    system = screening.settings.units
    known = inventory_attributes()
    typical = []
    for attribute, value, text in zip(rules["attribute"], rules["typical_value"], rules["typical_text"], strict=True):
        unit = known[attribute].shown_unit(system) if attribute in known else ""
        if text:
            typical.append(text)
        elif not np.isfinite(value):
            typical.append("")
        elif unit and unit != "money":
            typical.append(f"{float(to_unit(np.float64(value), unit)):.4g} {unit}")
        else:
            typical.append(f"{value:.6g}" if attribute.startswith(("year", "last")) else f"{value:.4g}")
    label = [known[a].label if a in known else a.replace("_", " ") for a in rules["attribute"]]
    order = np.argsort(rules["origin"].map({"assumed": 0, "derived": 1, "looked_up": 2}).to_numpy(), kind="stable")
    columns = [
        Shown("Attribute", np.array(label, dtype=object)[order], None, 26, ""),
        Shown("Kind", rules["origin"].str.replace("_", " ").to_numpy(dtype=object)[order], None, 11, ""),
        Shown("Joints", rules["joints"].to_numpy(dtype=float)[order], 0, 9, ""),
        Shown("Typical value", np.array(typical, dtype=object)[order], None, 18, ""),
        Shown("Scatter", rules["scatter"].to_numpy(dtype=float)[order], 2, 9, ""),
        Shown("Rule", rules["rule"].to_numpy(dtype=object)[order], None, 60, ""),
        Shown("Source", rules["source"].to_numpy(dtype=object)[order], None, 60, ""),
    ]
    book.table("Assumptions", columns, note="How gaps were filled. Scatter: relative standard deviation of a number, or the chance that a word is wrong. Per joint: assumptions.parquet of the run.")


def _coverage_sheet(book: Book, screening: Screening) -> None:
    inventory = screening.inventory
    headings = inventory.column_of
    frame = coverage(inventory.gaps.origins, headings)
    columns = [
        Shown("Attribute", frame["label"].to_numpy(dtype=object), None, 28, ""),
        Shown("Column in file", frame["column"].to_numpy(dtype=object), None, 28, ""),
        *(Shown(name.replace("_", " "), frame[name].to_numpy(dtype=float), 0, 10, "") for name in ("read", "converted", "looked_up", "derived", "assumed", "missing")),
        Shown("Known from the file (%)", 100.0 * frame["known_share"].to_numpy(), 0, 12, ""),
    ]
    sheet = book.table("Coverage", columns, note="Where each attribute's values come from, in joints.")
    sheet.conditional_format(2, 8, len(frame) + 1, 8, {"type": "data_bar", "bar_solid": True, "bar_color": BAR, "min_type": "num", "min_value": 0, "max_type": "num", "max_value": 100})


def _dictionary_sheet(book: Book, system: str) -> None:
    lines = [("result", c.machine_name, c.label, c.shown_unit(system), c.meaning) for c in result_columns().values()]
    lines += [("limit state", f"utilization_{n}", f"Utilization: {s.label}", "", s.meaning) for n, s in LIMIT_STATES.items()]
    lines += [("inventory", a.machine_name, a.label, a.shown_unit(system), a.meaning) for a in inventory_attributes().values()]
    heads = (("Kind", 11), ("Machine name", 30), ("Label", 30), ("Unit here", 12), ("Meaning", 90))
    columns = [Shown(h, np.array([line[k] for line in lines], dtype=object), None, w, "") for k, (h, w) in enumerate(heads)]
    book.table("Dictionary", columns, note="Names used in ranking.csv and joints.gpkg, and what they mean. In machine names the unit is the last word.")


def _method_sheet(book: Book, screening: Screening) -> None:
    sheet = book.file.add_worksheet("Method")
    sheet.hide_gridlines(2)
    sheet.set_column(0, 0, 120, book.wrapped)
    sheet.set_paper(9)
    sheet.fit_to_pages(1, 0)
    row = 0
    sheet.write_string(row, 0, "Method and cautions", book.title)
    for line in CAUTIONS:
        row += 1
        sheet.write_string(row, 0, line, book.caution)
    row += 2
    sheet.write_string(row, 0, "Limit states", book.section)
    for state in LIMIT_STATES.values():
        row += 1
        sheet.write_string(row, 0, f"{state.label}: {state.meaning} Source: {state.source}", book.wrapped)
    row += 2
    sheet.write_string(row, 0, "Settings of this run", book.section)
    for name, value in screening.settings.as_dict().items():
        row += 1
        sheet.write_string(row, 0, f"{name} = {value}", book.plain)
