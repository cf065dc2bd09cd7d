"""How a logger file is laid out: where its heading stands, what its columns mean, in which unit, and whose readings they are."""

from __future__ import annotations

import gzip
import re
from dataclasses import dataclass
from pathlib import Path

from screener.pressure.log_settings import LogSettings, unit_of

TIME_WORDS = {
    "time", "timestamp", "datetime", "dateandtime", "datetimestamp", "readingtime", "sampletime", "logtime", "utc", "utctime", "localtime", "timeutc",
    "timestamputc", "datetimeutc", "readingdate", "recordedat", "measuredat",
}  # fmt: skip
LOGGER_WORDS = {
    "logger", "loggerid", "loggername", "station", "stationid", "stationname", "site", "siteid", "sitename", "sensor", "sensorid", "point", "pointid", "tag",
    "tagname", "device", "deviceid", "channel", "location", "id", "name", "serial", "serialnumber", "loggerserial",
}  # fmt: skip
VALUE_WORDS = {"pressure", "value", "reading", "p", "press", "measurement", "result", "gaugepressure", "pressurevalue", "data", "pressurereading"}
UNIT_WORDS = {"unit", "units", "uom"}
IGNORED_WORDS = {
    "quality", "status", "flag", "battery", "batteryvoltage", "temperature", "temp", "watertemperature", "flow", "flowrate", "signal", "signalstrength", "comment",
    "comments", "note", "notes", "remark", "remarks", "row", "index", "no", "number", "recordno", "record", "rownumber", "",
}  # fmt: skip
HEADING_ROWS = 60
DELIMITERS = (",", ";", "\t", "|")


@dataclass(frozen=True)
class ValueColumn:
    """A column of readings. position: in the file; logger: "" when a logger column says it; unit: as written, "" when nothing says it."""

    position: int
    heading: str
    logger: str
    unit: str


@dataclass(frozen=True)
class Layout:
    """skip: lines before the first row of readings. time: one position, or two for date and time apart. logger, unit: position or None."""

    skip: int
    columns: int
    time: tuple[int, ...]
    values: tuple[ValueColumn, ...]
    logger: int | None = None
    unit: int | None = None
    ignored: tuple[str, ...] = ()
    delimiter: str = ","
    encoding: str = "utf-8"
    has_heading: bool = True


def plain(text: str) -> str:
    """A heading without unit, case, blanks and marks, as it is compared."""
    return re.sub(r"[^a-z0-9]", "", re.sub(r"[(\[].*?[)\]]", "", text.lower()))


def unit_in(heading: str) -> tuple[str, str]:
    """(heading without its unit, unit): 'P1 (bar)', 'pressure_kpa', 'Level, m head'; unit "" when none is named."""
    for inside in re.findall(r"[(\[]([^()\[\]]*(?:\([agAG]\))?)[)\]]", heading):
        if unit_of(inside):
            return heading.replace(f"({inside})", "").replace(f"[{inside}]", "").strip(" _-,:;"), inside.strip()
    parts = re.split(r"[\s_,:;]+", heading.strip())
    for count in (2, 1):
        if len(parts) > count and unit_of(" ".join(parts[-count:])) and parts[-1].lower() not in ("m", "pa", "a", "g"):
            return heading[: heading.lower().rfind(parts[-count].lower())].strip(" _-,:;"), " ".join(parts[-count:])
    return heading.strip(), ""


def find_roles(cells: list[str], fallback: str, said: dict[str, str], settings: LogSettings) -> Layout | None:
    """Roles of a heading row, or None when it is none. fallback: logger's name if neither file nor heading names one."""
    names = [plain(cell) for cell in cells]
    time = tuple(k for k, name in enumerate(names) if name in TIME_WORDS)[:1]
    dates = [k for k, name in enumerate(names) if name in ("date", "day")]
    if dates and (not time or names[time[0]] in ("time", "localtime")):
        time = (dates[0], *time)
    if not time:
        return None
    logger = next((k for k, name in enumerate(names) if name in LOGGER_WORDS and k not in time), None)
    unit = next((k for k, name in enumerate(names) if name in UNIT_WORDS and k not in time), None)
    values, ignored = [], []
    for k, cell in enumerate(cells):
        if k in (*time, logger, unit):
            continue
        bare, written = unit_in(cell)
        if plain(bare) in IGNORED_WORDS or plain(bare).startswith("unnamed"):
            ignored.append(cell)
            continue
        values.append(ValueColumn(k, cell, bare, written or said.get("unit", "") or settings.unit))
    if logger is not None:
        called = [column for column in values if plain(column.logger) in VALUE_WORDS] or values[:1]
        ignored += [column.heading for column in values if column not in called[:1]]
        values = [ValueColumn(column.position, column.heading, "", column.unit) for column in called[:1]]
    else:
        own = said.get("logger", "") or fallback
        values = [ValueColumn(c.position, c.heading, own if plain(c.logger) in VALUE_WORDS else c.logger, c.unit) for c in values]
    return Layout(0, len(cells), time, tuple(values), logger, unit, tuple(ignored))


def text_layout(path: Path, settings: LogSettings) -> Layout | None:
    """Layout of a delimited text file from its first lines; None when nothing in it looks like time and readings."""
    with gzip.open(path, "rb") if path.suffix.lower() == ".gz" else open(path, "rb") as stream:
        head = stream.read(65_536)
    encoding = _encoding(head)
    lines = head.decode(encoding, errors="replace").splitlines()[:HEADING_ROWS]
    if len(head) == 65_536 and lines:
        lines = lines[:-1]
    counts = {mark: sorted(line.count(mark) for line in lines if line.strip() and not line.startswith("#")) for mark in DELIMITERS}
    delimiter = max(DELIMITERS, key=lambda mark: (counts[mark][len(counts[mark]) // 2] if counts[mark] else 0, -DELIMITERS.index(mark)))
    if delimiter == "," and counts[";"] and counts[";"][len(counts[";"]) // 2] > 0:
        delimiter = ";"  # the comma is then a decimal mark
    stem = path.name.split(".")[0]
    rows = [[cell.strip().strip('"').strip() for cell in line.split(delimiter)] for line in lines]
    found = rows_layout(rows, [line.startswith("#") for line in lines], stem, settings)
    return None if found is None else Layout(**{**found.__dict__, "delimiter": delimiter, "encoding": encoding})


def rows_layout(rows: list[list[str]], comment: list[bool], stem: str, settings: LogSettings) -> Layout | None:
    """Layout from the first rows as texts: a heading row with a word for time, or readings from the first row on."""
    said: dict[str, str] = {}
    for k, cells in enumerate(rows):
        if comment[k] or not any(cells):
            continue
        if len(cells) > 1:
            found = find_roles(cells, stem, said, settings)
            if found is not None:
                return Layout(**{**found.__dict__, "skip": k + 1})
            if _looks_like_readings(cells):
                values = tuple(
                    ValueColumn(j, f"column {j + 1}", stem if len(cells) == 2 else f"{stem} {j}", said.get("unit", "") or settings.unit) for j in range(1, len(cells))
                )
                return Layout(k, len(cells), (0,), values, has_heading=False)
        _note(cells, said)
    return None


def _note(cells: list[str], said: dict[str, str]) -> None:
    """Lines above the heading such as 'Logger: L07' or 'Units, bar'."""
    parts = [part.strip() for part in re.split(r"[:=]", cells[0], maxsplit=1)] if len([c for c in cells if c]) == 1 else [c for c in cells if c][:2]
    if len(parts) == 2 and parts[1]:
        word = plain(parts[0])
        if word in LOGGER_WORDS:
            said.setdefault("logger", parts[1])
        elif word in UNIT_WORDS and unit_of(parts[1]):
            said.setdefault("unit", parts[1])


def _looks_like_readings(cells: list[str]) -> bool:
    starts_with_time = bool(re.match(r"^\d{1,4}[-/.]\d{1,2}[-/.]\d{1,4}([ T]\d|$)", cells[0]) or re.match(r"^\d{9,13}(\.\d+)?$", cells[0]))
    return starts_with_time and bool(re.match(r"^[-+]?\d*[.,]?\d+([eE][-+]?\d+)?$", cells[1]))


def _encoding(head: bytes) -> str:
    if head.startswith((b"\xff\xfe", b"\xfe\xff")):
        return "utf-16"
    try:
        head[: len(head) - 4].decode("utf-8")
    except UnicodeDecodeError as problem:
        return "cp1252" if problem.start < len(head) - 8 else "utf-8-sig"
    return "utf-8-sig"
