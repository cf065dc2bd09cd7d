"""The station table: where each logger stands. One row a logger: zone, or main and chainage; elevation; coordinates if there are any."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pandas as pd

from screener.pressure.log_layout import plain
from screener.records import InputError, Ledger, Severity

HEADINGS = {
    "logger": {"logger", "loggerid", "loggername", "station", "stationid", "sensor", "sensorid", "point", "pointid", "id", "name", "device", "deviceid"},
    "main": {"main", "mainid", "pipeline", "line", "lineid", "route", "risingmain", "pipe"},
    "zone": {"zone", "pressurezone", "dma", "area", "district", "zonename"},
    "chainage": {"chainage", "stationchainage", "distance", "distancealong", "measure", "stationing"},
    "elevation": {"elevation", "level", "groundlevel", "height", "z", "altitude", "sensorelevation", "loggerelevation"},
    "x": {"x", "xcoordinate", "easting", "east"},
    "y": {"y", "ycoordinate", "northing", "north"},
}  # fmt: skip
LENGTHS = {"m": 1.0, "metres": 1.0, "meters": 1.0, "ft": 0.3048, "feet": 0.3048, "foot": 0.3048, "km": 1000.0, "mi": 1609.344}


@dataclass(frozen=True, eq=False)
class Stations:
    """Equal-length arrays, one row a station. logger, main, zone: text, "" unknown. chainage, elevation, x, y: m, NaN unknown."""

    logger: np.ndarray
    main: np.ndarray
    zone: np.ndarray
    chainage: np.ndarray
    elevation: np.ndarray
    x: np.ndarray
    y: np.ndarray

    def __len__(self) -> int:
        return len(self.logger)


def read_stations(path: str | Path, ledger: Ledger) -> Stations:
    """Stations from a delimited text file or workbook. Rows without a logger, and second rows of one, are findings and left out."""
    path = Path(path)
    frame = _open(path)
    frame.columns = [str(name) for name in frame.columns]
    found: dict[str, str] = {}
    for heading in frame.columns:
        bare, _ = _length_unit(heading)
        for role, words in HEADINGS.items():
            if plain(bare) in words and role not in found:
                found[role] = heading
                break
    if "logger" not in found or not ({"zone", "main"} & found.keys()):
        raise InputError(f"{path}: a station table needs a column 'logger' and a column 'zone' or 'main'; found {', '.join(frame.columns[:8])}")
    text = {role: _text(frame, found.get(role)) for role in ("logger", "main", "zone")}
    numbers = {role: _metres(frame, found.get(role), role, path, ledger) for role in ("chainage", "elevation", "x", "y")}
    nameless = text["logger"] == ""
    second = pd.Series(text["logger"]).duplicated().to_numpy() & ~nameless
    placeless = ~nameless & ~second & (text["zone"] == "") & ((text["main"] == "") | np.isnan(numbers["chainage"]))
    for code, rows, problem, action in (
        ("station_name", nameless, "station without a logger", "left out"),
        ("station_twice", second, "logger stands in an earlier row", "the first row counts"),
        ("station_place", placeless, "station with neither a zone nor a main with chainage", "serves no joint"),
    ):
        ledger.finding(code, Severity.DOUBTS, rows, problem=f"{path.name}: {problem}", action=action, column=found["logger"], values=text["logger"][rows])
    keep = ~nameless & ~second
    return Stations(**{name: values[keep] for name, values in (text | numbers).items()})


def _open(path: Path) -> pd.DataFrame:
    try:
        if path.suffix.lower() in (".xlsx", ".xlsm", ".xls", ".xlsb", ".ods"):
            return pd.read_excel(path, engine="calamine", dtype=object)
        try:
            return pd.read_csv(path, sep=None, engine="python", dtype="string", encoding="utf-8-sig", comment="#")
        except UnicodeDecodeError:
            return pd.read_csv(path, sep=None, engine="python", dtype="string", encoding="cp1252", comment="#")
    except FileNotFoundError:
        raise InputError(f"{path}: there is no such station table") from None
    except Exception as problem:  # readers of foreign formats raise what they like
        raise InputError(f"{path}: the station table can't be read ({str(problem).splitlines()[0][:120] if str(problem) else type(problem).__name__})") from None


def _text(frame: pd.DataFrame, heading: str | None) -> np.ndarray:
    if heading is None:
        return np.full(len(frame), "", dtype=object)
    column = frame[heading]
    whole = column.map(lambda cell: str(int(cell)) if isinstance(cell, float) and cell.is_integer() else cell)  # 7.0 of a workbook is logger 7
    return whole.astype("string").str.strip().to_numpy(dtype=object, na_value="")


def _metres(frame: pd.DataFrame, heading: str | None, role: str, path: Path, ledger: Ledger) -> np.ndarray:
    if heading is None:
        return np.full(len(frame), np.nan)
    written = frame[heading].astype("string").str.strip().replace("", pd.NA)
    numbers = pd.to_numeric(written.str.replace(",", "", regex=False), errors="coerce").to_numpy(dtype=float, na_value=np.nan)
    bad = np.isnan(numbers) & written.notna().to_numpy()
    ledger.finding("station_number", Severity.DOUBTS, bad, problem=f"{path.name}: {role} is no number", action="taken as unknown", column=heading, values=written.to_numpy(dtype=object)[bad])
    _, factor = _length_unit(heading)
    if factor is None and role in ("chainage", "elevation"):
        ledger.finding("station_unit", Severity.DOUBTS, None, problem=f"{path.name}: heading {heading!r} names no unit", action="taken as metres", column=heading)
    return numbers * (factor or 1.0)


def _length_unit(heading: str) -> tuple[str, float | None]:
    """(heading without its unit, metres per unit or None)."""
    words = heading.replace("(", " ").replace(")", " ").replace("[", " ").replace("]", " ").replace("_", " ").replace(",", " ").split()
    if len(words) > 1 and words[-1].lower() in LENGTHS:
        return " ".join(words[:-1]), LENGTHS[words[-1].lower()]
    return heading, None
