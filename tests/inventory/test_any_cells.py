"""Whatever stands in the cells, every row ends ranked or with a reason, and nothing raises but a clear refusal."""

import csv
import random
from pathlib import Path

import pytest

from screener import read_inventory, screen
from screener.records import InputError

CLEAN = Path(__file__).resolve().parents[2] / "sample_inventory" / "small_clean.csv"
JUNK = [
    "", "-", "?", "1e999", "-1e9", "0", "NaN", "inf", '12"', "DN300", "=1+1", "<b>", "\u202e12", "１２", "12,5", "1.234,5", "1/0",
    "99999999999999999999", "2024-02-30", "PN16", "class Q", "\n", '"', "psi", "150 psi bar", "-5 psi", "0 in", "1e-9 m", "x" * 5000,
    "٣", "12 in 300 mm", "true", "#REF!",
]  # fmt: skip


@pytest.mark.parametrize("seed", range(8))
def test_random_cells(tmp_path, seed):
    with open(CLEAN, encoding="utf-8") as stream:
        rows = list(csv.reader(stream))
    dice = random.Random(seed)
    for _ in range(dice.randint(1, 200)):
        i = dice.randrange(0 if dice.random() < 0.05 else 1, len(rows))
        rows[i][dice.randrange(len(rows[i]))] = dice.choice(JUNK)
    path = tmp_path / "a.csv"
    with open(path, "w", newline="", encoding="utf-8") as stream:
        csv.writer(stream).writerows(rows)
    try:
        result = screen(read_inventory(path))
    except InputError as refusal:
        assert "\n" not in str(refusal)
        return
    counts = result.counts
    assert counts["rows"] == counts["ranked"] + counts["not_ranked"]
    ranked = result.table[result.table["status"] == "ranked"]
    assert ranked["utilization"].between(0, 1e12).all()
    assert (result.table.loc[result.table["status"] != "ranked", "reason"] != "").all()
