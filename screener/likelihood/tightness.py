"""Does the face leak in the year's worst surge? The limit state of a joint with everything that is doubtful about it.

Clamp left at the assessment date against the clamp needed at the year's highest pressure P:

    g = kept(C) F_0 - [(1 - phi) (a P + b dT) + m P A_f],   leaks where g < 0
    F_0 = min(preload x torque clamp, ring yield x ring model x collapse load, bolt proof load)
    kept = 1 / (1 + C (1 / kept_0 - 1)),   P = operating + surge peak

The smaller of three clamps falls short exactly when one of the three does, so the joint is a series of three smooth limit states, one for each
thing that may have held the clamp down at assembly. No corner is rounded off.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum

import numpy as np

from screener.likelihood.variables import Gumbel, LogNormal, Normal, Space
from screener.mechanics.ring_model_factor import BEYOND_FINITE_ELEMENTS, HUB_BED_ARM_AT_BOLT_UP, PLASTIC_COUPLE
from screener.records import _Columns


class Doubt(IntEnum):
    """The doubtful quantities, in the order of the columns of every (n, k) array here."""

    PRELOAD = 0
    CREEP = 1
    RING_YIELD = 2
    RING_MODEL = 3
    REQUIRED_STRESS = 4
    OPERATING_PRESSURE = 5
    SURGE_PEAK = 6
    COOLING = 7


DOUBT_LABELS = (
    "how tight the bolts were set",
    "how much the PE face has crept",
    "the ring's real yield strength",
    "the estimate of the ring's collapse load",
    "the face stress needed to seal",
    "the operating pressure",
    "the year's worst surge",
    "cooling of the restrained pipe",
)
"""Plain words for each `Doubt`, in its order."""


class HeldBy(IntEnum):
    """What held the clamp down at assembly in the limit state that governs."""

    TORQUE = 0
    RING_COLLAPSE = 1
    BOLT_PROOF = 2


CREEP_VARIATION = 0.25
"""Coefficient of variation of the growth of the collar's squeeze since tightening. Judgement, no source: PE modulus of one grade differs by some
15 % from lot to lot, 5 K change it by as much, the effective-modulus method adds 4 %."""
RING_YIELD_OVER_MINIMUM = 1.15
"""Mean real yield over the standard's minimum. Judgement from memory of the JCSS Probabilistic Model Code, part 3.2 (structural steel)."""
RING_YIELD_VARIATION = 0.07
"""Coefficient of variation of yield strength of structural steel. JCSS Probabilistic Model Code, part 3.2, from memory."""
RING_MODEL_MEAN = float(PLASTIC_COUPLE.mean / HUB_BED_ARM_AT_BOLT_UP.mean)
"""True over estimated collapse load: plastic couple over lever arm, both as studied by finite elements (see the ring's model factors)."""
RING_MODEL_VARIATION = float(np.sqrt(PLASTIC_COUPLE.variation**2 + HUB_BED_ARM_AT_BOLT_UP.variation**2 + BEYOND_FINITE_ELEMENTS.variation**2))
REQUIRED_STRESS_VARIATION = 0.30
"""Coefficient of variation of the face stress that seals, over m P. Judgement, no source."""
OPERATING_VARIATION = 0.05
"""Coefficient of variation of a recorded operating pressure about the year's highest steady one. Judgement, no source."""
SURGE_VARIATION = 0.30
"""Coefficient of variation, year to year, of the highest surge, whose mean is taken as the occasional surge. Judgement, no source."""
COOLING_DEVIATION = 3.0
"""Standard deviation (K) of the coldest season about its mean, beyond what assumptions add. Judgement, no source."""


@dataclass(frozen=True, eq=False)
class JointDoubts(_Columns):
    """What the limit state needs of every joint; arrays (n,), SI.

    torque_clamp, collapse_load, proof_load [N]: the three clamps at assembly as estimated; kept: share of the clamp left, 0 to 1 [-];
    load_factor phi [-]; thrust_per_pressure a [N/Pa]; pull_per_cooling b [N/K], 0 where free; contact_area A_f [m2];
    required_stress_factor: mean m [-]; operating_pressure, surge_peak: means [Pa]; cooling: mean [K];
    the rest are coefficients of variation [-] and the cooling's standard deviation [K].
    """

    torque_clamp: np.ndarray
    collapse_load: np.ndarray
    proof_load: np.ndarray
    kept: np.ndarray
    load_factor: np.ndarray
    thrust_per_pressure: np.ndarray
    pull_per_cooling: np.ndarray
    contact_area: np.ndarray
    required_stress_factor: np.ndarray
    operating_pressure: np.ndarray
    surge_peak: np.ndarray
    cooling: np.ndarray
    preload_variation: np.ndarray
    creep_variation: np.ndarray
    ring_yield_variation: np.ndarray
    ring_model_variation: np.ndarray
    required_stress_variation: np.ndarray
    operating_variation: np.ndarray
    surge_variation: np.ndarray
    cooling_deviation: np.ndarray

    def space(self) -> Space:
        """The quantities with their distributions, independent of each other, in the order of `Doubt`."""
        one = np.ones(len(self))
        return Space(
            (
                LogNormal.of(one, self.preload_variation),
                LogNormal.of(one, self.creep_variation),
                LogNormal.of(RING_YIELD_OVER_MINIMUM * one, self.ring_yield_variation),
                LogNormal.of(RING_MODEL_MEAN * one, self.ring_model_variation),
                LogNormal.of(self.required_stress_factor, self.required_stress_variation),
                LogNormal.of(self.operating_pressure, self.operating_variation),
                Gumbel.of(self.surge_peak, self.surge_variation * self.surge_peak),
                Normal(self.cooling, self.cooling_deviation),
            )
        )


def assembly_clamps(joint: JointDoubts, x):
    """The three clamps that may have held at assembly, columns as in `HeldBy`, at quantities x (n, k): (n, 3) [N]."""
    return np.stack(
        [
            joint.torque_clamp * x[:, Doubt.PRELOAD],
            joint.collapse_load * x[:, Doubt.RING_YIELD] * x[:, Doubt.RING_MODEL],
            joint.proof_load + 0.0 * x[:, Doubt.PRELOAD],
        ],
        axis=1,
    )


def kept_share(kept, creep):
    """Share of the clamp left when the collar has crept `creep` times as much as estimated, 1 / (1 + C (1 / kept_0 - 1)) [-].

    Follows from F (C_e + C_0) / (C_e + C): the growth C - C_0 of the collar's compliance is multiplied by C. Stays between 0 and 1.
    """
    return 1.0 / (1.0 + creep * (1.0 / kept - 1.0))


def needed_clamp(joint: JointDoubts, x):
    """Clamp that the year's highest pressure asks for, (1 - phi)(a P + b dT) + m P A_f, at quantities x (n, k): (n,) [N]."""
    pressure = x[:, Doubt.OPERATING_PRESSURE] + x[:, Doubt.SURGE_PEAK]
    separating = joint.thrust_per_pressure * pressure + joint.pull_per_cooling * x[:, Doubt.COOLING]
    return (1.0 - joint.load_factor) * separating + x[:, Doubt.REQUIRED_STRESS] * pressure * joint.contact_area


def margin(joint: JointDoubts, x):
    """g: clamp left, of the smallest of the three, less the clamp needed, at quantities x (n, k): (n,) [N]."""
    left = kept_share(joint.kept, x[:, Doubt.CREEP]) * assembly_clamps(joint, x).min(axis=1)
    return left - needed_clamp(joint, x)


def log_margin(joint: JointDoubts, x, held_by: HeldBy):
    """(ln(clamp left / clamp needed), its gradient by x) with the clamp held at assembly by `held_by` alone: (n,), (n, k).

    Same sign as the margin and so the same design point, with far less bend: preload and ring strength enter linearly in standard normal
    space. NaN where nothing is needed (a pipe warm enough to push the faces together).
    """
    share = kept_share(joint.kept, x[:, Doubt.CREEP])
    pressure = x[:, Doubt.OPERATING_PRESSURE] + x[:, Doubt.SURGE_PEAK]
    transmitted = 1.0 - joint.load_factor
    needed = needed_clamp(joint, x)
    needed = np.where(needed > 0, needed, np.nan)
    slope = np.zeros(x.shape)
    if held_by == HeldBy.TORQUE:
        clamp = joint.torque_clamp * x[:, Doubt.PRELOAD]
        slope[:, Doubt.PRELOAD] = 1.0 / x[:, Doubt.PRELOAD]
    elif held_by == HeldBy.RING_COLLAPSE:
        clamp = joint.collapse_load * x[:, Doubt.RING_YIELD] * x[:, Doubt.RING_MODEL]
        slope[:, Doubt.RING_YIELD] = 1.0 / x[:, Doubt.RING_YIELD]
        slope[:, Doubt.RING_MODEL] = 1.0 / x[:, Doubt.RING_MODEL]
    else:
        clamp = joint.proof_load
    slope[:, Doubt.CREEP] = -share * (1.0 / joint.kept - 1.0)
    slope[:, Doubt.REQUIRED_STRESS] = -pressure * joint.contact_area / needed
    by_pressure = (-transmitted * joint.thrust_per_pressure - x[:, Doubt.REQUIRED_STRESS] * joint.contact_area) / needed
    slope[:, Doubt.OPERATING_PRESSURE] = by_pressure
    slope[:, Doubt.SURGE_PEAK] = by_pressure
    slope[:, Doubt.COOLING] = -transmitted * joint.pull_per_cooling / needed
    return np.log(share * clamp / needed), slope


def limit_state(joints: JointDoubts, held_by: HeldBy):
    """ln(clamp left / clamp needed) in standard normal space for `form.first_order`: (u, rows) -> (g, dg/du)."""
    space = joints.space()

    def function(u, rows):
        some, here = joints.take(rows), space.take(rows)
        x, slope = here.physical(u)
        g, by_x = log_margin(some, x, held_by)
        return g, here.gradient(by_x, slope)

    return function


def leaks(joints: JointDoubts):
    """The margin with the smallest of the three clamps, for sampling: (u, rows) -> (g, None)."""
    space = joints.space()

    def function(u, rows):
        return margin(joints.take(rows), space.take(rows).physical(u)[0]), None

    return function
