"""Written times to milliseconds since 1970: ISO, day or month first, with or without an offset, epoch numbers, days of a workbook."""

from __future__ import annotations

import re
from dataclasses import dataclass, field

import numpy as np
import pandas as pd

from screener.pressure.log_settings import LogSettings

_OFFSET = re.compile(r"(?:Z|[+-]\d{2}:?\d{2})$")
_NUMERIC_DATE = re.compile(r"^\s*(\d{1,4})([-/.])(\d{1,2})\2(\d{2,4})(?:[ T]+(\d{1,2}):(\d{2})(:\d{2})?([.,]\d+)?\s*([AaPp][Mm])?)?\s*$")
UNKNOWN = np.iinfo(np.int64).min
SPREADSHEET_EPOCH = -2_209_161_600_000  # 1899-12-30 in ms


@dataclass
class TimeReader:
    """Reads the times of one file. clock_change: times that a local clock skips or shows twice. doubts: in words, once each."""

    settings: LogSettings
    clock_change: int = 0
    doubts: set[str] = field(default_factory=set)
    _format: str = ""
    _retry: tuple[str, ...] = ()

    def read(self, column: pd.Series) -> np.ndarray:
        """int64 ms, `UNKNOWN` where a time can't be read."""
        if isinstance(column.dtype, pd.DatetimeTZDtype):
            return _milliseconds(column.dt.tz_convert("UTC").dt.tz_localize(None))
        if pd.api.types.is_datetime64_any_dtype(column):
            return self._local(column)
        if pd.api.types.is_numeric_dtype(column):
            return self._numbers(column.to_numpy(dtype=float))
        if len(column) and not isinstance(column.iloc[0], str) and any(hasattr(value, "year") for value in column.head(20)):
            return self._local(pd.to_datetime(column, errors="coerce"))
        texts = column.astype("string").str.strip()
        seen = texts.dropna()
        if len(seen) == 0:
            return np.full(len(column), UNKNOWN)
        if re.match(r"^\d{4}-\d{2}-\d{2}", seen.iloc[0]) or re.match(r"^\d{8}T", seen.iloc[0]):
            return self._iso(texts, bool(_OFFSET.search(seen.iloc[0].strip()[10:])))
        numbers = pd.to_numeric(texts, errors="coerce").to_numpy(dtype=float)
        if np.isfinite(numbers).mean() > 0.5:
            return self._numbers(numbers)
        return self._by_format(texts, seen)

    def _iso(self, texts: pd.Series, with_offset: bool) -> np.ndarray:
        if with_offset:
            return _milliseconds(pd.to_datetime(texts, format="ISO8601", errors="coerce", utc=True).dt.tz_localize(None))
        try:
            parsed = pd.to_datetime(texts, format="ISO8601", errors="coerce")
        except ValueError:  # times with and without an offset in one file
            self.doubts.add("some times carry an offset and others don't; those without were read as UTC")
            return _milliseconds(pd.to_datetime(texts, format="ISO8601", errors="coerce", utc=True).dt.tz_localize(None))
        if isinstance(parsed.dtype, pd.DatetimeTZDtype):
            return _milliseconds(parsed.dt.tz_convert("UTC").dt.tz_localize(None))
        return self._local(parsed)

    def _local(self, parsed: pd.Series) -> np.ndarray:
        if not self.settings.time_zone:
            return _milliseconds(parsed)
        placed = parsed.dt.tz_localize(self.settings.time_zone, ambiguous="NaT", nonexistent="NaT")
        self.clock_change += int((placed.isna() & parsed.notna()).sum())
        return _milliseconds(placed.dt.tz_convert("UTC").dt.tz_localize(None))

    def _numbers(self, numbers: np.ndarray) -> np.ndarray:
        """Epoch seconds or milliseconds, or a workbook's days since 1899-12-30, told apart by size."""
        middle = np.nanmedian(numbers) if np.isfinite(numbers).any() else np.nan
        if 2e4 < middle < 8e4:
            local = pd.Series(np.rint(numbers * 86_400_000) + SPREADSHEET_EPOCH).astype("float64")
            return self._local(pd.to_datetime(local, unit="ms", errors="coerce"))
        factor = 1e3 if 3e8 < middle < 1e11 else 1.0 if 1e11 <= middle < 1e14 else np.nan
        found = np.full(len(numbers), UNKNOWN)
        known = np.isfinite(numbers * factor) & (np.abs(numbers) < 1e14)
        found[known] = np.rint(numbers[known] * factor).astype(np.int64)
        return found

    def _by_format(self, texts: pd.Series, seen: pd.Series) -> np.ndarray:
        if not self._format:
            first = next((m for m in map(_NUMERIC_DATE.match, seen.head(200)) if m and m[5]), None) or next(filter(None, map(_NUMERIC_DATE.match, seen.head(200))), None)
            if first is None:
                return self._local(pd.to_datetime(texts, format="mixed", errors="coerce", dayfirst=bool(self.settings.day_first)))
            self._format, self._retry = self._decide(first, seen)
        parsed = pd.to_datetime(texts, format=self._format, errors="coerce")
        for other in self._retry:
            missing = parsed.isna() & texts.notna()
            if not missing.any():
                break
            parsed = parsed.where(~missing, pd.to_datetime(texts.where(missing), format=other, errors="coerce"))
        return self._local(parsed)

    def _decide(self, first: re.Match, seen: pd.Series) -> tuple[str, tuple[str, ...]]:
        """Format of the dates: year first, or the order of day and month under which the record takes less time."""
        mark = first[2]
        clock = ""
        if first[5]:
            clock = " " + ("%I" if first[9] else "%H") + ":%M" + (":%S" if first[7] else "") + (".%f" if first[8] else "") + (" %p" if first[9] else "")
            if first[9] and not re.search(r"\s[AaPp][Mm]\s*$", first[0]):
                clock = clock.replace(" %p", "%p")
        if len(first[1]) == 4:
            return self._with_retries(f"%Y{mark}%m{mark}%d", clock)
        year = "%Y" if len(first[4]) == 4 else "%y"
        orders = {True: f"%d{mark}%m{mark}{year}", False: f"%m{mark}%d{mark}{year}"}
        spans = {}
        for day_first, date in orders.items():
            parsed = pd.to_datetime(seen, format=date + clock, errors="coerce")
            lost = parsed.isna().mean()
            spans[day_first] = (round(float(lost), 2), (parsed.max() - parsed.min()).total_seconds() if parsed.notna().any() else np.inf)
        if spans[True] == spans[False]:
            chosen = bool(self.settings.day_first)
            if self.settings.day_first is None:
                self.doubts.add("day and month can't be told apart; read as month first (log setting day_first decides)")
        else:
            chosen = spans[True] < spans[False]
        return self._with_retries(orders[chosen], clock)

    @staticmethod
    def _with_retries(date: str, clock: str) -> tuple[str, tuple[str, ...]]:
        shorter = clock.replace(".%f", "")
        others = [date + shorter, date + shorter.replace(":%S", ""), date + " %H:%M:%S", date]
        return date + clock, tuple(other for other in dict.fromkeys(others) if other != date + clock)


def _milliseconds(parsed: pd.Series) -> np.ndarray:
    whole = parsed.to_numpy().astype("datetime64[ms]").astype(np.int64)
    return whole  # NaT is the smallest int64, which is UNKNOWN
