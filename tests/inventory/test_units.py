"""Quantities as people write them, and back."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from screener.columns import inventory_attributes
from screener.units import (
    UNITS,
    accepted,
    find_unit,
    from_unit,
    is_missing_word,
    number_of,
    read_quantity,
    separators_in,
    show,
    tidy,
    to_unit,
)

WRITTEN = {
    "pressure": [
        ("150 psi", 150, "psi"), ("150psi", 150, "psi"), ("150 PSIG", 150, "psi"), ("150 p.s.i.", 150, "psi"), ("150 lbf/in²", 150, "psi"), ("10 bar", 10, "bar"), ("10 bar(g)", 10, "bar"), ("10,3 barg", 10.3, "bar"),
        ("1 500 kPa", 1500, "kPa"), ("1,500 kPa", 1500, "kPa"), ("1'500 kPa", 1500, "kPa"), ("1.5 MPa", 1.5, "MPa"), ("1.234,5 kPa", 1234.5, "kPa"), ("1,234.5 kPa", 1234.5, "kPa"),
        ("PC 200", 200, "psi"), ("PC200", 200, "psi"), ("PN16", 16, "bar"), ("PN 16", 16, "bar"), ("100 m head", 100, "m head"), ("100 mH2O", 100, "m head"), ("35 m", 35, "m head"), ("231 ft head", 231, "ft head"), ("7 kg/cm2", 7, "kgf/cm2"),
        ("１５０ ｐｓｉ", 150, "psi"), ("150\u00a0psi", 150, "psi"), ("150\u2009psi", 150, "psi"), ("150\u200b psi", 150, "psi"), ("−95 psi", -95, "psi"), ("١٥٠ psi", 150, "psi"),
        ("150 psi / 10.3 bar", 150, "psi"), ("10.3 bar (150 psi)", 10.3, "bar"),
    ],
    "length": [
        ('12"', 12, "in"), ("12 in", 12, "in"), ("12in.", 12, "in"), ("12-inch", 12, "in"), ("12″", 12, "in"), ("12”", 12, "in"), ("12''", 12, "in"), ('12" IPS', 12, "in"), ("300 mm", 300, "mm"), ("DN300", 300, "mm"), ("DN 300", 300, "mm"), ("NPS 12", 12, "in"), ("Ø315", 315, None), ("Ø 315 mm", 315, "mm"), ("OD 315", 315, None),
        ("7/8", 0.875, "in"), ("1-1/4", 1.25, "in"), ('1 1/4"', 1.25, "in"), ("1.1/4", 1.25, "in"), ("13/16 in", 0.8125, "in"), ('1¼"', 1.25, "in"), ("1 ¼", 1.25, "in"), ("¾ in", 0.75, "in"), ("3⁄4 in", 0.75, "in"), ("-1/4 in", -0.25, "in"),
        ("M20", 20, "mm"), ("M 20", 20, "mm"), ("M20x2.5", 20, "mm"), ("M20 × 80", 20, "mm"), ('3/4" UNC', 0.75, "in"), ("3/4 UNC", 0.75, "in"), ('3/4"-10 UNC', 0.75, "in"), ("7/8-9 UNC", 0.875, "in"),
        ("3'-6\"", 42, "in"), ("3 ft 6 in", 42, "in"), ("1' 6", 18, "in"), ("20'", 20, "ft"), ("12+40", 1240, "ft"), ("1+240", 1240, "m"), ("12,75", 12.75, None), ("0,875", 0.875, None), ('DN 300/12"', 300, "mm"), ("250 mil", 250, "mil"),
    ],
    "torque": [("110 ft-lb", 110, "ft lb"), ("110 ft·lb", 110, "ft lb"), ("110 lbf.ft", 110, "ft lb"), ("110 lb-ft", 110, "ft lb"), ("150 Nm", 150, "N m"), ("150 N·m", 150, "N m"), ("150 N m", 150, "N m"), ("1320 in-lb", 1320, "in lb"), ("15 kgf m", 15, "kgf m")],
    "temperature": [("64 F", 64, "F"), ("18 °C", 18, "C"), ("18 ºC", 18, "C"), ("18℃", 18, "C"), ("18 degrees C", 18, "C"), ("-5 C", -5, "C"), ("291 K", 291, "K")],
    "temperature_difference": [("12 K", 12, "K"), ("20 F", 20, "F difference"), ("12 deg C", 12, "K")],
    "money": [("85 000", 85000, None), ("$85,000", 85000, "money"), ("€ 85.000,00", 85000, "money"), ("£85k", 85000, "money"), ("$1.2 million", 1.2e6, "money"), ("85 000 EUR", 85000, "money")],
    "angle": [("1.2 deg", 1.2, "deg"), ("1.2°", 1.2, "deg"), ("0.02 rad", 0.02, "rad"), ("1°12'", 1.2, "deg")],
    "stress": [("36 ksi", 36, "ksi"), ("250 N/mm²", 250, "MPa"), ("36,000 psi", 36000, "psi")],
    "": [("DR 11", 11, None), ("SDR11", 11, None), ("SDR 17.6", 17.6, None), ("SDR17,6", 17.6, None), ("DR-11", 11, None), ("DR 11 / PN16", 11, None), ("12 bolts", 12, None), ("12 no.", 12, None), ("48 per day", 48, None), ("1,200", 1200, None)],
}  # fmt: skip
CASES = [(dimension, *case) for dimension, cases in WRITTEN.items() for case in cases]


@pytest.mark.parametrize(("dimension", "text", "number", "unit"), CASES, ids=[f"{c[0] or 'number'}: {c[1]}" for c in CASES])
def test_written_quantities(dimension, text, number, unit):
    read = read_quantity(text, dimension)
    assert (read.error, read.doubt) == ("", "")
    assert read.number == pytest.approx(number, rel=1e-12)
    assert read.unit == unit


DOUBTED = [
    ("~150 psi", 150, "approximate"), ("150?", 150, "question mark"), ("? 150 psi", 150, "question mark"), ("<10 bar", 10, "bound"), ("≤10 bar", 10, "bound"), ("max 150 psi", 150, "bound"), ("150+", 150, "bound"),
    ("100-120", 110, "range"), ("100 – 120 psi", 110, "range"), ("100 psi to 120 psi", 110, "range"), ("ca 150 psi", 150, "approximate"), ("150 psi (approx)", 150, "approximate"), ("150#", 150, "pounds"), ("150 lb", 150, "pounds"),
]  # fmt: skip


@pytest.mark.parametrize(("text", "number", "word"), DOUBTED)
def test_doubted_quantities_are_used_and_said(text, number, word):
    read = read_quantity(text, "pressure")
    assert read.error == ""
    assert read.number == number
    assert word in read.doubt


REFUSED = [
    ("12 34", "length"), ("1 0 0 psi", "pressure"), ("12 x 8", "length"), ('12"x8"', "length"), ("11/4", "length"), ("1/0", "length"), ("3/7 in", "length"), ("12/05/1998", "length"), ("150 psi", "length"), ("64 F", "pressure"), ("DN300", "pressure"), ("PN16", "length"), ("$5", "length"),
    ("1O8 psi", "pressure"), ("2O mm", "length"), ("nan", "pressure"), ("inf", "pressure"), ("1e400", "pressure"), ("1,5,0", "pressure"), ("tight", "torque"), ("#REF!", "money"), ("=1+1", "length"), ("__import__('os')", "length"), ("150 psi / 20 bar", "pressure"),
    ("100%", ""), ("150/160", "pressure"), ("100 psi to 80 psi", "pressure"), ("10 bar - 150 psi", "pressure"), ("", "length"), ("9" * 5000, "length"),
]  # fmt: skip


@pytest.mark.parametrize(("text", "dimension"), REFUSED, ids=[c[0][:20] for c in REFUSED])
def test_refused_quantities_have_words_and_no_number(text, dimension):
    read = read_quantity(text, dimension)
    assert read.error and math.isnan(read.number)


def test_a_wrong_dimension_is_named():
    assert read_quantity("150 psi", "length").error == "a unit of pressure, not of length"


def test_absolute_pressure_loses_one_atmosphere():
    for text in ("150 psia", "150 psi abs", "150 psi(a)"):
        read = read_quantity(text, "pressure")
        assert from_unit(read.number, read.unit) == pytest.approx(from_unit(150, "psi") - 101325.0, rel=1e-12), text
        assert "absolute" in read.remark


@pytest.mark.parametrize("word", ["", "-", "–", "n/a", "N/A", "unknown", "TBC", "tbd", "?", "None", "#N/A", "null"])
def test_missing_words(word):
    assert is_missing_word(word)


@pytest.mark.parametrize("word", ["0", "none known to be tight", "PE", "no", "nan psi"])
def test_words_that_are_not_missing(word):
    assert not is_missing_word(word)


@pytest.mark.parametrize(
    ("text", "comma", "value"),
    [("12,750", None, 12750), ("12,750", True, 12.75), ("12,750", False, 12750), ("12,75", False, 12.75), ("1.500", None, 1.5), ("1.500", True, 1500), ("0.875", True, 0.875), ("0,875", False, 0.875), ("1,234,567", True, 1234567), ("1.234.567", None, 1234567), ("1,23,4", None, None)],
)
def test_commas_and_dots(text, comma, value):
    assert number_of(text, comma) == value


def test_separators_seen_in_a_text():
    assert separators_in("12,75 mm").decimal_comma
    assert separators_in("12.75 mm").decimal_dot
    assert separators_in("1.234,5").decimal_comma
    assert separators_in("12,750").open_comma and not separators_in("12,750").decimal_comma
    assert not separators_in("1.500").decimal_dot  # could group thousands
    assert separators_in("tight") == separators_in("")


def test_what_is_accepted_names_every_unit():
    for dimension in ("length", "pressure", "torque"):
        for unit in UNITS[dimension]:
            assert unit in accepted(dimension)


def test_every_unit_and_machine_suffix_of_the_dictionary_is_known():
    for attribute in inventory_attributes().values():
        for unit in {attribute.unit, attribute.us, attribute.metric} - {""}:
            assert find_unit(unit, attribute.dimension), (attribute.name, unit)
            assert np.isfinite(to_unit(1.0, unit, "" if unit == attribute.unit else attribute.dimension))


def test_every_unit_is_spelled_as_it_is_shown():
    for dimension, units in UNITS.items():
        for unit in units:
            if dimension == "stress" and unit in ("m head", "ft head", "mbar", "atm"):
                continue
            if dimension == "temperature_difference" and unit == "C difference":
                continue
            assert find_unit(unit, dimension) == unit


SHOWN = [(d, u) for d, units in UNITS.items() if d not in ("force", "stress") for u in units if u != "C difference"]


@given(st.sampled_from(SHOWN), st.floats(1e-3, 1e6), st.sampled_from([1.0, -1.0]))
@settings(max_examples=300, deadline=None)
def test_what_is_shown_is_read_back(of, size, sign):
    dimension, unit = of
    si = float(from_unit(sign * size, unit, dimension))
    read = read_quantity(show(si, dimension, unit, digits=6), dimension)
    assert read.error == "" and read.doubt == ""
    back = float(from_unit(read.number, read.unit or unit, dimension))
    step = float(from_unit(1.0, unit, dimension)) - float(from_unit(0.0, unit, dimension))
    assert back == pytest.approx(si, rel=2e-5, abs=2e-6 * step)


def test_unknown_is_shown_as_unknown_and_read_as_missing():
    assert is_missing_word(show(math.nan, "pressure", "psi"))


@given(st.text(max_size=60), st.sampled_from([*UNITS, ""]), st.sampled_from([None, True, False]))
@settings(max_examples=500, deadline=None)
def test_random_text_never_raises(text, dimension, comma):
    read = read_quantity(text, dimension, comma)
    assert bool(read.error) == math.isnan(read.number)
    separators_in(text)
    is_missing_word(text)
    assert tidy(tidy(text)) == tidy(text)


ALPHABET = "0123456789 .,-+/'\"()xX#$€%°~<>?eEmMnNpPsSiIbBaArRdDfFtTkKcC½¼²"


@given(st.text(ALPHABET, max_size=24), st.sampled_from([*UNITS, ""]))
@settings(max_examples=1500, deadline=None)
def test_near_quantities_never_raise(text, dimension):
    read = read_quantity(text, dimension)
    assert bool(read.error) == math.isnan(read.number)
    assert read.unit is None or read.unit in UNITS[dimension]


@given(st.integers(0, 10**6), st.sampled_from(["psi", "bar", "kPa"]), st.sampled_from(["", " ", "\u00a0", "  "]))
@settings(max_examples=100, deadline=None)
def test_grouping_and_spaces_change_nothing(number, unit, gap):
    plain = read_quantity(f"{number} {unit}", "pressure")
    for grouped in (f"{number:,}", f"{number:,}".replace(",", " "), f"{number:,}".replace(",", "'")):
        assert read_quantity(f"{grouped}{gap}{unit}", "pressure") == plain
