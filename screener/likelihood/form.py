"""First-order reliability of many joints at once: the point of the limit state nearest to the origin of standard normal space.

The Hasofer-Lind-Rackwitz-Fiessler iteration with a merit function and a step rule (Zhang and Der Kiureghian 1995, "iHLRF"; rule as in
Liu and Der Kiureghian, Structural Safety 9 (1991) 161-177, from memory), run on all joints of a block together. A joint that has arrived
leaves the block; one that does not arrive says so, and is then a matter for sampling.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.special import ndtr

BLOCK = 16_384
"""Joints iterated together: large enough to hide the interpreter, small enough for the processor's cache."""
SURFACE_TOLERANCE = 1e-6
"""|g| / |dg/du|: distance to the limit state in standard deviations at which a point counts as on it."""
DIRECTION_TOLERANCE = 1e-4
"""Length of the part of u that is not along the gradient, over max(1, |u|)."""
LARGEST_TRIALS = 200
SMALLEST_STEP = 2.0**-20
FIRST_STEPS = (0.25, 1.0)
"""Least and largest share of the move tried first: halved where moves turn back on each other, as on a limit state bent around the origin."""
FAR = 0.1
"""Distance to the limit state in standard deviations beyond which reaching it weighs more than nearness to the origin."""
TURN = 0.3
"""Component of a move along the one before, over that one's length, beyond which the share tried first changes."""
ARMIJO = 1e-4
LONGEST_MOVE = 8.0
"""Longest move of one step in standard deviations; keeps exponentials of far points finite."""

LimitState = Callable[[np.ndarray, np.ndarray], tuple[np.ndarray, np.ndarray]]
"""(u (m, k), rows (m,)) -> (g (m,), dg/du (m, k)); rows tell which joint each point belongs to. Leaks where g < 0."""


@dataclass(frozen=True, eq=False)
class FirstOrder:
    """beta (n,), negative where the mean itself fails; point: design point u* (n, k); alpha: unit vector to it (n, k);
    converged (n,); unknown (n,): the limit state is NaN at the mean; trials (n,): evaluations used."""

    beta: np.ndarray
    point: np.ndarray
    alpha: np.ndarray
    converged: np.ndarray
    unknown: np.ndarray
    trials: np.ndarray

    @property
    def probability(self):
        """Phi(-beta): exact for a flat limit state in standard normal space [-]."""
        return ndtr(-self.beta)


def first_order(limit_state: LimitState, joints: int, quantities: int, start: np.ndarray | None = None) -> FirstOrder:
    """Reliability index and design point of every joint: `FirstOrder`. start: points (n, k) to begin from, else the origin."""
    parts = []
    for begin in range(0, joints, BLOCK):
        rows = np.arange(begin, min(begin + BLOCK, joints))
        u = np.zeros((len(rows), quantities)) if start is None else np.array(start[rows], dtype=float)
        parts.append(_block(limit_state, rows, u))
    if not parts:
        none, bare = np.empty(0), np.empty((0, quantities))
        return FirstOrder(none, bare, bare, none.astype(bool), none.astype(bool), none.astype(int))
    return FirstOrder(*(np.concatenate(columns) for columns in zip(*parts, strict=True)))


class _Active:
    """The joints of a block still under way. `index`: their place in the block; every array has them along axis 0."""

    def __init__(self, index, rows, u, g, gradient):
        self.index, self.rows, self.u, self.g, self.gradient = index, rows, u, g, gradient
        self.direction = np.zeros(u.shape)
        self.first_step = np.ones(len(index))
        self.step = self.first_step
        self.aim()

    def aim(self):
        """Direction of the next step, merit here and its slope along the direction."""
        squared = _dot(self.gradient, self.gradient)
        flat = squared == 0
        squared = np.where(flat, 1.0, squared)
        target = ((_dot(self.gradient, self.u) - self.g) / squared)[:, None] * self.gradient
        before, self.direction = self.direction, target - self.u
        self.turn = _dot(before, self.direction) / np.maximum(_dot(before, before), 1e-300)
        length = np.sqrt(_dot(self.direction, self.direction))
        self.direction *= np.minimum(1.0, LONGEST_MOVE / np.maximum(length, 1e-300))[:, None]
        self.norm = np.where(flat, 0.0, np.sqrt(squared))
        size = np.abs(self.g)
        needed = 2.0 * np.sqrt(np.maximum(_dot(self.u, self.u), _dot(target, target)) / squared)
        far = size > FAR * np.sqrt(squared)
        reach = np.where(far, 0.5 * _dot(target, target) / np.where(far, size, 1.0), 0.0)
        self.penalty = np.maximum(needed, reach)
        self.merit = 0.5 * _dot(self.u, self.u) + self.penalty * size
        self.slope = _dot(self.u, self.direction) + self.penalty * np.sign(self.g) * _dot(self.gradient, self.direction)

    def arrived(self):
        along = _dot(self.u, self.gradient) / np.where(self.norm > 0, self.norm, 1.0)
        across = np.sqrt(np.maximum(_dot(self.u, self.u) - along * along, 0.0))
        on_surface = np.abs(self.g) <= SURFACE_TOLERANCE * self.norm
        return (self.norm > 0) & on_surface & (across <= DIRECTION_TOLERANCE * np.maximum(1.0, np.abs(along)))

    def stuck(self):
        return (self.norm == 0) | (self.step < SMALLEST_STEP)

    def keep(self, mask):
        for name, value in vars(self).items():
            setattr(self, name, value[mask])


def _dot(a, b):
    return np.einsum("ij,ij->i", a, b)


def _block(limit_state, rows, u):
    """One block: (beta, point, alpha, converged, unknown, trials)."""
    g, gradient = limit_state(u, rows)
    origin = g if not u.any() else limit_state(np.zeros_like(u), rows)[0]
    unknown = ~(np.isfinite(g) & np.isfinite(gradient).all(axis=1) & np.isfinite(origin))
    point, normal = np.array(u), np.full(u.shape, np.nan)
    converged, trials = np.zeros(len(rows), dtype=bool), np.ones(len(rows), dtype=int)
    begun = np.flatnonzero(~unknown)
    active = _Active(begun, rows[begun], u[begun], g[begun], gradient[begun])
    for trial in range(1, LARGEST_TRIALS + 1):
        done = active.arrived()
        leave = done | active.stuck() | (trial == LARGEST_TRIALS)
        if leave.any():
            gone = active.index[leave]
            point[gone], converged[gone], trials[gone] = active.u[leave], done[leave], trial
            length = np.where(active.norm > 0, active.norm, np.nan)
            normal[gone] = (-active.gradient / length[:, None])[leave]
            active.keep(~leave)
        if not len(active.index):
            break
        _try_step(limit_state, active)
    point[unknown] = np.nan
    beta = np.where(unknown, np.nan, np.where(origin >= 0, 1.0, -1.0) * np.sqrt(_dot(point, point)))
    return beta, point, normal, converged, unknown, trials


def _try_step(limit_state, active):
    """Try one step for every active joint; those whose merit falls enough take it, the others halve theirs."""
    trial = active.u + active.step[:, None] * active.direction
    g, gradient = limit_state(trial, active.rows)
    usable = np.isfinite(g) & np.isfinite(gradient).all(axis=1)
    g, gradient = np.where(usable, g, 0.0), np.where(usable[:, None], gradient, 0.0)
    merit = 0.5 * _dot(trial, trial) + active.penalty * np.abs(g)
    rounding = 1e-12 * (1.0 + np.abs(active.merit))
    taken = usable & (merit <= active.merit + ARMIJO * active.step * active.slope + rounding)
    active.u = np.where(taken[:, None], trial, active.u)
    active.g = np.where(taken, g, active.g)
    active.gradient = np.where(taken[:, None], gradient, active.gradient)
    active.aim()
    change = np.where(active.turn < -TURN, 0.5, np.where(active.turn > TURN, 1.5, 1.0))
    eager = np.clip(change * active.first_step, *FIRST_STEPS)
    active.first_step = np.where(taken, eager, active.first_step)
    active.step = np.where(taken, active.first_step, 0.5 * active.step)
