"""An invented fleet of any size for measuring speed; not evidence of anything."""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pandas as pd


def make_fleet(rows: int, seed: int = 1) -> pd.DataFrame:
    """A table of 30 columns as an inventory would have them."""
    rng = np.random.default_rng(seed)

    def some(choices, p=None, missing=0.0):
        picked = rng.choice(np.array(choices, dtype=object), rows, p=p)
        return np.where(rng.random(rows) < missing, None, picked)

    main = rng.integers(1, max(rows // 80, 2), rows)
    return pd.DataFrame(
        {
            "Joint ID": [f"J-{i:07d}" for i in range(rows)],
            "Main": [f"M-{m}" for m in main],
            "Zone": [f"Z{m % 12}" for m in main],
            "Chainage (m)": np.round(rng.uniform(0, 20000, rows), 1),
            "Easting": np.round(rng.uniform(4e5, 4.3e5, rows), 2),
            "Northing": np.round(rng.uniform(5.4e6, 5.43e6, rows), 2),
            "Elevation (m)": np.round(rng.uniform(0, 120, rows), 1),
            "Size (in)": some([4, 6, 8, 10, 12, 14, 16, 18, 20, 24, 30, 36]),
            "DR": some([9, 11, 13.5, 17, 21], missing=0.1),
            "Pipe material": some(["PE4710", "PE3408", "3608"], missing=0.2),
            "Pressure class": some(["PC 200", "PC 125", "160 psi"], missing=0.5),
            "Ring standard": some(["AWWA C207", "C207"], missing=0.2),
            "Ring class": some(["D", "B", "E", "class D", "F"], missing=0.3),
            "Ring material": some(["A36", "carbon steel", "ductile iron", "316"], missing=0.3),
            "Ring thickness (in)": np.where(rng.random(rows) < 0.6, np.nan, np.round(rng.uniform(0.6, 1.5, rows), 3)),
            "Coating": some(["painted", "galv", "FBE"], missing=0.4),
            "Bolt grade": some(["B7", "A307", "gr 5"], missing=0.4),
            "Torque (ft-lb)": np.where(rng.random(rows) < 0.5, np.nan, rng.integers(40, 400, rows).astype(float)),
            "Lubrication": some(["yes", "no", "greased"], missing=0.5),
            "Mating side": some(["PE", "valve", "steel"], missing=0.2),
            "Gasket": some(["none", "rubber"], missing=0.3),
            "Setting": some(["buried", "chamber", "above ground"], missing=0.1),
            "Temp (F)": np.round(rng.uniform(50, 75, rows), 1),
            "Op pressure": some(["150 psi", "10 bar", "120 psi", "900 kPa", "85 psi"]),
            "Surge (psi)": np.where(rng.random(rows) < 0.3, np.nan, np.round(rng.uniform(10, 80, rows), 1)),
            "Cycles per day": rng.integers(1, 200, rows),
            "Year installed": rng.integers(1985, 2025, rows),
            "Last tightened": some(["2015-04-02", "03/11/2018", "2020"], missing=0.7),
            "Customers": rng.integers(1, 5000, rows),
            "Retrofit cost": rng.integers(2000, 40000, rows),
        }
    )


if __name__ == "__main__":
    count, target = int(sys.argv[1]), Path(sys.argv[2])
    table = make_fleet(count)
    if target.suffix == ".parquet":
        table.to_parquet(target, index=False)
    elif target.suffix == ".xlsx":
        table.to_excel(target, index=False, engine="xlsxwriter")
    else:
        table.to_csv(target, index=False)
