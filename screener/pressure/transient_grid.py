"""The main cut into reaches that a wave crosses in one time step, each with a wave speed changed a little and reported."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.pressure.transient_pipe import common_time_step
from screener.pressure.water import GRAVITY


@dataclass(frozen=True, eq=False)
class Sections:
    """Stretches of pipe with one bore, wall and wave speed, in order. Arrays (m,) in SI; NaN where not stated.

    creep_compliance: (k, m) [1/Pa] of Kelvin-Voigt elements, retardation_time: (k,) [s]; zero rows for pipes that do not creep.
    """

    start: np.ndarray  # chainage m
    length: np.ndarray  # m
    inside_diameter: np.ndarray  # m
    wall: np.ndarray  # m
    modulus: np.ndarray  # Pa
    factor: np.ndarray  # restraint factor c, -
    wave_speed: np.ndarray  # m/s
    friction_factor: np.ndarray  # Darcy, -, NaN where a roughness is given
    roughness: np.ndarray  # m, NaN where a friction factor is given
    rating: np.ndarray  # Pa gauge, NaN unknown
    creep_compliance: np.ndarray
    retardation_time: np.ndarray

    @property
    def area(self) -> np.ndarray:
        return np.pi / 4 * self.inside_diameter**2


@dataclass(frozen=True, eq=False)
class Grid:
    """Reaches (n,) and their nodes (n + 1,).

    section: index of each reach's section; speed_change: (m,) relative change of wave speed per section, reaches: (m,) their number.
    short: (m,) sections that a wave crosses in less than half of the step asked for; each is one reach whatever that does to its speed.
    """

    time_step: float
    chainage: np.ndarray
    section: np.ndarray
    reach_length: np.ndarray
    wave_speed: np.ndarray
    area: np.ndarray
    reaches: np.ndarray
    speed_change: np.ndarray
    short: np.ndarray

    @property
    def impedance(self) -> np.ndarray:
        """B = a/(g A) per reach [s/m2]."""
        return self.wave_speed / (GRAVITY * self.area)

    @property
    def worst_change(self) -> float:
        """Largest relative change of wave speed, short sections left out (they are all there is when every section is short)."""
        return _worst(self.speed_change, self.short)

    @property
    def added_travel(self) -> float:
        """Share by which the short sections lengthen a wave's way along the main."""
        own = self.time_step * self.reaches * (1 + self.speed_change)
        return float(np.sum((self.time_step * self.reaches - own)[self.short]) / np.sum(own))


def reach_counts(travel_time, time_step: float):
    """Nearest whole number of reaches per section, at least one."""
    return np.maximum(1, np.rint(np.asarray(travel_time) / time_step)).astype(int)


def make_grid(sections: Sections, wanted_reaches: int, change_limit: float, most_reaches: int) -> Grid:
    """The coarsest grid of at least `wanted_reaches` whose wave speeds change by no more than `change_limit`.

    Where none up to `most_reaches` keeps the limit, the grid with the smallest worst change is taken; `worst_change` then tells.
    Long sections weigh more, so that a short spool does not shift the wave speed of the main.
    """
    travel = sections.length / sections.wave_speed
    short = travel < 0.5 * travel.sum() / wanted_reaches
    best = None
    count = float(wanted_reaches)
    while True:
        reaches = reach_counts(travel, travel.sum() / count)
        if reaches.sum() > most_reaches and best is not None:
            break
        step, change = common_time_step(travel, reaches, travel)
        worst = _worst(change, short)
        if best is None or worst < best[0]:
            best = (worst, reaches, step, change)
        if worst <= change_limit or reaches.sum() > most_reaches:
            break
        count = max(count + 1, count * 1.02)
    _, reaches, step, change = best
    return _lay_out(sections, reaches, step, change, short)


def _worst(change: np.ndarray, short: np.ndarray) -> float:
    return float(np.max(np.abs(change if short.all() else change[~short])))


def _lay_out(sections: Sections, reaches, step: float, change, short) -> Grid:
    section = np.repeat(np.arange(len(reaches)), reaches)
    length = (sections.length / reaches)[section]
    place = np.concatenate([[0.0], np.cumsum(length)]) + sections.start[0]
    return Grid(step, place, section, length, (sections.wave_speed * (1 + change))[section], sections.area[section], reaches, change, short)
