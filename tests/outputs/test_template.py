"""The blank workbook: headings that match themselves, lists, and examples that read back without a doubt."""

import openpyxl
import pytest

from screener.cli import main
from screener.columns import inventory_attributes
from screener.inventory.match_headers import match_headers
from screener.inventory.open_file import open_table
from screener.inventory.parse_cells import parse_cells
from screener.inventory.read import read_inventory
from screener.outputs.template import heading_of, write_template
from screener.records import InputError, Ledger, Severity
from screener.units import from_unit, read_quantity

SERIOUS = (Severity.BLOCKS, Severity.DOUBTS)
UNITS = ("us", "metric")


@pytest.fixture(params=UNITS)
def template(request, tmp_path):
    path = tmp_path / "blank.xlsx"
    write_template(path, request.param)
    return path, request.param


def fill(path, rows):
    """Type rows of {attribute: cell} into the template."""
    book = openpyxl.load_workbook(path)
    sheet = book["Inventory"]
    for r, row in enumerate(rows, start=2):
        for k, name in enumerate(inventory_attributes(), start=1):
            sheet.cell(r, k, row.get(name))
    book.save(path)


def test_sheets_and_headings(template):
    path, units = template
    book = openpyxl.load_workbook(path)
    assert book.sheetnames == ["Inventory", "Dictionary", "Lists"]
    headings = [cell.value for cell in book["Inventory"][1]]
    assert headings == [heading_of(a, units) for a in inventory_attributes().values()]
    assert ("Operating pressure (psi)" if units == "us" else "Operating pressure (bar)") in headings
    assert book["Inventory"].max_row == 1, "blank means blank"


def test_every_heading_is_understood_as_itself(template):
    path, units = template
    fill(path, [{name: a.example for name, a in inventory_attributes().items()}])
    table = open_table(path, ledger=Ledger())
    match = match_headers(table, None, Ledger())
    for k, (name, attribute) in enumerate(inventory_attributes().items()):
        assert match.columns[name] == k
        if attribute.dimension and attribute.dimension != "money":
            assert match.matched[k].unit == attribute.shown_unit(units), name


def test_examples_read_back_without_a_doubt(template):
    path, _ = template
    attributes = inventory_attributes()
    fill(path, [{name: a.example for name, a in attributes.items()}])
    ledger = Ledger()
    table = open_table(path, ledger=ledger)
    assert table.sheet == "Inventory"
    parsed = parse_cells(table, match_headers(table, None, ledger), ledger)
    assert [(f.code, f.attribute, f.problem) for f in ledger.findings if f.severity in SERIOUS] == []
    for name, attribute in attributes.items():
        value = parsed.values[name][0]
        assert value is not None and value == value, f"{name}: {attribute.example!r} is not read"
        if attribute.kind == "category":
            assert value in attribute.choices
        read = read_quantity(attribute.example, attribute.dimension) if attribute.kind == "quantity" else None
        if read and read.unit:
            assert value == pytest.approx(float(from_unit(read.number, read.unit, attribute.dimension)))


def test_a_bare_number_is_in_the_unit_of_its_heading(template):
    path, units = template
    fill(path, [{"joint_id": "A1", "nominal_size": 12 if units == "us" else 315, "operating_pressure": 100 if units == "us" else 7, "temperature": 64 if units == "us" else 18}])
    ledger = Ledger()
    table = open_table(path, ledger=ledger)
    values = parse_cells(table, match_headers(table, None, ledger), ledger).values
    assert values["nominal_size"][0] == pytest.approx(0.3048 if units == "us" else 0.315)
    assert values["operating_pressure"][0] == pytest.approx(689475.7 if units == "us" else 7e5)
    assert values["temperature"][0] == pytest.approx(17.7778 if units == "us" else 18.0, abs=1e-4)
    assert not [f for f in ledger.findings if f.severity in SERIOUS]


def test_the_example_joint_can_be_ranked(template):
    path, _ = template
    fill(path, [{name: a.example for name, a in inventory_attributes().items()}])
    inventory = read_inventory(path)
    assert list(inventory.reason) == [""]


def test_every_category_has_a_list_with_its_choices(template):
    path, _ = template
    book = openpyxl.load_workbook(path)
    lists = {k: [c.value for c in column if c.value] for k, column in enumerate(book["Lists"].columns)}
    names = [n for n, a in inventory_attributes().items() if a.kind == "category"]
    for k, name in enumerate(names):
        assert lists[k][1:] == list(inventory_attributes()[name].choices)
    rules = book["Inventory"].data_validations.dataValidation
    assert len(rules) == len(names)
    for rule in rules:
        column, last = rule.formula1.removeprefix("Lists!$").split("$")[0], int(rule.formula1.rsplit("$", 1)[1])
        cells = [book["Lists"][f"{column}{r}"].value for r in range(2, last + 1)]
        label = book["Lists"][f"{column}1"].value.removeprefix("Choices: ")
        assert cells == next(list(a.choices) for a in inventory_attributes().values() if a.label == label)


def test_the_dictionary_names_every_attribute_and_says_that_examples_are_invented(template):
    path, units = template
    sheet = openpyxl.load_workbook(path)["Dictionary"]
    rows = {str(row[0].value).removesuffix(" (needed)"): [c.value for c in row] for row in sheet.iter_rows()}
    for attribute in inventory_attributes().values():
        assert attribute.meaning == rows[attribute.label][1]
        assert attribute.example == rows[attribute.label][6]
    text = " ".join(str(v) for row in rows.values() for v in row)
    assert "invented" in text and "Screening, not design" in text


def test_a_blank_template_is_refused_in_one_sentence(template):
    with pytest.raises(InputError, match="no rows below"):
        read_inventory(template[0])


@pytest.mark.parametrize("units", UNITS)
def test_equal_templates_are_equal_files(tmp_path, units):
    for name in ("a.xlsx", "b.xlsx"):
        write_template(tmp_path / name, units)
    assert (tmp_path / "a.xlsx").read_bytes() == (tmp_path / "b.xlsx").read_bytes()


def test_the_command_writes_it(tmp_path, capsys):
    path = tmp_path / "blank.xlsx"
    assert main(["template", str(path), "--units", "metric"]) == 0
    assert path.exists()
    assert main(["template", str(tmp_path / "no" / "blank.xlsx")]) == 2
    assert "can't be written" in capsys.readouterr().err
