"""Utilization of every limit state of every joint, and which one governs."""

from __future__ import annotations

import numpy as np

from screener.limit_names import LIMIT_STATES
from screener.limits.basis import LONG_TERM, SHORT_TERM, modulus
from screener.limits.fatigue import fatigue_sums
from screener.limits.states import arm_under_pull, clamp_state, ratings, ring_state, separating_load, uses_stated_rating
from screener.mechanics import clamp, pipe_wall, ring
from screener.mechanics.bolt_holes import bolt_hole_validity, bore_stress_factor, hole_edge_stress_factor, rotation_factor
from screener.records import Fleet, Ledger, LimitStates, Severity


BY_MECHANICS = ("ring_yield", "ring_collapse", "ring_fatigue")
"""Limit states that need the ring's mechanics; not evaluated for rings known by a rating only."""


def assess_limits(fleet: Fleet, safety_factor: float, ledger: Ledger, sections: dict[str, np.ndarray] | None = None, horizon_years: float = 0.0) -> LimitStates:
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
    edge = hole_edge_stress_factor(*holes) / hole_factor
    sums = fatigue_sums(fleet, short, clamped, edge, horizon_years)
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
        "ring_fatigue": sums.ring,
        "bolt_fatigue": sums.bolts,
        "pipe_fatigue": sums.pipe,
    }
    by_rating = uses_stated_rating(fleet, sections)
    for name in BY_MECHANICS:
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
    # The separating load rises in proportion to pressure from what a cold season alone brings.
    cold = separating_load(fleet, np.zeros(len(fleet)))
    per_pressure = separating_load(fleet, np.ones(len(fleet))) - cold
    opening = (clamp.opening_separating_load(clamped.force_now, clamped.load_factor) - cold) / per_pressure
    details = {
        "ring_utilization": utilization["ring_rating"],
        "loose_ring_rating": rating,
        "stated_rating": r.stated_rating,
        "loose_ring_rating_long_term": aged_rating,
        "loose_ring_rating_pulled": np.where(by_rating, np.nan, rating / pulled),
        "rating_share": rating / r.stated_rating,
        "ring_safety_factor": safety_factor * rating / np.where(recurrent > 0, recurrent, np.nan),
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
        "ring_damage": np.where(by_rating, np.nan, sums.ring_to_date),
        "bolt_damage": sums.bolts_to_date,
        "ring_collapse_load": short.plastic_load,
        "load_factor": clamped.load_factor,
        "pipe_rating": pipe_rating,
        "design_pressure": recurrent,
    }
    return LimitStates(matrix, governing, tuple(LIMIT_STATES), details)


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
        if name in BY_MECHANICS:
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
        if name == "pipe_fatigue":
            old = unknown & ~hot
            ledger.finding(
                "not_evaluated",
                Severity.NOTES,
                fleet.position[old],
                attribute="pe_material",
                problem=f"'{state.label}' is not evaluated: no published re-rating for this material or number of cycles",
                action="ranked by the other limit states",
            )
            unknown = unknown & ~old
        ledger.finding(
            "not_evaluated",
            Severity.DOUBTS,
            fleet.position[unknown & ~hot],
            problem=f"'{state.label}' can't be evaluated from what is known",
            action="ranked by the other limit states",
        )
