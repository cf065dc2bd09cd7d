"""The mapping file: which column is which attribute, written by `check`, edited by hand, given back."""

from __future__ import annotations

import difflib
import json
import tomllib
from pathlib import Path

from screener.columns import inventory_attributes
from screener.inventory.match_headers import HeaderMatch, accepted_units
from screener.files import write_text
from screener.records import InputError
from screener.units import find_unit

INTRODUCTION = """# Which column of the inventory is which attribute.
# Edit and give back with --mapping. attribute = "" leaves a column out.
# unit is for bare numbers without a unit of their own; "" lets the tool decide from the values.
"""


def write_mapping(path: Path, match: HeaderMatch) -> None:
    """Write the match as TOML, one table per column."""
    lines = [INTRODUCTION]
    for k, heading in enumerate(match.headings):
        found = match.matched.get(k)
        lines.append(f"[{json.dumps(heading, ensure_ascii=False)}]")
        if found:
            lines.append(f'attribute = "{found.attribute}"  # {found.reason}'.replace("\n", " "))
            lines.append(f"unit = {json.dumps(found.unit)}")
        else:
            lines.append('attribute = ""')
            lines.append('unit = ""')
        lines.append("")
    lines.append("# Attributes: " + ", ".join(inventory_attributes()))
    write_text(path, "\n".join(lines) + "\n")


def read_mapping(path: str | Path) -> dict[str, dict[str, str]]:
    """heading -> {attribute, unit}; InputError says what is wrong and what is accepted."""
    try:
        content = tomllib.loads(Path(path).read_text(encoding="utf-8"))
    except FileNotFoundError:
        raise InputError(f"{path}: there is no such mapping file") from None
    except (OSError, UnicodeDecodeError) as problem:
        raise InputError(f"{path}: the mapping file can't be read ({problem})") from None
    except tomllib.TOMLDecodeError as problem:
        raise InputError(f"{path}: not a TOML file: {problem}") from None
    attributes = inventory_attributes()
    mapping = {}
    for heading, entry in content.items():
        if not isinstance(entry, dict) or set(entry) - {"attribute", "unit"}:
            raise InputError(f"{path}: [{heading}] takes attribute = \"…\" and unit = \"…\" and nothing else")
        attribute, unit = entry.get("attribute", ""), entry.get("unit", "")
        if not isinstance(attribute, str) or not isinstance(unit, str):
            raise InputError(f"{path}: [{heading}]: attribute and unit are text in quotes")
        if attribute and attribute not in attributes:
            close = difflib.get_close_matches(attribute, attributes, n=2)
            hint = f"did you mean {' or '.join(close)}?" if close else "the file's last line lists all attributes"
            raise InputError(f"{path}: [{heading}]: there is no attribute {attribute!r}; {hint}")
        if attribute and unit:
            found = find_unit(unit, attributes[attribute].dimension)
            if found is None:
                raise InputError(f"{path}: [{heading}]: {unit!r} is no unit of {attribute}; accepted: {', '.join(accepted_units(attributes[attribute])) or 'none'}")
            unit = found
        mapping[heading] = {"attribute": attribute, "unit": unit}
    return mapping
