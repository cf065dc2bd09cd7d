"""The two laws: rows in = ranked + not ranked, and every unknown in a result has its reason."""

import numpy as np
import pandas as pd
import pytest

from screener import Settings, read_inventory, screen
from screener.columns import inventory_attributes
from screener.records import Origin

BASE = {
    "Joint": "A",
    "Size": "12 in",
    "DR": 11,
    "Pipe material": "PE4710",
    "Ring standard": "AWWA C207",
    "Ring class": "D",
    "Op pressure": "100 psi",
    "Surge": "20 psi",
    "Year installed": 2005,
    "Torque": "110 ft-lb",
}
SETTINGS = Settings(assessment_date="2026-06-30")


def inventory_of(tmp_path, *changes, **columns):
    rows = [{**BASE, "Joint": f"A{i}", **change} for i, change in enumerate(changes or ({},))]
    frame = pd.DataFrame(rows).assign(**columns)
    path = tmp_path / "a.csv"
    frame.to_csv(path, index=False)
    return read_inventory(path, SETTINGS)


def findings(inventory, code):
    return [b for b in inventory.ledger.findings if b.code == code]


def test_every_row_is_ranked_or_has_a_reason(tmp_path):
    inventory = inventory_of(
        tmp_path, {}, {"Size": "13 in"}, {"Size": ""}, {"Size": "24 in", "Op pressure": ""}, {"Joint": "A0"}, {"Joint": ""}, {"DR": ""}
    )
    result = screen(inventory)
    counts = result.counts
    assert counts["rows"] == 7 == counts["ranked"] + counts["not_ranked"]
    table = result.table
    assert (table.loc[table["status"] == "not ranked", "reason"] != "").all()
    assert (table.loc[table["status"] == "ranked", "reason"] == "").all()
    assert sorted(table.loc[table["status"] == "ranked", "rank"]) == list(range(1, counts["ranked"] + 1))


@pytest.mark.parametrize("column", [c for c in BASE if c not in ("Joint", "Size")])
def test_a_missing_cell_is_filled_openly(tmp_path, column):
    inventory = inventory_of(tmp_path, {}, {column: ""})
    result = screen(inventory)
    assert result.counts["ranked"] == 2
    filled = {b.attribute for b in inventory.ledger.assumptions if 1 in b.positions}
    expected = {
        "DR": "dimension_ratio",
        "Pipe material": "pe_material",
        "Ring standard": "ring_standard",
        "Ring class": "ring_class",
        "Op pressure": "operating_pressure",
        "Surge": "recurrent_surge",
        "Year installed": "year_installed",
        "Torque": "assembly_torque",
    }[column]
    assert expected in filled


def test_unknown_results_have_findings(tmp_path):
    frame_columns = {"Temp": ["18 C", "60 C"]}
    inventory = inventory_of(tmp_path, {}, {}, **frame_columns)
    result = screen(inventory)
    table = result.table.set_index("joint_id")
    for name in [c for c in table.columns if c.startswith("utilization_")]:
        if np.isnan(table.loc["A1", name]):
            hits = result.findings[(result.findings["joint_id"] == "A1") & (result.findings["code"] == "not_evaluated")]
            assert len(hits), name
    assert np.isnan(table.loc["A1", "utilization_pipe_operating"])
    assert not np.isnan(table.loc["A0", "utilization_pipe_operating"])


def test_geometry_comes_from_the_table_of_the_class(tmp_path):
    """AWWA C207 class D, 12 in, as read in an engineering data library: 19 in OD, 17 in circle, 12 bolts of 7/8 in, 0.812 in thick."""
    gaps = inventory_of(tmp_path).gaps
    for attribute, inches in (("ring_outside_diameter", 19.0), ("bolt_circle_diameter", 17.0), ("bolt_diameter", 0.875), ("ring_thickness", 0.812)):
        assert gaps[attribute][0] == pytest.approx(inches * 0.0254)
        assert gaps.origin(attribute)[0] == Origin.LOOKED_UP
    assert gaps["bolt_count"][0] == 12


def test_values_read_are_never_replaced_silently(tmp_path):
    inventory = inventory_of(tmp_path, {}, **{"Bolt circle (in)": [2.0]})
    said = [b for b in inventory.ledger.findings if b.attribute == "bolt_circle_diameter"]
    assert said and float(said[0].values[0]) == 2.0
    assert inventory.gaps["bolt_circle_diameter"][0] == pytest.approx(17 * 0.0254)
    assert inventory.gaps.origin("bolt_circle_diameter")[0] != Origin.READ


@pytest.mark.parametrize(
    ("columns", "code"),
    [
        ({"Ring OD (in)": 300.0}, "unit_slip"),
        ({"Year installed": 2150}, "date_in_future"),
        ({"Last tightened": 1990}, "date_before_installation"),
        ({"PC (psi)": 63}, "ratio_against_class"),
        ({"Bolts": 16}, "not_the_class"),
        ({"Ring ID (in)": 11.0}, "bore_inside_pipe"),
        ({"Bolt hole (in)": 0.75, "Bolt dia (in)": 0.875}, "bolt_larger_than_hole"),
        ({"Test pressure (psi)": 50}, "test_below_operating"),
        ({"Ring class": "PN16"}, "class_not_in_standard"),
        ({"Op pressure": "15000 psi"}, "unit_slip"),
        ({"Ring thickness (in)": 40}, "unit_slip"),
        ({"Ring thickness (in)": -3}, "out_of_range"),
    ],
)
def test_contradictions_are_found(tmp_path, columns, code):
    inventory = inventory_of(tmp_path, {}, **{k: [v] for k, v in columns.items()})
    assert findings(inventory, code), {b.code for b in inventory.ledger.findings}


def test_twins(tmp_path):
    inventory = inventory_of(tmp_path, {"Joint": "T"}, {"Joint": "T", "DR": 17}, {"Joint": "T"})
    assert findings(inventory, "id_used_twice") and findings(inventory, "row_repeated")
    assert list(inventory.joint_id) == ["T", "T (row 3)", "T (row 4)"]
    result = screen(inventory)
    assert result.counts == {"rows": 3, "ranked": 2, "not_ranked": 1}


def test_same_input_same_numbers(tmp_path):
    changes = [{}, {"Size": "24 in"}, {"Size": "8 in", "Ring class": ""}]
    first, second = (screen(inventory_of(tmp_path, *changes)).ranking for _ in range(2))
    pd.testing.assert_frame_equal(first, second)


def test_order_of_rows_does_not_matter(tmp_path):
    changes = [{"Joint": f"J{i}", "Size": s} for i, s in enumerate(("6 in", "24 in", "12 in", "36 in"))]
    one = screen(inventory_of(tmp_path, *changes)).ranking.set_index("joint_id")
    other = screen(inventory_of(tmp_path, *changes[::-1])).ranking.set_index("joint_id")
    columns = [c for c in one.columns if c != "row"]
    pd.testing.assert_frame_equal(one[columns], other.loc[one.index, columns])


def test_every_attribute_of_the_dictionary_has_an_origin(tmp_path):
    inventory = inventory_of(tmp_path)
    assert set(inventory_attributes()) <= set(inventory.gaps.origins)
