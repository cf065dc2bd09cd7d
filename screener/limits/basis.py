"""Durations and material constants that the limit states share, and the modulus of each joint's PE."""

from __future__ import annotations

import numpy as np

from screener.mechanics import polyethylene
from screener.standards.tables import read_table

HOUR = 3600.0
YEAR = 365.25 * 24 * HOUR
DURATIONS = {"min": 60.0, "h": HOUR, "y": YEAR}
SHORT_TERM = 0.5 * HOUR
LONG_TERM = 50.0 * YEAR
TIGHTENING = 0.5 * HOUR
"""Time scale on which the faces settle while the bolts are tightened."""
SURGE = 1.0
"""Seconds that a surge lasts; picks the modulus in the load factor."""
SEASON = 0.25 * YEAR
"""Duration of the cooling that a cold season brings."""
LONG_POISSON = 0.45
"""Poisson's ratio of PE under lasting load (PPI Handbook, from memory)."""
NUT_WIDTH = 1.5
"""Width of the band on which the nuts press over the bolt diameter (heavy hex nuts, ASME B18.2.2, from memory)."""
STEEL_POISSON = 0.3
EXPANSION = 1.44e-4
"""Thermal expansion of PE4XXX, 1/K (PPI Handbook, from memory; other texts 1.3e-4 to 2.0e-4)."""


def modulus(family: np.ndarray, duration, temperature: np.ndarray) -> np.ndarray:
    """Apparent modulus (Pa) of each joint's PE for a duration (s) at its temperature."""
    table = read_table("pe_apparent_modulus")
    number, unit = zip(*(text.split() for text in table.text("duration")), strict=True)
    seconds = np.array([float(n) * DURATIONS[u] for n, u in zip(number, unit, strict=True)])
    warm = read_table("pe_modulus_temperature")
    result = np.full(len(family), np.nan)
    duration = np.broadcast_to(np.asarray(duration, dtype=float), family.shape)
    for name in ("PE2XXX", "PE3XXX", "PE4XXX"):
        here = family == name
        law = polyethylene.fit_modulus_law(seconds, table.number(f"{name}_MPa") * 1.0e6)
        result[here] = polyethylene.apparent_modulus(
            duration[here], temperature[here], law, warm.number("temp_C"), warm.number("multiplier")
        )
    return result
