"""From stations to joints: which loggers speak for a joint, how they are blended, and how much less sure that is with distance.

Rules, in this order; every joint gets exactly one of them:
1. Its main has stations, and its chainage is known. Between two stations: both, in proportion to chainage. At a station, or beyond the
   last one: that station alone. Of several stations at one chainage the first in order of name counts.
2. Otherwise the zone. A station listed for the zone alone goes before those on a main; of several the one whose head is the median
   (the lower of the middle two; at equal heads the first in order of name).
3. Otherwise none, with the reason.
Levels are blended as heads and brought to the joint's elevation: p = blend(p_i + rho g z_i) - rho g z.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.pressure.log_summary import LoggerSummary
from screener.pressure.stations import Stations
from screener.pressure.water import GRAVITY

BETWEEN, NEAREST, ZONE, NONE = "between two stations of the main", "nearest station of the main", "station of the zone", "none"
CYCLE_SLOPE = 3.0
"""Slope of the S-N curve by which ranges are made one: that of steel at larger ranges, EN 1993-1-9."""


@dataclass(frozen=True)
class Doubts:
    """Standard deviations [Pa, Pa/m] of what stations say about a joint. All common practice, no source."""

    sensor: float = 5e3
    per_metre: float = 10.0  # 1 m of head in a kilometre
    zone: float = 5e4
    unknown_elevation: float = 1e5


@dataclass(frozen=True, eq=False)
class Assignment:
    """Per joint (n,): rows of the stations first and second (-1: none), share of the second [-], rule, reason where there is none.

    distance: along the main to the nearer station used [m], 0 in a zone, NaN with none. doubt_length: how far the blend reaches [m]:
    d1 d2/(d1 + d2) between two stations, the distance beyond the last.
    """

    first: np.ndarray
    second: np.ndarray
    share: np.ndarray
    rule: np.ndarray
    distance: np.ndarray
    doubt_length: np.ndarray
    reason: np.ndarray

    def blend(self, by_station: np.ndarray) -> np.ndarray:
        """Values of stations (k,) or (k, ...) blended per joint; NaN for joints with none. A second station of share 0 has no say."""
        values = np.asarray(by_station, dtype=float)
        share = self.share.reshape((-1,) + (1,) * (values.ndim - 1))
        taken = values[self.first] * (1 - share) + np.where(share > 0, values[self.second], 0.0) * share if len(values) else np.full((len(share), *values.shape[1:]), np.nan)
        taken[self.first < 0] = np.nan
        return taken


def assign(joint_main, joint_chainage, joint_zone, stations: Stations, station_head: np.ndarray) -> Assignment:
    """Stations of every joint. joint_main, joint_zone: text (n,), "" unknown; joint_chainage [m], NaN unknown.

    station_head: head of each station [Pa], NaN where its logger has no readings: such a station is not used.
    """
    main, zone = (np.asarray(x, dtype=object).astype(str) for x in (joint_main, joint_zone))
    chainage = np.asarray(joint_chainage, dtype=float)
    n = len(main)
    first, second = np.full(n, -1), np.full(n, -1)
    share, distance, length = np.zeros(n), np.full(n, np.nan), np.full(n, np.nan)
    rule = np.full(n, NONE, dtype=object)
    usable = np.isfinite(station_head)
    on_main = usable & (stations.main != "") & np.isfinite(stations.chainage)
    for name in np.unique(main[(main != "") & np.isfinite(chainage)]):
        rows = np.flatnonzero(on_main & (stations.main == name))
        if len(rows):
            joints = np.flatnonzero((main == name) & np.isfinite(chainage))
            rows = rows[np.lexsort((stations.logger[rows].astype(str), stations.chainage[rows]))]
            _, once = np.unique(stations.chainage[rows], return_index=True)
            _along(joints, chainage[joints], rows[once], stations.chainage[rows[once]], first, second, share, distance, length, rule)
    left = first < 0
    for name in np.unique(zone[left & (zone != "")]):
        row = _of_zone(name, stations, station_head, usable)
        if row >= 0:
            joints = left & (zone == name)
            first[joints], rule[joints], distance[joints], length[joints] = row, ZONE, 0.0, 0.0
    reason = np.full(n, "", dtype=object)
    none = first < 0
    reason[none] = "no station on its main, nor in its zone"
    reason[none & (main == "") & (zone == "")] = "neither main nor zone known"
    reason[none & (main != "") & np.isnan(chainage) & (zone == "")] = "chainage on the main not known, and no zone"
    return Assignment(first, second, share, rule, distance, length, reason)


def _along(joints, at, rows, places, first, second, share, distance, length, rule) -> None:
    """Joints of one main between its stations (places rising, each once); writes into the arrays of all joints."""
    right = np.searchsorted(places, at, side="left")
    inside = (right > 0) & (right < len(places))
    lower = np.where(inside, right - 1, np.clip(right, 0, len(places) - 1))
    upper = np.where(inside, right, lower)
    back, ahead = at - places[lower], places[upper] - at
    exact = inside & (ahead == 0)
    lower, inside = np.where(exact, upper, lower), inside & ~exact
    first[joints] = rows[lower]
    second[joints] = np.where(inside, rows[upper], -1)
    with np.errstate(invalid="ignore", divide="ignore"):
        share[joints] = np.where(inside, back / (back + ahead), 0.0)
        bridged = np.where(inside, back * ahead / (back + ahead), np.abs(at - places[lower]))
    distance[joints] = np.where(inside, np.minimum(back, ahead), np.abs(at - places[lower]))
    length[joints] = bridged
    rule[joints] = np.where(inside, BETWEEN, NEAREST)


def _of_zone(name: str, stations: Stations, head: np.ndarray, usable: np.ndarray) -> int:
    rows = np.flatnonzero(usable & (stations.zone == name))
    own = rows[stations.main[rows] == ""]
    rows = own if len(own) else rows
    if len(rows) == 0:
        return -1
    rows = rows[np.lexsort((stations.logger[rows].astype(str), head[rows]))]
    middle = head[rows[(len(rows) - 1) // 2]]
    return int(rows[np.flatnonzero(head[rows] == middle)[0]])


@dataclass(frozen=True, eq=False)
class JointPressures:
    """Per joint (n,), Pa gauge at the joint's elevation; NaN where no station speaks for it, see assignment.reason.

    level: median in time. daily_rise: median largest of the day less level. daily_range. annual_location, annual_scale: Gumbel of the
    yearly maximum; annual_covariance (n, 2, 2). cycles_per_day, cycle_range: the one range that does the damage of all at slope 3.
    doubt: standard deviation of any of these pressures. elevation_known: whether levels were brought to the joint's elevation.
    """

    assignment: Assignment
    level: np.ndarray
    daily_rise: np.ndarray
    daily_range: np.ndarray
    largest: np.ndarray
    annual_location: np.ndarray
    annual_scale: np.ndarray
    annual_covariance: np.ndarray
    cycles_per_day: np.ndarray
    cycle_range: np.ndarray
    doubt: np.ndarray
    elevation_known: np.ndarray


def joint_pressures(joint_main, joint_chainage, joint_zone, joint_elevation, stations: Stations, summaries: list[LoggerSummary], density: float, doubts: Doubts) -> JointPressures:
    """Pressures of every joint from logger summaries; joint_elevation [m], NaN unknown; density of the water [kg/m3].

    Covariances of two stations are blended as if they saw the same storms (fully correlated), which is the wider choice. Where joint or
    station has no elevation the pressure is taken over uncorrected and doubted accordingly.
    """
    by_name = {summary.logger: summary for summary in summaries}
    seen = [by_name.get(str(name)) for name in stations.logger]

    def of(value) -> np.ndarray:
        return np.array([np.nan if s is None or s.readings == 0 else value(s) for s in seen], dtype=float)

    lift = density * GRAVITY * stations.elevation
    level = of(lambda s: s.level)
    given = assign(joint_main, joint_chainage, joint_zone, stations, np.where(np.isnan(lift), level, level + lift))
    known = np.isfinite(given.blend(stations.elevation)) & np.isfinite(joint_elevation)
    move = np.where(known, given.blend(lift) - density * GRAVITY * np.where(known, joint_elevation, 0.0), 0.0)
    number = of(lambda s: s.cycles_per_day)
    summed = of(_daily_cycle_sum)
    cycles = given.blend(number)
    with np.errstate(invalid="ignore", divide="ignore"):
        span = np.where(cycles > 0, given.blend(summed) / cycles, np.nan) ** (1 / CYCLE_SLOPE)
    covariance = np.array([np.full((2, 2), np.nan) if s is None else s.annual_maximum.covariance for s in seen]).reshape(-1, 2, 2)
    variance = doubts.sensor**2 + (doubts.per_metre * given.doubt_length) ** 2 + (given.rule == ZONE) * doubts.zone**2 + ~known * doubts.unknown_elevation**2
    return JointPressures(
        given, given.blend(level) + move, given.blend(of(_daily_rise)), given.blend(of(lambda s: s.daily_range)), given.blend(of(lambda s: s.largest)) + move,
        given.blend(of(lambda s: s.annual_maximum.location)) + move, given.blend(of(lambda s: s.annual_maximum.scale)), given.blend(covariance),
        cycles, span, np.where(given.first < 0, np.nan, np.sqrt(variance)), known,
    )  # fmt: skip


def _daily_rise(summary: LoggerSummary) -> float:
    return max(float(np.median(summary.day_largest)) - summary.level, 0.0)


def _daily_cycle_sum(summary: LoggerSummary) -> float:
    """Sum of n r^3 per covered day over the cycles that `cycles_per_day` counts; those beyond the bins at the largest range seen."""
    edges, counts = summary.cycles.range_edges, summary.cycles.counts
    if summary.covered_days <= 0:
        return np.nan
    low, high = edges[:-1], edges[1:]
    power = CYCLE_SLOPE + 1
    mean = (high**power - low**power) / (power * (high - low))
    counted = low >= summary.smallest_cycle
    return float((counts * mean)[counted].sum() + summary.cycles.beyond * summary.cycles.largest_range**CYCLE_SLOPE) / summary.covered_days
