"""The mapping file: which column is which attribute, written by `check`, edited by hand, given back."""

from __future__ import annotations

import difflib
import re
import tomllib
from pathlib import Path

from screener.columns import inventory_attributes
from screener.files import write_text
from screener.inventory.match_headers import HeaderMatch, accepted_units, heading_keys
from screener.records import InputError
from screener.units import find_unit

LARGEST = 5_000_000
KEYS = ("attribute", "unit", "ignore")
INTRODUCTION = """\
# Which column of the inventory is which attribute.
# Edit and give back with --mapping. attribute = "" leaves a column out, and so does ignore = true.
# unit is for bare numbers without a unit of their own; "" lets the tool decide from the values.
# A column that this file doesn't name is matched by its heading. The attributes are listed at the end.

"""


def quoted(text: str) -> str:
    """Text as a TOML basic string."""
    marks = {'"': '\\"', "\\": "\\\\", "\n": "\\n", "\t": "\\t", "\r": "\\r"}
    return '"' + "".join(marks.get(c) or (c if c.isprintable() and not _alone(c) else f"\\u{ord(c):04x}" if ord(c) < 0xD800 else "?" if _alone(c) else f"\\U{ord(c):08x}") for c in text) + '"'


def _alone(c: str) -> bool:
    return 0xD800 <= ord(c) <= 0xDFFF  # half of a pair; no text file can hold it


def write_mapping(path: str | Path, match: HeaderMatch) -> None:
    """Write the match as TOML, one table per column, with the reasons as comments."""
    lines = [INTRODUCTION]
    for k, key in enumerate(heading_keys(match.headings)):
        found = match.matched.get(k)
        reason = "".join(c if c.isprintable() else " " for c in found.reason) if found else "no attribute found"
        lines += [
            f"[{quoted(key)}]\n",
            f"attribute = {quoted(found.attribute if found else '')}  # {reason}\n".encode("utf-8", "replace").decode(),
            f"unit = {quoted(found.unit if found else '')}\n\n",
        ]
    lines.append("# Attributes and their units:\n")
    for name, attribute in inventory_attributes().items():
        units = f" ({', '.join(accepted_units(attribute))})" if attribute.dimension not in ("", "money") else ""
        lines.append(f"#   {name}: {attribute.label}{units}\n")
    write_text(path, "".join(lines))


def read_mapping(path: str | Path) -> dict[str, dict[str, str]]:
    """heading -> {attribute, unit}; InputError says what is wrong, where, and what is accepted."""
    text = _text_of(Path(path))
    try:
        content = tomllib.loads(text)
    except (tomllib.TOMLDecodeError, RecursionError, ValueError) as problem:
        raise InputError(f"{path}: not a TOML file: {' '.join(str(problem).split())[:200]}") from None
    mapping = {heading: _entry(f"{path}, {_place(text, heading)}", entry) for heading, entry in content.items()}
    users: dict[str, str] = {}
    for heading, entry in mapping.items():
        name = entry["attribute"]
        if name and name in users:
            raise InputError(f'{path}, {_place(text, heading)}: {users[name]!r} is {name} too; leave one of them ""')
        users[name] = heading
    return mapping


def _text_of(path: Path) -> str:
    try:
        if path.stat().st_size > LARGEST:
            raise InputError(f"{path}: the mapping file is larger than {LARGEST // 1_000_000} MB; 'joint-screener check' writes one of the right form")
        return path.read_text(encoding="utf-8-sig")
    except FileNotFoundError:
        raise InputError(f"{path}: there is no such mapping file; 'joint-screener check FILE --out FOLDER' writes one") from None
    except (OSError, UnicodeDecodeError) as problem:
        raise InputError(f"{path}: the mapping file can't be read ({problem}); it is a text file in UTF-8") from None


def _place(text: str, heading: str) -> str:
    """Line and name of a heading's table, for messages."""
    names = {heading, quoted(heading), f"'{heading}'"}
    for number, line in enumerate(text.splitlines(), start=1):
        word = re.sub(r"\s*#[^\"']*$", "", line).strip()
        if (word.startswith("[") and word[1:-1].strip() in names) or word.split("=")[0].strip() in names:
            return f"line {number}, [{heading[:60]}]"
    return f"[{heading[:60]}]"


def _entry(place: str, entry: object) -> dict[str, str]:
    """One column's table, checked."""
    if not isinstance(entry, dict):
        raise InputError(f'{place}: a column is written as a table with attribute = "…" and unit = "…"')
    strange = sorted(set(entry) - set(KEYS))
    if strange:
        close = difflib.get_close_matches(strange[0], KEYS, n=1)
        raise InputError(f"{place}: {strange[0]!r} is not known here{_hint(close)}; accepted are attribute, unit and ignore")
    name, unit, ignore = entry.get("attribute", ""), entry.get("unit", ""), entry.get("ignore", False)
    if not isinstance(name, str) or not isinstance(unit, str):
        raise InputError(f"{place}: attribute and unit are text in quotes")
    if not isinstance(ignore, bool):
        raise InputError(f"{place}: ignore is true or false, without quotes")
    if ignore or not name:
        return {"attribute": "", "unit": ""}
    attributes = inventory_attributes()
    if name not in attributes:
        labels = {attribute.label.lower(): other for other, attribute in attributes.items()}
        close = [labels[name.lower()]] if name.lower() in labels else difflib.get_close_matches(name, attributes, n=2)
        raise InputError(f"{place}: there is no attribute {name!r}{_hint(close) or '; the file that check writes lists all of them'}")
    return {"attribute": name, "unit": _unit(place, unit, name)}


def _unit(place: str, unit: str, name: str) -> str:
    if not unit:
        return ""
    attribute = inventory_attributes()[name]
    if not attribute.dimension:
        raise InputError(f'{place}: {name} has no unit; write unit = ""')
    found = find_unit(unit, attribute.dimension)
    if found is None:
        raise InputError(f"{place}: {unit!r} is no unit of {name}; accepted: {', '.join(accepted_units(attribute))}")
    return found


def _hint(close: list[str]) -> str:
    return f"; did you mean {' or '.join(close)}?" if close else ""
