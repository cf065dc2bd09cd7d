"""A calculation sheet per joint: what an engineer needs to redo the numbers by hand and sign."""

from __future__ import annotations

import html
import re
import shutil
import subprocess
import tempfile
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pandas as pd

from screener import limits
from screener.columns import inventory_attributes
from screener.likelihood.explain import explain
from screener.likelihood.step import assess_likelihood
from screener.limit_names import LIMIT_STATES
from screener.mechanics.bolt_holes import bore_stress_factor
from screener.outputs.calculation import METRIC, US, calculation_steps
from screener.outputs.drawing import joint_section_svg
from screener.outputs.load_run import LoadedJoints, load_joints
from screener.outputs.run_folder import make_folder, whole_file, write_text
from screener.outputs.shown import CAUTIONS, number
from screener.records import Fleet, InputError, Ledger, Origin
from screener.units import to_unit

E = html.escape
ORIGIN_WORDS = {Origin.READ: "file", Origin.CONVERTED: "file", Origin.LOOKED_UP: "table", Origin.DERIVED: "derived", Origin.ASSUMED: "assumed"}
BROWSERS = ("chromium", "chromium-browser", "google-chrome")
STYLE = """
:root{--ink:#1f2a37;--pale:#eef1f4;--rule:#9aa5b1;--bar:#7c9cbf}
body{font:14px/1.45 system-ui,sans-serif;color:var(--ink);max-width:60rem;margin:1.5rem auto;padding:0 1.2rem}
h1{font-size:1.5rem;margin:.2rem 0}h2{font-size:1.1rem;border-bottom:1px solid var(--rule);margin:1.6rem 0 .5rem}h3{font-size:.95rem;margin:1rem 0 .2rem}
table{border-collapse:collapse;width:100%}th,td{text-align:left;vertical-align:top;padding:.18rem .6rem .18rem 0;border-bottom:1px solid #dde2e7}th{background:var(--pale)}
td.n{text-align:right;font-variant-numeric:tabular-nums;white-space:nowrap}.caution{border-left:4px solid var(--ink);padding:.1rem .7rem;margin:.3rem 0}
.step{display:grid;grid-template-columns:15rem 1fr;gap:.1rem .9rem;padding:.35rem 0;border-bottom:1px solid #dde2e7;break-inside:avoid}
.step .t{font-weight:600}.step .f{font-family:Georgia,'Times New Roman',serif;font-size:1.02rem}.step .a{font:12.5px/1.4 ui-monospace,monospace;overflow-wrap:anywhere}.step .s{color:#4b5967;font-size:.82rem}
.bar{display:inline-block;height:.7rem;background:var(--bar);border:1px solid var(--ink);vertical-align:middle;box-sizing:border-box}
.verdict{font-size:1.15rem;font-weight:600}figure{margin:0}svg{max-width:100%;height:auto}
.sign{display:grid;grid-template-columns:repeat(3,1fr);gap:1.5rem;margin-top:2rem}.sign div{border-top:1px solid var(--ink);padding-top:.2rem}
@page{size:A4;margin:14mm}@media print{body{font-size:10.5px;margin:0;max-width:none}h2{break-after:avoid}table,figure{break-inside:avoid}}
"""


def write_sheets(
    run: str | Path,
    joints: list[str],
    out: str | Path | None = None,
    *,
    pdf: bool = False,
    progress: Callable[[str], None] = lambda words: None,
) -> list[Path]:
    """HTML (and PDF) sheets of some joints of a run; returns the paths."""
    loaded = load_joints(run, joints)
    folder = make_folder(out or Path(run) / "sheets")
    browser = find_browser() if pdf else None
    paths = []
    for i, joint in enumerate(joints):
        progress(f"sheet of {joint}")
        path = folder / f"{file_name(joint)}.html"
        write_text(path, sheet_html(loaded, i))
        paths.append(path)
        if browser:
            paths.append(print_pdf(browser, path))
    return paths


def file_name(joint: str) -> str:
    """A file name made of a joint's id: letters, digits, dash and point only."""
    return re.sub(r"[^A-Za-z0-9.-]+", "_", joint).strip("._")[:80] or "joint"


def find_browser() -> str:
    for name in BROWSERS:
        if place := shutil.which(name):
            return place
    raise InputError(f"PDF needs one of {', '.join(BROWSERS)} on this machine; the HTML sheet can be printed from any browser instead")


def print_pdf(browser: str, page: Path) -> Path:
    """The page as PDF beside it."""
    target = page.with_suffix(".pdf")
    with whole_file(target) as temporary, tempfile.TemporaryDirectory() as profile:
        flags = ["--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run", "--disable-background-networking", "--disable-component-update", "--disable-sync", f"--user-data-dir={profile}", "--no-pdf-header-footer"]
        done = subprocess.run([browser, *flags, f"--print-to-pdf={temporary}", page.resolve().as_uri()], capture_output=True, text=True, timeout=120, check=False)
        if done.returncode or not temporary.exists():
            raise InputError(f"{target}: {browser} could not print the page ({done.stderr.strip().splitlines()[-1:] or 'no reason given'})")
    return target


def sheet_html(loaded: LoadedJoints, i: int) -> str:
    """The whole sheet of joint i of what was loaded."""
    system = loaded.settings.units
    u = US if system == "us" else METRIC
    row = loaded.ranking.iloc[i]
    joint = str(loaded.values["shown_id"].iloc[i])
    state = LIMIT_STATES[row["governing_limit_state"]]
    place = ", ".join(E(str(row[c])) for c in ("main_id", "zone") if isinstance(row.get(c), str))
    total = loaded.record["counts"]["ranked"]
    parts = [
        f"<h1>Joint {E(joint)}</h1><p>{place}. Calculation sheet, assessed for {loaded.record['settings']['assessment_year']:.1f}; inventory {E(loaded.record['input']['file'])}, row {int(row['row'])}, SHA-256 {E(loaded.record['input']['sha256'][:16])}…</p>",
        *(f'<p class="caution">{E(line)}</p>' for line in CAUTIONS),
        f'<p class="verdict">Rank {int(row["rank"]):,} of {total:,}. Utilization {row["utilization"]:.2f}, governed by {E(state.label)}.</p>',
        f"<p>{E(verdict(loaded, i))}</p>",
        "<h2>Section, to scale</h2>",
        _drawing(loaded, i, system),
        "<h2>Limit states</h2>",
        _limit_table(row),
        "<h2>Calculation</h2><p>Each line can be redone by hand: formula, numbers, result, source. "
        f"Lengths {u.length}, forces {u.force}, stresses and pressures {u.stress}.</p>",
        _steps(loaded, i, system),
        "<h2>Likelihood of a leak</h2>",
        "".join(f"<p>{E(line)}</p>" for line in _likelihood(loaded, i)),
        "<h2>What would change the verdict</h2>",
        _changes(loaded, i),
        "<h2>Inputs and where each comes from</h2>",
        _inputs(loaded, i, system),
        _findings(loaded, joint),
        '<div class="sign"><div>Checked by</div><div>Licence no.</div><div>Date</div></div>',
    ]
    return f'<!DOCTYPE html><html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width,initial-scale=1"><title>Joint {E(joint)}</title><style>{STYLE}</style></head><body>{"".join(parts)}</body></html>'


def verdict(loaded: LoadedJoints, i: int) -> str:
    """The result in two sentences with numbers."""
    row = loaded.ranking.iloc[i]
    unit, digits = ("psi", 0) if loaded.settings.units == "us" else ("bar", 1)

    def p(name: str) -> str:
        return number(1000.0 * row[name], unit, digits)

    text = f"Used loose, the ring is rated {p('loose_ring_rating_kpa')} at a safety factor of {loaded.settings.safety_factor:g}"
    if np.isfinite(row["stated_rating_kpa"]):
        text += f"; its paper says {p('stated_rating_kpa')}"
    text += f". The joint sees {p('design_pressure_kpa')} of operating pressure plus recurrent surge, a safety factor on ring yield of {row['ring_safety_factor']:.2f}."
    if isinstance(row.get("clamp_capped_by"), str) and row["clamp_capped_by"]:
        text += f" The clamp at assembly was held down by {row['clamp_capped_by']}."
    return text + f" Of it {row['retained_share']:.0%} is left after creep."


def _drawing(loaded: LoadedJoints, i: int, system: str) -> str:
    fleet = loaded.fleet
    one = fleet.take(np.array([i]))
    r = one.ring
    hole = bore_stress_factor(r.hole_diameter, one.bolts.count, r.bolt_circle_diameter / 2, r.bore_diameter / 2, r.outside_diameter / 2, r.thickness)
    modulus = limits.modulus(one.pipe.family, limits.SHORT_TERM, one.pipe.temperature)
    state = limits.ring_state(one, modulus, hole, 1.0, loaded.sections)
    contact = limits.ring.hub_contact(
        r.bore_diameter / 2,
        np.minimum(one.hub.outside_diameter / 2, r.outside_diameter / 2),
        r.bolt_circle_diameter / 2,
        r.bore_diameter / 2,
        r.outside_diameter / 2,
        r.thickness,
        r.modulus,
        modulus,
        one.hub.thickness,
    )
    svg = joint_section_svg(fleet, i, state.lever_arm[0], contact.neutral_radius[0], system)
    return f'<figure role="img" aria-label="Half section of the joint, to scale">{svg}<figcaption>Grey: polyethylene; dark grey: ring and bolt; hatched: mating metal; brown: pressure of the hub on the ring, its resultant and the lever arm e.</figcaption></figure>'


def _limit_table(row: pd.Series) -> str:
    lines = []
    for name, state in LIMIT_STATES.items():
        value = row[f"utilization_{name}"]
        if np.isfinite(value):
            bar = f'<span class="bar" style="width:{min(value, 3.0) / 3.0 * 9:.2f}rem"></span>'
            shown = f"{value:.2f}"
        else:
            bar, shown = "", "not evaluated"
        mark = " (governs)" if name == row["governing_limit_state"] else ""
        lines.append(f'<tr><td>{E(state.label)}{mark}</td><td class="n">{shown}</td><td>{bar}</td><td>{E(state.meaning)}</td></tr>')
    return f"<table><tr><th>Limit state</th><th>Utilization</th><th>0 to 3</th><th>Demand over capacity</th></tr>{''.join(lines)}</table>"


def readable(arithmetic: str) -> str:
    """Arithmetic as people write it: raised powers, a middle dot, the letter pi."""
    text = E(arithmetic)
    text = re.sub(r"\*\*(\d+(?:\.\d+)?)", r"<sup>\1</sup>", text)
    text = text.replace(" * ", " · ").replace(" / ", " / ").replace("-", "−")
    return re.sub(r"\bpi\b", "π", re.sub(r"\blog10\b", "log<sub>10</sub>", re.sub(r"\blog\b", "ln", text)))


def result(value: float) -> str:
    """A result with five significant digits, thousands apart, exponents only for very small numbers."""
    if value == 0.0 or 1.0e-3 <= abs(value) < 1.0e3:
        return f"{value:.5g}"
    return f"{value:,.0f}" if abs(value) >= 1.0e3 else f"{value:.4e}"


def _steps(loaded: LoadedJoints, i: int, system: str) -> str:
    made, chapter = [], ""
    for step in calculation_steps(loaded.fleet, i, loaded.settings.safety_factor, system, loaded.sections):
        if step.chapter != chapter:
            chapter = step.chapter
            made.append(f"<h3>{E(chapter)}</h3>")
        note = f'<div class="s">{step.note}</div>' if step.note else ""
        made.append(
            f'<div class="step"><div class="t">{E(step.title)}</div><div><div class="f"><i>{step.symbol}</i> = {step.formula}</div>'
            f'<div class="a">= {readable(step.arithmetic)} = <b>{result(step.value)}</b> {E(step.unit)}</div><div class="s">{step.source}</div>{note}</div></div>'
        )
    return "".join(made)


def _changes(loaded: LoadedJoints, i: int) -> str:
    """The joint screened again with one thing changed at a time."""
    one = loaded.fleet.take(np.array([i]))
    r, b, loads = one.ring, one.bolts, one.loads
    factor = loaded.settings.safety_factor
    now = _utilization(one, factor, loaded.sections, loaded.settings.horizon_years)
    unit = "in" if loaded.settings.units == "us" else "mm"
    variants = [
        (f"ring half as thick again ({number(1.5 * r.thickness[0], unit, 2 if unit == 'in' else 0)})", replace(one, ring=replace(r, thickness=1.5 * r.thickness))),
        ("ring yield a quarter higher", replace(one, ring=replace(r, yield_strength=1.25 * r.yield_strength))),
        ("no surge", replace(one, loads=replace(loads, recurrent_surge=0 * loads.recurrent_surge, occasional_surge=0 * loads.occasional_surge))),
        ("operating pressure a fifth lower", replace(one, loads=replace(loads, operating_pressure=0.8 * loads.operating_pressure))),
        ("tightened today with the same torque", replace(one, age=replace(one.age, last_tightened_year=one.age.assessment_year))),
        ("torque a fifth lower than taken", replace(one, bolts=replace(b, assembly_torque=0.8 * b.assembly_torque))),
        ("collar a fifth thinner than taken", replace(one, hub=replace(one.hub, thickness=0.8 * one.hub.thickness))),
    ]
    lines = [f"<tr><td>as it is</td><td class='n'>{now[0]:.2f}</td><td>{E(now[1])}</td></tr>"]
    for words, fleet in variants:
        value, label = _utilization(fleet, factor, loaded.sections, loaded.settings.horizon_years)
        lines.append(f"<tr><td>{E(words)}</td><td class='n'>{value:.2f}</td><td>{E(label)}</td></tr>")
    return f"<table><tr><th>If</th><th>Utilization</th><th>Governed by</th></tr>{''.join(lines)}</table>"


def _likelihood(loaded: LoadedJoints, i: int) -> list[str]:
    """The likelihood's own story of one joint."""
    one = loaded.fleet.take(np.array([i]))
    found = limits.assess_limits(one, loaded.settings.safety_factor, Ledger(), loaded.sections, loaded.settings.horizon_years)
    return explain(assess_likelihood(one, found, loaded.settings.seed, sections=loaded.sections), 0)


def _utilization(fleet: Fleet, factor: float, sections: dict, horizon: float) -> tuple[float, str]:
    found = limits.assess_limits(fleet, factor, Ledger(), sections, horizon)
    k = int(found.governing[0])
    return float(found.utilization[0, k]), LIMIT_STATES[found.names[k]].label


def _inputs(loaded: LoadedJoints, i: int, system: str) -> str:
    row = loaded.values.iloc[i]
    columns = loaded.record["input"]["columns"]
    rules = loaded.assumptions[loaded.assumptions["row"] == row["row"]].drop_duplicates("attribute", keep="last").set_index("attribute")
    names = [c for c in loaded.values.columns if f"{c}__origin" in loaded.values.columns]
    known = inventory_attributes()
    lines = []
    for name in names:
        origin = Origin(int(row[f"{name}__origin"]))
        if origin == Origin.MISSING:
            continue
        attribute = known.get(name)
        label = attribute.label if attribute else name.replace("_", " ")
        lines.append((origin, f"<tr><td>{E(label)}</td><td class='n'>{E(_value(row[name], name, system))}</td><td>{ORIGIN_WORDS[origin]}</td><td>{_where(row, name, origin, columns, rules)}</td></tr>"))
    lines.sort(key=lambda line: -int(line[0] == Origin.ASSUMED))
    return f"<table><tr><th>Input</th><th>Value</th><th>Origin</th><th>Where from</th></tr>{''.join(text for _o, text in lines)}</table>"


def _where(row: pd.Series, name: str, origin: Origin, columns: dict, rules: pd.DataFrame) -> str:
    if origin in (Origin.READ, Origin.CONVERTED):
        written = row.get(f"{name}__written")
        shown = f", written {E(str(written))!s}" if isinstance(written, str) else ""
        return f"column {E(columns.get(name, '?'))}{shown}"
    if name in rules.index:
        rule = rules.loc[name]
        scatter = f"; scatter {float(rule['scatter']):.0%}" if rule["scatter"] > 0 else ""
        return f"{E(str(rule['rule']))}{scatter}. Source: {E(str(rule['source']))}"
    return ""


_MODEL_UNITS = {"ring_modulus": ("ksi", "MPa"), "bolt_yield": ("ksi", "MPa"), "bolt_allowed_stress": ("ksi", "MPa"), "hydrostatic_design_stress": ("psi", "MPa"), "flange_size": ("in", "mm"), "mating_bore": ("in", "mm"), "cooling": ("F difference", "K")}


def _value(value, name: str, system: str) -> str:
    if isinstance(value, str):
        return value
    if value is None or value != value:
        return ""
    attribute = inventory_attributes().get(name)
    unit = attribute.shown_unit(system) if attribute else ""
    if name in _MODEL_UNITS:
        unit = _MODEL_UNITS[name][0 if system == "us" else 1]
    if unit and unit != "money":
        return f"{float(to_unit(float(value), unit)):,.4g} {unit}"
    return f"{float(value):.6g}"


def _findings(loaded: LoadedJoints, joint: str) -> str:
    some = loaded.findings[loaded.findings["joint_id"] == joint]
    if not len(some):
        return ""
    lines = [
        f"<tr><td>{E(f['severity'])}</td><td>{E(f['column'])}</td><td>{E(f['value'])}</td><td>{E(f['problem'])}</td><td>{E(f['action'])}</td></tr>"
        for f in some.to_dict("records")
    ]
    return f"<h2>Findings on this row</h2><table><tr><th>Severity</th><th>Column</th><th>As written</th><th>What is wrong</th><th>What was done</th></tr>{''.join(lines)}</table>"
