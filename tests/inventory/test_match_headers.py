"""Which column is which attribute: wording, units, abbreviations, and the traps."""

import time

import numpy as np
import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from screener.columns import inventory_attributes
from screener.inventory.match_headers import match_headers
from screener.inventory.match_wording import meanings, unit_in_heading, words_of
from screener.records import InputError, Ledger, RawTable, Severity


def table_of(columns):
    frame = pd.DataFrame({k: pd.Series(values, dtype=object) for k, (_, values) in enumerate(columns)})
    return RawTable("a.csv", "", tuple(heading for heading, _ in columns), frame, np.arange(2, len(frame) + 2))


def match(columns):
    ledger = Ledger()
    return match_headers(table_of(columns), None, ledger), ledger


def alone(heading, values):
    """(attribute, unit) of a heading beside a joint's name; None when it is not used."""
    found, _ = match([("Joint ref", [f"J{i}" for i in range(len(values))]), (heading, values)])
    return (found.matched[1].attribute, found.matched[1].unit) if 1 in found.matched else None


UNDERSTOOD = [
    ("Max press. (psi)", [150, 120], "operating_pressure", "psi"),
    ("OP [bar]", [10, 8], "operating_pressure", "bar"),
    ("MAX_PRESS_PSI", [150, 120], "operating_pressure", "psi"),
    ("Oper. Press (kPa)", [1000, 900], "operating_pressure", "kPa"),
    ("Pressure (psi) - static", [100, 90], "operating_pressure", "psi"),
    ("Pressure psi max", [100, 90], "operating_pressure", "psi"),
    ("Operating Pressures", [100, 90], "operating_pressure", ""),
    ("Opreating pressure", [100, 90], "operating_pressure", ""),
    ("Test press. bar(g)", [15, 14], "test_pressure", "bar"),
    ("Nom. dia mm", [300, 315], "nominal_size", "mm"),
    ("Diameter in inches", [12, 14], "nominal_size", "in"),
    ("DN", [300, 315], "nominal_size", "mm"),
    ("Pipe_OD_mm", [315, 300], "pipe_outside_diameter", "mm"),
    ("Torque ft-lb", [110, 100], "assembly_torque", "ft lb"),
    ("Torque (N·m)", [150, 140], "assembly_torque", "N m"),
    ("Bolt torque, ft-lbs", [110, 100], "assembly_torque", "ft lb"),
    ("Temp degF", [64, 60], "temperature", "F"),
    ("Temp. °C", [15, 16], "temperature", "C"),
    ("Seasonal range (°F)", [20, 22], "seasonal_range", "F difference"),
    ("ringThicknessMm", [20, 25], "ring_thickness", "mm"),
    ("Ring Thk. mm", [20, 25], "ring_thickness", "mm"),
    ("JointID", ["a", "b"], "joint_id", ""),
    ("Yr. inst.", [1998, 2001], "year_installed", ""),
    ("# bolts", [12, 16], "bolt_count", ""),
    ("No. Bolts", [12, 16], "bolt_count", ""),
    ("Elev. [m AOD]", [10, 9], "elevation", "m"),
    ("Cost of failure, USD", [1, 2], "consequence_cost", "money"),
    ("PN", [16, 10], "pipe_pressure_class", "bar"),
]


@pytest.mark.parametrize(("heading", "values", "attribute", "unit"), UNDERSTOOD, ids=[u[0] for u in UNDERSTOOD])
def test_understood_headings(heading, values, attribute, unit):
    if attribute == "joint_id":
        found, _ = match([(heading, values)])
        assert found.columns == {"joint_id": 0}
    else:
        assert alone(heading, values) == (attribute, unit)


NOT_USED = [
    ("Wall thickness (mm)", [27, 28]),
    ("Coating Thickness", [1, 2]),
    ("Gasket thickness", [3, 3]),
    ("Pipe thickness (in)", [1, 2]),
    ("Min press (psi)", [40, 30]),
    ("Pressure (test rig) psi", [40, 30]),
    ("Suction pressure", [40, 30]),
    ("Pipe ID", [11.2, 11.7]),
    ("T op", [15, 16]),
    ("Leak count", [0, 1]),
    ("Date", ["1998-05-12", "2001-01-01"]),
    ("Length (m)", [10, 12]),
    ("Bolts", ["12 x 7/8", "16 x 1"]),
    ("geometry", ["POINT (0 0)", "POINT (1 1)"]),
    ("SHAPE", [1, 2]),
    ("Shape_Length", [1.0, 2.0]),
    ("Operating temperature", ["warm", "cold"]),
    ("Year installed", ["N. Main Street", "Harbour"]),
]


@pytest.mark.parametrize(("heading", "values"), NOT_USED, ids=[n[0] for n in NOT_USED])
def test_headings_that_must_not_be_used(heading, values):
    assert alone(heading, values) is None


def test_every_label_name_and_synonym_is_understood():
    for name, attribute in inventory_attributes().items():
        for text in (attribute.label, name, name.upper(), attribute.machine_name, name.replace("_", " ").title(), *attribute.synonyms):
            assert meanings(text) and meanings(text)[0].attribute == name, (text, meanings(text)[:1])


def test_every_unit_of_an_attribute_is_found_in_brackets_and_at_the_end():
    for attribute in inventory_attributes().values():
        for unit in {attribute.us, attribute.metric} - {"", "money"}:
            assert unit_in_heading(f"{attribute.label} ({unit})", attribute) == unit
            assert unit_in_heading(f"{attribute.label} [{unit}]", attribute) == unit
            found = meanings(f"{attribute.label}, {unit}")
            assert found[0].attribute == attribute.name and found[0].unit == unit, (attribute.name, unit, found[:1])


def test_the_reason_is_in_words():
    found, _ = match([("Max press. (psi)", [150, 120]), ("Size", [12, 14])])
    assert found.matched[0].reason == "synonym 'max press', unit psi in the heading"
    assert found.lines()[0] == "'Max press. (psi)' is Operating pressure (synonym 'max press', unit psi in the heading)"


def test_id_alone_is_a_name_when_all_differ_and_a_bore_when_it_is_a_size():
    assert match([("ID", ["J1", "J2", "J3"]), ("Size", [12, 12, 12])])[0].columns["joint_id"] == 0
    assert match([("ID", [101, 102, 103]), ("Size", [12, 12, 12])])[0].columns["joint_id"] == 0
    columns = match([("ID", [12.88, 12.88, 13.0]), ("Joint", ["a", "b", "c"])])[0].columns
    assert columns["ring_bore"] == 0 and columns["joint_id"] == 1
    assert match([("ID", ["12.9 in", "12.9 in", "16.2 in"]), ("Joint", ["a", "b", "c"])])[0].columns["ring_bore"] == 0


def test_od_alone_is_told_by_its_distance_from_the_nominal_size():
    """IPS 12 is 12.75 in outside (ASTM F714); a 12 in AWWA C207 class D ring is 19 in."""
    assert match([("Size (in)", [12, 8, 4]), ("OD", [12.75, 8.625, 4.5])])[0].columns["pipe_outside_diameter"] == 1
    assert match([("Size (in)", [12, 8, 4]), ("OD", [19.0, 13.5, 9.0])])[0].columns["ring_outside_diameter"] == 1
    assert match([("Size (in)", [36, 48]), ("OD", [46.0, 59.5])])[0].columns["ring_outside_diameter"] == 1
    assert match([("DN (mm)", [315, 630]), ("OD", [315, 630])])[0].columns["pipe_outside_diameter"] == 1
    found, ledger = match([("Size (in)", [12, 12]), ("OD", [12.75, 19.0])])
    assert not {"pipe_outside_diameter", "ring_outside_diameter"} & set(found.columns)
    assert "od_unclear" in {f.code for f in ledger.findings}
    assert match([("Size (in)", [12, 8]), ("OD", [19.0, 13.5]), ("Pipe OD (in)", [12.75, 8.625])])[0].columns["ring_outside_diameter"] == 1


@pytest.mark.parametrize(
    ("heading", "values", "attribute"),
    [
        ("Class", ["D", "Class E", "B"], "ring_class"),
        ("Class", ["PC 200", "PC 160", "PC 200"], "pipe_pressure_class"),
        ("Material", ["PE4710", "HDPE 3408", "PE100"], "pe_material"),
        ("Material", ["A36", "ductile iron", "316L"], "ring_material"),
        ("Material", ["B7", "8.8", "A307"], "bolt_grade"),
        ("Rating", ["160 psi", "200 psi", "11 bar"], "stated_rating"),
        ("Rating", ["PC 200", "PC 160", "PC 160"], "pipe_pressure_class"),
        ("Notes", ["bad", "ok", "rusty"], "inspection_finding"),
        ("Year", [1998, 2001, 2004], "year_installed"),
    ],
)
def test_short_words_are_settled_by_the_values(heading, values, attribute):
    assert alone(heading, values)[0] == attribute


def test_pressure_class_with_drilling_classes_in_it_is_the_rings():
    found = alone("Rating", ["150#", "Class 150", "125#"])
    assert found == ("ring_class", "")


def test_two_pressure_columns_are_a_doubt_and_the_better_one_is_taken():
    found, ledger = match([("Size", [12, 14]), ("Static pressure (psi)", [90, 80]), ("Max pressure (psi)", [100, None])])
    assert found.columns["operating_pressure"] == 1  # both are synonyms; it has more cells
    note = next(f for f in ledger.findings if f.code == "two_columns")
    assert note.severity == Severity.DOUBTS and note.column == "Max pressure (psi)"
    assert found.unused == (2,)


def test_a_much_weaker_second_column_is_only_a_note():
    _, ledger = match([("OBJECTID", [1, 2]), ("Joint ID", ["a", "b"]), ("Size", [12, 14])])
    assert [f.severity for f in ledger.findings if f.code == "two_columns"] == [Severity.NOTES]


def test_a_column_that_lost_its_meaning_does_not_take_a_weaker_one():
    found, _ = match([("Ring material", ["A36", "DI"]), ("Flange material", ["A36", "316L"]), ("Size", [12, 14])])
    assert list(found.columns).count("ring_material") == 1
    assert "pe_material" not in found.columns and "bolt_grade" not in found.columns


def test_values_speak_where_the_heading_does_not():
    found, ledger = match([("Size", [12, 14, 16]), ("column B", ["DR 11", "DR 17", "SDR 11"]), ("qwerty", ["PE4710", "PE 3408", "PE100"])])
    assert found.columns["dimension_ratio"] == 1 and found.columns["pe_material"] == 2
    assert [f.column for f in ledger.findings if f.code == "column_by_values"] == ["column B", "qwerty"]


def test_a_heading_over_two_rows_counts_below_its_group_but_not_below_a_word_that_changes_it():
    assert alone("Backing ring Ring thk (in)", [1, 1.25]) == ("ring_thickness", "in")
    assert alone("Pressures Working pressure", [100, 90]) == ("operating_pressure", "")
    assert alone("Ring Thickness", [1, 1.25]) == ("ring_thickness", "")
    assert alone("Gasket Thickness", [1, 1.25]) is None


def test_words_in_brackets_count():
    assert alone("Pressure (surge)", [100, 90]) in (None, ("recurrent_surge", ""))
    assert alone("Pressure (test)", [100, 90]) == ("test_pressure", "")
    assert alone("Easting (OSGB)", [300000, 310000]) == ("x_coordinate", "")


def test_a_unit_that_the_attribute_does_not_have_is_no_match():
    assert alone("Ring thickness (psi)", [100, 90]) != ("ring_thickness", "")


def test_dn_over_inch_numbers_does_not_force_millimetres():
    found = alone("DN", [12, 16, 24])
    assert found is None or found == ("nominal_size", "")


def test_unmatched_headings_are_listed():
    found, ledger = match([("Size", [12, 14]), ("Weather", ["sun", "rain"])])
    assert found.unused == (1,)
    assert "'Weather'" in next(f.problem for f in ledger.findings if f.code == "columns_unused")


def test_no_size_blocks_and_nothing_understood_is_refused():
    _, ledger = match([("Joint", ["a", "b"]), ("Operating pressure", [1, 2])])
    assert next(f.severity for f in ledger.findings if f.code == "no_size_column") == Severity.BLOCKS
    with pytest.raises(InputError, match="no column is understood"):
        match([("qwer", ["q", "w"])])


def test_words():
    assert words_of("JointID") == ["joint", "id"]
    assert words_of("MAX_PRESS_PSI") == ["max", "press", "psi"]
    assert words_of("Ring O.D.") == ["ring", "od"]
    assert words_of("ringThicknessMm") == ["ring", "thickness", "mm"]


@given(st.lists(st.text(max_size=40), min_size=1, max_size=5))
@settings(max_examples=200, deadline=None)
def test_random_headings_never_raise(headings):
    columns = [("Size", [12, 14]), *((heading, ["x", 1]) for heading in headings)]
    found, _ = match(columns)
    assert set(found.matched) | set(found.unused) == set(range(len(columns)))
    assert len(set(found.columns.values())) == len(found.columns)


CELLS = st.one_of(st.none(), st.integers(-(10**12), 10**12), st.floats(), st.text(max_size=12), st.booleans(), st.dates(), st.datetimes(), st.times())


@given(st.sampled_from(sorted(a.label for a in inventory_attributes().values())), st.lists(CELLS, min_size=1, max_size=8))
@settings(max_examples=300, deadline=None)
def test_random_cells_never_raise(heading, cells):
    match([("Size", [12] * len(cells)), (f"{heading} x", cells), (heading, cells)])


def test_many_odd_columns_take_a_moment():
    headings = [f"measure {i} of thing {i % 7}" for i in range(400)]
    columns = [("Size", [12, 14]), *((h, [1, 2]) for h in headings)]
    start = time.perf_counter()
    found, _ = match(columns)
    print(f"{time.perf_counter() - start:.1f} s for 400 columns")
    assert found.columns == {"nominal_size": 0}
