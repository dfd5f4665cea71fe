"""Names that try to be markup, in every file a case takes: on the pages they are words and nothing else."""

import json
import re
import shutil
from html.parser import HTMLParser
from pathlib import Path

import pytest

from orolift.cli.main import exit_code

DEMO = Path(__file__).parents[2] / "demo_terrain"
MARK = "<img src=x onerror=alert(1)>"
BREAK = "</script><script>alert(1)</script>{{ 7 * 7 }}"
QUOTE = "\"' onfocus=alert(1) x='"


class Reader(HTMLParser):
    """Tags with their attributes, and all text outside of style and script."""

    def __init__(self, html):
        super().__init__()
        self.tags, self.words, self.inside = [], [], []
        self.feed(html)

    def handle_starttag(self, tag, attrs):
        self.tags.append((tag, dict(attrs)))
        self.inside.append(tag)

    def handle_endtag(self, tag):
        while self.inside and self.inside.pop() != tag:
            pass

    def handle_data(self, data):
        if not {"style", "script"} & set(self.inside):
            self.words.append(data)


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    """The moist demo with hostile names in case, sites, catchments, gauges and file names, worked out into a folder."""
    place = tmp_path_factory.mktemp("hostile")
    shutil.copy(DEMO / "varn.tif", place)
    shutil.copy(DEMO / "sounding.csv", place / f"{MARK}.csv")
    basins = json.loads((DEMO / "basins.geojson").read_text())
    for feature, name in zip(basins["features"], (MARK, BREAK, QUOTE), strict=False):
        feature["properties"]["name"] = name
    (place / "basins.geojson").write_text(json.dumps(basins))
    gauges = (DEMO / "gauges.csv").read_text().replace("Sarn Mouth", MARK).replace("Kell Bridge", BREAK)
    (place / "gauges.csv").write_text(gauges)
    text = (DEMO / "varn_moist.toml").read_text()
    text = text.replace("Moist south-westerly over the Varn range", BREAK).replace("sounding.csv", f"{MARK}.csv")
    text = text.replace("Lower Tarn", MARK).replace("Ostrel Flats", BREAK)
    text = text.replace('name = "Kell Bridge"', f"name = '''{QUOTE}'''")
    case = place / f"{MARK}.toml"
    case.write_text(text)
    assert exit_code(["cross", str(case), "--quiet", "--folder", str(place / "out")]) == 0
    return place / "out"


@pytest.mark.parametrize("page", ["index.html", f"{MARK}.html"])
def test_names_make_no_element_and_no_handler(folder, page):
    html = (folder / page).read_text()
    read = Reader(html)
    assert not [attrs for tag, attrs in read.tags if tag == "img"]
    assert len(re.findall("<script", html)) == sum(tag == "script" for tag, _ in read.tags) <= 3
    for tag, attrs in read.tags:
        assert not any(name.startswith("on") for name in attrs), (tag, attrs)
        assert "javascript:" not in attrs.get("href", "")


def test_names_are_shown_as_they_were_written(folder):
    words = " ".join(Reader((folder / f"{MARK}.html").read_text()).words)
    for name in (MARK, BREAK, QUOTE):
        assert name in words
    assert "49" not in Reader((folder / f"{MARK}.html").read_text()).words[0]


def test_data_of_the_script_survive_them(folder):
    """The block is one piece of JSON that ends where it should."""
    html = (folder / f"{MARK}.html").read_text()
    block = re.search(r'(?s)<script type="application/json" id="reading-data">(.*?)</script>', html).group(1)
    said = json.loads(block)["ways"]
    assert MARK in said["1"]
    assert BREAK in said["2"]
