"""What makes a GeoPackage readable for people: aliases, units, meanings and a style.

Aliases and descriptions go into `gpkg_data_columns` (OGC GeoPackage schema
extension), the style into the `layer_styles` table, the open convention by
which QGIS keeps a layer's style in its file.
"""

from __future__ import annotations

import sqlite3
from contextlib import closing
from pathlib import Path
from xml.sax.saxutils import quoteattr

from screener.columns import inventory_attributes, result_columns
from screener.limit_names import LIMIT_STATES

# Bands of utilization: lower, upper, colour of a sequence that keeps its order in grey and for colour-blind eyes, size in mm.
BANDS = ((0.0, 0.5, "#e4e8ee", 1.6), (0.5, 0.8, "#b3c3d6", 1.9), (0.8, 1.0, "#7c9cbf", 2.3), (1.0, 2.0, "#3f5f8a", 3.0), (2.0, 1.0e9, "#14243c", 3.8))

_SCHEMA = """
CREATE TABLE IF NOT EXISTS gpkg_extensions (table_name TEXT, column_name TEXT, extension_name TEXT NOT NULL, definition TEXT NOT NULL, scope TEXT NOT NULL, CONSTRAINT ge_tce UNIQUE (table_name, column_name, extension_name));
CREATE TABLE IF NOT EXISTS gpkg_data_columns (table_name TEXT NOT NULL, column_name TEXT NOT NULL, name TEXT, title TEXT, description TEXT, mime_type TEXT, constraint_name TEXT, CONSTRAINT pk_gdc PRIMARY KEY (table_name, column_name), CONSTRAINT gdc_tn UNIQUE (table_name, name));
CREATE TABLE IF NOT EXISTS gpkg_data_column_constraints (constraint_name TEXT NOT NULL, constraint_type TEXT NOT NULL, value TEXT, min NUMERIC, min_is_inclusive BOOLEAN, max NUMERIC, max_is_inclusive BOOLEAN, description TEXT, CONSTRAINT gdcc_ntv UNIQUE (constraint_name, constraint_type, value));
CREATE TABLE IF NOT EXISTS layer_styles (id INTEGER PRIMARY KEY AUTOINCREMENT NOT NULL, f_table_catalog TEXT, f_table_schema TEXT, f_table_name TEXT, f_geometry_column TEXT, styleName TEXT, styleQML TEXT, styleSLD TEXT, useAsDefault BOOLEAN, description TEXT, owner TEXT, ui TEXT, update_time DATETIME DEFAULT '2000-01-01T00:00:00.000Z');
"""


def column_texts() -> dict[str, tuple[str, str]]:
    """Machine name -> (title, description with unit) for every result, limit state and attribute."""
    texts = {}
    for column in (*result_columns().values(), *inventory_attributes().values()):
        unit = f" Unit: {column.unit}." if column.unit else ""
        texts.setdefault(column.machine_name, (column.label, column.meaning + unit))
    for name, state in LIMIT_STATES.items():
        texts[f"utilization_{name}"] = (f"Utilization: {state.label}", f"{state.meaning} Source: {state.source}")
    return texts


def describe_layers(path: Path, layer: str = "joints") -> None:
    """Write aliases, descriptions and the style into a GeoPackage."""
    with closing(sqlite3.connect(path)) as database, database:
        database.executescript(_SCHEMA)
        for table in ("gpkg_data_columns", "gpkg_data_column_constraints"):
            database.execute("INSERT OR IGNORE INTO gpkg_extensions VALUES (?, NULL, 'gpkg_schema', 'http://www.geopackage.org/spec/#extension_schema', 'read-write')", (table,))
        present = {row[1] for row in database.execute(f"PRAGMA table_info({layer})")}
        texts = column_texts()
        lines = [(layer, name, None, *texts[name]) for name in sorted(present & set(texts))]
        database.executemany("INSERT OR REPLACE INTO gpkg_data_columns (table_name, column_name, name, title, description) VALUES (?, ?, ?, ?, ?)", lines)
        geometry = database.execute("SELECT column_name FROM gpkg_geometry_columns WHERE table_name = ?", (layer,)).fetchone()
        database.execute(
            "INSERT INTO layer_styles (f_table_catalog, f_table_schema, f_table_name, f_geometry_column, styleName, styleQML, useAsDefault, description) VALUES ('', '', ?, ?, 'utilization', ?, 1, ?)",
            (layer, geometry[0] if geometry else "", style_qml(), "Larger and darker: higher utilization. Above 1 is beyond a limit."),
        )
        if not database.execute("SELECT 1 FROM gpkg_contents WHERE table_name = 'layer_styles'").fetchone():
            database.execute("INSERT INTO gpkg_contents (table_name, data_type, identifier, last_change) VALUES ('layer_styles', 'attributes', 'layer_styles', '2000-01-01T00:00:00.000Z')")


def style_qml() -> str:
    """Graduated points by utilization."""
    ranges, symbols = [], []
    for k, (low, high, colour, size) in enumerate(BANDS):
        label = f"above {low:g}" if high > 1e6 else f"{low:g} to {high:g}"
        ranges.append(f'<range lower="{low}" upper="{high}" symbol="{k}" label={quoteattr(label)} render="true"/>')
        symbols.append(
            f'<symbol type="marker" name="{k}" alpha="1"><layer class="SimpleMarker" pass="0" locked="0" enabled="1"><Option type="Map">'
            f'<Option type="QString" name="name" value="circle"/><Option type="QString" name="color" value="{_rgba(colour)}"/>'
            f'<Option type="QString" name="outline_color" value="31,42,55,255"/><Option type="QString" name="outline_width" value="0.2"/>'
            f'<Option type="QString" name="size" value="{size}"/><Option type="QString" name="size_unit" value="MM"/></Option></layer></symbol>'
        )
    return (
        '<!DOCTYPE qgis PUBLIC \'http://mrcc.com/qgis.dtd\' \'SYSTEM\'><qgis version="3.22" styleCategories="Symbology">'
        '<renderer-v2 type="graduatedSymbol" attr="utilization" graduatedMethod="GraduatedColor" symbollevels="1" forceraster="0" enableorderby="0">'
        f"<ranges>{''.join(ranges)}</ranges><symbols>{''.join(symbols)}</symbols></renderer-v2></qgis>"
    )


def _rgba(colour: str) -> str:
    return ",".join(str(int(colour[i : i + 2], 16)) for i in (1, 3, 5)) + ",255"
