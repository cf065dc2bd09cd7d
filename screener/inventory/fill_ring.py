"""Gap rules for the backing ring."""

from __future__ import annotations

import numpy as np

from screener.inventory.fill_pipe import PRACTICE
from screener.inventory.gaps import Gaps, among
from screener.records import Origin, Severity
from screener.settings import Settings
from screener.standards import materials
from screener.standards.rings import CLASSES, CLASSES_OF, INCH_STANDARDS, STANDARDS, ring_rows, ring_table, rows_by_code, standard_codes
from screener.standards.tables import INCH

ERAS = (1900, 1985, 1997, 2007, 2015, 2100)
# Gap between the pipe and the ring's bore where no table prints a bore: the
# median of AWWA C207 bores over IPS outside diameters at 14 in and above is 0.19 in.
BORE_CLEARANCE = 0.19 * INCH


def fill_ring_standard(gaps: Gaps) -> None:
    metric = gaps["size_system"] == "ISO"
    ring_class = gaps["ring_class"]
    own = gaps["ring_standard"] == "maker's own"
    for standard in ("EN 1092-1", "AWWA C207", "ASME B16.5", "ASME B16.1"):
        classes = CLASSES_OF[standard]
        where = among(ring_class, classes) & ~own
        if standard == "ASME B16.5":
            where &= gaps["nominal_size"] <= 24.01 * INCH
        gaps.fill(
            "ring_standard",
            standard,
            where=where,
            origin=Origin.DERIVED,
            rule="the standard that has a class of this name",
            source=standard,
        )
    gaps.fill(
        "ring_standard",
        "ASME B16.47 A",
        where=(ring_class == "150") & ~own,
        origin=Origin.DERIVED,
        rule="class 150 above 24 in",
        source="ASME B16.47",
    )
    gaps.fill("ring_standard", "EN 1092-1", where=metric, rule="metric pipe: EN 1092-1 drilling", source=PRACTICE, scatter=0.1)
    small = gaps["nominal_size"] < 3.9 * INCH
    gaps.fill("ring_standard", "ASME B16.5", where=small & ~metric, rule="below 4 in: class 150 drilling", source=PRACTICE, scatter=0.1)
    gaps.fill("ring_standard", "AWWA C207", where=~metric, rule="inch pipe: AWWA C207 ring", source=PRACTICE, scatter=0.15)


def check_ring_class(gaps: Gaps) -> None:
    """A class that its standard does not have is not used."""
    standard, ring_class = gaps["ring_standard"], gaps["ring_class"]
    wrong = np.zeros(gaps.rows, dtype=bool)
    for name, classes in CLASSES_OF.items():
        wrong |= (standard == name) & gaps.known("ring_class") & ~among(ring_class, classes)
    gaps.ledger.finding(
        "class_not_in_standard",
        Severity.DOUBTS,
        wrong & gaps.is_read("ring_standard"),
        attribute="ring_class",
        values=ring_class[wrong & gaps.is_read("ring_standard")],
        problem="the ring's standard has no class of this name",
        action="class not used; filled by rule",
    )
    gaps.reject("ring_class", wrong)


def classes_that_fit(gaps: Gaps) -> dict[str, np.ndarray]:
    """Class -> mask of joints whose dimensions in the file agree with the class at their size."""
    table = ring_table()
    slack = {"ring_outside_diameter": 0.006, "bolt_circle_diameter": 0.004, "bolt_count": 0.5, "bolt_diameter": 0.0016}
    fits = {}
    standard = standard_codes(gaps["ring_standard"])
    for code, ring_class in enumerate(CLASSES):
        row = rows_by_code(standard, code, gaps["flange_size"])
        good = row >= 0
        for attribute, tolerance in slack.items():
            column = {"ring_outside_diameter": "outside_diameter"}.get(attribute, attribute)
            expected = getattr(table, column)[row]
            good &= ~gaps.is_read(attribute) | (np.abs(gaps[attribute] - expected) <= tolerance)
        fits[ring_class] = good
    return fits


def fill_class_from_dimensions(gaps: Gaps, fits: dict[str, np.ndarray]) -> None:
    """The class that alone has the drilling, or the thickness, that the file gives."""
    table = ring_table()
    measured = np.zeros(gaps.rows, dtype=bool)
    for attribute in ("ring_outside_diameter", "bolt_circle_diameter", "bolt_count", "bolt_diameter"):
        measured |= gaps.is_read(attribute)
    matrix = np.column_stack([fits[c] for c in CLASSES])
    only = matrix.sum(axis=1) == 1
    names = np.array(CLASSES, dtype=object)
    gaps.fill(
        "ring_class",
        names[matrix.argmax(axis=1)],
        where=measured & only & _has_rivals(gaps),
        origin=Origin.DERIVED,
        rule="the only class of the standard with the drilling in the file",
        source="the standard's table",
        scatter=0.05,
    )
    misfit = np.full(matrix.shape, np.inf)
    standard = standard_codes(gaps["ring_standard"])
    for k, ring_class in enumerate(CLASSES):
        row = rows_by_code(standard, k, gaps["flange_size"])
        ratio = gaps["ring_thickness"] / np.where(row >= 0, table.thickness[row], np.nan)
        misfit[:, k] = np.where(fits[ring_class] & np.isfinite(ratio), np.abs(np.log(np.where(np.isfinite(ratio), ratio, 1.0))), np.inf)
    best = misfit.argmin(axis=1)
    close = misfit[np.arange(gaps.rows), best] < 0.08
    gaps.fill(
        "ring_class",
        names[best],
        where=close & gaps.is_read("ring_thickness"),
        origin=Origin.DERIVED,
        rule="class whose thickness is within 8 % of the one in the file",
        source="the standard's table",
        scatter=0.1,
    )


def _has_rivals(gaps: Gaps) -> np.ndarray:
    """Standards with more than one class, where the drilling can tell them apart."""
    return among(gaps["ring_standard"], [name for name, classes in CLASSES_OF.items() if len(classes) > 1])


def fill_ring_class(gaps: Gaps, settings: Settings) -> None:
    """Class by what the file says of the ring and of like joints, else the class most met in the trade."""
    fits = classes_that_fit(gaps)
    fill_class_from_dimensions(gaps, fits)
    era = np.digitize(np.where(gaps.known("year_installed"), gaps["year_installed"], 0.0), ERAS).astype(float)
    size = np.where(gaps.known("flange_size"), gaps["flange_size"], -1.0)
    standard = gaps["ring_standard"]
    large = np.digitize(size, [0.28, 0.48])
    ratio = np.where(gaps.known("dimension_ratio"), gaps["dimension_ratio"], 17.0)
    metric = standard == "EN 1092-1"

    def fitting(classes: np.ndarray) -> np.ndarray:
        """Mask of joints whose own dimensions allow the class proposed."""
        allowed = np.zeros(gaps.rows, dtype=bool)
        for name, good in fits.items():
            allowed |= (classes == name) & good
        return allowed

    for keys, words in (
        (["ring_standard", era, size, "contractor"], "same standard, era, size and crew"),
        (["ring_standard", era, size], "same standard, era and size"),
        (["ring_standard", era, large], "same standard, era and size group"),
    ):
        vote, agreement = gaps.group_vote("ring_class", keys, settings.class_vote_count, settings.class_vote_share)
        gaps.fill(
            "ring_class",
            vote,
            where=fitting(vote),
            rule=f"class of most joints on record with the {words}",
            source="this inventory",
            scatter=1.0 - np.where(np.isnan(agreement), 1.0, agreement),
        )
    defaults = [
        (standard == "AWWA C207", "D", "class D where nothing else is known"),
        (among(standard, ["ASME B16.5", "ASME B16.47 A"]), "150", "class 150, the standard's only class here"),
        (standard == "ASME B16.1", "125", "class 125 where nothing else is known"),
        (metric & (ratio < 14.0), "PN16", "PN16 drilling on thick-walled metric pipe"),
        (metric, "PN10", "PN10 drilling on thin-walled metric pipe"),
    ]
    for must_fit in (True, False):
        others = [(standard == name, c, f"class {c}, which fits the dimensions in the file") for name, cs in CLASSES_OF.items() for c in cs]
        for where, ring_class, rule in defaults + (others if must_fit else []):
            scatter = 0.0 if ring_class == "150" else 0.3
            gaps.fill("ring_class", ring_class, where=where & (fits[ring_class] | (not must_fit)), rule=rule, source=PRACTICE, scatter=scatter)


def fill_ring_dimensions(gaps: Gaps) -> np.ndarray:
    """Dimensions by standard, class and size; returns each joint's row of the ring table (-1: none)."""
    table = ring_table()
    row = ring_rows(gaps["ring_standard"], gaps["ring_class"], gaps["flange_size"])
    found = row >= 0
    by_file = gaps.is_read("ring_class")
    for attribute, column in (
        ("ring_outside_diameter", "outside_diameter"),
        ("bolt_circle_diameter", "bolt_circle_diameter"),
        ("hole_diameter", "hole_diameter"),
        ("ring_thickness", "thickness"),
        ("ring_bore", "bore"),
        ("bolt_diameter", "bolt_diameter"),
        ("bolt_count", "bolt_count"),
    ):
        values = np.where(found, getattr(table, column)[row], np.nan)
        for known, origin, words in (
            (by_file, Origin.LOOKED_UP, "by the class in the file"),
            (~by_file, Origin.ASSUMED, "by an assumed class"),
        ):
            for standard in STANDARDS:
                here = known & found & (gaps["ring_standard"] == standard)
                if attribute == "ring_bore" and standard in INCH_STANDARDS:
                    # A ring bored for the pipe it stands on must pass over it.
                    here = here & (values > gaps["pipe_outside_diameter"])
                gaps.fill(
                    attribute,
                    values,
                    where=here,
                    origin=origin,
                    rule=f"table value by standard, class and size, {words}",
                    source=f"{standard}, {_status(standard)}",
                    scatter=0.0 if origin == Origin.LOOKED_UP else (0.15 if attribute == "ring_thickness" else 0.0),
                )
    return row


def _status(standard: str) -> str:
    if standard == "EN 1092-1":
        return "PN16 confirmed in part, PN10 and loose-plate thickness from memory"
    return "dimensions read in an engineering data library"


def fill_ring_rest(gaps: Gaps, row: np.ndarray) -> None:
    metric = gaps["size_system"] == "ISO"
    outside = gaps["pipe_outside_diameter"]
    gaps.fill(
        "ring_bore",
        pipes_bore(gaps, metric),
        origin=Origin.LOOKED_UP,
        rule="backing-ring bore of the metric stub end",
        source="ISO 9624 / DIN 16963-4 (from memory)",
        scatter=0.005,
    )
    gaps.fill(
        "ring_bore",
        outside + BORE_CLEARANCE,
        rule="pipe outside diameter plus 0.19 in",
        source="median clearance of AWWA C207 bores over IPS pipe from 14 in up",
        scatter=0.005,
    )
    gaps.fill(
        "hole_diameter",
        gaps["bolt_diameter"] + 0.125 * INCH,
        rule="bolt diameter plus 1/8 in",
        source="from memory",
        scatter=0.02,
    )
    _scale_metric_thickness(gaps)
    form = gaps["ring_form"]
    unknown = (form == "unknown")
    gaps.reject("ring_form", unknown)
    standard_ring = among(gaps["ring_standard"], STANDARDS)
    iron = among(gaps["ring_material"], ["ductile iron", "ASTM A536 65-45-12", "ASTM A536 60-40-18", "EN-GJS-400-15", "EN-GJS-500-7"])
    gaps.fill("ring_form", "contoured", where=iron & ~standard_ring, rule="cast ring of a maker's own design: contoured", source=PRACTICE, scatter=0.3)
    gaps.fill("ring_form", "flat plate", rule="flat plate where nothing says otherwise", source=PRACTICE, scatter=0.15)
    contoured = gaps["ring_form"] == "contoured"
    gaps.fill("ring_material", "ductile iron", where=contoured, rule="contoured rings are cast in ductile iron", source=PRACTICE, scatter=0.1)
    gaps.fill("ring_material", "EN 10025-2 S235JR", where=metric, rule="metric plate ring: S235JR", source=PRACTICE, scatter=0.1)
    gaps.fill("ring_material", "carbon steel", rule="plate ring: the least steel AWWA C207-01 allows", source="AWWA C207-01 (read in secondary summaries)", scatter=0.1)
    strength, modulus = materials.ring_strength(gaps["ring_material"], gaps["ring_thickness"])
    gaps.fill(
        "ring_yield_strength",
        strength,
        origin=Origin.LOOKED_UP,
        rule="least yield of the material, by thickness where the standard steps it",
        source="ring materials table (each row with its status)",
        scatter=0.08,
    )
    gaps.add("ring_modulus")
    gaps.fill("ring_modulus", modulus, origin=Origin.LOOKED_UP, rule="modulus of the material", source="ring materials table", scatter=0.02)
    table = ring_table()
    rating = np.where(row >= 0, table.stated_rating[row], np.nan)
    gaps.fill(
        "stated_rating",
        rating,
        origin=Origin.LOOKED_UP,
        rule="pressure rating of the ring's class, meant for a flange welded to steel pipe",
        source="class pressure of the standard (each row with its status)",
    )
    gaps.fill("rating_basis", "welded", where=among(gaps["ring_standard"], STANDARDS), rule="class ratings are for welded flanges", source=PRACTICE)
    gaps.fill("rating_basis", "loose", where=gaps["ring_form"] != "flat plate", rule="a contoured ring is rated as a loose ring", source=PRACTICE, scatter=0.3)
    gaps.fill("rating_basis", "welded", rule="welded unless the paper says loose", source=PRACTICE, scatter=0.2)
    gaps.fill("stated_safety_factor", 2.0, rule="factor 2 on yield", source="AWWA C207: 16 ksi on 32 ksi (read in secondary summaries); else " + PRACTICE, scatter=0.15)
    coat = (gaps["ring_coating"] == "unknown")
    gaps.reject("ring_coating", coat)
    stainless = np.char.startswith(np.asarray(gaps["ring_material"]).astype(str), "ASTM A240")
    gaps.fill("ring_coating", "stainless", where=stainless, rule="stainless ring", source="material")
    gaps.fill("ring_coating", "paint", rule="painted where nothing says otherwise", source=PRACTICE, scatter=0.3)


def pipes_bore(gaps: Gaps, metric: np.ndarray) -> np.ndarray:
    from screener.standards.pipes import metric_stub_end

    return metric_stub_end(np.where(metric, gaps["pipe_outside_diameter"], np.nan), "backing_bore_mm")


def _scale_metric_thickness(gaps: Gaps) -> None:
    """EN 1092-1 prints no loose-plate thickness above DN 600 here: scale from the largest printed."""
    table = ring_table()
    for ring_class in ("PN10", "PN16"):
        rows = (table.standard == "EN 1092-1") & (table.ring_class == ring_class) & np.isfinite(table.thickness)
        last = np.flatnonzero(rows)[np.argmax(table.flange_size[rows])]
        where = (gaps["ring_standard"] == "EN 1092-1") & (gaps["ring_class"] == ring_class)
        where &= gaps["flange_size"] > table.flange_size[last]
        scaled = table.thickness[last] * (gaps["flange_size"] / table.flange_size[last]) ** 0.7
        gaps.fill(
            "ring_thickness",
            scaled,
            where=where,
            rule=f"thickness of the largest printed size ({table.flange_size[last] * 1000:.0f}) times size ratio to the power 0.7",
            source=PRACTICE,
            scatter=0.15,
        )


def check_ring_geometry(gaps: Gaps, blocked: dict[str, np.ndarray]) -> None:
    """Dimensions that can't belong to one ring end the row, with the reason."""
    bore, outside = gaps["ring_bore"], gaps["ring_outside_diameter"]
    circle, hole, hub = gaps["bolt_circle_diameter"], gaps["hole_diameter"], gaps["hub_outside_diameter"]
    pipe, thickness = gaps["pipe_outside_diameter"], gaps["ring_thickness"]
    usable = np.isfinite(pipe)
    checks = {
        "ring dimensions are unknown: no table has this standard, class and size": ~np.isfinite(circle + outside + bore),
        "ring thickness is unknown: no table has it for this standard, class and size": ~np.isfinite(thickness)
        & np.isfinite(circle + outside + bore),
        "ring bore is not larger than the pipe": bore < pipe * 0.999,
        "bolt circle lies outside the ring": circle + hole > outside,
        "bolt circle lies inside the hub": circle - hole < hub * 0.97,
        "hub does not reach over the ring's bore": hub <= bore * 1.002,
        "number or size of bolts is unknown": ~np.isfinite(gaps["bolt_count"] + gaps["bolt_diameter"]),
        "bolt holes overlap": np.pi * circle / gaps["bolt_count"] < hole,
    }
    for reason, mask in checks.items():
        mask = mask & usable
        if not mask.any():
            continue
        blocked[reason] = mask
        gaps.ledger.finding(
            "ring_geometry",
            Severity.BLOCKS,
            mask,
            attribute="ring_outside_diameter",
            problem=reason,
            action="not ranked; correct the ring's or the stub end's dimensions",
        )
