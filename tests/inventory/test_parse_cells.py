"""Cells to values: units, dates, choices, names; each refused cell is a finding with its value."""

import datetime
import time

import numpy as np
import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from screener.columns import inventory_attributes
from screener.inventory.match_headers import HeaderMatch, Matched
from screener.inventory.parse_cells import parse_cells
from screener.inventory.parse_dates import decimal_year, read_date
from screener.inventory.parse_words import read_category
from screener.records import Ledger, Origin, RawTable, Severity
from screener.units import from_unit

IN, PSI = 0.0254, 6894.757293168361


class Parsed:
    """One column parsed as an attribute."""

    def __init__(self, attribute, cells, unit="", heading="The column", others=()):
        columns = [(attribute, heading, unit, cells), *others]
        frame = pd.DataFrame({k: c[3] if isinstance(c[3], pd.Series) else pd.Series(c[3], dtype=object) for k, c in enumerate(columns)})
        table = RawTable("a.csv", "", tuple(c[1] for c in columns), frame, np.arange(2, len(frame) + 2))
        matched = {k: Matched(c[1], c[0], c[2], "test", 1.0) for k, c in enumerate(columns)}
        self.ledger = Ledger()
        self.all = parse_cells(table, HeaderMatch(table.headings, {c[0]: k for k, c in enumerate(columns)}, matched), self.ledger)
        self.values, self.origin = self.all.values[attribute], self.all.origin[attribute]
        self.attribute = attribute

    def findings(self, code):
        return [f for f in self.ledger.findings if f.code == code and f.attribute == self.attribute]

    def rows(self, code):
        return sorted(int(p) for f in self.findings(code) for p in f.positions)

    @property
    def codes(self):
        return {f.code for f in self.ledger.findings if f.attribute == self.attribute}


# Quantities


def test_a_cell_with_a_unit_beats_the_heading():
    p = Parsed("operating_pressure", ["100 psi", "7 bar", 8, None, "unknown", "700 kPa"], unit="bar")
    np.testing.assert_allclose(p.values, [100 * PSI, 7e5, 8e5, np.nan, np.nan, 7e5])
    assert p.origin.tolist() == [Origin.CONVERTED] * 3 + [Origin.MISSING] * 2 + [Origin.CONVERTED]
    assert p.values.dtype == float and p.origin.dtype == np.uint8
    assert not p.ledger.findings


def test_si_as_written_is_read_and_other_units_are_converted():
    assert Parsed("chainage", ["12 m", "12 ft"]).origin.tolist() == [Origin.READ, Origin.CONVERTED]


def test_a_range_of_kelvins_is_a_difference_and_a_temperature_in_kelvins_is_not():
    assert Parsed("seasonal_range", ["12 K", "21.6 F"]).values == pytest.approx([12.0, 12.0])
    assert Parsed("temperature", ["291.15 K", "64.4 F"]).values == pytest.approx([18.0, 18.0])


@pytest.mark.parametrize(
    ("attribute", "cells", "unit"),
    [
        ("operating_pressure", [100, 120, 80, 150], "psi"),
        ("operating_pressure", [7.0, 8.5, 10.2, 5.0], "bar"),
        ("operating_pressure", [700, 850, 1020, 500], "kPa"),
        ("nominal_size", [6, 8, 12, 24], "in"),
        ("nominal_size", [160, 225, 315, 630], "mm"),
        ("ring_thickness", [0.75, 1.0, 1.25], "in"),
        ("ring_thickness", [20, 25, 32], "mm"),
        ("temperature", [15, 16, 18], "C"),
        ("temperature", [58, 64, 60], "F"),
    ],
)
def test_bare_numbers_are_decided_for_the_column_and_said(attribute, cells, unit):
    p = Parsed(attribute, cells)
    np.testing.assert_allclose(p.values, from_unit(np.array(cells, float), unit, inventory_attributes()[attribute].dimension))
    said = p.findings("unit_taken")
    assert len(said) == 1 and f"taken as {unit} " in said[0].action and f"{len(cells)} bare numbers" in said[0].problem


def test_a_mixed_column_is_decided_value_by_value_and_listed():
    p = Parsed("nominal_size", [12, 300, 8, 315, 16, 24])
    np.testing.assert_allclose(p.values, [12 * IN, 0.3, 8 * IN, 0.315, 16 * IN, 24 * IN])
    assert p.rows("unit_taken_by_value") == [-1, 1, 3]
    assert all(f.severity == Severity.DOUBTS for f in p.findings("unit_taken_by_value"))
    p = Parsed("operating_pressure", [150, 10, 120, 8, 140, 110])
    np.testing.assert_allclose(p.values, [150 * PSI, 1e6, 120 * PSI, 8e5, 140 * PSI, 110 * PSI])


def test_a_number_that_either_unit_of_a_mixed_column_makes_usual_is_listed():
    p = Parsed("nominal_size", [12, 63, 315, 16, 24])
    assert p.rows("unit_open") == [1] and p.findings("unit_open")[0].values.tolist() == ["63"]


def test_bare_numbers_follow_the_unit_of_the_other_cells_where_it_suits_them():
    p = Parsed("assembly_torque", ["110 Nm", "150 Nm", 120, 140])
    assert p.values == pytest.approx([110, 150, 120, 140])
    assert [f.severity for f in p.findings("unit_taken")] == [Severity.NOTES]
    np.testing.assert_allclose(Parsed("nominal_size", ["DN300", 12, 16]).values, [0.3, 12 * IN, 16 * IN])


def test_nought_has_no_unit_to_decide():
    p = Parsed("recurrent_surge", [0, 0, 40, 30, 25])
    np.testing.assert_allclose(p.values, [0, 0, 40 * PSI, 30 * PSI, 25 * PSI])
    assert "unit_unknown" not in p.codes and "unit_taken_by_value" not in p.codes
    assert Parsed("operating_pressure", [0, 0]).values.tolist() == [0, 0]
    assert Parsed("operating_pressure", [0, 0]).rows("unusual") == [0, 1]


def test_a_bare_number_that_no_unit_makes_usual_is_not_used():
    p = Parsed("nominal_size", [12, 16, 24, 123456])
    assert np.isnan(p.values[3]) and p.origin[3] == Origin.MISSING
    assert p.rows("unit_unknown") == [3]


def test_a_likely_slip_is_named_and_not_used():
    p = Parsed("ring_outside_diameter", [19.0, 300.0], unit="in")
    assert np.isnan(p.values[1])
    (said,) = p.findings("unit_slip")
    assert said.values.tolist() == ["300"] and "mm" in said.problem and said.severity == Severity.DOUBTS
    p = Parsed("operating_pressure", ["1 500 psi"])
    assert np.isnan(p.values[0]) and "usual in kPa" in p.findings("unit_slip")[0].problem
    p = Parsed("operating_pressure", ["15000 psi"])
    assert np.isnan(p.values[0]) and "a hundredth of it would be usual" in p.findings("unit_slip")[0].problem
    assert Parsed("operating_pressure", ["-100 psi"]).codes == {"out_of_range"}


def test_impossible_is_not_used_and_unusual_is_used_and_doubted():
    p = Parsed("operating_pressure", ["-5 bar", "61 bar", "40 bar", "10 bar"])
    assert np.isnan(p.values[:2]).all()
    assert p.values[2:] == pytest.approx([4e6, 1e6])
    assert p.rows("unusual") == [2]
    out = [f for f in p.ledger.findings if f.code in ("out_of_range", "unit_slip")]
    assert sorted(int(i) for f in out for i in f.positions) == [0, 1]
    assert "0 bar to 60 bar" in p.findings("out_of_range")[0].problem


def test_infinite_numbers_are_findings():
    p = Parsed("cycles_per_day", pd.Series([48.0, np.inf, -np.inf, np.nan]))
    assert p.values[0] == 48 and np.isnan(p.values[1:]).all()
    assert p.rows("out_of_range") == [1, 2]
    assert Parsed("x_coordinate", pd.Series([1.0, np.inf])).rows("out_of_range") == [1]


def test_a_refused_cell_is_a_finding_with_its_value_and_what_is_accepted():
    p = Parsed("operating_pressure", ["100 psi", "see model", "1O8 psi", "12 in", "?"])
    assert p.rows("unreadable") == [1, 2, 3]
    assert {v for f in p.findings("unreadable") for v in f.values} == {"see model", "1O8 psi", "12 in"}
    assert all("accepted: a number with or without a unit (Pa, kPa" in f.problem for f in p.findings("unreadable"))
    assert any("a unit of length, not of pressure" in f.problem for f in p.findings("unreadable"))


@pytest.mark.parametrize(("cell", "value"), [("~100 psi", 100), ("100 psi?", 100), ("<100 psi", 100), ("90-110 psi", 100)])
def test_doubted_numbers_are_used_and_doubted(cell, value):
    p = Parsed("operating_pressure", [cell])
    assert p.values[0] == pytest.approx(value * PSI)
    assert [f.severity for f in p.findings("written_loosely")] == [Severity.DOUBTS]


def test_a_class_name_is_no_rating():
    p = Parsed("stated_rating", ["150#", "Class 150", "150 lb", "160 psi"])
    assert np.isnan(p.values[:3]).all() and p.values[3] == pytest.approx(160 * PSI)
    assert {"class name" in f.problem for f in p.findings("unreadable")} == {True}


def test_two_currencies_are_a_doubt():
    assert "currencies" in Parsed("consequence_cost", ["$85,000", "€9 000"]).codes
    assert "currencies" not in Parsed("consequence_cost", ["$85,000", "USD 9 000", 500]).codes


def test_a_date_in_a_number_column_is_named_as_a_likely_fraction():
    p = Parsed("bolt_diameter", [datetime.datetime(2024, 7, 8), "7/8"])
    assert np.isnan(p.values[0]) and "fraction" in p.findings("unreadable")[0].problem


# Commas


def test_a_decimal_comma_is_decided_for_the_column():
    p = Parsed("pipe_outside_diameter", ["12,75", "10,750", "8,625"], unit="in")
    np.testing.assert_allclose(p.values, np.array([12.75, 10.75, 8.625]) * IN)
    assert not p.ledger.findings


def test_a_lone_comma_is_settled_by_what_is_possible():
    p = Parsed("pipe_outside_diameter", ["10,750", "8,625"], unit="in")
    np.testing.assert_allclose(p.values, np.array([10.75, 8.625]) * IN)
    assert [f.severity for f in p.findings("comma_read_as_decimal")] == [Severity.NOTES]
    p = Parsed("test_pressure", ["1,500", "1,600"], unit="kPa")
    np.testing.assert_allclose(p.values, [1.5e6, 1.6e6])


def test_commas_that_could_be_either_are_doubts():
    p = Parsed("chainage", ["1,240", "2,380"], unit="m")
    np.testing.assert_allclose(p.values, [1240, 2380])
    assert [f.severity for f in p.findings("comma_read_as_thousands")] == [Severity.DOUBTS]
    p = Parsed("chainage", ["1,240", "2,38", "2.4"], unit="m")
    np.testing.assert_allclose(p.values, [1240, 2.38, 2.4])
    assert "both with commas and with dots" in p.findings("comma_read_as_thousands")[0].problem


def test_dots_in_the_column_make_a_lone_comma_a_group():
    p = Parsed("chainage", ["1,240", "380.5"], unit="m")
    np.testing.assert_allclose(p.values, [1240, 380.5])
    assert [f.severity for f in p.findings("comma_read_as_thousands")] == [Severity.NOTES]


def test_a_decimal_comma_column_reads_dots_as_groups():
    np.testing.assert_allclose(Parsed("chainage", ["1.240", "380,5"], unit="m").values, [1240, 380.5])


# Counts and numbers


def test_counts():
    p = Parsed("bolt_count", [12, 12.0, "16", "12 bolts", 12.5, "twelve", 1])
    np.testing.assert_array_equal(p.values, [12, 12, 16, 12, np.nan, np.nan, np.nan])
    assert p.rows("not_whole") == [4] and p.rows("unreadable") == [5] and p.rows("out_of_range") == [6]


def test_dimension_ratios():
    np.testing.assert_allclose(Parsed("dimension_ratio", ["DR 11", "SDR17,6", 17, "DR 11 / PN16"]).values, [11, 17.6, 17, 11])


# Dates

DATES = [
    ("1998", 1998.0), ("1998-05-12", decimal_year(1998, 5, 12)), ("1998-05", decimal_year(1998, 5, 15)), ("12 May 1998", decimal_year(1998, 5, 12)), ("May 12, 1998", decimal_year(1998, 5, 12)), ("12-May-98", decimal_year(1998, 5, 12)),
    ("May 1998", decimal_year(1998, 5, 15)), ("Sept 2004", decimal_year(2004, 9, 15)), ("12th of May 1998", decimal_year(1998, 5, 12)), ("31/12/1998", decimal_year(1998, 12, 31)), ("12/31/1998", decimal_year(1998, 12, 31)), ("31.12.98", decimal_year(1998, 12, 31)),
    ("19980512", decimal_year(1998, 5, 12)), ("1998-05-12T10:30:00Z", decimal_year(1998, 5, 12)), ("1998/05/12 10:30", decimal_year(1998, 5, 12)), ("05/1998", decimal_year(1998, 5, 15)), ("１９９８", 1998.0),
]  # fmt: skip
LOOSE = [
    ("c. 1995", 1995.0, "approximate"), ("ca 1995", 1995.0, "approximate"), ("~1995", 1995.0, "approximate"), ("before 1990", 1990.0, "approximate"), ("1995?", 1995.0, "question mark"), ("1990s", 1995.0, "decade"), ("1990's", 1995.0, "decade"), ("early 1990s", 1992.0, "decade"), ("90s", 1995.0, "decade"),
    ("Spring 2004", 2004.29, "season"), ("1998-2000", 1999.0, "span"), ("1998/99", 1998.5, "span"), ("mid 1995", 1995.5, "part of a year"), ("Q2 2004", 2004.375, "part of a year"), ("35927", decimal_year(1998, 5, 12), "day number"),
]  # fmt: skip


@pytest.mark.parametrize(("text", "year"), DATES, ids=[d[0] for d in DATES])
def test_dates(text, year):
    found, doubt, error = read_date(text)
    assert (doubt, error) == ("", "") and found == pytest.approx(year, abs=1e-9)


@pytest.mark.parametrize(("text", "year", "word"), LOOSE, ids=[d[0] for d in LOOSE])
def test_loose_dates_are_used_and_doubted(text, year, word):
    found, doubt, error = read_date(text)
    assert error == "" and word in doubt and found == pytest.approx(year, abs=1e-9)


@pytest.mark.parametrize("text", ["31 Feb 2018", "2018-13-01", "99/99/1999", "0000-01-01", "12/05", "soon", "98", "1.5", "3/4", "1998 psi", "9" * 40, "31/02/2018", "May", "2999"])
def test_dates_that_are_none(text):
    found, _, error = read_date(text)
    assert error and np.isnan(found)


def test_the_order_of_day_and_month_is_shown_by_the_column():
    assert Parsed("year_installed", ["05/12/1998", "31/12/1998"]).values[0] == pytest.approx(decimal_year(1998, 12, 5))
    assert Parsed("year_installed", ["05/12/1998", "12/31/1998"]).values[0] == pytest.approx(decimal_year(1998, 5, 12))


def test_the_order_of_day_and_month_is_shown_by_another_column():
    other = [("inspection_date", "Inspected", "", ["12/31/2020"])]
    p = Parsed("year_installed", ["05/12/1998"], others=other)
    assert p.values[0] == pytest.approx(decimal_year(1998, 5, 12))
    assert "month, day, year" in p.findings("day_or_month")[0].action


def test_an_open_order_is_a_finding():
    p = Parsed("year_installed", ["05/12/1998", "1998", "06/06/1998"])
    assert p.rows("day_or_month") == [0]
    assert p.values[0] == pytest.approx(decimal_year(1998, 12, 5))
    assert Parsed("leak_dates", ["05/12/1998; 1999"]).rows("day_or_month") == [0]


def test_numbers_in_date_columns():
    p = Parsed("year_installed", pd.Series([1998.0, 35927.0, 19980512.0, 3.0, np.nan, np.inf]))
    np.testing.assert_allclose(p.values[:3], [1998, decimal_year(1998, 5, 12), decimal_year(1998, 5, 12)])
    assert np.isnan(p.values[3:]).all()
    assert p.rows("day_numbers") == [1] and p.rows("unreadable") == [3, 5]


def test_date_objects_and_columns():
    day = datetime.datetime(1998, 5, 12, 10, 30)
    assert Parsed("year_installed", [day, "1999"]).values == pytest.approx([decimal_year(1998, 5, 12), 1999.0])
    p = Parsed("year_installed", pd.Series(pd.to_datetime(["1998-05-12", None])))
    assert p.values[0] == pytest.approx(decimal_year(1998, 5, 12)) and np.isnan(p.values[1])


def test_lists_of_dates():
    p = Parsed("leak_dates", ["2009-03-02; 2017-11-20", "2017, 2009", 2009, None, "n/a", "2009; soon", "May 12, 1998; 1999"])
    assert p.values[0] == pytest.approx((decimal_year(2009, 3, 2), decimal_year(2017, 11, 20)))
    assert p.values[1] == (2009.0, 2017.0) and p.values[2] == (2009.0,)
    assert p.values[3] is None and p.values[4] is None
    assert p.values[5] == (2009.0,) and p.rows("unreadable") == [5]
    assert len(p.values[6]) == 2
    assert p.origin.tolist() == [1, 1, 1, 0, 0, 1, 1]


def test_leap_years_and_middles():
    assert decimal_year(2000, 7, 1) == pytest.approx(2000 + 182 / 366)
    assert decimal_year(1999, 12, 31) == pytest.approx(1999 + 364 / 365)


# Choices

CHOICES = [
    ("ring_class", "Class D", "D"), ("ring_class", "cl. d", "D"), ("ring_class", "150#", "150"), ("ring_class", "PN 16", "PN16"), ("pe_material", "HDPE 3408", "PE3408"), ("pe_material", "HDPE PE100 SDR11", "PE100"), ("bolt_grade", "A193-B7", "ASTM A193 B7"), ("bolt_grade", "grade 8,8", "ISO 898-1 8.8"), ("bolt_grade", "Gr. 5", "SAE J429 grade 5"),
    ("gasket", "none", "none"), ("gasket", "No gasket", "none"), ("ring_material", "ductle iron", "ductile iron"), ("ring_material", "stainless 316L", "ASTM A240 304L / 316L"), ("mating_side", "buterfly valve", "valve"), ("restraint", "not restrained", "free"), ("restraint", "Yes", "restrained"), ("ring_standard", "AWWA C207-18", "AWWA C207"), ("setting", "ｃｈａｍｂｅｒ", "chamber"), ("ring_class", "D?", "D"),
]  # fmt: skip
NO_CHOICES = [
    ("ring_class", "Class C"), ("ring_class", "Table D"), ("ring_class", "Classe D"), ("ring_class", "300"), ("restraint", "yes/no"), ("bolt_lubrication", "never greased"), ("pe_material", "PE4170"), ("pe_material", "PE80/PE100"), ("pe_material", "HDPE"), ("ring_material", "A516 Gr 60"), ("ring_material", "metal"), ("mating_side", "HDPE to steel flange"),
    ("bolt_grade", "B7M"), ("bolt_grade", "A194 2H"), ("gasket", "yes"), ("setting", "see dwg 14"), ("setting", "x" * 5000),
]  # fmt: skip


@pytest.mark.parametrize(("attribute", "text", "choice"), CHOICES)
def test_choices(attribute, text, choice):
    found, _, error = read_category(text, inventory_attributes()[attribute])
    assert (found, error) == (choice, "")


@pytest.mark.parametrize(("attribute", "text"), NO_CHOICES)
def test_texts_that_are_no_choice(attribute, text):
    found, _, error = read_category(text, inventory_attributes()[attribute])
    assert found is None and error


def test_every_choice_and_synonym_is_read_as_itself():
    for attribute in inventory_attributes().values():
        for choice, synonyms in attribute.choices.items():
            assert read_category(choice, attribute) == (choice, "", "")
            for text in synonyms:
                for written in (text, text.upper(), f" {text} "):
                    assert read_category(written, attribute) == (choice, "", ""), (attribute.name, text)


def test_unknown_choices_list_what_is_accepted():
    p = Parsed("setting", ["chamber", "see dwg 14", None, "n/a", "chambre"])
    assert p.values.tolist() == ["chamber", None, None, None, "chamber"]
    (said,) = p.findings("not_a_choice")
    assert said.values.tolist() == ["see dwg 14"] and "accepted: buried, chamber, above ground" in said.problem
    assert p.rows("read_by_likeness") == [4]
    assert p.origin.tolist() == [Origin.READ, 0, 0, 0, Origin.CONVERTED]


def test_a_missing_word_is_a_gap_and_not_a_no():
    for attribute in ("gasket", "restraint", "bolt_lubrication"):
        assert Parsed(attribute, ["n/a"]).values[0] is None


def test_numbers_and_booleans_as_choices():
    assert Parsed("ring_class", pd.Series([150.0, 125.0])).values.tolist() == ["150", "125"]
    assert Parsed("bolt_grade", pd.Series([8.8, 4.6])).values.tolist() == ["ISO 898-1 8.8", "ISO 898-1 4.6"]
    assert Parsed("restraint", pd.Series([True, False])).values.tolist() == ["restrained", "free"]


# Names and text


def test_names_are_kept_exactly_but_for_outer_spaces_and_zero_decimals():
    p = Parsed("joint_id", [417.0, "00417", " N-0417 ", "a  b", 12345678901234567, "x", None, "  ", "n/a", 1e15])
    assert p.values.tolist() == ["417", "00417", "N-0417", "a  b", "12345678901234567", "x", None, None, None, "1000000000000000"]
    assert Parsed("joint_id", pd.Series([1, 2, 10**17 + 1])).values.tolist() == ["1", "2", "100000000000000001"]
    assert Parsed("joint_id", pd.Series([1.0, np.nan])).values.tolist() == ["1", None]
    assert Parsed("zone", pd.Series([3.0, 4.0])).values.tolist() == ["3", "4"]


def test_hostile_text_stays_text():
    for text in ("=HYPERLINK(1)", "<b>x</b>", "../../etc", "\u202eabc", "a\x00b"):
        assert Parsed("joint_id", [text]).values[0] == text


def test_as_written_gives_the_cell_back():
    p = Parsed("operating_pressure", ["100 psi", 7.0, None, datetime.date(2020, 1, 2)])
    assert p.all.as_written("operating_pressure").tolist() == ["100 psi", "7", None, "2020-01-02"]
    assert p.all.as_written("zone").tolist() == [None] * 4


# All kinds of columns


@pytest.mark.parametrize("dtype", ["str", "string", "category", "object", "Int64", "Float64", "float32", "int16"])
def test_every_dtype_of_pandas(dtype):
    number = dtype in ("Int64", "Float64", "float32", "int16")
    cells = pd.Series([12, 16], dtype=dtype) if number else pd.Series(["12", "16"], dtype=dtype)
    np.testing.assert_allclose(Parsed("nominal_size", cells, unit="in").values, [12 * IN, 16 * IN])
    assert Parsed("bolt_count", cells).values.tolist() == [12, 16]
    assert Parsed("joint_id", cells).values.tolist() == ["12", "16"]


def test_text_of_plain_numbers_is_read_like_numbers():
    """Two routes: a column of text read at once, and the same with one cell that needs a closer look."""
    texts = ["12.5", "-3", "+7.25", "0012", None, "100"]
    at_once = Parsed("chainage", pd.Series(texts, dtype="str"), unit="ft")
    closer = Parsed("chainage", pd.Series([*texts, "5 ft"], dtype="str"), unit="ft")
    objects = Parsed("chainage", [float(t) if t else None for t in texts], unit="ft")
    np.testing.assert_array_equal(at_once.values, objects.values)
    np.testing.assert_array_equal(closer.values[:-1], objects.values)
    assert Parsed("year_installed", pd.Series(["1998", "2004"], dtype="str")).values.tolist() == [1998, 2004]
    assert Parsed("joint_id", pd.Series(["0012", "1.0"], dtype="str")).values.tolist() == ["0012", "1.0"]
    assert Parsed("ring_class", pd.Series(["150", None], dtype="str")).values.tolist() == ["150", None]


def test_empty_cells_of_every_kind():
    for empty in (None, np.nan, pd.NA, pd.NaT, ""):
        for attribute in ("nominal_size", "bolt_count", "year_installed", "leak_dates", "gasket", "zone", "joint_id"):
            p = Parsed(attribute, [empty, empty])
            assert p.origin.tolist() == [0, 0], (attribute, empty)
    assert Parsed("nominal_size", pd.Series([pd.NA, 12], dtype="Int64"), unit="in").values[1] == pytest.approx(12 * IN)
    assert Parsed("nominal_size", []).values.tolist() == []


def test_lists_and_other_things_in_cells():
    for attribute in inventory_attributes():
        Parsed(attribute, [[1, 2], {"a": 1}, (3,), b"x", 1 + 2j, datetime.timedelta(1), 10**400, True, float("inf")])


CELLS = st.one_of(st.none(), st.integers(), st.floats(), st.text(max_size=20), st.booleans(), st.dates(), st.datetimes(), st.text("0123456789.,-/ psibar'\"", max_size=12))


@given(st.sampled_from(sorted(inventory_attributes())), st.lists(CELLS, max_size=10), st.booleans())
@settings(max_examples=400, deadline=None)
def test_random_cells_never_raise_and_rows_are_kept(name, cells, with_unit):
    attribute = inventory_attributes()[name]
    p = Parsed(name, cells, unit=attribute.us if with_unit and attribute.dimension else "")
    assert len(p.values) == len(p.origin) == len(cells)
    missing = np.isnan(p.values) if p.values.dtype == float else np.array([v is None for v in p.values], dtype=bool)
    np.testing.assert_array_equal(missing, p.origin == Origin.MISSING)
    said = {int(i) for f in p.ledger.findings for i in f.positions}
    for i, cell in enumerate(cells):
        if missing[i] and i not in said:  # no number goes missing without a word
            empty = cell is None or cell != cell or not str(cell).strip("\u200b \n\t") or Parsed("zone", [cell]).values[0] is None
            assert empty or attribute.kind in ("text", "id"), (cell, p.codes)
    if attribute.possible and p.values.dtype == float:
        low, high = attribute.possible
        known = p.values[~missing]
        assert ((known >= low * (1 - 1e-8) - 1e-9) & (known <= high * (1 + 1e-8) + 1e-9)).all()


@given(st.lists(st.floats(0.05, 1.6), min_size=1, max_size=8))
@settings(max_examples=60, deadline=None)
def test_the_unit_of_the_heading_rescales_and_nothing_else(metres):
    base = Parsed("nominal_size", pd.Series(metres), unit="m").values
    for unit in ("mm", "in", "ft"):
        scaled = np.array(metres) / float(from_unit(1.0, unit, "length"))
        np.testing.assert_allclose(Parsed("nominal_size", pd.Series(scaled), unit=unit).values, base, rtol=1e-12)


def test_many_different_complaints_stay_few_findings_and_lose_no_row():
    n = 5_000
    start = time.perf_counter()
    p = Parsed("operating_pressure", [f"{i} foo{i}" for i in range(n)])
    q = Parsed("ring_material", [f"thing {i} of some kind" for i in range(n)])
    print(f"{time.perf_counter() - start:.1f} s")
    assert len(p.ledger.findings) <= 31 and p.rows("unreadable") == list(range(n))
    assert q.rows("not_a_choice") == list(range(n))
