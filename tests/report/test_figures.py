"""Drawings: things stand where their values say, and labels cover neither each other nor the frame."""

import re
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra import numpy as hnp

from orolift.report.figures.axes import Scale, level_ticks, place, round_step, ticks
from orolift.report.figures.cloud import runs
from orolift.report.figures.drawing import area, head_along, path_data, polyline, thinned
from orolift.report.figures.pins import spread
from orolift.report.figures.placing import box_of, meet
from orolift.report.figures.section import NARROW, WIDE
from orolift.report.quantities import from_displayed, quantity


def points_of(path):
    """Points of path data that holds only M and L."""
    return np.array([[float(a), float(b)] for a, b in re.findall(r"(-?[\d.e+]+) (-?[\d.e+]+)", path)])


def both_forms(figure):
    return (figure.drawing, figure.narrow)


def boxes_of(drawing):
    """Boxes of all labels and discs of a drawing."""
    letter = drawing.layout.letter
    labels = [*drawing.labels, *(label for pin in drawing.pins for label in pin.labels)]
    return [box_of(label, letter) for label in labels]


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
        shown = float(mark.text.replace("−", "-").split("\u00a0")[0])
        assert place(scale, from_displayed(shown, "distance", units) + 25e3) == pytest.approx(mark.at, abs=0.06)
    assert marks[-1].text.endswith("mi" if units == "us" else "km")
    assert [mark.unit for mark in level_ticks(Scale(0.0, 2600.0, 400.0, 50.0), "us", 5, 14.0)][-1] == "ft"


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


@pytest.mark.parametrize("layout", [WIDE, NARROW], ids=["wide", "narrow"])
def test_ground_is_drawn_at_its_heights_above_sea_level(page_for, crossing, layout):
    """The crest of the silhouette reads 1850 m on the axis, its foot 40 m; sea level is the floor of the frame."""
    drawing = next(d for d in both_forms(page_for(crossing).section) if d.layout is layout)
    marks = {float(tick.text): tick.at for tick in drawing.height_ticks}
    zero, thousand = marks[0.0], marks[1000.0]
    assert zero == layout.bottom
    outline = points_of(drawing.ground.path)
    heights = (zero - outline[:, 1]) / (zero - thousand) * 1000.0
    per_tenth = 0.2 / (zero - thousand) * 1000.0  # coordinates are kept to a tenth
    assert heights.max() == pytest.approx(1850.0, abs=per_tenth)
    assert heights[0] == pytest.approx(40.0, abs=per_tenth)
    assert outline[heights.argmax(), 0] == pytest.approx(layout.left + (layout.right - layout.left) * 25 / 60, abs=0.1)


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
    drawing = page_for(crossing).path.drawing
    across = [(float(t.text.split("\u00a0")[0]), t.at) for t in drawing.temperature_ticks]
    levels = [(float(t.text), t.at) for t in drawing.height_ticks]
    curve = points_of(next(curve.path for curve in drawing.curves if curve.kind == kind))
    values = crossing.dew_point if field == "dew_point" else crossing.air.temperature
    for point, index in zip(curve[[0, -1]], (0, 100) if side == "up" else (100, -1), strict=True):
        assert read_off(across, point[0]) == pytest.approx(values[index, 0] - 273.15, abs=0.1)
        assert read_off(levels, point[1]) == pytest.approx(crossing.height[index, 0], abs=10.0)


def read_off(marks, at):
    """Value at a drawing coordinate, on the straight scale through the first and last tick."""
    (low, start), (high, end) = marks[0], marks[-1]
    return low + (at - start) / (end - start) * (high - low)


@pytest.mark.parametrize("name", ["crest", "cloud base", "cloud ends"])
def test_marks_stand_by_what_they_name(page_for, crossing, name):
    """The words of a mark are within a hand's breadth, 200 drawing units, of its point, and not below the ground."""
    drawing = page_for(crossing).section.drawing
    label = next(label for label in drawing.labels if label.text.startswith(name))
    height, distance = {
        "crest": (1850.0, 25.0),
        "cloud base": (905.0, 11.95),
        "cloud ends": (1240.0, 38.0),
    }[name]
    levels = [(tick.at, float(tick.text)) for tick in drawing.height_ticks]
    across = [(tick.at, float(tick.text.split("\u00a0")[0])) for tick in drawing.distance_ticks]
    x, y = at_value(across, distance), at_value(levels, height)
    assert abs(label.x - x) < 200.0
    assert -100.0 < label.y - y < 5.0


def at_value(marks, value):
    """Drawing coordinate of a value, on the straight scale through the first and last tick."""
    (start, low), (end, high) = marks[0], marks[-1]
    return start + (value - low) / (high - low) * (end - start)


def test_stretch_is_the_ratio_of_the_scales(page_for, crossing):
    """Heights per unit over distances per unit, from the ticks, equal the factor written on the drawing."""
    drawing = page_for(crossing).section.drawing
    levels = {float(tick.text): tick.at for tick in drawing.height_ticks}
    across = {float(tick.text.split("\u00a0")[0]): tick.at for tick in drawing.distance_ticks}
    stretch = (levels[0.0] - levels[1000.0]) / 1000.0 / ((across[50.0] - across[0.0]) / 50e3)
    written = next(label.text for label in drawing.labels if "stretched" in label.text)
    assert float(re.search(r"[\d.]+", written)[0]) == pytest.approx(stretch, rel=0.01)


def test_ground_far_above_the_sea_does_not_fill_the_frame(page_for, crossing):
    from dataclasses import replace

    high = replace(
        crossing,
        height=crossing.height + 2500.0,
        features=replace(crossing.features, base=2540.0, crest=4350.0, lee_foot=2710.0),
        cloud_base=3405.0,
        cloud_end=3740.0,
        lee=tuple(replace(air, elevation=air.elevation + 2500.0) for air in crossing.lee),
    )
    first = page_for(high).section.drawing.height_ticks[0]
    assert float(first.text) > 0.0


def test_labels_cover_neither_each_other_nor_leave_the_drawing(page_for, any_crossing):
    for units in ("metric", "us"):
        for figure in (page_for(any_crossing, units=units).section, page_for(any_crossing, units=units).path):
            for drawing in both_forms(figure):
                boxes = boxes_of(drawing)
                for i, box in enumerate(boxes):
                    assert box.left >= 0.0
                    assert box.right <= drawing.layout.width
                    assert box.top >= 0.0
                    assert box.bottom <= drawing.layout.height
                    assert not any(meet(box, other) for other in boxes[:i])


def test_every_site_has_its_pin_at_its_place(page_for, any_crossing):
    page = page_for(any_crossing)
    for drawing in (*both_forms(page.section), *both_forms(page.path)):
        assert [pin.number for pin in drawing.pins] == list(range(1, len(any_crossing.lee) + 1))
    across = page.section.drawing.layout
    for pin, air in zip(page.section.drawing.pins, any_crossing.lee, strict=True):
        assert pin.point_x == pytest.approx(across.left + (across.right - across.left) * air.distance / 60e3, abs=0.06)


def test_discs_of_crowded_sites_stay_apart(page_for, any_crossing):
    page = page_for(any_crossing)
    for drawing in (*both_forms(page.section), *both_forms(page.path)):
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
    assert f"cloud base {quantity(crossing.cloud_base, 'height', -1, 'metric')}" in section
    assert f"cloud ends {quantity(crossing.cloud_end, 'height', -1, 'metric')}" in section
    values = [label.text for pin in page.section.drawing.pins for label in pin.labels]
    assert quantity(crossing.lee[0].temperature, "temperature", 1, "metric") in values
    assert crossing.lee[0].name in values


def test_rain_strokes_stand_only_where_water_leaves(page_for, crossing):
    """Strokes end on the ground between cloud base and crest, give or take their spacing of 8 units twice over."""
    drawing = page_for(crossing).section.drawing
    layout = drawing.layout
    ends = points_of(drawing.falling.path)[1::2, 0]
    per_km = (layout.right - layout.left) / 60.0
    assert ends.min() >= layout.left + 11.9 * per_km - 16.0
    assert ends.max() <= layout.left + 25.0 * per_km + 16.0


def test_no_cloud_and_no_rain_are_not_drawn(page_for, any_crossing):
    drawing = page_for(any_crossing).section.drawing
    assert bool(drawing.cloud) == bool((any_crossing.air.cloud > 0.0).any())
    assert (drawing.falling is not None) == (any_crossing.removed > 0.0)


def test_many_streamlines_give_a_body_between_them(page_for, crossing):
    """With several streamlines the cloud is the body between the lowest and the highest cloudy one."""
    from dataclasses import replace

    lift = np.array([0.0, 500.0, 900.0, 5000.0])
    many = {name: np.repeat(getattr(crossing.air, name), 4, axis=1) for name in crossing.air.__dataclass_fields__}
    many["cloud"] = many["cloud"] * np.array([1.0, 1.0, 0.0, 0.0])
    many["removed"] = many["removed"] * np.array([1.0, 0.0, 0.0, 0.0])
    tall = replace(
        crossing,
        start_height=40.0 + lift,
        height=crossing.height + lift,
        air=replace(crossing.air, **many),
        dew_point=np.repeat(crossing.dew_point, 4, axis=1),
    )
    drawing = page_for(tall).section.drawing
    assert [curve.kind for curve in drawing.streamlines] == ["air", "air", "air casing", "air lowest"]
    (body,) = drawing.cloud
    metres = 1000.0 / (drawing.height_ticks[0].at - next(t.at for t in drawing.height_ticks if t.text == "1000"))
    outline = points_of(body.path)
    assert np.ptp(outline[:, 1]) * metres == pytest.approx(1850.0 + 500.0 - 905.0, rel=0.03)
