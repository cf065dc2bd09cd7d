"""Which column is which attribute, and why."""

from __future__ import annotations

import difflib
import re
from dataclasses import dataclass, field
from functools import cache

import pandas as pd

from screener.columns import Attribute, inventory_attributes
from screener.inventory.header_rows import normal, sorted_words
from screener.records import InputError, Ledger, RawTable, Severity
from screener.units import UNITS, find_unit

CLOSE_ENOUGH = 0.86
# Words that alone say too little: used only when the values agree.
WEAK = frozenset({"od", "id", "class", "material", "notes", "rating", "year", "size", "pressure", "bolts", "bolt", "thickness", "line", "area", "x", "y", "z", "level", "profile", "surge", "cycles", "position", "finish", "route", "main"})


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
        made = []
        for k, heading in enumerate(self.headings):
            if k in self.matched:
                found = self.matched[k]
                made.append(f"{heading!r} is {labels[found.attribute].label} ({found.reason})")
            else:
                made.append(f"{heading!r} is not used")
        return made


def unit_in_heading(heading: str, attribute: Attribute) -> str:
    """The unit a heading names, in brackets or as its last words; "" when none."""
    if not attribute.dimension:
        return ""
    for piece in re.findall(r"[(\[{]([^)\]}]*)[)\]}]", heading):
        for word in (piece, *piece.replace(";", ",").split(",")):
            unit = find_unit(word.strip(), attribute.dimension)
            if unit:
                return unit
    words = re.sub(r"[(\[{].*?[)\]}]", " ", heading).replace("_", " ").replace("/", " ").split()
    for count in (2, 1):
        if len(words) > count:
            tail = " ".join(words[-count:])
            unit = find_unit(tail, attribute.dimension)
            if unit and not (count == 1 and len(tail) == 1 and attribute.dimension in ("pressure", "stress")):
                return unit
    return ""


def _without_unit(heading: str, attribute: Attribute) -> str:
    """The normalized heading without a unit at its end."""
    words = normal(heading.replace("_", " ")).split()
    for count in (2, 1):
        if len(words) > count and find_unit(" ".join(words[-count:]), attribute.dimension):
            return " ".join(words[:-count])
    return " ".join(words)


@cache
def _vocabulary() -> dict[str, tuple[str, str]]:
    """Normalized wording -> (attribute, what it is)."""
    words: dict[str, tuple[str, str]] = {}
    for name, attribute in inventory_attributes().items():
        for text in attribute.synonyms:
            words.setdefault(normal(text), (name, f"synonym {text!r}"))
    for name, attribute in inventory_attributes().items():
        words[normal(attribute.label)] = (name, "its label")
        words[normal(attribute.machine_name.replace("_", " "))] = (name, "its machine name")
        words[normal(name.replace("_", " "))] = (name, "its name")
    for wording, meaning in list(words.items()):
        words.setdefault(sorted_words(wording), meaning)
    return words


def _candidates(heading: str) -> list[Matched]:
    """Possible meanings of a heading, strongest first."""
    vocabulary = _vocabulary()
    attributes = inventory_attributes()
    plain = normal(heading.replace("_", " "))
    found = []
    tried = {plain}
    for attribute in attributes.values():
        tried.add(_without_unit(heading, attribute))
    for wording in tried:
        for variant in dict.fromkeys((wording, sorted_words(wording), wording.rstrip("s"), re.sub(r"\b(no|number|nr)\b", "", wording).strip())):
            if variant in vocabulary:
                name, what = vocabulary[variant]
                attribute = attributes[name]
                unit = unit_in_heading(heading, attribute)
                if wording != plain and not unit:
                    continue
                strength = 1.0 if variant == wording else 0.95
                if variant in WEAK:
                    strength = 0.6
                if unit:
                    strength += 0.05
                reason = what + (f", unit {unit} in the heading" if unit else "")
                found.append(Matched(heading, name, unit, reason, strength))
    if not found:
        # A merged heading above may have been joined on: the words below it speak for themselves.
        words = heading.split()
        for start in range(1, len(words)):
            tail = " ".join(words[start:])
            if normal(tail.replace("_", " ")) in vocabulary or _without_unit(tail, attributes["operating_pressure"]) in vocabulary:
                below = _candidates(tail)
                return [Matched(heading, m.attribute, m.unit, f"{m.reason}, under {' '.join(words[:start])!r}", 0.9 * m.strength) for m in below]
    if not found and len(plain) > 4:
        close = difflib.get_close_matches(plain, vocabulary, n=1, cutoff=CLOSE_ENOUGH)
        if close:
            name, what = vocabulary[close[0]]
            unit = unit_in_heading(heading, attributes[name])
            likeness = difflib.SequenceMatcher(None, plain, close[0]).ratio()
            found.append(Matched(heading, name, unit, f"close to {what} {close[0]!r}", 0.7 * likeness))
    return sorted(found, key=lambda m: -m.strength)


def _values_agree(values: pd.Series, attribute: Attribute) -> float:
    """Share of a sample of the column's values that could belong to the attribute."""
    from screener.inventory.parse_values import could_be

    known = values[values.notna()]
    if not len(known):
        return 0.5
    sample = known.iloc[:: max(1, len(known) // 60)].head(60)
    return sum(could_be(value, attribute) for value in sample) / len(sample)


def match_headers(table: RawTable, mapping: dict | None, ledger: Ledger) -> HeaderMatch:
    """Match each heading to an attribute: by the mapping file where given, else by wording and values."""
    attributes = inventory_attributes()
    columns: dict[str, int] = {}
    matched: dict[int, Matched] = {}
    settled: set[int] = set()
    if mapping is not None:
        for k, heading in enumerate(table.headings):
            entry = mapping.get(heading)
            if entry is None:
                continue
            settled.add(k)
            if entry["attribute"]:
                if entry["attribute"] in columns:
                    other = table.headings[columns[entry["attribute"]]]
                    raise InputError(f"mapping: {heading!r} and {other!r} are both {entry['attribute']}; leave one of them \"\"")
                columns[entry["attribute"]] = k
                matched[k] = Matched(heading, entry["attribute"], entry["unit"], "mapping file", 2.0)
        strange = [heading for heading in mapping if heading not in table.headings]
        if strange:
            ledger.finding("mapping_unused", Severity.NOTES, None, problem=f"the mapping names columns the file does not have: {', '.join(map(repr, strange[:5]))}", action="passed over")
    options = []
    for k, heading in enumerate(table.headings):
        if k in settled:
            continue
        for candidate in _candidates(heading):
            agreement = _values_agree(table.cells.iloc[:, k], attributes[candidate.attribute])
            if agreement < 0.3 or (candidate.strength < 0.65 and agreement < 0.6):
                continue
            options.append((candidate.strength * (0.5 + 0.5 * agreement), -k, k, candidate))
    rivals: dict[int, str] = {}
    for _score, _order, k, candidate in sorted(options, key=lambda o: (o[0], o[1]), reverse=True):
        if k in matched:
            continue
        if candidate.attribute in columns:
            rivals.setdefault(k, candidate.attribute)
            continue
        columns[candidate.attribute] = k
        matched[k] = candidate
        rivals.pop(k, None)
    for k, attribute in sorted(rivals.items()):
        if k not in matched:
            taken = table.headings[columns[attribute]]
            ledger.finding("two_columns", Severity.DOUBTS, None, attribute=attribute, column=table.headings[k], problem=f"{table.headings[k]!r} could be {attributes[attribute].label} too; {taken!r} is taken for it", action="column kept and not used; settle it in the mapping file")
    unused = tuple(k for k in range(len(table.headings)) if k not in matched)
    if unused:
        names = ", ".join(repr(table.headings[k]) for k in unused[:12]) + (" …" if len(unused) > 12 else "")
        ledger.finding("columns_unused", Severity.NOTES, None, problem=f"{len(unused)} columns match no attribute: {names}", action="kept in the map layer, not used")
    if not columns:
        raise InputError(f"{table.source}: no column is understood; headings are {', '.join(map(repr, table.headings[:8]))}. Write a mapping file (see 'joint-screener check')")
    if not ({"nominal_size", "pipe_outside_diameter"} & set(columns)):
        ledger.finding("no_size_column", Severity.BLOCKS, None, problem="no column gives the pipe's size", action="no joint can be ranked; name the column in a mapping file")
    return HeaderMatch(table.headings, columns, matched, unused)


def accepted_units(attribute: Attribute) -> list[str]:
    return list(UNITS.get(attribute.dimension, {}))
