"""A main as its file describes it: profile, pipe, water, ends, what sits on it, and what to run.

The profile is a table (in the file, or a CSV beside it) of points down the main. Each row has chainage and elevation of the pipe's axis
and the pipe from there to the next row; what a row leaves blank it takes from the row above.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import numpy as np

from screener.pressure import water
from screener.pressure.surge import RESTRAINTS
from screener.pressure.transient_devices import read_devices, read_end
from screener.pressure.transient_input import Table, beside, part_of, read_rows, read_toml, tables_of
from screener.records import InputError

PLASTIC_MODULUS = 10e9
"""A wall softer than this [Pa] is taken for plastic: it creeps, and the modulus multipliers act on it."""

MOST_POINTS = 20_000
MOST_JOINTS = 200_000

CARRIED_TOGETHER = (("inside_diameter", "outside_diameter", "wall", "dimension_ratio"), ("modulus", "poisson", "wave_speed"), ("friction_factor", "roughness"), ("restraint",), ("rating",))


@dataclass(frozen=True, eq=False)
class Pipe:
    """The pipe from each profile point to the next, arrays (p - 1,), SI; NaN where not stated. restraint: text."""

    inside_diameter: np.ndarray
    wall: np.ndarray
    modulus: np.ndarray
    poisson: np.ndarray
    restraint: np.ndarray
    wave_speed: np.ndarray
    friction_factor: np.ndarray
    roughness: np.ndarray
    rating: np.ndarray


@dataclass(frozen=True, eq=False)
class Main:
    """One main and its event, SI. assumed: the defaults that were used, in words."""

    name: str
    chainage: np.ndarray
    elevation: np.ndarray
    pipe: Pipe
    temperature_c: float
    density: float
    bulk_modulus: float
    atmospheric_pressure: float
    creep_compliance: np.ndarray
    retardation_time: np.ndarray
    upstream: dict
    downstream: dict
    demands: tuple[dict, ...]
    air_valves: tuple[dict, ...]
    joint_id: np.ndarray
    joint_chainage: np.ndarray
    history_chainage: np.ndarray
    duration: float
    reaches: int
    largest_speed_change: float
    unsteady_friction: bool
    modulus_multipliers: np.ndarray
    assumed: tuple[str, ...]


def read_main(path: str | Path) -> Main:
    """Read a main's TOML file; InputError with one sentence where it can't be used."""
    path = Path(path)
    assumed: list[str] = []
    top = Table(read_toml(path), str(path), assumed)
    chainage, elevation, pipe = _read_profile(top, path, assumed)
    liquid, run, creep = (part_of(top, name, assumed) for name in ("water", "run", "creep"))
    in_water = _read_water(liquid)
    joint_id, joint_chainage = _read_joints(top, path, assumed)
    read = {
        "name": top.text("name", default=path.stem),
        "upstream": read_end(top, "upstream", in_water["density"], assumed),
        "downstream": read_end(top, "downstream", in_water["density"], assumed),
        "demands": read_devices(top, "demand", chainage, assumed),
        "air_valves": read_devices(top, "air_valve", chainage, assumed),
        **in_water,
        **_read_creep(creep),
        **_read_run(run, chainage),
    }
    for table in (liquid, run, creep, top):
        table.done()
    return Main(
        chainage=chainage, elevation=elevation, pipe=pipe, joint_id=joint_id, joint_chainage=joint_chainage, assumed=tuple(assumed), **read
    )  # fmt: skip


# ---------------------------------------------------------------- parts of the file


def _read_water(table: Table) -> dict:
    temperature = table.number("temperature", "temperature", default=15.0, low=0.0, high=60.0, note="water at 15 C")
    return {
        "temperature_c": temperature,
        "density": table.number("density_kg_per_m3", "ratio", default=float(water.density(temperature)), low=900.0, high=1200.0),
        "bulk_modulus": table.number("bulk_modulus", "pressure", default=float(water.isentropic_bulk_modulus(temperature)), low=1e8, high=5e9),
        "atmospheric_pressure": table.number(
            "atmospheric_pressure", "pressure", default=water.ATMOSPHERIC_PRESSURE, low=4e4, high=1.2e5, note="atmospheric pressure 101.325 kPa"
        ),
    }


def _read_run(table: Table, chainage: np.ndarray) -> dict:
    history = table.numbers("history_chainage", "length", default=(chainage[0], chainage[-1]), most=50)
    if len(history) == 0 or ((history < chainage[0]) | (history > chainage[-1])).any():
        raise InputError(f"{table.where}: history_chainage is empty or has a point beyond the ends of the main")
    multipliers = table.numbers("modulus_multipliers", "ratio", default=(1.0,), most=5)
    if len(multipliers) == 0 or ((multipliers < 0.1) | (multipliers > 10)).any():
        raise InputError(f"{table.where}: modulus_multipliers are to be one to five numbers from 0.1 to 10")
    return {
        "history_chainage": history,
        "duration": table.number("duration", "time", low=1e-3, high=86_400),
        "reaches": int(table.number("reaches", "ratio", default=200.0, low=2, high=5000, note="200 reaches")),
        "largest_speed_change": table.number("largest_speed_change", "ratio", default=0.05, low=1e-4, high=0.5),
        "unsteady_friction": table.flag("unsteady_friction", False),
        "modulus_multipliers": multipliers,
    }


def _read_creep(table: Table) -> dict:
    compliance = table.numbers("compliance", "compliance", default=(), most=20)
    time = table.numbers("retardation", "time", default=(), most=20)
    if len(compliance) != len(time):
        raise InputError(f"{table.where}: {len(compliance)} compliances for {len(time)} retardation times")
    if (compliance <= 0).any() or (time <= 0).any():
        raise InputError(f"{table.where}: compliances and retardation times are to be above 0")
    return {"creep_compliance": compliance, "retardation_time": time}


def _read_profile(top: Table, path: Path, assumed: list[str]):
    top.used.add("profile")
    profile = top.values.get("profile")
    if isinstance(profile, dict):
        table = Table(profile, f"{path}: profile", assumed)
        source = beside(path, table.text("file"), table.where)
        table.done()
        rows, where = read_rows(source, MOST_POINTS), f"{source}: row"
    else:
        rows, where = tables_of(top, "profile", MOST_POINTS), f"{path}: profile point"
    if len(rows) < 2:
        raise InputError(f"{path}: the profile needs at least two points, under [[profile]] or in a file named under [profile]")
    tables = [Table(row, f"{where} {k + 1}", assumed) for k, row in enumerate(rows)]
    chainage = np.array([t.number("chainage", "length", low=-1e7, high=1e7) for t in tables])
    elevation = np.array([t.number("elevation", "length", low=-1e4, high=1e4) for t in tables])
    if (step := np.flatnonzero(np.diff(chainage) <= 0)).size:
        raise InputError(f"{tables[step[0] + 1].where}: the chainage does not lie beyond the row above it")
    stretches = []
    carried: dict = {}
    for table in tables:
        carried = _carry(carried, table)
        if table is not tables[-1]:
            stretches.append(_pipe_of(carried, table.where, assumed))
        table.done()
    columns = {name: np.array([s[name] for s in stretches]) for name in Pipe.__dataclass_fields__}
    return chainage, elevation, Pipe(**columns)


def _carry(above: dict, table: Table) -> dict:
    """What holds from this row on: a group of properties is taken from the row above unless the row states one of the group."""
    limits = {
        "inside_diameter": ("length", 5e-3, 10.0), "outside_diameter": ("length", 5e-3, 10.0), "wall": ("length", 1e-4, 1.0),
        "dimension_ratio": ("ratio", 4.0, 80.0), "modulus": ("pressure", 1e7, 1e12), "poisson": ("ratio", 0.0, 0.5),
        "wave_speed": ("speed", 20.0, 1500.0), "friction_factor": ("ratio", 0.0, 1.0), "roughness": ("length", 0.0, 0.05),
        "rating": ("pressure", 1e3, 1e9),
    }  # fmt: skip
    stated = {n: table.number(n, kind, low=low, high=high) for n, (kind, low, high) in limits.items() if table.has(n, kind)}
    table.used.add("restraint")
    if "restraint" in table.values:
        stated["restraint"] = table.text("restraint", RESTRAINTS)
    kept = {}
    for group in CARRIED_TOGETHER:
        source = stated if any(name in stated for name in group) else above
        kept.update({name: source[name] for name in group if name in source})
    if ("wall" in stated or "dimension_ratio" in stated) and "inside_diameter" not in stated and "outside_diameter" not in stated:
        side = "outside_diameter" if "outside_diameter" in above else "inside_diameter"  # only the wall changes
        kept.update({side: above[side]} if side in above else {})
    return kept


def _pipe_of(row: dict, where: str, assumed: list[str]) -> dict:
    inside, wall = _bore(row, where)
    pipe = {name: row.get(name, np.nan) for name in ("modulus", "poisson", "wave_speed", "friction_factor", "roughness", "rating")}
    if not np.isfinite(pipe["friction_factor"]) and not np.isfinite(pipe["roughness"]):
        raise InputError(f"{where}: neither friction_factor nor roughness_mm is known here")
    if np.isfinite(pipe["friction_factor"]) and np.isfinite(pipe["roughness"]):
        raise InputError(f"{where}: friction_factor and roughness are both given; keep one")
    if not np.isfinite(pipe["wave_speed"]):
        if not np.isfinite(pipe["modulus"]) or not np.isfinite(wall):
            raise InputError(f"{where}: the wave speed needs the wall (wall_mm or dimension_ratio) and modulus_gpa for fast loading, or wave_speed_m_per_s")
        if not np.isfinite(pipe["poisson"]):
            pipe["poisson"] = 0.45 if pipe["modulus"] < PLASTIC_MODULUS else 0.28
            _once(assumed, f"Poisson's ratio {pipe['poisson']:g} where not stated")
    if "restraint" not in row:
        _once(assumed, "the main is anchored along its length where not stated")
    return {"inside_diameter": inside, "wall": wall, "restraint": row.get("restraint", RESTRAINTS[0]), **pipe}


def _bore(row: dict, where: str):
    """Inside diameter and wall from what the row states."""
    outside, inside, wall = (row.get(name, np.nan) for name in ("outside_diameter", "inside_diameter", "wall"))
    if np.isfinite(ratio := row.get("dimension_ratio", np.nan)):
        implied = outside / ratio if np.isfinite(outside) else inside / (ratio - 2)
        if np.isfinite(wall) and abs(wall - implied) > 0.02 * implied:
            raise InputError(f"{where}: wall and dimension ratio do not agree")
        wall = implied if not np.isfinite(wall) else wall
    if not np.isfinite(inside):
        inside = outside - 2 * wall
    elif np.isfinite(outside) and not np.isfinite(wall):
        wall = (outside - inside) / 2
    elif np.isfinite(outside) and abs(outside - 2 * wall - inside) > 0.02 * inside:
        raise InputError(f"{where}: outside diameter, wall and inside diameter do not agree")
    if not np.isfinite(inside):
        raise InputError(f"{where}: the bore is not known; give inside_diameter_mm, or outside_diameter_mm with dimension_ratio or wall_mm")
    if inside <= 0 or wall <= 0:
        raise InputError(f"{where}: the wall leaves no bore, or there is no wall")
    return inside, wall


def _once(assumed: list[str], text: str) -> None:
    if text not in assumed:
        assumed.append(text)


def _read_joints(top: Table, path: Path, assumed: list[str]):
    """Joints under [[joint]], or in a table beside, whose other columns do not matter."""
    top.used.add("joint")
    joints = top.values.get("joint", [])
    from_table = isinstance(joints, dict)
    if from_table:
        table = Table(joints, f"{path}: joint", assumed)
        source = beside(path, table.text("file"), table.where)
        rows, where = read_rows(source, MOST_JOINTS), f"{source}: row"
        table.done()
    else:
        rows, where = tables_of(top, "joint", MOST_JOINTS), f"{path}: joint"
    names, places = [], []
    for k, row in enumerate(rows):
        table = Table(row, f"{where} {k + 1}", assumed)
        names.append(table.text("id"))
        places.append(table.number("chainage", "length"))
        if not from_table:
            table.done()
    return np.array(names, dtype=object), np.array(places, dtype=float)
