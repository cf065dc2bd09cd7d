"""Water hammer in a single main by the method of characteristics: from a steady state and an event to the pressure envelope.

Fixed grid, Courant number one in every reach, friction taken implicitly in the flow (Wylie and Streeter); the convective terms and
the term V sin(slope) g/a, of the order of V/a, are left out. One liquid in a full pipe, but for discrete vapour cavities and air
pockets at nodes. Screening: where the pressure reaches vapour pressure the peaks that follow depend on the grid, and the answer is
that the main needs a transient study.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.pressure.transient_grid import Grid, Sections
from screener.pressure.transient_nodes import AirValve, Cavities
from screener.pressure.transient_pipe import unsteady_friction_coefficient
from screener.pressure.transient_steady import Steady, reach_resistance, solve_steady
from screener.pressure.transient_wall import CreepingWall
from screener.pressure.water import GRAVITY


@dataclass(frozen=True, eq=False)
class Event:
    """What is to be worked out. demands and air_valves hold node numbers of the grid; vapour_head and elevation are (n + 1,) m.

    history: node numbers whose head is kept in every step. column_separation: False lets the head fall below vapour (exact checks).
    """

    sections: Sections
    grid: Grid
    elevation: np.ndarray
    vapour_head: np.ndarray
    upstream: object
    downstream: object
    demands: tuple
    air_valves: tuple[AirValve, ...]
    density: float
    viscosity: float
    duration: float
    unsteady_friction: bool
    column_separation: bool
    history: np.ndarray


@dataclass(frozen=True, eq=False)
class Transient:
    """Envelope (n + 1,) and histories (steps + 1, points). Heads m, flows m3/s, volumes m3, times s.

    maximum_before_cavity: highest head before any vapour cavity formed anywhere; equal to maximum_head where none did.
    mass_error: water that the sums do not account for, over the water that entered and left or was stored and given back.
    """

    grid: Grid
    elevation: np.ndarray
    steady: Steady
    maximum_head: np.ndarray
    minimum_head: np.ndarray
    maximum_before_cavity: np.ndarray
    time: np.ndarray
    history_head: np.ndarray
    end_flow: np.ndarray  # (steps + 1, 2): into the main, out of its end
    cavity_volume: np.ndarray  # largest at each node
    first_cavity_time: float  # NaN: none
    mass_error: float
    density: float

    @property
    def column_separation(self) -> bool:
        return bool(np.isfinite(self.first_cavity_time))

    def pressure(self, head) -> np.ndarray:
        """Gauge pressure at the nodes of a head along the main [Pa]."""
        return self.density * GRAVITY * (head - self.elevation)

    def head_at(self, head, chainage) -> np.ndarray:
        """Head between nodes, in a straight line; NaN beyond the ends of the main."""
        return np.interp(chainage, self.grid.chainage, head, left=np.nan, right=np.nan)


class _State:
    """Heads and flows of the running step; the arrays are overwritten."""

    def __init__(self, event: Event, steady: Steady) -> None:
        self.event, self.grid = event, event.grid
        self.head, self.flow_in, self.flow_out = steady.head.copy(), steady.flow_in.copy(), steady.flow_out.copy()
        self.flow_in_before, self.flow_out_before = self.flow_in.copy(), self.flow_out.copy()
        self.impedance = event.grid.impedance
        self.resistance = reach_resistance(event.sections, event.grid, steady.friction)
        diameter = event.sections.inside_diameter[event.grid.section]
        reynolds = np.abs(steady.flow_out[:-1]) / event.grid.area * diameter / event.viscosity
        self.unsteady = unsteady_friction_coefficient(reynolds) / 2 * self.impedance if event.unsteady_friction else None
        creeps = event.sections.creep_compliance.size > 0
        self.wall = CreepingWall(event.sections, event.grid, event.density, steady.head) if creeps else None
        valves = [valve.node for valve in event.air_valves]
        allowed = np.full(len(steady.head), event.column_separation)
        allowed[valves] = False
        allowed[[0, -1]] &= [event.upstream.kind != "reservoir", event.downstream.kind != "reservoir"]
        self.cavities = Cavities(event.vapour_head, allowed)
        self.taken = steady.flow_in - steady.flow_out

    def lines(self):
        """H = c_plus - b_plus Q at the end of each reach, H = c_minus + b_minus Q at its start."""
        out, into = self.flow_out[:-1], self.flow_in[1:]
        c_plus, c_minus = self.head[:-1] + self.impedance * out, self.head[1:] - self.impedance * into
        b_plus, b_minus = self.impedance + self.resistance * np.abs(out), self.impedance + self.resistance * np.abs(into)
        if self.unsteady is not None:
            spread = np.abs(into - out)
            c_plus -= self.unsteady * (out - self.flow_out_before[:-1] + np.sign(out) * spread)
            c_minus += self.unsteady * (into - self.flow_in_before[1:] + np.sign(into) * spread)
        if self.wall is not None:
            self.wall.change_lines(self.head, c_plus, b_plus, c_minus, b_minus)
        return c_plus, b_plus, c_minus, b_minus

    def advance(self, time: float) -> None:
        step = self.grid.time_step
        c_plus, b_plus, c_minus, b_minus = self.lines()
        before = self.head
        head = np.empty_like(before)
        inverse_plus, inverse_minus = 1 / b_plus, 1 / b_minus
        s = inverse_plus[:-1] + inverse_minus[1:]
        t = c_plus[:-1] * inverse_plus[:-1] + c_minus[1:] * inverse_minus[1:]
        head[1:-1] = t / s
        for demand in self.event.demands:
            i = demand.node
            head[i], self.taken[i] = demand.solve(s[i - 1], t[i - 1], time)
        for valve in self.event.air_valves:
            i = valve.node
            head[i] = valve.solve(s[i - 1], t[i - 1], before[i], step)
        self.flow_in_before, self.flow_out_before = self.flow_in, self.flow_out
        self.flow_in, self.flow_out = np.empty_like(head), np.empty_like(head)
        self.flow_in[1:-1] = (c_plus[:-1] - head[1:-1]) * inverse_plus[:-1]
        self.flow_out[1:-1] = (head[1:-1] - c_minus[1:]) * inverse_minus[1:]
        self._ends(head, c_plus[-1], b_plus[-1], c_minus[0], b_minus[0], time, step)
        self.cavities.apply(head, self.flow_in, self.flow_out, self.taken, c_plus, b_plus, c_minus, b_minus, time, step)
        if self.wall is not None:
            self.wall.advance(before, head)
        self.head = head

    def _ends(self, head, c_plus, b_plus, c_minus, b_minus, time, step) -> None:
        up, down, cavities = self.event.upstream, self.event.downstream, self.cavities
        low, open_volume = cavities.vapour_head, cavities.volume
        head[0], self.flow_in[0] = up.upstream(c_minus, b_minus, time, step)
        self.flow_out[0] = self.flow_in[0]
        if cavities.allowed[0] and (head[0] < low[0] or open_volume[0] > 0):
            self.flow_in[0] = up.flow_at_head(low[0], time)
            self.flow_out[0] = cavities.hold_end(0, self.flow_in[0], c_minus, b_minus, time, step)
            head[0] = c_minus + b_minus * self.flow_out[0]
        head[-1], self.flow_out[-1] = down.downstream(c_plus, b_plus, time, step)
        self.flow_in[-1] = self.flow_out[-1]
        if cavities.allowed[-1] and (head[-1] < low[-1] or open_volume[-1] > 0):
            self.flow_out[-1] = down.flow_at_head(low[-1], time)
            self.flow_in[-1] = -cavities.hold_end(-1, -self.flow_out[-1], c_plus, b_plus, time, step)
            head[-1] = c_plus - b_plus * self.flow_in[-1]

    def stored_water(self) -> float:
        """Water in the main above that at zero head, less what cavities and air hold [m3]."""
        grid = self.grid
        elastic = GRAVITY * grid.area / grid.wave_speed**2 * grid.reach_length * (self.head[:-1] + self.head[1:]) / 2
        empty = self.cavities.volume.sum() + sum(valve.volume for valve in self.event.air_valves)
        creep = self.wall.stored_water() if self.wall is not None else 0.0
        return float(elastic.sum() + creep - empty)


class _Record:
    """What is kept of a run while it goes on."""

    def __init__(self, state: _State, steady: Steady, steps: int) -> None:
        self.state, self.places = state, state.event.history
        self.highest, self.lowest, self.before_cavity = steady.head.copy(), steady.head.copy(), None
        self.history, self.end_flow, self.net = np.empty((steps + 1, len(self.places))), np.empty((steps + 1, 2)), np.empty(steps + 1)
        self.stored = state.stored_water()
        self.keep(0)

    def keep(self, k: int) -> None:
        state = self.state
        if self.before_cavity is None and state.cavities.any_open:
            self.before_cavity = self.highest.copy()
        np.maximum(self.highest, state.head, out=self.highest)
        np.minimum(self.lowest, state.head, out=self.lowest)
        self.history[k] = state.head[self.places]
        self.end_flow[k] = state.flow_in[0], state.flow_out[-1]
        self.net[k] = self.end_flow[k, 0] - self.end_flow[k, 1] - state.taken.sum()

    def mass_error(self) -> float:
        step = self.state.grid.time_step
        gained = step * (self.net.sum() - (self.net[0] + self.net[-1]) / 2)
        moved = step * np.abs(self.end_flow[1:]).sum()
        missing = gained - (self.state.stored_water() - self.stored)
        least = 1e-9 * float((self.state.grid.area * self.state.grid.reach_length).sum())  # where nothing moves, rounding is no error
        return float(missing / max(moved, abs(gained), least))


def solve_transient(event: Event, progress=None) -> Transient:
    """Run the event. progress: called with the share done, now and then."""
    grid = event.grid
    steady = solve_steady(event.sections, grid, event.upstream, event.downstream, event.demands, event.viscosity)
    event.upstream.start(steady.head[0], steady.flow_in[0])
    event.downstream.start(steady.head[-1], steady.flow_out[-1])
    state = _State(event, steady)
    steps = int(np.ceil(event.duration / grid.time_step - 1e-9))
    record = _Record(state, steady, steps)
    for k in range(1, steps + 1):
        state.advance(k * grid.time_step)
        record.keep(k)
        if progress is not None and (k % 500 == 0 or k == steps):
            progress(k / steps)
    return Transient(
        grid=grid,
        elevation=event.elevation,
        steady=steady,
        maximum_head=record.highest,
        minimum_head=record.lowest,
        maximum_before_cavity=record.highest if record.before_cavity is None else record.before_cavity,
        time=grid.time_step * np.arange(steps + 1),
        history_head=record.history,
        end_flow=record.end_flow,
        cavity_volume=state.cavities.largest_volume,
        first_cavity_time=state.cavities.first_time,
        mass_error=record.mass_error(),
        density=event.density,
    )
