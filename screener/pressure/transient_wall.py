"""The viscoelastic wall: Kelvin-Voigt elements whose retarded hoop strain takes water from a passing wave.

Retarded strain of element k under pressure head h above the steady one:  d(eps_k)/dt = (J_k F - eps_k)/tau_k,  F = c D rho g h/(2 e).
The wave equation gains (2 a^2/g) d(eps)/dt (Gally, Guney and Rieutord 1979; Covas et al. 2005, both from memory).
Over a step F is taken linear in time, which integrates each element exactly. SI throughout.
"""

from __future__ import annotations

import numpy as np

from screener.pressure.transient_grid import Grid, Sections
from screener.pressure.water import GRAVITY


class CreepingWall:
    """Strain of both ends of every reach, (k, n) each: `first` at the reach's upstream node, `last` at its downstream node."""

    def __init__(self, sections: Sections, grid: Grid, density: float, steady_head: np.ndarray) -> None:
        at = grid.section
        time = sections.retardation_time[:, None]
        self.steady_head = steady_head
        self.decay = np.exp(-grid.time_step / time)
        part = time / grid.time_step * (1 - self.decay)
        stress = (sections.factor * sections.inside_diameter / (2 * sections.wall))[at] * density * GRAVITY
        per_pascal = sections.creep_compliance[:, at]
        compliance = np.where(per_pascal > 0, per_pascal * stress, 0.0)  # strain per metre of head, once the element has acted
        self.of_new, self.of_old = compliance * (1 - part), compliance * (part - self.decay)
        self.weight = 2 * grid.wave_speed**2 / GRAVITY
        self.stiffening = 1 + self.weight * self.of_new.sum(axis=0)
        self.old_sum = self.of_old.sum(axis=0)
        self.water = 2 * grid.area * grid.reach_length / 2  # volume per unit strain of half a reach
        self.first = np.zeros_like(compliance)
        self.last = np.zeros_like(compliance)

    def change_lines(self, head, c_plus, b_plus, c_minus, b_minus) -> None:
        """Put the wall's share into H = c_plus - b_plus Q (at reach ends) and H = c_minus + b_minus Q (at reach starts), in place."""
        rise = head - self.steady_head
        for line, resistance, strain, h, h0 in (
            (c_plus, b_plus, self.last, rise[1:], self.steady_head[1:]),
            (c_minus, b_minus, self.first, rise[:-1], self.steady_head[:-1]),
        ):
            known = ((self.decay - 1) * strain).sum(axis=0) + self.old_sum * h
            line -= self.weight * known - (self.stiffening - 1) * h0
            line /= self.stiffening
            resistance /= self.stiffening

    def advance(self, head_before, head_after) -> None:
        """Bring the strains to the end of the step."""
        before, after = head_before - self.steady_head, head_after - self.steady_head
        self.last = self.decay * self.last + self.of_new * after[1:] + self.of_old * before[1:]
        self.first = self.decay * self.first + self.of_new * after[:-1] + self.of_old * before[:-1]

    def stored_water(self) -> float:
        """Volume that the retarded strain holds [m3]."""
        return float((self.water * (self.first + self.last)).sum())
