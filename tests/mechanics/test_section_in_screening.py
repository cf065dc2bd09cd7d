"""A flat plate given as a polygon must screen as the flat plate it is."""

import numpy as np
import pandas as pd
import pytest

from screener import Settings, read_inventory, screen
from screener.inventory.ring_sections import read_sections
from screener.mechanics.section_plasticity import section_plastic_couple
from screener.records import InputError, Ledger

ROW = {"Joint": "A", "Size": "12 in", "DR": 11, "Pipe material": "PE4710", "Ring standard": "AWWA C207", "Ring class": "D", "Op pressure": "100 psi", "Surge": "20 psi", "Year installed": 2005, "Torque": "80 ft-lb"}


def plate(a, b, t):
    return np.array([[a, 0.0], [b, 0.0], [b, t], [a, t]])


def test_plastic_couple_of_a_plate():
    """t^2 (b - a) / 4, plastic bending of a rectangle (any strength-of-materials text)."""
    assert section_plastic_couple(plate(0.2, 0.3, 0.02)) == pytest.approx(0.02**2 * 0.1 / 4, rel=1e-3)


def test_plastic_couple_of_a_tee_by_hand():
    """Flange 100 x 10 mm, web 10 x 60 mm on it: equal-area axis 8 mm up in the flange; couple by areas and arms."""
    tee = np.array([[0.2, 0.0], [0.3, 0.0], [0.3, 0.010], [0.255, 0.010], [0.255, 0.070], [0.245, 0.070], [0.245, 0.010], [0.2, 0.010]])
    by_hand = 0.1 * 0.008 * 0.004 + 0.1 * 0.002 * 0.001 + 0.01 * 0.06 * 0.032
    assert section_plastic_couple(tee, strips=20000) == pytest.approx(by_hand, rel=2e-3)


def test_a_flat_section_screens_as_the_flat_ring(tmp_path):
    inch = 0.0254
    corners = plate(12.88 / 2 * inch, 19 / 2 * inch, 0.812 * inch)
    pd.DataFrame({"section": "flat", "r_mm": 1000 * corners[:, 0], "z_mm": 1000 * corners[:, 1]}).to_csv(tmp_path / "ring_sections.csv", index=False)
    frame = pd.DataFrame([{**ROW, "Ring section": ""}, {**ROW, "Joint": "B", "Ring section": "flat"}, {**ROW, "Joint": "C", "Ring section": "other"}])
    frame.to_csv(tmp_path / "a.csv", index=False)
    inventory = read_inventory(tmp_path / "a.csv", Settings(assessment_date="2026-06-30"))
    result = screen(inventory)
    table = result.table.set_index("joint_id")
    assert table.loc["B", "loose_ring_rating"] == pytest.approx(table.loc["A", "loose_ring_rating"], rel=0.05)
    assert table.loc["B", "lever_arm"] == pytest.approx(table.loc["A", "lever_arm"], rel=0.01)
    assert table.loc["B", "assembly_clamp_force"] == pytest.approx(table.loc["A", "assembly_clamp_force"], rel=0.02)
    assert {"section_missing"} == set(result.findings.loc[result.findings["joint_id"] == "C", "code"]) & {"section_missing"}


@pytest.mark.parametrize("text", ["", "name,x,y\na,1,2\n", "\x00\x01"])
def test_tables_that_are_none_of_sections(tmp_path, text):
    path = tmp_path / "ring_sections.csv"
    path.write_text(text)
    with pytest.raises(InputError, match="ring_sections.csv"):
        read_sections(path, Ledger())


def test_a_broken_section_is_a_finding(tmp_path):
    path = tmp_path / "ring_sections.csv"
    path.write_text("section,r_mm,z_mm\nbad,100,abc\nbad,120,0\ngood,100,0\ngood,150,0\ngood,150,20\ngood,100,20\n")
    ledger = Ledger()
    assert list(read_sections(path, ledger)) == ["good"]
    assert ledger.findings[0].code == "section_unusable"
