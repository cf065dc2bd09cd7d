"""Make the sample inventory anew: an invented utility's joints, mains, leaks and pressure logs.

    python sample_inventory/make_sample.py [FOLDER]

Same numbers every time; needs no network. Everything is made up (see README.md here).
"""

from __future__ import annotations

import sys
from pathlib import Path

import pandas as pd

HERE = Path(__file__).resolve().parent
sys.path.insert(0, str(HERE))

from making import errors, layers, leaks, loggers, network, practice, sections, wording, workbook  # noqa: E402

PLANTED = Path("tests") / "house" / "data" / "planted_errors.csv"


def planted_table(planted: list[dict], order: list[int], sheet_rows: list[int], joints: pd.DataFrame) -> pd.DataFrame:
    """Where each planted error stands: the sheet's row (of the later one where a row stands twice)."""
    last = {index: row for index, row in zip(order, sheet_rows, strict=True)}
    headings = {key: lower or upper for key, upper, lower in wording.COLUMNS}
    table = pd.DataFrame(
        {
            "joint_id": [joints["joint_id"].iat[p["row"]] for p in planted],
            "sheet_row": [last[p["row"]] for p in planted],
            "heading": [headings[p["column"]] for p in planted],
            "kind": [p["kind"] for p in planted],
            "written": [getattr(p["written"], "value", p["written"]) for p in planted],
            "truth": [p["truth"] for p in planted],
        }
    )
    footer = {"joint_id": "", "sheet_row": sheet_rows[-1] + workbook.FOOTER_GAP, "heading": headings["joint_id"], "kind": "footer_row", "written": workbook.FOOTER, "truth": ""}
    return pd.concat([table, pd.DataFrame([footer])], ignore_index=True)


def write_sample(folder: Path, planted_path: Path) -> None:
    """Every file of the sample into `folder`, and the list of planted errors beside the tests."""
    folder.mkdir(parents=True, exist_ok=True)
    planted_path.parent.mkdir(parents=True, exist_ok=True)
    lines, joints = network.build_network()
    joints = practice.true_joints(joints)
    records = leaks.simulate_leaks(joints)
    joints["leak_years"] = leaks.leak_years(joints, records)
    cells, planted, order = errors.plant_errors(wording.write_rows(joints), joints)
    sheet_rows = workbook.write_workbook(folder / "inventory.xlsx", cells, order)
    planted_table(planted, order, sheet_rows, joints).to_csv(planted_path, index=False, lineterminator="\n")
    layers.write_package(folder / "inventory.gpkg", joints, lines)
    layers.clean_table(joints).to_csv(folder / "small_clean.csv", index=False, lineterminator="\n")
    leaks.leak_table(joints, records).to_csv(folder / "leaks.csv", index=False, lineterminator="\n")
    sections.section_table().to_csv(folder / "ring_sections.csv", index=False, lineterminator="\n")
    loggers.write_loggers(folder / "loggers", lines)


if __name__ == "__main__":
    target = Path(sys.argv[1]) if len(sys.argv) > 1 else HERE
    write_sample(target, (HERE.parent if target == HERE else target) / PLANTED)
    print(f"written: {target}")
