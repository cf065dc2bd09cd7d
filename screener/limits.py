"""Limit states of each joint: demand, capacity, utilization, and which one governs."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.limit_names import LIMIT_STATES
from screener.mechanics import bolts as bolt
from screener.mechanics import clamp, pipe_wall, polyethylene, ring
from screener.mechanics.bolt_holes import bolt_hole_validity, bore_stress_factor, rotation_factor
from screener.mechanics.ring_model_factor import hub_bed_arm_factor
from screener.mechanics.section import SectionError, solve_section
from screener.mechanics.section_plasticity import section_plastic_couple
from screener.records import Fleet, Ledger, LimitStates, Severity
from screener.standards.tables import read_table

HOUR = 3600.0
YEAR = 365.25 * 24 * HOUR
DURATIONS = {"min": 60.0, "h": HOUR, "y": YEAR}
SHORT_TERM = 0.5 * HOUR
LONG_TERM = 50.0 * YEAR
TIGHTENING = 0.5 * HOUR
"""Time scale on which the faces settle while the bolts are tightened."""
SURGE = 1.0
"""Seconds that a surge lasts; picks the modulus in the load factor."""
SEASON = 0.25 * YEAR
"""Duration of the cooling that a cold season brings."""
LONG_POISSON = 0.45
"""Poisson's ratio of PE under lasting load (PPI Handbook, from memory)."""
NUT_WIDTH = 1.5
"""Width of the band on which the nuts press over the bolt diameter (heavy hex nuts, ASME B18.2.2, from memory)."""
STEEL_POISSON = 0.3
EXPANSION = 1.44e-4
"""Thermal expansion of PE4XXX, 1/K (PPI Handbook, from memory; other texts 1.3e-4 to 2.0e-4)."""


def modulus(family: np.ndarray, duration, temperature: np.ndarray) -> np.ndarray:
    """Apparent modulus (Pa) of each joint's PE for a duration (s) at its temperature."""
    table = read_table("pe_apparent_modulus")
    number, unit = zip(*(text.split() for text in table.text("duration")), strict=True)
    seconds = np.array([float(n) * DURATIONS[u] for n, u in zip(number, unit, strict=True)])
    warm = read_table("pe_modulus_temperature")
    result = np.full(len(family), np.nan)
    duration = np.broadcast_to(np.asarray(duration, dtype=float), family.shape)
    for name in ("PE2XXX", "PE3XXX", "PE4XXX"):
        here = family == name
        law = polyethylene.fit_modulus_law(seconds, table.number(f"{name}_MPa") * 1.0e6)
        result[here] = polyethylene.apparent_modulus(
            duration[here], temperature[here], law, warm.number("temp_C"), warm.number("multiplier")
        )
    return result


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


def assess_limits(fleet: Fleet, safety_factor: float, ledger: Ledger, sections: dict[str, np.ndarray] | None = None) -> LimitStates:
    """Utilization of every limit state of every joint, and the results behind them."""
    r, b, face, loads, pipe = fleet.ring, fleet.bolts, fleet.face, fleet.loads, fleet.pipe
    bore, outer = 0.5 * r.bore_diameter, 0.5 * r.outside_diameter
    sections = sections or {}
    holes = (r.hole_diameter, b.count, 0.5 * r.bolt_circle_diameter, bore, outer, r.thickness)
    hole_factor = bore_stress_factor(*holes)
    short = ring_state(fleet, modulus(pipe.family, SHORT_TERM, pipe.temperature), hole_factor, safety_factor, sections)
    aged = ring_state(fleet, modulus(pipe.family, LONG_TERM, pipe.temperature), hole_factor, safety_factor, sections)
    rating, aged_rating = ratings(fleet, short, aged, safety_factor, ledger, sections)
    clamped = clamp_state(fleet, short)

    operating = loads.operating_pressure
    recurrent = operating + loads.recurrent_surge
    occasional = operating + loads.occasional_surge

    def design_load(pressure):
        return ring.app2_bolt_load(pressure, face.pressure_diameter, face.contact_area, face.required_stress_factor)

    # A torque on record says what the bolts hold; without one the design load stands in for it.
    separating = separating_load(fleet, occasional)
    held = clamp.bolt_load(clamped.force_now, separating, clamped.load_factor)
    bolt_force = np.where(b.torque_is_known, np.maximum(held, separating), design_load(occasional))
    # The clamp can't hold more than the ring: beyond collapse the bolts follow the separating load alone.
    proof = b.count * b.tensile_area * b.allowed_stress
    pipe_rating = pipe_wall.pressure_rating(pipe.hydrostatic_design_stress, pipe.dimension_ratio, pipe.temperature_factor)

    def face_need(pressure):
        # Clamp needed to keep m P on the face over the clamp there is: 1 where the face stress is just m P, finite beyond opening.
        needed = face.required_stress_factor * pressure * face.contact_area
        unloaded = (1 - clamped.load_factor) * separating_load(fleet, pressure)
        return (needed + unloaded) / clamped.force_now

    pulled = arm_under_pull(fleet, recurrent, design_load(recurrent))
    stress = design_load(recurrent) / short.first_yield_load * r.yield_strength
    utilization = {
        "ring_rating": recurrent / rating,
        "ring_yield": bolt_force * arm_under_pull(fleet, occasional, bolt_force) / short.first_yield_load,
        "ring_collapse": bolt_force / short.plastic_load,
        "bolts": bolt_force / proof,
        "face_operating": face_need(operating),
        "face_recurrent": face_need(recurrent),
        "face_occasional": face_need(occasional),
        "pipe_operating": operating / pipe_rating,
        "pipe_recurrent": recurrent / (pipe_wall.RECURRENT_ALLOWANCE * pipe_rating),
        "pipe_occasional": occasional / (pipe_wall.OCCASIONAL_ALLOWANCE * pipe_rating),
    }
    by_rating = uses_stated_rating(fleet, sections)
    for name in ("ring_yield", "ring_collapse"):
        utilization[name] = np.where(by_rating, np.nan, utilization[name])
    matrix = np.column_stack([utilization[name] for name in LIMIT_STATES]) if len(fleet) else np.empty((0, len(LIMIT_STATES)))
    unknown = np.isnan(matrix)
    governing = np.where(unknown, -1.0, matrix).argmax(axis=1) if len(fleet) else np.empty(0, dtype=int)
    _note_ring_reasons(fleet, ledger)
    ledger.finding(
        "bolt_holes_outside_study",
        Severity.DOUBTS,
        fleet.position[~bolt_hole_validity(*holes) & np.isfinite(hole_factor)],
        attribute="hole_diameter",
        problem="holes, spacing or thickness lie outside the finite-element study of bolt holes",
        action="its formula used all the same, less certain",
    )
    _note_unknown(fleet, matrix, by_rating, ledger)
    opening = operating * clamp.opening_separating_load(clamped.force_now, clamped.load_factor) / separating_load(fleet, operating)
    details = {
        "ring_utilization": utilization["ring_rating"],
        "loose_ring_rating": rating,
        "stated_rating": r.stated_rating,
        "loose_ring_rating_long_term": aged_rating,
        "loose_ring_rating_pulled": np.where(by_rating, np.nan, rating / pulled),
        "rating_share": rating / r.stated_rating,
        "ring_safety_factor": safety_factor * rating / recurrent,
        "ring_stress": np.where(by_rating, np.nan, stress),
        "lever_arm": short.lever_arm,
        "ring_rotation": rotation_factor(*holes)
        * ring.ring_rotation(design_load(recurrent), short.lever_arm, r.thickness, bore, outer, r.modulus),
        "bore_stress_factor": hole_factor,
        "clamp_force": clamped.force_now,
        "assembly_clamp_force": clamped.assembly_force,
        "clamp_capped_by": np.array([clamp.CAP_WORDS.get(int(c), "") for c in clamped.cap], dtype=object),
        "retained_share": clamped.force_now / clamped.assembly_force,
        "opening_pressure": opening,
        "face_stress": clamp.face_force(clamped.force_now, separating_load(fleet, operating), clamped.load_factor) / face.contact_area,
        "pipe_rating": pipe_rating,
        "design_pressure": recurrent,
    }
    return LimitStates(matrix, governing, tuple(LIMIT_STATES), details)


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


def _note_ring_reasons(fleet: Fleet, ledger: Ledger) -> None:
    """What the ring formulas say of their own validity, as findings."""
    r = fleet.ring
    bore, outer = 0.5 * r.bore_diameter, 0.5 * r.outside_diameter
    contact = np.minimum(0.5 * fleet.hub.outside_diameter, outer)
    bits = ring.ring_validity(bore, contact, 0.5 * r.bolt_circle_diameter, bore, outer, r.thickness)
    for reason, words in ring.RING_REASON_TEXT.items():
        blocking = bool(int(reason) & int(ring.BLOCKING_REASONS))
        ledger.finding(
            "ring_theory",
            Severity.DOUBTS,
            fleet.position[(np.asarray(bits) & int(reason)) != 0],
            attribute="ring_thickness",
            problem=words,
            action="ring not evaluated; ranked by the other limit states" if blocking else "evaluated with the flat-ring formulas, less certain",
        )


def _note_unknown(fleet: Fleet, matrix: np.ndarray, by_rating: np.ndarray, ledger: Ledger) -> None:
    """Every NaN in a result has its finding."""
    for k, (name, state) in enumerate(LIMIT_STATES.items()):
        unknown = np.isnan(matrix[:, k])
        if name in ("ring_yield", "ring_collapse"):
            ledger.finding(
                "not_evaluated",
                Severity.NOTES,
                fleet.position[unknown & by_rating],
                problem=f"'{state.label}' is not evaluated: the ring is known by its rating only",
                action="ranked by the other limit states",
            )
            unknown = unknown & ~by_rating
        hot = unknown & np.isnan(fleet.pipe.temperature_factor) if name.startswith("pipe") else np.zeros(len(fleet), dtype=bool)
        ledger.finding(
            "not_evaluated",
            Severity.DOUBTS,
            fleet.position[hot],
            attribute="temperature",
            problem=f"'{state.label}' is not evaluated: no temperature factor is published above 38 C",
            action="ranked by the other limit states; ask an engineer",
        )
        ledger.finding(
            "not_evaluated",
            Severity.DOUBTS,
            fleet.position[unknown & ~hot],
            problem=f"'{state.label}' can't be evaluated from what is known",
            action="ranked by the other limit states",
        )
