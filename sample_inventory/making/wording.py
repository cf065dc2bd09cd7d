"""How an office writes a joint down: units, spellings, dates and gaps as they come. Cells are text, numbers, dates or None."""

from __future__ import annotations

import datetime

import numpy as np
import pandas as pd

from .network import SEED

FT = 0.3048

# (key, upper heading, lower heading): upper headings are merged over the columns that follow without one.
COLUMNS = (
    ("joint_id", "", "Fitting ID"),
    ("main", "", "Line"),
    ("zone", "", "Supply zone"),
    ("chainage", "", "Sta. (ft)"),
    ("x", "", "Easting"),
    ("y", "", "Northing"),
    ("elevation", "", "Elev (ft)"),
    ("size", "Pipe", "Nom. size"),
    ("system", "", "OD basis"),
    ("ratio", "", "DR / SDR"),
    ("material", "", "Pipe material"),
    ("pressure_class", "", "Pipe class"),
    ("ring_standard", "Backing ring", "Ring spec"),
    ("ring_class", "", "Ring class"),
    ("ring_material", "", "Ring metal"),
    ("ring_form", "", "Ring type"),
    ("ring_section", "", "Section name"),
    ("ring_thickness", "", "Ring thk (in)"),
    ("ring_outside", "", "Ring OD (in)"),
    ("ring_bore", "", "Ring ID (in)"),
    ("bolt_circle", "", "Bolt circle (in)"),
    ("stated_rating", "", "Flange rating"),
    ("safety_factor", "", "Safety factor"),
    ("rating_basis", "", "Basis of rating"),
    ("coating", "", "Ring finish"),
    ("hub_outside", "Stub end OD (in)", ""),
    ("bolt_count", "Bolts", "No. of bolts"),
    ("bolt_diameter", "", "Bolt size"),
    ("bolt_grade", "", "Bolt material"),
    ("torque", "", "Bolt torque (ft-lb)"),
    ("lubrication", "", "Thread lubricant"),
    ("method", "", "Bolting method"),
    ("last_tightened", "", "Last retorque"),
    ("gasket", "Face", "Gasket type"),
    ("mating_side", "", "Mates with"),
    ("setting", "Site", "Location type"),
    ("restraint", "", "Thrust restraint"),
    ("environment", "", "Soil class"),
    ("temperature", "", "Water temp (F)"),
    ("operating", "Pressures", "Working pressure"),
    ("test", "", "Hydro test (psi)"),
    ("recurrent", "", "Daily surge"),
    ("occasional", "", "Worst surge"),
    ("cycles", "", "Pump starts per day"),
    ("cycle_range", "", "Pressure swing (psi)"),
    ("year", "Year laid", ""),
    ("crew", "History", "Installed by"),
    ("inspected", "", "Date inspected"),
    ("finding", "", "Inspection result"),
    ("torque_found", "", "Torque found"),
    ("gap", "", "Gap found (mm)"),
    ("corrosion", "", "Metal loss (mm)"),
    ("leaks", "", "Leak history"),
    ("customers", "If it leaks", "Customers affected"),
    ("crossing", "", "Crossing type"),
    ("leak_cost", "", "Cost of leak ($)"),
    ("retrofit_cost", "Work", "Retrofit cost"),
    ("access_group", "", "Shutdown group"),
    ("gnss", "Office use", "GNSS fix q"),
    ("book", "", "Cost per customer"),
    ("notes", "", "Office notes"),
)
KEYS = tuple(key for key, _, _ in COLUMNS)

SPELLINGS = {
    "PE4710": ("PE4710", "PE4710", "HDPE 4710", "PE 4710"),
    "PE3608": ("PE3608", "PE 3608"),
    "PE3408": ("PE3408", "PE3408", "3408", "HDPE 3408", "pe 3408"),
    "PE100": ("PE100", "PE100", "PE 100"),
    "AWWA C207": ("AWWA C207", "C207", "AWWA", "awwa c207"),
    "ASME B16.5": ("ASME B16.5", "B16.5", "ANSI B16.5"),
    "EN 1092-1": ("EN 1092-1", "EN1092", "en 1092-1"),
    "B": ("B", "B", "Class B", "CL B"),
    "D": ("D", "D", "Class D", "CL D", "cl. d"),
    "E": ("E", "E", "Class E"),
    "F": ("F", "Class F"),
    "150": ("150", "150#", "Class 150", "150 lb"),
    "PN10": ("PN10", "PN 10"),
    "PN16": ("PN16", "PN 16"),
    "ASTM A283 grade C": ("A283 Gr C", "carbon steel", "steel", "A283C"),
    "ASTM A36": ("A36", "ASTM A36", "carbon steel", "CS", "mild steel"),
    "ASTM A516 grade 70": ("A516-70", "A516 Gr 70"),
    "ASTM A536 65-45-12": ("ductile iron", "DI", "65-45-12", "A536"),
    "ASTM A240 304L / 316L": ("316L", "SS316L"),
    "EN 10025-2 S235JR": ("S235JR", "S235", "St37", "steel"),
    "EN-GJS-400-15": ("GGG40", "GJS-400-15"),
    "flat plate": ("flat", "plate", "flat plate", "slab"),
    "contoured": ("contoured", "convoluted", "profiled"),
    "ASTM A193 B7": ("B7", "A193 B7", "A193-B7"),
    "ASTM A307 B": ("A307", "A307B", "A307 Gr B"),
    "ASTM A193 B8M class 1": ("B8M", "B8M cl 1"),
    "ISO 898-1 8.8": ("8.8", "Gr 8.8", "class 8.8"),
    "ISO 898-1 4.6": ("4.6",),
    "ISO 3506-1 A2-70": ("A2-70", "A2"),
    "lubricated": ("yes", "greased", "lubed", "anti seize"),
    "dry": ("no", "dry", "none"),
    "by feel": ("by feel", "hand", "spanner"),
    "torque wrench": ("torque wrench", "wrench", "click wrench"),
    "impact wrench": ("impact", "rattle gun", "impact wrench"),
    "hydraulic torque": ("hydraulic", "hydraulic wrench"),
    "tensioner": ("tensioner",),
    "flat rubber": ("rubber", "full face rubber", "EPDM"),
    "profiled rubber with steel core": ("profiled", "profiled rubber", "steel core"),
    "none": ("no gasket", "none"),
    "compressed fibre": ("fibre", "non asbestos"),
    "PE": ("HDPE", "stub end", "PE"),
    "ductile iron": ("DI", "ductile iron", "DI flange"),
    "steel": ("steel", "CS", "steel flange"),
    "valve": ("valve", "butterfly valve", "BFV", "gate valve"),
    "blind": ("blind", "blind flange"),
    "chamber": ("chamber", "vault", "valve chamber", "MH"),
    "buried": ("buried", "direct buried", "underground"),
    "above ground": ("above ground", "pump station"),
    "restrained": ("yes", "restrained", "anchored"),
    "free": ("no", "free", "unrestrained"),
}


class Pen:
    """Writes one value in one of the ways it gets written."""

    def __init__(self, rng: np.random.Generator) -> None:
        self.rng = rng

    def chance(self, share: float) -> bool:
        return bool(self.rng.random() < share)

    def one_of(self, options):
        return options[int(self.rng.integers(len(options)))]

    def word(self, value: str, known: float = 1.0):
        if not self.chance(known):
            return self.one_of((None, None, None, "unknown", "?", "n/a")) if self.chance(0.15) else None
        text = self.one_of(SPELLINGS.get(value, (value,)))
        return f" {text} " if self.chance(0.02) else text

    def date(self, year: float, *, day: bool = True):
        """A date in one of the styles found in one register: text of several kinds, or a true date."""
        start = datetime.date(int(year), 1, 1)
        when = start + datetime.timedelta(days=int((year % 1.0) * 365))
        style = int(self.rng.integers(6))
        if not day or style == 0:
            return self.one_of((int(year), int(year), f"{when:%b} {when.year}", f"{when.year}-{when.month:02d}"))
        if style == 1:
            return f"{when.day} {when:%b} {when.year}"
        if style == 2:
            return f"{when.day:02d}/{when.month:02d}/{when.year}"
        if style == 3:
            return when.isoformat()
        if style == 4:
            return f"{when.day}-{when:%b}-{when.year % 100:02d}"
        return datetime.datetime(when.year, when.month, when.day)

    def inches(self, value: float, metric: bool):
        """A length under a heading in inches; metric joints name their unit in the cell."""
        if metric:
            return f"{value:g} mm"
        sixteenths = round(value * 16)
        if abs(value * 16 - sixteenths) < 0.02 and sixteenths % 16 and self.chance(0.4):
            whole, rest = divmod(sixteenths, 16)
            divide = np.gcd(rest, 16)
            return f"{whole}-{rest // divide}/{16 // divide}" if whole else f"{rest // divide}/{16 // divide}"
        return f'{value:g}"' if self.chance(0.05) else round(float(value), 3)

    def pressure(self, psi: float, metric: bool, known: float):
        """A pressure under a heading without a unit."""
        if not self.chance(known):
            return None
        bar, style = psi * 0.06894757, self.rng.random()
        if metric:
            return f"{bar:.1f} bar" if style < 0.8 else (f"{10 * round(psi * 0.6894757)} kPa" if style < 0.9 else round(bar, 1))
        if style < 0.60:
            return int(round(psi))
        return f"{psi:.0f} psi" if style < 0.88 else (f"{bar:.1f} bar" if style < 0.95 else f"{10 * round(psi * 0.6894757)} kPa")


KNOWN_TORQUE = {"early": 0.05, "big": 0.30, "mixed": 0.72, "loose": 0.85, "metric": 0.28}
KNOWN_CLASS = {"early": 0.42, "big": 0.66, "mixed": 0.75, "loose": 0.92, "metric": 0.50}
KNOWN_THICKNESS = {"early": 0.12, "big": 0.30, "mixed": 0.35, "loose": 0.60, "metric": 0.30}
PRESSURE_CLASS = {"PE3408": 1600.0, "PE3608": 1600.0, "PE4710": 2000.0}


def _pipe(joint, pen: Pen, metric: bool) -> dict:
    size = f"{joint.size:g}"
    number = int(joint.size)
    written = pen.one_of((f"DN{size}", f"DN{size}", f"DN {size}", f"{size} mm", number)) if metric else pen.one_of((number,) * 5 + (f'{size}"', f'{size}"', f"{size} in", f"NPS {size}"))
    ratio = joint.ratio if joint.ratio % 1 else int(joint.ratio)
    if metric:
        rated = "PN16" if joint.ratio < 14 else "PN10"
    else:
        rated = round(PRESSURE_CLASS[joint.material] / (joint.ratio - 1))
        rated = pen.one_of((f"PC {rated}", f"{rated} psi", f"PC{rated}"))
    return {
        "size": written,
        "system": pen.word({"ISO": "metric"}.get(joint.system, joint.system), 0.7),
        "ratio": pen.one_of((ratio, ratio, ratio, f"DR {ratio}", f"DR{ratio}", f"SDR {ratio}")) if pen.chance(0.96) else None,
        "material": pen.word(joint.material, 0.93),
        "pressure_class": rated if pen.chance(0.45) else None,
    }


def _ring(joint, pen: Pen, metric: bool) -> dict:
    class_known = pen.chance(KNOWN_CLASS[joint.practice])
    thick = pen.chance(KNOWN_THICKNESS[joint.practice])
    shaped = joint.ring_form == "contoured"
    rated = pen.chance(0.8 if shaped else 0.25)
    return {
        "ring_standard": pen.word(joint.ring_standard, 0.8 if class_known else 0.35),
        "ring_class": pen.word(joint.ring_class) if class_known else None,
        "ring_material": pen.word(joint.ring_material, 0.6),
        "ring_form": pen.word(joint.ring_form, 0.9 if shaped else 0.4),
        "ring_section": joint.ring_section if joint.ring_section and pen.chance(0.6) else None,
        "ring_thickness": pen.inches(round(joint.ring_thickness, 2 if metric or shaped else 4), metric) if thick else None,
        "ring_outside": pen.inches(joint.ring_outside, metric) if pen.chance(0.25) else None,
        "ring_bore": pen.inches(joint.ring_bore, metric) if pen.chance(0.15) else None,
        "bolt_circle": pen.inches(joint.bolt_circle, metric) if pen.chance(0.25) else None,
        "stated_rating": (f"PN{joint.stated_rating:g}" if metric else f"{joint.stated_rating:g} psi") if rated else None,
        "safety_factor": 2 if rated and shaped else None,
        "rating_basis": pen.word({"loose": "loose ring", "welded": "slip on"}[joint.rating_basis]) if rated and pen.chance(0.7) else None,
        "coating": pen.word({"none": "bare", "paint": "painted", "galvanized": "galv", "epoxy": "epoxy"}[joint.coating], 0.5),
        "hub_outside": pen.inches(joint.hub_outside, metric) if pen.chance(0.18) else None,
    }


def _bolts(joint, pen: Pen, metric: bool) -> dict:
    bolts_known = pen.chance(0.7)
    known = pen.chance(KNOWN_TORQUE[joint.practice])
    torque = (f"{joint.torque:.0f} Nm" if pen.chance(0.8) else f"{joint.torque:.0f} N.m") if metric else (int(joint.torque) if pen.chance(0.9) else f"{joint.torque:.0f} ft-lb")
    return {
        "bolt_count": int(joint.bolt_count) if bolts_known else None,
        "bolt_diameter": (f"M{joint.bolt_diameter:g}" if metric else pen.inches(joint.bolt_diameter, False)) if bolts_known else None,
        "bolt_grade": pen.word(joint.bolt_grade, 0.55),
        "torque": torque if known else None,
        "lubrication": pen.word(joint.bolt_lubrication, 0.6 if known else 0.2),
        "method": pen.word(joint.tightening_method, 0.8 if known else 0.25),
        "last_tightened": pen.date(joint.last_tightened + 0.1 + 0.8 * pen.rng.random()) if joint.last_tightened and pen.chance(0.8) else None,
        "gasket": pen.word(joint.gasket, 0.55),
        "mating_side": pen.word(joint.mating_side, 0.75),
    }


def _site(joint, pen: Pen, metric: bool) -> dict:
    fahrenheit = round(joint.temperature * 1.8 + 32)
    pumped = joint.zone == "Upland"
    return {
        "setting": pen.word(joint.setting, 0.93),
        "restraint": pen.word(joint.restraint, 0.35),
        "environment": pen.word(joint.environment, 0.5),
        "temperature": (f"{joint.temperature:g} C" if metric else fahrenheit) if pen.chance(0.5) else None,
        "operating": pen.pressure(joint.operating, metric, 0.9),
        "test": (f"{joint.test * 0.06894757:.1f} bar" if metric else int(joint.test)) if pen.chance(0.3) else None,
        "recurrent": pen.pressure(joint.recurrent, metric, 0.75 if pumped else 0.35),
        "occasional": pen.pressure(joint.occasional, metric, 0.5 if pumped else 0.25),
        "cycles": int(joint.cycles) if pen.chance(0.85 if pumped else 0.2) else None,
        "cycle_range": (f"{joint.cycle_range * 0.06894757:.2f} bar" if metric else int(joint.cycle_range)) if pen.chance(0.8 if pumped else 0.15) else None,
    }


RESULTS = ("ok", "light rust, no gap", "bolts rusty", "ring dished, face gap", "wet face, no drip", "coating gone, pits", "good", "water in chamber")


def _history(joint, pen: Pen, metric: bool) -> dict:
    year = int(joint.year)
    laid = pen.one_of((year,) * 6 + (f"{year}-{int(pen.rng.integers(1, 13)):02d}", f"c. {year}", pen.date(year + 0.999 * pen.rng.random())))
    made = {"year": laid if pen.chance(0.94) else pen.one_of((None, None, f"{year // 10 * 10}s")), "crew": joint.crew if pen.chance(0.6) else None}
    if pen.chance(0.09):
        years = 2026 - year
        result = pen.one_of(RESULTS)
        kept = float(np.clip(pen.rng.normal(0.55, 0.15), 0.15, 0.95))
        found = 5 * round(joint.torque * kept / 5)
        made["inspected"] = pen.date(max(year + 1.0, 2026.0 - 10.0 * pen.rng.random() ** 2 - 0.3))
        made["finding"] = result
        made["torque_found"] = (f"{found} Nm" if metric else f"{found} ft-lb") if pen.chance(0.5) else None
        made["gap"] = (0.5 if "gap" in result and "no gap" not in result else 0) if pen.chance(0.5) else None
        made["corrosion"] = round(0.03 * years + 0.3 * pen.rng.random(), 1) if "pits" in result or "rust" in result else None
    leaks = joint.leak_years
    made["leaks"] = "; ".join(f"{int(y)}-{1 + int(y % 1 * 12):02d}" for y in leaks) if leaks and pen.chance(0.7) else None
    return made


def _rest(joint, pen: Pen, metric: bool) -> dict:
    notes = ("no drawing", "see as-built", "ring replaced by contractor, class not noted", "access by permit only", "valve passes", "measured from old plan")
    return {
        "customers": int(joint.customers) if pen.chance(0.9) else None,
        "crossing": joint.crossing if joint.crossing != "none" else (pen.one_of(("none", "no", None, None, None))),
        "leak_cost": (int(joint.leak_cost) if pen.chance(0.8) else f"{joint.leak_cost:,}") if pen.chance(0.85) else None,
        "retrofit_cost": (int(joint.retrofit_cost) if pen.chance(0.7) else f"${joint.retrofit_cost:,}") if pen.chance(0.6) else None,
        "access_group": joint.access_group,
        "gnss": pen.one_of((1, 2, 4, 5, None)),
        "notes": pen.one_of(notes) if pen.chance(0.05) else None,
    }


def write_rows(joints: pd.DataFrame) -> pd.DataFrame:
    """One row of cells per joint, columns KEYS, index as in `joints`."""
    rows = []
    for k, joint in enumerate(joints.itertuples(index=False)):
        pen = Pen(np.random.default_rng([SEED, 7, k]))
        metric = joint.practice == "metric"
        row = {
            "joint_id": joint.joint_id,
            "main": joint.main_id,
            "zone": joint.zone if pen.chance(0.97) else joint.zone.upper(),
            "chainage": f"{joint.chainage:.1f} m" if metric else round(joint.chainage / FT, 1),
            "x": round(joint.x, 2),
            "y": round(joint.y, 2),
            "elevation": f"{joint.elevation:.1f} m" if metric else round(joint.elevation / FT, 1),
        }
        for part in (_pipe, _ring, _bolts, _site, _history, _rest):
            row.update(part(joint, pen, metric))
        rows.append([row.get(key) for key in KEYS])
    frame = pd.DataFrame(rows, columns=list(KEYS), dtype=object)
    return frame.where(frame.notna(), None)
