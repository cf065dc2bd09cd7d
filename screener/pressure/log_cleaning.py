"""What is taken out of a log, reading by reading, and why. Every rule looks only at readings already seen (a spike: at the next one),
so the answer does not depend on the pieces in which the log arrives. Nothing is ever put in.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from screener.pressure.log_settings import LogSettings


@dataclass
class Removed:
    """How many readings went for one reason, and the times [ms] of the first and last."""

    count: int = 0
    first: int | None = None
    last: int | None = None

    def add(self, times: np.ndarray) -> None:
        self.add_count(len(times), times)

    def add_count(self, count: int, times: np.ndarray) -> None:
        """Add readings of which only some have a time."""
        self.count += count
        if len(times):
            low, high = int(times.min()), int(times.max())
            self.first = low if self.first is None else min(self.first, low)
            self.last = high if self.last is None else max(self.last, high)


REASONS = {
    "unreadable": ("can't be read as a time and a number", "left out"),
    "missing_code": ("a code for 'no reading'", "left out"),
    "impossible": ("outside what a gauge on a main can read", "left out"),
    "repeated": ("the same time and value again", "counted once"),
    "conflicting": ("another value at the same time", "the larger one taken"),
    "spike": ("a single reading further from both neighbours than any surge", "left out"),
    "drop_out": ("a single reading of exactly zero", "left out"),
    "stuck": ("the same value for hours, as of a stuck sensor", "left out from the moment that is plain"),
}


@dataclass
class Cleaner:
    """Cleans one logger's readings in order of time. removed: by reason of `REASONS`."""

    settings: LogSettings
    removed: dict[str, Removed] = field(default_factory=lambda: {name: Removed() for name in REASONS})
    _raw: tuple[np.ndarray, np.ndarray] = field(default_factory=lambda: (np.empty(0, np.int64), np.empty(0)))
    _decided: int = 0  # how many of the raw readings carried over have been given out already
    _run_value: float = np.nan
    _run_count: int = 0
    _run_start: int = 0

    def without_codes(self, time: np.ndarray, written: np.ndarray, pressure: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Readings without missing codes and impossible values; written: the numbers as in the file, pressure: the same in Pa gauge."""
        empty = ~np.isfinite(written)
        code = np.isin(written, self.settings.missing_codes)
        beyond = ~empty & ~code & ((pressure < self.settings.lowest_pressure) | (pressure > self.settings.largest_pressure))
        self.removed["missing_code"].add(time[code])
        self.removed["impossible"].add(time[beyond])
        keep = ~(empty | code | beyond)
        return time[keep], pressure[keep]

    def feed(self, time: np.ndarray, value: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Clean readings out of the next piece in order of time (equal times in one piece); the last reading waits for its neighbour."""
        time, value = self._once(time, value)
        raw_time, raw_value = np.concatenate((self._raw[0], time)), np.concatenate((self._raw[1], value))
        return self._give(raw_time, raw_value, len(raw_time) - 1)

    def finish(self) -> tuple[np.ndarray, np.ndarray]:
        """What still waited."""
        return self._give(*self._raw, len(self._raw[0]))

    def _give(self, time: np.ndarray, value: np.ndarray, until: int) -> tuple[np.ndarray, np.ndarray]:
        start = self._decided
        if until <= start:
            self._raw = time, value
            return time[:0], value[:0]
        keep = ~self._spikes(time, value, start, until)
        first = max(until - 1, 0)
        self._raw, self._decided = (time[first:], value[first:]), until - first
        return self._without_stuck(time[start:until][keep], value[start:until][keep])

    def _spikes(self, time: np.ndarray, value: np.ndarray, start: int, until: int) -> np.ndarray:
        far, out = np.zeros(len(value), dtype=bool), np.zeros(len(value), dtype=bool)
        if len(value) > 2:
            middle, low, high = value[1:-1], np.minimum(value[:-2], value[2:]), np.maximum(value[:-2], value[2:])
            far[1:-1] = (middle - high > self.settings.spike) | (low - middle > self.settings.spike)
            out[1:-1] = ~far[1:-1] & (middle == 0) & (low > self.settings.drop_out)
        given = slice(start, until)
        self.removed["spike"].add(time[given][far[given]])
        self.removed["drop_out"].add(time[given][out[given]])
        return (far | out)[given]

    def _once(self, time: np.ndarray, value: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Each time once, with the largest of its values."""
        again = time[1:] == time[:-1]
        if not again.any():
            return time, value
        first = np.flatnonzero(np.concatenate(([True], ~again)))
        lowest, largest = np.minimum.reduceat(value, first), np.maximum.reduceat(value, first)
        extra = np.diff(np.append(first, len(time))) - 1
        for reason, chosen in (("repeated", lowest == largest), ("conflicting", lowest != largest)):
            self.removed[reason].add(np.repeat(time[first][chosen], extra[chosen]))
        return time[first], largest

    def _without_stuck(self, time: np.ndarray, value: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        if len(value) == 0:
            return time, value
        fresh = np.concatenate(([value[0] != self._run_value], value[1:] != value[:-1]))
        place = np.arange(len(value))
        begin = np.maximum.accumulate(np.where(fresh, place, -1))
        carried = begin < 0
        count = np.where(carried, self._run_count + place + 1, place - begin + 1)
        start = np.where(carried, self._run_start, time[np.maximum(begin, 0)])
        stuck = (count >= self.settings.stuck_readings) & (time - start >= self.settings.stuck_hours * 3.6e6)
        self.removed["stuck"].add(time[stuck])
        self._run_value, self._run_count, self._run_start = float(value[-1]), int(count[-1]), int(start[-1])
        return time[~stuck], value[~stuck]
