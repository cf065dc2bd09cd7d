"""From filled values to the Fleet the physics works on."""

from __future__ import annotations

import numpy as np

from screener.inventory.fill_bolts import grip_length, required_stress_factor
from screener.inventory.gaps import Gaps
from screener.records import Age, Bolts, Face, Fleet, Hub, Loads, Pipe, Ring
from screener.standards.pipes import modulus_family

STEEL_BOLT_MODULUS = 200.0e9


def build_fleet(gaps: Gaps, joint_id: np.ndarray, rows: np.ndarray, assessment_year: float) -> Fleet:
    """The joints at `rows` (int array) as SI arrays."""
    count = len(rows)

    def take(attribute: str) -> np.ndarray:
        return gaps[attribute][rows].copy()

    pe_side = take("mating_side") == "PE"
    hub_outside = take("hub_outside_diameter")
    pipe_bore = take("pipe_outside_diameter") * (1.0 - 2.0 / take("dimension_ratio"))
    inner = np.maximum(pipe_bore, take("mating_bore"))
    return Fleet(
        joint_id=joint_id[rows],
        position=rows,
        pipe=Pipe(
            outside_diameter=take("pipe_outside_diameter"),
            dimension_ratio=take("dimension_ratio"),
            material=take("pe_material"),
            family=modulus_family(take("pe_material")),
            hydrostatic_design_stress=take("hydrostatic_design_stress"),
            temperature=take("temperature"),
            temperature_factor=take("temperature_factor"),
        ),
        hub=Hub(outside_diameter=hub_outside, thickness=take("hub_thickness")),
        ring=Ring(
            outside_diameter=take("ring_outside_diameter"),
            bore_diameter=take("ring_bore"),
            thickness=take("ring_thickness"),
            thickness_as_built=take("ring_thickness"),
            bolt_circle_diameter=take("bolt_circle_diameter"),
            hole_diameter=take("hole_diameter"),
            yield_strength=take("ring_yield_strength"),
            modulus=take("ring_modulus"),
            form=take("ring_form"),
            section=take("ring_section"),
            standard=take("ring_standard"),
            ring_class=take("ring_class"),
            stated_rating=take("stated_rating"),
            stated_safety_factor=take("stated_safety_factor"),
            rating_is_for_loose_ring=take("rating_basis") == "loose",
            coating=take("ring_coating"),
            environment=take("environment_class"),
        ),
        bolts=Bolts(
            count=take("bolt_count"),
            diameter=take("bolt_diameter"),
            tensile_area=take("bolt_tensile_area"),
            allowed_stress=take("bolt_allowed_stress"),
            yield_strength=take("bolt_yield"),
            modulus=np.full(count, STEEL_BOLT_MODULUS),
            grip_length=grip_length(gaps)[rows],
            assembly_torque=take("assembly_torque"),
            torque_is_known=take("torque_is_known") == 1.0,
            nut_factor=take("nut_factor"),
            preload_scatter=take("preload_scatter"),
        ),
        face=Face(
            contact_area=np.pi / 4.0 * (hub_outside**2 - inner**2),
            pressure_diameter=0.5 * (hub_outside + inner),
            required_stress_factor=required_stress_factor(gaps)[rows],
            mating_side_is_pe=pe_side,
            gasket_compliance=np.zeros(count),
        ),
        loads=Loads(
            operating_pressure=take("operating_pressure"),
            recurrent_surge=take("recurrent_surge"),
            occasional_surge=take("occasional_surge"),
            test_pressure=take("test_pressure"),
            cooling=take("cooling"),
            restrained=take("restraint") == "restrained",
            cycles_per_day=take("cycles_per_day"),
            cycle_range=take("cycle_range"),
        ),
        age=Age(
            installed_year=take("year_installed"),
            last_tightened_year=take("last_tightened"),
            assessment_year=np.full(count, assessment_year),
        ),
        scatter={name: spread[rows] for name, spread in gaps.scatter.items()},
    )
