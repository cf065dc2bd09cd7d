"""PE pipe: outside diameters, stub ends, materials, temperature factors."""

from __future__ import annotations

from functools import cache

import numpy as np

from screener.standards.tables import INCH, PSI, codes, exact_rows, read_table

STANDARD_RATIOS = (6.0, 7.0, 7.3, 7.4, 9.0, 11.0, 13.5, 13.6, 15.5, 17.0, 17.6, 19.0, 21.0, 26.0, 32.5, 33.0, 41.0)

MATERIALS = ["PE4710", "PE3608", "PE3408", "PE100", "PE80"]
# Hydrostatic design stress at 73 F for water, Pa. PE3408/3608/4710: last two digits of the
# designation code in hundreds of psi (read). PE100/PE80: MRS / C with C = 1.25 for water (from memory).
DESIGN_STRESS = {
    "PE4710": 1000.0 * PSI,
    "PE3608": 800.0 * PSI,
    "PE3408": 800.0 * PSI,
    "PE100": 10.0e6 / 1.25,
    "PE80": 8.0e6 / 1.25,
}
DESIGN_STRESS_SOURCE = "designation code (PE3408/3608/4710); MRS / 1.25 (PE80/PE100, from memory)"
# Row of the apparent-modulus table. PE80 and PE100 are read as the families of like density, from memory.
FAMILY = {"PE4710": "PE4XXX", "PE3608": "PE3XXX", "PE3408": "PE3XXX", "PE100": "PE4XXX", "PE80": "PE2XXX"}


@cache
def inch_outside_diameters(system: str) -> tuple[np.ndarray, np.ndarray]:
    """(nominal size, outside diameter), m, of "IPS" or "DIPS" pipe."""
    table = read_table("pe_pipe_ips" if system == "IPS" else "pe_pipe_dips")
    nominal = "nps_in" if system == "IPS" else "nominal_in"
    return table.number(nominal) * INCH, table.number("od_in") * INCH


@cache
def metric_sizes() -> np.ndarray:
    """Nominal outside diameters of ISO pipe, m (ISO 4427 with the sizes of the stub-end table)."""
    wall = read_table("pe_pipe_iso_wall").number("dn_od_mm")
    stub = read_table("pe_flange_adapter_metric").number("dn_od_mm")
    return np.unique(np.concatenate([wall, stub])) / 1000.0


def _exact(nominal: np.ndarray, values: np.ndarray, wanted: np.ndarray) -> np.ndarray:
    keys = np.round(nominal * 1.0e4).astype(np.int64)
    asked = np.where(np.isfinite(wanted), np.round(wanted * 1.0e4), -1).astype(np.int64)
    row = exact_rows(keys, asked)
    return np.where(row >= 0, values[row], np.nan)


def outside_diameter(system: np.ndarray, nominal_size: np.ndarray) -> np.ndarray:
    """Outside diameter (m) by exact nominal size; NaN where the size is not in the system's table."""
    diameter = np.full(len(nominal_size), np.nan)
    for name in ("IPS", "DIPS"):
        here = system == name
        diameter[here] = _exact(*inch_outside_diameters(name), nominal_size[here])
    here = system == "ISO"
    sizes = metric_sizes()
    diameter[here] = _exact(sizes, sizes, nominal_size[here])
    return diameter


def inch_hub_outside_diameter(nominal_size: np.ndarray) -> np.ndarray:
    """Hub OD (m) of IPS stub ends by exact size, as printed in the association's torque table; else NaN."""
    table = read_table("pe_flange_adapter_inch")
    return _exact(table.number("nps_in") * INCH, table.number("hub_od_in") * INCH, nominal_size)


def metric_stub_end(outside: np.ndarray, column: str) -> np.ndarray:
    """A dimension (m) of the metric stub end by exact pipe outside diameter; else NaN."""
    table = read_table("pe_flange_adapter_metric")
    return _exact(table.number("dn_od_mm") / 1000.0, table.number(column) / 1000.0, outside)


def steel_pipe_bore(nominal_size: np.ndarray) -> np.ndarray:
    """Bore (m) of the steel pipe that the association's torque table puts opposite the hub; else NaN."""
    table = read_table("tn38_table3_torque")
    return _exact(table.number("nps_in") * INCH, table.number("steel_pipe_id_in") * INCH, nominal_size)


def design_stress(material: np.ndarray) -> np.ndarray:
    """Hydrostatic design stress at 73 F (Pa) by material designation."""
    row = codes(material, MATERIALS)
    values = np.array([DESIGN_STRESS[name] for name in MATERIALS])
    return np.where(row >= 0, values[row], np.nan)


def modulus_family(material: np.ndarray) -> np.ndarray:
    """Column family of the apparent-modulus table by material designation."""
    row = codes(material, MATERIALS)
    names = np.array([FAMILY[name] for name in MATERIALS], dtype=object)
    return np.where(row >= 0, names[row], "")


def temperature_factor(temperature: np.ndarray) -> np.ndarray:
    """Pressure-rating temperature factor F_T at deg C: 1.0 below 27 C, then the handbook curve.

    Interpolates the handbook table between its points; above its last point
    (38 C) NaN: the standards send the user to the engineer. Factors above 1
    below 23 C are not taken, as AWWA M55 does not take them.
    """
    table = read_table("pe_pressure_temperature_factor")
    curve = np.char.startswith(table.text("source_and_status").astype(str), "PPI")
    warm = np.array([float(v) for v in table.text("temp_C")[curve]])
    factor = np.array([float(v) for v in table.text("factor")[curve]])
    found = np.interp(temperature, warm, factor)
    found = np.where(temperature > warm[-1], np.nan, found)
    return np.minimum(found, 1.0)
