"""The mapping file: what is written is read back; what is wrong is said with its line."""

import numpy as np
import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from screener.inventory.mapping_file import quoted, read_mapping, write_mapping
from screener.inventory.match_headers import HeaderMatch, match_headers
from screener.inventory.parse_cells import parse_cells
from screener.records import InputError, Ledger, RawTable


def table_of(columns):
    """columns: list of (heading, values)."""
    frame = pd.DataFrame({k: pd.Series(values, dtype=object) for k, (_, values) in enumerate(columns)})
    return RawTable("a.csv", "", tuple(heading for heading, _ in columns), frame, np.arange(2, len(frame) + 2))


COLUMNS = [("Joint", ["A1", "A2"]), ("Size", [12, 16]), ("P max (site)", [7, 8]), ("Remarks", ["x", "y"]), ("Size", [300, 400])]


@pytest.fixture
def written(tmp_path):
    table = table_of(COLUMNS)
    match = match_headers(table, None, Ledger())
    path = tmp_path / "mapping.toml"
    write_mapping(path, match)
    return table, match, path


def test_what_is_written_is_read_back(written):
    table, match, path = written
    mapping = read_mapping(path)
    assert len(mapping) == len(COLUMNS)
    again = match_headers(table, mapping, Ledger())
    assert again.columns == match.columns
    assert {k: m.unit for k, m in again.matched.items()} == {k: m.unit for k, m in match.matched.items()}


def test_reasons_and_attributes_stand_in_it_as_comments(written):
    text = written[2].read_text()
    assert "# synonym 'joint'" in text or "# its label" in text
    assert "#   operating_pressure: Operating pressure (Pa, kPa" in text
    assert "no attribute found" in text


def test_equal_headings_are_told_apart_by_their_column(written):
    mapping = read_mapping(written[2])
    assert "Size (column B)" in mapping and "Size (column E)" in mapping
    text = '["Size (column B)"]\nattribute = ""\n["Size (column E)"]\nattribute = "nominal_size"\nunit = "mm"\n'
    written[2].write_text(text)
    match = match_headers(written[0], read_mapping(written[2]), Ledger())
    assert match.columns["nominal_size"] == 4


def test_an_edit_by_hand_is_obeyed(written):
    table, _, path = written
    text = path.read_text()
    text = text.replace('["P max (site)"]\nattribute = ""', '["P max (site)"]\nattribute = "operating_pressure"').replace('attribute = "inspection_finding"', 'attribute = "inspection_finding"\nignore = true')
    before = text.index('["P max (site)"]')
    text = text[:before] + text[before:].replace('unit = ""', 'unit = "Bar"', 1)
    path.write_text(text)
    ledger = Ledger()
    match = match_headers(table, read_mapping(path), ledger)
    assert match.matched[2].unit == "bar"
    assert "inspection_finding" not in match.columns
    values = parse_cells(table, match, ledger).values
    np.testing.assert_allclose(values["operating_pressure"], [7e5, 8e5])


def test_columns_the_file_does_not_have_are_a_note(written):
    ledger = Ledger()
    match_headers(written[0], {"No such": {"attribute": "zone", "unit": ""}}, ledger)
    assert [f.code for f in ledger.findings if "No such" in f.problem] == ["mapping_unused"]


def test_a_byte_order_mark_is_passed_over(written):
    path = written[2]
    path.write_bytes(b"\xef\xbb\xbf" + path.read_bytes())
    assert read_mapping(path)


WRONG = [
    ('["A"]\nattribute = "operating_presure"\n', ("line 1", "operating_presure", "did you mean operating_pressure")),
    ('["A"]\nattribute = "Operating pressure"\n', ("line 1", "did you mean operating_pressure")),
    ('\n# x\n["B"]\nattribute = "operating_pressure"\nunit = "inch"\n', ("line 3", "'inch' is no unit", "psi")),
    ('["B"]\nattribute = "bolt_count"\nunit = "mm"\n', ("line 1", "has no unit")),
    ('["B"]\natribute = "zone"\n', ("line 1", "atribute", "did you mean attribute")),
    ('["B"]\nattribute = 3\n', ("line 1", "text in quotes")),
    ('["B"]\nattribute = "zone"\nignore = "yes"\n', ("line 1", "true or false")),
    ('B = "zone"\n', ("line 1", "table")),
    ('["A"]\nattribute = "zone"\n["B"]\nattribute = "zone"\n', ("line 3", "'A' is zone too")),
    ('["A"\nattribute = "zone"\n', ("not a TOML file", "line 1")),
    ('["A"]\n["A"]\n', ("not a TOML file",)),
    ("[" * 5000, ("not a TOML file",)),
]


@pytest.mark.parametrize(("text", "words"), WRONG)
def test_what_is_wrong_is_said_in_one_line_with_its_place(tmp_path, text, words):
    path = tmp_path / "m.toml"
    path.write_text(text)
    with pytest.raises(InputError) as caught:
        read_mapping(path)
    message = str(caught.value)
    assert "\n" not in message and "m.toml" in message
    for word in words:
        assert word in message, message


def test_no_file_and_no_text(tmp_path):
    with pytest.raises(InputError, match="no such mapping file"):
        read_mapping(tmp_path / "no.toml")
    (tmp_path / "b.toml").write_bytes(b"\xff\xfe\x00binary")
    with pytest.raises(InputError, match="can't be read"):
        read_mapping(tmp_path / "b.toml")
    with pytest.raises(InputError, match="can't be read"):
        read_mapping(tmp_path)
    with (tmp_path / "large.toml").open("wb") as stream:
        stream.truncate(6_000_000)
    with pytest.raises(InputError, match="larger than"):
        read_mapping(tmp_path / "large.toml")


def test_two_headings_of_one_attribute_are_refused_by_name(written):
    both = {"Joint": {"attribute": "zone", "unit": ""}, "Remarks": {"attribute": "zone", "unit": ""}}
    with pytest.raises(InputError, match="'Remarks' and 'Joint' are both zone"):
        match_headers(written[0], both, Ledger())


@given(st.lists(st.text(min_size=1, max_size=30), min_size=1, max_size=6))
@settings(max_examples=200, deadline=None)
def test_any_headings_survive(tmp_path_factory, headings):
    path = tmp_path_factory.mktemp("m") / "mapping.toml"
    write_mapping(path, HeaderMatch(tuple(headings), {}, {}, tuple(range(len(headings)))))
    mapping = read_mapping(path)
    for heading in headings:
        if headings.count(heading) == 1 and heading.encode("utf-8", "replace").decode() == heading and f"{heading} (column" not in " ".join(headings):
            assert heading in mapping


def test_quoted_text_is_ascii_safe_and_whole():
    import tomllib

    for text in ('a "b" \\ c', "tab\there", "bell\x07", "del\x7f", "\u2028", "é ½ 管"):
        assert tomllib.loads(f"k = {quoted(text)}")["k"] == text
