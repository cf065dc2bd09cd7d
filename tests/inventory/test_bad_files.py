"""Every bad file gets one clear sentence or findings, never a traceback, and nothing runs."""

import io
import subprocess
import sys
import zipfile

import geopandas
import openpyxl
import pandas as pd
import pytest
import shapely
import xlsxwriter

from screener import read_inventory
from screener.records import InputError

GOOD = "Joint,Size (in),DR,Max press. (psi)\nA1,12,11,100\nA2,24,17,80\n"


def refused(path, *words):
    with pytest.raises(InputError) as caught:
        read_inventory(path)
    message = str(caught.value)
    assert "\n" not in message and len(message) < 400
    assert path.name in message
    for word in words:
        assert word in message, message


def codes(inventory):
    return {batch.code for batch in inventory.ledger.findings}


def test_missing_file(tmp_path):
    refused(tmp_path / "no.xlsx", "no such file")


def test_folder(tmp_path):
    refused(tmp_path, "folder")


def test_empty_file(tmp_path):
    path = tmp_path / "a.csv"
    path.write_bytes(b"")
    refused(path, "empty")


def test_broken_zip(tmp_path):
    path = tmp_path / "a.xlsx"
    path.write_bytes(b"PK\x03\x04" + b"\x00" * 500)
    refused(path, "broken")


def test_truncated_workbook(tmp_path):
    whole = io.BytesIO()
    book = openpyxl.Workbook()
    book.active.append(["Joint", "Size"])
    book.save(whole)
    path = tmp_path / "a.xlsx"
    path.write_bytes(whole.getvalue()[: len(whole.getvalue()) // 2])
    refused(path, "broken")


def test_password_protected_workbook(tmp_path):
    path = tmp_path / "a.xlsx"
    path.write_bytes(b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + b"\x00" * 2000)
    refused(path, "password")


def test_text_renamed_xlsx(tmp_path):
    path = tmp_path / "a.xlsx"
    path.write_text(GOOD)
    refused(path, "call it .csv")


def test_picture(tmp_path):
    path = tmp_path / "a.csv"
    path.write_bytes(b"\x89PNG\r\n\x1a\n" + b"\x00" * 50)
    refused(path, "accepted are")


def test_wrong_extension_is_read_by_content(tmp_path):
    path = tmp_path / "a.txt"
    path.write_text(GOOD)
    assert len(read_inventory(path)) == 2


def test_archive_that_claims_two_gigabytes(tmp_path):
    path = tmp_path / "a.xlsx"
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("[Content_Types].xml", "<x/>")
        with archive.open("xl/worksheets/sheet1.xml", "w", force_zip64=True) as stream:
            for _ in range(130):
                stream.write(b"0" * 1_000_000)
    refused(path, "claims to unpack")


def test_zip_without_a_table(tmp_path):
    path = tmp_path / "a.zip"
    with zipfile.ZipFile(path, "w") as archive:
        archive.writestr("hello.txt", "hello")
    refused(path, "archive without")


def test_headings_only(tmp_path):
    path = tmp_path / "a.csv"
    path.write_text("Joint,Size (in)\n")
    refused(path, "no rows below")


def test_no_headings(tmp_path):
    path = tmp_path / "a.csv"
    path.write_text("1,2,3\n4,5,6\n")
    refused(path, "no row of headings")


def test_headings_that_mean_nothing(tmp_path):
    path = tmp_path / "a.csv"
    path.write_text("qwer,asdf\nzz,yy\n")
    refused(path, "no column is understood")


def test_ten_thousand_columns(tmp_path):
    path = tmp_path / "a.csv"
    path.write_text(",".join(f"c{i}" for i in range(10_000)) + "\n" + ",".join("1" for _ in range(10_000)) + "\n")
    refused(path, "10,000 columns")


def test_binary_called_csv(tmp_path):
    path = tmp_path / "a.csv"
    path.write_bytes(bytes(range(256)) * 40 + b"\x00" * 20_000)
    refused(path, "NUL")


def test_nul_bytes_are_left_out_and_said(tmp_path):
    path = tmp_path / "a.csv"
    path.write_bytes(GOOD.replace("A1", "A\x001").encode())
    inventory = read_inventory(path)
    assert "nul_bytes" in codes(inventory)
    assert list(inventory.joint_id) == ["A1", "A2"]


def test_ragged_rows_lose_nothing(tmp_path):
    path = tmp_path / "a.csv"
    path.write_text(GOOD + "A3,12\nA4,12,11,100,extra,more\n")
    inventory = read_inventory(path)
    assert len(inventory) == 4
    assert {"row_too_short", "row_too_long"} <= codes(inventory)
    long = next(b for b in inventory.ledger.findings if b.code == "row_too_long")
    assert inventory.raw.row_numbers[long.positions[0]] == 5
    assert long.values[0] == "extra | more"


def test_unclosed_quote_names_the_line(tmp_path):
    path = tmp_path / "a.csv"
    path.write_text('Joint,Size (in)\nA1,"12\n' + "x" * 2_000_000)
    refused(path, "line")


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "cp1252"])
def test_encodings(tmp_path, encoding):
    path = tmp_path / "a.csv"
    path.write_bytes("Joint,Zone,Size (in),Max press. (psi)\nÄ1,Süd,12,100\n".encode(encoding))
    inventory = read_inventory(path)
    assert inventory.joint_id[0] == "Ä1"
    assert inventory.gaps["zone"][0] == "Süd"
    assert ("encoding_guessed" in codes(inventory)) == (encoding == "cp1252")


@pytest.mark.parametrize("delimiter", [",", ";", "\t", "|"])
def test_delimiters_and_decimal_commas(tmp_path, delimiter):
    path = tmp_path / "a.csv"
    comma = "," if delimiter != "," else "."
    lines = [["Joint", "Pipe OD (in)", "Max press. (bar)"], ["A1", f"12{comma}75", f"6{comma}5"], ["A2", f"24{comma}0", f"7{comma}25"]]
    path.write_text("\n".join(delimiter.join(line) for line in lines))
    inventory = read_inventory(path)
    assert inventory.gaps["pipe_outside_diameter"][0] == pytest.approx(12.75 * 0.0254)
    assert inventory.gaps["operating_pressure"][0] == pytest.approx(6.5e5)


def test_titles_two_row_headings_merged_blank_rows_and_formulas(tmp_path):
    path = tmp_path / "a.xlsx"
    book = xlsxwriter.Workbook(path)
    book.add_worksheet("Read me").write(0, 0, "An invented utility")
    sheet = book.add_worksheet("Joints")
    sheet.write(0, 0, "Register of flanged joints")
    sheet.merge_range(2, 2, 2, 3, "Pressure")
    for k, text in enumerate(["Joint", "Size", "operating", "surge", "Year installed"]):
        sheet.write(3, k, text)
    sheet.write(4, 1, "(in)")
    for row, values in ((5, ["A1", 12, "100 psi", "20 psi", 1999]), (7, ["A2", 24, "80 psi", "10 psi", 2003])):
        for k, value in enumerate(values):
            sheet.write(row, k, value)
    sheet.write_formula(8, 0, '="A"&"3"', None, "A3")
    sheet.write_formula(8, 1, "=6+6", None, 12)
    sheet.write(8, 2, "95 psi")
    book.close()
    inventory = read_inventory(path)
    assert inventory.raw.sheet == "Joints"
    assert list(inventory.joint_id)[-3:] == ["A1", "A2", "A3"]
    assert inventory.raw.row_numbers[-2] == 8
    assert inventory.gaps["operating_pressure"][-1] == pytest.approx(95 * 6894.757, rel=1e-6)
    assert inventory.gaps["nominal_size"][-1] == pytest.approx(0.3048)


def test_hostile_names_stay_text_everywhere(tmp_path):
    names = ["=1+1", "+cmd|' /C calc'!A0", "@SUM(1)", "<script>alert(1)</script>", "a\x07b", "x" * 40_000]
    path = tmp_path / "a.xlsx"
    book = openpyxl.Workbook()
    book.active.append(["Joint", "Size (in)", "Max press. (psi)", "DR"])
    for name in names:
        book.active.append(["", 12, 100, 11])
        cell = book.active.cell(book.active.max_row, 1)
        cell.value = name.replace("\x07", " ")
        cell.data_type = "s"
    book.save(path)
    out = tmp_path / "run"
    done = subprocess.run([sys.executable, "-m", "screener", "screen", str(path), "--out", str(out), "--quiet"], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    back = openpyxl.load_workbook(out / "ranking.xlsx")
    cells = [cell for row in back["Ranking"].iter_rows() for cell in row]
    assert not any(cell.data_type == "f" for cell in cells)
    assert "=1+1" in {cell.value for cell in cells}
    text = (out / "ranking.csv").read_text()
    assert "'=1+1" in text and '"=1+1' not in text
    layer = geopandas.read_file(out / "joints.gpkg", layer="joints_without_place")
    assert "<script>alert(1)</script>" in set(layer["joint_id"])


def test_wrong_use_exits_2_with_one_line(tmp_path):
    done = subprocess.run([sys.executable, "-m", "screener", "screen", str(tmp_path / "no.csv"), "--out", str(tmp_path / "o")], capture_output=True, text=True, check=False)
    assert done.returncode == 2
    assert done.stderr.count("\n") == 1 and "Traceback" not in done.stderr


def test_nothing_rankable_exits_1(tmp_path):
    path = tmp_path / "a.csv"
    path.write_text("Joint,Size (in),DR\nA1,13,11\n")
    done = subprocess.run([sys.executable, "-m", "screener", "screen", str(path), "--out", str(tmp_path / "o")], capture_output=True, text=True, check=False)
    assert done.returncode == 1, done.stderr
    assert pd.read_csv(tmp_path / "o" / "ranking.csv")["status"].tolist() == ["not ranked"]


def make_layer(path, driver, geometry, crs):
    frame = geopandas.GeoDataFrame({"FlangeID": ["A1", "A2"], "size_in": [12, 24], "op_psi": [100, 80]}, geometry=geometry, crs=crs)
    if driver == "parquet":
        frame.to_parquet(path)
    else:
        frame.to_file(path, driver=driver)


@pytest.mark.parametrize(("name", "driver"), [("a.gpkg", "GPKG"), ("a.shp", "ESRI Shapefile"), ("a.geojson", "GeoJSON"), ("a.parquet", "parquet")])
def test_layers(tmp_path, name, driver):
    points = [shapely.Point(4.0, 52.0), shapely.Point(4.1, 52.1)]
    make_layer(tmp_path / name, driver, points, "EPSG:4326")
    inventory = read_inventory(tmp_path / name)
    assert list(inventory.joint_id) == ["A1", "A2"]
    assert inventory.crs == "EPSG:4326"
    assert inventory.place[0][1] == pytest.approx(4.1)


def test_layer_without_reference_system_is_a_finding(tmp_path):
    make_layer(tmp_path / "a.gpkg", "GPKG", [shapely.Point(0, 0), shapely.Point(1, 1)], None)
    inventory = read_inventory(tmp_path / "a.gpkg")
    assert inventory.crs is None
    assert "no_reference_system" in codes(inventory)


def test_lines_and_empty_shapes(tmp_path):
    make_layer(tmp_path / "a.gpkg", "GPKG", [shapely.LineString([(0, 0), (2, 0)]), None], "EPSG:32631")
    inventory = read_inventory(tmp_path / "a.gpkg")
    x, _y = inventory.place
    assert 0 <= x[0] <= 2 and x[1] != x[1]
    assert {"no_place", "place_from_shape"} <= codes(inventory)


def test_damaged_geopackage(tmp_path):
    path = tmp_path / "a.gpkg"
    path.write_bytes(b"SQLite format 3\x00" + b"\x01" * 3000)
    refused(path, "can't be read")


def test_damaged_parquet(tmp_path):
    path = tmp_path / "a.parquet"
    path.write_bytes(b"PAR1" + b"\x01" * 3000 + b"PAR1")
    refused(path, "damaged")
