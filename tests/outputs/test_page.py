"""The page as text: whole, without outside resources, and deaf to what the data say."""

import base64
import dataclasses
import hashlib
import json
import re
from html.parser import HTMLParser
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from screener import Settings, read_inventory, screen
from screener.outputs.mains import read_mains
from screener.outputs.page import page_html, script_json, write_page
from screener.outputs.page_data import EDGES, class_counts, coverage, page_data, thinned, utilization_class
from screener.outputs.page_map import first_view, page_places
from screener.outputs.page_more import MoreResults
from screener.outputs.shown import CAUTIONS
from screener.outputs.summary import summarize

SAMPLE = Path(__file__).resolve().parents[2] / "sample_inventory" / "inventory.gpkg"
HOSTILE = "</script><img src=x onerror=alert(1)>&\"'${7*7}"


class Reader(HTMLParser):
    """Elements with their attributes, and the text outside scripts and styles."""

    def __init__(self):
        super().__init__()
        self.elements, self.words, self.inside = [], [], []
        self.scripts = []

    def handle_starttag(self, tag, attrs):
        self.elements.append((tag, dict(attrs)))
        if tag in ("script", "style"):
            self.inside.append(tag)
            self.scripts.append([dict(attrs), ""])

    def handle_endtag(self, tag):
        if tag in ("script", "style"):
            self.inside.pop()

    def handle_data(self, data):
        if self.inside:
            self.scripts[-1][1] += data
        else:
            self.words.append(data)


def read(text):
    reader = Reader()
    reader.feed(text)
    return reader


@pytest.fixture(scope="module")
def screening():
    return screen(read_inventory(SAMPLE, Settings(assessment_date="2026-06-30")))


@pytest.fixture(scope="module")
def page(screening):
    return page_html(screening, summarize(screening, "inventory.gpkg"), read_mains("mains", SAMPLE, screening.inventory.crs))


def with_names(screening, name):
    """The screening with the first joint's names replaced."""
    table = screening.table.copy()
    for column in ("joint_id", "main_id", "zone", "ring_class"):
        table.loc[0, column] = name
    return dataclasses.replace(screening, table=table)


def with_unranked(screening, count, reason):
    table = screening.table.copy()
    last = table.index[-count:]
    table.loc[last, ["rank", "utilization"]] = np.nan
    table.loc[last, "status"], table.loc[last, "reason"] = "not ranked", reason
    return dataclasses.replace(screening, table=table)


def test_asks_nothing_of_the_network(page):
    for tag, attributes in read(page).elements:
        assert tag not in ("link", "iframe", "object", "embed", "base"), tag
        for name in ("src", "href", "action", "data"):
            assert attributes.get(name, "#").startswith("#"), (tag, attributes)
    assert "url(" not in re.sub(r"<script.*?</script>", "", page, flags=re.S)


def test_policy_lets_exactly_the_two_scripts_run(page):
    reader = read(page)
    policy = next(a["content"] for t, a in reader.elements if a.get("http-equiv") == "Content-Security-Policy")
    assert "default-src 'none'" in policy and "unsafe-eval" not in policy
    assert "unsafe-inline" not in policy.split("style-src")[0]
    programs = [text for attributes, text in reader.scripts if attributes == {}][-2:]
    for text in programs:
        assert "'sha256-" + base64.b64encode(hashlib.sha256(text.encode()).digest()).decode() + "'" in policy
    assert len(re.findall("sha256-", policy)) == 2


def test_says_every_caution_and_sentence_before_the_pictures(page, screening):
    opening = " ".join("".join(read(page[: page.index("id='picture-map'")]).words).split())
    for line in [*CAUTIONS, *summarize(screening, "x").sentences]:
        assert " ".join(line.split()) in opening


def test_counts_of_rows_add_up_and_reasons_are_told(screening):
    some = with_unranked(screening, 7, "its <size> is unknown")
    text = page_html(some, summarize(some, "x"))
    said = dict(re.findall(r"<th scope='row'>([^<]*)</th><td>([\d,]+)</td>", text))
    number = {words: int(count.replace(",", "")) for words, count in said.items()}
    assert number["rows in the file"] == number["ranked"] + number["not ranked"] == len(some.inventory)
    assert number["not ranked"] == 7 == number["its &lt;size&gt; is unknown"]
    assert text.count("<td>its &lt;size&gt; is unknown</td>") == 7


@pytest.mark.parametrize("name", [HOSTILE, "<!--<script>", "]]></style>", "\u2028\u0000\ud7ff"])
def test_hostile_names_stay_text(screening, name):
    hostile = with_unranked(with_names(screening, name), 3, name)
    plain, risky = (read(page_html(s, summarize(s, name))) for s in (with_unranked(screening, 3, "x"), hostile))
    tags = lambda reader: [tag for tag, _ in reader.elements if tag != "option"]  # noqa: E731
    assert tags(plain) == tags(risky)
    content = json.loads(next(text for attributes, text in risky.scripts if attributes.get("id") == "page-pictures"))
    assert name in json.dumps(content, ensure_ascii=False) or json.dumps(name)[1:-1] in json.dumps(content)


def test_json_can_not_end_its_script():
    text = script_json({HOSTILE: [HOSTILE]})
    assert not set("<>&") & set(text)
    assert json.loads(text) == {HOSTILE: [HOSTILE]}


def test_two_pages_of_one_screening_are_equal(screening, page):
    again = page_html(screening, summarize(screening, "inventory.gpkg"), read_mains("mains", SAMPLE, screening.inventory.crs))
    assert again == page


def test_large_fleets_are_thinned_worst_first_and_say_so(screening):
    ranked = screening.table[screening.table["status"] == "ranked"]
    some, note = thinned(ranked, 400, seed=5)
    assert len(some) == 400 and some["rank"].is_monotonic_increasing and some["rank"].is_unique
    assert (some["rank"].to_numpy()[:300] == np.arange(1, 301)).all()
    assert "400" in note and f"{len(ranked):,}" in note and "seed 5" in note
    assert thinned(ranked, 400, seed=5)[0].equals(some) and not thinned(ranked, 400, seed=6)[0].equals(some)
    assert thinned(ranked, len(ranked), seed=5) [1] == ""
    text = page_html(screening, summarize(screening, "x"), most=400)
    assert "role='note'" in text and len(text) < len(page_html(screening, summarize(screening, "x")))


def test_twenty_thousand_joints_stay_under_15_megabytes(screening, tmp_path):
    times = 20_000 // len(screening.table) + 1
    table = pd.concat([screening.table] * times, ignore_index=True).head(20_000)
    large = dataclasses.replace(screening, table=table.assign(rank=np.arange(1.0, 20_001)))
    path = write_page(large, tmp_path / "report.html", summarize(large, "x"))
    assert 2e6 < path.stat().st_size < 15e6


def test_classes_hold_every_joint_and_their_edges(screening):
    assert utilization_class(np.array([0.0, *EDGES])).tolist() == [0, 1, 2, 3, 4]
    assert sum(class_counts(screening)) == screening.counts["ranked"]
    beyond = int((screening.table["utilization"] >= 1).sum())
    assert sum(class_counts(screening)[2:]) == beyond


def test_shares_of_coverage_sum_to_one(screening):
    lines = coverage(screening)
    assert len(lines) > 10
    assert np.allclose([sum(shares) for _, shares in lines], 1.0)


def test_joints_are_drawn_worst_last_in_shown_units(screening):
    data = page_data(screening)
    assert data.joints["rank"].iloc[-1] == 1
    first = screening.table.iloc[0]
    assert data.joints["loose_ring_rating"].iloc[-1] == pytest.approx(first["loose_ring_rating"] / 6894.757, rel=1e-6)
    assert next(c.heading for c in data.columns if c.name == "loose_ring_rating").endswith("(psi)")


def test_a_joint_far_from_all_others_does_not_shrink_the_map():
    rng = np.random.default_rng(1)
    x, y = rng.uniform(0, 1000, 500), rng.uniform(0, 2000, 500)
    x[3], y[4] = 5e6, np.nan
    frame, far = first_view(x, y)
    assert np.flatnonzero(far).tolist() == [3]
    assert 0 <= frame[0] < frame[2] <= 1000 and 0 <= frame[1] < frame[3] <= 2000


def test_places_keep_the_length_of_the_ground(screening):
    """A main's length on the map is its length in the file, in feet where feet are shown."""
    mains = read_mains("mains", SAMPLE, screening.inventory.crs)
    places = page_places(screening, page_data(screening), mains)
    drawn = sum(float(np.hypot(np.diff(a), np.diff(b)).sum()) for a, b in zip(places.mains_x, places.mains_y, strict=True))
    assert places.unit == "ft"
    assert drawn == pytest.approx(mains.length.sum() / 0.3048, rel=1e-9)


def test_sections_appear_only_with_their_data(screening, page):
    titles = ("Pressure along the mains", "How sure the ranks are", "What a budget buys")
    assert not any(title in page for title in titles)
    more = MoreResults(
        pd.DataFrame({"main_id": [HOSTILE] * 2, "chainage": [0.0, 9.0], "lowest_pressure": 1e5, "steady_pressure": 2e5, "highest_pressure": 3e5}),
        pd.DataFrame({"joint_id": ["a", "b"], "rank": [1, 2], "rank_low": [1, 1], "rank_high": [2, 3]}),
        pd.DataFrame({"cost": [0.0, 1.0], "loss_avoided": [0.0, 5.0]}),
    )
    text = page_html(screening, summarize(screening, "x"), None, more)
    assert all(title in text for title in titles)
    assert "onerror=alert(1)>" not in text


def test_a_fleet_without_ranked_joints_or_places_still_makes_a_page(screening):
    none = with_unranked(screening, len(screening.table), "nothing is known")
    reader = read(page_html(none, summarize(none, "x")))
    assert "No joint could be ranked" in "".join(reader.words)
