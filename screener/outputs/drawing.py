"""The joint's section, to scale."""

from __future__ import annotations

import io

import matplotlib
import numpy as np
from matplotlib.figure import Figure
from matplotlib.patches import Polygon, Rectangle

from screener.outputs.shown import number
from screener.records import Fleet

INK, PE, METAL, BOLT, LOAD = "#1F2A37", "#C9D3DC", "#8C97A3", "#5B6673", "#B3541E"


def joint_section_svg(fleet: Fleet, i: int, lever_arm: float, neutral_radius: float, system: str) -> str:
    """SVG text of joint i's half section: pipe, collars, rings, bolt, contact pressure, dimensions."""
    unit = "in" if system == "us" else "mm"
    scale = 1000.0
    pipe, hub, ring, bolts = fleet.pipe, fleet.hub, fleet.ring, fleet.bolts
    ri, ro = scale * pipe.bore_diameter[i] / 2, scale * pipe.outside_diameter[i] / 2
    rh, h = scale * hub.outside_diameter[i] / 2, scale * hub.thickness[i]
    a, b, t = scale * ring.bore_diameter[i] / 2, scale * ring.outside_diameter[i] / 2, scale * ring.thickness[i]
    rb, d = scale * ring.bolt_circle_diameter[i] / 2, scale * bolts.diameter[i]
    both = bool(fleet.face.mating_side_is_pe[i])
    length = 2.2 * (h + t)
    with matplotlib.rc_context({"svg.fonttype": "none", "svg.hashsalt": "joint", "font.family": "sans-serif", "font.size": 9}):
        figure = Figure()
        axes = figure.add_axes((0.0, 0.0, 1.0, 1.0))
        sides = (1, -1) if both else (1,)
        for side in sides:
            wall = [(0, ri), (side * length, ri), (side * length, ro), (side * h, ro), (side * h, rh), (0, rh)]
            axes.add_patch(Polygon(wall, closed=True, facecolor=PE, edgecolor=INK, linewidth=1))
            axes.add_patch(Rectangle((side * h if side > 0 else -h - t, a), t, b - a, facecolor=METAL, edgecolor=INK, linewidth=1))
        if not both:
            inner = scale * fleet.face.pressure_diameter[i] - rh
            axes.add_patch(Rectangle((-t, inner), t, b - inner, facecolor=METAL, edgecolor=INK, linewidth=1, hatch="//"))
            axes.add_patch(Rectangle((-length, inner), length - t, 0.25 * t, facecolor=METAL, edgecolor=INK, linewidth=1, hatch="//"))
        left = -(h + t) if both else -t
        shank = (left - 0.9 * d, h + t + 0.9 * d)
        axes.add_patch(Rectangle((shank[0], rb - d / 2), shank[1] - shank[0], d, facecolor=BOLT, edgecolor=INK, linewidth=1, alpha=0.9))
        for x in (h + t, left - 0.8 * d):
            axes.add_patch(Rectangle((x, rb - 0.8 * d), 0.8 * d, 1.6 * d, facecolor=BOLT, edgecolor=INK, linewidth=1))
        if np.isfinite(lever_arm) and np.isfinite(neutral_radius):
            _contact(axes, scale, a, min(rh, b), rb, h, t, lever_arm, neutral_radius)
        _dimensions(axes, unit, scale, ri, ro, rh, a, b, rb, h, t, length)
        low, high = ri - 0.08 * (b - ri), b + 0.5 * (b - ri)
        # Labels need some twelve lines of height; the picture is as wide as they are long.
        start, end = min(shank[0] - 0.8 * d, -length) - 0.05 * length, length + 1.15 * length + 1.1 * (high - low)
        axes.set_ylim(low, high)
        axes.set_xlim(start, end)
        width = 7.4
        figure.set_size_inches(width, width * (high - low) / (end - start))
        axes.set_aspect("equal")
        axes.set_axis_off()
        buffer = io.StringIO()
        figure.savefig(buffer, format="svg", metadata={"Date": None, "Creator": None})
    text = buffer.getvalue()
    return text[text.index("<svg") :]


def _contact(axes, scale, a, reach, rb, h, t, lever_arm, neutral_radius):
    """The hub's pressure on the ring, its resultant and the lever arm."""
    start = max(a, scale * neutral_radius)
    tall = 0.55 * t
    begin = tall * (start - scale * neutral_radius) / max(reach - scale * neutral_radius, 1e-9)
    axes.add_patch(Polygon([(h, start), (h + begin, start), (h + tall, reach), (h, reach)], closed=True, facecolor=LOAD, alpha=0.55, edgecolor=LOAD))
    resultant = rb - scale * lever_arm
    axes.annotate("", (h + t, resultant), (h - 0.9 * t, resultant), arrowprops={"arrowstyle": "-|>", "color": LOAD, "lw": 1.6})
    x = h + t + 1.5 * t
    axes.annotate("", (x, rb), (x, resultant), arrowprops={"arrowstyle": "<->", "color": LOAD, "lw": 1.2})
    axes.plot([h + t, x + 0.2 * t], [resultant, resultant], color=LOAD, linewidth=0.6)
    axes.text(x + 0.15 * t, (rb + resultant) / 2, " e", color=LOAD, va="center", style="italic", fontsize=11)


def _dimensions(axes, unit, scale, ri, ro, rh, a, b, rb, h, t, length):
    """Labels at the right, each on a thin leader from what it names."""
    digits = 2 if unit == "in" else 0
    lines = [
        (b, f"ring outside diameter {number(2 * b / scale, unit, digits)}"),
        (rb, f"bolt circle {number(2 * rb / scale, unit, digits)}"),
        (rh, f"hub outside diameter {number(2 * rh / scale, unit, digits)}"),
        (a, f"ring bore {number(2 * a / scale, unit, digits)}"),
        (ro, f"pipe outside diameter {number(2 * ro / scale, unit, digits)}"),
        (ri, f"pipe bore {number(2 * ri / scale, unit, digits)}"),
    ]
    gap = max(0.075 * (b - ri) * 1.9, 1e-9)
    place = b + 0.1 * (b - ri)
    x = 1.35 * length
    for radius, words in lines:
        place = min(place, radius + 0.12 * (b - ri))
        start = length if radius in (ro, ri) else h + t if radius in (a, b) else h + t
        axes.plot([start, x - 0.1 * length, x], [radius, place, place], color=INK, linewidth=0.5, alpha=0.6)
        axes.text(x + 0.03 * length, place, words, va="center", color=INK)
        place -= gap
    axes.annotate("", (h, b + 0.12 * (b - ri)), (h + t, b + 0.12 * (b - ri)), arrowprops={"arrowstyle": "<->", "color": INK, "lw": 0.8})
    axes.text(h + t / 2, b + 0.17 * (b - ri), f"ring {number(t / scale, unit, digits)}", ha="center", color=INK)
    axes.annotate("", (0, b + 0.33 * (b - ri)), (h, b + 0.33 * (b - ri)), arrowprops={"arrowstyle": "<->", "color": INK, "lw": 0.8})
    axes.text(h / 2, b + 0.38 * (b - ri), f"collar {number(h / scale, unit, digits)}", ha="center", color=INK)
