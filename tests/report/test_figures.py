"""Drawings: things stand where their values say, and labels cover neither each other nor the frame."""

import re
from dataclasses import replace
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra import numpy as hnp

from orolift.report.causes import PARTS
from orolift.report.figures.axes import Scale, level_ticks, place, round_step, ticks
from orolift.report.figures.cloud import runs
from orolift.report.figures.contours import contour_lines, inside
from orolift.report.figures.drawing import area, head_along, path_data, polyline, thinned
from orolift.report.figures.low_air import hatch
from orolift.report.figures.pins import spread
from orolift.report.figures.placing import box_of, meet
from orolift.report.figures.section import section
from orolift.report.figures.wind_panel import near_ground
from orolift.report.quantities import from_displayed, quantity
from orolift.report.spans import Spans
from orolift.report.trace import trace

TENTH = 0.1


def points_of(path):
    """Points of path data that holds only M and L."""
    return np.array([[float(a), float(b)] for a, b in re.findall(r"(-?[\d.e+]+) (-?[\d.e+]+)", path)])


def number_of(text):
    return float(text.replace("−", "-").replace("\u202f", "").split("\u00a0")[0])


def both_forms(figure):
    return (figure.drawing, figure.narrow)


def boxes_of(drawing):
    """Boxes of all labels of a drawing."""
    letter = drawing.layout.letter
    labels = [*drawing.labels, *(label for pin in getattr(drawing, "pins", ()) for label in pin.labels)]
    return [box_of(label, letter) for label in labels]


def read_off(marks, at):
    """Value at a drawing coordinate, on the straight scale through the first and last tick."""
    (low, start), (high, end) = marks[0], marks[-1]
    return low + (at - start) / (end - start) * (high - low)


def levels_of(tick_marks):
    return [(number_of(tick.text), tick.at) for tick in tick_marks]


@settings(deadline=None)
@given(
    hnp.arrays(float, st.integers(2, 60), elements=st.floats(-1e3, 1e3)),
    st.floats(0.05, 50.0),
)
def test_thinned_lines_stay_within_the_tolerance(y, tolerance):
    """Law of the method: no dropped point is further from the drawn line than the tolerance."""
    x = np.arange(y.size) * 10.0
    index = thinned(x, y, tolerance)
    assert index[0] == 0
    assert index[-1] == y.size - 1
    for first, last in pairwise(index):
        dx, dy = x[last] - x[first], y[last] - y[first]
        away = np.abs((x[first:last] - x[first]) * dy - (y[first:last] - y[first]) * dx) / np.hypot(dx, dy)
        assert away.max() <= tolerance * (1 + 1e-9)


def test_straight_lines_need_two_points():
    assert thinned(np.linspace(0, 1, 100), np.linspace(5, 9, 100)).tolist() == [0, 99]


@pytest.mark.parametrize(("span", "about"), [(60.0, 8), (2600.0, 5), (0.7, 4), (8530.0, 5)])
def test_steps_are_one_two_or_five(span, about):
    step = round_step(span, about)
    assert f"{step:e}"[0] in "125"
    assert about / 2.6 <= span / step <= about * 2.6


@pytest.mark.parametrize("units", ["metric", "us"])
def test_ticks_stand_at_their_own_values(units):
    """Reading a tick back gives the value it stands at, to the tenth of a drawing unit it is rounded to."""
    scale = Scale(0.0, 60e3, 62.0, 934.0)
    marks = ticks(scale, "distance", units, 8, shift=-25e3)
    assert len(marks) >= 4
    for mark in marks:
        shown = number_of(mark.text)
        assert place(scale, from_displayed(shown, "distance", units) + 25e3) == pytest.approx(mark.at, abs=0.06)
    assert marks[-1].text.endswith("mi" if units == "us" else "km")
    assert [mark.unit for mark in level_ticks(Scale(0.0, 2600.0, 400.0, 50.0), "us", 5, 14.0)][-1] == "ft"
    assert level_ticks(Scale(0.0, 30.0, 400.0, 300.0), "metric", 3, 14.0, "wind")[-1].unit == "m/s"


def test_runs_are_the_stretches_of_true():
    assert runs(np.array([True, False, False, True, True])) == [(0, 0), (3, 4)]
    assert runs(np.zeros(4, dtype=bool)) == []


def test_areas_close_over_a_level_floor():
    points = points_of(area(np.array([0.0, 5.0, 10.0]), np.array([3.0, 1.0, 2.0]), 20.0, "ground").path)
    assert points.tolist() == [[0, 3], [5, 1], [10, 2], [10, 20], [0, 20]]


def test_arrow_heads_look_along_the_line():
    head = head_along(np.array([0.0, 100.0]), np.array([0.0, 0.0]), 0.5, 10.0, "head")
    tip, *corners = points_of(head.path)
    assert all(corner[0] < tip[0] for corner in corners)
    assert head_along(np.array([0.0, 5.0]), np.zeros(2), 0.5, 10.0, "head") is None


def test_path_data_writes_no_negative_zero():
    assert path_data(np.array([-0.01, 1.26]), np.array([0.0, -3.0])) == "M0 0L1.3 -3"
    assert polyline(np.array([0.0, 1.0]), np.array([0.0, 1.0]), "air").kind == "air"


def test_contours_run_where_the_field_has_their_value():
    """The field rises evenly with height over a wavy floor: its contour is the wave, moved up (y is downward)."""
    x = np.linspace(0.0, 800.0, 161)
    floor = 300.0 + 40.0 * np.sin(x / 60.0)
    y = floor[:, np.newaxis] - np.arange(0.0, 250.0, 25.0)
    field = np.broadcast_to(280.0 + np.arange(10.0), y.shape)
    ((across, down),) = contour_lines(x, y, field, 283.5)
    assert across[0] == 0.0
    assert across[-1] == 800.0
    # half a unit by thinning, and as much between the points of a wave of radius 90
    np.testing.assert_allclose(down, np.interp(across, x, floor) - 87.5, atol=1.0)


@settings(deadline=None)
@given(hnp.arrays(float, st.integers(2, 40), elements=st.floats(-100.0, 100.0)), st.floats(-50.0, 50.0))
def test_lines_are_cut_at_the_top_of_the_frame(y, top):
    """Law: what is left lies below the top, on the line, in order, and nothing below the top is lost."""
    x = np.arange(y.size) * 10.0
    parts = inside((x, y), top)
    for across, down in parts:
        assert (down >= top - 1e-9).all()
        assert (np.diff(across) >= 0.0).all()
        np.testing.assert_allclose(down, np.interp(across, x, y), atol=1e-6)
    kept = {float(a) for across, _ in parts for a in across}
    under = y >= top
    whole = under & (np.roll(under, 1) | np.roll(under, -1))
    assert {float(a) for a in x[1:-1][whole[1:-1]]} <= kept


@settings(deadline=None)
@given(st.floats(0.0, 2.0), st.floats(4.0, 20.0), st.integers(0, 1000))
def test_hatches_stay_on_their_area(slope, apart, seed):
    """Law: both ends of every stroke lie between the two lines, to the rounding of coordinates."""
    rng = np.random.default_rng(seed)
    x = np.linspace(0.0, 200.0, 30)
    over = 50.0 + np.cumsum(rng.normal(0.0, 2.0, 30))
    under = over + rng.uniform(0.0, 60.0, 30)
    for stroke in re.findall(
        r"M([\d.]+) ([\d.]+)(?:H([\d.]+)|L([\d.]+) ([\d.]+))", hatch(x, over, under, slope, apart)
    ):
        ends = [(float(stroke[0]), float(stroke[1]))]
        ends.append((float(stroke[2]), ends[0][1]) if stroke[2] else (float(stroke[3]), float(stroke[4])))
        for a, b in ends:
            assert np.interp(a, x, over) - 2.0 <= b <= np.interp(a, x, under) + 2.0


@settings(deadline=None)
@given(hnp.arrays(float, (5, 8), elements=st.floats(0.0, 60.0)))
def test_wind_near_the_ground_is_a_mean(wind):
    """Law: between the least and the most of the streamlines in the lowest 300 m and the first above; exact when even."""
    height = np.broadcast_to(np.arange(8) * 70.0, wind.shape)
    mean = near_ground(height, wind)
    low = wind[:, :6]
    assert (mean >= low.min(axis=1) - 1e-9).all()
    assert (mean <= low.max(axis=1) + 1e-9).all()
    np.testing.assert_allclose(near_ground(height, np.full_like(wind, 7.0)), 7.0)


@pytest.mark.parametrize("form", ["wide", "narrow"])
def test_ground_is_drawn_at_its_heights_above_sea_level(page_for, crossing, form):
    """The crest of the silhouette reads 1850 m on the axis, its foot 40 m; sea level is the floor of the frame."""
    drawing = next(d for d in both_forms(page_for(crossing).section) if d.layout.name == form)
    layout = drawing.layout
    marks = {number_of(tick.text): tick.at for tick in drawing.height_ticks}
    zero, thousand = marks[0.0], marks[1000.0]
    assert zero == layout.bottom
    outline = points_of(drawing.ground.path)
    heights = (zero - outline[:, 1]) / (zero - thousand) * 1000.0
    per_tenth = 0.2 / (zero - thousand) * 1000.0  # coordinates are kept to a tenth
    assert heights.max() == pytest.approx(1850.0, abs=12.0 + per_tenth)  # points of the ridge are 400 m apart
    assert heights[0] == pytest.approx(40.0, abs=per_tenth)
    assert outline[heights.argmax(), 0] == pytest.approx(layout.left + (layout.right - layout.left) * 25 / 60, abs=5.0)


def test_streamlines_stay_over_the_ground_and_in_the_frame(page_for, any_crossing):
    """No drawn line dips into the silhouette by more than its thinning, nor leaves the frame."""
    drawing = page_for(any_crossing).section.drawing
    outline = points_of(drawing.ground.path)[:-2]
    for curve in (*drawing.streamlines, *drawing.isentropes, *drawing.freezing, *drawing.followed[:2]):
        for part in re.findall(r"M[^M]+", curve.path):
            points = points_of(part)
            assert (points[:, 1] <= np.interp(points[:, 0], outline[:, 0], outline[:, 1]) + 1.5).all()
            if curve.kind.startswith(("air", "isentrope", "freezing")):
                assert points[:, 1].min() >= drawing.layout.top - 0.11
                assert points[:, 0].min() >= drawing.layout.left - 0.1
                assert points[:, 0].max() <= drawing.layout.right + 0.1


@pytest.mark.parametrize("name", ["blocked", "cold pool", "cloud and rain"])
def test_streamlines_look_like_the_air_they_carry(page_for, named, name):
    """In the middle of every long stretch: warmer, much warmer, cooler than or like the incoming air at that height.

    Give or take 0.3 K: the point is read off the drawing and the air found between streamlines 25 to 200 m apart.
    """
    from orolift.air.column import interpolated

    crossing = named(name)
    drawing = page_for(crossing).section.drawing
    levels, across = levels_of(drawing.height_ticks), levels_of(drawing.distance_ticks)
    limits = {"air cooler": (-99, -1), "air": (-1, 1), "air warmer": (1, 3), "air warmest": (3, 99)}
    seen = set()
    for curve in drawing.streamlines[:-1]:  # the last may be the edge of the low air
        points = points_of(curve.path)
        if np.ptp(points[:, 0]) < 60.0 or curve.kind not in limits:
            continue
        x = 0.5 * (points[0, 0] + points[-1, 0])
        height = float(read_off(levels, np.interp(x, points[:, 0], points[:, 1])))
        at = np.argmin(np.abs(crossing.distance - 1e3 * read_off(across, x)))
        own = np.interp(height, crossing.height[at], crossing.air.temperature[at])
        change = own - float(interpolated(crossing.incoming, np.array([height])).temperature[0])
        low, high = limits[curve.kind]
        assert low - 0.3 <= change <= high + 0.3, curve.kind
        seen.add(curve.kind)
    assert len(seen) >= 2


def test_followed_air_leads_from_its_source_to_the_site(page_for, named):
    """Its ends, read on the axes: its source at the upwind end; the middle of the mixed layer over the site."""
    crossing = named("blocked")
    drawing = page_for(crossing).section.drawing
    site = crossing.lee[0]
    levels = levels_of(drawing.height_ticks)
    metres = abs((levels[-1][0] - levels[0][0]) / (levels[-1][1] - levels[0][1]))
    line = points_of(next(curve.path for curve in drawing.followed if curve.kind == "air followed"))
    assert line[0, 0] == pytest.approx(drawing.layout.left, abs=TENTH)
    middle = float(crossing.start_height[0]) + 250.0  # some air went round: the middle of the mixed layer
    drawn = np.interp(middle, crossing.start_height, crossing.height[0])  # the range is already felt there
    assert read_off(levels, line[0, 1]) == pytest.approx(drawn, abs=metres)
    across = levels_of(drawing.distance_ticks)
    assert read_off(across, line[-1, 0]) * 1e3 == pytest.approx(site.distance, abs=150.0)
    assert read_off(levels, line[-1, 1]) == pytest.approx(site.elevation + 50.0, abs=metres)


def test_source_bar_spans_eight_tenths_of_the_air(page_for, named):
    crossing = named("blocked")
    drawing = page_for(crossing).section.drawing
    levels = levels_of(drawing.height_ticks)
    bar = next(curve.path for curve in drawing.leaders if curve.kind == "source")
    low, high = (read_off(levels, float(y)) for y in re.fullmatch(r"M[\d.]+ ([\d.]+)V([\d.]+)", bar).groups())
    site = crossing.lee[0]
    assert (low, high) == pytest.approx((site.source_level_low, site.source_level_high), abs=2.0)
    assert any(label.text.startswith("air from ") for label in drawing.labels)


def test_blocked_air_is_hatched_up_to_its_top_before_the_crest(page_for, named):
    """The top of the hatched body reads the blocked top; nothing of it lies behind the crest; the bar is its range."""
    crossing = named("blocked")
    for drawing in both_forms(page_for(crossing).section):
        levels = levels_of(drawing.height_ticks)
        body = points_of(next(curve.path for curve in drawing.low_air if curve.kind == "blocked body"))
        assert read_off(levels, body[:, 1].min()) == pytest.approx(crossing.flow.blocked_top, abs=25.0)
        crest = drawing.layout.left + (drawing.layout.right - drawing.layout.left) * 25 / 60
        assert body[:, 0].max() <= crest + TENTH
        bar = next(curve.path for curve in drawing.leaders if curve.kind == "reach")
        low, high = (read_off(levels, float(y)) for y in re.match(r"M[\d.]+ ([\d.]+)V([\d.]+)", bar).groups())
        assert (low, high) == pytest.approx((crossing.flow.blocked_top_low, crossing.flow.blocked_top_high), abs=5.0)
        assert any(label.text.startswith("blocked") for label in drawing.labels)
    assert any("40\u00a0% of it goes round" in label.text for label in page_for(crossing).section.drawing.labels)


def test_range_of_the_blocked_top_is_that_of_the_members_where_there_are_some(named):
    """One page says one range of one number."""
    crossing = named("blocked")
    figure = section(crossing, trace(crossing), 4.7, 3000.0, "metric", blocked=(510.0, 1230.0))
    for drawing in both_forms(figure):
        bar = next(curve.path for curve in drawing.leaders if curve.kind == "reach")
        ends = (float(y) for y in re.match(r"M[\d.]+ ([\d.]+)V([\d.]+)", bar).groups())
        levels = levels_of(drawing.height_ticks)
        assert [read_off(levels, end) for end in ends] == pytest.approx([510.0, 1230.0], abs=5.0)


def test_air_below_freezing_throughout_has_no_freezing_level_on_the_section(named):
    """The ground is no height at which cold air is at 0 °C."""
    crossing = named("blocked")
    ground = float(crossing.incoming.height[0])
    cold = replace(crossing, air=replace(crossing.air, temperature=crossing.air.temperature - 60.0))
    for level, said in ((ground, False), (9000.0, True)):
        drawing = section(cold, trace(cold), 4.7, level, "metric").drawing
        assert any("0\u00a0°C" in label.text or "0 °C" in label.text for label in drawing.labels) is said


def test_low_air_is_drawn_only_where_there_is_some(page_for, any_crossing):
    drawing = page_for(any_crossing).section.drawing
    kinds = {curve.kind for curve in drawing.low_air}
    assert ("blocked body" in kinds) == (any_crossing.flow.blocked_top > any_crossing.features.base + 1.0)
    assert ("pool body" in kinds) == (any_crossing.pool is not None)


def test_cold_pool_lies_behind_the_crest_up_to_its_top(page_for, named):
    crossing = named("cold pool")
    drawing = page_for(crossing).section.drawing
    body = points_of(next(curve.path for curve in drawing.low_air if curve.kind == "pool body"))
    assert read_off(levels_of(drawing.height_ticks), body[:, 1].min()) == pytest.approx(crossing.pool.top, abs=2.0)
    assert body[:, 0].min() > drawing.layout.left + (drawing.layout.right - drawing.layout.left) * 25 / 60
    assert any(label.text.startswith("cold pool") for label in drawing.labels)
    blocked = points_of(next(curve.path for curve in drawing.low_air if curve.kind == "blocked body"))
    assert blocked[:, 0].max() <= drawing.layout.left + (drawing.layout.right - drawing.layout.left) * 25 / 60 + TENTH


def test_isentropes_carry_the_values_of_the_air(page_for, named):
    """A labelled line crosses the upwind end where the streamlines start with that potential temperature."""
    from orolift.air.temperature import potential_temperature

    crossing = named("no cloud")
    page = page_for(crossing)
    drawing = page.section.drawing
    theta = potential_temperature(crossing.air.pressure[0], crossing.air.temperature[0])
    levels = levels_of(drawing.height_ticks)
    at = [read_off(levels, points_of(curve.path)[0, 1]) for curve in drawing.isentropes if curve.path.startswith("M56")]
    found = np.interp(at, crossing.height[0], theta)
    np.testing.assert_allclose(found, np.round(found), atol=0.1)
    named_values = {number_of(label.text) for label in drawing.labels if label.kind == "isentrope"}
    assert named_values <= set(np.round(np.arange(theta.min(), theta.max())).tolist())
    assert named_values


def test_cloud_body_starts_at_the_cloud_base(page_for, named):
    """Lowest point of the cloud before the crest, against the base the crossing gives; its places are 250 m apart."""
    crossing = named("rain that drifts")
    drawing = page_for(crossing).section.drawing
    body = points_of(drawing.cloud[0].path)
    crest = drawing.layout.left + (drawing.layout.right - drawing.layout.left) * 25 / 60
    lowest = body[body[:, 0] < crest, 1].max()
    assert read_off(levels_of(drawing.height_ticks), lowest) == pytest.approx(crossing.cloud.base, abs=60.0)


@pytest.mark.parametrize(
    ("kind", "side", "field"),
    [
        ("warm rising", "up", "temperature"),
        ("warm falling", "down", "temperature"),
        ("dew rising", "up", "dew_point"),
        ("dew falling", "down", "dew_point"),
    ],
)
def test_path_curves_read_back_as_the_air(page_for, crossing, kind, side, field):
    """Ends of each curve, read on the ticks; to 0.1 K and 10 m, the rounding of drawing coordinates twice over."""
    from orolift.report.trace import trace

    followed = trace(crossing)
    drawing = page_for(crossing).path.drawing
    across = [(number_of(t.text), t.at) for t in drawing.temperature_ticks]
    curve = points_of(next(curve.path for curve in drawing.curves if curve.kind == kind))
    values = getattr(followed, field)
    low = int(np.argmin(followed.height[: followed.top + 1]))
    for point, index in zip(curve[[0, -1]], (low, followed.top) if side == "up" else (followed.top, -1), strict=True):
        assert read_off(across, point[0]) == pytest.approx(values[index] - 273.15, abs=0.1)
        assert read_off(levels_of(drawing.height_ticks), point[1]) == pytest.approx(followed.height[index], abs=10.0)


@pytest.mark.parametrize("name", ["crest", "cloud base", "cloud ends"])
def test_marks_stand_by_what_they_name(page_for, crossing, name):
    """The words of a mark are within a hand's breadth, 200 drawing units, of its point."""
    drawing = page_for(crossing).section.drawing
    label = next(label for label in drawing.labels if label.text.startswith(name))
    height, distance = {
        "crest": (1850.0, 25e3),
        "cloud base": (crossing.cloud.base, crossing.cloud.base_distance),
        "cloud ends": (crossing.cloud.end, crossing.cloud.end_distance),
    }[name]
    levels = [(tick.at, number_of(tick.text)) for tick in drawing.height_ticks]
    across = [(tick.at, 1e3 * number_of(tick.text)) for tick in drawing.distance_ticks]
    x, y = at_value(across, distance), at_value(levels, height)
    assert abs(label.x - x) < 200.0
    assert abs(label.y - y) < 200.0


def at_value(marks, value):
    """Drawing coordinate of a value, on the straight scale through the first and last tick."""
    (start, low), (end, high) = marks[0], marks[-1]
    return start + (value - low) / (high - low) * (end - start)


def test_stretch_is_the_ratio_of_the_scales(page_for, crossing):
    """Heights per unit over distances per unit, from the ticks, equal the factor written on the drawing."""
    drawing = page_for(crossing).section.drawing
    levels = {number_of(tick.text): tick.at for tick in drawing.height_ticks}
    across = {number_of(tick.text): tick.at for tick in drawing.distance_ticks}
    stretch = (levels[0.0] - levels[1000.0]) / 1000.0 / ((across[50.0] - across[0.0]) / 50e3)
    written = next(label.text for label in drawing.labels if "stretched" in label.text)
    assert float(re.search(r"[\d.]+", written)[0]) == pytest.approx(stretch, abs=0.5)


def test_ground_far_above_the_sea_does_not_fill_the_frame(page_for, named):
    first = page_for(named("high ground")).section.drawing.height_ticks[0]
    assert number_of(first.text) > 0.0


def figures_of(page):
    return [one for one in (page.section, page.path, page.budget, page.answers_figure) if one is not None]


@pytest.mark.parametrize("units", ["metric", "us"])
def test_labels_cover_neither_each_other_nor_leave_the_drawing(page_for, any_crossing, units):
    for figure in figures_of(page_for(any_crossing, units=units)):
        for drawing in both_forms(figure):
            boxes = boxes_of(drawing)
            for i, box in enumerate(boxes):
                assert box.left >= 0.0, (figure.key, drawing.layout.name)
                assert box.right <= drawing.layout.width, (figure.key, drawing.layout.name)
                assert box.top >= 0.0
                assert box.bottom <= drawing.layout.height
                clash = [k for k, other in enumerate(boxes[:i]) if meet(box, other)]
                assert not clash, (figure.key, drawing.layout.name)


def test_panel_labels_stay_apart(page_for, any_crossing):
    for drawing in both_forms(page_for(any_crossing).section):
        for panel in (drawing.rain, drawing.wind):
            boxes = [] if panel is None else [box_of(label, panel.layout.letter) for label in panel.labels]
            for i, box in enumerate(boxes):
                assert panel.layout.top - 10.0 <= box.top
                assert box.bottom <= panel.layout.bottom
                assert not any(meet(box, other) for other in boxes[:i])


def test_every_site_has_its_pin_at_its_place(page_for, any_crossing):
    page = page_for(any_crossing)
    for drawing in both_forms(page.section):
        assert [pin.number for pin in drawing.pins] == list(range(1, len(any_crossing.lee) + 1))
    across = page.section.drawing.layout
    for pin, air in zip(page.section.drawing.pins, any_crossing.lee, strict=True):
        assert pin.point_x == pytest.approx(across.left + (across.right - across.left) * air.distance / 60e3, abs=0.06)


def test_path_leads_to_the_pin_of_its_site(page_for, any_crossing):
    """One pin, numbered like the site of the table; none where no site is reached."""
    from orolift.report.trace import trace

    followed = trace(any_crossing)
    for drawing in both_forms(page_for(any_crossing).path):
        assert [pin.number for pin in drawing.pins] == ([] if followed.site is None else [followed.number])
        if followed.site is not None:
            assert any_crossing.lee[followed.number - 1] is followed.site


def test_discs_of_crowded_sites_stay_apart(page_for, any_crossing):
    page = page_for(any_crossing)
    for drawing in both_forms(page.section):
        discs = [pin for pin in drawing.pins if pin.radius]
        assert len(discs) >= min(len(drawing.pins), 10)
        for i, pin in enumerate(discs):
            for other in discs[:i]:
                assert np.hypot(pin.x - other.x, pin.y - other.y) >= pin.radius + other.radius


@settings(deadline=None)
@given(st.lists(st.floats(0.0, 300.0), min_size=1, max_size=40), st.floats(1.0, 30.0))
def test_spread_places_keep_their_distance(wanted, apart):
    """Law: in order, inside the room, apart by the gap or by an even share of the room; unmoved when already so."""
    wanted = sorted(wanted)
    places = spread(wanted, apart, 0.0, 300.0)
    gap = min(apart, 300.0 / max(len(wanted) - 1, 1))
    assert min(places) >= -1e-6
    assert max(places) <= 300.0 + 1e-6
    assert all(after - before >= gap - 1e-6 for before, after in pairwise(places))
    if all(after - before >= gap for before, after in pairwise(wanted)):
        assert places == pytest.approx(wanted, abs=1e-6)


def test_numbers_on_drawings_are_those_of_the_crossing(page_for, crossing):
    page = page_for(crossing)
    section = [label.text for label in page.section.drawing.labels]
    assert f"cloud base {quantity(crossing.cloud.base, 'height', -1, 'metric')}" in section
    assert f"cloud ends {quantity(crossing.cloud.end, 'height', -1, 'metric')}" in section
    values = [label.text for pin in page.section.drawing.pins for label in pin.labels]
    assert quantity(crossing.lee[0].temperature, "temperature", 1, "metric") in values
    assert crossing.lee[0].name in values


def test_rain_strokes_stand_only_where_water_lands(page_for, named):
    """Strokes end on the ground where the crossing lets water land; the longest where most does."""
    crossing = named("rain that drifts")
    drawing = page_for(crossing).section.drawing
    layout = drawing.layout
    points = points_of(drawing.falling.path)
    ends, lengths = points[1::2, 0], points[1::2, 1] - points[::2, 1]
    at = (ends - layout.left) / (layout.right - layout.left) * 60e3
    rate = np.interp(at, crossing.distance, crossing.rain.rate)
    assert (rate > 0.0).all()
    assert rate[lengths.argmax()] == pytest.approx(rate.max(), rel=0.05)


def test_rain_panel_reads_back_as_the_rain(page_for, named):
    """Peak of the area on its own axis, and the peak in words."""
    crossing = named("rain that drifts")
    panel = page_for(crossing).section.drawing.rain
    outline = points_of(panel.rain.path)
    marks = [(number_of(tick.text), tick.at) for tick in panel.ticks]
    step = marks[-1][0] - marks[0][0]
    assert read_off(marks, outline[:, 1].min()) == pytest.approx(crossing.rain.peak_rate * 3600.0, abs=0.02 * step)
    words = " ".join(label.text for label in panel.labels).replace("\u00a0", " ")
    assert f"peak {3600.0 * crossing.rain.peak_rate:.1f} mm/h" in words
    assert panel.snow is not None


def test_no_cloud_and_no_rain_are_not_drawn(page_for, any_crossing):
    drawing = page_for(any_crossing).section.drawing
    made = (any_crossing.air.cloud > 0.0) | (any_crossing.air.condensed > 0.0)
    if any_crossing.cloud.base is None and not made.any():
        assert not drawing.cloud
    if any_crossing.cloud.base is not None and any_crossing.cloud.base < any_crossing.features.crest:
        assert drawing.cloud
    wet = any_crossing.water.removed > 0.005 * any_crossing.water.vapour_in
    assert (drawing.falling is not None) == wet
    assert (drawing.rain is not None) == wet


def test_breaking_waves_are_marked_where_they_break(page_for, any_crossing):
    drawing = page_for(any_crossing).section.drawing
    if drawing.breaking is not None:
        assert any_crossing.breaking.any()
    words = [label.text for label in drawing.labels if label.kind == "breaking"]
    if any_crossing.flow.wave_breaking:
        assert drawing.breaking is not None or words == ["waves break above this picture"]
    if not any_crossing.flow.wave_breaking:
        assert drawing.breaking is None
        assert not words


def test_wind_panel_reads_back_as_the_wind(page_for, named):
    """Wind at the crest and gauges of the site, read on the panel's own axis; the band spans the methods there."""
    crossing = named("blocked")
    panel = page_for(crossing).section.drawing.wind
    marks = [(number_of(tick.text), tick.at) for tick in panel.ticks]
    per_unit = abs((marks[-1][0] - marks[0][0]) / (marks[-1][1] - marks[0][1]))
    near = near_ground(crossing.height, crossing.wind)
    points = np.concatenate([points_of(curve.path) for curve in panel.lines])
    assert read_off(marks, points[:, 1].min()) == pytest.approx(near.max(), abs=2.0 * per_unit)
    gauge = next(one for one in panel.gauges if one.number == 1)
    wind = crossing.lee[0].wind
    assert read_off(marks, gauge.point_y) == pytest.approx(wind.at_10m, abs=per_unit)
    low, high = (read_off(marks, float(y)) for y in re.match(r"M[\d.]+ ([\d.]+)V([\d.]+)", gauge.path).groups())
    assert (low, high) == pytest.approx((wind.gust_low, wind.gust_high), abs=per_unit)
    assert [one.number for one in panel.gauges] == [n for n, air in enumerate(crossing.lee, 1) if air.wind is not None]
    assert panel.band is not None


def test_wind_over_air_that_stays_is_dashed(page_for, named):
    kinds = [curve.kind for curve in page_for(named("blocked")).section.drawing.wind.lines]
    assert "speed aloft" in kinds
    assert "speed" in kinds
    assert {curve.kind for curve in page_for(named("no cloud")).section.drawing.wind.lines} == {"speed"}


def test_budget_bars_start_where_the_last_ended_and_sum_up(page_for, named):
    """Read on the scale the sum bar gives: every bar is as long as its part, to the tenth of a unit it is kept to."""
    for name in ("blocked", "cloud and rain"):
        crossing = named(name)
        for drawing in both_forms(page_for(crossing).budget):
            bars = [
                re.match(r"M([\d.]+) ([\d.]+)(?:H([\d.]+))?", c.path).groups()
                for c in drawing.bars
                if "hatch" not in c.kind
            ]
            shown = [site for site in crossing.lee if site.parts is not None and not site.in_blocked_air]
            per_site = [bars[i : i + len(PARTS) + 1] for i in range(0, len(bars), len(PARTS) + 1)]
            assert len(per_site) == len(shown)
            longest = max(shown, key=lambda site: abs(site.warming))
            low, _, high = per_site[shown.index(longest)][-1]
            unit = (float(high) - float(low)) / abs(longest.warming)
            for site, rows in zip(shown, per_site, strict=True):
                parts = [getattr(site.parts, key) for key in PARTS]
                for part, (start, _, end) in zip(parts, rows, strict=False):
                    assert (float(end or start) - float(start)) / unit == pytest.approx(abs(part), abs=1.2 / unit)
                labels = [label.text for label in drawing.labels]
                assert quantity(site.warming, "temperature_change", 1, "metric") in labels


def test_whiskers_of_the_budget_are_its_ranges(page_for, with_members):
    """From where a bar would end at the lowest to where it would at the highest; none without members."""
    crossing, spread = with_members
    page = page_for(crossing, spread=spread, fresh=True)
    site, spans = crossing.lee[0], Spans(crossing, spread)
    for drawing in (page.budget.drawing, page.budget.narrow):
        zero = float(re.match(r"M([\d.]+)", drawing.lines[0].path)[1])
        start, end = (float(x) for x in re.match(r"M([\d.]+) [\d.]+H([\d.]+)", _sum_bar(drawing)).groups())
        unit = (end - start) / abs(site.warming)
        assert zero == pytest.approx(start if site.warming > 0.0 else end, abs=0.1)
        low, high = (zero + unit * value for value in spans.warming(site))
        own = [curve.path for curve in drawing.whiskers if curve.kind == "whisker"]
        ends = [[float(x) for x in re.search(r"M([\d.]+) [\d.]+H([\d.]+)", path).groups()] for path in own]
        assert any(pair == pytest.approx([low, high], rel=0.03) for pair in ends)
        assert all(0.0 <= a < b <= drawing.layout.width for a, b in ends)
    assert "with the error of the method" in page.budget.caption
    bare = page_for(crossing, fresh=True).budget
    assert bare.drawing.whiskers == ()
    assert "Thin lines" not in bare.caption


def _sum_bar(drawing):
    return next(curve.path for curve in drawing.bars if curve.kind == "sum")


def test_cooling_parts_are_hatched(page_for, named):
    """Colour alone does not tell warming from cooling."""
    kinds = [curve.kind for curve in page_for(named("blocked")).budget.drawing.bars]
    assert named("blocked").lee[0].parts.going_round < -0.3
    assert kinds.count("cools hatch") == kinds.count("cools")
    assert kinds.count("cools") >= 1


def test_no_budget_is_drawn_where_no_site_has_one(page_for, named):
    assert page_for(named("blocked site only")).budget is None
    assert page_for(named("blocked site only")).answers_figure is None


def test_answers_stand_at_their_temperatures(page_for, named):
    """Marks of the first site, read on the axis."""
    crossing = named("blocked")
    site = crossing.lee[0]
    drawing = page_for(crossing).answers_figure.drawing
    marks = [(number_of(tick.text), tick.at) for tick in drawing.ticks]
    middles = {}
    for curve in drawing.marks[:3]:
        xs = [float(x) for x in re.findall(r"[ML]([\d.]+)", curve.path)]
        middles[curve.kind] = {
            "answer popular": 0.5 * (min(xs) + max(xs)),
            "answer descent": xs[0] + 5.0,
            "answer own": xs[0] + 6.0,
        }[curve.kind]
    wanted = {
        "answer popular": site.popular_picture,
        "answer descent": site.descent_only,
        "answer own": site.temperature,
    }
    for kind, value in wanted.items():
        assert read_off(marks, middles[kind]) == pytest.approx(value - 273.15, abs=0.05)
    span = next(curve.path for curve in drawing.lines if curve.kind == "span")
    low, high = (read_off(marks, float(x)) for x in re.match(r"M([\d.]+) [\d.]+H([\d.]+)", span).groups())
    ends = (site.no_blocking.temperature, site.full_blocking.temperature, site.temperature)
    assert (low, high) == pytest.approx((min(ends) - 273.15, max(ends) - 273.15), abs=0.05)
