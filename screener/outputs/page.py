"""report.html: a run as one page that needs neither network nor server."""

from __future__ import annotations

import base64
import hashlib
import html
import json
import re
from dataclasses import asdict
from importlib.resources import files
from pathlib import Path
from string import Template

from bokeh.document import Document
from bokeh.resources import Resources

import screener
from screener.outputs import page_parts as parts
from screener.outputs.page_data import CLASS_LABELS, PAGE_JOINTS, PageData, class_counts, coverage, doubt_counts, page_data
from screener.outputs.page_map import Places, page_places
from screener.outputs.page_more import MoreResults, Section, more_sections
from screener.outputs.page_plots import page_plots
from screener.outputs.run_folder import write_text
from screener.outputs.shown import CAUTIONS
from screener.outputs.summary import Summary
from screener.screening import Screening

E = html.escape
CAPTIONS = {
    "map": ("Where they are", "Drag to move; hold Ctrl and turn the wheel to zoom. The darker and the more pointed a mark, the higher its utilization."),
    "measure": ("Two ways to order joints", "Joints at the upper right are high by both. The dashed line is the limit."),
    "ratings": ("What a loose ring carries", "Each mark is a ring used loose on its hub; strokes are the ratings on paper for that size. Marks are spread a little sideways."),
}


def write_page(screening: Screening, path: str | Path, summary: Summary, mains=None, more: MoreResults | None = None, *, most: int = PAGE_JOINTS) -> Path:
    """Write the page; mains: a frame of lines in the joints' reference system; more: results beyond the screening."""
    path = Path(path)
    write_text(path, page_html(screening, summary, mains, more, most))
    return path


def page_html(screening: Screening, summary: Summary, mains=None, more: MoreResults | None = None, most: int = PAGE_JOINTS) -> str:
    """The page as text."""
    data = page_data(screening, most)
    places = page_places(screening, data, mains)
    plots = page_plots(data, places)
    sections = more_sections(more, screening.settings.units)
    everything = plots | {name: plot for section in sections for name, (_, plot) in section.plots.items()}
    pictures = {name: picture(name, picture_words(name, data, places)) for name in plots}
    library, program = Resources(mode="inline", components=["bokeh"]).js_raw[0], _file("page.js")
    library = library.replace("</script", "<\\/script")
    title = "Flanged joints, screened"
    return Template(_file("page.html")).substitute(
        title=title,
        style=_file("page.css"),
        script_hashes=" ".join(script_hash(text) for text in (library, program)),
        about="<br>".join(E(line) for line in summary.about),
        cautions=parts.cautions(),
        sentences=parts.sentences(summary),
        counts=parts.counts(summary),
        note=f"<p class='note' role='note'>{E(data.note)}</p>" if data.note else "",
        pickers=parts.pickers(data),
        classes=parts.classes(class_counts(screening)),
        map=map_section(pictures.pop("map", "")),
        first=parts.first_joints(data),
        pictures="".join(pictures.values()),
        bars=f"<div class='pair'>{parts.governing_bars(summary)}{parts.doubt_bars(doubt_counts(screening))}</div>{parts.coverage_bars(coverage(screening))}",
        reserved="".join(more_section(section) for section in sections),
        unranked=parts.unranked(screening.table),
        footer=E(f"{CAUTIONS[0]} {CAUTIONS[1]} joint-screener {screener.__version__}. This page holds everything it needs and asks nothing of the network."),
        settings=script_json(page_settings(data)),
        documents=script_json(documents(everything)),
        library=library,
        program=program,
    )


def page_settings(data: PageData) -> dict:
    """What the page's program must know of its columns."""
    return {"columns": [asdict(c) for c in data.columns], "card": [asdict(c) for c in data.card], "limits": data.limits, "classes": CLASS_LABELS}


def picture(name: str, words: str = "") -> str:
    title, caption = CAPTIONS[name]
    return f"<figure class='picture' aria-label='{E(title)}'><h2>{E(title)}</h2><div id='picture-{name}' class='canvas'></div><figcaption>{E(caption)} {E(words)}</figcaption></figure>"


def picture_words(name: str, data: PageData, places: Places | None) -> str:
    """What else the reader must know of a picture."""
    if name == "map":
        return places.words
    meanings = [column.meaning for column in data.columns if column.name == "likelihood"]
    return " ".join(meanings) if name == "measure" else ""


def more_section(section: Section) -> str:
    drawn = "".join(f"<figure class='picture'><h3>{E(title)}</h3><div id='picture-{name}' class='canvas'></div></figure>" for name, (title, _) in section.plots.items())
    return f"<section><h2>{E(section.title)}</h2><p class='hint'>{E(section.words)}</p><div class='pair'>{drawn}</div></section>"


def map_section(drawn: str) -> str:
    """The map beside the card of the selected joint; the card alone where no joint has a place."""
    card = "<aside class='card' id='card' tabindex='0' aria-label='One joint'><h2>Selected joint</h2><p>Select a joint in a picture or in the table.</p></aside>"
    zoom = "<div class='zoom' role='group' aria-label='Map' hidden><button type='button' data-zoom='0.6'>Zoom in</button><button type='button' data-zoom='1.7'>Zoom out</button><button type='button' data-zoom='all'>First view</button></div>"
    drawn = drawn.replace("</h2>", f"</h2>{zoom}", 1) if drawn else "<p class='hint'>The inventory gives no coordinates, so there is no map.</p>"
    return f"<section class='place'>{drawn}{card}</section>"


def documents(plots: dict) -> dict:
    """The pictures as one Bokeh document, with ids that don't change from run to run."""
    document = Document()
    for plot in plots.values():
        document.add_root(plot)
    content = document.to_json(deferred=False)
    fresh: dict[str, str] = {}
    content = _renumbered(content, fresh)
    roots = {fresh[plot.id]: f"picture-{name}" for name, plot in plots.items()}
    return {"content": content, "roots": roots}


def _renumbered(part, fresh: dict[str, str]):
    """The same JSON with every model id counted from 1 in order of appearance."""
    if isinstance(part, dict):
        return {
            key: fresh.setdefault(value, f"m{len(fresh) + 1}") if key == "id" and isinstance(value, str) else _renumbered(value, fresh)
            for key, value in part.items()
        }
    if isinstance(part, list):
        return [_renumbered(value, fresh) if isinstance(value, (dict, list)) else value for value in part]
    return part


def script_json(content) -> str:
    """JSON that can't end or open a script element, whatever the data say."""
    text = json.dumps(content, ensure_ascii=True, allow_nan=False, separators=(",", ":"))
    return re.sub("[<>&]", lambda found: f"\\u{ord(found.group()):04x}", text)


def script_hash(text: str) -> str:
    """The hash by which the page's policy lets exactly this script run."""
    return f"'sha256-{base64.b64encode(hashlib.sha256(text.encode()).digest()).decode()}'"


def _file(name: str) -> str:
    return files("screener.outputs").joinpath("data", name).read_text(encoding="utf-8")
