"""The page's linked pictures: joints on the map, second measures, ratings by size.

All draw from one source through one filter, so that what is selected or
filtered in one place is so everywhere.
"""

from __future__ import annotations

import numpy as np
from bokeh.models import (
    BoxSelectTool,
    CDSView,
    ColumnDataSource,
    HoverTool,
    ImperialLength,
    IndexFilter,
    InlineStyleSheet,
    LassoSelectTool,
    MetricLength,
    PanTool,
    ResetTool,
    ScaleBar,
    Scatter,
    Span,
    TapTool,
    WheelZoomTool,
)
from bokeh.plotting import figure
from bokeh.transform import factor_cmap, factor_mark

from screener.outputs.page_data import PageData
from screener.outputs.page_map import Places

INK, PALE, RULE, BAR = "#1f2a37", "#eef1f4", "#9aa5b1", "#7c9cbf"
# Lightness falls from class to class, so that the order survives colour blindness and grey print.
CLASS_COLOURS = ("#c6d2df", "#93abc8", "#c98f4e", "#9c4f24", "#4f1d10")
CLASS_MARKS = ("circle", "circle", "square", "diamond", "triangle")
CLASS_SIZES = (5.0, 6.0, 7.0, 10.0, 10.0)
FACTORS = tuple("abcde")


def make_source(data: PageData, places: Places | None) -> tuple[ColumnDataSource, CDSView]:
    """The joints as Bokeh sees them and the view all pictures share."""
    number = data.joints["class"].to_numpy()
    columns = {name: _plain(data.joints[name]) for name in data.joints if name not in ("class", "position")}
    columns["class"] = [FACTORS[k] for k in number]
    # Marks shrink as they get many, to three fifths.
    shrink = float(np.clip(1.2 - 0.1 * np.log10(max(len(number), 1)) ** 1.2, 0.6, 1.0))
    columns["dot"] = np.asarray(CLASS_SIZES, dtype=np.float32)[number] * np.float32(shrink)
    columns["dot_chosen"] = columns["dot"] + np.float32(7)
    if "nominal_size" in columns:
        columns["size_beside"] = (columns["nominal_size"] * (1 + 0.012 * (np.arange(len(number)) * 0.618 % 1 - 0.5))).astype(np.float32)
    if places is not None:
        # In doubles: single precision would move joints in national coordinates by half a metre.
        columns["x"], columns["y"] = places.x, places.y
    source = ColumnDataSource(columns, name="joints")
    return source, CDSView(filter=IndexFilter(indices=list(range(len(number))), name="shown"))


def _plain(column):
    return column.tolist() if column.dtype == object else column.to_numpy()


def plain_figure(name: str, height: int, **more):
    """A figure in the page's look that pans and zooms."""
    plot = figure(name=name, height=height, sizing_mode="stretch_width", tools="", toolbar_location="right", output_backend="canvas", **more)
    plot.toolbar.logo = None
    plot.toolbar.stylesheets = [InlineStyleSheet(css="@media print{:host{display:none}}")]
    # The wheel alone scrolls the page.
    pan, wheel = PanTool(), WheelZoomTool(modifiers="ctrl")
    plot.add_tools(pan, wheel, ResetTool())
    plot.toolbar.active_drag, plot.toolbar.active_scroll = pan, wheel
    plot.outline_line_color = RULE
    plot.grid.grid_line_color = "#e3e7eb"
    for axis in plot.axis:
        axis.axis_line_color, axis.major_tick_line_color, axis.minor_tick_line_color = RULE, RULE, None
        axis.axis_label_text_font_style, axis.axis_label_text_font = "normal", "system-ui, sans-serif"
        axis.axis_label_text_color, axis.major_label_text_color = INK, INK
        axis.axis_label_text_font_size = axis.major_label_text_font_size = "13px"
    return plot


def _figure(name: str, height: int, **more):
    """A figure in which joints can be selected."""
    plot = plain_figure(name, height, **more)
    plot.add_tools(BoxSelectTool(description="Select joints in a box"), LassoSelectTool(description="Select joints in an outline"), TapTool())
    return plot


def _joints(plot, source, view, x: str, y: str, hover: list[tuple[str, str]]) -> None:
    """Draw the joints in class colours and shapes."""
    look = {
        "x": x,
        "y": y,
        "size": "dot",
        "marker": factor_mark("class", CLASS_MARKS, FACTORS),
        "fill_color": factor_cmap("class", CLASS_COLOURS, FACTORS),
    }
    drawn = plot.add_glyph(
        source,
        Scatter(**look, line_color=INK, line_width=0.4, fill_alpha=0.95),
        selection_glyph=Scatter(**{**look, "size": "dot_chosen"}, line_color="#000000", line_width=2.4, fill_alpha=1.0),
        nonselection_glyph=Scatter(**look, line_color=INK, line_width=0.2, fill_alpha=0.3, line_alpha=0.3),
        view=view,
    )
    plot.add_tools(HoverTool(tooltips=hover, renderers=[drawn], limit=4))


def hover_lines(data: PageData) -> list[tuple[str, str]]:
    """What a tooltip says; Bokeh writes the values as text, never as markup."""
    wanted = ("joint_id", "main_id", "rank", "utilization", "governing_limit_state", "likelihood", "loose_ring_rating", "stated_rating", "design_pressure")
    by_name = {column.name: column for column in data.columns}
    lines = []
    for name in wanted:
        if name in by_name:
            column = by_name[name]
            form = "" if column.digits is None else "{0.[000000]}" if column.significant else "{0}" if not column.digits else "{0." + "0" * column.digits + "}"
            lines.append((column.heading, "@{" + name + "}" + form))
    return lines


def map_plot(source, view, data: PageData, places: Places):
    """Joints over mains, equal scale along both axes, no background from elsewhere."""
    plot = _figure("map", 520, match_aspect=True)
    plot.axis.visible, plot.grid.visible = False, False
    plot.background_fill_color = "#fafbfc"
    if places.mains_x:
        mains = ColumnDataSource({"xs": places.mains_x, "ys": places.mains_y})
        plot.multi_line("xs", "ys", source=mains, line_color="#5d6b7a", line_width=1.6, line_alpha=0.8)
    _joints(plot, source, view, "x", "y", hover_lines(data))
    west, south, east, north = places.frame
    corners = plot.scatter([west, east], [south, north], size=0, line_alpha=0, fill_alpha=0)
    plot.x_range.renderers = plot.y_range.renderers = [corners]
    if places.unit:
        measure = ImperialLength(exclude=["in", "yd", "ch", "fur", "lea"]) if places.unit == "ft" else MetricLength(include=["m", "km"])
        bar = ScaleBar(range=plot.x_range, unit=places.unit, dimensional=measure, location="bottom_left", bar_length=0.18)
        bar.label_text_color = bar.bar_line_color = INK
        bar.background_fill_alpha, bar.border_line_color = 0.85, None
        plot.add_layout(bar)
    return plot


def measure_plot(source, view, data: PageData):
    """Utilization against a second measure: the likelihood, else the opening pressure; None without either."""
    heading = {column.name: column.heading for column in data.columns}
    if "likelihood" in heading:
        plot = _figure("measure", 420, y_axis_type="log", x_axis_label="Utilization", y_axis_label=heading["likelihood"])
        drawn = "likelihood"
    elif "opening_pressure" in heading:
        plot = _figure("measure", 420, x_axis_label="Utilization", y_axis_label=heading["opening_pressure"])
        drawn = "opening_pressure"
    else:
        return None
    plot.add_layout(Span(location=1.0, dimension="height", line_color=INK, line_dash="dashed", line_width=1))
    _joints(plot, source, view, "utilization", drawn, hover_lines(data))
    return plot


def rating_plot(source, view, data: PageData):
    """Loose-ring rating by nominal size, with the ratings on paper as strokes; None without sizes or ratings."""
    heading = {column.name: column.heading for column in data.columns}
    if "nominal_size" not in heading or "loose_ring_rating" not in heading:
        return None
    plot = _figure("ratings", 420, x_axis_label=heading["nominal_size"], y_axis_label=heading["loose_ring_rating"])
    plot.y_range.start = 0
    _joints(plot, source, view, "size_beside", "loose_ring_rating", hover_lines(data))
    if "stated_rating" in heading:
        paper = data.joints[["nominal_size", "stated_rating"]].dropna().drop_duplicates()
        strokes = ColumnDataSource({"x": paper["nominal_size"].to_numpy(), "y": paper["stated_rating"].to_numpy()})
        plot.scatter("x", "y", source=strokes, marker="dash", size=20, line_color=INK, line_width=2.2, legend_label="rating on paper")
        plot.legend.location, plot.legend.border_line_color, plot.legend.label_text_color = "top_right", RULE, INK
    return plot


def page_plots(data: PageData, places: Places | None) -> dict:
    """The pictures by the place they take on the page."""
    source, view = make_source(data, places)
    plots = {
        "map": map_plot(source, view, data, places) if places is not None else None,
        "measure": measure_plot(source, view, data),
        "ratings": rating_plot(source, view, data),
    }
    return {name: plot for name, plot in plots.items() if plot is not None}
