"""The methods text, generated from the modules and functions that do the work.

A module's docstring is a chapter's opening, each public function a paragraph:
what it computes, its symbols, its source. Nothing is written twice, so the
text can't drift from the code.
"""

from __future__ import annotations

import ast
import html
import inspect
from dataclasses import dataclass
from importlib.resources import files

from screener.columns import result_columns
from screener.limit_names import LIMIT_STATES
from screener.outputs.shown import CAUTIONS
from screener.standards.tables import read_table

CHAPTERS = (
    ("Ring", ("mechanics/ring.py", "mechanics/ring_sensitivity.py", "mechanics/ring_model_factor.py")),
    ("Bolt holes", ("mechanics/bolt_holes.py",)),
    ("Ring beyond yield", ("mechanics/ring_plasticity.py",)),
    ("Rings that are not flat plates", ("mechanics/section.py", "mechanics/section_plasticity.py")),
    ("How the ring estimates were verified", ("mechanics/ring_verification.py",)),
    ("Bolts", ("mechanics/bolts.py",)),
    ("Polyethylene", ("mechanics/polyethylene.py",)),
    ("Clamp", ("mechanics/clamp.py",)),
    ("Pipe wall", ("mechanics/pipe_wall.py",)),
    ("Corrosion", ("mechanics/corrosion.py",)),
    ("Limit states of a joint", ("limits/basis.py", "limits/states.py", "limits/fatigue.py", "limits/assess.py")),
    ("Pressure", ("pressure/surge.py", "pressure/water.py", "pressure/step.py", "pressure/extremes.py", "pressure/annual_maximum.py", "pressure/cycles.py", "pressure/stations_to_joints.py")),
    ("Transients", ("pressure/transients.py", "pressure/transient_pipe.py", "pressure/transient_wall.py")),
    ("Fatigue", ("fatigue/sn_curves.py", "fatigue/damage.py", "fatigue/mean_stress.py", "fatigue/pe_fatigue.py")),
    ("Likelihood", ("likelihood/step.py", "likelihood/tightness.py", "likelihood/variables.py", "likelihood/form.py", "likelihood/sampling.py", "likelihood/series.py", "likelihood/leak.py", "likelihood/years.py", "likelihood/evidence.py", "likelihood/calibration.py")),
    ("Ranking", ("priority/ranking.py",)),
)


@dataclass(frozen=True)
class Entry:
    """One public function or constant of the package."""

    name: str
    signature: str
    text: str


@dataclass(frozen=True)
class Part:
    module: str
    text: str
    entries: list[Entry]


def parts_of(path: str) -> Part | None:
    """The documented contents of one module, read from its syntax tree; None where it does not exist."""
    place = files("screener").joinpath(*path.split("/"))
    if not place.is_file():
        return None
    tree = ast.parse(place.read_text(encoding="utf-8"))
    entries = []
    for node in tree.body:
        if isinstance(node, (ast.FunctionDef, ast.ClassDef)) and not node.name.startswith("_"):
            text = ast.get_docstring(node)
            if text:
                signature = f"{node.name}({', '.join(_arguments(node))})" if isinstance(node, ast.FunctionDef) else node.name
                entries.append(Entry(node.name, signature, inspect.cleandoc(text)))
    return Part(path.removesuffix(".py").replace("/", "."), inspect.cleandoc(ast.get_docstring(tree) or ""), entries)


def _arguments(node: ast.FunctionDef) -> list[str]:
    arguments = node.args
    return [a.arg for a in (*arguments.posonlyargs, *arguments.args, *arguments.kwonlyargs)]


def chapters() -> list[tuple[str, list[Part]]]:
    """(chapter, its parts), chapters without a module left out."""
    made = []
    for title, paths in CHAPTERS:
        found = [part for part in map(parts_of, paths) if part]
        if found:
            made.append((title, found))
    return made


def methods_text() -> str:
    """The methods as plain text."""
    lines = ["METHODS", "", *CAUTIONS, "", "LIMIT STATES", ""]
    for state in LIMIT_STATES.values():
        lines += [f"{state.label}: {state.meaning}", f"    Source: {state.source}", ""]
    for title, found in chapters():
        lines += ["", title.upper(), "=" * len(title)]
        for part in found:
            lines += ["", part.text, ""]
            for entry in part.entries:
                lines += [entry.signature, *("    " + line for line in entry.text.splitlines()), ""]
    lines += ["", "RESULTS", "======="]
    lines += [f"{c.machine_name}: {c.meaning}" for c in result_columns().values()]
    return "\n".join(lines) + "\n"


STYLE = """
body{font:16px/1.55 system-ui,sans-serif;color:#1f2a37;max-width:52rem;margin:2rem auto;padding:0 1rem}
h1{font-size:1.7rem}h2{font-size:1.3rem;border-bottom:1px solid #9aa5b1;margin-top:2.5rem}h3{font-size:1rem;margin-bottom:.2rem}
code,pre{font:14px/1.45 ui-monospace,monospace}pre{white-space:pre-wrap;background:#eef1f4;padding:.7rem;margin:.3rem 0 1rem}
.caution{border-left:4px solid #1f2a37;padding:.2rem .8rem;margin:.4rem 0}table{border-collapse:collapse}td,th{text-align:left;padding:.25rem .8rem .25rem 0;vertical-align:top;border-bottom:1px solid #dde2e7}
nav a{margin-right:.9rem}@media print{body{font-size:11px;max-width:none}nav{display:none}h2{break-after:avoid}pre{break-inside:avoid}}
"""


def methods_html() -> str:
    """The methods as one HTML page without any outside resource."""
    e = html.escape
    body = ["<h1>Methods of the joint screening</h1>"]
    body += [f'<p class="caution">{e(line)}</p>' for line in CAUTIONS]
    made = chapters()
    body.append("<nav>" + "".join(f'<a href="#{_anchor(title)}">{e(title)}</a>' for title, _ in made) + "</nav>")
    body.append("<h2>Limit states</h2><table><tr><th>Limit state</th><th>Compared</th><th>Source</th></tr>")
    body += [f"<tr><td>{e(s.label)}</td><td>{e(s.meaning)}</td><td>{e(s.source)}</td></tr>" for s in LIMIT_STATES.values()]
    body.append("</table>")
    for title, found in made:
        body.append(f'<h2 id="{_anchor(title)}">{e(title)}</h2>')
        for part in found:
            body += [f"<p>{e(paragraph)}</p>" for paragraph in part.text.split("\n\n")]
            for entry in part.entries:
                body.append(f"<h3><code>{e(entry.signature)}</code></h3><pre>{e(entry.text)}</pre>")
    body.append("<h2>Results</h2><table>")
    body += [f"<tr><td><code>{e(c.machine_name)}</code></td><td>{e(c.meaning)}</td></tr>" for c in result_columns().values()]
    body.append("</table><h2>Published tables in the package</h2><table>")
    folder = files("screener.standards").joinpath("data")
    for place in sorted(folder.iterdir(), key=lambda p: p.name):
        if place.name.endswith(".csv"):
            body.append(f"<tr><td><code>{e(place.name)}</code></td><td>{len(read_table(place.name[:-4]))} rows, each with its source and status</td></tr>")
    body.append("</table>")
    return f'<!DOCTYPE html><html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width,initial-scale=1"><title>Methods of the joint screening</title><style>{STYLE}</style></head><body>{"".join(body)}</body></html>'


def _anchor(title: str) -> str:
    return title.lower().replace(" ", "-")
