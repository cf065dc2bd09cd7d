"""Invented pressure logs of twelve loggers, with the defects that real ones have.

Time is local, without a zone. Pressures are made in psi; each logger writes its own unit.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pandas as pd
from scipy.signal import lfilter

from .network import INVENTED, ZONES, along, stream
from .practice import PSI_PER_METRE

START = np.datetime64("2026-03-02T00:00:00")
DAY = 86400
UNITS = {"psi": (1.0, 1), "kPa": (6.894757, 0), "bar": (0.06894757, 2)}
TRIP = 6 * DAY + 14 * 3600 + 22 * 60 + 17
"""Seconds from the start to the trip of the pumps of T-01: Sunday 8 March 2026, 14:22:17."""


@dataclass(frozen=True)
class Logger:
    name: str
    zone: str
    main: str  # "" for a logger that stands for its zone
    chainage: float
    unit: str
    step: int  # s
    days: int
    kind: str  # "quiet", "pumped" or "steps"
    defect: str


LOGGERS = (
    Logger("L01", "Harbour", "", 0.0, "psi", 120, 10, "quiet", ""),
    Logger("L02", "Harbour", "H-06", 1500.0, "psi", 120, 10, "quiet", "gap"),
    Logger("L03", "Upland", "U-01", 40.0, "psi", 20, 4, "pumped", ""),
    Logger("L04", "Upland", "U-01", 3900.0, "psi", 20, 4, "pumped", "stuck"),
    Logger("L05", "Upland", "U-02", 600.0, "psi", 20, 3, "pumped", "spikes"),
    Logger("L06", "Trunk", "T-01", 300.0, "psi", 120, 10, "steps", ""),
    Logger("L07", "Trunk", "T-01", 6000.0, "psi", 120, 10, "steps", ""),
    Logger("L08", "Meadow", "", 0.0, "kPa", 120, 10, "quiet", "codes"),
    Logger("L09", "Meadow", "M-03", 2000.0, "psi", 120, 10, "quiet", "order"),
    Logger("L10", "Fenside", "F-02", 200.0, "kPa", 120, 10, "quiet", ""),
    Logger("L11", "Fenside", "F-02", 4500.0, "kPa", 120, 10, "quiet", "blanks"),
    Logger("L12", "Fenside", "", 0.0, "bar", 120, 10, "quiet", "drift"),
)
WIDE = ("L10", "L11")
NOTES = {
    "": "no known defect",
    "gap": "battery flat for 19 h",
    "stuck": "sensor stuck for 5 h",
    "spikes": "single-sample spikes; three comment lines above the heading",
    "codes": "-999 where the sensor gave nothing",
    "order": "stamps repeated and one block out of order; day first",
    "blanks": "empty cells; in one file with L10",
    "drift": "zero drifts by 0.6 bar in ten days",
}
# Size in psi of what each main's pumps do, and cycles per day.
PUMPED = {"U-01": (42.0, 150.0), "U-02": (36.0, 290.0)}


def demand(seconds: np.ndarray) -> np.ndarray:
    """Share of the day's peak demand: low at night, peaks at breakfast and in the evening."""
    hour = seconds / 3600.0 % 24.0
    return 0.25 + 0.75 * np.exp(-((hour - 7.5) ** 2) / 4.0) + 0.6 * np.exp(-((hour - 19.0) ** 2) / 7.0) + 0.3 * np.exp(-((hour - 13.0) ** 2) / 9.0)


def wander(rng: np.random.Generator, count: int, size: float, memory: float) -> np.ndarray:
    """Slow noise of a standard deviation `size`; memory 0 to 1 from one sample to the next."""
    return lfilter([size * np.sqrt(1.0 - memory**2)], [1.0, -memory], rng.normal(size=count))


def pumped(rng: np.random.Generator, seconds: np.ndarray, swing: float, per_day: float) -> np.ndarray:
    """Pressure between cut-in and cut-out, from -swing to 0, with a short kick at every start."""
    value = np.empty(len(seconds))
    at, level = 0, -0.5 * swing
    while at < len(seconds):
        period = max(60, int(rng.normal(DAY / per_day, 0.15 * DAY / per_day)))
        busy = 0.3 + 0.35 * demand(np.array([at]))[0] / 1.3
        for length, target, quick, kick in ((int(period * busy), 0.0, 22.0, 0.22 * swing), (period - int(period * busy), -swing, 45.0, 0.0)):
            t = np.arange(min(length, len(seconds) - at))
            value[at : at + len(t)] = target + (level - target) * np.exp(-t / quick) + kick * np.exp(-t / 9.0) * np.sin(t / 4.0)
            at += len(t)
            if len(t):
                level = value[at - 1]
    return value


def trip(seconds: np.ndarray, chainage: float) -> np.ndarray:
    """The pumps of T-01 trip: pressure falls, the wave comes back from the far end, and it swings out (psi).

    Front 290 m/s and 9.8 km give a period of 135 s; near the far end the swing is smaller. Made up, not computed.
    """
    speed, length = 290.0, 9800.0
    period = 4.0 * length / speed
    after = seconds - TRIP - chainage / speed
    share = np.cos(0.5 * np.pi * chainage / length) ** 0.5
    swing = -112.0 * share * np.tanh(3.0 * np.sin(2.0 * np.pi * after / period)) * np.exp(-np.clip(after, 0.0, None) / (3.2 * period))
    stopped = -6.0 * (1.0 - np.exp(-np.clip(after, 0.0, None) / 60.0)) * (after < 5400.0)
    return np.where(after > 0.0, swing + stopped, 0.0)


def pressure(logger: Logger, level: float, rng: np.random.Generator) -> tuple[np.ndarray, np.ndarray]:
    """(seconds from the start, psi) as the sensor would see it, without defects."""
    seconds = np.arange(0, logger.days * DAY, logger.step)
    if logger.kind == "pumped":
        every = np.arange(logger.days * DAY)
        fast = pumped(rng, every, *PUMPED[logger.main]) + wander(rng, len(every), 0.8, 0.9)
        far = 1.0 if logger.chainage < 1000.0 else 0.72
        return seconds, level + far * fast[seconds] - 2.5 * demand(seconds)
    if logger.kind == "steps":
        # A logger that saw the trip wrote every second for twenty minutes around it.
        seconds = np.union1d(seconds, np.arange(TRIP - 120, TRIP + 1080))
        # Pumps change eight times a day, at the same moments for both loggers of the main.
        changes = np.sort(stream(f"pumps of {logger.main}").uniform(0, logger.days * DAY, 8 * logger.days))
        changes = changes[np.abs(changes - TRIP) > 3600.0]
        settled = -13.0 * (np.searchsorted(changes, seconds) % 2)
        return seconds, level + settled - 5.0 * demand(seconds) + wander(rng, len(seconds), 0.5, 0.6) + trip(seconds, logger.chainage)
    drop = {"Harbour": 6.0, "Meadow": 8.0, "Fenside": 7.0}[logger.zone]
    return seconds, level - drop * demand(seconds) + wander(rng, len(seconds), 0.5, 0.8)


def spoil(logger: Logger, seconds: np.ndarray, values: np.ndarray, rng: np.random.Generator):
    """The logger's defect put into its record: (seconds, values as written numbers)."""
    n = len(seconds)
    values = values.copy()
    if logger.defect == "gap":
        kept = (seconds < 3.4 * DAY) | (seconds > 3.4 * DAY + 19 * 3600)
        return seconds[kept], values[kept]
    if logger.defect == "stuck":
        stuck = (seconds >= 1.3 * DAY) & (seconds < 1.3 * DAY + 5 * 3600)
        values[stuck] = values[np.argmax(stuck)]
    elif logger.defect == "spikes":
        values[rng.choice(n, 4, replace=False)] = [912.4, 874.0, 0.0, 655.3]
    elif logger.defect == "codes":
        first = rng.choice(n - 40, 6, replace=False)
        for k in first:
            values[k : k + int(rng.integers(1, 30))] = -999.0
    elif logger.defect == "blanks":
        values[rng.choice(n, 60, replace=False)] = np.nan
    elif logger.defect == "drift":
        values = values + 0.6 * seconds / (10.0 * DAY)
    elif logger.defect == "order":
        rows = np.arange(n)
        rows[2000:2050] = rows[2000:2050][::-1]
        rows = np.insert(rows, [900, 901, 4000], [900, 900, 3999])
        return seconds[rows], values[rows]
    return seconds, values


def stations(lines: dict[str, np.ndarray]) -> pd.DataFrame:
    """Where each logger stands; a zone's logger has no main and stands 20 m above datum (Fenside: 0)."""
    rows = []
    for logger in LOGGERS:
        if logger.main:
            level = round(float(along(lines[logger.main], np.array([logger.chainage]))[0, 2]), 1)
        else:
            level = {"Harbour": 12.0, "Meadow": 24.0, "Fenside": 0.0}[logger.zone]
        rows.append(
            {
                "logger": logger.name,
                "main": logger.main,
                "chainage_m": logger.chainage if logger.main else np.nan,
                "zone": logger.zone,
                "elevation_m": level,
                "unit": logger.unit,
                "file": "L10_L11.csv" if logger.name in WIDE else f"{logger.name}.csv",
                "note": f"invented; {NOTES[logger.defect]}",
            }
        )
    return pd.DataFrame(rows)


def record(logger: Logger, elevation: float) -> pd.DataFrame:
    """time (datetime), value: the logger's file in its own unit."""
    rng = stream(logger.name)
    zone = ZONES[logger.zone]
    head = zone.hydraulic_grade - zone.grade_loss * logger.chainage / 1000.0
    seconds, psi = pressure(logger, (head - elevation) * PSI_PER_METRE, rng)
    factor, digits = UNITS[logger.unit]
    seconds, values = spoil(logger, seconds, np.round(psi * factor, digits), rng)
    return pd.DataFrame({"time": START + seconds.astype("timedelta64[s]"), "value": np.round(values, digits)})


def _text(logger: Logger, values: pd.Series) -> pd.Series:
    return values.map(lambda v: "" if np.isnan(v) else f"{v:.{UNITS[logger.unit][1]}f}")


def write_loggers(folder: Path, lines: dict[str, np.ndarray]) -> None:
    """A file per logger, the two of WIDE in one, and `stations.csv` beside the folder."""
    folder.mkdir(exist_ok=True)
    placed = stations(lines)
    placed.to_csv(folder.parent / "stations.csv", index=False, lineterminator="\n")
    wide = []
    for logger, elevation in zip(LOGGERS, placed["elevation_m"], strict=True):
        data = record(logger, elevation)
        style = {"order": "%d/%m/%Y %H:%M", "drift": "%Y-%m-%dT%H:%M:%SZ"}.get(logger.defect, "%Y-%m-%d %H:%M:%S")
        frame = pd.DataFrame({"time": data["time"].dt.strftime(style), "value": _text(logger, data["value"])})
        if logger.name in WIDE:
            wide.append(frame.rename(columns={"value": f"{logger.name} ({logger.unit})"}))
            continue
        frame = frame.rename(columns={"value": f"pressure ({logger.unit})"})
        with (folder / f"{logger.name}.csv").open("w", encoding="utf-8", newline="") as file:
            if logger.defect == "spikes":
                file.write(f"# {INVENTED}\n# logger {logger.name}\n# gauge pressure, psi\n")
            frame.to_csv(file, index=False, lineterminator="\n")
    wide[0].merge(wide[1], on="time", how="outer").to_csv(folder / "L10_L11.csv", index=False, lineterminator="\n")
