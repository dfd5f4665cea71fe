"""The page in a real browser: read off by keyboard and pointer, accessible, on paper, on a phone, without script."""

import re
from io import BytesIO
from pathlib import Path

import numpy as np
import pytest

from orolift.cli.cross import report_of, work_out
from orolift.cli.folder import index_html
from orolift.report.index import entry_of
from orolift.report.quantities import quantity
from orolift.report.render import render

pytestmark = pytest.mark.browser

DEMO = Path(__file__).parents[2] / "demo_terrain"
PAPER = {"A4": (210.0, 297.0), "Letter": (215.9, 279.4)}
MARGINS = (30.0, 28.0)
"""Of printed pages, both sides together, across and down [mm]; as in the style sheet."""
PIXELS = 96.0 / 25.4
"""A millimetre in pixels of a style sheet (CSS Values and Units 3)."""


@pytest.fixture(scope="module")
def demo():
    """The moist demo case, with its map."""
    return report_of(work_out(str(DEMO / "varn_moist.toml")), "metric")


@pytest.fixture
def html_of(page_for, named, demo):
    """HTML of a case by its name, or of an index of two."""

    def made(name):
        if name == "rain over a map":
            return demo
        if name == "index":
            return index_html([entry(named(one), one) for one in ("rain that drifts", "cold pool")], "us")
        return render(page_for(named(name)))

    return made


def entry(crossing, name):
    return entry_of(crossing, title=name, valid_time=None, report=f"{name}.html", files={"results": f"{name}.json"})


@pytest.fixture
def opened(browser, tmp_path):
    """A page opened from a file; afterwards nothing else was asked for and nothing was complained about."""
    contexts, asked, said = [], [], []

    def show(html, width=1100, height=900, **options):
        file = tmp_path / "page.html"
        file.write_bytes(html.encode())
        contexts.append(browser.new_context(viewport={"width": width, "height": height}, **options))
        page = contexts[-1].new_page()
        page.set_default_timeout(10_000)
        page.on("request", lambda request: asked.append(request.url))
        page.on("console", lambda message: said.append(message.text))
        page.on("pageerror", lambda error: said.append(str(error)))
        page.goto(file.as_uri())
        return page

    yield show
    for context in contexts:
        context.close()
    assert set(asked) == {(tmp_path / "page.html").as_uri()}
    assert not said


def read_off(page):
    """What the panel under the section says, by field."""
    return page.evaluate(
        "Object.fromEntries([...document.querySelectorAll('#reading [data-field]')]"
        ".map((spot) => [spot.dataset.field, spot.textContent]))"
    )


@pytest.mark.parametrize("name", ["rain over a map", "blocked", "cold pool", "index"])
def test_no_fault_of_accessibility_in_light_and_dark(opened, html_of, axe, name):
    """Every rule of axe-core, with the numbers of the section open; in the dark those that colours decide."""
    page = opened(html_of(name), color_scheme="light")
    page.evaluate("document.querySelectorAll('details').forEach((one) => { one.open = true; })")
    page.evaluate(axe)
    for light, choice in (("light", "{}"), ("dark", "{runOnly: ['color-contrast', 'link-in-text-block']}")):
        page.emulate_media(color_scheme=light)
        found = page.evaluate(f"axe.run({choice}).then((found) => [found.violations, found.passes.length])")
        faults = [(fault["id"], [node["target"] for node in fault["nodes"]][:3]) for fault in found[0]]
        assert not faults, (light, faults)
        assert found[1] > (20 if light == "light" else 0)


def test_tables_sort_by_the_number_and_not_by_its_range(opened, page_for, with_members):
    """100 with 77 to 100 beneath it is below 150, put there without a range: the digits are not joined."""
    crossing, spread = with_members
    page = opened(render(page_for(crossing, spread=spread, fresh=True)))
    page.evaluate("document.querySelector('#site-values tbody tr').cells[5].innerHTML = '<data>150</data>'")
    page.locator("#site-values thead tr:last-child button").nth(4).click()
    cells = "[...document.querySelectorAll('#site-values tbody tr')].map((row) => row.cells[5].firstChild.textContent)"
    shown = [float(text) for text in page.evaluate(cells)]
    assert len(shown) > 1
    assert shown == sorted(shown)
    assert shown[-1] == 150.0
    assert page.locator("#site-values tbody .span").count() > 0


@pytest.mark.parametrize("units", ["metric", "us"])
def test_keyboard_moves_the_reading_line(opened, page_for, named, units):
    """Arrow keys step along the line and from path to path; what is said equals the crossing there."""
    crossing = named("rain that drifts")
    page = opened(render(page_for(crossing, units=units)))
    assert not page.locator(".ruler-point").first.is_visible()
    page.focus("#reading-place")
    page.keyboard.press("Home")
    page.keyboard.press("ArrowRight")
    page.keyboard.press("ArrowRight")
    assert page.locator(".ruler-point").first.is_visible()
    columns = np.unique(np.linspace(0, crossing.distance.size - 1, 121).round().astype(int))
    at = columns[2]
    said = read_off(page)
    wanted = {
        "distance": (crossing.distance[at], "distance", 1),
        "temperature": (crossing.air.temperature[at, 0], "temperature", 1),
        "dew_point": (min(crossing.dew_point[at, 0], crossing.air.temperature[at, 0]), "temperature", 1),
        "height": (crossing.height[at, 0], "height", -1),
        "wind": (crossing.wind[at, 0], "wind", 0),
        "cloud": (crossing.air.cloud[at, 0], "mixing_ratio", 2),
        "rain": (crossing.rain.rate[at] + crossing.rain.background, "rain_rate", 1),
    }
    assert {key: said[key] for key in wanted} == {
        key: quantity(float(v), k, d, units) for key, (v, k, d) in wanted.items()
    }
    assert said["temperature"] in page.get_attribute("#reading-place", "aria-valuetext")
    before = page.get_attribute(".ruler-line >> nth=0", "transform")
    page.keyboard.press("End")
    assert page.get_attribute(".ruler-line >> nth=0", "transform") != before
    page.focus("#reading-path")
    page.keyboard.press("ArrowRight")
    assert read_off(page)["start"] != said["start"]


def test_pointer_reads_the_place_under_it(opened, html_of, named):
    """In the middle of the frame the place is the middle of the line, and the path is the nearest one."""
    crossing = named("rain that drifts")
    page = opened(html_of("rain that drifts"))
    page.evaluate("document.querySelector('#figure-section').scrollIntoView()")
    box = page.locator("#figure-section svg.wide").bounding_box()
    scale = box["width"] / 960.0
    x = box["x"] + 0.5 * (56.0 + 934.0) * scale
    page.mouse.move(x, box["y"] + 60.0 * scale)
    high = read_off(page)
    middle = 0.5 * (crossing.transect.distance[0] + crossing.transect.distance[-1])
    assert float(high["distance"].split("\u00a0")[0]) == pytest.approx(middle / 1000.0, abs=0.3)
    page.mouse.move(x, box["y"] + 430.0 * scale)
    low = read_off(page)
    height_of = lambda said: float(said["height"].replace("\u202f", "").split("\u00a0")[0])  # noqa: E731 (one use)
    assert height_of(low) < height_of(high)
    assert low["distance"] == high["distance"]


@pytest.mark.parametrize("name", ["rain that drifts", "cold pool"])
def test_a_site_shows_the_way_of_its_air(opened, html_of, named, name):
    """By focus, by pointer on its pin, for good when pressed; words alone where the air does not come over."""
    crossing = named(name)
    page = opened(html_of(name))
    shown = lambda: page.locator("svg.wide .way.shown").count()  # noqa: E731 (asked again and again)
    for number, air in enumerate(crossing.lee, 1):
        page.focus(f".reading-sites [data-site='{number}']")
        assert shown() == (0 if air.in_pool or air.in_blocked_air else 1)
        assert air.name in page.inner_text("#reading-way")
    page.focus("#reading-place")
    assert shown() == 0
    assert not page.inner_text("#reading-way")
    last = len(crossing.lee)
    page.hover(f"#figure-section svg.wide .pin[data-site='{last}'] .count >> nth=0")
    assert crossing.lee[-1].name in page.inner_text("#reading-way")
    reached = [n for n, air in enumerate(crossing.lee, 1) if not (air.in_pool or air.in_blocked_air)][-1]
    page.click(f".reading-sites [data-site='{reached}']")
    page.focus("#reading-place")
    page.mouse.move(5, 5)
    assert shown() == 1
    assert page.get_attribute(f".reading-sites [data-site='{reached}']", "aria-pressed") == "true"


def test_without_script_only_the_reading_line_is_lost(opened, html_of):
    with_script = opened(html_of("rain that drifts"))
    headings = with_script.locator("h2").all_inner_texts()
    text = with_script.inner_text("main")
    without = opened(html_of("rain that drifts"), java_script_enabled=False)
    assert without.locator("h2").all_inner_texts() == headings
    assert not without.locator("#reading").is_visible()
    lost = set(text.splitlines()) - set(without.inner_text("main").splitlines())
    assert lost <= set(with_script.inner_text("#reading").splitlines())
    without.click("summary")
    assert without.locator("#section-numbers").is_visible()


def test_policy_lets_no_other_script_run(browser, html_of, tmp_path):
    """Code put into the page by whatever way does not run; the browser says so."""
    html = html_of("rain that drifts").replace("</main>", "</main><script>document.title = 'taken'</script>")
    file = tmp_path / "page.html"
    file.write_text(html, encoding="utf-8")
    context = browser.new_context()
    page = context.new_page()
    said = []
    page.on("console", lambda message: said.append(message.text))
    page.goto(file.as_uri())
    assert page.title() != "taken"
    assert any("Content Security Policy" in text for text in said)
    context.close()


@pytest.mark.parametrize("name", ["rain over a map", "cold pool"])
@pytest.mark.parametrize("width", [360, 550])
def test_no_sideways_scrolling_on_a_phone_and_zoomed_in(opened, html_of, name, width):
    """360 pixels are a small phone; 550 are a window of 1100 at 200 % zoom (WCAG 2.2, 1.4.4 and 1.4.10)."""
    page = opened(html_of(name), width=width)
    page.evaluate("document.querySelectorAll('details').forEach((one) => { one.open = true; })")
    assert page.evaluate("document.documentElement.scrollWidth") <= width
    clipped = page.evaluate(
        """() => [...document.querySelectorAll('svg.narrow text')].filter((text) => {
          const box = text.getBoundingClientRect(), frame = text.closest('svg').getBoundingClientRect();
          return box.width > 0 && (box.left < frame.left - 1.5 || box.right > frame.right + 1.5);
        }).map((text) => text.textContent)"""
    )
    assert not clipped


def test_everything_that_takes_the_keyboard_shows_it(opened, html_of):
    """Walking with the tabulator: each stop has an outline, and the controls of the section are among them."""
    page = opened(html_of("rain that drifts"))
    stops = []
    for _ in range(60):
        page.keyboard.press("Tab")
        stop = page.evaluate(
            "(() => { const at = document.activeElement, look = getComputedStyle(at);"
            "return [at.tagName + '#' + at.id, look.outlineStyle, parseFloat(look.outlineWidth)]; })()"
        )
        if stop[0] == "BODY#":
            break
        stops.append(stop)
    assert all(style != "none" and width >= 2.0 for _, style, width in stops)
    names = {name for name, _, _ in stops}
    assert {"INPUT#reading-place", "INPUT#reading-path", "SUMMARY#"} <= names


@pytest.mark.parametrize(
    ("name", "paper"), [("rain over a map", "A4"), ("rain over a map", "Letter"), ("rain that drifts", "A4")]
)
def test_prints_whole_figures_on_few_pages(opened, html_of, name, paper):
    """Controls stay out, every figure stands on one page with its caption, nothing reaches beyond the paper."""
    pypdf = pytest.importorskip("pypdf")
    page = opened(html_of(name))
    page.focus("#reading-place")  # the line is on; it must not print
    pages = [squeezed(one.extract_text()) for one in pypdf.PdfReader(BytesIO(page.pdf(format=paper))).pages]
    # a range below each number of a table takes a line
    assert len(pages) in {"rain over a map": range(11, 17), "rain that drifts": range(7, 11)}[name]
    whole = "".join(pages)
    assert "Placealongtheline" not in whole
    assert "Thesectioninnumbers" not in whole
    figures = page.evaluate(
        """() => [...document.querySelectorAll('figure')].map((figure) => [
          figure.querySelector('figcaption').textContent,
          [...figure.querySelectorAll('svg.wide text')].map((text) => text.textContent)])"""
    )
    for caption, texts in figures:
        where = [number for number, text in enumerate(pages) if squeezed(caption)[:60] in text]
        assert len(where) == 1, caption
        assert squeezed(max(texts, key=len)) in pages[where[0]]
    across, down = ((side - margin) * PIXELS for side, margin in zip(PAPER[paper], MARGINS, strict=True))
    page.emulate_media(media="print")
    page.set_viewport_size({"width": int(across), "height": int(down)})
    assert page.evaluate("document.documentElement.scrollWidth") <= int(across) + 1
    for box in page.evaluate(
        "[...document.querySelectorAll('figure')].map((one) => one.getBoundingClientRect().toJSON())"
    ):
        assert box["height"] <= down
        assert box["right"] <= across + 1.0


def squeezed(text):
    """Letters without spaces, as text in print has them anywhere."""
    return re.sub(r"\s", "", text)
