"""The command line: arguments, progress, exit codes; no engineering.

Exit codes: 0 done, 1 nothing could be ranked, 2 wrong use or a file that can't be used.
"""

from __future__ import annotations

import argparse
import sys
import time

CAUTION = (
    "Screening, not design: it ranks joints, it does not certify one. Local codes and a licensed "
    "engineer decide. Isolate, depressurise and verify before touching bolts."
)


class Progress:
    """A line on stderr while a person watches; silent in a pipe or with --quiet."""

    def __init__(self, quiet: bool) -> None:
        self.shown = sys.stderr.isatty() and not quiet
        self.started = time.monotonic()

    def __call__(self, words: str) -> None:
        if self.shown:
            seconds = time.monotonic() - self.started
            sys.stderr.write(f"\r\x1b[2K{seconds:6.1f} s  {words}")
            sys.stderr.flush()

    def done(self) -> None:
        if self.shown:
            sys.stderr.write("\r\x1b[2K")
            sys.stderr.flush()


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="joint-screener",
        description="Ranks the flanged joints of polyethylene pressure mains: which to retrofit, inspect or re-tighten first, and why.",
        epilog=CAUTION,
    )
    parser.add_argument("--version", action="store_true", help="print the version and stop")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND")

    def add(name: str, text: str) -> argparse.ArgumentParser:
        made = commands.add_parser(name, help=text, description=text, epilog=CAUTION)
        made.add_argument("--quiet", action="store_true", help="no progress, no summary")
        return made

    def reading(made: argparse.ArgumentParser) -> None:
        made.add_argument("file", help="inventory: workbook, delimited text, GeoPackage, shapefile, GeoJSON, Parquet")
        made.add_argument("--sheet", help="sheet or layer to read; default: the one that looks most like an inventory")
        made.add_argument("--mapping", metavar="TOML", help="which column is which attribute, as written by 'check'")
        made.add_argument("--sections", metavar="CSV", help="ring sections as polygons (default: ring_sections.csv beside the inventory)")
        made.add_argument("--settings", metavar="TOML", help="settings file")
        made.add_argument("--units", choices=("us", "metric"), help="units shown to people (default us)")

    check = add("check", "read and audit an inventory: what was understood, what is missing, what contradicts itself")
    reading(check)
    check.add_argument("--out", metavar="FOLDER", help="write findings.csv, coverage.csv and mapping.toml there")
    check.add_argument("--rows", type=int, default=25, help="findings shown on screen (default 25)")

    screen = add("screen", "rank the joints of an inventory")
    reading(screen)
    screen.add_argument("--out", metavar="FOLDER", required=True, help="folder of the run")
    screen.add_argument("--safety-factor", type=float, help="safety factor on ring yield (default 2)")
    screen.add_argument("--rank-by", choices=("utilization", "likelihood", "expected_loss"), help="what the rank follows (default utilization); all three ranks are in the table")
    screen.add_argument("--date", metavar="YYYY-MM-DD", help="assessment date (default today)")
    screen.add_argument("--seed", type=int, help="seed of the random streams")
    screen.add_argument("--pressures", metavar="FOLDER", help="pressure logs (CSV, Parquet, workbooks); needs --stations")
    screen.add_argument("--stations", metavar="CSV", help="where each logger stands: main and chainage, or zone, and elevation")
    screen.add_argument("--mains", metavar="LAYER", help="mains as lines for the map: a GIS file, or a layer of the inventory's own file")
    screen.add_argument("--no-workbook", action="store_true", help="leave the workbook out (it is the slow part above 100 000 joints)")

    surge = add("surge", "compute a pressure transient on one main")
    surge.add_argument("file", help="description of the main (TOML)")
    surge.add_argument("--out", metavar="FOLDER", required=True, help="folder for tables and pictures")

    sheet = add("sheet", "write a calculation sheet per joint of a run")
    sheet.add_argument("run", help="folder of a run")
    sheet.add_argument("joints", nargs="+", metavar="JOINT", help="joint ids")
    sheet.add_argument("--out", metavar="FOLDER", help="folder for the sheets (default: RUN/sheets)")
    sheet.add_argument("--pdf", action="store_true", help="also PDF, through a Chromium on this machine")

    template = add("template", "write a blank inventory workbook with dictionary and lists")
    template.add_argument("file", help="workbook to write")
    template.add_argument("--units", choices=("us", "metric"), default="us")

    methods = add("methods", "write the methods text: every formula with its source and check")
    methods.add_argument("--out", metavar="FILE", help="HTML file (default: print as text)")
    return parser


def main(arguments: list[str] | None = None) -> int:
    """Run one command; returns the exit code."""
    parser = _parser()
    given = parser.parse_args(arguments)
    if given.version:
        from screener import __version__

        print(f"joint-screener {__version__}")
        return 0
    if not given.command:
        parser.print_help()
        return 2
    from screener.records import InputError, ModelError

    progress = Progress(given.quiet)
    try:
        return _COMMANDS[given.command](given, progress)
    except (InputError, ModelError) as problem:
        progress.done()
        print(f"joint-screener: {problem}", file=sys.stderr)
        return 2
    except BrokenPipeError:
        return 0
    except KeyboardInterrupt:
        progress.done()
        print("joint-screener: stopped", file=sys.stderr)
        return 130
    finally:
        progress.done()


def _settings(given):
    from screener.settings import read_settings

    return read_settings(
        given.settings,
        units=given.units,
        sheet=given.sheet,
        safety_factor=getattr(given, "safety_factor", None),
        rank_by=getattr(given, "rank_by", None),
        assessment_date=getattr(given, "date", None),
        seed=getattr(given, "seed", None),
    )


def _check(given, progress) -> int:
    from screener.inventory.read import read_inventory
    from screener.outputs.check_report import print_check, write_check

    settings = _settings(given)
    progress("reading and auditing")
    inventory = read_inventory(given.file, settings, mapping=given.mapping, sections=given.sections)
    progress.done()
    if given.out:
        write_check(inventory, given.out)
    if not given.quiet:
        print_check(inventory, rows=given.rows, folder=given.out)
    return 0 if len(inventory.fleet) else 1


def _screen(given, progress) -> int:
    from screener.inventory.read import read_inventory
    from screener.outputs.write_run import print_summary, write_run
    from screener.records import InputError
    from screener.screening import screen

    settings = _settings(given)
    progress("reading and auditing")
    inventory = read_inventory(given.file, settings, mapping=given.mapping, sections=given.sections)
    if bool(given.pressures) != bool(given.stations):
        raise InputError("--pressures and --stations go together: the logs, and where their loggers stand")
    if given.pressures:
        from screener.from_logs import with_logs

        inventory = with_logs(inventory, given.pressures, given.stations, progress)
    progress(f"screening {len(inventory.fleet):,} joints")
    screening = screen(inventory, settings, progress=progress)
    mains = None
    if given.mains:
        from screener.outputs.mains import read_mains

        mains = read_mains(given.mains, given.file, inventory.crs)
    write_run(screening, given.out, source=given.file, workbook=not given.no_workbook, mains=mains, progress=progress)
    progress.done()
    if not given.quiet:
        print_summary(screening, given.out)
    return 0 if len(inventory.fleet) else 1


def _surge(given, progress) -> int:
    from screener.outputs.surge_plots import run_surge

    run = run_surge(given.file, given.out, progress=lambda share: progress(f"following the wave, {share:.0%}"))
    progress.done()
    if not given.quiet:
        print(run.files[-1].read_text(encoding="utf-8"))
    return 0


def _sheet(given, progress) -> int:
    from screener.outputs.sheet import write_sheets

    paths = write_sheets(given.run, given.joints, given.out, pdf=given.pdf, progress=progress)
    progress.done()
    if not given.quiet:
        for path in paths:
            print(path)
    return 0


def _template(given, progress) -> int:
    from screener.outputs.template import write_template

    write_template(given.file, units=given.units)
    if not given.quiet:
        print(given.file)
    return 0


def _methods(given, progress) -> int:
    from screener.outputs.methods import methods_html, methods_text
    from screener.outputs.run_folder import write_text

    if given.out:
        from pathlib import Path

        write_text(Path(given.out), methods_html())
        if not given.quiet:
            print(given.out)
    else:
        print(methods_text())
    return 0


_COMMANDS = {
    "check": _check,
    "screen": _screen,
    "surge": _surge,
    "sheet": _sheet,
    "template": _template,
    "methods": _methods,
}
