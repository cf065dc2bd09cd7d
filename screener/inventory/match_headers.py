"""Which column is which attribute, and why."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, field, replace

import numpy as np

from screener.columns import Attribute, inventory_attributes
from screener.inventory.header_rows import column_letters
from screener.inventory.match_values import agreement, by_values, names_apart, share_of_pipe_diameters
from screener.inventory.match_wording import GEOMETRY, Meaning, meanings, unit_in_heading
from screener.records import InputError, Ledger, RawTable, Severity
from screener.units import UNITS

SURE = 0.65  # a heading below it is trusted only with its values
LEAST_AGREEMENT, LEAST_WHEN_UNSURE = 0.3, 0.6
TIE = 0.85


@dataclass(frozen=True)
class Matched:
    """One column understood: attribute, unit in the heading ("" when none), reason in words, strength 0..1."""

    heading: str
    attribute: str
    unit: str
    reason: str
    strength: float


@dataclass(frozen=True, eq=False)
class HeaderMatch:
    """columns: attribute -> column index; matched: column index -> Matched; unused: columns that match nothing."""

    headings: tuple[str, ...]
    columns: dict[str, int]
    matched: dict[int, Matched]
    unused: tuple[int, ...] = field(default=())

    def lines(self) -> list[str]:
        """One line per column for people."""
        labels = inventory_attributes()
        return [
            f"{heading!r} is {labels[self.matched[k].attribute].label} ({self.matched[k].reason})" if k in self.matched else f"{heading!r} is not used"
            for k, heading in enumerate(self.headings)
        ]


def heading_keys(headings: tuple[str, ...]) -> list[str]:
    """A name of its own for each column: its heading, with the column's letters where another column has the same."""
    counts = Counter(headings)
    return [heading if counts[heading] == 1 else f"{heading} (column {column_letters(k)})" for k, heading in enumerate(headings)]


def match_headers(table: RawTable, mapping: dict | None, ledger: Ledger) -> HeaderMatch:
    """Match each heading to an attribute: by the mapping file where given, else by wording and values."""
    columns: dict[str, int] = {}
    matched: dict[int, Matched] = {}
    settled = _by_mapping(table, mapping, columns, matched, ledger) if mapping is not None else set()
    rivals = _by_wording(table, settled, columns, matched)
    _settle_diameters(table, settled, columns, matched, ledger)
    _by_their_values(table, settled, columns, matched, ledger)
    _note_rivals(table, rivals, columns, matched, ledger)
    unused = tuple(k for k in range(len(table.headings)) if k not in matched)
    _note_rest(table, unused, columns, ledger)
    return HeaderMatch(table.headings, columns, matched, unused)


def _by_mapping(table: RawTable, mapping: dict, columns: dict, matched: dict, ledger: Ledger) -> set[int]:
    """Columns that the mapping file settles, those it leaves out included."""
    settled: set[int] = set()
    keys = heading_keys(table.headings)
    for k, heading in enumerate(table.headings):
        key = keys[k] if keys[k] in mapping else heading
        entry = mapping.get(key)
        if entry is None:
            continue
        settled.add(k)
        name = entry["attribute"]
        if not name:
            continue
        if name in columns:
            raise InputError(f'mapping: {keys[k]!r} and {keys[columns[name]]!r} are both {name}; leave one of them ""')
        columns[name] = k
        matched[k] = Matched(heading, name, entry["unit"], "mapping file", 2.0)
    known = {*table.headings, *keys}
    strange = [heading for heading in mapping if heading not in known]
    if strange:
        names = ", ".join(map(repr, strange[:5])) + (" …" if len(strange) > 5 else "")
        ledger.finding("mapping_unused", Severity.NOTES, None, problem=f"the mapping names columns the file does not have: {names}", action="passed over")
    return settled


def _by_wording(table: RawTable, settled: set[int], columns: dict, matched: dict) -> dict[int, tuple[str, float]]:
    """Give each attribute its best column; returns columns that lost theirs: index -> (attribute, share of the winner's score)."""
    options = []
    for k, heading in enumerate(table.headings):
        if k not in settled:
            options += [(score, -k, k, meaning) for said in meanings(heading) if (score := _score(table, k, meaning := _trusted(table, k, said))) is not None]
    scores: dict[str, float] = {}
    rivals: dict[int, tuple[str, float]] = {}
    lost: dict[int, float] = {}
    for score, _, k, meaning in sorted(options, key=lambda o: (o[0], o[1]), reverse=True):
        if k in matched or (lost.get(k, 0.0) >= SURE > meaning.strength):
            continue
        if meaning.attribute in columns:
            lost.setdefault(k, meaning.strength)
            rivals.setdefault(k, (meaning.attribute, score / scores.get(meaning.attribute, 2.0)))
            continue
        columns[meaning.attribute], scores[meaning.attribute] = k, score
        matched[k] = _matched(table, k, meaning)
        rivals.pop(k, None)
    return rivals


def _trusted(table: RawTable, k: int, meaning: Meaning) -> Meaning:
    """The meaning without a unit that is only implied ("DN" is mm) where the values speak against it."""
    if not meaning.implied or agreement(table.cells.iloc[:, k], inventory_attributes()[meaning.attribute], meaning.unit, ranged=True) >= LEAST_WHEN_UNSURE:
        return meaning
    return replace(meaning, unit="", implied=False, reason=meaning.reason.split(", unit ")[0])


def _matched(table: RawTable, k: int, meaning: Meaning) -> Matched:
    return Matched(table.headings[k], meaning.attribute, meaning.unit, meaning.reason, min(meaning.strength, 1.0))


def _score(table: RawTable, k: int, meaning: Meaning) -> float | None:
    """How well a column is what its heading says; None where its values speak against it."""
    attribute, cells = inventory_attributes()[meaning.attribute], table.cells.iloc[:, k]
    unsure = meaning.strength < SURE
    share = agreement(cells, attribute, meaning.unit, ranged=unsure)
    if share < (LEAST_WHEN_UNSURE if unsure else LEAST_AGREEMENT):
        return None
    if unsure and (sign := by_values(cells)) and sign != attribute.name:
        return None
    if unsure and attribute.name in ("joint_id", "ring_bore"):
        apart = names_apart(cells)
        if apart != (attribute.name == "joint_id") and "'id'" in meaning.reason:
            return None
        if attribute.name == "joint_id" and not apart:
            return None
    if unsure and attribute.name == "main_id" and any(isinstance(v, float) and not float(v).is_integer() for v in cells.dropna().head(200)):
        return None  # a pipe's inside diameter
    return meaning.strength * (0.5 + 0.5 * share) + 0.02 * float(cells.notna().mean())


def _settle_diameters(table: RawTable, settled: set[int], columns: dict, matched: dict, ledger: Ledger) -> None:
    """A heading "OD" alone is the pipe's or the ring's: look how far above the nominal size it lies."""
    for name in ("pipe_outside_diameter", "ring_outside_diameter"):
        k = columns.get(name)
        if k is None or k in settled or "'od'" not in matched[k].reason or matched[k].strength >= SURE:
            continue
        other = "ring_outside_diameter" if name.startswith("pipe") else "pipe_outside_diameter"
        size = columns.get("nominal_size")
        share = float("nan") if size is None else share_of_pipe_diameters(table.cells.iloc[:, k], matched[k].unit, table.cells.iloc[:, size], matched[size].unit)
        if np.isnan(share):
            continue
        is_pipe, clear = share >= 0.5, share <= 0.2 or share >= 0.8
        if is_pipe == (name == "pipe_outside_diameter") and clear:
            matched[k] = replace(matched[k], reason=f"{matched[k].reason}, and its values lie where a {'pipe' if is_pipe else 'ring'}'s do")
            continue
        del columns[name]
        if clear and other not in columns:
            columns[other] = k
            matched[k] = replace(matched[k], attribute=other, reason=f"the word 'od', and its values lie where a {'pipe' if is_pipe else 'ring'}'s do")
        else:
            del matched[k]
            ledger.finding("od_unclear", Severity.DOUBTS, None, attribute=name, column=table.headings[k], problem=f"{table.headings[k]!r} could be the pipe's or the ring's outside diameter", action="column kept and not used; settle it in the mapping file")


def _by_their_values(table: RawTable, settled: set[int], columns: dict, matched: dict, ledger: Ledger) -> None:
    """Columns whose values name what they are, such as "DR 11", under headings that say nothing."""
    for k, heading in enumerate(table.headings):
        if k in matched or k in settled or heading.strip().lower() in GEOMETRY or meanings(heading):
            continue
        name = by_values(table.cells.iloc[:, k])
        if name and name not in columns:
            columns[name] = k
            matched[k] = Matched(heading, name, unit_in_heading(heading, inventory_attributes()[name]), "its values say so", 0.5)
            ledger.finding("column_by_values", Severity.NOTES, None, attribute=name, column=heading, problem=f"the heading {heading!r} says nothing known, its values do", action=f"taken for {inventory_attributes()[name].label}; settle it in the mapping file if that is wrong")


def _note_rivals(table: RawTable, rivals: dict, columns: dict, matched: dict, ledger: Ledger) -> None:
    """Columns left out because another one is taken for the same attribute; a near tie is a doubt."""
    for k, (name, share) in sorted(rivals.items()):
        if k in matched or name not in columns:
            continue
        taken = table.headings[columns[name]]
        severity = Severity.DOUBTS if share >= TIE else Severity.NOTES
        ledger.finding("two_columns", severity, None, attribute=name, column=table.headings[k], problem=f"{table.headings[k]!r} could be {inventory_attributes()[name].label} too; {taken!r} is taken for it", action="column kept and not used; settle it in the mapping file")


def _note_rest(table: RawTable, unused: tuple[int, ...], columns: dict, ledger: Ledger) -> None:
    if unused:
        names = ", ".join(repr(table.headings[k]) for k in unused[:12]) + (" …" if len(unused) > 12 else "")
        ledger.finding("columns_unused", Severity.NOTES, None, problem=f"{len(unused)} columns match no attribute: {names}", action="kept in the map layer, not used")
    if not columns:
        raise InputError(f"{table.source}: no column is understood; headings are {', '.join(map(repr, table.headings[:8]))}. Write a mapping file (see 'joint-screener check')")
    if not ({"nominal_size", "pipe_outside_diameter"} & set(columns)):
        ledger.finding("no_size_column", Severity.BLOCKS, None, problem="no column gives the pipe's size", action="no joint can be ranked; name the column in a mapping file")


def accepted_units(attribute: Attribute) -> list[str]:
    """Units of an attribute's dimension, for messages."""
    return list(UNITS.get(attribute.dimension, {}))
