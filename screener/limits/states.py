"""Ring, clamp and loads of each joint: the states that the limit states compare."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.limits.basis import (
    EXPANSION,
    LONG_POISSON,
    NUT_WIDTH,
    SEASON,
    STEEL_POISSON,
    SURGE,
    TIGHTENING,
    YEAR,
    modulus,
)
from screener.mechanics import bolts as bolt
from screener.mechanics import clamp, pipe_wall, ring
from screener.mechanics.ring_model_factor import hub_bed_arm_factor
from screener.mechanics.section import SectionError, solve_section
from screener.mechanics.section_plasticity import section_plastic_couple
from screener.records import Fleet, Ledger, Severity


@dataclass(frozen=True, eq=False)
class RingState:
    """The ring of each joint on its hub at one hub stiffness. Arrays (n,): m, N, Pa."""

    lever_arm: np.ndarray
    first_yield_load: np.ndarray
    plastic_load: np.ndarray
    rating: np.ndarray


def ring_state(
    fleet: Fleet, hub_modulus: np.ndarray, hole_factor: np.ndarray, safety_factor: float, sections: dict[str, np.ndarray]
) -> RingState:
    """Contact, first yield, collapse and rating of every ring for a hub modulus (Pa); rings with a section polygon by its solution."""
    r = fleet.ring
    bore, outer = 0.5 * r.bore_diameter, 0.5 * r.outside_diameter
    contact = ring.hub_contact(
        bore,
        np.minimum(0.5 * fleet.hub.outside_diameter, outer),
        0.5 * r.bolt_circle_diameter,
        bore,
        outer,
        r.thickness,
        r.modulus,
        hub_modulus,
        fleet.hub.thickness,
    )
    arm = np.array(contact.lever_arm)
    first = np.array(ring.first_yield_bolt_load(r.yield_strength, arm, r.thickness, bore, outer, hole_factor))
    plastic = np.array(ring.plastic_bolt_load(r.yield_strength, arm, r.thickness, bore, outer, r.hole_diameter))
    for i, solved in solved_sections(fleet, hub_modulus, sections):
        arm[i] = solved.lever_arm
        first[i] = r.yield_strength[i] / (hole_factor[i] * solved.peak_stress_per_load)
        net = 1.0 - r.hole_diameter[i] / (r.outside_diameter[i] / 2 - r.bore_diameter[i] / 2)
        plastic[i] = 2 * np.pi * r.yield_strength[i] * section_plastic_couple(sections[r.section[i]]) * net / solved.lever_arm
    per_pressure = ring.app2_bolt_load(1.0, fleet.face.pressure_diameter, fleet.face.contact_area, fleet.face.required_stress_factor)
    rating = first / safety_factor / per_pressure
    return RingState(arm, first, plastic, rating)


def has_section(fleet: Fleet, sections: dict[str, np.ndarray]) -> np.ndarray:
    """Mask of rings whose section polygon is known."""
    return np.isin(fleet.ring.section, list(sections)) if sections else np.zeros(len(fleet), dtype=bool)


def solved_sections(fleet: Fleet, hub_modulus: np.ndarray, sections: dict[str, np.ndarray]):
    """(joint, solution) for rings with a section; equal rings on equal hubs are solved once. Hub modulus to 1 %."""
    kept: dict = {}
    r = fleet.ring
    for i in np.flatnonzero(has_section(fleet, sections)):
        reach = min(fleet.hub.outside_diameter[i], r.outside_diameter[i]) / 2
        stiffness = float(np.exp(np.round(np.log(hub_modulus[i]), 2)))
        numbers = (r.bore_diameter[i] / 2, reach, r.bolt_circle_diameter[i] / 2, NUT_WIDTH * fleet.bolts.diameter[i], r.modulus[i], STEEL_POISSON, stiffness, fleet.hub.thickness[i])
        key = (r.section[i], *(round(v, 6) for v in numbers))
        if key not in kept:
            try:
                kept[key] = solve_section(sections[r.section[i]], *numbers)
            except SectionError as problem:
                kept[key] = problem
        if not isinstance(kept[key], SectionError):
            yield i, kept[key]


@dataclass(frozen=True, eq=False)
class ClampState:
    """The clamp of each joint. Arrays (n,): N, m/N, -."""

    assembly_force: np.ndarray
    cap: np.ndarray
    force_now: np.ndarray
    elastic_compliance: np.ndarray
    load_factor: np.ndarray


def clamp_state(fleet: Fleet, state: RingState) -> ClampState:
    """Clamp at assembly and at the assessment date, through creep and a re-tightening on record."""
    r, b, face, age = fleet.ring, fleet.bolts, fleet.face, fleet.age
    assembly = clamp.assembly_clamp(
        b.assembly_torque,
        b.nut_factor,
        b.diameter,
        b.count,
        state.plastic_load,
        b.count * b.tensile_area * b.allowed_stress,
    )
    ring_part = ring.ring_compliance(
        state.lever_arm, r.thickness, 0.5 * r.bore_diameter, 0.5 * r.outside_diameter, r.modulus
    )
    collars = np.where(face.mating_side_is_pe, 2.0, 1.0)
    # Two loose rings turn in a PE-on-PE joint, one where the mating flange is rigid.
    elastic = (
        collars * ring_part
        + bolt.bolt_compliance(b.grip_length, b.count, b.modulus, b.tensile_area)
        + face.gasket_compliance
    )

    def collar(duration):
        stiffness = modulus(fleet.pipe.family, duration, fleet.pipe.temperature)
        return clamp.collar_compliance(fleet.hub.thickness, stiffness, face.contact_area, collars)

    then = collar(TIGHTENING)

    def kept(years):
        lasting = np.maximum(years * YEAR, TIGHTENING)
        return clamp.relaxation(elastic, then, collar(lasting))

    since_assembly = age.assessment_year - age.installed_year
    since_tightened = age.assessment_year - age.last_tightened_year
    force = assembly.clamp_force
    now = clamp.clamp_after_retightening(
        force,
        force,
        kept(since_assembly),
        kept(since_assembly - since_tightened),
        kept(since_tightened),
    )
    tightened_again = since_assembly - since_tightened > 0.01
    now = np.where(tightened_again, now, force * kept(since_assembly))
    return ClampState(force, assembly.cap, now, elastic, clamp.load_factor(elastic, collar(SURGE)))


def axial_pull(fleet: Fleet, pressure: np.ndarray) -> np.ndarray:
    """Axial pull of the pipe wall at a pressure (N), by the joint's restraint, in the cold season."""
    pipe, loads = fleet.pipe, fleet.loads
    free = pipe_wall.free_end_axial_force(pressure, pipe.bore_diameter)
    held = pipe_wall.restrained_axial_force(
        pressure,
        pipe.outside_diameter,
        pipe.dimension_ratio,
        LONG_POISSON,
        modulus(pipe.family, SEASON, pipe.temperature),
        EXPANSION,
        loads.cooling,
    )
    return np.where(loads.restrained, held, free)


def separating_load(fleet: Fleet, pressure: np.ndarray) -> np.ndarray:
    """Load that parts the faces at a pressure (N)."""
    return clamp.separating_load(
        pressure, fleet.face.pressure_diameter, fleet.pipe.bore_diameter, axial_pull(fleet, pressure), 0.0
    )


def arm_under_pull(fleet: Fleet, pressure: np.ndarray, bolt_load: np.ndarray) -> np.ndarray:
    """Lever arm with the pipe pulling on the collar over the arm at bolt-up (-).

    The pull tilts the collar and moves its reaction inward. Pull shares above
    0.7, where the study ends, take the value there.
    """
    share = np.minimum(axial_pull(fleet, pressure) / bolt_load, 0.7)
    bolt_up = hub_bed_arm_factor(np.zeros(len(fleet))).mean
    return hub_bed_arm_factor(share).mean / bolt_up


def uses_stated_rating(fleet: Fleet, sections: dict[str, np.ndarray]) -> np.ndarray:
    """Rings that are not flat plates and whose paper states a rating for loose use."""
    r = fleet.ring
    return (r.form != "flat plate") & r.rating_is_for_loose_ring & np.isfinite(r.stated_rating) & ~has_section(fleet, sections)


def ratings(fleet: Fleet, short: RingState, aged: RingState, safety_factor: float, ledger: Ledger, sections: dict[str, np.ndarray]):
    """(rating, rating with the aged hub), Pa: by mechanics for flat rings, by N = P_r N_r / P where only a rating is known."""
    r = fleet.ring
    by_rating = uses_stated_rating(fleet, sections)
    proportional = ring.stated_rating_pressure(r.stated_rating, r.stated_safety_factor, safety_factor)
    shaped = (r.form != "flat plate") & ~by_rating & ~has_section(fleet, sections)
    named = np.array([isinstance(name, str) for name in r.section], dtype=bool)
    ledger.finding(
        "section_missing",
        Severity.DOUBTS,
        fleet.position[named & ~has_section(fleet, sections)],
        attribute="ring_section",
        problem="the ring's section is named and not in the table of ring sections",
        action="estimated without it",
    )
    ledger.finding(
        "shape_unknown",
        Severity.DOUBTS,
        fleet.position[shaped],
        attribute="ring_form",
        problem="the ring is not a flat plate, and neither a section nor a rating for loose use is known",
        action="estimated as a flat plate of the same dimensions",
    )
    return np.where(by_rating, proportional, short.rating), np.where(by_rating, proportional, aged.rating)
