"""Reading quantities from the file of a main: every key ends in its unit, every fault says where it is and what would do."""

from __future__ import annotations

import csv
import difflib
import math
import tomllib
from pathlib import Path

import numpy as np

from screener.records import InputError

LARGEST_FILE = 20_000_000
"""Bytes; larger files are refused."""

UNITS = {
    "length": {"m": 1.0, "mm": 1e-3, "km": 1e3, "ft": 0.3048, "in": 0.0254},
    "pressure": {"pa": 1.0, "kpa": 1e3, "mpa": 1e6, "gpa": 1e9, "bar": 1e5, "psi": 6894.757293168},
    "compliance": {"per_gpa": 1e-9, "per_pa": 1.0},
    "flow": {"m3_per_s": 1.0, "l_per_s": 1e-3, "m3_per_h": 1 / 3600, "gpm": 231 * 0.0254**3 / 60, "mgd": 231 * 0.0254**3 * 1e6 / 86400},
    "speed": {"m_per_s": 1.0, "ft_per_s": 0.3048},
    "area": {"m2": 1.0, "mm2": 1e-6, "in2": 0.0254**2},
    "time": {"s": 1.0},
    "rotation": {"rpm": 2 * math.pi / 60, "rad_per_s": 1.0},
    "torque": {"n_m": 1.0, "lbf_ft": 1.3558179483314},
    "inertia": {"kg_m2": 1.0, "lb_ft2": 0.45359237 * 0.3048**2},
    "temperature": {"c": 1.0},
    "ratio": {"": 1.0},
}
"""Unit suffixes of keys, by kind; factor to SI (temperature stays in C). gpm and mgd are US gallons."""

_NEEDED = object()


class Table:
    """One table of the file. `where` names it in messages; `assumed` collects the defaults that were used."""

    def __init__(self, values: dict, where: str, assumed: list[str]) -> None:
        if not isinstance(values, dict):
            raise InputError(f"{where}: expected a table of keys and values")
        self.values, self.where, self.assumed, self.used = values, where, assumed, set()

    def key_of(self, name: str, kind: str):
        keys = [(f"{name}_{unit}" if unit else name, factor) for unit, factor in UNITS[kind].items()]
        found = [(key, factor) for key, factor in keys if key in self.values]
        self.used.update(key for key, _ in keys)
        if len(found) > 1:
            raise InputError(f"{self.where}: {found[0][0]} and {found[1][0]} are both given; keep one")
        return (found[0] if found else None), [key for key, _ in keys]

    def has(self, name: str, kind: str) -> bool:
        return self.key_of(name, kind)[0] is not None

    def number(self, name: str, kind: str, default=_NEEDED, low=-math.inf, high=math.inf, note: str = "") -> float:
        """A number in SI; `default` (SI) where the key is absent, listed among the assumptions when `note` says what it is."""
        found, keys = self.key_of(name, kind)
        if found is None:
            if default is _NEEDED:
                raise InputError(f"{self.where}: {keys[0]} is missing" + (f" (or {', '.join(keys[1:4])})" if len(keys) > 1 else ""))
            if note:
                self.assumed.append(f"{self.where}: {note}")
            return default
        value = as_number(self.values[found[0]], f"{self.where}: {found[0]}") * found[1]
        if not low <= value <= high:
            raise InputError(f"{self.where}: {found[0]} = {self.values[found[0]]!r} is outside {low / found[1]:g} to {high / found[1]:g}")
        return value

    def numbers(self, name: str, kind: str, default=_NEEDED, most: int = 1000) -> np.ndarray:
        found, keys = self.key_of(name, kind)
        if found is None:
            if default is _NEEDED:
                raise InputError(f"{self.where}: {keys[0]} is missing")
            return np.asarray(default, dtype=float)
        values = self.values[found[0]]
        if not isinstance(values, list) or len(values) > most:
            raise InputError(f"{self.where}: {found[0]} is to be a list of up to {most} numbers in brackets")
        return np.array([as_number(v, f"{self.where}: {found[0]}") * found[1] for v in values], dtype=float)

    def text(self, name: str, choices: tuple[str, ...] | None = None, default=_NEEDED) -> str:
        self.used.add(name)
        value = self.values.get(name, default)
        if value is _NEEDED:
            raise InputError(f"{self.where}: {name} is missing" + (f"; one of {', '.join(choices)}" if choices else ""))
        if not isinstance(value, str) or len(value) > 500:
            raise InputError(f"{self.where}: {name} is to be text")
        if choices and value not in choices:
            raise InputError(f"{self.where}: {name} = {value!r}; expected one of {', '.join(choices)}")
        return value

    def flag(self, name: str, default: bool) -> bool:
        self.used.add(name)
        value = self.values.get(name, default)
        if not isinstance(value, bool):
            raise InputError(f"{self.where}: {name} = {value!r}; expected true or false")
        return value

    def schedule(self, name: str, factor: float = 1.0, low: float = 0.0, high: float = math.inf, default=_NEEDED):
        """Broken line [[time in s, value], ...] as (times, values); times from 0, none before the one above it."""
        self.used.add(name)
        points = self.values.get(name, default)
        if points is _NEEDED:
            raise InputError(f"{self.where}: {name} is missing; a list of [seconds, value] pairs")
        if not isinstance(points, list) or not 1 <= len(points) <= 1000 or not all(isinstance(p, list) and len(p) == 2 for p in points):
            raise InputError(f"{self.where}: {name} is to be a list of [seconds, value] pairs, such as [[0, 1], [10, 0]]")
        line = np.array([[as_number(v, f"{self.where}: {name}") for v in p] for p in points], dtype=float)
        if line[0, 0] < 0 or (np.diff(line[:, 0]) < 0).any():
            raise InputError(f"{self.where}: the times of {name} start below 0 or go back")
        if ((line[:, 1] < low) | (line[:, 1] > high)).any():
            raise InputError(f"{self.where}: a value of {name} is outside {low:g} to {high:g}")
        return line[:, 0], line[:, 1] * factor

    def done(self) -> None:
        """Refuse keys that nothing has asked for."""
        for key in self.values:
            if key not in self.used:
                near = difflib.get_close_matches(str(key), sorted(self.used), n=1)
                raise InputError(f"{self.where}: unknown key {str(key)[:80]!r}" + (f"; did you mean {near[0]}?" if near else ""))


def as_number(value, where: str) -> float:
    if isinstance(value, str):
        try:
            value = float(value.strip())
        except ValueError:
            raise InputError(f"{where} = {value[:60]!r} is not a number") from None
    if isinstance(value, bool) or not isinstance(value, (int, float)) or not abs(value) < 1e300 or not math.isfinite(value):
        raise InputError(f"{where} = {str(value)[:60]!r} is not a number")
    return float(value)


def part_of(top: Table, name: str, assumed: list[str]) -> Table:
    top.used.add(name)
    return Table(top.values.get(name, {}), f"{top.where}: {name}", assumed)


def tables_of(top: Table, name: str, most: int) -> list:
    top.used.add(name)
    values = top.values.get(name, [])
    if not isinstance(values, list) or len(values) > most:
        raise InputError(f"{top.where}: {name} is to be up to {most} tables, each under [[{name}]]")
    return values


def read_toml(path: Path) -> dict:
    return _parse(path, lambda text: tomllib.loads(text), (tomllib.TOMLDecodeError, RecursionError, ValueError), "not a TOML file")


def read_rows(path: Path, most: int) -> list[dict]:
    """Rows of a CSV beside the main's file; blank cells are left out, cells stay text."""

    def rows(text: str) -> list[dict]:
        reader = csv.DictReader(line for line in text.splitlines() if line.strip() and not line.startswith("#"))
        if not reader.fieldnames:
            raise InputError(f"{path}: the table has no header line")
        names = [str(name).strip() for name in reader.fieldnames]
        if len(set(names)) != len(names):
            raise InputError(f"{path}: two columns have the same header")
        found = []
        for row in reader:
            if None in row:
                raise InputError(f"{path}: row {len(found) + 1} has more cells than the header")
            found.append({str(k).strip(): v.strip() for k, v in row.items() if v is not None and v.strip()})
            if len(found) > most:
                raise InputError(f"{path}: more than {most} rows")
        return found

    return _parse(path, rows, (csv.Error,), "not a delimited table")


def beside(path: Path, name: str, where: str) -> Path:
    """A file in the folder of `path`, by its plain name."""
    if Path(name).name != name or name in ("", ".", ".."):
        raise InputError(f"{where}: file = {name!r} is to be the plain name of a file beside {path.name}")
    return path.parent / name


def _parse(path: Path, parser, problems, what: str):
    try:
        if path.stat().st_size > LARGEST_FILE:
            raise InputError(f"{path}: larger than {LARGEST_FILE // 1_000_000} MB")
        text = path.read_text(encoding="utf-8-sig")
    except FileNotFoundError:
        raise InputError(f"{path}: there is no such file") from None
    except (OSError, UnicodeDecodeError) as problem:
        raise InputError(f"{path}: can't be read ({problem})") from None
    try:
        return parser(text)
    except problems as problem:
        raise InputError(f"{path}: {what}: {problem}") from None
