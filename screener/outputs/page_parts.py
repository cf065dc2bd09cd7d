"""The page's words, counts and bars, as escaped HTML."""

from __future__ import annotations

import html

import numpy as np
import pandas as pd

from screener.outputs.page_data import CLASS_LABELS, PageColumn, PageData
from screener.outputs.page_plots import CLASS_COLOURS
from screener.outputs.shown import CAUTIONS
from screener.outputs.summary import Summary

E = html.escape
FIRST_JOINTS = 30
UNRANKED_SHOWN = 200
PICKED = (("governing_limit_state", "Governed by"), ("zone", "Zone"), ("ring_standard", "Ring standard"), ("ring_class", "Ring class"))
MOST_CHOICES = 150
COVERAGE_WORDS = ("in the file", "looked up", "derived", "assumed", "missing")
# One drawing per class, so that the legend says the shapes too; the points are those of the pictures.
MARKS = (
    '<circle cx="8" cy="8" r="4"/>',
    '<circle cx="8" cy="8" r="5"/>',
    '<rect x="3" y="3" width="10" height="10"/>',
    '<path d="M8 1 14 8 8 15 2 8Z"/>',
    '<path d="M8 2 15 14H1Z"/>',
)


def cautions() -> str:
    first, *rest = CAUTIONS
    return f"<p><strong>{E(first)}</strong></p><ul>" + "".join(f"<li>{E(line)}</li>" for line in rest) + "</ul>"


def sentences(summary: Summary) -> str:
    return "<ul class='said'>" + "".join(f"<li>{E(line)}</li>" for line in summary.sentences) + "</ul>"


def counts(summary: Summary) -> str:
    """Rows of the file, ranked and not, with the reasons."""
    rows = []
    for words, count in summary.row_counts:
        kind = " class='reason'" if words.startswith(" ") else ""
        rows.append(f"<tr{kind}><th scope='row'>{E(words.strip())}</th><td>{count:,}</td></tr>")
    return f"<table class='counts'>{''.join(rows)}</table>"


def classes(numbers: list[int]) -> str:
    """The legend of all pictures; each entry also filters."""
    made = ["<span class='word'>Utilization</span>"]
    for k, (label, count) in enumerate(zip(CLASS_LABELS, numbers, strict=True)):
        mark = f"<svg viewBox='0 0 16 16' width='16' height='16' aria-hidden='true' fill='{CLASS_COLOURS[k]}' stroke='#1f2a37'>{MARKS[k]}</svg>"
        made.append(f"<button type='button' aria-pressed='false' data-class='{k}'>{mark} {E(label)} <b>{count:,}</b></button>")
    return "".join(made)


def pickers(data: PageData) -> str:
    made = []
    for name, words in PICKED:
        if name not in data.joints:
            continue
        found = sorted(set(data.joints[name]) - {""})
        if 1 < len(found) <= MOST_CHOICES:
            options = "".join(f"<option value='{E(value)}'>{E(value)}</option>" for value in found)
            made.append(f"<label>{E(words)} <select data-column='{name}'><option value=''>all</option>{options}</select></label>")
    return "".join(made)


def shown_number(value: float, column: PageColumn) -> str:
    if not np.isfinite(value):
        return "unknown"
    if column.significant and value > 0.99:
        return "&gt;0.99"
    if column.significant:
        return f"{value:.{column.digits}g}"
    return f"{value:{',' if column.grouped else ''}.{column.digits}f}"


def first_joints(data: PageData) -> str:
    """The head of the ranking as plain HTML: for print and where scripts don't run."""
    head = data.joints.iloc[::-1].head(FIRST_JOINTS)
    if not len(head):
        return ""
    columns = data.columns[:12]
    titles = "".join(f"<th scope='col'>{E(column.heading)}</th>" for column in columns)
    rows = []
    for _, joint in head.iterrows():
        cells = [f"<td>{E(joint[c.name])}</td>" if c.digits is None else f"<td class='n'>{shown_number(float(joint[c.name]), c)}</td>" for c in columns]
        rows.append(f"<tr>{''.join(cells)}</tr>")
    caption = f"The first {len(head):,} of {data.ranked:,} ranked joints"
    return f"<table class='first' id='first'><caption>{caption}</caption><thead><tr>{titles}</tr></thead><tbody>{''.join(rows)}</tbody></table>"


def governing_bars(summary: Summary) -> str:
    """Joints by governing limit state; each bar filters."""
    most = max((line[1] for line in summary.governing), default=1)
    rows = []
    for label, joints, beyond, median in summary.governing:
        inside = f"<span style='width:{100 * beyond / most:.2f}%' class='beyond'></span><span style='width:{100 * (joints - beyond) / most:.2f}%' class='within'></span>"
        rows.append(
            f"<tr><th scope='row'><button type='button' data-pick='governing_limit_state' data-value='{E(label)}'>{E(label)}</button></th>"
            f"<td class='wide'><span class='track'>{inside}</span></td><td class='n'>{joints:,}</td><td class='n'>{beyond:,}</td><td class='n'>{median:.2f}</td></tr>"
        )
    head = "<tr><th scope='col'>Limit state</th><th scope='col'></th><th scope='col'>joints</th><th scope='col'>above 1</th><th scope='col'>median utilization</th></tr>"
    key = "<p class='key'><span class='beyond'></span> utilization above 1 <span class='within'></span> 1 or below</p>"
    return f"<section><h2>What governs</h2>{key}<table class='bars'><thead>{head}</thead><tbody>{''.join(rows)}</tbody></table></section>" if rows else ""


def doubt_bars(lines: list[tuple[str, int]]) -> str:
    if not lines:
        return ""
    most = max(count for _, count in lines)
    rows = "".join(
        f"<tr><th scope='row'>{E(words)}</th><td class='wide'><span class='track'><span class='within' style='width:{100 * count / most:.2f}%'></span></span></td>"
        f"<td class='n'>{count:,}</td></tr>"
        for words, count in lines
    )
    return (
        "<section><h2>What to learn next</h2><p class='hint'>The quantity whose doubt weighs most in a joint's likelihood, by number of joints: "
        f"knowing it better would move most ranks.</p><table class='bars'><tbody>{rows}</tbody></table></section>"
    )


def coverage_bars(lines: list[tuple[str, list[float]]]) -> str:
    """Where each attribute's values come from, as shares of the rows."""
    rows = []
    for label, shares in lines:
        parts = "".join(f"<span class='c{k}' style='width:{100 * share:.2f}%'></span>" for k, share in enumerate(shares) if share > 0)
        rows.append(f"<tr><th scope='row'>{E(label)}</th><td class='wide'><span class='track'>{parts}</span></td>" + "".join(f"<td class='n'>{_percent(share)}</td>" for share in shares) + "</tr>")
    key = "".join(f"<th scope='col'><span class='key'><span class='c{k}'></span></span> {words}</th>" for k, words in enumerate(COVERAGE_WORDS))
    head = f"<tr><th scope='col'>Attribute</th><th scope='col'>share of rows</th>{key}</tr>"
    return f"<section><h2>Where the data come from</h2><table class='bars coverage'><thead>{head}</thead><tbody>{''.join(rows)}</tbody></table></section>"


def _percent(share: float) -> str:
    if share == 0:
        return ""
    return "&lt;1 %" if share < 0.005 else "&gt;99 %" if 0.995 <= share < 1 else f"{share:.0%}".replace("%", " %")


def unranked(table: pd.DataFrame) -> str:
    """The rows that could not be ranked, each with its reason."""
    rest = table[table["status"] != "ranked"]
    if not len(rest):
        return ""
    rows = "".join(
        f"<tr><td class='n'>{int(row):,}</td><td>{E('' if joint is None or joint != joint else str(joint))}</td><td>{E(str(reason))}</td></tr>"
        for row, joint, reason in rest[["row", "joint_id", "reason"]].head(UNRANKED_SHOWN).itertuples(index=False)
    )
    more = f"<p>The first {UNRANKED_SHOWN:,} of {len(rest):,}; ranking.csv lists all.</p>" if len(rest) > UNRANKED_SHOWN else ""
    head = "<tr><th scope='col'>Row of the file</th><th scope='col'>Joint</th><th scope='col'>Reason</th></tr>"
    return f"<section id='unranked'><h2>Not ranked: {len(rest):,}</h2>{more}<table class='plain'><thead>{head}</thead><tbody>{rows}</tbody></table></section>"
