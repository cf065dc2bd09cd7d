"""Reading what stands at the ends of a main and what sits on it."""

from __future__ import annotations

import numpy as np

from screener.pressure.transient_ends import Pumps, Reservoir, SetFlow, Valve
from screener.pressure.transient_input import Table, part_of, tables_of
from screener.pressure.water import GRAVITY
from screener.records import InputError

MOST_DEVICES = 200


def make_end(values: dict):
    """A fresh end from its description; the solver changes it as it runs."""
    values = dict(values)
    kind = values.pop("kind")
    return {"reservoir": Reservoir, "flow": SetFlow, "valve": Valve, "pumps": Pumps}[kind](**values)


def read_end(top: Table, name: str, density: float, assumed: list[str]) -> dict:
    if name not in top.values:
        raise InputError(f"{top.where}: there is no [{name}] table, which says what stands at that end")
    table = part_of(top, name, assumed)
    kinds = ("reservoir", "pumps", "flow", "dead end") if name == "upstream" else ("reservoir", "valve", "flow", "dead end")
    kind = table.text("kind", kinds)
    if kind == "reservoir":
        end = {"kind": kind, "head": table.number("head", "length", low=-1e4, high=1e4)}
    elif kind == "dead end":
        end = {"kind": "flow", "schedule": (np.zeros(1), np.zeros(1))}
    elif kind == "flow":
        end = {"kind": kind, "schedule": table.schedule("flow_l_per_s", factor=1e-3, low=-1e7, high=1e7)}
    elif kind == "valve":
        end = _read_valve(table)
    else:
        end = _read_pumps(table, density)
    table.done()
    return end


def _read_valve(table: Table) -> dict:
    area = table.number("discharge_area", "area", default=np.nan, low=1e-9, high=100.0)
    flow = table.number("initial_flow", "flow", default=np.nan, low=1e-9, high=1e3)
    schedule = table.schedule("opening", low=0.0, high=1.0)
    if np.isfinite(area) == np.isfinite(flow):
        raise InputError(f"{table.where}: give either discharge_area (Cd A of the open valve) or initial_flow")
    if np.isfinite(flow) and schedule[1][0] <= 0:
        raise InputError(f"{table.where}: initial_flow needs a valve that is open at the start; opening begins with 0")
    return {
        "kind": "valve", "outlet_head": table.number("outlet_head", "length", low=-1e4, high=1e4), "schedule": schedule,
        "discharge_area": area, "initial_flow": flow,
    }  # fmt: skip


def _read_pumps(table: Table, density: float) -> dict:
    head = table.number("rated_head", "length", low=0.1, high=3000.0)
    flow = table.number("rated_flow", "flow", low=1e-6, high=100.0)
    speed = table.number("rated_speed", "rotation", low=1.0, high=1000.0)
    shut_off = table.number("shut_off_head", "length", low=0.1, high=5000.0)
    if shut_off <= head:
        raise InputError(f"{table.where}: shut_off_head is to lie above rated_head")
    if table.has("rated_torque", "torque"):
        torque = table.number("rated_torque", "torque", low=1e-3, high=1e7)
    else:
        torque = density * GRAVITY * flow * head / (speed * table.number("rated_efficiency", "ratio", low=0.05, high=1.0))
    note = "torque at zero flow is half the rated torque (common practice for radial pumps, no source)"
    number = table.number("number", "ratio", default=1.0, low=1, high=50)
    if number != int(number):
        raise InputError(f"{table.where}: number = {number:g} is to be a whole number of pumps")
    return {
        "kind": "pumps", "suction_head": table.number("suction_head", "length", low=-1e4, high=1e4), "shut_off_head": shut_off,
        "rated_head": head, "rated_flow": flow, "rated_speed": speed, "rated_torque": torque,
        "shut_off_torque_share": table.number("shut_off_torque_share", "ratio", default=0.5, low=0.0, high=1.0, note=note),
        "inertia": table.number("inertia", "inertia", low=1e-6, high=1e6), "number": int(number),
        "trip_time": table.number("trip_at", "time", default=0.0, low=0.0, high=86_400),
    }  # fmt: skip


def read_devices(top: Table, name: str, chainage, assumed: list[str]) -> tuple[dict, ...]:
    reader = {"demand": _read_demand, "air_valve": _read_air_valve}[name]
    found = []
    for k, values in enumerate(tables_of(top, name, MOST_DEVICES)):
        table = Table(values, f"{top.where}: {name} {k + 1}", assumed)
        place = table.number("chainage", "length")
        if not chainage[0] < place < chainage[-1]:
            raise InputError(f"{table.where}: chainage {place:g} m does not lie between the ends of the main")
        found.append({"chainage": place, **reader(table)})
        table.done()
    return tuple(found)


def _read_demand(table: Table) -> dict:
    flow = table.number("flow", "flow", default=np.nan, low=0.0, high=1e3)
    area = table.number("discharge_area", "area", default=np.nan, low=0.0, high=10.0)
    if np.isfinite(flow) == np.isfinite(area):
        raise InputError(f"{table.where}: give either flow (constant) or discharge_area (Cd A of an outlet to atmosphere)")
    return {"flow": flow, "discharge_area": area, "schedule": table.schedule("share", default=[[0.0, 1.0]])}


def _read_air_valve(table: Table) -> dict:
    return {"outlet_area": table.number("outlet_area", "area", low=0.0, high=1.0)}
