"""What reading pressure logs can be told. SI; every default is common practice, no source, unless it says otherwise."""

from __future__ import annotations

from dataclasses import dataclass
from zoneinfo import ZoneInfo

from screener.records import InputError

DAY = 86_400.0

# unit as written, lower case without blanks -> (factor to Pa, shown name)
_WATER = 1000.0 * 9.80665
UNITS = {
    "pa": 1.0, "kpa": 1e3, "mpa": 1e6, "bar": 1e5, "mbar": 1e2, "psi": 0.45359237 * 9.80665 / 0.0254**2, "atm": 101_325.0, "kg/cm2": 98_066.5, "kgf/cm2": 98_066.5,
    "m": _WATER, "mh2o": _WATER, "mwc": _WATER, "mhead": _WATER, "mwg": _WATER, "ft": _WATER * 0.3048, "fth2o": _WATER * 0.3048, "fthead": _WATER * 0.3048, "n/mm2": 1e6, "kn/m2": 1e3,
}  # fmt: skip
_GAUGE = ("(g)", "gauge", "g")
_ABSOLUTE = ("(a)", "abs", "absolute", "a")


def unit_of(text: str) -> tuple[float, bool] | None:
    """(Pa per unit, absolute?) of a written unit such as 'psi', 'barg', 'bar(a)', 'kPa abs', 'm head'; None when it is none."""
    word = text.lower().replace("²", "2").replace(" ", "").replace("_", "").strip(".")
    if word in UNITS:
        return UNITS[word], False
    for endings, absolute in ((_GAUGE, False), (_ABSOLUTE, True)):
        for ending in endings:
            stem = word.removesuffix(ending)
            if stem != word and stem in UNITS and stem not in ("m", "ft"):
                return UNITS[stem], absolute
    return None


@dataclass(frozen=True)
class LogSettings:
    """unit: of files that name none. time_zone: of times that carry no offset ("" leaves them as they stand). Pressures Pa gauge."""

    unit: str = ""
    time_zone: str = ""
    day_first: bool | None = None  # for 03/04/2026 where the file itself doesn't settle it
    missing_codes: tuple[float, ...] = (-99999.0, -9999.0, -999.0, -99.9, 9999.0, 32767.0, 65535.0)
    lowest_pressure: float = -101_325.0
    largest_pressure: float = 6e6
    spike: float = 1.5e6  # a single reading this far from both neighbours: beyond any surge a PE main can make
    drop_out: float = 5e4  # a single reading of exactly 0 between neighbours above this
    stuck_hours: float = 3.0
    stuck_readings: int = 100
    gap_intervals: float = 5.0
    gap_at_least: float = 60.0  # s
    drift: float = 3e4  # change of the daily mean over the record that is worth a word
    slow_interval: float = 10.0  # s; readings further apart don't see a surge's peak
    cycle_bin: float = 1e4
    smallest_cycle: float = 2e4
    full_day: float = 0.8  # share of a day that must be covered for its largest value and range to count
    chunk_rows: int = 500_000
    memory_rows: int = 20_000_000  # readings kept in memory before they go to a temporary file

    def __post_init__(self) -> None:
        if self.unit and unit_of(self.unit) is None:
            raise InputError(f"log setting unit = {self.unit!r}: expected a pressure unit such as 'kPa', 'bar', 'psi', 'm head'")
        if self.time_zone:
            try:
                ZoneInfo(self.time_zone)
            except (KeyError, ValueError, OSError):
                raise InputError(f"log setting time_zone = {self.time_zone!r}: expected a name such as 'America/Denver' or 'UTC'") from None
        for name in ("spike", "stuck_hours", "gap_intervals", "cycle_bin", "chunk_rows", "memory_rows", "largest_pressure", "slow_interval"):
            if not getattr(self, name) > 0:
                raise InputError(f"log setting {name} = {getattr(self, name)}: expected above 0")
