"""Rainflow counts against the standard's example, printed examples and two reference libraries (`rainflow`, `fatpack`)."""

import csv
from collections import defaultdict
from pathlib import Path

import numpy as np
import pytest

from screener.pressure.cycles import RainflowCounter, close_cycles, rainflow_cycles, turning_points

DATA = Path(__file__).parent / "data" / "rainflow_examples.csv"
RECORDS = {
    "A: ASTM E1049-85 Fig. 6": [-2, 1, -3, 5, -1, 3, -4, 4, -2],
    "B: repo iamlikeme/rainflow test case 2": [-1.5, 1.0, -3.0, 10.0, -1.0, 3.0, -8.0, 4.0, -2.0, 6.0, -8.0, 2.0, -5.0, 2.5, -4.0, 1.0, 0.0, 2.0, -0.5],
}  # fmt: skip


def by_range_and_mean(ranges, means, counts):
    total = defaultdict(float)
    for span, mean, count in zip(ranges, means, counts, strict=True):
        total[float(span), float(mean)] += float(count)
    return dict(total)


def printed(example, record):
    with open(DATA, newline="", encoding="utf-8") as stream:
        return [row for row in csv.DictReader(stream) if row["example"] == example and row["record"] == record]


@pytest.mark.parametrize("example", RECORDS)
def test_printed_cycles_and_counts(example):
    """A: ASTM E1049-85 (2017) Fig. 6 (read in an open issue that quotes it). B: test case of an open library (read).

    Of B the cycles were read, with their positions; the reversals above follow from them, the points between reversals are left out.
    """
    found = rainflow_cycles(RECORDS[example])
    expected = printed(example, "cycle")
    columns = [[float(row[name]) for row in expected] for name in ("range", "mean", "count")]
    assert by_range_and_mean(found.range, found.mean, found.count) == by_range_and_mean(*columns)
    totals = {float(row["range"]): float(row["count"]) for row in printed(example, "count")}
    seen = defaultdict(float)
    for span, count in zip(found.range.tolist(), found.count.tolist(), strict=True):
        seen[span] += count
    assert dict(seen) == totals


def test_example_with_closed_cycles_and_residue_of_the_four_point_method():
    """Example in the tests of an open library (read, Gunnstein/fatpack): closed cycles and what is left over."""
    record = np.array([4, 7, 2, 10, 5, 9, 3, 4, 2, 12, 5, 11, 1, 4, 3, 10, 6, 12, 4, 8, 1, 9, 4, 6], dtype=float)
    left, spans, means = close_cycles(record, with_mean=True)
    pairs = [(5, 9), (3, 4), (10, 2), (5, 11), (4, 3), (10, 6), (4, 8), (1, 12)]
    assert left.tolist() == [4, 7, 2, 12, 1, 9, 4, 6]
    expected = sorted((abs(a - b), (a + b) / 2) for a, b in pairs)
    assert sorted(zip(spans.tolist(), means.tolist(), strict=True)) == expected


def test_million_samples_bin_by_bin_against_rainflow():
    """Parity with the package `rainflow` (E1049-85, section 5.4.4) on a walk of a million samples written to 0.5, full of equal ranges."""
    library = pytest.importorskip("rainflow")
    generator = np.random.default_rng(20)
    record = np.round(np.cumsum(generator.normal(size=1_000_000)) * 2) / 2
    cycles = np.array([(span, mean, count) for span, mean, count, _, _ in library.extract_cycles(record)])
    range_edges, mean_edges = np.arange(0.0, record.max() - record.min() + 2), np.arange(np.floor(record.min()), record.max() + 2)
    expected, _, _ = np.histogram2d(cycles[:, 0], cycles[:, 1], bins=(range_edges, mean_edges), weights=cycles[:, 2])
    counter = RainflowCounter(range_edges, mean_edges)
    counter.feed(record)
    result = counter.result()
    assert np.array_equal(result.counts, expected)
    assert result.beyond == result.below == 0 and result.largest_range == cycles[:, 0].max()


@pytest.mark.parametrize("seed", range(4))
def test_every_cycle_against_rainflow(seed):
    library = pytest.importorskip("rainflow")
    record = np.random.default_rng(seed).normal(size=20_000)
    expected = by_range_and_mean(*zip(*[cycle[:3] for cycle in library.extract_cycles(record)], strict=True))
    found = rainflow_cycles(record)
    assert by_range_and_mean(found.range, found.mean, found.count) == expected


def test_closed_cycles_and_residue_against_fatpack():
    """Parity with the package `fatpack` (four-point method): same closed cycles, same residue, no equal ranges in the record."""
    library = pytest.importorskip("fatpack")
    record = np.random.default_rng(3).normal(size=30_000)
    points = turning_points(record)
    cycles, residue = library.find_rainflow_cycles(points)
    left, spans, means = close_cycles(points, with_mean=True)
    assert np.array_equal(left, residue)
    assert np.array_equal(np.sort(spans), np.sort(np.abs(cycles[:, 0] - cycles[:, 1])))
    assert np.array_equal(np.sort(means), np.sort(cycles.mean(axis=1)))
