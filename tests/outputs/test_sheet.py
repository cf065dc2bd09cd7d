"""The calculation sheet: its arithmetic must give its results, and its results those of the ranking."""

import math
import shutil
import subprocess
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from screener import Settings, read_inventory, screen
from screener.outputs.calculation import calculation_steps
from screener.outputs.load_run import load_joints
from screener.outputs.sheet import write_sheets
from screener.outputs.write_run import write_run
from screener.records import ModelError
from screener.units import from_unit

SAMPLE = Path(__file__).resolve().parents[2] / "sample_inventory" / "inventory.xlsx"
WORDS = {"pi": math.pi, "log": math.log, "log10": math.log10, "min": min, "__builtins__": {}}


@pytest.fixture(scope="module")
def run(tmp_path_factory):
    folder = tmp_path_factory.mktemp("run")
    inventory = read_inventory(SAMPLE, Settings(assessment_date="2026-06-30"))
    screening = screen(inventory)
    write_run(screening, folder, source=SAMPLE, workbook=False)
    ranked = screening.table[screening.table["status"] == "ranked"]
    picks = pd.concat(
        [
            ranked.head(3),
            ranked[ranked["ring_form"] == "contoured"].head(2),
            ranked[ranked["size_system"] == "ISO"].head(3),
            ranked[ranked["mating_side"] == "valve"].head(2),
            ranked[ranked["last_tightened"] > ranked["year_installed"] + 1].head(3),
            ranked[ranked["setting"] == "above ground"].head(2),
            ranked[ranked["position"].isin(np.flatnonzero(np.isin(inventory.gaps["ring_section"], list(inventory.sections))))].head(2),
        ]
    )
    return folder, picks["joint_id"].drop_duplicates().tolist()


@pytest.mark.parametrize("system", ["us", "metric"])
def test_the_arithmetic_of_every_step_gives_its_result(run, system):
    folder, joints = run
    loaded = load_joints(folder, joints)
    for i, joint in enumerate(joints):
        steps = calculation_steps(loaded.fleet, i, 2.0, system, loaded.sections)
        assert len(steps) > 12
        for step in steps:
            by_hand = eval(step.arithmetic, dict(WORDS))  # noqa: S307  (our own text, no names but these)
            assert by_hand == pytest.approx(step.value, rel=3e-4, abs=1e-12), (joint, step.title)


def test_the_sheet_agrees_with_the_ranking(run):
    folder, joints = run
    loaded = load_joints(folder, joints)
    for i, joint in enumerate(joints):
        steps = {step.title: step for step in calculation_steps(loaded.fleet, i, 2.0, "metric", loaded.sections)}
        row = loaded.ranking.iloc[i]
        rating = steps.get("Loose-ring rating") or steps["Rating at the safety factor chosen"]
        assert float(from_unit(rating.value, rating.unit)) / 1000 == pytest.approx(row["loose_ring_rating_kpa"], rel=1e-5), joint
        assert steps["Face utilization, occasional surge"].value == pytest.approx(row["utilization_face_occasional"], rel=1e-5)
        clamp = steps.get("Clamp force now") or steps["Clamp force now, tightened again"]
        assert clamp.value / 1000 == pytest.approx(row["clamp_force_kn"], rel=1e-5)


def test_sheets_are_whole_and_quote_the_file(run, tmp_path):
    folder, joints = run
    for path in write_sheets(folder, joints, tmp_path):
        text = path.read_text(encoding="utf-8")
        assert "<svg" in text and "Isolate, depressurise" in text and "Checked by" in text
        assert "column " in text and "Source:" in text
        assert "http://" not in text.replace("http://www.w3.org", "").replace("http://purl.org", "").replace("http://creativecommons.org", "")
        assert ">nan" not in text.lower()


def test_an_unknown_joint_is_refused_with_a_hint(run):
    folder, joints = run
    with pytest.raises(ModelError, match="did you mean"):
        load_joints(folder, [joints[0] + "x"])


def test_a_hostile_name_stays_text(tmp_path):
    path = tmp_path / "a.csv"
    path.write_text("Joint,Size (in),DR,Max press. (psi),Zone\n<script>alert(1)</script>,12,11,100,<b>Z</b>\n")
    screening = screen(read_inventory(path))
    write_run(screening, tmp_path / "run", source=path, workbook=False)
    (sheet,) = write_sheets(tmp_path / "run", ["<script>alert(1)</script>"])
    text = sheet.read_text(encoding="utf-8")
    assert "<script" not in text and "&lt;script&gt;" in text and "<b>Z</b>" not in text


@pytest.mark.skipif(shutil.which("chromium") is None or shutil.which("pdftotext") is None, reason="no Chromium or poppler on this machine")
def test_pdf(run, tmp_path):
    folder, joints = run
    paths = write_sheets(folder, joints[:1], tmp_path, pdf=True)
    pdf = next(p for p in paths if p.suffix == ".pdf")
    text = subprocess.run(["pdftotext", "-layout", str(pdf), "-"], capture_output=True, text=True, check=True).stdout
    assert f"Joint {joints[0]}" in text and "Loose-ring rating" in text
