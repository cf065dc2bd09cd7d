"""Sections of the page that appear when later steps leave their results: envelopes, rank bounds, budget curve."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd
from bokeh.models import ColumnDataSource, NumeralTickFormatter

from screener.outputs.page_plots import BAR, INK, plain_figure
from screener.units import to_unit

MOST_MAINS = 12
MOST_BOUNDS = 60


@dataclass(frozen=True, eq=False)
class MoreResults:
    """Results beyond the screening, SI; None where there are none.

    envelopes: main_id, chainage (m), lowest_pressure, steady_pressure, highest_pressure (Pa gauge).
    rank_bounds: joint_id, rank, rank_low, rank_high (nine in ten of the drawn rankings lie between).
    budget: cost, loss_avoided (owner's currency; per year), one row per budget.
    """

    envelopes: pd.DataFrame | None = None
    rank_bounds: pd.DataFrame | None = None
    budget: pd.DataFrame | None = None


@dataclass(frozen=True, eq=False)
class Section:
    """One section of the page: its pictures by name, with a title each."""

    title: str
    words: str
    plots: dict[str, tuple[str, object]]


def more_sections(more: MoreResults | None, units: str) -> list[Section]:
    """The sections that have data, in the order of the page."""
    if more is None:
        return []
    made = []
    if more.envelopes is not None and len(more.envelopes):
        made.append(envelope_section(more.envelopes, units))
    if more.rank_bounds is not None and len(more.rank_bounds):
        made.append(bounds_section(more.rank_bounds))
    if more.budget is not None and len(more.budget):
        made.append(budget_section(more.budget))
    return made


def envelope_section(frame: pd.DataFrame, units: str) -> Section:
    """Lowest, steady and highest pressure along each main; the mains with the largest rise first."""
    length, pressure = ("ft", "psi") if units == "us" else ("m", "bar")
    rise = (frame["highest_pressure"] - frame["steady_pressure"]).groupby(frame["main_id"]).max().sort_values(ascending=False, kind="stable")
    plots = {}
    for k, main in enumerate(rise.index[:MOST_MAINS]):
        some = frame[frame["main_id"] == main].sort_values("chainage", kind="stable")
        columns = {name: to_unit(some[name].to_numpy(dtype=float), pressure) for name in ("lowest_pressure", "steady_pressure", "highest_pressure")}
        source = ColumnDataSource({"chainage": to_unit(some["chainage"].to_numpy(dtype=float), length), **columns})
        plot = plain_figure(f"envelope-{k}", 280, x_axis_label=f"Chainage ({length})", y_axis_label=f"Pressure ({pressure})")
        plot.varea("chainage", "lowest_pressure", "highest_pressure", source=source, fill_color=BAR, fill_alpha=0.25)
        for name, dash, words in (("highest_pressure", "solid", "highest"), ("steady_pressure", "dashed", "steady"), ("lowest_pressure", "dotted", "lowest")):
            plot.line("chainage", name, source=source, line_color=INK, line_dash=dash, line_width=1.6, legend_label=words)
        plot.legend.orientation, plot.legend.border_line_color = "horizontal", None
        plots[f"envelope-{k}"] = (f"Main {main}", plot)
    left = len(rise) - len(plots)
    return Section("Pressure along the mains", f"The mains with the largest rise; {left:,} more are in the run's files." if left > 0 else "", plots)


def bounds_section(frame: pd.DataFrame) -> Section:
    """How far each of the first joints' rank may move."""
    some = frame.sort_values("rank", kind="stable").head(MOST_BOUNDS)
    rank = some["rank"].to_numpy(dtype=float)
    source = ColumnDataSource({"rank": rank, "low": some["rank_low"].to_numpy(dtype=float), "high": some["rank_high"].to_numpy(dtype=float)})
    plot = plain_figure("bounds", 360, x_axis_label="Rank", y_axis_label="Rank, nine times in ten")
    plot.segment("rank", "low", "rank", "high", source=source, line_color=BAR, line_width=5)
    plot.scatter("rank", "rank", source=source, size=6, fill_color=INK, line_color=INK)
    plot.y_range.flipped = True
    return Section("How sure the ranks are", f"The first {len(some):,} joints: the dot is the rank, the bar where it lies nine times in ten when what is assumed is drawn anew.", {"bounds": ("Rank and its bounds", plot)})


def budget_section(frame: pd.DataFrame) -> Section:
    """What a budget buys."""
    some = frame.sort_values("cost", kind="stable")
    source = ColumnDataSource({name: np.asarray(some[name], dtype=float) for name in ("cost", "loss_avoided")})
    plot = plain_figure("budget", 360, x_axis_label="Budget (owner's currency)", y_axis_label="Expected annual loss avoided")
    plot.step("cost", "loss_avoided", source=source, mode="after", line_color=INK, line_width=2)
    plot.scatter("cost", "loss_avoided", source=source, size=5, fill_color=BAR, line_color=INK)
    for axis in plot.axis:
        axis.formatter = NumeralTickFormatter(format="0,0")
    return Section("What a budget buys", "Each point is the best choice of work for that budget.", {"budget": ("Loss avoided by budget", plot)})
