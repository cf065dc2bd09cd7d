"""Time and memory of the whole path, by step, on an invented fleet.

    python tests/benchmarks/bench_path.py 100000 workbook     # rows, workbook or parquet

Prints seconds and shares. The reference in the same run is openpyxl reading
the same workbook, cell values only, with nothing understood.
"""

from __future__ import annotations

import resource
import sys
import tempfile
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))
from make_fleet import make_fleet


def main(rows: int, kind: str) -> None:
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        table = make_fleet(rows)
        path = folder / ("fleet.xlsx" if kind == "workbook" else "fleet.parquet")
        if kind == "workbook":
            table.to_excel(path, index=False, engine="xlsxwriter")
        else:
            table.to_parquet(path, index=False)
        del table
        start = time.perf_counter()
        from screener.inventory.read import read_inventory
        from screener.outputs.write_run import write_run
        from screener.screening import screen

        steps = [("import", time.perf_counter() - start)]

        def timed(words, action):
            begin = time.perf_counter()
            result = action()
            steps.append((words, time.perf_counter() - begin))
            return result

        inventory = timed("read, audit, fill", lambda: read_inventory(path))
        screening = timed("compute and rank", lambda: screen(inventory))
        clock = [time.perf_counter(), "summary"]

        def progress(words):
            now = time.perf_counter()
            steps.append((f"  {clock[1]}", now - clock[0]))
            clock[:] = [now, words]

        begin = time.perf_counter()
        write_run(screening, folder / "run", source=path, workbook=kind == "workbook", progress=progress)
        progress("")
        steps.append(("write all", time.perf_counter() - begin))
        total = sum(seconds for words, seconds in steps if not words.startswith(" "))
        peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1e6
        print(f"{rows:,} rows x 30 columns, {kind}: {total:.1f} s, {peak:.2f} GB at most")
        for words, seconds in steps:
            print(f"  {words:28s} {seconds:7.1f} s  {seconds / total:5.0%}")
        if kind == "workbook":
            import openpyxl

            begin = time.perf_counter()
            sheet = openpyxl.load_workbook(path, read_only=True).active
            cells = sum(len(row) for row in sheet.iter_rows(values_only=True))
            reference = time.perf_counter() - begin
            print(f"openpyxl alone reads the {cells:,} cells in {reference:.1f} s: {reference / total:.2f} of the whole path")


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 20_000, sys.argv[2] if len(sys.argv) > 2 else "workbook")
