"""Rain along the line and over the map on the page: things stand where their values say, and numbers are those given."""

import base64
import re
import warnings
from dataclasses import replace
from functools import cache
from html.parser import HTMLParser
from itertools import pairwise

import numpy as np
import pytest
import shapely
from rasterio.errors import NotGeoreferencedWarning
from rasterio.io import MemoryFile

from orolift.crossing.situation import Situation
from orolift.rain.gauges import gauges_at, rain_at
from orolift.rain.line import MapLine
from orolift.rain.over_map import Catchment, map_rain
from orolift.report.figures.gauge_scatter import gauge_scatter
from orolift.report.figures.placing import box_of, meet
from orolift.report.figures.rain_line import NARROW, WIDE, rain_line
from orolift.report.figures.rain_map import rain_map_figure
from orolift.report.figures.relief import SEA, SHADOWS, relief
from orolift.report.quantities import Amount
from orolift.report.rain import rain_on_line
from orolift.report.rain_over_map import rain_over_map
from orolift.report.render import render
from orolift.report.words import plain
from orolift.sources.elevation_map import ElevationMap
from orolift.sources.map_inputs import MapInputs, Mapped
from orolift.spread.rain_members import rain_members
from orolift.spread.ranges import range_of
from orolift.terrain.grid import ElevationGrid

HOURS = 6 * 3600.0
WET = "rain that drifts"


def points_of(path):
    """Points of path data that holds only M, L and Z."""
    return np.array([[float(a), float(b)] for a, b in re.findall(r"(-?[\d.]+) (-?[\d.]+)", path)])


@cache
def mapped_rain(worked, fit=False):
    """The map of the small ridge, 48 km of it, with two catchments and eight gauges."""
    crossing = worked(WET)
    x, y = np.arange(-1e3, 61.1e3, 500.0), np.arange(24e3, -24.1e3, -500.0)
    ground = np.interp(x, crossing.transect.distance, crossing.transect.elevation)
    grid = ElevationGrid(np.tile(ground, (y.size, 1)), x, y)
    line = MapLine(crossing.transect.distance.copy(), np.zeros(crossing.transect.distance.size), 8e3)
    basins = (
        Catchment("Mill Brook", shapely.box(12e3, 4e3, 22e3, 16e3)),
        Catchment("Far", shapely.box(9e5, 0.0, 9.1e5, 1e4)),
    )
    first = map_rain(crossing, grid, line)
    at = np.linspace(14e3, 46e3, 8), np.linspace(-15e3, 15e3, 8)
    caught = HOURS * rain_at(grid, first.found.rate, *at) + np.array([1.0, -0.5, 2.0, 0.0, 1.0, -1.0, 0.5, 0.0])
    gauges = gauges_at(*at, np.maximum(caught, 0.0))
    rain = map_rain(crossing, grid, line, duration=HOURS, catchments=basins, gauges=gauges, fit=fit)
    placed = ElevationMap(grid, None, None, None, 0.0, 0.0, 0.0, ())
    sites = ((45e3, 1e3), (16e3, -2e3))
    inputs = MapInputs(placed, line, sites, basins, None, gauges, fit, HOURS, ())
    return crossing, Mapped(inputs, rain)


@pytest.fixture
def over(named):
    """Crossing and map of it."""
    return mapped_rain(named)


def both_forms(figure):
    return figure.drawing, figure.narrow


@pytest.mark.parametrize("units", ["metric", "us"])
def test_rain_line_is_drawn_at_its_values(over, units):
    """Body and line reach the heights on the axis that their peaks say, to the tenth of a drawing unit."""
    crossing, mapped = over
    for drawing in both_forms(rain_line(crossing, mapped.rain.on_line, units)):
        marks = {float(tick.text): tick.at for tick in drawing.ticks}
        zero, top = marks[0.0], max(marks)
        per_unit = (zero - marks[top]) / top
        factor = 3600.0 if units == "metric" else 3600.0 / 25.4
        for curve, peak in (
            (drawing.rain, crossing.rain.peak_rate),
            (drawing.map_line, mapped.rain.on_line.peak_rate),
        ):
            highest = (zero - points_of(curve.path)[:, 1].min()) / per_unit
            assert highest == pytest.approx(peak * factor, abs=0.4 / per_unit)
        assert zero == drawing.layout.bottom


def test_the_strip_shares_out_all_the_rain(over):
    """The bars stand before the crest and behind it without a gap; their darkness follows the share."""
    crossing, mapped = over
    for drawing in both_forms(rain_line(crossing, mapped.rain.on_line, "metric")):
        ends = [[float(v) for v in re.findall(r"[MH](-?[\d.]+)", bar.path)[:2]] for bar in drawing.shares]
        crest = points_of(drawing.divide.path)[0, 0]
        assert ends[0][0] == pytest.approx(drawing.layout.left, abs=0.6)
        assert ends[0][1] == pytest.approx(crest, abs=0.6)
        for one, other in pairwise(ends):
            assert other[0] - one[1] == pytest.approx(1.0, abs=0.2)
        assert [bar.kind for bar in drawing.shares] == ["before-crest"] + ["behind-crest"] * (len(ends) - 1)
        shares = [crossing.rain.windward_share, *(share for *_, share in crossing.rain.lee_bands)]
        order = np.argsort(shares[: len(ends)])
        assert np.all(np.diff([drawing.shares[i].depth for i in order]) >= 0.0)
    assert crossing.rain.windward_share + sum(s for *_, s in crossing.rain.lee_bands) == pytest.approx(1.0)


def test_words_cover_no_words(over):
    """Labels of all three drawings keep clear of each other."""
    crossing, mapped = over
    figures = (
        rain_line(crossing, mapped.rain.on_line, "metric"),
        rain_map_figure(crossing, mapped, "us"),
        gauge_scatter(mapped.rain, "metric"),
    )
    for figure in figures:
        for drawing in both_forms(figure):
            pins = [label for pin in getattr(drawing, "pins", ()) for label in pin.labels]
            boxes = [box_of(label, drawing.layout.letter) for label in (*drawing.labels, *pins)]
            for i, one in enumerate(boxes):
                assert not any(meet(one, other) for other in boxes[i + 1 :]), figure.key


def test_no_rain_has_no_figure_and_says_so(named):
    """A dry crossing: no drawing, no rows, and a heading that says it."""
    dry = named("no cloud")
    assert rain_line(dry, None, "metric") is None
    section = rain_on_line(dry)
    assert section.rows == ()
    assert plain(section.heading, "metric") == "Hardly any rain reaches the ground"


def test_background_rain_alone(named):
    """Background without rain of the range: its rate in the heading, rows with it."""
    dry = named("no cloud")
    wet = replace(dry, rain=replace(dry.rain, background=2.0 / 3600.0))
    section = rain_on_line(wet)
    assert "2.0\u00a0mm/h" in plain(section.heading, "metric")
    assert all(row.windward_rate.value == pytest.approx(2.0 / 3600.0) for row in section.rows if row.windward_rate)


def test_the_map_keeps_places(over):
    """Line, catchment, gauges and sites stand at their coordinates in the frame."""
    crossing, mapped = over
    for drawing in both_forms(rain_map_figure(crossing, mapped, "metric")):
        frame = drawing.frame
        scale = (frame.right - frame.left) / 62.5e3  # 125 columns of 500 m

        def spot(x, y, frame=frame, scale=scale):
            return frame.left + (x + 1.25e3) * scale, frame.top + (24.25e3 - y) * scale

        line = points_of(drawing.lines[-1].path if drawing.lines[-1].kind == "map-line" else _line(drawing))
        assert line[0] == pytest.approx(spot(0.0, 0.0), abs=0.11)
        assert line[-1] == pytest.approx(spot(60e3, 0.0), abs=0.11)
        (basin,) = drawing.borders  # the far one lies off the map
        corners = points_of(basin.path)
        assert corners.min(axis=0) == pytest.approx(spot(12e3, 16e3), abs=0.11)
        assert corners.max(axis=0) == pytest.approx(spot(22e3, 4e3), abs=0.11)
        tops = [points_of(mark.path)[0] for mark in drawing.gauges]
        for top, x, y in zip(tops, mapped.rain.gauges.x, mapped.rain.gauges.y, strict=True):
            assert (top[0], top[1] + 5.0) == pytest.approx(spot(x, y), abs=0.11)
        places = [(pin.point_x, pin.point_y) for pin in drawing.pins]
        assert places[0] == pytest.approx(spot(45e3, 1e3), abs=0.11)
        assert places[1] == pytest.approx(spot(16e3, -2e3), abs=0.11)


def _line(drawing):
    return next(curve.path for curve in drawing.lines if curve.kind == "map-line")


def test_the_scale_bar_is_as_long_as_it_says(over):
    crossing, mapped = over
    for drawing in both_forms(rain_map_figure(crossing, mapped, "metric")):
        bar = next(curve.path for curve in drawing.lines if curve.kind == "scale-bar")
        long = float(re.search(r"h([\d.]+)", bar)[1])
        words = next(label.text for label in drawing.labels if re.fullmatch(r"\d+\u00a0km", label.text))
        scale = (drawing.frame.right - drawing.frame.left) / 62.5e3
        assert long == pytest.approx(float(words.split("\u00a0")[0]) * 1000.0 * scale, abs=0.1)


def test_the_wind_arrow_points_along_the_wind(over):
    """A westerly: the arrow points to the right."""
    crossing, mapped = over
    head = next(
        curve for curve in rain_map_figure(crossing, mapped, "metric").drawing.lines if curve.kind == "map-wind-head"
    )
    tip, *corners = points_of(head.path)
    assert all(tip[0] > corner[0] for corner in corners)
    assert tip[1] == pytest.approx(np.mean([corner[1] for corner in corners]), abs=0.2)


def test_the_peak_lies_in_the_innermost_layer(over):
    """Rain is drawn where it falls: the highest cell inside the last layer, the driest edge outside the first."""
    crossing, mapped = over
    drawing = rain_map_figure(crossing, mapped, "metric").drawing
    frame, rain = drawing.frame, mapped.rain
    scale = (frame.right - frame.left) / 62.5e3
    peak = shapely.Point(frame.left + (rain.peak[0] + 1.25e3) * scale, frame.top + (24.25e3 - rain.peak[1]) * scale)
    rings = [shapely.Polygon(points_of(part)) for part in drawing.layers[-1].path.split("Z") if part]
    assert any(ring.buffer(1.0).contains(peak) for ring in rings)
    assert len(drawing.layers) >= 4
    levels = [label.text for label in drawing.labels if label.kind == "rain-value"]
    assert levels
    assert all(text.endswith("mm/h") for text in levels)


def test_relief_is_lit_from_the_northwest_and_the_sea_is_sea():
    """Of a ridge along the meridian the western slope is light, the eastern dark, level ground neither, 0 m sea."""
    x = np.arange(-20e3, 20e3, 500.0)
    ridge = np.clip(1000.0 - np.abs(np.abs(x) * 0.1), 0.0, None)
    grid = ElevationGrid(np.tile(ridge, (80, 1)), x, -x)
    made = relief(grid, 80)
    assert made.startswith("data:image/png;base64,")
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", NotGeoreferencedWarning)  # a picture has no place on Earth
        with MemoryFile(base64.b64decode(made.split(",")[1])) as memory, memory.open() as picture:
            shade = picture.read(1)[40]
            assert picture.colormap(1)[0][3] == 0
    assert np.all(shade[(x > -9e3) & (x < -1e3)] > SHADOWS)
    assert np.all((shade[(x > 1e3) & (x < 9e3)] > 0) & (shade[(x > 1e3) & (x < 9e3)] <= SHADOWS))
    assert np.all(shade[np.abs(x) > 11e3] == SEA)
    assert len(relief(grid, 40)) < len(made)


def test_gauges_on_the_diagonal_agree(over):
    """The scatter has the same scale both ways, and each gauge at its two totals."""
    _, mapped = over
    rain = mapped.rain
    for drawing in both_forms(gauge_scatter(rain, "metric")):
        layout = drawing.layout
        assert layout.right - layout.left == pytest.approx(layout.bottom - layout.top, rel=0.1)
        top = max(float(tick.text) for tick in drawing.map_ticks)
        for mark, caught, there in zip(drawing.marks, rain.gauges.total, rain.comparison.modelled, strict=True):
            x, y = points_of(mark.path)[0] + np.array([0.0, 5.0])
            assert (x - layout.left) / (layout.right - layout.left) * top == pytest.approx(caught, abs=0.02 * top)
            assert (layout.bottom - y) / (layout.bottom - layout.top) * top == pytest.approx(there, abs=0.02 * top)
    few = replace(rain, comparison=replace(rain.comparison, used=2))
    assert gauge_scatter(few, "metric") is None


def test_rows_are_the_values_of_the_map(over):
    """Catchments, gauges and bands carry the raw numbers; what is off the map has none and says so."""
    _, mapped = over
    section, rain = rain_over_map(mapped), mapped.rain
    here, far = section.catchments
    assert here.total.value == rain.catchments[0].rain.total
    assert far.total is None
    assert "outside the map" in far.remark
    assert [row.caught.value for row in section.gauges] == rain.gauges.total.tolist()
    assert section.gauges[0].difference.value == pytest.approx(rain.comparison.modelled[0] - rain.gauges.total[0])
    assert sum(row.area.value * row.rate.value for row in section.bands) == pytest.approx(rain.total, rel=1e-9)
    assert section.difference == rain.on_line.difference
    assert section.limits == rain.limits


def test_a_fit_is_told_only_where_it_was_asked_for(named, over):
    """With fit = true the page gives values with their ranges and says that the map does not use them."""
    told = " ".join(plain(words, "metric") for words in rain_over_map(over[1]).gauge_sentences)
    assert "Fitted" not in told
    asked = " ".join(plain(words, "metric") for words in rain_over_map(mapped_rain(named, fit=True)[1]).gauge_sentences)
    assert "Fitted to eight gauges, as the case asks" in asked
    assert "The map above does not use them." in asked


class _Page(HTMLParser):
    """Ids, sections, picture addresses and danger paragraphs of a page."""

    def __init__(self):
        super().__init__()
        self.ids, self.sources, self.danger = [], [], []
        self._in_danger = False

    def handle_starttag(self, tag, attrs):
        found = dict(attrs)
        self.ids += [found["id"]] if "id" in found else []
        self.sources += [found[key] for key in ("src", "href") if key in found]
        self._in_danger = tag == "p" and found.get("class") == "danger"

    def handle_data(self, data):
        if self._in_danger and data.strip():
            self.danger.append(data.strip())


def read(html):
    page = _Page()
    page.feed(html)
    return page


def test_the_page_with_a_map(page_for, over):
    """Both sections, ids once, pictures inside the page, flags in the danger colour."""
    crossing, mapped = over
    html = render(page_for(crossing, mapped=mapped, flags=("Rain on snow: up to 2 mm.",)))
    page = read(html)
    assert len(page.ids) == len(set(page.ids))
    assert {"rain", "map", "figure-rain-line", "figure-rain-map", "figure-gauge-scatter", "catchments"} <= set(page.ids)
    pictures = [source for source in page.sources if not source.startswith("#")]
    assert len(pictures) == 2
    assert all(source.startswith("data:image/png;base64,") for source in pictures)
    assert "Rain on snow: up to 2 mm." in page.danger
    assert html == render(page_for(crossing, mapped=mapped, flags=("Rain on snow: up to 2 mm.",)))


def test_the_page_of_a_ridge_has_no_map(page_for, any_crossing):
    """Without a raster: rain along the line, no map, no empty words about one."""
    page = read(render(page_for(any_crossing)))
    assert "rain" in page.ids
    assert "map" not in page.ids
    assert [source for source in page.sources if not source.startswith("#")] == []


def test_us_units_reach_the_map(page_for, over):
    """Inches, miles and square miles on the page."""
    crossing, mapped = over
    html = render(page_for(crossing, mapped=mapped, units="us"))
    start = html.index('id="map"')
    section = html[start : html.index("</section>", start)]
    assert "in/h" in section
    assert "sq mi" in section
    assert "mm/h" not in section


def test_layouts_share_the_axis_of_the_section():
    """The figure lines up with the section above it."""
    from orolift.report.figures import section

    for one, other in ((WIDE, section.WIDE), (NARROW, section.NARROW)):
        assert (one.left, one.right, one.width) == (other.left, other.right, other.width)


def test_a_dry_map_is_words_only(page_for, over):
    """Rain that reads as 0.0 mm/h everywhere: no drawing, no tables of zeros, and it is said."""
    crossing, mapped = over
    rate = mapped.rain.found.rate * 0.04 / 3600.0 / mapped.rain.peak_rate
    found = replace(mapped.rain.found, rate=rate)
    dry = replace(mapped, rain=replace(mapped.rain, found=found, peak_rate=float(rate.max())))
    page = page_for(crossing, mapped=dry)
    assert page.rain_map is None
    assert "No rain to speak of" in plain(page.rain_over_map.heading, "metric")
    ids = read(render(page)).ids
    assert "map" in ids
    assert "figure-rain-map" not in ids
    assert "rain-estimates" not in ids


def test_bands_are_round_in_the_units_of_the_page(named, over):
    """Edges are multiples of 200 m, or of 500 ft."""
    crossing, mapped = over
    for units, step in (("metric", 200.0), ("us", 500.0 * 0.3048)):
        rows = (*rain_on_line(crossing, (), units).rows, *rain_over_map(mapped, units).bands)
        edges = np.array([row.lower.value for row in rows]) / step
        np.testing.assert_allclose(edges, np.round(edges), atol=1e-6)


def test_the_map_carries_its_ranges(named, with_members):
    """Heading and sentences, catchments on the map, gauges; without members nothing says what ranges are."""
    crossing, spread = with_members
    _, mapped = mapped_rain(named)
    situation = Situation(crossing.transect, crossing.incoming, crossing.sites, crossing.settings)
    members = rain_members(spread, situation, crossing, mapped.rain)
    found = rain_over_map(replace(mapped, members=members))
    low, high = range_of(members.values["peak_rate"])
    shown = [part.value for part in found.heading if isinstance(part, Amount)]
    assert shown == [mapped.rain.peak_rate, min(low, shown[0]), max(high, shown[0])]
    assert "of the members" in plain(found.sentences[-1], "metric")
    near, far = found.catchments
    assert all(near.spans[name] for name in ("rate", "total", "volume"))
    assert not far.spans
    ends = [part.value for part in near.spans["total"] if isinstance(part, Amount)]
    rate = [part.value for part in near.spans["rate"] if isinstance(part, Amount)]
    assert ends == pytest.approx([HOURS * value for value in rate])
    assert all(row.spans["on_map"] and row.spans["difference"] for row in found.gauges)
    bare = rain_over_map(mapped)
    assert "of the members" not in plain(bare.sentences[-1], "metric")
    assert not bare.catchments[0].spans
