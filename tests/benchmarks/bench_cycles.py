"""Rainflow of a year at one sample a second against the package `rainflow`, in the same run; prints, asserts no time.

Run: python tests/benchmarks/bench_cycles.py
"""

import time
import tracemalloc

import numpy as np
import rainflow

from screener.pressure.cycles import RainflowCounter

YEAR = 31_536_000
SHARE = 600_000  # samples handed to the slow route


def records(generator):
    """Three invented years, kPa: a demand curve with noise written to 0.1; noise alone (most turning points); a walk."""
    seconds = np.arange(YEAR)
    demand = 400 + 60 * np.sin(seconds * (2 * np.pi / 86_400))
    yield "demand curve with noise, to 0.1 kPa", np.round(demand + generator.normal(scale=0.3, size=YEAR), 1)
    del demand, seconds
    yield "white noise", 400 + 10 * generator.normal(size=YEAR)
    yield "walk", np.cumsum(generator.normal(size=YEAR))


def main():
    for name, record in records(np.random.default_rng(7)):
        counter = RainflowCounter(np.arange(0, 1000, 5.0))
        start = time.perf_counter()
        counter.feed(record)
        result = counter.result()
        fast = time.perf_counter() - start
        tracemalloc.start()
        RainflowCounter(np.arange(0, 1000, 5.0)).feed(record[: YEAR // 8])
        grown = tracemalloc.get_traced_memory()[1] / 1e6
        tracemalloc.stop()
        start = time.perf_counter()
        slow_total = sum(cycle[2] for cycle in rainflow.extract_cycles(record[:SHARE]))
        slow = time.perf_counter() - start
        ratio = (YEAR / fast) / (SHARE / slow)
        print(f"{name}: {fast:.2f} s for {YEAR / 1e6:.1f} M samples, {result.total:.0f} cycles, {grown:.1f} MB beyond the record, "
              f"{counter.open_points} points open; {ratio:.0f} times the samples a second of the reference ({slow_total:.0f} cycles in its share)")  # fmt: skip


if __name__ == "__main__":
    main()
