"""From the maxima of blocks or peaks to the distribution of the yearly maximum, its doubt included."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from screener.pressure.extremes import EULER, ExtremeFit


def block_maxima(time, value, covered, block_length, start=None):
    """Largest value in each block of time: (block number, maximum, covered share of the block), one row per block that has a value.

    time [s], rising; value; covered: time each sample stands for [s]; block_length [s]; start of block 0 [s], or the first time.
    A block with half its time missing has a maximum that is too low: leave it out by its covered share.
    """
    time, value, covered = (np.asarray(x, dtype=float) for x in (time, value, covered))
    if len(time) == 0:
        return np.empty(0, dtype=np.int64), np.empty(0), np.empty(0)
    number = np.floor((time - (time[0] if start is None else start)) / block_length).astype(np.int64)
    first = np.flatnonzero(np.concatenate(([True], number[1:] != number[:-1])))
    return number[first], np.maximum.reduceat(value, first), np.add.reduceat(covered, first) / block_length


def peaks_over_threshold(time, value, threshold, separation):
    """Largest value of each excursion above a threshold: (time, value). Excursions closer than `separation` [s] are one event.

    time [s], rising; runs declustering of Coles (2001), ch. 5.
    """
    time, value = np.asarray(time, dtype=float), np.asarray(value, dtype=float)
    at = np.flatnonzero(value > threshold)
    if len(at) == 0:
        return np.empty(0), np.empty(0)
    first = np.flatnonzero(np.concatenate(([True], np.diff(time[at]) > separation)))
    largest = np.maximum.reduceat(value[at], first)
    event = np.cumsum(np.isin(np.arange(len(at)), first)) - 1
    is_peak = value[at] == largest[event]
    _, earliest = np.unique(event[is_peak], return_index=True)
    return time[at][is_peak][earliest], largest


def gumbel_from_peaks(peaks, threshold, years):
    """Yearly maximum from peaks over a threshold whose excess is exponential and whose number is Poisson: Gumbel.

    scale = mean excess, location = threshold + scale ln(rate); n peaks in `years` of covered record. Covariance by the delta method:
    Var(scale) = scale^2/n, Var(ln rate) = 1/n. Coles (2001), ch. 4, with shape 0.
    """
    peaks = np.asarray(peaks, dtype=float)
    count = len(peaks)
    method = "Gumbel, peaks over a threshold"
    if count < 3:
        return ExtremeFit(np.nan, np.nan, np.nan, np.full((2, 2), np.nan), count, 1.0, method, f"{count} peaks; a fit needs 3")
    scale = float((peaks - threshold).mean())
    log_rate = np.log(count / years)
    to_parameters = np.array([[log_rate, scale], [1.0, 0.0]])
    covariance = to_parameters @ np.diag([scale**2 / count, 1 / count]) @ to_parameters.T
    reason = "" if count >= 10 else f"only {count} peaks: the sampling error is itself rough"
    return ExtremeFit(float(threshold + scale * log_rate), scale, 0.0, covariance, count, 1.0, method, reason)


def yearly(fit: ExtremeFit) -> ExtremeFit:
    """The distribution of the yearly maximum from that of a shorter (or longer) block's: F_year = F_block^(1/block).

    Gumbel: location + scale ln(1/block), same scale; the covariance goes along. Blocks are taken as independent and alike through the year:
    blocks of one season say nothing of the other.
    """
    if len(fit.covariance) != 2:
        raise ValueError("only a Gumbel fit is carried over to a year")
    shift = np.log(1 / fit.block)
    move = np.array([[1.0, shift], [0.0, 1.0]])
    return replace(fit, location=fit.location + shift * fit.scale, covariance=move @ fit.covariance @ move.T, block=1.0)


def widened(fit: ExtremeFit) -> tuple[float, float]:
    """(location, scale) of the Gumbel distribution that has mean and variance of the maximum with the parameters' doubt included.

    mean = location + 0.5772 scale; variance = (pi^2/6)(scale^2 + Var(scale)) + Var(mean). A short record so widens what a joint is
    rated with; with a long one the fit itself comes back.
    """
    weight = np.array([1.0, EULER])
    variance = np.pi**2 / 6 * (fit.scale**2 + fit.covariance[1, 1]) + weight @ fit.covariance[:2, :2] @ weight
    scale = np.sqrt(6 * variance) / np.pi
    return float(fit.location + EULER * (fit.scale - scale)), float(scale)
