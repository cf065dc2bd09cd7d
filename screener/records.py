"""What travels between the rooms.

Every record is frozen and holds arrays whose axis 0 is the joint (or the row
of the file); lengths are checked when a record is made. SI inside. NaN means
unknown, never zero and never "does not apply".
"""

from __future__ import annotations

from dataclasses import dataclass, field, fields
from enum import IntEnum, StrEnum
from typing import Any

import numpy as np


class InputError(Exception):
    """A file or setting that can't be used; the message is one sentence for the user."""


class ModelError(Exception):
    """A request the model can't answer, such as a joint that is not in the run."""


class Severity(StrEnum):
    """How much a finding matters to the person reading it."""

    BLOCKS = "blocks"  # the row can't be ranked because of it
    DOUBTS = "doubts"  # the row is ranked, and its result is less certain
    NOTES = "notes"  # worth knowing; no effect on the result


class Origin(IntEnum):
    """Where a value comes from."""

    MISSING = 0
    READ = 1  # as written in the file
    CONVERTED = 2  # written in the file in another unit or wording
    LOOKED_UP = 3  # from a published table, by attributes read in the file
    DERIVED = 4  # calculated from other values of the same row
    ASSUMED = 5  # by a stated rule


@dataclass(frozen=True, eq=False)
class FindingBatch:
    """One kind of finding on many rows.

    positions: int array, index into the table's rows; -1 for the file itself.
    values: the cell as written, per position, or None when no cell is meant.
    """

    code: str
    severity: Severity
    positions: np.ndarray
    attribute: str
    column: str
    values: np.ndarray | None
    problem: str
    action: str

    def __post_init__(self) -> None:
        if self.values is not None and len(self.values) != len(self.positions):
            raise ValueError(f"{self.code}: {len(self.values)} values for {len(self.positions)} rows")


@dataclass(frozen=True, eq=False)
class AssumptionBatch:
    """One rule applied to many rows: a look-up, a derivation or an assumption.

    values: SI numbers or text, per position. scatter: relative standard
    deviation of a number (0.1 = 10 %), or the chance that a text value is
    another one; scalar or per position. low, high: SI, NaN when the rule
    gives none.
    """

    attribute: str
    origin: Origin
    positions: np.ndarray
    values: np.ndarray
    rule: str
    source: str
    scatter: np.ndarray
    low: np.ndarray
    high: np.ndarray


class Ledger:
    """Collects findings and assumptions, in the order in which they arise."""

    def __init__(self) -> None:
        self.findings: list[FindingBatch] = []
        self.assumptions: list[AssumptionBatch] = []

    def finding(
        self,
        code: str,
        severity: Severity,
        positions: Any,
        *,
        problem: str,
        action: str,
        attribute: str = "",
        column: str = "",
        values: Any = None,
    ) -> None:
        """Note one kind of finding. positions: bool mask, int array, or None for the file itself."""
        where = _positions(positions)
        if len(where) == 0:
            return
        seen = None
        if values is not None:
            seen = np.asarray(values, dtype=object)
            if seen.ndim == 0:
                seen = np.full(len(where), seen.item(), dtype=object)
        self.findings.append(
            FindingBatch(code, Severity(severity), where, attribute, column, seen, problem, action)
        )

    def assumption(
        self,
        attribute: str,
        positions: Any,
        values: Any,
        *,
        rule: str,
        source: str,
        origin: Origin = Origin.ASSUMED,
        scatter: Any = 0.0,
        low: Any = np.nan,
        high: Any = np.nan,
    ) -> None:
        """Note one rule applied at `positions` (bool mask or int array)."""
        where = _positions(positions)
        count = len(where)
        if count == 0:
            return
        taken = np.broadcast_to(np.asarray(values), (count,))
        self.assumptions.append(
            AssumptionBatch(
                attribute,
                origin,
                where,
                taken,
                rule,
                source,
                *(np.broadcast_to(np.asarray(a, dtype=float), (count,)) for a in (scatter, low, high)),
            )
        )


def _positions(positions: Any) -> np.ndarray:
    if positions is None:
        return np.array([-1])
    where = np.atleast_1d(np.asarray(positions))
    if where.dtype == bool:
        where = np.flatnonzero(where)
    return where.astype(np.int64)


@dataclass(frozen=True, eq=False)
class RawTable:
    """A table as it stands in the file, nothing interpreted.

    cells: pandas DataFrame, column k is headings[k]; text stays text, numbers
    and dates that the file stores as such stay so; None/NaN is an empty cell.
    row_numbers: the row as a person finds it in the file (1-based).
    x, y, crs: representative points where the file has geometry, else None.
    """

    source: str
    sheet: str
    headings: tuple[str, ...]
    cells: Any
    row_numbers: np.ndarray
    x: np.ndarray | None = None
    y: np.ndarray | None = None
    crs: str | None = None

    def __post_init__(self) -> None:
        if self.cells.shape != (len(self.row_numbers), len(self.headings)):
            raise ValueError(f"{self.cells.shape} cells, {len(self.row_numbers)} rows, {len(self.headings)} headings")

    def __len__(self) -> int:
        return len(self.row_numbers)


class _Columns:
    """Base of the joint records: equal-length arrays, read-only from then on."""

    def __post_init__(self) -> None:
        length = None
        for item in fields(self):  # type: ignore[arg-type]
            value = getattr(self, item.name)
            if isinstance(value, _Columns):
                size = len(value)
            elif isinstance(value, np.ndarray):
                value = value.view()
                value.flags.writeable = False
                object.__setattr__(self, item.name, value)
                size = len(value)
            else:
                continue
            if length is None:
                length = size
            elif size != length:
                raise ValueError(f"{type(self).__name__}.{item.name}: {size} rows, expected {length}")

    def __len__(self) -> int:
        first = getattr(self, fields(self)[0].name)  # type: ignore[arg-type]
        return len(first)

    def take(self, rows: np.ndarray):
        """The same record for some of the joints (int array or bool mask)."""
        parts = {}
        for item in fields(self):  # type: ignore[arg-type]
            value = getattr(self, item.name)
            if isinstance(value, _Columns):
                parts[item.name] = value.take(rows)
            elif isinstance(value, np.ndarray):
                parts[item.name] = value[rows]
            elif isinstance(value, dict):
                parts[item.name] = {key: some[rows] for key, some in value.items()}
            else:
                parts[item.name] = value
        return type(self)(**parts)


@dataclass(frozen=True, eq=False)
class Pipe(_Columns):
    """PE pipe. Lengths m, stress Pa, temperature deg C, year as a decimal number."""

    outside_diameter: np.ndarray
    dimension_ratio: np.ndarray
    material: np.ndarray  # "PE4710", ...
    family: np.ndarray  # row of the apparent-modulus table: "PE4XXX", ...
    hydrostatic_design_stress: np.ndarray
    temperature: np.ndarray
    temperature_factor: np.ndarray

    @property
    def bore_diameter(self) -> np.ndarray:
        return self.outside_diameter * (1.0 - 2.0 / self.dimension_ratio)


@dataclass(frozen=True, eq=False)
class Hub(_Columns):
    """Collar of the stub end. Lengths m."""

    outside_diameter: np.ndarray
    thickness: np.ndarray


@dataclass(frozen=True, eq=False)
class Ring(_Columns):
    """Backing ring. Lengths m, stresses Pa; thickness is what is left at the assessment date."""

    outside_diameter: np.ndarray
    bore_diameter: np.ndarray
    thickness: np.ndarray
    thickness_as_built: np.ndarray
    bolt_circle_diameter: np.ndarray
    hole_diameter: np.ndarray
    yield_strength: np.ndarray
    modulus: np.ndarray
    form: np.ndarray  # "flat plate", "contoured", "unknown"
    section: np.ndarray  # name of its section polygon, None where it has none
    standard: np.ndarray
    ring_class: np.ndarray
    stated_rating: np.ndarray  # Pa, on the paper of the ring or of its class
    stated_safety_factor: np.ndarray
    rating_is_for_loose_ring: np.ndarray  # bool
    coating: np.ndarray
    environment: np.ndarray  # what surrounds ring and bolts


@dataclass(frozen=True, eq=False)
class Bolts(_Columns):
    """Bolts of the joint. m, m2, Pa, N m; grip length is from nut to nut."""

    count: np.ndarray
    diameter: np.ndarray
    tensile_area: np.ndarray
    allowed_stress: np.ndarray  # proof stress, or 0.7 of yield where no proof is published
    yield_strength: np.ndarray
    modulus: np.ndarray
    grip_length: np.ndarray
    assembly_torque: np.ndarray
    torque_is_known: np.ndarray  # bool
    nut_factor: np.ndarray
    preload_scatter: np.ndarray  # coefficient of variation of the total clamp force


@dataclass(frozen=True, eq=False)
class Face(_Columns):
    """Sealing face. m2, m; required_stress_factor is the m of m P."""

    contact_area: np.ndarray
    pressure_diameter: np.ndarray
    required_stress_factor: np.ndarray
    mating_side_is_pe: np.ndarray  # bool
    gasket_compliance: np.ndarray  # m/N, 0 without a gasket


@dataclass(frozen=True, eq=False)
class Loads(_Columns):
    """What the joint carries. Pa; K for the cooling below installation temperature."""

    operating_pressure: np.ndarray
    recurrent_surge: np.ndarray  # rise above operating
    occasional_surge: np.ndarray  # rise above operating
    test_pressure: np.ndarray
    cooling: np.ndarray
    restrained: np.ndarray  # bool: axially fixed, as in long buried runs
    cycles_per_day: np.ndarray
    cycle_range: np.ndarray


@dataclass(frozen=True, eq=False)
class Age(_Columns):
    """Decimal years; assessment_year is the same for all but kept per joint."""

    installed_year: np.ndarray
    last_tightened_year: np.ndarray
    assessment_year: np.ndarray


@dataclass(frozen=True, eq=False)
class Fleet(_Columns):
    """The joints that can be assessed. position: row of the raw table."""

    joint_id: np.ndarray
    position: np.ndarray
    pipe: Pipe
    hub: Hub
    ring: Ring
    bolts: Bolts
    face: Face
    loads: Loads
    age: Age
    scatter: dict[str, np.ndarray] = field(default_factory=dict)
    """Relative standard deviation added by assumptions, by attribute, aligned with the joints."""


@dataclass(frozen=True, eq=False)
class LimitStates(_Columns):
    """Utilization (demand / capacity) per joint and limit state; never clipped.

    utilization: (n, k), columns in the order of `names`.
    governing: (n,) index of the largest.
    details: intermediate results by machine name, each (n,), SI.
    """

    utilization: np.ndarray
    governing: np.ndarray
    names: tuple[str, ...]
    details: dict[str, np.ndarray]
