"""From pressure cycles to damage: stress range of a joint, Miner's sum, damage to date and at a horizon, what is left."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

PRACTICALLY_ENDLESS = 1000.0
"""Remaining life [years] from which it is called endless: far beyond what any other part of a main lasts."""


def bolt_load(clamp_force, load_factor, separating_load):
    """Total bolt load W [N] of a clamped joint under a separating load H: F + phi H while the face holds, H after it opens.

    clamp_force F at no pressure [N], load_factor phi [-], separating_load H [N]. The face opens at H = F/(1 - phi); W is continuous there.
    Linear springs; bolts in the standard bolted-joint diagram (VDI 2230-1).
    """
    h = np.asarray(separating_load, dtype=float)
    return np.maximum(clamp_force + np.asarray(load_factor, dtype=float) * h, h)


def stress_range(clamp_force, load_factor, lower_load, upper_load, stress_per_load):
    """Stress range dS [Pa] = (dS/dW)(W(H_upper) - W(H_lower)): phi dH while the face holds, all of dH beyond opening.

    Loads H [N]; stress_per_load dS/dW [Pa/N] of the place looked at (ring bore, hole edge, bolt).
    """
    lower, upper = bolt_load(clamp_force, load_factor, lower_load), bolt_load(clamp_force, load_factor, upper_load)
    return np.asarray(stress_per_load, dtype=float) * (upper - lower)


def bin_ranges(edges, slope):
    """One range for each bin of a histogram, alike in damage: (mean of r^m over the bin)^(1/m), for ranges spread evenly in it.

    edges (b + 1,), any unit, slope m [-]. Lies between the middle and the upper edge.
    """
    low, high = np.asarray(edges, dtype=float)[:-1], np.asarray(edges, dtype=float)[1:]
    return ((high ** (slope + 1) - low ** (slope + 1)) / ((slope + 1) * (high - low))) ** (1 / slope)


def miner_sum(ranges, counts, life: Callable[[np.ndarray], np.ndarray]):
    """Miner's sum D [-] = sum(n/N) over the last axis; 1 (or what the standard asks) is the end.

    ranges, counts: broadcast against each other, last axis = bins; life: cycles to failure of an array of ranges, as in `sn_curves`.
    A bin without cycles adds nothing whatever its range. NaN range with cycles in it: NaN.
    """
    spans, number = np.broadcast_arrays(np.asarray(ranges, dtype=float), np.asarray(counts, dtype=float))
    return np.where(number == 0, 0.0, number / life(spans)).sum(axis=-1)


def miner_sum_of_joints(pressure_ranges, counts, stress_per_pressure, life: Callable[[np.ndarray], np.ndarray]):
    """Miner's sum per joint (n,) of one pressure histogram or one per joint, bin by bin so that memory stays in proportion to n.

    pressure_ranges (b,) [Pa]; counts (b,) or (n, b); stress_per_pressure (n,) [Pa/Pa], constant while the face holds; life takes (n,).
    """
    factor = np.asarray(stress_per_pressure, dtype=float)
    number = np.asarray(counts, dtype=float)
    total = np.zeros_like(factor)
    for k, span in enumerate(np.asarray(pressure_ranges, dtype=float)):
        total = total + miner_sum((factor * span)[:, None], np.broadcast_to(number[..., k], factor.shape)[:, None], lambda s: life(s[:, 0])[:, None])
    return total


def equivalent_range(ranges, counts, slope):
    """The one range that does, with the same number of cycles, the damage of all: (sum n r^m/sum n)^(1/m); last axis = bins.

    NaN without cycles. slope m [-] of the S-N curve; m = 5 weighs large ranges more than m = 3.
    """
    number = np.asarray(counts, dtype=float)
    total = number.sum(axis=-1)
    weighted = (number * np.asarray(ranges, dtype=float) ** slope).sum(axis=-1)
    return (weighted / np.where(total > 0, total, np.nan)) ** (1 / slope)


@dataclass(frozen=True, eq=False)
class Life:
    """Damage of joints: to date and at the horizon [-], remaining years, and a reason where there is no number of years.

    remaining_years is inf where life is practically endless, 0 where the sum is used up, NaN where unknown. reason: (n,) text.
    """

    to_date: np.ndarray
    at_horizon: np.ndarray
    remaining_years: np.ndarray
    reason: np.ndarray


def remaining_life(yearly_damage, years_in_service, horizon_years, allowed_sum) -> Life:
    """Damage to date, at the horizon, and years until allowed_sum, for cycles that have been and stay as they are.

    yearly_damage [1/year], years_in_service, horizon_years [years], allowed_sum [-]: 1 by EN 1993-1-9, 0.5 by IIW for changing mean
    (from memory). Used up does not mean failed: characteristic curves are passed by 97.7 of 100.
    """
    rate, years, horizon, allowed = np.broadcast_arrays(*(np.asarray(x, dtype=float) for x in (yearly_damage, years_in_service, horizon_years, allowed_sum)))
    to_date = rate * years
    with np.errstate(divide="ignore", invalid="ignore"):
        left = np.where(rate == 0, np.inf, (allowed - to_date) / rate)
    unknown = np.isnan(to_date) | np.isnan(allowed)
    left = np.where(unknown, np.nan, np.maximum(left, 0.0))
    endless = left > PRACTICALLY_ENDLESS
    reason = np.full(rate.shape, "", dtype=object)
    reason[unknown] = "damage unknown: cycles, stress per load or years in service are missing"
    reason[endless] = f"practically endless: more than {PRACTICALLY_ENDLESS:.0f} years at these cycles"
    reason[endless & (rate == 0)] = "practically endless: every stress range is below the cut-off"
    reason[left == 0] = "the allowed damage sum is used up"
    return Life(to_date, rate * (years + horizon), np.where(endless, np.inf, left), reason)
