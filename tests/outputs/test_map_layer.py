"""The map layer as a GIS person finds it."""

import sqlite3
import xml.dom.minidom
from contextlib import closing
from pathlib import Path

import geopandas
import pytest

from screener import Settings, read_inventory, screen
from screener.outputs.mains import read_mains
from screener.outputs.map_layer import write_geopackage, write_geoparquet
from screener.records import InputError

SAMPLE = Path(__file__).resolve().parents[2] / "sample_inventory" / "inventory.gpkg"


@pytest.fixture(scope="module")
def layer(tmp_path_factory):
    path = tmp_path_factory.mktemp("layer") / "joints.gpkg"
    inventory = read_inventory(SAMPLE, Settings(assessment_date="2026-06-30"))
    screening = screen(inventory)
    write_geopackage(screening, path, read_mains("mains", SAMPLE, inventory.crs))
    return path, screening


def test_joints_keep_place_reference_system_and_their_own_columns(layer):
    path, screening = layer
    joints = geopandas.read_file(path, layer="joints")
    own = geopandas.read_file(SAMPLE, layer="flanged_joints")
    assert joints.crs == own.crs
    assert len(joints) == len(own) == len(screening.table)
    assert {f"file_{c}" for c in own.columns if c != "geometry"} <= set(joints.columns)
    by_id = joints.set_index("joint_id").geometry
    name = next(c for c in own.columns if own[c].astype(str).tolist()[:5] == [str(v) for v in screening.inventory.joint_id[:5]])
    for _, row in own.head(20).iterrows():
        assert by_id[str(row[name])].distance(row.geometry) < 1e-6


def test_mains_are_joined(layer):
    path, _screening = layer
    assert len(geopandas.read_file(path, layer="mains")) == 30


def test_aliases_units_and_meanings(layer):
    path, _screening = layer
    with closing(sqlite3.connect(path)) as database:
        rows = dict(database.execute("SELECT column_name, title || '|' || description FROM gpkg_data_columns WHERE table_name = 'joints'").fetchall())
        extension = database.execute("SELECT count(*) FROM gpkg_extensions WHERE extension_name = 'gpkg_schema'").fetchone()[0]
        check = database.execute("PRAGMA integrity_check").fetchone()[0]
    assert rows["loose_ring_rating_kpa"].startswith("Loose-ring rating|") and "Unit: kpa" in rows["loose_ring_rating_kpa"]
    assert "utilization_ring_rating" in rows
    assert extension == 2 and check == "ok"


def test_style_is_kept_in_the_file(layer):
    path, _screening = layer
    with closing(sqlite3.connect(path)) as database:
        name, qml, default = database.execute("SELECT f_table_name, styleQML, useAsDefault FROM layer_styles").fetchone()
    assert name == "joints" and default == 1
    document = xml.dom.minidom.parseString(qml)
    assert document.getElementsByTagName("renderer-v2")[0].getAttribute("attr") == "utilization"
    assert len(document.getElementsByTagName("range")) == len(document.getElementsByTagName("symbol")) == 5


def test_geoparquet_holds_every_joint(layer, tmp_path):
    _path, screening = layer
    write_geoparquet(screening, tmp_path / "joints.parquet")
    joints = geopandas.read_parquet(tmp_path / "joints.parquet")
    assert len(joints) == len(screening.table)


def test_a_wrong_layer_of_mains_is_refused():
    with pytest.raises(InputError, match="layers there: flanged_joints, mains"):
        read_mains("nothing", SAMPLE, None)
