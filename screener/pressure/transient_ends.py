"""What stands at the two ends of the main: reservoir, set flow (a dead end is zero flow), valve, pumps behind a check valve.

Each end answers two questions. In the steady state: `steady_head(flow)` (upstream) or `steady_residual(head, flow)` (downstream).
In each time step: given the line H = C + B Q (upstream end, C-) or H = C - B Q (downstream end, C+), head and flow at the end;
`flow_at_head` is the flow through the end while a vapour cavity holds the head.
SI throughout; flows are positive downstream.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from screener.pressure.water import GRAVITY


def schedule_value(schedule, time: float) -> float:
    """Value of a broken line ((time, value), ...) at a time; constant outside; two points at one time are a step, taken at once."""
    times, values = schedule
    return float(np.interp(time, times, values))


@dataclass
class Reservoir:
    """A water surface that does not move. head m."""

    head: float
    kind = "reservoir"

    def steady_head(self, flow: float) -> float:
        return self.head

    def steady_residual(self, head: float, flow: float) -> float:
        return head - self.head

    def start(self, head: float, flow: float) -> None:
        pass

    def upstream(self, c: float, b: float, time: float, step: float):
        return self.head, (self.head - c) / b

    def downstream(self, c: float, b: float, time: float, step: float):
        return self.head, (c - self.head) / b


@dataclass
class SetFlow:
    """A flow that is forced on the main [m3/s]; zero throughout is a dead end. schedule: (times, flows)."""

    schedule: tuple[np.ndarray, np.ndarray]
    kind = "flow"

    @property
    def first_flow(self) -> float:
        return float(self.schedule[1][0])

    def steady_residual(self, head: float, flow: float) -> float:
        return self.first_flow - flow

    def start(self, head: float, flow: float) -> None:
        pass

    def upstream(self, c: float, b: float, time: float, step: float):
        flow = schedule_value(self.schedule, time)
        return c + b * flow, flow

    def downstream(self, c: float, b: float, time: float, step: float):
        flow = schedule_value(self.schedule, time)
        return c - b * flow, flow

    def flow_at_head(self, head: float, time: float) -> float:
        return schedule_value(self.schedule, time)


@dataclass
class Valve:
    """A valve at the downstream end, Q = opening(t) Cd A sqrt(2 g dH), both ways.

    outlet_head: head behind the valve [m]; discharge_area: Cd A when open [m2], NaN to take it from initial_flow [m3/s].
    schedule: (times, openings 0 to 1), opening meaning the share of Cd A, not of the stem's travel.
    """

    outlet_head: float
    schedule: tuple[np.ndarray, np.ndarray]
    discharge_area: float = float("nan")
    initial_flow: float = float("nan")
    kind = "valve"

    def flow_at(self, head: float, opening: float) -> float:
        drop = head - self.outlet_head
        return float(opening * self.discharge_area * np.sign(drop) * np.sqrt(2 * GRAVITY * abs(drop)))

    def steady_residual(self, head: float, flow: float) -> float:
        if np.isfinite(self.initial_flow):
            return self.initial_flow - flow
        return self.flow_at(head, float(self.schedule[1][0])) - flow

    def start(self, head: float, flow: float) -> None:
        """Take Cd A from the steady state where it was not given."""
        if not np.isfinite(self.discharge_area):
            self.discharge_area = float(flow / (self.schedule[1][0] * np.sqrt(2 * GRAVITY * (head - self.outlet_head))))

    def downstream(self, c: float, b: float, time: float, step: float):
        conductance = 2 * GRAVITY * (schedule_value(self.schedule, time) * self.discharge_area) ** 2
        drive = c - self.outlet_head
        half = conductance * b / 2
        flow = np.sign(drive) * (np.sqrt(half**2 + conductance * abs(drive)) - half)
        return c - b * flow, float(flow)

    def flow_at_head(self, head: float, time: float) -> float:
        return self.flow_at(head, schedule_value(self.schedule, time))


@dataclass
class Pumps:
    """Equal pumps in parallel that lose power together, each discharge through a check valve that shuts when flow would turn back.

    Head by affinity: H = Hs s^2 - (Hs - Hr)(q/qr)^2; torque: T = Tr (t0 s^2 + (1 - t0) s q/qr), with s = speed/rated speed and q the
    flow of one pump. inertia: pump, motor and water of one set [kg m2]; trip_time: when power fails [s] (inf: never).
    """

    suction_head: float  # m
    shut_off_head: float  # m
    rated_head: float  # m
    rated_flow: float  # m3/s, one pump
    rated_speed: float  # rad/s
    rated_torque: float  # N m
    shut_off_torque_share: float  # t0, torque at zero flow over rated torque
    inertia: float  # kg m2
    number: int
    trip_time: float  # s
    speed: float = field(default=1.0, init=False)
    check_valve_shut_at: float = field(default=float("nan"), init=False)
    _torque: float = field(default=0.0, init=False)
    kind = "pumps"

    @property
    def loss(self) -> float:
        """Fall of head per (total flow)^2."""
        return (self.shut_off_head - self.rated_head) / (self.number * self.rated_flow) ** 2

    def steady_head(self, flow: float) -> float:
        return self.suction_head + self.shut_off_head - self.loss * flow * abs(flow)

    def torque_share(self, flow: float) -> float:
        share = self.shut_off_torque_share
        return share * self.speed**2 + (1 - share) * self.speed * flow / (self.number * self.rated_flow)

    def start(self, head: float, flow: float) -> None:
        self.speed, self.check_valve_shut_at = 1.0, float("nan")
        self._torque = self.torque_share(flow)

    def flow_against(self, c: float, b: float) -> float:
        """Flow (0 where the check valve is shut) at the present speed, from Hsuction + H(Q) = C + B Q."""
        drive = self.suction_head + self.shut_off_head * self.speed**2 - c
        if drive <= 0:
            return 0.0
        return 2 * drive / (b + np.sqrt(b**2 + 4 * self.loss * drive))

    def upstream(self, c: float, b: float, time: float, step: float):
        if time <= self.trip_time:
            flow = self.flow_against(c, b)
            return c + b * flow, float(flow)
        before, slowing = self.speed, step * self.rated_torque / (self.inertia * self.rated_speed)
        self.speed = max(0.0, before - slowing * self._torque)
        for _ in range(2):  # trapezoidal rule in the torque
            torque = self.torque_share(self.flow_against(c, b))
            self.speed = max(0.0, before - slowing * (self._torque + torque) / 2)
        flow = self.flow_against(c, b)
        self._torque = self.torque_share(flow)
        if flow == 0.0 and not np.isfinite(self.check_valve_shut_at):
            self.check_valve_shut_at = time
        return c + b * flow, float(flow)

    def flow_at_head(self, head: float, time: float) -> float:
        drive = self.suction_head + self.shut_off_head * self.speed**2 - head
        return float(np.sqrt(max(drive, 0.0) / self.loss))
