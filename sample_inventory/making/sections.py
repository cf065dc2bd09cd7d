"""Two invented cast sections of contoured rings, as corners (radius, height) in mm; the hub lies below.

A plate with a deep lip at the bore and a rib at the rim, flat where hub and nuts bear: no maker's ring, only a shape with a
plausible one's features.
Bore and outside agree with class 150 drilling of 8 in and 12 in rings.
"""

from __future__ import annotations

import pandas as pd

from .practice import lookup

# Share of the width from bore to rim, share of the whole height.
OUTLINE = (
    (0.00, 0.00),
    (0.45, 0.00),
    (0.55, 0.25),
    (1.00, 0.25),
    (1.00, 1.00),
    (0.88, 1.00),
    (0.82, 0.80),
    (0.45, 0.80),
    (0.25, 1.00),
    (0.00, 1.00),
)


def section_table() -> pd.DataFrame:
    rows = []
    for name, size, height in (("cast-8", 8.0, 28.4), ("cast-12", 12.0, 31.8)):
        keys = {"nps_in": size}
        bore = 12.7 * lookup("asme_b16_5_class150_lap_joint", "lap_joint_bore_min_in", **keys)
        rim = 12.7 * lookup("asme_b16_5_class150_lap_joint", "od_in", **keys)
        for r, z in OUTLINE:
            rows.append({"section": name, "r_mm": round(bore + r * (rim - bore), 2), "z_mm": round(z * height, 2)})
    return pd.DataFrame(rows)
