"""Readings of one logger, handed over in any order, given back in order of time, in bounded memory.

Each piece is sorted and kept as a run. Runs are merged window by window: a window ends at the earliest of the times that the runs reach
within the budget, so nothing later can belong before it, and equal times are never torn apart.
"""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import numpy as np


class Runs:
    """Sorted runs of (time, value): int64 ms and float64. Beyond `memory_rows` they go to a file in `folder`."""

    def __init__(self, folder: Path, number: int) -> None:
        self._path = folder / f"logger_{number}.bin"
        self._kept: list[tuple[np.ndarray, np.ndarray]] = []
        self._spilled: list[tuple[int, int]] = []
        self.rows_in_memory = 0
        self.out_of_order = 0
        self._last = np.iinfo(np.int64).min

    def add(self, time: np.ndarray, value: np.ndarray) -> None:
        """Take one piece, in the order of the file."""
        if len(time) == 0:
            return
        back = int(np.count_nonzero(time[1:] < time[:-1])) + int(time[0] < self._last)
        self.out_of_order += back
        self._last = int(time[-1])
        if back:
            order = np.argsort(time, kind="stable")
            time, value = time[order], value[order]
        self._kept.append((np.ascontiguousarray(time, dtype=np.int64), np.ascontiguousarray(value, dtype=float)))
        self.rows_in_memory += len(time)

    def spill(self) -> None:
        """Move what is in memory to the file."""
        with open(self._path, "ab") as stream:
            for time, value in self._kept:
                self._spilled.append((stream.tell(), len(time)))
                stream.write(time.tobytes())
                stream.write(value.tobytes())
        self._kept.clear()
        self.rows_in_memory = 0

    def _all(self) -> list[tuple[np.ndarray, np.ndarray]]:
        runs = list(self._kept)
        for offset, rows in self._spilled:
            runs.append((np.memmap(self._path, np.int64, "r", offset, (rows,)), np.memmap(self._path, np.float64, "r", offset + 8 * rows, (rows,))))
        return sorted(runs, key=lambda run: (int(run[0][0]), int(run[0][-1])))

    def in_order(self, window_rows: int) -> Iterator[tuple[np.ndarray, np.ndarray]]:
        """(time, value) in order of time, about window_rows at once; equal times stay together."""
        runs = self._all()
        at = [0] * len(runs)
        first_open = 0
        while first_open < len(runs):
            # Runs are sorted by start: those that begin after the first open one's reach can wait.
            time = runs[first_open][0]
            if at[first_open] >= len(time):
                first_open += 1
                continue
            reach = int(time[min(at[first_open] + window_rows, len(time)) - 1])
            active = []
            for k in range(first_open, len(runs)):
                if int(runs[k][0][0]) > reach:
                    break
                if at[k] < len(runs[k][0]):
                    active.append(k)
            share = max(window_rows // len(active), 1)
            cut = min(min(int(runs[k][0][min(at[k] + share, len(runs[k][0])) - 1]) for k in active), reach)
            times, values = [], []
            for k in active:
                end = int(np.searchsorted(runs[k][0], cut, side="right"))
                if end > at[k]:
                    times.append(np.array(runs[k][0][at[k] : end]))
                    values.append(np.array(runs[k][1][at[k] : end]))
                    at[k] = end
            if len(times) == 1:
                yield times[0], values[0]
            else:
                joined = np.concatenate(times)
                order = np.argsort(joined, kind="stable")
                yield joined[order], np.concatenate(values)[order]
