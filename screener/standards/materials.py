"""Ring metals and bolts by designation: strength, stiffness, thread areas."""

from __future__ import annotations

from functools import cache

import numpy as np

from screener.standards.tables import INCH, KSI, codes, read_table

# What a bare "steel" or "iron" in an inventory means.
GENERIC = {
    "carbon steel": "AWWA C207-01 minimum steel",
    "ductile iron": "EN-GJS-400-15",
    "ASTM A36": "ASTM A36 plate",
}


@cache
def ring_materials() -> dict[str, list[tuple[float, float, float, float, str]]]:
    """Material -> rows (thickness above, thickness up to, yield, modulus, source), SI."""
    table = read_table("ring_materials")
    found: dict[str, list] = {}
    for i, name in enumerate(table.text("material")):
        condition = table.text("condition")[i]
        low, high = 0.0, np.inf
        words = condition.split()
        if "mm" in words and "t" in words:
            at = words.index("t")
            low = float(words[0]) / 1000.0 if at >= 2 else 0.0
            high = float(words[at + 2]) / 1000.0
        source = f"{table.text('source')[i]} ({table.text('status')[i]})"
        found.setdefault(name, []).append(
            (
                low,
                high,
                table.number("yield_or_rp02_min_mpa")[i] * 1.0e6,
                table.number("e_modulus_gpa")[i] * 1.0e9,
                source,
            )
        )
    for generic, name in GENERIC.items():
        found[generic] = [(*row[:4], f"taken as {name}: {row[4]}") for row in found[name]]
    return found


def ring_strength(material: np.ndarray, thickness: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """(yield, modulus), Pa, by material and thickness (m); NaN where the material is not in the table.

    A thickness outside a material's printed steps takes the nearest step.
    """
    strength = np.full(len(material), np.nan)
    modulus = np.full(len(material), np.nan)
    for name, rows in ring_materials().items():
        here = material == name
        if not here.any():
            continue
        for step, (low, _high, value, stiffness, _source) in enumerate(sorted(rows, key=lambda row: row[0])):
            at = here & ((thickness > low) | (step == 0))
            strength[at] = value
            modulus[at] = stiffness
    return strength, modulus


def ring_material_source(material: str) -> str:
    return "; ".join(sorted({row[4] for row in ring_materials()[material]}))


# ASTM A307 specifies no yield; 36 ksi as for A36 rod (from memory).
A307_YIELD = 36.0 * KSI


def bolt_strength(grade: np.ndarray, diameter: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """(yield, proof), Pa, by grade and diameter (m); proof NaN where the standard prints none."""
    table = read_table("bolt_grades")
    yields = table.number("yield_min_ksi") * KSI
    proofs = table.number("proof_ksi") * KSI
    names = table.text("grade")
    strength = np.full(len(grade), np.nan)
    proof = np.full(len(grade), np.nan)
    for name in dict.fromkeys(names):
        here = grade == name
        if not here.any():
            continue
        rows = np.flatnonzero(names == name)
        limits = np.array([_largest_diameter(text) for text in table.text("size_range")[rows]])
        rows = rows[np.argsort(limits)]
        pick = np.minimum(np.searchsorted(np.sort(limits), diameter[here] - 1.0e-6), len(rows) - 1)
        strength[here] = yields[rows][pick]
        proof[here] = proofs[rows][pick]
    no_yield = (grade == "ASTM A307 A") | (grade == "ASTM A307 B")
    return np.where(no_yield, A307_YIELD, strength), proof


def _largest_diameter(text: str) -> float:
    """Largest diameter (m) a size range of the bolt table covers."""
    if text == "all":
        return np.inf
    if text.startswith("d >"):
        return np.inf
    metric = "mm" in text or "M" in text
    words = text.replace("M", " ").replace("-", " ").replace("<=", " ").replace("=", " ").split()
    numbers = []
    for word in words:
        try:
            top, _, bottom = word.partition("/")
            numbers.append(float(top) / float(bottom) if bottom else float(top))
        except ValueError:
            continue
    return max(numbers) * (0.001 if metric else INCH)


def thread_areas(diameter: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """(tensile area, pitch), m2 and m, by nominal diameter.

    Inch sizes: UNC up to 1 in, 8UN above (as ASME PCC-1 tabulates); metric:
    coarse. NaN where the diameter is within 0.1 mm of neither series.
    """
    inch, metric = read_table("bolts_inch"), read_table("bolts_metric")
    size = inch.number("bolt_dia_in")
    series = inch.text("series")
    keep = (series == "UNC") & (size <= 1.0) | (series == "8UN")
    coarse = metric.text("series") == "coarse"
    sizes = np.concatenate([size[keep] * INCH, metric.number("bolt_dia_mm")[coarse] / 1000.0])
    areas = np.concatenate(
        [inch.number("tensile_area_calc_in2")[keep] * INCH**2, metric.number("tensile_area_calc_mm2")[coarse] * 1e-6]
    )
    pitch = np.concatenate([INCH / inch.number("threads_per_in")[keep], metric.number("pitch_mm")[coarse] / 1000.0])
    order = np.argsort(sizes)
    sizes, areas, pitch = sizes[order], areas[order], pitch[order]
    asked = np.where(np.isfinite(diameter), diameter, 0.0)
    right = np.clip(np.searchsorted(sizes, asked), 1, len(sizes) - 1)
    near = np.where(asked - sizes[right - 1] < sizes[right] - asked, right - 1, right)
    good = np.isfinite(diameter) & (np.abs(sizes[near] - asked) < 1.0e-4)
    return np.where(good, areas[near], np.nan), np.where(good, pitch[near], np.nan)


def known_ring_materials() -> list[str]:
    return list(ring_materials())


def is_known(material: np.ndarray) -> np.ndarray:
    return codes(material, known_ring_materials()) >= 0
