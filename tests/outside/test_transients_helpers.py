"""Builders for the water-hammer checks beside this file; no tests here."""

from pathlib import Path

import numpy as np

from screener.pressure.transient_ends import Reservoir, SetFlow, Valve
from screener.pressure.transient_grid import Sections, make_grid
from screener.pressure.transients import Event, solve_transient

DATA = Path(__file__).parent / "data"
G = 9.80665
NO_VAPOUR = -1e9


def pipes(length, diameter, speed, friction=0.0, wall=np.nan, factor=1.0, creep=(), retardation=()):
    """Sections in series; scalars are repeated."""
    length = np.atleast_1d(np.asarray(length, dtype=float))
    count = len(length)

    def each(value):
        return np.broadcast_to(np.asarray(value, dtype=float), (count,)).copy()

    compliance = np.repeat(np.asarray(creep, dtype=float)[:, None], count, axis=1)
    start = np.concatenate([[0.0], np.cumsum(length)[:-1]])
    return Sections(
        start, length, each(diameter), each(wall), each(1e9), each(factor), each(speed), each(friction), each(np.nan), each(np.nan),
        compliance, np.asarray(retardation, dtype=float),
    )  # fmt: skip


def run(sections, reaches, upstream, downstream, duration, *, vapour_head=NO_VAPOUR, unsteady=False, keep=(0, -1), demands=(), air=(), elevation=0.0, density=1000.0, viscosity=1e-6):
    """Solve one event; `keep` are node numbers of the grid. elevation: constant, or a function of chainage; vapour_head above it."""
    grid = make_grid(sections, reaches, 0.05, 20_000)
    level = np.broadcast_to(elevation(grid.chainage) if callable(elevation) else np.asarray(elevation, dtype=float), grid.chainage.shape).copy()
    event = Event(
        sections, grid, level, level + vapour_head, upstream, downstream, demands, air, density, viscosity, duration, unsteady,
        vapour_head > NO_VAPOUR, np.arange(len(level))[list(keep)],
    )  # fmt: skip
    return solve_transient(event)


def stop(flow, seconds=0.0):
    """A flow brought to rest in a straight line."""
    return SetFlow((np.array([0.0, seconds]), np.array([flow, 0.0])))


def valve(outlet_head, schedule, **given):
    times, openings = np.array(schedule, dtype=float).T
    return Valve(outlet_head, (times, openings), **given)


__all__ = ["DATA", "G", "Reservoir", "SetFlow", "pipes", "run", "stop", "valve"]
