"""Loose-ring rating against size, per drilling class, with the stated rating and the fleet's own joints."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
from matplotlib.figure import Figure

from screener.inventory.read import understand
from screener.limits import assess_limits
from screener.outputs.run_folder import whole_file
from screener.pressure.step import with_surge_by_formula
from screener.records import Ledger, RawTable
from screener.screening import Screening
from screener.settings import Settings
from screener.standards.rings import CLASSES_OF, ring_table
from screener.standards.tables import INCH
from screener.units import to_unit

INK, BAND, STATED, DOT = "#1F2A37", "#7C9CBF", "#B3541E", "#1F2A37"
FEWEST_JOINTS = 8
MOST_PANELS = 6


def class_ratings(settings: Settings) -> pd.DataFrame:
    """Rating of every published ring with the tool's own defaults (DR 11, PE on PE, no gasket): SI.

    Columns: standard, ring_class, flange_size, loose_ring_rating, loose_ring_rating_long_term, stated_rating.
    """
    table = ring_table()
    keep = np.isfinite(table.thickness) & (table.flange_size >= 0.045) & (table.flange_size <= 1.25)
    metric = table.standard == "EN 1092-1"
    # A metric flange carries the larger pipe of its DN; the inventory's own rule finds it from the DN.
    cells = pd.DataFrame(
        {
            0: [f"c{i}" for i in range(len(table))],
            1: [f"DN{s * 1000:.0f}" if m else f"{s / INCH:.4g} in" for s, m in zip(table.flange_size, metric, strict=True)],
            2: np.where(metric, "ISO", "IPS"),
            3: table.standard,
            4: table.ring_class,
            5: ["23 C"] * len(table),
        },
        dtype=object,
    )[keep].reset_index(drop=True)
    cells[6], cells[7], cells[8], cells[9] = "11", "1 bar", "PE", "none"
    headings = ("Joint", "Nominal size", "Size system", "Ring standard", "Ring class", "Operating temperature", "DR", "Operating pressure", "Mating side", "Gasket")
    raw = RawTable("published rings", "", headings, cells, np.arange(1, len(cells) + 1))
    inventory = understand(raw, settings, Ledger(), mapping=None, sections={})
    fleet = with_surge_by_formula(inventory.fleet, Ledger(), recurrent_velocity_change=0.0, occasional_velocity_change=0.0)
    details = assess_limits(fleet, settings.safety_factor, Ledger()).details
    at = fleet.position
    return pd.DataFrame(
        {
            "standard": fleet.ring.standard,
            "ring_class": fleet.ring.ring_class,
            "flange_size": inventory.gaps["flange_size"][at],
            "loose_ring_rating": details["loose_ring_rating"],
            "loose_ring_rating_long_term": details["loose_ring_rating_long_term"],
            "stated_rating": table.stated_rating[keep][at],
        }
    )


def capacity_figure(screening: Screening) -> Figure | None:
    """One panel per class with enough joints; None when no class has."""
    system = screening.settings.units
    size_unit, pressure_unit = ("in", "psi") if system == "us" else ("mm", "bar")
    ranked = screening.table[(screening.table["status"] == "ranked") & (screening.table["ring_form"] == "flat plate")]
    counts = ranked.groupby(["ring_standard", "ring_class"]).size()
    order = [(s, c) for s, classes in CLASSES_OF.items() for c in classes if counts.get((s, c), 0) >= FEWEST_JOINTS]
    order = sorted(sorted(order, key=lambda k: -counts[k])[:MOST_PANELS], key=order.index)
    if not order:
        return None
    curves = class_ratings(screening.settings)
    columns = min(3, len(order))
    rows = -(-len(order) // columns)
    figure = Figure(figsize=(3.6 * columns, 2.9 * rows + 0.7), layout="constrained")
    panels = figure.subplots(rows, columns, squeeze=False).ravel()
    for panel, key in zip(panels, order, strict=False):
        _panel(panel, key, curves, ranked, screening, size_unit, pressure_unit)
    for panel in panels[len(order) :]:
        panel.set_axis_off()
    figure.supxlabel(f"nominal flange size ({size_unit})", fontsize=9, color=INK)
    figure.supylabel(f"rating at safety factor {screening.settings.safety_factor:g} ({pressure_unit})", fontsize=9, color=INK)
    figure.suptitle("What the ring carries loose, and what its paper says", fontsize=11, color=INK, x=0.01, ha="left")
    return figure


def _panel(panel, key, curves, ranked, screening, size_unit, pressure_unit):
    standard, ring_class = key
    curve = curves[(curves["standard"] == standard) & (curves["ring_class"] == ring_class)].sort_values("flange_size")
    size = to_unit(curve["flange_size"].to_numpy(), size_unit)
    short, aged, stated = (to_unit(curve[c].to_numpy(), pressure_unit) for c in ("loose_ring_rating", "loose_ring_rating_long_term", "stated_rating"))
    own = ranked[(ranked["ring_standard"] == standard) & (ranked["ring_class"] == ring_class)]
    flange = screening.inventory.gaps["flange_size"][own["position"].to_numpy()]
    panel.scatter(to_unit(flange, size_unit), to_unit(own["loose_ring_rating"].to_numpy(dtype=float), pressure_unit), s=7, color=DOT, alpha=0.35, linewidths=0, label="joints of the fleet", zorder=3)
    panel.fill_between(size, aged, short, color=BAND, alpha=0.45, linewidth=0, label="loose: aged to fresh hub")
    panel.plot(size, short, color=BAND, linewidth=1.4)
    panel.plot(size, stated, color=STATED, linewidth=1.6, linestyle=(0, (5, 2)), label="stated rating")
    panel.set_title(f"{standard} {ring_class}, {len(own):,} joints", fontsize=9, color=INK, loc="left")
    panel.tick_params(labelsize=8, colors=INK)
    panel.spines[["top", "right"]].set_visible(False)
    top = np.nanmax(np.concatenate([stated, own["loose_ring_rating"].pipe(lambda v: to_unit(v.to_numpy(dtype=float), pressure_unit))]))
    panel.set_ylim(0, 1.25 * min(top, 4 * np.nanmax(stated)))
    limit = np.nanmax(to_unit(flange, size_unit)) if len(flange) else size.max()
    panel.set_xlim(0, 1.08 * limit)
    panel.legend(fontsize=6.5, frameon=False, loc="upper right")


def write_capacity_plot(screening: Screening, path: Path) -> bool:
    """ring_capacity.png; False when there is nothing to draw."""
    figure = capacity_figure(screening)
    if figure is None:
        return False
    with whole_file(path) as temporary:
        figure.savefig(temporary, dpi=150, metadata={"Software": None})
    return True
