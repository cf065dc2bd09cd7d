"""Annual likelihood of leaking of every joint of a fleet, from its clamp, its loads and what is doubtful about them.

Without leak records the numbers order the joints; they are not rates. What is not known about a joint is the same every year, so the chance of
a leak within ten years is less than ten times the annual one.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.likelihood import tightness
from screener.likelihood.leak import LeakLikelihood, Method, leak_likelihood
from screener.likelihood.tightness import JointDoubts
from screener.limits import EXPANSION, SEASON, SHORT_TERM, clamp_state, modulus, ring_state, separating_load
from screener.mechanics import pipe_wall
from screener.mechanics.bolt_holes import bore_stress_factor
from screener.records import Fleet, LimitStates, _Columns

THICKNESS_POWER = 2.0
"""Power of the thickness in a flat ring's collapse load."""
TEST_PRESSURE = 1.0e6
"""Pressure (Pa) over which the thrust per pressure is taken; the separating load is a straight line in pressure."""


@dataclass(frozen=True, eq=False)
class Likelihood(_Columns):
    """Likelihood of leaking per joint, (n,): annual chance, its bounds, and everything behind it.

    likelihood, low, high [1/year]; beta: reliability index [-]; most_doubt: `tightness.Doubt` with the largest share, -1 where unknown;
    leak: estimate in full; joints: what it was made from.
    """

    likelihood: np.ndarray
    low: np.ndarray
    high: np.ndarray
    beta: np.ndarray
    most_doubt: np.ndarray
    leak: LeakLikelihood
    joints: JointDoubts


def assess_likelihood(
    fleet: Fleet, limits: LimitStates, seed: int, *, sections: dict[str, np.ndarray] | None = None, samples: int = 0
) -> Likelihood:
    """Annual likelihood of a leak of every joint. samples > 0: importance sampling for all joints, else first-order estimates."""
    joints = joint_doubts(fleet, limits, sections)
    leak = leak_likelihood(joints, seed, samples)
    known = leak.method != Method.UNKNOWN
    most = np.where(known, np.where(known[:, None], leak.alpha2, 0.0).argmax(axis=1), -1) if len(fleet) else np.empty(0, dtype=int)
    return Likelihood(leak.likelihood, leak.low, leak.high, leak.beta, most, leak, joints)


def joint_doubts(fleet: Fleet, limits: LimitStates, sections: dict[str, np.ndarray] | None = None) -> JointDoubts:
    """Estimates and scatters of every joint for the leak limit state.

    The collapse load, load factor and kept share are taken from the limit states' details where they carry them, else worked out again.
    """
    b, face, loads = fleet.bolts, fleet.face, fleet.loads
    details = limits.details
    if not {"ring_collapse_load", "load_factor", "retained_share"} <= set(details):
        details = _clamp_details(fleet, sections or {})
    slope = (separating_load(fleet, np.full(len(fleet), TEST_PRESSURE)) - separating_load(fleet, np.zeros(len(fleet)))) / TEST_PRESSURE
    return JointDoubts(
        torque_clamp=_positive(b.count * b.assembly_torque / (b.nut_factor * b.diameter)),
        collapse_load=_positive(details["ring_collapse_load"]),
        proof_load=_positive(b.count * b.tensile_area * b.allowed_stress),
        kept=_positive(details["retained_share"]),
        load_factor=details["load_factor"],
        thrust_per_pressure=slope,
        pull_per_cooling=_pull_per_cooling(fleet),
        contact_area=_positive(face.contact_area),
        required_stress_factor=_positive(face.required_stress_factor),
        operating_pressure=_positive(loads.operating_pressure),
        surge_peak=np.where(loads.occasional_surge >= 0, loads.occasional_surge, np.nan),
        cooling=np.where(loads.restrained, loads.cooling, 0.0),
        **_variations(fleet),
    )


def _clamp_details(fleet, sections):
    r = fleet.ring
    bore, outer = 0.5 * r.bore_diameter, 0.5 * r.outside_diameter
    holes = bore_stress_factor(r.hole_diameter, fleet.bolts.count, 0.5 * r.bolt_circle_diameter, bore, outer, r.thickness)
    state = ring_state(fleet, modulus(fleet.pipe.family, SHORT_TERM, fleet.pipe.temperature), holes, 1.0, sections)
    clamped = clamp_state(fleet, state)
    return {
        "ring_collapse_load": state.plastic_load,
        "load_factor": clamped.load_factor,
        "retained_share": clamped.force_now / clamped.assembly_force,
    }


def _pull_per_cooling(fleet):
    """Axial pull of a restrained pipe per kelvin of cooling in a season [N/K]."""
    pipe = fleet.pipe
    area = pipe_wall.wall_area(pipe.outside_diameter, pipe.dimension_ratio)
    return np.where(fleet.loads.restrained, modulus(pipe.family, SEASON, pipe.temperature) * EXPANSION * area, 0.0)


def _variations(fleet):
    """Coefficients of variation: the tightness model's own, with what assumptions about the joint add in quadrature."""

    def added(attribute):
        return fleet.scatter.get(attribute, np.zeros(len(fleet)))

    # Tightening by feel and an assumed torque are one ignorance: the larger counts, not both.
    preload = np.hypot(np.maximum(fleet.bolts.preload_scatter, added("assembly_torque")), added("nut_factor"))
    constant = np.ones(len(fleet))
    return {
        "preload_variation": preload,
        "creep_variation": tightness.CREEP_VARIATION * constant,
        "ring_yield_variation": np.hypot(tightness.RING_YIELD_VARIATION, added("ring_yield_strength")),
        "ring_model_variation": np.hypot(tightness.RING_MODEL_VARIATION, THICKNESS_POWER * added("ring_thickness")),
        "required_stress_variation": tightness.REQUIRED_STRESS_VARIATION * constant,
        "operating_variation": np.hypot(tightness.OPERATING_VARIATION, added("operating_pressure")),
        "surge_variation": np.hypot(tightness.SURGE_VARIATION, added("occasional_surge")),
        "cooling_deviation": np.where(fleet.loads.restrained, np.hypot(tightness.COOLING_DEVIATION, added("cooling") * fleet.loads.cooling), 0.0),
    }


def _positive(values):
    """The value where it is larger than zero, NaN elsewhere: a size or load that cannot be is unknown."""
    return np.where(np.asarray(values) > 0, values, np.nan)
