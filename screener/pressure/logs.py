"""Pressure logs: from a folder of files to one summary per logger, with every reading that was left out accounted for.

Memory stays bounded whatever the length of the logs. No reading is invented: counting stops at a gap and starts anew behind it.
"""

from __future__ import annotations

import datetime
import tempfile
from collections.abc import Callable
from pathlib import Path
from zoneinfo import ZoneInfo

import numpy as np

from screener.pressure.log_cleaning import REASONS, Cleaner
from screener.pressure.log_read import LogFile, Piece, log_files
from screener.pressure.log_runs import Runs
from screener.pressure.log_settings import LogSettings
from screener.pressure.log_summary import Gatherer, LoggerSummary, usual_interval
from screener.pressure.log_times import UNKNOWN
from screener.records import InputError, Ledger, Severity

FIRST_LOOK = 10_000
"""Readings by which a logger's usual interval is judged."""


def read_logs(
    paths: str | Path | list[str | Path], settings: LogSettings, ledger: Ledger, progress: Callable[[str], None] = lambda words: None
) -> list[LoggerSummary]:
    """Summaries of all loggers in files and folders, by name. Findings name the logger or file in `column`."""
    with tempfile.TemporaryDirectory(prefix="pressure_logs_") as folder:
        store = _Store(settings, Path(folder))
        for path in log_files(paths):
            progress(f"reading {path.name}")
            file = LogFile(path, settings)
            for piece in file.pieces():
                store.take(piece)
            _note_file(file, ledger)
        if not store.runs:
            first = next((batch.problem for batch in ledger.findings if batch.code == "log_file"), "no reading in them could be used")
            raise InputError(f"no pressure log could be used: {first}")
        return [_summarise(name, store.runs[name], store.cleaners[name], settings, ledger) for name in sorted(store.runs)]


class _Store:
    """Readings by logger as they come; the largest go to disk when memory is full."""

    def __init__(self, settings: LogSettings, folder: Path) -> None:
        self._settings, self._folder = settings, folder
        self.runs: dict[str, Runs] = {}
        self.cleaners: dict[str, Cleaner] = {}

    def take(self, piece: Piece) -> None:
        if piece.logger not in self.runs:
            self.runs[piece.logger] = Runs(self._folder, len(self.runs))
            self.cleaners[piece.logger] = Cleaner(self._settings)
        cleaner = self.cleaners[piece.logger]
        unreadable = piece.unreadable | ((piece.time == UNKNOWN) & np.isfinite(piece.written))
        cleaner.removed["unreadable"].add_count(int(unreadable.sum()), piece.time[unreadable & (piece.time != UNKNOWN)])
        dated = piece.time != UNKNOWN
        self.runs[piece.logger].add(*cleaner.without_codes(piece.time[dated], piece.written[dated], piece.pressure[dated]))
        if sum(runs.rows_in_memory for runs in self.runs.values()) > self._settings.memory_rows:
            for runs in self.runs.values():
                runs.spill()


def _summarise(name: str, runs: Runs, cleaner: Cleaner, settings: LogSettings, ledger: Ledger) -> LoggerSummary:
    looked: list[np.ndarray] = []
    for time, _ in runs.in_order(FIRST_LOOK):
        looked.append(time)
        if sum(map(len, looked)) >= FIRST_LOOK:
            break
    first = np.concatenate(looked)[:FIRST_LOOK] if looked else np.empty(0, np.int64)
    interval = usual_interval(first)
    gap_limit = max(settings.gap_intervals * interval, settings.gap_at_least) if np.isfinite(interval) else settings.gap_at_least
    gatherer = Gatherer(settings, gap_limit, _day_offset(first, settings))
    for time, value in runs.in_order(settings.chunk_rows):
        gatherer.feed(*cleaner.feed(time, value))
    gatherer.feed(*cleaner.finish())
    summary = gatherer.summary(name, interval, {reason: seen.count for reason, seen in cleaner.removed.items() if seen.count})
    _note_logger(summary, runs.out_of_order, cleaner, settings, ledger)
    return summary


def _day_offset(time: np.ndarray, settings: LogSettings) -> int:
    """What turns UTC into local days [ms]; the offset of the first reading, kept through the record."""
    if not settings.time_zone or len(time) == 0:
        return 0
    when = datetime.datetime.fromtimestamp(int(time[0]) / 1e3, ZoneInfo(settings.time_zone))
    return int(when.utcoffset().total_seconds() * 1e3)


def written_time(milliseconds: int) -> str:
    """A time as people read it, to the minute."""
    return str(np.datetime64(int(milliseconds), "ms").astype("datetime64[m]")).replace("T", " ")


def _note_file(file: LogFile, ledger: Ledger) -> None:
    def note(code: str, severity: Severity, problem: str, action: str) -> None:
        ledger.finding(code, severity, None, problem=f"{file.path.name} {problem}", action=action, column=file.path.name)

    if file.problem:
        note("log_file", Severity.BLOCKS, file.problem, "file left out")
        return
    for doubt in sorted(file.times.doubts):
        note("log_times", Severity.DOUBTS, f": {doubt}", "check the first and last time of its loggers")
    if file.times.clock_change:
        note("log_clock_change", Severity.NOTES, f"has {file.times.clock_change} rows at a local time that does not exist or comes twice when clocks change", "left out")
    if file.ragged_lines:
        note("log_lines", Severity.DOUBTS, f"has {file.ragged_lines} lines with more cells than its heading", "cells beyond the heading ignored")
    if file.absolute:
        note("log_absolute", Severity.NOTES, "holds absolute pressures", "101.325 kPa taken off")
    for unit, rows in file.unknown_units.items():
        note("log_unit", Severity.DOUBTS, f"has {rows} readings in unit {unit!r}, which is not known", "readings left out")
    if file.ignored:
        note("log_columns", Severity.NOTES, f"has columns not used: {', '.join(file.ignored[:8])}", "ignored")


def _note_logger(summary: LoggerSummary, out_of_order: int, cleaner: Cleaner, settings: LogSettings, ledger: Ledger) -> None:
    def note(code: str, severity: Severity, problem: str, action: str) -> None:
        ledger.finding(code, severity, None, problem=f"{summary.logger}: {problem}", action=action, column=summary.logger)

    if summary.readings == 0:
        note("log_empty", Severity.BLOCKS, "no reading is left", "logger not used")
    for reason, seen in cleaner.removed.items():
        if seen.count:
            span = f", from {written_time(seen.first)} to {written_time(seen.last)}" if seen.first is not None else ""
            severity = Severity.NOTES if reason in ("repeated", "missing_code") else Severity.DOUBTS
            words, action = REASONS[reason]
            note(f"log_{reason}", severity, f"{seen.count} readings: {words}{span}", action)
    if out_of_order:
        note("log_order", Severity.NOTES, f"times go back {out_of_order} times", "sorted by time")
    if summary.gaps:
        share = 100 * (1 - summary.covered_share)
        note("log_gaps", Severity.NOTES, f"{summary.gaps} gaps of more than {summary.gap_limit:.0f} s, {share:.1f} % of the time", "nothing counted across them")
    drift = _drift(summary, settings)
    if drift:
        note("log_drift", Severity.DOUBTS, f"the daily mean moves steadily by {drift / 1e3:+.0f} kPa over the record: a drifting sensor, or a true slow change", "kept as it is; check the sensor's zero")
    if summary.interval > settings.slow_interval:
        note("log_slow", Severity.DOUBTS, f"one reading in {summary.interval:.0f} s: peaks and troughs of surges fall between readings", "cycles and largest values are lower bounds")
    if summary.readings and summary.annual_maximum.reason:
        note("log_short", Severity.DOUBTS, f"yearly maximum: {summary.annual_maximum.reason}", "its sampling error is carried on")


def _drift(summary: LoggerSummary, settings: LogSettings) -> float:
    """Change of the daily mean over the record [Pa] by the median of slopes, where it is steady and large; else 0."""
    full = summary.day_covered >= settings.full_day
    if full.sum() < 7:
        return 0.0
    day, mean = summary.day[full].astype(float), summary.day_mean[full]
    from scipy import stats  # slow to import, and seldom needed

    pick = np.unique(np.linspace(0, len(day) - 1, 400).astype(int))  # enough for a trend, and no long records of pairs
    day, mean = day[pick], mean[pick]
    trend = stats.kendalltau(day, mean)
    change = float(stats.theilslopes(mean, day).slope * (day[-1] - day[0]))
    steady = abs(trend.statistic) > 0.7 and trend.pvalue < 0.01
    return change if steady and abs(change) > settings.drift else 0.0
