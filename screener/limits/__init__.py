"""Limit states of each joint: demand, capacity, utilization, and which one governs."""

from screener.limits.assess import assess_limits
from screener.limits.basis import (
    EXPANSION,
    HOUR,
    LONG_POISSON,
    LONG_TERM,
    SEASON,
    SHORT_TERM,
    SURGE,
    TIGHTENING,
    YEAR,
    modulus,
)
from screener.limits.states import (
    ClampState,
    RingState,
    arm_under_pull,
    axial_pull,
    clamp_state,
    has_section,
    ratings,
    ring_state,
    separating_load,
    solved_sections,
    uses_stated_rating,
)
from screener.mechanics import ring

__all__ = [
    "EXPANSION",
    "HOUR",
    "LONG_POISSON",
    "LONG_TERM",
    "SEASON",
    "SHORT_TERM",
    "SURGE",
    "TIGHTENING",
    "YEAR",
    "ClampState",
    "RingState",
    "arm_under_pull",
    "assess_limits",
    "axial_pull",
    "clamp_state",
    "has_section",
    "modulus",
    "ratings",
    "ring",
    "ring_state",
    "separating_load",
    "solved_sections",
    "uses_stated_rating",
]
