"""The commands as a person runs them, on the sample."""

import json
import subprocess
import sys
from pathlib import Path

import geopandas
import openpyxl
import pandas as pd
import pytest

ROOT = Path(__file__).resolve().parents[2]
SAMPLE = ROOT / "sample_inventory"


def run(*arguments):
    return subprocess.run([sys.executable, "-m", "screener", *map(str, arguments)], capture_output=True, text=True, check=False, cwd=ROOT)


@pytest.fixture(scope="module")
def sample_run(tmp_path_factory):
    folder = tmp_path_factory.mktemp("run")
    done = run("screen", SAMPLE / "inventory.xlsx", "--out", folder, "--date", "2026-06-30")
    assert done.returncode == 0, done.stderr
    assert done.stderr == ""  # quiet in a pipe
    return folder, done.stdout


def test_help_names_every_command():
    done = run("--help")
    assert done.returncode == 0
    for command in ("check", "screen", "surge", "sheet", "template", "methods"):
        assert command in done.stdout


def test_counts_add_up_everywhere(sample_run):
    folder, out = sample_run
    record = json.loads((folder / "run.json").read_text())
    counts = record["counts"]
    assert counts["rows"] == counts["ranked"] + counts["not_ranked"]
    assert f"{counts['rows']:,} rows = {counts['ranked']:,} ranked + {counts['not_ranked']:,} not ranked" in out
    ranking = pd.read_csv(folder / "ranking.csv")
    assert len(ranking) == counts["rows"]
    assert (ranking["status"] == "ranked").sum() == counts["ranked"]
    assert ranking.loc[ranking["status"] == "not ranked", "reason"].notna().all()
    layers = geopandas.list_layers(folder / "joints.gpkg")["name"].tolist()
    total = sum(len(geopandas.read_file(folder / "joints.gpkg", layer=name)) for name in layers if name.startswith("joints"))
    assert total == counts["rows"]
    assert sum(record["not_ranked_reasons"].values()) == counts["not_ranked"]


def test_first_columns_of_the_ranking(sample_run):
    folder, _out = sample_run
    first = pd.read_csv(folder / "ranking.csv", nrows=1).columns[:9].tolist()
    assert first == ["joint_id", "rank", "status", "reason", "utilization", "governing_limit_state", "ring_utilization", "loose_ring_rating_kpa", "stated_rating_kpa"]


def test_rank_follows_utilization(sample_run):
    folder, _out = sample_run
    ranked = pd.read_csv(folder / "ranking.csv").query("status == 'ranked'")
    assert ranked["rank"].tolist() == list(range(1, len(ranked) + 1))
    assert ranked["utilization"].is_monotonic_decreasing
    limits = ranked[[c for c in ranked.columns if c.startswith("utilization_")]]
    assert (limits.max(axis=1) - ranked["utilization"]).abs().max() < 1e-6


def test_workbook_sheets(sample_run):
    folder, _out = sample_run
    book = openpyxl.load_workbook(folder / "ranking.xlsx", read_only=True)
    assert book.sheetnames == ["Summary", "Ranking", "Not ranked", "Findings", "Assumptions", "Coverage", "Dictionary", "Method"]
    ranking = pd.read_excel(folder / "ranking.xlsx", sheet_name="Ranking", header=1)
    csv = pd.read_csv(folder / "ranking.csv").query("status == 'ranked'")
    assert ranking["Joint"].astype(str).tolist() == csv["joint_id"].astype(str).str.lstrip("'").tolist()
    assert (ranking["Loose-ring rating (psi)"] * 6.894757 - csv["loose_ring_rating_kpa"].to_numpy()).abs().max() < 0.02
    words = " ".join(str(cell) for row in book["Summary"].iter_rows(values_only=True) for cell in row if cell)
    assert "Isolate, depressurise" in words


def test_same_seed_same_bytes(sample_run, tmp_path):
    folder, _out = sample_run
    assert run("screen", SAMPLE / "inventory.xlsx", "--out", tmp_path, "--date", "2026-06-30").returncode == 0
    for name in ("ranking.csv", "findings.csv", "ranking.xlsx"):
        assert (folder / name).read_bytes() == (tmp_path / name).read_bytes(), name


def test_metric_units(tmp_path):
    assert run("screen", SAMPLE / "small_clean.csv", "--out", tmp_path, "--units", "metric", "--quiet").returncode == 0
    columns = pd.read_excel(tmp_path / "ranking.xlsx", sheet_name="Ranking", header=1).columns
    assert "Loose-ring rating (bar)" in columns and "Nominal size (mm)" in columns


def test_workbook_and_layer_agree(tmp_path, sample_run):
    folder, _out = sample_run
    assert run("screen", SAMPLE / "inventory.gpkg", "--out", tmp_path, "--quiet", "--date", "2026-06-30").returncode == 0
    book = pd.read_csv(folder / "ranking.csv").set_index("joint_id")
    layer = pd.read_csv(tmp_path / "ranking.csv").set_index("joint_id")
    common = book.index.intersection(layer.index)
    assert len(common) > 2000


def test_check_and_its_mapping_come_back(tmp_path):
    done = run("check", SAMPLE / "inventory.xlsx", "--out", tmp_path)
    assert done.returncode == 0, done.stderr
    assert "can be ranked +" in done.stdout
    again = run("check", SAMPLE / "inventory.xlsx", "--mapping", tmp_path / "mapping.toml")
    assert again.returncode == 0, again.stderr
    assert "(mapping file)" in again.stdout
    assert done.stdout.splitlines()[1] == again.stdout.splitlines()[1]


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ('safety_facter = 3\n', "did you mean safety_factor"),
        ('safety_factor = "two"\n', "expected a number"),
        ("safety_factor = 0.5\n", "expected 1 to 10"),
        ("units = 'furlongs'\n", "expected one of us, metric"),
        ("a = = 1\n", "not a TOML file"),
        ("assessment_date = '31/12/2025'\n", "expected a date"),
    ],
)
def test_wrong_settings_are_refused_in_one_sentence(tmp_path, text, words):
    path = tmp_path / "screening.toml"
    path.write_text(text)
    done = run("screen", SAMPLE / "small_clean.csv", "--out", tmp_path / "o", "--settings", path)
    assert done.returncode == 2
    assert words in done.stderr and done.stderr.count("\n") == 1


def test_methods_text_holds_the_formulas_and_their_sources():
    text = run("methods").stdout
    for words in ("loose_ring_rating", "ASME BPVC VIII-1", "Joukowsky", "apparent_modulus", "Isolate, depressurise"):
        assert words in text


def test_safety_factor_scales_the_rating(tmp_path):
    for factor in ("1", "2"):
        assert run("screen", SAMPLE / "small_clean.csv", "--out", tmp_path / factor, "--safety-factor", factor, "--quiet").returncode == 0
    one, two = (pd.read_csv(tmp_path / f / "ranking.csv").set_index("joint_id")["loose_ring_rating_kpa"] for f in ("1", "2"))
    assert (one / two.loc[one.index] - 2.0).abs().max() < 1e-5


def test_logs_fill_what_the_file_leaves_open_and_nothing_else(tmp_path):
    logs = ("--pressures", SAMPLE / "loggers", "--stations", SAMPLE / "stations.csv")
    assert run("screen", SAMPLE / "inventory.xlsx", "--out", tmp_path, "--quiet", "--date", "2026-06-30", *logs).returncode == 0
    lines = pd.read_parquet(tmp_path / "assumptions.parquet")
    logged = lines[lines["rule"].astype(str).str.startswith("from loggers")]
    assert set(logged["attribute"].astype(str)) == {"operating_pressure", "recurrent_surge", "occasional_surge", "cycles_per_day", "cycle_range"}
    values = pd.read_parquet(tmp_path / "joints.parquet").set_index("row")
    some = logged[logged["attribute"] == "operating_pressure"]
    assert values.loc[some["row"], "operating_pressure__written"].isna().mean() > 0.9  # nothing readable stood there
    upland = values[(values["zone"].astype(str) == "Upland") & values["cycles_per_day__origin"].eq(4)]
    assert upland["cycles_per_day"].median() > 100  # the pumped zone's loggers see hundreds of cycles a day


def test_logs_need_their_stations(tmp_path):
    done = run("screen", SAMPLE / "small_clean.csv", "--out", tmp_path, "--pressures", SAMPLE / "loggers")
    assert done.returncode == 2 and "go together" in done.stderr


@pytest.mark.parametrize("ranking", ["likelihood", "expected_loss"])
def test_other_rankings(tmp_path, ranking):
    assert run("screen", SAMPLE / "inventory.xlsx", "--out", tmp_path, "--rank-by", ranking, "--quiet").returncode == 0
    table = pd.read_csv(tmp_path / "ranking.csv")
    ranked = table.query("status == 'ranked'")
    score = "expected_loss" if ranking == "expected_loss" else "likelihood"
    assert ranked[score].is_monotonic_decreasing
    assert ranked["rank"].tolist() == ranked[f"rank_by_{ranking}"].tolist()
    assert (table["status"] == "ranked").sum() + (table["status"] == "not ranked").sum() == len(table)
    assert ranked["likelihood"].between(0, 1).all()
    assert (ranked["likelihood_low"] <= ranked["likelihood"] + 1e-12).all() and (ranked["likelihood"] <= ranked["likelihood_high"] + 1e-12).all()
