"""The invented network: zones, mains, ground, and where the joints stand. Lengths m.

The coordinates lie in the open North Sea, so that nobody takes them for a town.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd

SEED = 20260314
CRS = "EPSG:32631"
ORIGIN = np.array([500_000.0, 6_150_000.0])
UTILITY = "Nowhere Shore Water Board"
INVENTED = (
    f"INVENTED DATA. There is no {UTILITY}: every joint, main, pressure, leak and coordinate was made up by a script "
    "for trying out software. Evidence of nothing."
)


def stream(name: str) -> np.random.Generator:
    """A random stream of its own for each part, so that a change in one leaves the others as they were."""
    return np.random.default_rng([SEED, *name.encode()])


@dataclass(frozen=True)
class Zone:
    letter: str
    hydraulic_grade: float  # m above datum, at the zone's source
    grade_loss: float  # m of head lost per km of main at peak flow
    warm: float  # warm season's mean water temperature, deg C
    season: float  # warmest minus coldest, K
    soil: tuple[str, ...]
    recurrent: tuple[float, float]  # surge rise, psi
    occasional: tuple[float, float]
    cycles: float  # per day
    cycle_range: float  # psi


ZONES = {
    "Harbour": Zone("H", 76.0, 0.9, 17.0, 13.0, ("aggressive soil", "moderate soil", "made ground"), (6, 14), (20, 45), 4, 10),
    "Upland": Zone("U", 172.0, 1.6, 14.0, 9.0, ("moderate soil", "mild soil"), (28, 52), (70, 115), 250, 34),
    "Trunk": Zone("T", 122.0, 0.8, 13.5, 10.0, ("moderate soil", "mild soil", "aggressive soil"), (10, 24), (45, 85), 8, 14),
    "Meadow": Zone("M", 104.0, 1.0, 16.0, 12.0, ("mild soil", "moderate soil"), (6, 16), (25, 50), 5, 10),
    "Fenside": Zone("F", 74.0, 0.7, 15.0, 12.0, ("aggressive soil", "moderate soil"), (7, 15), (22, 45), 6, 9),
}


@dataclass(frozen=True)
class Main:
    main_id: str
    zone: str
    size: float  # in, or mm for ISO pipe
    system: str
    ratio: float
    material: str
    years: tuple[int, int]
    length: float
    joints: int
    practice: str  # "early", "big", "mixed", "loose", "metric"
    start: tuple[float, float]  # from ORIGIN
    heading: float  # deg, anticlockwise from east


def _main(row: str) -> Main:
    name, zone, size, system, ratio, material, first, last, length, joints, practice, x, y, heading = row.split()
    return Main(
        name, zone, float(size), system, float(ratio), material, (int(first), int(last)), float(length), int(joints), practice,
        (float(x), float(y)), float(heading),
    )


# id, zone, size, system, DR, material, first and last year, length, joints, practice, start x y, heading
MAINS = tuple(
    _main(row)
    for row in """
    H-01 Harbour 8 DIPS 11 PE3408 1985 1990 3200 118 early 0 0 35
    H-02 Harbour 12 IPS 11 PE3408 1986 1993 4100 146 early 300 -200 8
    H-03 Harbour 6 IPS 11 PE3408 1987 1995 2300 92 early 900 350 80
    H-04 Harbour 10 IPS 13.5 PE3408 1989 1994 2700 96 early -600 500 110
    H-05 Harbour 4 IPS 11 PE3408 1990 1996 1500 60 early 1600 -500 -20
    H-06 Harbour 16 IPS 11 PE3408 1991 1996 3600 112 early -900 -300 165
    H-07 Harbour 12 DIPS 17 PE3408 1992 1996 2100 70 early 1200 900 55
    H-08 Harbour 8 IPS 11 PE4710 2019 2024 1900 62 loose 2100 300 15
    H-09 Harbour 14 IPS 13.5 PE4710 2020 2025 2400 58 loose -1500 200 140
    U-01 Upland 16 IPS 11 PE3408 1993 1998 5200 126 early 800 6100 60
    U-02 Upland 12 IPS 9 PE3608 1999 2006 4300 104 big 1500 6600 35
    U-03 Upland 14 IPS 9 PE4710 2011 2016 3900 92 mixed 400 6900 105
    U-04 Upland 8 IPS 9 PE4710 2021 2024 2200 54 loose 2600 7400 20
    T-01 Trunk 36 IPS 13.5 PE3408 1997 2003 9800 96 big -4200 3300 -8
    T-02 Trunk 30 IPS 13.5 PE3408 1999 2005 8200 88 big -3800 2900 -20
    T-03 Trunk 24 IPS 11 PE3608 2001 2007 6900 104 big 800 2800 12
    T-04 Trunk 20 IPS 11 PE3408 1998 2004 5600 84 big 1200 2500 -35
    T-05 Trunk 28 IPS 13.5 PE3608 2004 2008 6100 72 big -1200 3200 50
    T-06 Trunk 24 IPS 11 PE4710 2020 2025 5200 66 loose -2600 3900 75
    M-01 Meadow 12 IPS 13.5 PE4710 2009 2014 3700 104 mixed 3200 2300 25
    M-02 Meadow 8 IPS 11 PE4710 2009 2013 2900 98 mixed 3700 2900 80
    M-03 Meadow 18 IPS 13.5 PE4710 2010 2016 4600 92 mixed 3000 1800 -5
    M-04 Meadow 6 IPS 11 PE4710 2012 2018 1800 70 mixed 4300 3300 120
    M-05 Meadow 10 DIPS 13.5 PE4710 2013 2018 2600 74 mixed 4700 2500 45
    M-06 Meadow 12 IPS 11 PE4710 2022 2025 2000 44 loose 5200 3100 10
    F-01 Fenside 315 ISO 17 PE100 1998 2006 3900 98 metric 1500 -2600 -15
    F-02 Fenside 450 ISO 17 PE100 2001 2009 4800 72 metric 1900 -3000 -40
    F-03 Fenside 160 ISO 11 PE100 1999 2010 2100 84 metric 2400 -2300 30
    F-04 Fenside 225 ISO 11 PE100 2003 2012 2600 66 metric 2900 -3300 70
    F-05 Fenside 630 ISO 17 PE100 2005 2011 5100 48 metric 1200 -3400 -70
    """.strip().splitlines()
)


def ground(x, y):
    """Ground level, m: low by the shore in the south, rising to the uplands in the north."""
    east, north = np.asarray(x) - ORIGIN[0], np.asarray(y) - ORIGIN[1]
    level = 12.0 + 0.0075 * north + 5.0 * np.sin(east / 900.0) + 4.0 * np.sin(north / 700.0 + 1.0) + 2.5 * np.sin((east + north) / 410.0)
    return np.maximum(level, 0.5 + 0.4 * np.sin(east / 300.0))


def line_of(main: Main, rng: np.random.Generator) -> np.ndarray:
    """Corners (k, 4) of a main: x, y, level of the pipe's centre line, chainage."""
    legs = int(np.clip(main.length / 260.0, 8, 30))
    turns = np.cumsum(rng.normal(0.0, 13.0, legs))
    angle = np.deg2rad(main.heading + turns - turns.mean())
    step = rng.dirichlet(np.full(legs, 9.0)) * main.length
    xy = ORIGIN + np.array(main.start) + np.vstack([[0.0, 0.0], np.cumsum(step[:, None] * np.column_stack([np.cos(angle), np.sin(angle)]), axis=0)])
    chainage = np.concatenate([[0.0], np.cumsum(step)])
    level = ground(xy[:, 0], xy[:, 1]) - 1.4
    return np.column_stack([xy, level, chainage])


def along(line: np.ndarray, chainage: np.ndarray) -> np.ndarray:
    """Points (n, 3) of a main at chainages."""
    return np.column_stack([np.interp(chainage, line[:, 3], line[:, k]) for k in range(3)])


def place_joints(main: Main, line: np.ndarray, rng: np.random.Generator) -> pd.DataFrame:
    """The joints of a main: groups of 2 to 8 in chambers, the rest in the ground on their own."""
    wanted = main.joints
    rows: list[tuple[float, str, str]] = []
    chamber = 0
    in_chambers = int(wanted * 0.55)
    while len(rows) < in_chambers:
        chamber += 1
        count = int(min(rng.choice([2, 2, 4, 4, 6, 8]), in_chambers - len(rows)))
        middle = rng.uniform(0.02, 0.98) * main.length
        name = f"{main.main_id.replace('-', '')}-CH{chamber:02d}"
        rows += [(middle + 0.9 * (k - 0.5 * (count - 1)), "chamber", name) for k in range(count)]
    left = wanted - len(rows)
    above = min(left, 4) if main.zone in ("Upland", "Trunk") else 0
    rows += [(2.0 + 1.1 * k, "above ground", f"{main.main_id.replace('-', '')}-PS") for k in range(above)]
    for chainage in np.sort(rng.uniform(0.01, 0.99, left - above) * main.length):
        rows.append((float(chainage), "buried", ""))
    frame = pd.DataFrame(rows, columns=["chainage", "setting", "access_group"]).sort_values("chainage", kind="stable").reset_index(drop=True)
    # Buried joints of one shut-down section share a digging permit and a shutdown, not a chamber.
    section = 1 + (frame["chainage"] // 900.0).astype(int)
    shutdown = main.main_id.replace("-", "") + "-S" + section.astype(str).str.zfill(2)
    frame["access_group"] = frame["access_group"].where(frame["access_group"] != "", shutdown)
    points = along(line, frame["chainage"].to_numpy())
    frame[["x", "y", "elevation"]] = points
    if main.practice == "metric" or main.zone == "Harbour":
        frame["elevation"] = frame["elevation"].round(1)
    return frame


def build_network() -> tuple[dict[str, np.ndarray], pd.DataFrame]:
    """(corners by main, joints): one row per joint, with its main's facts."""
    rng = stream("network")
    lines, parts = {}, []
    for main in MAINS:
        line = line_of(main, rng)
        lines[main.main_id] = line
        joints = place_joints(main, line, rng)
        joints.insert(0, "joint_id", [f"{main.main_id.replace('-', '')}-{k + 1:03d}" for k in range(len(joints))])
        for name in ("main_id", "zone", "size", "system", "ratio", "material", "practice"):
            joints[name] = getattr(main, name)
        # Laid in the order of the chainage, over the contract's years.
        first, last = main.years
        share = joints["chainage"] / main.length
        joints["year"] = np.clip(np.round(first + share * (last - first) + rng.normal(0, 0.5, len(joints))), first, last).astype(int)
        parts.append(joints)
    return lines, pd.concat(parts, ignore_index=True)
