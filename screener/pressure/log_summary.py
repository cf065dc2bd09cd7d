"""What a logger saw: level, daily range, cycles, largest values; gathered while its clean readings pass by."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.pressure.annual_maximum import yearly
from screener.pressure.cycles import CycleHistogram, RainflowCounter
from screener.pressure.extremes import YEAR, ExtremeFit, gumbel_by_moments
from screener.pressure.log_settings import DAY, LogSettings

LEVEL_STEP = 1e3
BLOCK_DAYS = (30, 7, 1)
ENOUGH_BLOCKS = 20


@dataclass(frozen=True, eq=False)
class LoggerSummary:
    """One logger. Pressures Pa gauge, times ms since 1970, intervals s.

    level: median in time, lowest_usual and highest_usual: 5 and 95 % in time. daily_range: median over full days of largest less smallest.
    day, day_largest, day_range, day_mean, day_covered: per day with readings. cycles_per_day: rainflow cycles at or above the smallest
    that counts, per covered day. annual_maximum: Gumbel of the yearly maximum, NaN with a reason when the record is too short.
    covered_share: covered time over the time from first to last reading. removed: readings by reason.
    """

    logger: str
    readings: int
    first: int
    last: int
    interval: float
    gap_limit: float
    gaps: int
    covered_days: float
    covered_share: float
    level: float
    lowest_usual: float
    highest_usual: float
    largest: float
    smallest: float
    daily_range: float
    cycles_per_day: float
    smallest_cycle: float
    cycles: CycleHistogram
    day: np.ndarray
    day_largest: np.ndarray
    day_range: np.ndarray
    day_mean: np.ndarray
    day_covered: np.ndarray
    annual_maximum: ExtremeFit
    removed: dict[str, int]


def usual_interval(time: np.ndarray) -> float:
    """The interval [s] that a logger keeps, from times [ms] in order: not misled by bursts of quick readings, nor by a few gaps.

    The interval within which half of the time lies, but no more than 99 in 100 intervals are.
    """
    steps = np.sort(np.diff(time)[np.diff(time) > 0])
    if len(steps) == 0:
        return np.nan
    reached = np.cumsum(steps.astype(float))
    by_time = steps[np.searchsorted(reached, reached[-1] / 2)]
    return float(min(by_time, steps[int(0.99 * (len(steps) - 1))])) / 1e3


class Gatherer:
    """Takes one logger's clean readings in order of time; bounded memory but for one row a day."""

    def __init__(self, settings: LogSettings, gap_limit: float, day_offset: int) -> None:
        self._settings, self._gap_limit, self._day_offset = settings, gap_limit, day_offset
        edges = np.arange(0.0, settings.largest_pressure - settings.lowest_pressure + 2 * settings.cycle_bin, settings.cycle_bin)
        self._counter = RainflowCounter(edges)
        self._time_at_level = np.zeros(int((settings.largest_pressure - settings.lowest_pressure) / LEVEL_STEP) + 2)
        self._days: dict[int, np.ndarray] = {}
        self._last: int | None = None
        self.first: int | None = None
        self.readings = self.gaps = 0
        self.covered = 0.0

    def feed(self, time: np.ndarray, value: np.ndarray) -> None:
        if len(time) == 0:
            return
        before = time[0] if self._last is None else self._last
        step = np.diff(time, prepend=before) / 1e3
        gap = step > self._gap_limit
        stands_for = np.where(gap, 0.0, step)
        bounds = [0, *np.flatnonzero(gap).tolist(), len(value)]
        for number, (begin, end) in enumerate(zip(bounds[:-1], bounds[1:], strict=True)):
            if number:
                self._counter.break_here()
            self._counter.feed(value[begin:end])
        self.gaps += int(gap.sum())
        self.readings += len(value)
        self.covered += float(stands_for.sum())
        place = ((value - self._settings.lowest_pressure) / LEVEL_STEP).astype(np.int64)
        self._time_at_level += np.bincount(place, weights=stands_for, minlength=len(self._time_at_level))
        self._gather_days(time, value, stands_for)
        self.first = int(time[0]) if self.first is None else self.first
        self._last = int(time[-1])

    def _gather_days(self, time: np.ndarray, value: np.ndarray, stands_for: np.ndarray) -> None:
        day = (time + self._day_offset) // int(DAY * 1e3)
        start = np.flatnonzero(np.concatenate(([True], day[1:] != day[:-1])))
        rows = zip(
            day[start].tolist(), np.maximum.reduceat(value, start), np.minimum.reduceat(value, start),
            np.add.reduceat(value, start), np.diff(np.append(start, len(value))), np.add.reduceat(stands_for, start), strict=True,
        )  # fmt: skip
        for number, largest, smallest, total, count, covered in rows:
            seen = self._days.get(number)
            if seen is None:
                self._days[number] = np.array([largest, smallest, total, count, covered])
            else:
                seen[0], seen[1] = max(seen[0], largest), min(seen[1], smallest)
                seen[2:] += total, count, covered

    def _level(self, share: float) -> float:
        passed = np.cumsum(self._time_at_level)
        if passed[-1] <= 0:
            return np.nan
        k = int(np.searchsorted(passed, share * passed[-1]))
        below = passed[k - 1] if k else 0.0
        inside = (share * passed[-1] - below) / self._time_at_level[k] if self._time_at_level[k] > 0 else 0.5
        return float(self._settings.lowest_pressure + (k + inside) * LEVEL_STEP)

    def summary(self, logger: str, interval: float, removed: dict[str, int]) -> LoggerSummary:
        days = np.array(list(self._days.values())).reshape(-1, 5)
        number = np.array(list(self._days), dtype=np.int64)
        covered = days[:, 4] / DAY
        full = covered >= self._settings.full_day
        cycles = self._counter.result()
        counted = cycles.counts[cycles.range_edges[:-1] >= self._settings.smallest_cycle].sum() + cycles.beyond
        covered_days = self.covered / DAY
        elapsed = (self._last - self.first) / 1e3 if self._last is not None else 0.0
        return LoggerSummary(
            logger, self.readings, self.first or 0, self._last or 0, interval, self._gap_limit, self.gaps, covered_days,
            self.covered / elapsed if elapsed > 0 else np.nan, self._level(0.5), self._level(0.05), self._level(0.95),
            float(days[:, 0].max(initial=-np.inf)) if len(days) else np.nan, float(days[:, 1].min(initial=np.inf)) if len(days) else np.nan,
            float(np.median((days[:, 0] - days[:, 1])[full])) if full.any() else np.nan,
            counted / covered_days if covered_days > 0 else np.nan, self._settings.smallest_cycle, cycles, number, days[:, 0], days[:, 0] - days[:, 1], days[:, 2] / days[:, 3], covered,
            annual_maximum(number[full], days[full, 0]), removed,
        )  # fmt: skip


def annual_maximum(day: np.ndarray, largest: np.ndarray) -> ExtremeFit:
    """Gumbel of the yearly maximum from the largest value of each full day, in the longest blocks that leave enough of them.

    Blocks of 30, 7 or 1 days; a block counts with at least three quarters of its days. A record of days speaks for its season only.
    """
    for length in BLOCK_DAYS:
        if len(day) == 0:
            break
        block = (day - day[0]) // length
        start = np.flatnonzero(np.concatenate(([True], block[1:] != block[:-1])))
        full = np.diff(np.append(start, len(day))) >= 0.75 * length
        maxima = np.maximum.reduceat(largest, start)[full]
        if len(maxima) >= ENOUGH_BLOCKS or length == 1:
            return yearly(gumbel_by_moments(maxima, length * DAY / YEAR))
    return yearly(gumbel_by_moments(np.empty(0), DAY / YEAR))
