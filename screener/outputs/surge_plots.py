"""A surge run as files: tables of the envelope, the joints and the histories, two pictures, and a page of text with what limits them."""

from __future__ import annotations

import csv
from dataclasses import replace
from pathlib import Path

import numpy as np

from screener.outputs.run_folder import make_folder, whole_file, write_text
from screener.pressure.main_profile import Main, read_main
from screener.pressure.transient_case import NEEDS_STUDY, SurgeCase, SurgeRun, solve_main
from screener.pressure.water import GRAVITY

KPA, PSI, FOOT = 1e3, 6894.757293168, 0.3048
MOST_HISTORY_ROWS = 20_000
INK, HIGH, LOW, GROUND, LIMIT = "#222222", "#b2182b", "#2166ac", "#7f6a4d", "#555555"

SCREENING = (
    "This is a screening by a one-dimensional model of one main. It does not replace a transient study or a design; a licensed engineer decides.",
    "The first front in polyethylene can be stiffer than the handbook modulus says: run more than one modulus multiplier.",
)


def run_surge(path: str | Path, out_folder: str | Path, *, progress=None) -> SurgeRun:
    """Read a main, follow its surge, and write the results into a folder. progress: called with the share done.

    The returned run lists what was written in `files`.
    """
    main = read_main(path)
    run = solve_main(main, progress=progress)
    folder = make_folder(out_folder)
    files = [
        _write_table(folder / "surge_envelope.csv", _envelope_rows(run)),
        _write_table(folder / "surge_joints.csv", _joint_rows(run)),
        _write_table(folder / "surge_history.csv", _history_rows(run)),
        envelope_picture(run, folder / "surge_envelope.png"),
        history_picture(run, folder / "surge_history.png"),
        folder / "surge.txt",
    ]
    write_text(files[-1], surge_text(run))
    return replace(run, files=tuple(files))


def surge_text(run: SurgeRun) -> str:
    """What was run, how the grid and the water balance stand, and the cautions, in plain text."""
    main = run.main
    lines = [main.name, "=" * len(main.name), ""]
    lines += [f"CAUTION: {text}." for text in run.cautions]
    lines += [""] if run.cautions else []
    for case in run.cases:
        lines += _case_lines(main, case)
    if len(main.joint_id):
        worst = int(np.nanargmax(np.append(run.joint_maximum, -np.inf))) if np.isfinite(run.joint_maximum).any() else None
        off = int((~np.isfinite(run.joint_maximum)).sum())
        if worst is not None:
            lines.append(f"Highest pressure at a joint: {_both(run.joint_maximum[worst])} at {main.joint_id[worst]}.")
        if off:
            lines.append(f"{off} joints lie beyond the ends of the main and have no result.")
        lines.append("")
    if main.assumed:
        lines += ["Assumed, because the file does not say:", *(f"- {text}" for text in main.assumed), ""]
    lines += [f"- {text}" for text in SCREENING]
    return "\n".join(lines) + "\n"


def _case_lines(main: Main, case: SurgeCase) -> list[str]:
    result = case.result
    speeds = case.sections.wave_speed
    lines = [
        f"Dynamic modulus of plastic walls times {case.modulus_multiplier:g}",
        f"  wave speed {speeds.min():.0f} to {speeds.max():.0f} m/s; steady flow {1e3 * result.steady.flow_in[0]:.1f} l/s",
        f"  highest pressure {_both(result.pressure(result.maximum_head).max())}, lowest {_both(result.pressure(result.minimum_head).min())}",
        f"  {len(result.grid.section)} reaches, time step {result.grid.time_step:.4f} s, Courant number 1",
        f"  water balance off by {100 * result.mass_error:.2g} % of what moved",
    ]
    for k, change in enumerate(result.grid.speed_change):
        if k < 20:
            lines.append(f"  section from {case.sections.start[k]:.0f} m: {result.grid.reaches[k]} reaches, wave speed {speeds[k]:.0f} m/s changed by {100 * change:+.2f} %")
    if len(speeds) > 20:
        lines.append(f"  and {len(speeds) - 20} more sections; the largest change is {100 * result.grid.worst_change:.2f} %")
    if np.isfinite(case.check_valve_shut_at):
        lines.append(f"  the check valve shuts at {case.check_valve_shut_at:.1f} s")
    if result.column_separation:
        lines.append(f"  a vapour cavity first forms at {result.first_cavity_time:.1f} s; largest cavity {1e3 * result.cavity_volume.max():.2f} l")
    return [*lines, ""]


def _both(pressure: float) -> str:
    return f"{pressure / KPA:.0f} kPa ({pressure / PSI:.0f} psi)"


# ---------------------------------------------------------------- tables


def _envelope_rows(run: SurgeRun):
    yield [
        "modulus_multiplier", "chainage_m", "elevation_m", "steady_head_m", "maximum_head_m", "minimum_head_m", "steady_pressure_kpa",
        "maximum_pressure_kpa", "minimum_pressure_kpa", "maximum_before_cavity_kpa", "largest_cavity_l", "rating_kpa",
    ]  # fmt: skip
    for case in run.cases:
        r = case.result
        rating = np.append(case.sections.rating[r.grid.section], case.sections.rating[-1])
        columns = [
            r.grid.chainage, r.elevation, r.steady.head, r.maximum_head, r.minimum_head, r.pressure(r.steady.head) / KPA,
            r.pressure(r.maximum_head) / KPA, r.pressure(r.minimum_head) / KPA, r.pressure(r.maximum_before_cavity) / KPA,
            1e3 * r.cavity_volume, rating / KPA,
        ]  # fmt: skip
        for row in zip(*columns, strict=True):
            yield [f"{case.modulus_multiplier:g}", *(_cell(v) for v in row)]


def _joint_rows(run: SurgeRun):
    yield [
        "joint_id", "chainage_m", "steady_pressure_kpa", "maximum_pressure_kpa", "minimum_pressure_kpa", "maximum_before_cavity_kpa",
        "maximum_pressure_psi", "minimum_pressure_psi", "remark",
    ]  # fmt: skip
    for k, name in enumerate(run.main.joint_id):
        remark = NEEDS_STUDY if run.joint_needs_study[k] else ""
        if not np.isfinite(run.joint_maximum[k]):
            remark = "beyond the ends of the main"
        values = [run.joint_steady[k] / KPA, run.joint_maximum[k] / KPA, run.joint_minimum[k] / KPA, run.joint_before_cavity[k] / KPA]
        values += [run.joint_maximum[k] / PSI, run.joint_minimum[k] / PSI]
        yield [_harmless(str(name)), _cell(run.main.joint_chainage[k]), *(_cell(v) for v in values), remark]


def _history_rows(run: SurgeRun):
    places = run.main.history_chainage
    yield ["modulus_multiplier", "time_s", *(f"head_at_{place:g}_m" for place in places), "flow_in_l_per_s", "flow_out_l_per_s"]
    for case in run.cases:
        r = case.result
        stride = -(-len(r.time) // MOST_HISTORY_ROWS)
        for k in range(0, len(r.time), stride):
            yield [f"{case.modulus_multiplier:g}", f"{r.time[k]:.4f}", *(_cell(v) for v in r.history_head[k]), *(_cell(1e3 * v) for v in r.end_flow[k])]


def _cell(value: float) -> str:
    return f"{value:.3f}" if np.isfinite(value) else ""


def _harmless(text: str) -> str:
    """A cell that a spreadsheet does not take for a formula."""
    return "'" + text if text[:1] in "=+-@\t\r" else text


def _write_table(path: Path, rows) -> Path:
    with whole_file(path) as temporary, open(temporary, "w", newline="", encoding="utf-8") as stream:
        csv.writer(stream).writerows(rows)
    return path


# ---------------------------------------------------------------- pictures


def envelope_picture(run: SurgeRun, path: Path) -> Path:
    """Highest and lowest head of all runs over the profile, with the pipe, its pressure rating and vapour pressure."""
    figure, axes = _figure(10, 5.6)
    main = run.main
    place = np.unique(np.concatenate([main.chainage, *(case.result.grid.chainage for case in run.cases)]))
    ground = np.interp(place, main.chainage, main.elevation)
    high = np.max([case.result.head_at(case.result.maximum_head, place) for case in run.cases], axis=0)
    low = np.min([case.result.head_at(case.result.minimum_head, place) for case in run.cases], axis=0)
    early = np.max([case.result.head_at(case.result.maximum_before_cavity, place) for case in run.cases], axis=0)
    steady = run.cases[0].result
    axes.fill_between(place, low, high, color="#dddddd", lw=0)
    axes.plot(place, high, color=HIGH, lw=1.8, label="highest head")
    if run.needs_study:
        axes.plot(place, early, color=HIGH, lw=1.0, ls=":", label="highest head before a cavity formed")
    axes.plot(place, steady.head_at(steady.steady.head, place), color=INK, lw=1.0, label="steady head")
    axes.plot(place, low, color=LOW, lw=1.8, label="lowest head")
    axes.plot(main.chainage, main.elevation, color=GROUND, lw=2.2, label="pipe axis")
    rating = run.main.pipe.rating / (main.density * GRAVITY)
    if np.isfinite(rating).any():
        for k, value in enumerate(rating):
            ends = main.chainage[k : k + 2], main.elevation[k : k + 2] + value
            axes.plot(*ends, color=LIMIT, lw=1.2, ls="--", label="pressure rating" if k == int(np.flatnonzero(np.isfinite(rating))[0]) else None)
    seen = np.isfinite(run.joint_maximum)
    axes.plot(main.joint_chainage[seen], np.interp(main.joint_chainage[seen], main.chainage, main.elevation), "o", ms=3.5, color=INK, label="joints" if seen.any() else None)
    axes.set_xlabel("chainage (m)")
    axes.set_ylabel("head, elevation (m)")
    _title(axes, run)
    axes.set_xlim(place[0], place[-1])
    axes.set_ylim(min(ground.min(), low.min()) - 3, None)
    return _save(figure, axes, path)


def history_picture(run: SurgeRun, path: Path) -> Path:
    """Head against time at the chosen points, one panel each; the runs differ in line style."""
    places = run.main.history_chainage[:6]
    figure, panels = _figure(10, 1.2 + 1.9 * len(places), rows=len(places))
    for k, (place, axes) in enumerate(zip(places, np.atleast_1d(panels), strict=True)):
        for case, style in zip(run.cases, ("-", "--", "-.", ":", (0, (1, 3))), strict=False):
            axes.plot(case.result.time, case.result.history_head[:, k], color=INK, lw=1.0, ls=style, label=f"modulus x {case.modulus_multiplier:g}")
        axes.set_ylabel(f"head (m)\nat {place:g} m")
        axes.set_xlim(0, run.main.duration)
        axes.ticklabel_format(axis="y", useOffset=False)
        low, high = axes.get_ylim()
        if high - low < 1:  # a head that stays is a flat line, not magnified rounding
            axes.set_ylim((low + high) / 2 - 1, (low + high) / 2 + 1)
        axes.grid(alpha=0.25)
    axes.set_xlabel("time (s)")
    _title(np.atleast_1d(panels)[0], run)
    return _save(figure, np.atleast_1d(panels)[0], path)


def _figure(width: float, height: float, rows: int = 1):
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    figure = Figure(figsize=(width, height), layout="constrained")
    FigureCanvasAgg(figure)
    return figure, figure.subplots(rows, 1, sharex=rows > 1)


def _title(axes, run: SurgeRun) -> None:
    name = "".join(c if c.isprintable() else " " for c in run.main.name)[:120]
    axes.set_title(name, loc="left", fontsize=11, parse_math=False)
    remark = "needs a transient study: vapour pressure is reached" if run.needs_study else "screening"
    axes.set_title(remark, loc="right", fontsize=9, color=HIGH if run.needs_study else LIMIT, parse_math=False)


def _save(figure, axes, path: Path) -> Path:
    axes.grid(alpha=0.25)
    figure.legend(*axes.get_legend_handles_labels(), loc="outside lower center", ncols=4, fontsize=8, frameon=False)
    with whole_file(path) as temporary:
        figure.savefig(temporary, dpi=140, metadata={"Software": None})
    return path
