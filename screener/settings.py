"""Settings of a run, from defaults, a TOML file and the command line."""

from __future__ import annotations

import datetime
import difflib
import tomllib
from dataclasses import asdict, dataclass, fields, replace
from pathlib import Path

from screener.records import InputError

UNIT_SYSTEMS = ("us", "metric")
RANKINGS = ("utilization", "likelihood", "expected_loss")


@dataclass(frozen=True)
class Settings:
    """Everything a run can be told. Pressures kPa, velocities m/s, temperatures deg C, times years.

    The physical values are defaults of assumption rules; each use of one is
    listed with the joint it was used for.
    """

    units: str = "us"
    safety_factor: float = 2.0
    rank_by: str = "utilization"
    assessment_date: str = ""  # ISO date; empty: the day of the run
    horizon_years: float = 10.0
    seed: int = 20260101
    sheet: str = ""

    # Assumption rules for what an inventory leaves open.
    default_temperature_c: float = 18.0
    default_seasonal_range_k: float = 12.0
    recurrent_velocity_change: float = 0.5
    occasional_velocity_change: float = 1.5
    operating_share_of_rating: float = 0.65
    default_cycles_per_day: float = 2.0
    seating_stress_psi: float = 1500.0
    torque_by_feel_share: float = 0.7
    hub_thickness_to_wall: float = 1.25
    class_vote_share: float = 0.6
    class_vote_count: int = 5

    def __post_init__(self) -> None:
        for item in fields(self):
            value = getattr(self, item.name)
            wanted = type(item.default)
            if wanted is float and isinstance(value, int) and not isinstance(value, bool):
                object.__setattr__(self, item.name, float(value))
            elif not isinstance(value, wanted) or isinstance(value, bool):
                raise InputError(
                    f"setting {item.name} = {value!r}: expected {_kind(wanted)}, such as {item.default!r}"
                )
        if self.units not in UNIT_SYSTEMS:
            raise InputError(f"setting units = {self.units!r}: expected one of {', '.join(UNIT_SYSTEMS)}")
        if self.rank_by not in RANKINGS:
            raise InputError(f"setting rank_by = {self.rank_by!r}: expected one of {', '.join(RANKINGS)}")
        if not 1.0 <= self.safety_factor <= 10.0:
            raise InputError(f"setting safety_factor = {self.safety_factor}: expected 1 to 10")
        if not 0.0 < self.horizon_years <= 100.0:
            raise InputError(f"setting horizon_years = {self.horizon_years}: expected above 0, up to 100")
        if self.seed < 0:
            raise InputError(f"setting seed = {self.seed}: expected a whole number from 0 up")
        for name in ("operating_share_of_rating", "torque_by_feel_share", "class_vote_share"):
            if not 0.0 < getattr(self, name) <= 1.0:
                raise InputError(f"setting {name} = {getattr(self, name)}: expected above 0, up to 1")
        for name in (
            "default_seasonal_range_k",
            "recurrent_velocity_change",
            "occasional_velocity_change",
            "default_cycles_per_day",
            "seating_stress_psi",
            "hub_thickness_to_wall",
            "class_vote_count",
        ):
            if getattr(self, name) < 0:
                raise InputError(f"setting {name} = {getattr(self, name)}: expected 0 or more")
        self.assessment_year  # noqa: B018  (an unreadable date is refused here, not later)

    @property
    def assessment_year(self) -> float:
        """The assessment date as a decimal year."""
        if not self.assessment_date:
            day = datetime.date.today()
        else:
            try:
                day = datetime.date.fromisoformat(self.assessment_date)
            except ValueError:
                raise InputError(
                    f"setting assessment_date = {self.assessment_date!r}: expected a date such as '2026-01-31'"
                ) from None
        start = datetime.date(day.year, 1, 1)
        length = (datetime.date(day.year + 1, 1, 1) - start).days
        return day.year + (day - start).days / length

    def as_dict(self) -> dict:
        return asdict(self)


def _kind(wanted: type) -> str:
    return {float: "a number", int: "a whole number", str: "text in quotes"}[wanted]


def read_settings(path: str | Path | None = None, **given) -> Settings:
    """Settings from a TOML file (flat keys), overridden by `given` values that are not None."""
    values: dict = {}
    known = [item.name for item in fields(Settings)]
    if path is not None:
        try:
            values = tomllib.loads(Path(path).read_text(encoding="utf-8"))
        except FileNotFoundError:
            raise InputError(f"{path}: there is no such settings file") from None
        except (OSError, UnicodeDecodeError) as problem:
            raise InputError(f"{path}: the settings file can't be read ({problem})") from None
        except tomllib.TOMLDecodeError as problem:
            raise InputError(f"{path}: not a TOML file: {problem}") from None
        for key in values:
            if key not in known:
                close = difflib.get_close_matches(key, known, n=1)
                hint = f"; did you mean {close[0]}?" if close else f"; known settings: {', '.join(known)}"
                raise InputError(f"{path}: unknown setting {key!r}{hint}")
    values.update({key: value for key, value in given.items() if value is not None})
    return replace(Settings(), **values)
