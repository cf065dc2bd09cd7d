"""What `check` shows and writes: understanding, coverage, findings, a mapping to edit."""

from __future__ import annotations

import sys
from pathlib import Path

from screener.columns import inventory_attributes
from screener.inventory.mapping_file import write_mapping
from screener.inventory.read import Inventory
from screener.outputs.run_folder import make_folder
from screener.outputs.write_run import guard_formulas, write_csv
from screener.priority.ranking import coverage, findings_frame


def write_check(inventory: Inventory, folder: str | Path) -> None:
    """findings.csv, coverage.csv and mapping.toml in `folder`."""
    folder = make_folder(folder)
    findings = findings_frame(inventory.ledger, inventory.raw.row_numbers, inventory.joint_id, inventory.raw.sheet, inventory.column_of)
    write_csv(guard_formulas(findings.drop(columns="position")), folder / "findings.csv")
    headings = inventory.column_of
    write_csv(guard_formulas(coverage(inventory.gaps.origins, headings)), folder / "coverage.csv")
    write_mapping(folder / "mapping.toml", inventory.match)


def plain(text: object, width: int) -> str:
    """Text of a file, safe for a terminal: one line, no control characters, cut to width."""
    made = "".join(c if c.isprintable() else " " for c in str(text))
    return made if len(made) <= width else made[: width - 1] + "…"


def print_check(inventory: Inventory, rows: int, folder: str | None) -> None:
    out = sys.stdout
    raw = inventory.raw
    ready = int((inventory.reason == "").sum())
    place = f", sheet {raw.sheet}" if raw.sheet else ""
    out.write(f"{plain(raw.source, 80)}{plain(place, 60)}: {len(raw):,} rows, {len(raw.headings)} columns\n")
    out.write(f"{len(raw):,} rows = {ready:,} can be ranked + {len(raw) - ready:,} can't\n\n")
    out.write("Columns understood\n")
    for line in inventory.match.lines():
        out.write(f"  {plain(line, 110)}\n")
    headings = inventory.column_of
    frame = coverage(inventory.gaps.origins, headings)
    out.write("\nCoverage (joints)                      read  looked up  derived  assumed  missing\n")
    for _, line in frame.iterrows():
        if line["missing"] == len(raw) and not line["column"]:
            continue
        read = line["read"] + line["converted"]
        out.write(f"  {plain(line['label'], 34):34s}  {read:6,d}  {line['looked_up']:9,d}  {line['derived']:7,d}  {line['assumed']:7,d}  {line['missing']:7,d}\n")
    findings = findings_frame(inventory.ledger, raw.row_numbers, inventory.joint_id, raw.sheet, inventory.column_of)
    counts = findings["severity"].astype(str).value_counts()
    out.write("\nFindings: " + (", ".join(f"{counts.get(s, 0):,} {s}" for s in ("blocks", "doubts", "notes"))) + "\n")
    for _, line in findings.head(rows).iterrows():
        where = "column" if line["position"] < 0 and line["column"] else "file" if line["position"] < 0 else f"row {line['row']}"
        heading = plain(line["column"], 24)
        column = "" if not heading else f" {heading}" if where == "column" else f", {heading}"
        value = f" = {plain(line['value'], 24)!r}" if isinstance(line["value"], str) and line["value"] else ""
        out.write(f"  {line['severity']:7s} {where}{column}{value}: {plain(line['problem'], 90)}; {plain(line['action'], 60)}\n")
    if len(findings) > rows:
        rest = len(findings) - rows
        out.write(f"  … {rest:,} more" + (f" in {folder}/findings.csv\n" if folder else "; give --out FOLDER for all of them\n"))
    missing = [a.label for n, a in inventory_attributes().items() if frame.set_index("attribute").loc[n, "known_share"] == 0]
    if folder:
        out.write(f"\nWritten to {folder}: findings.csv, coverage.csv, mapping.toml (edit it and give it back with --mapping)\n")
    else:
        out.write(f"\nNot in this file: {', '.join(missing)}\n")
