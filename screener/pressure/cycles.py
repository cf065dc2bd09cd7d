"""Rainflow counting, ASTM E1049-85 section 5.4.4, streaming and exact.

The standard walks a stack of turning points, three at a time. The same cycles come out, in any order, by removing from the sequence of
turning points every range that lies within both its neighbours, until none is left; what stays over is counted in half cycles. So the
removal can be done for the whole sequence at once, pass by pass. Where neighbouring ranges are exactly equal the standard may count one
cycle as two equal halves and here as one full cycle or the other way round: counts by range and mean are the same.

A record may be handed over in pieces of any size. What is kept between pieces is the sequence that is not closed yet: in a record of
k different levels at most about 2 k points.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

PIECE = 1 << 16
"""Samples worked on at once: small enough to stay in a processor's cache."""

WORTH_A_PASS = 0.05
"""A pass that removes less than this share of the points leaves the rest to the stack loop: work stays in proportion to the record."""

SHORT = 64
"""Sequences up to this many points go to the stack loop at once."""


@dataclass(frozen=True, eq=False)
class Cycles:
    """Single cycles, equal-length arrays: range and mean in the unit of the record, count 1 (full) or 0.5 (half)."""

    range: np.ndarray
    mean: np.ndarray
    count: np.ndarray


@dataclass(frozen=True, eq=False)
class CycleHistogram:
    """Cycles in bins of range, and of mean where asked for.

    range_edges (r + 1,): bin k holds range_edges[k] <= range < range_edges[k + 1]; mean_edges (m + 1,) or None, open at both ends: the
    first and last bin of the mean also hold what lies beyond. counts: (r,) or (r, m). beyond: cycles of a range at or above the last
    edge, in no bin; largest_range tells how large. below: cycles under the first edge.
    """

    range_edges: np.ndarray
    mean_edges: np.ndarray | None
    counts: np.ndarray
    beyond: float
    below: float
    largest_range: float

    @property
    def total(self) -> float:
        return float(self.counts.sum()) + self.beyond + self.below


def turning_points(values: np.ndarray) -> np.ndarray:
    """First value, every reversal, last value; equal neighbours count once. values: 1-D, no NaN."""
    changes = values[1:] != values[:-1]
    if not changes.all():
        values = np.concatenate((values[:1], values[1:][changes]))
    if len(values) < 3:
        return values
    rising = values[1:] > values[:-1]
    keep = np.empty(len(values), dtype=bool)
    keep[0] = keep[-1] = True
    np.not_equal(rising[1:], rising[:-1], out=keep[1:-1])
    return values[keep]


def close_cycles(points: np.ndarray, with_mean: bool) -> tuple[np.ndarray, np.ndarray, np.ndarray | None]:
    """Take every closed cycle out of alternating points: (points left over, ranges, means or None).

    With peaks as they are and valleys of the opposite sign, w, a point is more extreme when w is larger. The range between points i and
    i + 1 is closed when i + 1 is no more extreme than i - 1 and i no more than i + 2; it is w[i] + w[i + 1]. Neighbours never go in one
    pass. Taking out pairs keeps peaks and valleys alternating.
    """
    spans, means = [], []
    if len(points) > SHORT:
        first_valley = 0 if points[1] > points[0] else 1
        outward = points.copy()
        outward[first_valley::2] *= -1.0
        while len(outward) > SHORT:
            at = np.flatnonzero(_closed(outward)) + 1
            near, far = outward[at], outward[at + 1]
            spans.append(near + far)
            if with_mean:
                means.append(0.5 * np.where(at % 2 == first_valley, far - near, near - far))
            keep = np.ones(len(outward), dtype=bool)
            keep[at] = keep[at + 1] = False
            outward = outward[keep]
            if len(near) < WORTH_A_PASS * len(keep):
                break
        outward[first_valley::2] *= -1.0
        points = outward
    left, begin, end = _close_by_stack(points)
    spans.append(np.abs(begin - end))
    means.append(0.5 * (begin + end))
    return left, np.concatenate(spans), np.concatenate(means) if with_mean else None


def _closed(outward: np.ndarray) -> np.ndarray:
    """Mask over points 1 .. n - 3: the range from here to the next point is closed and goes in this pass."""
    beyond = outward[2:] >= outward[:-2]
    inside = outward[2:-1] <= outward[:-3]
    mark = beyond[1:]
    mark &= inside
    # Equal ranges can mark neighbours: then those at even places go now, and those at odd places only beside none of them.
    even, odd = mark[::2], mark[1::2]
    odd &= ~even[: len(odd)]
    odd[: len(even) - 1] &= ~even[1:]
    return mark


def _close_by_stack(points: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """The same, point by point, in one walk: for what is short or nested too deep for passes. (left, one end of each cycle, other end)."""
    stack: list[float] = []
    begin: list[float] = []
    end: list[float] = []
    for point in points.tolist():
        stack.append(point)
        while len(stack) > 3:
            a, b, c, d = stack[-4:]
            closed = a <= c and b <= d if b > c else a >= c and b >= d
            if not closed:
                break
            begin.append(b)
            end.append(c)
            del stack[-3:-1]
    return np.array(stack), np.array(begin, dtype=float), np.array(end, dtype=float)


class RainflowCounter:
    """Counts a record handed over in pieces, into bins of range (and mean); see `CycleHistogram`.

    Samples that are NaN or infinite break the record, as `break_here` does: no cycle is counted across a gap, and what is open there is counted
    in half cycles.
    """

    def __init__(self, range_edges: np.ndarray, mean_edges: np.ndarray | None = None) -> None:
        self._ranges = _Bins(range_edges)
        self._means = None if mean_edges is None else _Bins(mean_edges)
        columns = 1 if self._means is None else self._means.size
        self._counts = np.zeros(self._ranges.size * columns)
        self._beyond = self._below = self._largest = 0.0
        self._open = np.empty(0)

    def feed(self, values: np.ndarray) -> None:
        """Count on. values: 1-D, in order of time."""
        values = np.asarray(values)
        for start in range(0, len(values), PIECE):
            piece = np.asarray(values[start : start + PIECE], dtype=float)
            unknown = ~np.isfinite(piece)
            if not unknown.any():
                self._feed_piece(piece)
                continue
            edges = np.flatnonzero(np.diff(np.concatenate(([True], unknown, [True]))))
            for number, (begin, end) in enumerate(zip(edges[::2], edges[1::2], strict=True)):
                if number or begin > 0:
                    self.break_here()
                self._feed_piece(piece[begin:end])
            if unknown[-1]:
                self.break_here()

    def break_here(self) -> None:
        """The record is interrupted: what is open counts in half cycles, and counting starts anew."""
        begin, end = self._open[:-1], self._open[1:]
        self._tally(np.abs(begin - end), 0.5 * (begin + end), 0.5)
        self._open = np.empty(0)

    def result(self) -> CycleHistogram:
        """Cycles so far, with the residue in half cycles; counting can go on afterwards."""
        kept = self._counts.copy(), self._beyond, self._below, self._largest, self._open
        self.break_here()
        shape = (self._ranges.size,) if self._means is None else (self._ranges.size, self._means.size)
        found = CycleHistogram(
            self._ranges.edges, None if self._means is None else self._means.edges, self._counts.reshape(shape), self._beyond, self._below, self._largest
        )
        self._counts, self._beyond, self._below, self._largest, self._open = kept
        return found

    @property
    def open_points(self) -> int:
        """Points kept for cycles that are not closed yet."""
        return len(self._open)

    def _feed_piece(self, piece: np.ndarray) -> None:
        if len(piece) == 0:
            return
        with_mean = self._means is not None
        left, span, mean = close_cycles(turning_points(piece), with_mean)
        self._tally(span, mean, 1.0)
        if len(self._open):
            # The last open point may go on in the same direction: its reversal is settled together with what follows.
            left, span, mean = close_cycles(turning_points(np.concatenate((self._open, left))), with_mean)
            self._tally(span, mean, 1.0)
        self._open = left

    def _tally(self, span: np.ndarray, mean: np.ndarray | None, weight: float) -> None:
        if len(span) == 0:
            return
        self._largest = max(self._largest, float(span.max()))
        row = self._ranges.place(span)
        if self._means is not None:
            column = np.clip(self._means.place(mean), 0, self._means.size - 1)
            column = column[(row >= 0) & (row < self._ranges.size)]
        found = np.bincount(row + 1, minlength=self._ranges.size + 2)
        self._below += weight * found[0]
        self._beyond += weight * found[-1]
        if self._means is not None:
            row = row[(row >= 0) & (row < self._ranges.size)]
            found = np.bincount(row * self._means.size + column, minlength=len(self._counts))
            self._counts += weight * found
        else:
            self._counts += weight * found[1:-1]


class _Bins:
    """Half-open bins; even ones are found by division, with the edges deciding."""

    def __init__(self, edges: np.ndarray) -> None:
        self.edges = np.array(edges, dtype=float)
        if self.edges.ndim != 1 or len(self.edges) < 2 or not (np.diff(self.edges) > 0).all():
            raise ValueError("bin edges: at least two, rising")
        self.size = len(self.edges) - 1
        step = (self.edges[-1] - self.edges[0]) / self.size
        self._per_unit = 1 / step if np.allclose(np.diff(self.edges), step, rtol=1e-9, atol=0) else None

    def place(self, values: np.ndarray) -> np.ndarray:
        """Bin of each value: -1 below the first edge, `size` from the last edge up."""
        if self._per_unit is None:
            return np.searchsorted(self.edges, values, side="right") - 1
        guess = ((np.minimum(values, self.edges[-1]) - self.edges[0]) * self._per_unit).astype(np.int64)
        np.clip(guess, 0, self.size - 1, out=guess)
        guess -= values < self.edges[guess]
        guess += values >= self.edges[guess + 1]
        return guess


def rainflow_cycles(values: np.ndarray) -> Cycles:
    """Every cycle of one record, closed ones first, then the residue in half cycles from its start to its end.

    values: 1-D without NaN (NaN raises ValueError: break the record there). Half cycles that close with an equal neighbour may come as
    one full cycle, see the head of this module.
    """
    values = np.asarray(values, dtype=float)
    if np.isnan(values).any():
        raise ValueError("a record with unknown samples must be broken there")
    left, span, mean = close_cycles(turning_points(values), with_mean=True)
    count = np.concatenate((np.ones(len(span)), np.full(max(len(left) - 1, 0), 0.5)))
    halves = np.abs(np.diff(left)), 0.5 * (left[:-1] + left[1:])
    return Cycles(np.concatenate((span, halves[0])), np.concatenate((mean, halves[1])), count)
