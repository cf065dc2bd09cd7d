"""From a main's description to its envelope: one run for each dynamic modulus asked for, and what the reader must be told."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.pressure import surge
from screener.pressure.main_profile import PLASTIC_MODULUS, Main
from screener.pressure.transient_devices import make_end
from screener.pressure.transient_grid import Grid, Sections, make_grid
from screener.pressure.transient_nodes import AirValve, ConstantDemand, OrificeDemand
from screener.pressure.transient_pipe import kinematic_viscosity
from screener.pressure.transients import Event, Transient, solve_transient
from screener.pressure.water import GRAVITY, vapour_pressure
from screener.records import InputError

MOST_WORK = 2_000_000_000
"""Reaches times steps beyond which a run is refused."""

NEEDS_STUDY = "needs a transient study: the pressure reaches vapour pressure"


@dataclass(frozen=True, eq=False)
class SurgeCase:
    """One run. modulus_multiplier: on the dynamic modulus of plastic walls; cautions: what limits this result, in words."""

    modulus_multiplier: float
    sections: Sections
    result: Transient
    lowest_head_at_points: np.ndarray  # at the profile's points, m
    check_valve_shut_at: float
    needs_study: bool
    cautions: tuple[str, ...]


@dataclass(frozen=True, eq=False)
class SurgeRun:
    """All runs of a main, and the envelope of them at the joints: gauge pressures (j,) Pa, NaN for a joint off the main.

    joint_needs_study: bool (j,), True where a run has vapour pressure anywhere on the main, since cavities then send waves to every joint.
    files: what was written, by outputs.
    """

    main: Main
    cases: tuple[SurgeCase, ...]
    joint_steady: np.ndarray
    joint_maximum: np.ndarray
    joint_minimum: np.ndarray
    joint_before_cavity: np.ndarray
    joint_needs_study: np.ndarray
    files: tuple = ()

    @property
    def needs_study(self) -> bool:
        return any(case.needs_study for case in self.cases)

    @property
    def cautions(self) -> tuple[str, ...]:
        return tuple(dict.fromkeys(caution for case in self.cases for caution in case.cautions))


def make_sections(main: Main, modulus_multiplier: float) -> Sections:
    """Neighbouring stretches of equal pipe joined into sections, with their wave speeds."""
    pipe = main.pipe
    modulus = np.where(pipe.modulus < PLASTIC_MODULUS, pipe.modulus * modulus_multiplier, pipe.modulus)
    slenderness = pipe.inside_diameter / pipe.wall
    factor = surge.thick_wall_factor(slenderness, pipe.poisson, surge.axial_restraint(pipe.poisson, pipe.restraint))
    worked_out = surge.celerity(main.density, main.bulk_modulus, modulus, slenderness, factor)
    speed = np.where(np.isfinite(pipe.wave_speed), pipe.wave_speed, worked_out)
    columns = {
        "inside_diameter": pipe.inside_diameter, "wall": pipe.wall, "modulus": modulus, "factor": factor, "wave_speed": speed,
        "friction_factor": pipe.friction_factor, "roughness": pipe.roughness, "rating": pipe.rating,
    }  # fmt: skip
    stack = np.array(list(columns.values()))
    same = ((stack[:, 1:] == stack[:, :-1]) | (np.isnan(stack[:, 1:]) & np.isnan(stack[:, :-1]))).all(axis=0)
    first = np.concatenate([[0], np.flatnonzero(~same) + 1])
    start = main.chainage[first]
    plastic = (modulus < PLASTIC_MODULUS)[first]
    if len(main.creep_compliance) and not np.isfinite((factor * pipe.wall)[first][plastic]).all():
        raise InputError("creep needs the wall, modulus and Poisson's ratio of every plastic stretch, also where the wave speed is given")
    creep = np.where(plastic, np.outer(main.creep_compliance, np.ones(len(first))), 0.0)
    length = np.diff(np.append(start, main.chainage[-1]))
    usable = {name: values[first] for name, values in columns.items()}
    return Sections(start=start, length=length, creep_compliance=creep, retardation_time=main.retardation_time, **usable)


def make_event(main: Main, sections: Sections, grid: Grid, *, column_separation: bool = True) -> Event:
    """The event on a grid; what sits on the main goes to the nearest inner node."""
    steps = main.duration / grid.time_step
    if steps * len(grid.section) > MOST_WORK or steps > 2_000_000:
        raise InputError(f"{steps:.0f} steps of {len(grid.section)} reaches are too many; ask for fewer reaches or a shorter duration")
    elevation = np.interp(grid.chainage, main.chainage, main.elevation)
    gauge = (vapour_pressure(main.temperature_c) - main.atmospheric_pressure) / (main.density * GRAVITY)
    node = _nearest_inner_node(grid, [device["chainage"] for device in (*main.demands, *main.air_valves)])
    demands = tuple(_demand(n, float(elevation[n]), values) for n, values in zip(node, main.demands, strict=False))
    barometric = main.atmospheric_pressure / (main.density * GRAVITY)
    at_valves = zip(node[len(demands) :], main.air_valves, strict=True)
    valves = tuple(AirValve(n, float(elevation[n]), values["outlet_area"], barometric) for n, values in at_valves)
    return Event(
        sections=sections,
        grid=grid,
        elevation=elevation,
        vapour_head=elevation + gauge,
        upstream=make_end(main.upstream),
        downstream=make_end(main.downstream),
        demands=demands,
        air_valves=valves,
        density=main.density,
        viscosity=float(kinematic_viscosity(main.temperature_c)),
        duration=main.duration,
        unsteady_friction=main.unsteady_friction,
        column_separation=column_separation,
        history=np.abs(grid.chainage[None, :] - main.history_chainage[:, None]).argmin(axis=1),
    )


def solve_main(main: Main, *, progress=None) -> SurgeRun:
    """Run the main once for each modulus multiplier and gather the envelope at its joints."""
    cases = []
    count = len(main.modulus_multipliers)
    for k, multiplier in enumerate(main.modulus_multipliers):
        share = None if progress is None else (lambda done, k=k: progress((k + done) / count))
        cases.append(_solve_case(main, float(multiplier), share))
    place = main.joint_chainage
    weight = main.density * GRAVITY
    z = np.interp(place, main.chainage, main.elevation)

    def at_joints(name: str) -> np.ndarray:
        return np.array([weight * (case.result.head_at(getattr(case.result, name), place) - z) for case in cases])

    needs_study = any(case.needs_study for case in cases)
    return SurgeRun(
        main=main,
        cases=tuple(cases),
        joint_steady=weight * (cases[0].result.head_at(cases[0].result.steady.head, place) - z),
        joint_maximum=at_joints("maximum_head").max(axis=0),
        joint_minimum=at_joints("minimum_head").min(axis=0),
        joint_before_cavity=at_joints("maximum_before_cavity").max(axis=0),
        joint_needs_study=np.full(len(place), needs_study),
    )


def _solve_case(main: Main, multiplier: float, progress) -> SurgeCase:
    sections = make_sections(main, multiplier)
    grid = make_grid(sections, main.reaches, main.largest_speed_change, 10 * main.reaches)
    event = make_event(main, sections, grid)
    result = solve_transient(event, progress)
    lowest = result.head_at(result.minimum_head, main.chainage)
    shut = getattr(event.upstream, "check_valve_shut_at", np.nan)
    if result.minimum_head.min() < -1e6 or not np.isfinite(result.maximum_head).all():
        raise InputError("the run did not stay finite; check the ends' heads and flows")
    place = _vapour_chainages(main, event, result, lowest)
    cautions = tuple(_cautions(main, event, result, place))
    return SurgeCase(multiplier, sections, result, lowest, shut, bool(place), cautions)


def _vapour_chainages(main: Main, event: Event, result: Transient, lowest_head: np.ndarray) -> list[float]:
    """Where vapour pressure was reached: nodes with a cavity, and points of the profile that stand out between nodes."""
    gauge = event.vapour_head[0] - event.elevation[0]
    held = result.grid.chainage[result.cavity_volume > 0]
    below = main.chainage[lowest_head < main.elevation + gauge]
    return [*held.tolist(), *below.tolist()]


def _cautions(main: Main, event: Event, result: Transient, place: list[float]) -> list[str]:
    found = []
    if place:
        found.append(f"{NEEDS_STUDY} between chainage {min(place):.0f} and {max(place):.0f} m; the peaks after that depend on the grid and are no design values")
    elif (suction := result.grid.chainage[result.minimum_head < result.elevation]).size:
        found.append(f"the pressure falls below atmospheric between chainage {suction.min():.0f} and {suction.max():.0f} m, where air or ground water can be drawn in")
    if (change := result.grid.worst_change) > main.largest_speed_change:
        found.append(f"a wave speed was changed by {100 * change:.1f} %, more than the {100 * main.largest_speed_change:g} % allowed; ask for more reaches or join short stretches")
    if result.grid.short.any():
        found.append(
            f"{int(result.grid.short.sum())} stretches shorter than half a reach are one reach each, which lengthens a wave's way by "
            f"{100 * result.grid.added_travel:.1f} %; pressures inside them are not resolved"
        )
    if abs(result.mass_error) > 0.01:
        found.append(f"the water balance is off by {100 * result.mass_error:.2g} %")
    if event.upstream.kind == "pumps":
        share = result.steady.flow_in[0] / (event.upstream.number * event.upstream.rated_flow)
        if not 0.5 <= share <= 1.3:
            found.append(f"the pumps start at {100 * share:.0f} % of their rated flow, where a curve through shut-off and rated point is a guess")
    if any(valve.opened for valve in event.air_valves):
        found.append("an air valve opened: pressures after that rest on its size and on air that stays where it entered")
    if any(isinstance(demand, ConstantDemand) for demand in event.demands):
        found.append("constant demands draw their flow whatever the pressure is")
    return found


def _demand(node: int, elevation: float, values: dict):
    if np.isfinite(values["flow"]):
        return ConstantDemand(int(node), values["flow"], values["schedule"])
    return OrificeDemand(int(node), elevation, values["discharge_area"], values["schedule"])


def _nearest_inner_node(grid: Grid, chainage: list[float]) -> list[int]:
    """Nearest node that is no end, a different one for each device; the shift is at most half a reach but for crowded devices."""
    taken: list[int] = []
    for place in chainage:
        order = np.argsort(np.abs(grid.chainage[1:-1] - place), kind="stable") + 1
        free = next((int(n) for n in order if int(n) not in taken), None)
        if free is None:
            raise InputError("there are more devices than inner nodes; ask for more reaches")
        taken.append(free)
    return taken
