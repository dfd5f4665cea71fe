"""The HTML file: self-contained, escaped, readable by machines and screen readers, the same every time."""

import ast
import base64
import hashlib
import json
import re
import sys
from dataclasses import replace
from html.parser import HTMLParser
from itertools import pairwise
from pathlib import Path

import pytest
from jinja2 import UndefinedError

import orolift.report
from orolift.report import render as render_module
from orolift.report.quantities import bare, shown
from orolift.report.render import render

REPORT = Path(orolift.report.__file__).parent
TEMPLATES = sorted((REPORT / "templates").rglob("*.jinja"))
STYLE = (REPORT / "templates" / "style.css").read_text(encoding="utf-8")
VOID = {"meta", "br", "link", "img", "input", "hr"}


class Reader(HTMLParser):
    """Elements of a page: tag, attributes, own text, parents."""

    def __init__(self, html):
        super().__init__()
        self.elements = []
        self.stack = []
        self.feed(html)
        assert not self.stack

    def handle_starttag(self, tag, attrs):
        element = {"tag": tag, "attrs": dict(attrs), "text": "", "parents": [e["tag"] for e in self.stack]}
        assert len(element["attrs"]) == len(attrs)
        self.elements.append(element)
        if tag not in VOID:
            self.stack.append(element)

    def handle_startendtag(self, tag, attrs):
        self.elements.append({"tag": tag, "attrs": dict(attrs), "text": "", "parents": []})

    def handle_endtag(self, tag):
        assert self.stack.pop()["tag"] == tag

    def handle_data(self, data):
        for element in self.stack:
            element["text"] += data

    def all(self, tag):
        return [element for element in self.elements if element["tag"] == tag]


@pytest.fixture
def read(page_for):
    """The rendered page of a crossing, parsed."""

    def parsed(crossing, **more):
        return Reader(render(page_for(crossing, **more)))

    return parsed


def amounts_of(thing):
    """Every amount anywhere inside a page."""
    from dataclasses import fields, is_dataclass

    from orolift.report.quantities import Amount

    if isinstance(thing, Amount):
        return [thing]
    if is_dataclass(thing):
        return [found for field in fields(thing) for found in amounts_of(getattr(thing, field.name))]
    if isinstance(thing, dict):
        return amounts_of(tuple(thing.values()))
    return [found for item in thing for found in amounts_of(item)] if isinstance(thing, tuple) else []


@pytest.mark.parametrize("units", ["metric", "us"])
def test_every_number_shown_is_a_rounded_number_of_the_page(page_for, any_crossing, units):
    """Each data element reads as an amount of the page with the same raw value; and no amount is left out."""
    numbers_are_those_of(page_for(any_crossing, units=units), units)


@pytest.mark.parametrize("units", ["metric", "us"])
def test_every_number_of_a_page_with_members_is_one_of_the_page(page_for, with_members, units):
    """The same with ranges."""
    crossing, spread = with_members
    numbers_are_those_of(page_for(crossing, units=units, spread=spread), units)


def numbers_are_those_of(page, units):
    """Every data element reads as an amount of the page, and no amount is left out."""
    elements = Reader(render(page)).all("data")
    readings = {}
    for amount in amounts_of(page):
        readings.setdefault(repr(float(amount.value)), set()).update({shown(amount, units), bare(amount, units)})
    constants = {repr(row.value): row.digits for row in page.method.constants}
    seen = set()
    for element in elements:
        raw, text = repr(float(element["attrs"]["value"])), element["text"]
        assert text in readings.get(raw, ()) or text == constants.get(raw), (raw, text)
        seen.add(raw)
    assert seen == set(readings) | set(constants)


def test_ids_are_unique_and_every_reference_leads_somewhere(read, any_crossing):
    elements = read(any_crossing).elements
    ids = [element["attrs"]["id"] for element in elements if "id" in element["attrs"]]
    assert len(ids) == len(set(ids))
    for element in elements:
        for reference in element["attrs"].get("aria-labelledby", "").split():
            assert reference in ids


@pytest.mark.parametrize("units", ["metric", "us"])
def test_no_section_is_empty(page_for, any_crossing, units):
    """Under its margin word and heading each says something, and no heading or cell shows a None or a nan."""
    html = render(page_for(any_crossing, units=units))
    sections = re.findall(r"(?s)<section id=.*?</h2>(.*?)</section>", html)
    assert len(sections) == len(re.findall("<section ", html))
    for section in sections:
        words = re.sub(r"(?s)<script.*?</script>|<[^>]*>", " ", section)
        assert len(words.split()) >= 8
        assert not re.search(r"\b(?:None|nan|inf)\b", words)


def test_contents_lead_to_every_section_in_its_order(read, any_crossing):
    """All but the briefing, which is where the reader already is."""
    page = read(any_crossing)
    links = [a["attrs"]["href"].removeprefix("#") for a in page.all("a")]
    assert links == [section["attrs"]["id"] for section in page.all("section")][1:]


def test_figures_speak_to_those_who_cannot_see_them(read, page_for, any_crossing):
    """Each drawing has a title and a text that gives its message in numbers."""
    built = page_for(any_crossing)
    page = read(any_crossing)
    made = (built.budget, built.answers_figure, built.rain_line)
    count = 3 + sum(figure is not None for figure in made)
    assert len(page.all("figure")) == len(page.all("figcaption")) == count
    # the bars of the panels repeat the words beside them
    drawings = [drawing for drawing in page.all("svg") if "aria-hidden" not in drawing["attrs"]]
    assert len(drawings) == 2 * count
    texts = {e["attrs"].get("id"): e["text"] for e in page.elements}
    for drawing in drawings:
        assert drawing["attrs"]["role"] == "img"
        title, alt = drawing["attrs"]["aria-labelledby"].split()
        assert len(texts[title]) > 10
        if "rain-line" in title:
            assert "mm/h" in texts[alt]
            continue
        places = (*(air.name for air in any_crossing.lee), "lee foot", "ground of the column")
        assert any(place in texts[alt] for place in places)
        assert "°C" in texts[alt]


def test_tables_have_captions_and_scopes(read, crossing):
    page = read(crossing)
    assert len(page.all("table")) == len(page.all("caption")) == 11
    for head in page.all("th"):
        assert head["attrs"]["scope"] in {"col", "colgroup", "row", "rowgroup"}


def test_headings_step_down_one_level_at_a_time(read, crossing):
    levels = [int(e["tag"][1]) for e in read(crossing).elements if re.fullmatch(r"h[1-6]", e["tag"])]
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(after - before <= 1 for before, after in pairwise(levels))


def digest(text):
    """Hash of a text as a content security policy names it."""
    return f"'sha256-{base64.b64encode(hashlib.sha256(text.encode()).digest()).decode()}'"


def test_nothing_is_fetched_and_only_our_scripts_run(page_for, any_crossing):
    """No handler, nothing with an address; and a policy that lets scripts and style run by their hashes."""
    html = render(page_for(any_crossing))
    page = Reader(html)
    data, *ours = page.all("script")
    assert data["attrs"] == {"type": "application/json", "id": "reading-data"}
    assert len(ours) == 2
    assert not any(script["attrs"] for script in ours)
    assert not page.all("link")
    for element in page.elements:
        assert not any(name.startswith("on") or name == "style" for name in element["attrs"])
        assert not {"src", "xlink:href", "srcset", "action"} & set(element["attrs"])
        assert element["attrs"].get("href", "#").startswith("#")
    assert "http" not in html.replace("http-equiv", "").replace("http://www.w3.org/2000/svg", "")
    assert "url(" not in html
    assert "@import" not in html
    (style,) = page.all("style")
    policy = next(e["attrs"]["content"] for e in page.all("meta") if "http-equiv" in e["attrs"])
    assert [part.strip() for part in policy.split(";")] == [
        "default-src 'none'",
        f"style-src {digest(style['text'])}",
        f"script-src {' '.join(digest(script['text']) for script in ours)}",
        "img-src data:",
        "base-uri 'none'",
        "form-action 'none'",
    ]


HOSTILE = "<script>alert('x')</script>\" onload=\"a{{ 7 * 7 }}&amp;]]>"


def test_hostile_words_come_out_as_words(page_for, crossing):
    """Title, site name, case file, notes and cautions, also in the data of the script: shown as written, none of it markup."""
    lee = (replace(crossing.lee[0], name=HOSTILE), *crossing.lee[1:])
    crossing = replace(crossing, lee=lee, notes=(HOSTILE,), cautions=(HOSTILE,))
    html = render(page_for(crossing, title=HOSTILE, case_text=f"title = '{HOSTILE}'", version="0"))
    page = Reader(html)
    assert html.count("<script") == len(page.all("script")) == 3
    assert HOSTILE in json.loads(page.all("script")[0]["text"])["ways"]["1"]
    assert not any("onload" in element["attrs"] for element in page.elements)
    assert page.all("h1")[0]["text"] == HOSTILE
    assert page.all("pre")[0]["text"] == f"title = '{HOSTILE}'"
    assert any(HOSTILE in head["text"] for head in page.all("th"))
    assert "49" not in page.all("h1")[0]["text"]


def test_same_page_gives_the_same_bytes(page_for, crossing):
    first = render(page_for(crossing, fresh=True))
    render_module._environment.cache_clear()
    assert render(page_for(crossing, fresh=True)) == first


def test_briefing_comes_first_and_cautions_come_with_it(read, crossing):
    page = read(crossing)
    order = [section["attrs"]["id"] for section in page.all("section")]
    assert order[:4] == ["briefing", "section", "causes", "sites"]
    assert order[4:] == ["how-sure", "path", "rain", "wind", "answers", "inputs", "method", "cautions"]
    assert "not a warning" in page.all("header")[0]["text"]


def test_danger_is_marked_only_where_the_crossing_doubts_itself(read, any_crossing):
    marked = [e for e in read(any_crossing).elements if "danger" in e["attrs"].get("class", "").split()]
    assert len(marked) == len(any_crossing.cautions)


def test_danger_colour_is_used_for_danger_only():
    """Doubts of the crossing, breaking waves, thresholds met and their chance, nothing else."""
    users = re.findall(r"([^{}]+)\{[^{}]*var\(--danger\)", STYLE)
    assert {selector.strip().splitlines()[-1] for selector in users} == {
        ".danger",
        ".danger strong",
        ".breaking",
        "svg text.breaking",
        ".met",
        ".lee-layer.danger",
        ".lee-layer.chance",
        "svg text.danger-words",
    }


def test_pages_are_small_enough_for_a_mail(page_for, named):
    """At most 1.5 MB, with two dozen sites too."""
    assert len(render(page_for(named("many sites"))).encode()) < 1.5e6


def test_case_file_is_left_out_when_there_is_none(read, crossing):
    assert not read(crossing).all("pre")
    assert read(crossing, case_text="").all("pre")


def test_misspelt_fields_stop_the_run(page_for, crossing):
    template = render_module._environment().from_string("{{ page.no_such_field }}")
    with pytest.raises(UndefinedError, match="no_such_field"):
        template.render(page=page_for(crossing))


@pytest.mark.parametrize("template", TEMPLATES, ids=lambda path: path.name)
def test_templates_neither_vouch_for_markup_nor_compute(template):
    text = template.read_text(encoding="utf-8")
    assert not re.search(r"\|\s*safe\b|autoescape|Markup", text)
    for expression in re.findall(r"\{[{%](.*?)[%}]\}", text, flags=re.DOTALL):
        words = re.sub(r'"[^"]*"', '""', expression)
        # "-" at the ends trims white space, "~" joins strings
        assert not re.search(r"[+*/]|\s-\s", words), expression


def test_only_the_renderer_knows_jinja2():
    for module in (REPORT).rglob("*.py"):
        tree = ast.parse(module.read_text(encoding="utf-8"))
        names = {alias.name for node in ast.walk(tree) if isinstance(node, ast.Import) for alias in node.names}
        names |= {node.module or "" for node in ast.walk(tree) if isinstance(node, ast.ImportFrom)}
        roots = {name.partition(".")[0] for name in names}
        assert (not {"jinja2", "markupsafe"} & roots) or module.name == "render.py"


def test_every_class_drawn_is_known_to_the_style_sheet(read, any_crossing):
    """A curve without a rule would be drawn in black or not at all."""
    for element in read(any_crossing).elements:
        if element["tag"] == "path":
            assert any(f".{name}" in STYLE for name in element["attrs"]["class"].split()), element["attrs"]["class"]


def colours(block):
    return dict(re.findall(r"--([\w-]+):\s*(#[0-9a-f]{6});", block))


def luminance(colour):
    """Relative luminance, WCAG 2.2 definition."""
    parts = [int(colour[i : i + 2], 16) / 255.0 for i in (1, 3, 5)]
    red, green, blue = (c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in parts)
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue


def contrast(one, other):
    high, low = sorted((luminance(one), luminance(other)), reverse=True)
    return (high + 0.05) / (low + 0.05)


def test_contrast_formula_gives_the_published_extremes():
    """WCAG 2.2: black on white is 21 to 1; #767676 is the well-known lightest grey that still passes on white."""
    assert contrast("#000000", "#ffffff") == pytest.approx(21.0)
    assert contrast("#767676", "#ffffff") == pytest.approx(4.54, abs=0.01)


@pytest.mark.parametrize("light", ["light", "dark"])
@pytest.mark.parametrize("name", ["ink", "soft", "warm", "water", "ice", "danger"])
def test_words_stand_out_from_the_paper(light, name):
    """WCAG 2.2 success criterion 1.4.3: at least 4.5 to 1 for text."""
    first, second = re.findall(r":root \{(.*?)\}", STYLE, flags=re.DOTALL)
    chosen = colours(first) if light == "light" else colours(second)
    assert contrast(chosen[name], chosen["paper"]) >= 4.5
    assert contrast(chosen["on-ground"], chosen["ground"]) >= 4.5


def test_compiled_templates_are_kept_and_never_trusted(tmp_path, monkeypatch, page_for, crossing):
    """They are used again; spoilt ones, or a folder that cannot be written, change nothing but the time."""
    monkeypatch.setattr(sys, "dont_write_bytecode", False)
    page = page_for(crossing)
    expected = render(page)
    for folder in (tmp_path / "kept", tmp_path / "file" / "under"):
        (tmp_path / "file").write_text("no folder")
        monkeypatch.setattr(render_module._BesideTemplates, "folder", folder)
        render_module._environment.cache_clear()
        assert render(page) == expected
    kept = sorted((tmp_path / "kept").iterdir())
    assert len(kept) > 10
    for file in kept:
        file.write_bytes(file.read_bytes()[:100])
    monkeypatch.setattr(render_module._BesideTemplates, "folder", tmp_path / "kept")
    render_module._environment.cache_clear()
    assert render(page) == expected
    render_module._environment.cache_clear()
