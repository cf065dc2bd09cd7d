"""The two dictionaries: what an inventory may say, and what the screening says back.

Both are data files; header matching, parsing, audit, template, documentation
and every label in the outputs read them here.
"""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cache
from importlib.resources import files
from types import MappingProxyType


@dataclass(frozen=True)
class Attribute:
    """One attribute of an inventory. Ranges are SI (temperature: deg C)."""

    name: str
    label: str
    group: str
    kind: str
    meaning: str
    synonyms: tuple[str, ...]
    example: str
    dimension: str = ""
    unit: str = ""
    us: str = ""
    metric: str = ""
    possible: tuple[float, float] | None = None
    plausible: tuple[float, float] | None = None
    choices: Mapping[str, tuple[str, ...]] = field(default_factory=dict)

    @property
    def machine_name(self) -> str:
        """Name in machine-readable outputs: the unit stands in it."""
        return f"{self.name}_{self.unit}" if self.unit else self.name

    def shown_unit(self, system: str) -> str:
        """Unit shown to people for `system` ("us" or "metric"); "" when it has none."""
        return self.us if system == "us" else self.metric


@dataclass(frozen=True)
class ResultColumn:
    """One result. `unit` is the suffix of the machine name; people see `us` or `metric`."""

    name: str
    label: str
    group: str
    meaning: str
    dimension: str = ""
    unit: str = ""
    us: str = ""
    metric: str = ""
    digits: int = 2
    made_by: str = ""
    section: str = ""

    @property
    def machine_name(self) -> str:
        return f"{self.name}_{self.unit}" if self.unit else self.name

    def shown_unit(self, system: str) -> str:
        return self.us if system == "us" else self.metric


def _load(name: str) -> dict:
    return tomllib.loads(files("screener").joinpath("data", name).read_text(encoding="utf-8"))


@cache
def inventory_attributes() -> Mapping[str, Attribute]:
    """Attributes by name, in the order of the dictionary."""
    made = {}
    for name, entry in _load("inventory_attributes.toml").items():
        parts = dict(entry)
        parts["synonyms"] = tuple(parts["synonyms"])
        for limits in ("possible", "plausible"):
            if limits in parts:
                parts[limits] = tuple(float(v) for v in parts[limits])
        parts["choices"] = {k: tuple(v) for k, v in parts.get("choices", {}).items()}
        made[name] = Attribute(name=name, **parts)
    return MappingProxyType(made)


@cache
def result_columns() -> Mapping[str, ResultColumn]:
    """Result columns by name, in the order of the ranking."""
    return MappingProxyType(
        {name: ResultColumn(name=name, **entry) for name, entry in _load("result_columns.toml").items()}
    )
