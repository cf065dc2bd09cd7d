"""The page in a real browser: loads alone, filters, selects, and shows hostile names as text."""

import dataclasses
import re
import shutil
from pathlib import Path

import pytest

from screener import Settings, read_inventory, screen
from screener.outputs.mains import read_mains
from screener.outputs.page import write_page
from screener.outputs.summary import summarize

CHROMIUM = shutil.which("chromium") or shutil.which("chromium-browser") or shutil.which("google-chrome")
ARGUMENTS = ["--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run", "--disable-background-networking", "--disable-component-update", "--disable-sync"]
SAMPLE = Path(__file__).resolve().parents[2] / "sample_inventory" / "inventory.gpkg"
HOSTILE = "</script><img src=x onerror=window.harmed=1><b>H</b>"

pytestmark = pytest.mark.skipif(CHROMIUM is None, reason="no Chromium on this machine")


@pytest.fixture(scope="module")
def written(tmp_path_factory):
    screening = screen(read_inventory(SAMPLE, Settings(assessment_date="2026-06-30")))
    table = screening.table.copy()
    table.loc[0, ["joint_id", "main_id", "zone"]] = HOSTILE
    screening = dataclasses.replace(screening, table=table)
    path = tmp_path_factory.mktemp("page") / "report.html"
    mains = read_mains("mains", SAMPLE, screening.inventory.crs)
    return write_page(screening, path, summarize(screening, HOSTILE), mains), screening


@pytest.fixture(scope="module")
def browser():
    from playwright.sync_api import sync_playwright

    with sync_playwright() as play:
        made = play.chromium.launch(executable_path=CHROMIUM, args=ARGUMENTS)
        yield made
        made.close()


@pytest.fixture(scope="module")
def opened(browser, written):
    """The open page, what it complained of and what it asked for."""
    path, _ = written
    made = browser.new_page(viewport={"width": 1400, "height": 1000})
    complaints, requests = [], []
    made.on("console", lambda message: complaints.append(message.text) if message.type in ("error", "warning") else None)
    made.on("pageerror", lambda error: complaints.append(str(error)))
    made.on("request", lambda request: requests.append(request.url))
    made.goto(path.as_uri())
    made.wait_for_selector("body.live", timeout=60_000)
    yield made, complaints, requests
    made.close()


@pytest.fixture
def page(opened, written):
    """The page with nothing chosen; afterwards nothing may have complained or asked for anything but the file."""
    made, complaints, requests = opened
    path, _ = written
    made.emulate_media(media="screen")
    made.evaluate("document.activeElement.blur()")
    made.click("#clear")
    made.click("#unselect")
    made.get_by_role("button", name=re.compile("^Rank")).first.click()
    if made.locator("[aria-sort=descending]").count():
        made.get_by_role("button", name=re.compile("^Rank")).first.click()
    yield made
    assert made.evaluate("window.harmed") is None
    assert complaints == []
    assert requests == [path.as_uri()]


def shown(page) -> int:
    return int(page.inner_text("#shown").split(" ")[0].replace(",", ""))


def in_pictures(page) -> int:
    """Joints the pictures draw: those that pass the filter their glyphs share."""
    return page.evaluate("Bokeh.documents[0].get_model_by_name('shown').indices.length")


def chosen(page) -> list[str]:
    return page.evaluate("(() => { const s = Bokeh.documents[0].get_model_by_name('joints'); return s.selected.indices.map((k) => s.data.joint_id[k]); })()")


def test_loads_with_pictures_drawn(page, written):
    _, screening = written
    assert shown(page) == screening.counts["ranked"] == in_pictures(page)
    for name in ("map", "measure", "ratings"):
        assert page.evaluate(f"document.querySelector('#picture-{name}').getBoundingClientRect().height") > 300


def test_filters_reach_table_and_pictures(page, written):
    _, screening = written
    zone = screening.table["zone"].iloc[10]
    page.select_option("select[data-column=zone]", zone)
    expected = int((screening.table["zone"] == zone).sum())
    assert shown(page) == in_pictures(page) == expected
    page.click("button[data-class='4']")
    both = int(((screening.table["zone"] == zone) & (screening.table["utilization"] >= 2)).sum())
    assert shown(page) == in_pictures(page) == both < expected
    page.click("#clear")
    assert shown(page) == screening.counts["ranked"]
    name = screening.table["joint_id"].iloc[20]
    page.fill("#find", name.lower())
    found = int(screening.table["joint_id"].str.contains(name, regex=False).sum())
    page.get_by_text(re.compile(f"^{found} of ")).wait_for()
    assert in_pictures(page) == found


def test_selection_in_table_reaches_pictures_and_card(page, written):
    _, screening = written
    page.click(".space .row >> nth=4")
    name = screening.table["joint_id"].iloc[4]
    assert chosen(page) == [name]
    assert page.inner_text("#card .name") == name
    page.check("#only")
    assert shown(page) == 1


def test_selection_in_a_picture_reaches_the_table(page):
    page.evaluate("Bokeh.documents[0].get_model_by_name('measure').toolbar.active_drag = Bokeh.documents[0].get_model_by_name('measure').toolbar.tools.find((t) => t.type === 'BoxSelectTool')")
    page.locator("#picture-measure").scroll_into_view_if_needed()
    box = page.locator("#picture-measure").bounding_box()
    page.mouse.move(box["x"] + 90, box["y"] + 30)
    page.mouse.down()
    page.mouse.move(box["x"] + box["width"] - 80, box["y"] + 200, steps=6)
    page.mouse.up()
    page.get_by_text(re.compile("shown, [1-9][0-9,]+ selected")).wait_for()
    some = len(chosen(page))
    assert f"{some:,} selected" in page.inner_text("#shown")
    page.check("#only")
    assert shown(page) == some


def test_works_from_the_keyboard(page, written):
    _, screening = written
    page.focus(".scroller")
    page.keyboard.press("ArrowDown")
    page.keyboard.press("ArrowDown")
    page.keyboard.press("Space")
    assert chosen(page) == [screening.table["joint_id"].iloc[2]]
    page.keyboard.press("End")
    assert page.get_attribute(".scroller", "aria-activedescendant") == f"row-{screening.counts['ranked'] - 1}"
    page.keyboard.press("Escape")
    assert chosen(page) == []


def test_sorting_by_a_heading(page, written):
    _, screening = written
    page.get_by_role("button", name="Loose-ring rating (psi)").click()
    head = page.locator("[aria-sort=descending]")
    assert head.inner_text().startswith("Loose-ring rating")
    ranked = screening.table[screening.table["status"] == "ranked"]
    best = ranked["loose_ring_rating"].max() / 6894.757
    at = page.locator(".head > div").all_inner_texts().index(head.inner_text())
    assert page.inner_text(f".space .row >> nth=0 >> div >> nth={at}") == f"{best:,.0f}"


def test_hostile_name_is_text_in_table_card_and_tooltip(page):
    assert page.inner_text(".space .row >> nth=0 >> div >> nth=1") == HOSTILE
    page.click(".space .row >> nth=0")
    assert page.inner_text("#card .name") == HOSTILE
    page.locator("#picture-measure").scroll_into_view_if_needed()
    place = page.evaluate(
        "(() => { const m = Bokeh.documents[0].get_model_by_name('measure'), s = Bokeh.documents[0].get_model_by_name('joints');"
        " const k = s.data.rank.length - 1, v = Bokeh.index.get_by_id(m.id), b = v.el.getBoundingClientRect();"
        " return [b.x + v.frame.x_scale.compute(s.data.utilization[k]), b.y + v.frame.y_scale.compute(s.data.likelihood[k])]; })()"
    )
    page.mouse.move(place[0] - 3, place[1] - 3)
    page.mouse.move(place[0], place[1])
    page.get_by_text("<img src=x").last.wait_for()
    said = page.evaluate(
        "(() => { const out = []; const walk = (n) => { if (n.shadowRoot) walk(n.shadowRoot); for (const c of n.children) { if (c.tagName === 'IMG' && c.getAttribute('onerror')) out.push(c.tagName); walk(c); } }; walk(document.body); return out; })()"
    )
    assert said == []


def test_prints_with_cautions_and_the_head_of_the_ranking(page):
    page.emulate_media(media="print")
    assert page.locator("#first").is_visible() and page.locator(".cautions").is_visible()
    assert not page.locator("#find").is_visible() and not page.locator(".scroller").is_visible()
    assert len(page.pdf()) > 20_000
