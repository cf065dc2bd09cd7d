"""The hidden truth behind the leak records: a loose, invented physics that the tool does not share.

A joint leaks more the less its clamp holds against its pressure: thin large rings, low torque, dry threads, high
pressure, cycling, wet chambers and age count against it. The likelihood per year is scaled so that the records hold some
ninety leaks; the coefficients are invented, and so is every leak.
"""

from __future__ import annotations

import numpy as np
import pandas as pd

from .network import stream
from .practice import NEW_YEAR

EXPECTED_LEAKS = 72.0
RECORDS_BEGIN = 1991
PSI = 6894.757


def clamp_reserve(joints: pd.DataFrame, rng: np.random.Generator) -> pd.DataFrame:
    """Share of the separating load that the clamp still covers, and what the ring lets the bolts hold."""
    metric = (joints["practice"] == "metric").to_numpy()
    inch = np.where(metric, 1e-3, 0.0254)
    bolt, count = joints["bolt_diameter"] * inch, joints["bolt_count"]
    factor = np.where(joints["bolt_lubrication"] == "lubricated", 0.16, 0.22) * rng.lognormal(0.0, 0.15, len(joints))
    assembly = count * joints["torque_ftlb"] * 1.355818 / (factor * bolt)
    a, b = 0.5 * joints["ring_bore"] * inch, 0.5 * joints["ring_outside"] * inch
    arm = 0.5 * joints["bolt_circle"] * inch - (0.25 * a + 0.75 * 0.5 * joints["hub_outside"] * inch)
    thick = joints["ring_thickness"] * inch
    collapse = joints["yield_mpa"] * 1e6 * thick**2 / 4.0 * (b - a - bolt - 0.003) * 2.0 * np.pi / arm
    collapse = np.where(joints["ring_form"] == "contoured", 1.3 * collapse, collapse)
    kept = np.where(joints["last_tightened"] > 0, 0.72, 0.55)
    clamp = np.minimum(assembly, collapse) * kept
    outside, hub = joints["pipe_outside"] * inch, joints["hub_outside"] * inch
    bore = outside * (1.0 - 2.0 / joints["ratio"])
    face = np.pi / 4.0 * (hub**2 - bore**2)
    worst = (joints["operating"] + joints["recurrent"] + 0.4 * joints["occasional"]) * PSI
    need = np.pi / 4.0 * (0.5 * (hub + bore)) ** 2 * worst + 0.6 * worst * face
    return pd.DataFrame({"reserve": clamp / need, "capped": assembly > collapse}, index=joints.index)


def yearly_rate(joints: pd.DataFrame, reserve: pd.DataFrame, rng: np.random.Generator) -> np.ndarray:
    """Relative rate of leaking per year, before scaling."""
    rate = np.clip(reserve["reserve"], 0.1, 6.0) ** -1.5
    rate = rate * (1.0 + 0.9 * np.log10(np.maximum(joints["cycles"], 1.0) / 4.0).clip(lower=0.0))
    rate = rate * np.where(joints["environment"].isin(["wet chamber", "aggressive soil"]), 1.5, 1.0)
    rate = rate * np.where(joints["coating"] == "none", 1.3, 1.0)
    rate = rate * np.where(joints["gasket"] == "compressed fibre", 1.6, 1.0)
    return (rate * rng.lognormal(0.0, 0.7, len(joints))).to_numpy()


def simulate_leaks(joints: pd.DataFrame) -> pd.DataFrame:
    """One row per leak: joint, decimal year found, days to the repair, what was done."""
    rng = stream("leaks")
    rate = yearly_rate(joints, clamp_reserve(joints, rng), rng)
    first = joints["year"].to_numpy() + 0.5
    exposed = np.clip(NEW_YEAR + 0.2 - np.maximum(first, RECORDS_BEGIN), 0.0, None)
    rate = rate * EXPECTED_LEAKS / np.sum(rate * exposed)
    rows = []
    for k in np.flatnonzero(rng.random(len(joints)) < 1.0 - np.exp(-1.4 * rate * exposed)):
        when, left = max(first[k], RECORDS_BEGIN), rate[k]
        while True:
            when += rng.exponential(1.0 / left) if rows and rows[-1][0] == k else rng.uniform(0.02, 1.0) * exposed[k]
            if when >= NEW_YEAR + 0.2:
                break
            repair = str(rng.choice(["re-tightened", "re-tightened", "new bolts", "new gasket", "ring replaced", "clamped over"]))
            rows.append((int(k), when, int(rng.integers(0, 21)), repair))
            # A ring renewed seldom leaks again; a joint only tightened often may.
            left = rate[k] * (0.3 if repair == "ring replaced" else 2.0)
    frame = pd.DataFrame(rows, columns=["joint", "found", "days", "repair"])
    return frame.sort_values(["found", "joint"], kind="stable").reset_index(drop=True)


def leak_years(joints: pd.DataFrame, leaks: pd.DataFrame) -> list[tuple[float, ...]]:
    by_joint = leaks.groupby("joint")["found"].apply(tuple).to_dict()
    return [by_joint.get(k, ()) for k in range(len(joints))]


def _day(year: float) -> pd.Timestamp:
    return pd.Timestamp(int(year), 1, 1) + pd.Timedelta(days=int((year % 1.0) * 365))


def leak_table(joints: pd.DataFrame, leaks: pd.DataFrame) -> pd.DataFrame:
    """The records as kept by the office: two of them name joints that the register doesn't have."""
    found = leaks["found"].map(_day)
    repaired = found + pd.to_timedelta(leaks["days"], unit="D")
    frame = pd.DataFrame(
        {
            "Fitting ID": joints["joint_id"].to_numpy()[leaks["joint"]],
            "Date found": found.dt.strftime("%Y-%m-%d"),
            "Repaired": repaired.dt.strftime("%Y-%m-%d"),
            "Repair": leaks["repair"],
            "Origin": "invented, as is everything in this file",
        }
    )
    # A few as people write them: another date style, a repair never entered, ids that no register has.
    rng = stream("leak table")
    rows = rng.permutation(len(frame))[:14]
    frame.loc[rows[:6], "Date found"] = [f"{when:%d/%m/%Y}" for when in found.iloc[rows[:6]]]
    frame.loc[rows[6:12], "Repaired"] = ""
    strangers = pd.DataFrame(
        {
            "Fitting ID": ["H0-999", "T01-1O4"],
            "Date found": ["2004-08-17", "2015-02-03"],
            "Repaired": ["2004-08-20", "2015-02-03"],
            "Repair": ["clamped over", "re-tightened"],
            "Origin": "invented, as is everything in this file",
        }
    )
    return pd.concat([frame, strangers], ignore_index=True)
