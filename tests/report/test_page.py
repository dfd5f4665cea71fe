"""The page as data: what it concludes, and that its numbers are those of the crossing."""

import subprocess
import sys
from dataclasses import fields, is_dataclass, replace

import numpy as np
import pytest

from orolift.constants import table
from orolift.report.briefing import cloudy_to_the_end, starts_saturated
from orolift.report.quantities import Amount
from orolift.report.words import plain


def amounts_in(thing):
    """Every amount anywhere inside a dataclass or tuple."""
    if isinstance(thing, Amount):
        return [thing]
    if is_dataclass(thing):
        return [found for field in fields(thing) for found in amounts_in(getattr(thing, field.name))]
    if isinstance(thing, tuple):
        return [found for item in thing for found in amounts_in(item)]
    return []


def text_of(words, units="metric"):
    return plain(words, units).replace("\u00a0", " ")


def test_briefing_leads_with_cloud_rain_and_lee(page_for, crossing):
    page = page_for(crossing)
    assert text_of(page.briefing.heading) == "Cloud base at 900 m; a third of the vapour rains out; 17.3 °C in the lee"
    assert len(page.briefing.sentences) == 3
    assert "(33 %)" in text_of(page.briefing.sentences[0])


def test_briefing_numbers_are_those_of_the_crossing(page_for, crossing):
    values = {amount.value for amount in amounts_in(page_for(crossing).briefing)}
    site = crossing.lee[0]
    for wanted in (
        crossing.cloud_base,
        crossing.features.crest,
        crossing.crest_wind,
        crossing.removed / crossing.vapour_in,
        site.temperature,
        site.dew_point,
        site.relative_humidity,
        site.popular_picture,
    ):
        assert wanted in values
    assert any(value == pytest.approx(site.warming) for value in values)


def test_main_site_is_the_first_in_the_lee(page_for, crossing):
    page = page_for(replace(crossing, lee=crossing.lee[::-1]))
    assert text_of(page.briefing.sentences[1]).startswith("At Lower Tarn (585 m, 27 km beyond the crest)")


def test_dry_air_is_said_to_stay_clear(page_for, any_crossing):
    page = page_for(any_crossing)
    clear = any_crossing.cloud_base is None
    assert text_of(page.briefing.heading).startswith("No cloud forms") == clear
    assert ("stays clear" in text_of(page.section_heading)) == clear
    assert (page.briefing.key_numbers[0].amount is None) == (clear or any_crossing.cloud_base == 40.0)


def test_cloud_from_end_to_end_is_said_so(page_for, fog):
    assert starts_saturated(fog)
    assert cloudy_to_the_end(fog)
    page = page_for(fog)
    assert text_of(page.briefing.heading).startswith("Cloud from the ground up; none of the vapour")
    assert text_of(page.section_heading) == "Cloud covers the whole windward slope and all of the lee"
    assert any("saturated at the upwind end" in text_of(words) for words in page.cautions.here)


def test_air_that_is_cooler_than_it_came_is_said_to_be_cooler(page_for, site_crossing):
    page = page_for(site_crossing(("Cold Flat", "lee", 52e3, 585.0, 284.05)))
    assert text_of(page.sites.heading) == "Cold Flat is 2.0 °C cooler than the incoming air at its height"
    assert "2.0 °C cooler than" in text_of(page.briefing.sentences[1])


def test_several_sites_share_one_heading(page_for, site_crossing):
    warm = [("A", "lee", 45e3, 900.0, 287.05), ("B", "lee", 50e3, 700.0, 289.15)]
    both = [*warm, ("C", "lee", 55e3, 500.0, 285.05)]
    assert text_of(page_for(site_crossing(*warm)).sites.heading) == (
        "Two lee sites are 1.0 °C to 3.1 °C warmer than the incoming air at their height"
    )
    assert text_of(page_for(site_crossing(*both)).sites.heading) == (
        "Three lee sites are between 1.0 °C cooler and 3.1 °C warmer than the incoming air at their height"
    )


def test_rows_hold_the_values_of_their_sites(page_for, crossing):
    for row, air in zip(page_for(crossing).sites.rows, crossing.lee, strict=True):
        assert row.name == air.name
        assert row.temperature.value == air.temperature
        assert row.dew_point.value == air.dew_point
        assert row.relative_humidity.value == air.relative_humidity
        assert row.mixing_ratio.value == air.mixing_ratio
        assert row.upwind_temperature.value == air.upwind_temperature
        assert row.upwind_dew_point.value == air.upwind_dew_point
        assert row.warming.value == air.warming
        if air.side == "windward":
            assert row.popular_picture is None
        else:
            assert row.popular_picture.value == air.popular_picture


def test_distances_are_in_the_users_own_numbers(page_for, crossing):
    shifted = replace(crossing, transect=replace(crossing.transect, origin=-25e3))
    page = page_for(shifted)
    assert page.sites.rows[0].distance.value == pytest.approx(27e3)
    assert [place.distance.value for place in page.journey.places if place.name == "Crest"] == [0.0]
    assert page.section.drawing.distance_ticks[0].text == "−20"


def test_difference_beyond_two_degrees_is_explained(page_for, crossing):
    lee = tuple(replace(air, popular_picture=air.temperature + 2.5) for air in crossing.lee)
    assert len(page_for(crossing).sites.remarks) == 1
    remark = text_of(page_for(replace(crossing, lee=lee)).sites.remarks[1])
    assert remark.startswith("It differs by up to 2.5 °C")
    assert "evaporates again" in remark


def test_places_follow_the_path_and_water_adds_up(page_for, crossing):
    places = page_for(crossing).journey.places
    assert [place.name for place in places] == ["Upwind end", "Cloud base", "Crest", "End of cloud", "Lee foot"]
    distances = [place.distance.value for place in places]
    assert distances == sorted(distances)
    assert places[0].fallen.value == 0.0
    assert places[-1].fallen.value == pytest.approx(crossing.removed)


def test_places_hold_the_air_of_the_path_there(page_for, crossing):
    top = next(place for place in page_for(crossing).journey.places if place.name == "Crest")
    at = int(np.argmax(crossing.height[:, 0]))
    assert top.height.value == 1850.0
    assert top.temperature.value == pytest.approx(crossing.air.temperature[at, 0])
    assert top.dew_point.value == pytest.approx(crossing.dew_point[at, 0])
    assert top.pressure.value == pytest.approx(crossing.air.pressure[at, 0])
    assert top.vapour.value == pytest.approx(crossing.air.vapour[at, 0])
    assert top.cloud.value == pytest.approx(crossing.air.cloud[at, 0])
    assert top.entropy.value == pytest.approx(crossing.air.entropy[at, 0])
    start = page_for(crossing).journey.places[0]
    assert start.dew_point.value == pytest.approx(start.temperature.value - 4.0)


def test_cautions_are_always_there(page_for, any_crossing):
    words = " ".join(text_of(caution) for caution in page_for(any_crossing).cautions.always)
    for wanted in (
        "not a warning",
        "warning services",
        "fire agencies",
        "local codes",
        "licensed practice",
        "follow the terrain whatever its stability",
    ):
        assert wanted in words


def test_limits_of_this_case_are_named(page_for, crossing):
    def limits(changed, **more):
        return " ".join(text_of(caution) for caution in page_for(changed, **more).cautions.here)

    assert "weak" in limits(replace(crossing, crest_wind=3.0))
    assert "weak" not in limits(crossing)
    assert "no valid time" in limits(crossing, valid_time=None)
    assert "70 %" in limits(crossing)
    assert "oblique" in limits(replace(crossing, cautions=("The wind is oblique to the range.",)))


def test_every_constant_is_listed_with_its_source(page_for, crossing):
    rows = page_for(crossing).method.constants
    assert [(row.name, row.value, row.source) for row in rows] == [(n, float(v), v.source) for n, v in table()]
    assert all(float(row.digits) == pytest.approx(row.value, rel=1e-8) for row in rows)


def test_title_is_made_when_none_is_given(page_for, crossing):
    assert page_for(crossing, title=None).title == "Air from the west over a crest at 1850\u00a0m"


def test_page_data_needs_neither_jinja2_nor_contourpy():
    """A page is built and tested without the template engine."""
    code = "import sys, orolift.report.page as p; print(sorted({'jinja2', 'contourpy'} & set(sys.modules)))"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
