"""What sits on the main between its ends: demands, air valves, and the vapour cavities that form where the pressure falls too far.

In each step a node's head obeys  water away = S H - T  (S = 1/B- + 1/B+ of the two reaches, T = C+/B- + C-/B+), SI throughout.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from screener.pressure.transient_ends import schedule_value
from screener.pressure.water import ATMOSPHERIC_PRESSURE, GRAVITY

AIR_DENSITY = 1.2
"""Air at 20 C and one atmosphere [kg/m3], for the outflow of air valves."""


@dataclass
class ConstantDemand:
    """A flow taken off whatever the pressure [m3/s], times a schedule (times, shares)."""

    node: int
    flow: float
    schedule: tuple[np.ndarray, np.ndarray]

    def draw(self, head: float, time: float) -> float:
        return self.flow * schedule_value(self.schedule, time)

    def solve(self, s: float, t: float, time: float):
        flow = self.draw(0.0, time)
        return (t - flow) / s, flow


@dataclass
class OrificeDemand:
    """An outlet to atmosphere, q = share(t) Cd A sqrt(2 g (H - z)); nothing flows back in."""

    node: int
    elevation: float
    discharge_area: float
    schedule: tuple[np.ndarray, np.ndarray]

    def draw(self, head: float, time: float) -> float:
        return self.discharge_area * schedule_value(self.schedule, time) * float(np.sqrt(2 * GRAVITY * max(head - self.elevation, 0.0)))

    def solve(self, s: float, t: float, time: float):
        """Root y = sqrt(H - z) of  S (y^2 + z) + Cd A sqrt(2g) y = T."""
        coefficient = self.discharge_area * schedule_value(self.schedule, time) * np.sqrt(2 * GRAVITY)
        drive = t - s * self.elevation
        if drive <= 0:
            return t / s, 0.0
        y = 2 * drive / (coefficient + np.sqrt(coefficient**2 + 4 * s * drive))
        return self.elevation + y**2, float(coefficient * y)


@dataclass
class AirValve:
    """Lets air in freely at atmospheric pressure and out through an orifice; the pocket stays at the node and at water temperature.

    outlet_area: Cd A for air [m2]; 0 keeps the air. volume: of the pocket, air: the same at atmospheric pressure [m3].
    """

    node: int
    elevation: float
    outlet_area: float
    barometric_head: float
    volume: float = 0.0
    air: float = 0.0
    opened: bool = False
    largest_volume: float = 0.0

    def release(self, head: float, step: float) -> None:
        """Let air out over one step at the pocket's pressure; incompressible orifice law, fair for small overpressures."""
        over = head - self.elevation
        if over > 0 and self.outlet_area > 0:
            velocity = np.sqrt(2 * (ATMOSPHERIC_PRESSURE / self.barometric_head) * over / AIR_DENSITY)
            self.air = max(0.0, self.air - self.outlet_area * velocity * (1 + over / self.barometric_head) * step)

    def solve(self, s: float, t: float, head_before: float, step: float):
        """Head at the end of the step; the pocket's volume is brought up to date."""
        liquid = t / s
        if self.volume <= 0 and liquid >= self.elevation:
            return liquid
        self.release(head_before, step)
        open_volume = self.volume + step * (s * self.elevation - t)  # volume if the pocket stayed at atmospheric pressure
        if open_volume >= self.air:
            self.volume = self.air = max(open_volume, 0.0)
            head = self.elevation if self.volume > 0 else liquid
        else:
            head = self._squeezed(s, t, step)
            self.volume = self.volume + step * (s * head - t)
            if self.air <= 0 or self.volume <= 0:
                self.volume = self.air = 0.0
                head = liquid
        self.opened = self.opened or self.volume > 0
        self.largest_volume = max(self.largest_volume, self.volume)
        return head

    def _squeezed(self, s: float, t: float, step: float) -> float:
        """Isothermal pocket: (y + hb)(V + step (S (y + z) - T)) = hb air, with y = H - z; the larger root."""
        hb = self.barometric_head
        slope, level = step * s, self.volume + step * (s * self.elevation - t)
        b, c = level + slope * hb, hb * (level - self.air)
        return self.elevation + (-b + np.sqrt(max(b * b - 4 * slope * c, 0.0))) / (2 * slope)


@dataclass
class Cavities:
    """Discrete vapour cavities at the nodes. vapour_head, volume, largest_volume: (n + 1,) m, m3, m3; allowed: where one may form."""

    vapour_head: np.ndarray
    allowed: np.ndarray
    volume: np.ndarray = field(init=False)
    largest_volume: np.ndarray = field(init=False)
    any_open: bool = False
    first_time: float = float("nan")

    def __post_init__(self) -> None:
        self.volume = np.zeros_like(self.vapour_head)
        self.largest_volume = np.zeros_like(self.vapour_head)

    def apply(self, head, flow_in, flow_out, taken, c_plus, b_plus, c_minus, b_minus, time: float, step: float) -> None:
        """Hold nodes with a cavity at vapour pressure, in place. Lines at inner nodes: H = c_plus - b_plus Q, H = c_minus + b_minus Q."""
        low = self.allowed & (head < self.vapour_head)
        if not self.any_open and not low.any():
            return
        at = np.flatnonzero((low | (self.volume > 0))[1:-1]) + 1
        low_head, before = self.vapour_head[at], self.volume[at]
        grown = before + step * ((low_head - c_minus[at]) / b_minus[at] + taken[at] - (c_plus[at - 1] - low_head) / b_plus[at - 1])
        s = 1 / b_plus[at - 1] + 1 / b_minus[at]
        # a cavity that would close within the step takes in just its own volume of water; the head for that lies above vapour
        head[at] = np.where(grown > 0, low_head, low_head - np.minimum(grown, 0.0) / (s * step))
        flow_in[at] = (c_plus[at - 1] - head[at]) / b_plus[at - 1]
        flow_out[at] = (head[at] - c_minus[at]) / b_minus[at]
        self.volume[at] = np.maximum(grown, 0.0)
        self._remember(time)

    def hold_end(self, node: int, outside: float, c: float, b: float, time: float, step: float) -> float:
        """Flow into the main from an end with a cavity, whose volume is brought up to date.

        outside: water that reaches the node from beyond the main at vapour head [m3/s]; c, b: the main's line, H = c + b (flow into it).
        """
        grown = self.volume[node] + step * ((self.vapour_head[node] - c) / b - outside)
        flow = (self.vapour_head[node] - c) / b - min(grown, 0.0) / step
        self.volume[node] = max(grown, 0.0)
        self._remember(time)
        return flow

    def _remember(self, time: float) -> None:
        np.maximum(self.largest_volume, self.volume, out=self.largest_volume)
        self.any_open = bool(self.volume.any())
        if self.any_open and not np.isfinite(self.first_time):
            self.first_time = time
