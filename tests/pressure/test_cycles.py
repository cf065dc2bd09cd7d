"""Laws of the counter: pieces of any size, gaps, deep nesting, equal ranges, edges of bins."""

from collections import defaultdict

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from screener.pressure import cycles
from screener.pressure.cycles import RainflowCounter, close_cycles, rainflow_cycles, turning_points


def by_the_book(values):
    """E1049-85 5.4.4, three points at a time, word by word; the slow route."""
    total, points = defaultdict(float), []
    for point in turning_points(np.asarray(values, dtype=float)).tolist():
        points.append(point)
        while len(points) >= 3:
            newer, older = abs(points[-1] - points[-2]), abs(points[-2] - points[-3])
            if newer < older:
                break
            middle = (points[-2] + points[-3]) / 2
            if len(points) == 3:
                total[older, middle] += 0.5
                del points[0]
            else:
                total[older, middle] += 1.0
                del points[-3:-1]
    for a, b in zip(points[:-1], points[1:], strict=True):
        total[abs(a - b), (a + b) / 2] += 0.5
    return dict(total)


def counted(values):
    found, total = rainflow_cycles(values), defaultdict(float)
    for span, mean, count in zip(found.range.tolist(), found.mean.tolist(), found.count.tolist(), strict=True):
        total[span, mean] += count
    return dict(total)


@settings(max_examples=300, deadline=None)
@given(st.lists(st.integers(-6, 6), max_size=300))
def test_any_record_of_few_levels_counts_as_the_standard_says(levels):
    assert counted(levels) == by_the_book(levels)


@settings(max_examples=100, deadline=None)
@given(st.integers(0, 2**31), st.integers(100, 3000), st.sampled_from([1, 5, 100, 10**6]))
def test_passes_and_walk_agree_on_long_records(seed, size, levels):
    record = np.random.default_rng(seed).integers(-levels, levels, size=size, endpoint=True)
    assert counted(record) == by_the_book(record)


@settings(max_examples=100, deadline=None)
@given(st.integers(0, 2**31), st.lists(st.integers(0, 400), max_size=12), st.integers(2, 70))
def test_pieces_of_any_size_give_the_same_histogram(seed, cuts, piece):
    generator = np.random.default_rng(seed)
    record = np.round(np.cumsum(generator.normal(size=400)), 1)
    edges, means = np.arange(0, 40, 0.5), np.arange(-40, 40, 5.0)
    whole = RainflowCounter(edges, means)
    whole.feed(record)
    parts = RainflowCounter(edges, means)
    kept, cycles.PIECE = cycles.PIECE, piece
    try:
        for part in np.split(record, sorted(cuts)):
            parts.feed(part)
            parts.result()  # looking on the way changes nothing
    finally:
        cycles.PIECE = kept
    assert np.array_equal(whole.result().counts, parts.result().counts)
    assert whole.result().largest_range == parts.result().largest_range


@pytest.mark.parametrize("growing", [True, False])
def test_growing_and_dying_swings_count_in_halves(growing):
    """Nothing closes: each range of a steadily growing or dying swing is one half cycle."""
    size = np.arange(1, 20_001, dtype=float)
    swing = size * (-1.0) ** size
    found = rainflow_cycles(swing if growing else swing[::-1])
    assert np.all(found.count == 0.5) and len(found.count) == 19_999


def test_deeply_nested_swings_close_in_one_walk():
    """A dying swing that grows again closes every pair, one within the other: the worst for passes over the whole."""
    size = np.arange(100_000, 0, -1, dtype=float)
    dying = size * (-1.0) ** np.arange(len(size))
    record = np.concatenate((dying, -dying[::-1][1:] * 1.0))
    left, spans, _ = close_cycles(turning_points(record), with_mean=False)
    assert len(spans) >= 99_000 and len(left) + 2 * len(spans) == len(turning_points(record))


def test_constant_swing_closes_in_one_pass():
    record = np.tile([0.0, 1.0], 500_000)
    counter = RainflowCounter(np.array([0.5, 1.5]))
    counter.feed(record)
    assert counter.result().counts.tolist() == [(len(record) - 1) / 2]
    assert counter.open_points <= 4


def test_nothing_is_counted_across_a_gap():
    edges = np.arange(0, 30, 1.0)
    broken = RainflowCounter(edges)
    broken.feed([0.0, 10.0])
    broken.break_here()
    broken.feed([2.0, 7.0])
    assert broken.result().counts[10] == 0.5 and broken.result().counts[5] == 0.5
    unknown = RainflowCounter(edges)
    unknown.feed(np.array([np.nan, 0.0, 10.0, np.nan, np.nan, np.inf, 2.0, 7.0, np.nan]))
    assert np.array_equal(unknown.result().counts, broken.result().counts)
    joined = RainflowCounter(edges)
    joined.feed([0.0, 10.0, 2.0, 7.0])
    assert not np.array_equal(joined.result().counts, broken.result().counts)


def test_no_cycle_is_lost_beside_the_bins():
    counter = RainflowCounter(np.array([2.0, 4.0, 8.0]), np.array([0.0, 1.0]))
    counter.feed([0.0, 1.0, 0.0, 3.0, 0.0, 50.0, 0.0])
    result = counter.result()
    assert (result.below, result.counts.sum(), result.beyond) == (1.0, 1.0, 1.0)
    assert result.largest_range == 50 and result.total == sum(rainflow_cycles([0.0, 1.0, 0.0, 3.0, 0.0, 50.0, 0.0]).count)


def test_bins_are_half_open_also_where_division_rounds():
    edges = np.arange(0, 1.05, 0.1)
    place = cycles._Bins(edges).place
    assert np.array_equal(place(edges[:-1]), np.arange(len(edges) - 1))
    assert np.array_equal(place(np.nextafter(edges[1:], 0)), np.arange(len(edges) - 1))
    assert place(np.array([-1.0, 5.0, 1e300])).tolist() == [-1, len(edges) - 1, len(edges) - 1]
    uneven = cycles._Bins(np.array([0.0, 1.0, 10.0, 100.0]))
    assert uneven.place(np.array([-1, 0, 1, 9.9, 10, 100])).tolist() == [-1, 0, 1, 1, 2, 3]


def test_short_and_flat_records():
    for record in ([], [3.0], [3.0, 3.0, 3.0]):
        assert len(rainflow_cycles(record).range) == 0
    assert counted([1.0, 3.0]) == {(2.0, 2.0): 0.5}
    with pytest.raises(ValueError):
        rainflow_cycles([1.0, np.nan, 2.0])
