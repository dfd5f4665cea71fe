"""What can be read off the section: the numbers a script shows are those of the crossing, in the units of the page."""

import json
import re
from pathlib import Path

import numpy as np
import pytest

import orolift.report
from orolift.report.quantities import displayed
from orolift.report.reading import OF_AIR, OF_PLACE, reading

SCRIPT = (Path(orolift.report.__file__).parent / "templates" / "reading.js").read_text(encoding="utf-8")


@pytest.mark.parametrize("units", ["metric", "us"])
def test_numbers_carried_are_those_of_the_crossing(named, units):
    """Every field at every place within half of its last decimal; the lowest path is the lowest streamline."""
    crossing = named("cloud and rain")
    data = reading(crossing, units).data
    lowest = data["paths"][0]
    for key, kind, values in (
        ("temperature", "temperature", crossing.air.temperature[:, 0]),
        ("height", "height", crossing.height[:, 0]),
        ("wind", "wind", crossing.wind[:, 0]),
        ("cloud", "mixing_ratio", crossing.air.cloud[:, 0]),
    ):
        scale = 10.0 ** data["fields"][key]["digits"]
        columns = np.unique(np.linspace(0, values.size - 1, len(lowest[key])).round().astype(int))
        wanted = [displayed(float(value), kind, units) for value in values[columns]]
        np.testing.assert_allclose(np.array(lowest[key]) / scale, wanted, rtol=0.0, atol=0.501 / scale)


def test_data_are_whole_numbers_of_one_length(any_crossing):
    """Valid JSON without a number that is none, as many values in every list, and paths that do not cross."""
    found = reading(any_crossing, "metric")
    text = json.dumps(found.data, allow_nan=False)
    assert len(text) < 160_000
    count = found.last_place + 1
    lists = [*found.data["places"].values(), *(values for path in found.data["paths"] for values in path.values())]
    assert all(len(values) == count and all(isinstance(value, int) for value in values) for values in lists)
    heights = np.array([path["up"] for path in found.data["paths"]])
    assert (np.diff(heights, axis=0) >= 0).all()
    assert 0 <= found.first_place <= found.last_place


def test_dew_point_never_stands_above_temperature(any_crossing):
    for path in reading(any_crossing, "metric").data["paths"]:
        assert (np.array(path["dew_point"]) <= np.array(path["temperature"])).all()


def test_table_has_the_lowest_air_at_round_places(named):
    """Its places are at most half a step of the crossing away from tens of kilometres."""
    crossing = named("rain that drifts")
    places = reading(crossing, "metric").places
    step = float(crossing.distance[1] - crossing.distance[0])
    assert [round(place.distance.value / 10e3) * 10 for place in places] == [0, 10, 20, 30, 40, 50, 60]
    for place in places:
        assert abs(place.distance.value - round(place.distance.value / 10e3) * 10e3) <= 0.5 * step + 1e-6
        assert [row.start.value for row in place.rows] == sorted(row.start.value for row in place.rows)


def test_air_of_each_site_is_told_and_drawn(page_for, any_crossing):
    """Words for every site; a way for those that crossing air reaches, from its source level to the site."""
    page = page_for(any_crossing)
    assert [way.number for way in page.reading.sites] == list(range(1, len(any_crossing.lee) + 1))
    reached = {n for n, air in enumerate(any_crossing.lee, 1) if not (air.in_pool or air.in_blocked_air)}
    for drawing in (page.section.drawing, page.section.narrow):
        assert {way.number for way in drawing.ways} == reached
        for way in drawing.ways:
            line = way.curves[-1].path
            points = [tuple(map(float, pair)) for pair in re.findall(r"(-?[\d.]+) (-?[\d.]+)", line)]
            site = any_crossing.lee[way.number - 1]
            pin = next(pin for pin in drawing.pins if pin.number == way.number)
            assert points[0][0] == pytest.approx(drawing.layout.left, abs=2.0)
            assert points[-1][0] == pytest.approx(pin.point_x, abs=1.0)
            assert site.name in page.reading.sites[way.number - 1].words
    for number, air in enumerate(any_crossing.lee, 1):
        words = page.reading.sites[number - 1].words
        assert ("lies in" in words) == (number not in reached), air.name


def test_script_touches_nothing_but_the_page():
    """No network, no storage, no clock, no markup built from text."""
    for word in ("fetch", "XMLHttpRequest", "import(", "innerHTML", "eval", "localStorage", "Date", "document.write"):
        assert word not in SCRIPT
    assert "</" not in SCRIPT


def test_every_field_has_a_place_on_the_page(page_for, named):
    """The template lists fields by key; the script fills those it finds."""
    from orolift.report.render import render

    html = render(page_for(named("cloud and rain")))
    for field in (*OF_PLACE, *OF_AIR):
        assert f'data-field="{field.key}"' in html
