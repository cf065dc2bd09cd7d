"""The steady state that the transient starts from: flow and head along the main, friction and demands included."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.optimize import brentq

from screener.pressure.transient_grid import Grid, Sections
from screener.pressure.transient_pipe import friction_factor
from screener.pressure.water import GRAVITY
from screener.records import InputError

FASTEST_FLOW = 20.0
"""Velocity [m/s] beyond which no steady state is sought."""

RESTING_REYNOLDS = 1e5
"""Where a stretch is at rest at the start, its friction factor is taken at this Reynolds number."""


@dataclass(frozen=True, eq=False)
class Steady:
    """head: (n + 1,) m; flow_in, flow_out: (n + 1,) m3/s arriving at and leaving each node; friction: (n,) Darcy factor per reach."""

    head: np.ndarray
    flow_in: np.ndarray
    flow_out: np.ndarray
    friction: np.ndarray


def reach_friction(sections: Sections, grid: Grid, flow, viscosity: float) -> np.ndarray:
    """Darcy factor per reach: as stated, or from the roughness at the reach's steady flow."""
    speed = np.abs(flow) / grid.area
    diameter = sections.inside_diameter[grid.section]
    reynolds = speed * diameter / viscosity
    reynolds = np.where(reynolds > 1e-3, reynolds, RESTING_REYNOLDS)
    stated = sections.friction_factor[grid.section]
    rough = np.where(np.isfinite(stated), 0.0, sections.roughness[grid.section])
    return np.where(np.isfinite(stated), stated, friction_factor(reynolds, rough / diameter))


def reach_resistance(sections: Sections, grid: Grid, friction) -> np.ndarray:
    """R = f dx/(2 g D A^2) per reach [s2/m5]: head loss over Q|Q|."""
    return friction * grid.reach_length / (2 * GRAVITY * sections.inside_diameter[grid.section] * grid.area**2)


def march(sections: Sections, grid: Grid, demands, viscosity: float, head: float, flow: float) -> Steady:
    """Walk down the main from its upstream head and flow."""
    count = len(grid.section)
    heads, flow_in, flow_out = np.full(count + 1, head, dtype=float), np.empty(count + 1), np.empty(count + 1)
    friction = np.empty(count)
    flow_in[0] = flow
    stops = sorted({0, count, *(demand.node for demand in demands)})
    for node, following in zip(stops, stops[1:], strict=False):
        taken = sum(demand.draw(heads[node], 0.0) for demand in demands if demand.node == node)
        flow_out[node] = flow_in[node] - taken
        span = slice(node, following)
        flow_in[node + 1 : following + 1] = flow_out[node]
        flow_out[node + 1 : following] = flow_out[node]
        friction[span] = reach_friction(sections, grid, np.full(count, flow_out[node]), viscosity)[span]
        loss = reach_resistance(sections, grid, np.resize(friction, count))[span] * flow_out[node] * abs(flow_out[node])
        heads[node + 1 : following + 1] = heads[node] - np.cumsum(loss)
    taken = sum(demand.draw(heads[count], 0.0) for demand in demands if demand.node == count)
    flow_out[count] = flow_in[count] - taken
    return Steady(heads, flow_in, flow_out, friction)


def solve_steady(sections: Sections, grid: Grid, upstream, downstream, demands, viscosity: float) -> Steady:
    """The steady state that suits both ends; InputError where there is none."""

    def at(unknown: float) -> Steady:
        if upstream.kind == "flow":
            return march(sections, grid, demands, viscosity, unknown, upstream.first_flow)
        return march(sections, grid, demands, viscosity, upstream.steady_head(unknown), unknown)

    def residual(unknown: float) -> float:
        state = at(unknown)
        return downstream.steady_residual(state.head[-1], state.flow_out[-1])

    if upstream.kind == "flow" and downstream.kind == "flow":
        raise InputError("the main has a set flow at both ends, so its head is not known; give a reservoir, pumps or a valve at one end")
    most = FASTEST_FLOW * float(grid.area.min())
    low, high = (-1e5, 1e5) if upstream.kind == "flow" else (-most, most)
    if upstream.kind == "pumps":
        low = 0.0
    at_low, at_high = residual(low), residual(high)
    if not np.isfinite(at_low + at_high) or at_low * at_high > 0:
        raise InputError(
            "no steady state was found: the upstream head, the losses and the downstream end do not fit together; "
            "check the heads, the pump's shut-off head and the initial flow"
        )
    answer = brentq(residual, low, high, xtol=1e-13, rtol=1e-14, maxiter=500)
    return at(answer)
