"""The page of every wind direction with members: ranges drawn and written, how many members agree."""

import math
import re
from dataclasses import replace
from datetime import UTC, datetime

import numpy as np
import pytest

from orolift.report.bearings_page import bearings_page
from orolift.report.bearings_sure import agreement_words, members_line, though_words
from orolift.report.figures.roses import roses_figure
from orolift.report.render import render
from orolift.report.words import plain
from orolift.spread.bearings import Direction, bearings_of
from orolift.spread.site_state import KEPT, SiteMembers, SiteState
from orolift.spread.spread import Drawn
from orolift.spread.uncertainty import Uncertainty

ELEVEN = np.arange(11.0)
NAMES = (*KEPT, "drying_power")


def direction(warming, humidity, *, crosses=1.0, oblique=0.0):
    """Eleven members from 5 below to 5 above the answer, so that its range is 4 either way; humidity 1 % each."""
    arrays = dict.fromkeys(NAMES, np.zeros(11)) | {
        "warming": warming - 5.0 + ELEVEN,
        "relative_humidity": humidity + 0.01 * (ELEVEN - 5.0),
        "wind_10m": 5.0 + ELEVEN,
        "drying_power": 100.0 * (warming + ELEVEN),
        "rain": np.where(ELEVEN > 7.5, 3.0 / 3600.0, 0.0),
    }
    happens = np.where(11.0 * crosses - 0.5 > ELEVEN, 1.0, 0.0)
    return SiteState(
        "crossing",
        side="lee",
        warming=warming,
        relative_humidity=humidity,
        wind_10m=10.0,
        drying_power=100.0 * (warming + 5.0),
        rain=0.0,
        oblique=oblique,
        shelter_height=1000.0,
        shelter_distance=9000.0,
        members=SiteMembers(arrays, arrays, happens),
    )


@pytest.fixture(scope="module")
def four():
    """From north cool, from east warmest, from south in some members only, from west more along than across."""
    states = [direction(-6.0, 0.8), direction(8.0, 0.3), direction(2.0, 0.5, crosses=0.64)]
    states.append(direction(9.0, 0.2, oblique=math.radians(60.0)))
    found = [Direction(0.5 * math.pi * i, (state,)) for i, state in enumerate(states)]
    return bearings_of(found, ["Tarn"], step=0.5 * math.pi, given=0.0, planned=4)


@pytest.fixture(scope="module")
def page(four):
    return page_of(four)


def page_of(four):
    made = datetime(2026, 1, 1, tzinfo=UTC)
    return bearings_page(four, title="T", made_at=made, version="0", notes=(), drawn=Drawn(Uncertainty(), 11, 1))


def read(words):
    return plain(words, "metric").replace("\u00a0", " ")


def test_lines_along_the_bars_reach_from_10_to_90_percent(four):
    """Warming 8 (4 to 12) from east and -6 (-10 to -2) from north, on a rim of 12 or more; the oblique bar has none."""
    figure = roses_figure(four, 0, "metric")
    assert "Warming: most +8.0 °C (+4.0 to +12.0) with wind from 90°." in figure.alt.replace("\u00a0", " ")
    assert "Rain and snow: most 0.0 mm/h (0.0 to 3.0) with wind from 0°." in figure.alt.replace("\u00a0", " ")
    drawing = figure.drawing
    lines = drawing.roses[0].ranges
    assert len(lines) == 3
    (x0, y0, x1, y1), (east0, _, east1, _) = (
        [float(number) for number in re.findall(r"-?[\d.]+", line.path)] for line in lines[:2]
    )
    assert x0 == x1  # straight to the north
    ring = [float(number) for number in re.findall(r"-?[\d.]+", drawing.roses[0].rings[1].path)]
    middle, radius = ring[0] + ring[2], ring[2]
    rim = float(re.search(r"rim ([\d.]+)", drawing.roses[0].labels[-1].text).group(1))
    assert rim >= 12.0
    assert (east0 - middle, east1 - middle) == pytest.approx((4.0 * radius / rim, 12.0 * radius / rim), abs=0.11)
    assert y0 - y1 == pytest.approx(8.0 * radius / rim, abs=0.11)
    assert "most +8.0" in drawing.roses[0].labels[-2].text


def test_sentences_carry_ranges_and_agreement(page, four):
    """Members differ by the same in all directions: every one of them is warmest, driest and worst from east."""
    site = page.sites[0]
    assert (
        read(site.heading)
        == "Tarn warms most with wind from 90°: by 8.0 °C (4.0 to 12.0), 9 km behind ground of 1000 m"
    )
    said = [read(words) for words in site.sentences]
    assert (
        said[0]
        == "Worst for fire at Tarn is wind from 90°: humidity 30 % (26 to 34), wind 10 m/s (6 to 14), 19 kt at 10 m."
    )
    assert (
        said[2] == "How sure: the worst direction for fire is that named in 100 % of the members, the warmest in 100 %."
    )
    assert said[3] == "From 1 of 4 directions air crosses in some members only."
    line = read(members_line(four.sites[0], four, 11))
    assert line == "11 members: warmer by 8.0 °C (4.0 to 12.0); worst for fire as named in 100 %, warmest in 100 %"


def test_ground_of_its_own_shelters_nothing(four):
    """The highest ground before a site that lies highest itself is no kilometre away."""
    site = four.sites[0]
    bare = replace(four, sites=(replace(site, states=tuple(replace(s, shelter_distance=200.0) for s in site.states)),))
    assert read(page_of(bare).sites[0].heading).endswith("by 8.0 °C (4.0 to 12.0), with no higher ground before it")


def test_table_has_ranges_beneath_and_chances(page):
    """Rain in 3 of 11 members; 7 of 11 cross from south; all have their worst direction in the east, none obliquely."""
    row = page.sites[0].rows[1]
    assert read(row.spans["warming"]) == "+4.0 to +12.0"
    assert read(row.spans["relative_humidity"]) == "26 to 34"
    assert row.wet.value == pytest.approx(3 / 11)
    assert [one.crosses.value for one in page.sites[0].rows] == pytest.approx([1.0, 1.0, 7 / 11, 1.0])
    text = render(page, "bearings.html.jinja")
    assert text.count('class="range-line"') == 2 * 3 * 3  # wide and narrow, three roses, three directions
    assert [one.worst and one.worst.value for one in page.sites[0].rows] == [0.0, 1.0, 0.0, None]
    assert ">Worst<br>" in text
    assert "Each crossing is worked out once" not in text


def test_another_direction_that_is_worst_in_many_members_is_named(four):
    """Two tenths have it in the south; a twentieth is too few to be named."""
    (tarn,) = four.sites
    split = replace(tarn, worst=np.array([0.1, 0.7, 0.2, np.nan]))
    assert read(agreement_words(split, four)).endswith("100 %. In 20 % the worst for fire is 180°.")
    assert "In " not in read(agreement_words(replace(tarn, worst=np.array([0.05, 0.9, 0.05, np.nan])), four))
    assert "In " not in read(agreement_words(replace(split, fire=None), four))


def test_the_heading_says_where_more_members_have_another_direction(four):
    """Named by 0.3 of the members: 0.7 in the south are most, 0.4 more; half agreeing, or a smaller rest, says nothing."""
    (tarn,) = four.sites
    assert tarn.agreement is not None

    def though(agree, worst):
        site = replace(tarn, agreement=replace(tarn.agreement, fire=agree), worst=np.array([*worst, np.nan]))
        page = bearings_page(
            replace(four, sites=(site,)), title="T", made_at=datetime(2026, 1, 1, tzinfo=UTC), version="0", notes=()
        )
        assert plain(though_words(site, four), "metric") in plain(page.heading, "metric")
        return read(page.heading).removeprefix("Worst for fire at Tarn is wind from 90°").partition(": ")[0]

    assert though(0.3, [0.0, 0.3, 0.7]) == ", though in most members from 180°"
    assert though(0.3, [0.3, 0.3, 0.4]) == ", though in more members from 180°"
    assert though(0.5, [0.0, 0.5, 0.5]) == ""
    assert though(0.4, [0.3, 0.4, 0.3]) == ""


def test_directions_beside_one_another_count_together():
    """With steps of 20 degrees 0.3 and 0.25 side by side are more than the 0.45 of the one named, and most."""
    states = [direction(w, 0.3) for w in (8.0, 7.0, 6.0, 5.0)]
    found = [Direction(math.radians(20.0 * i), (state,)) for i, state in enumerate(states)]
    bearings = bearings_of(found, ["Tarn"], step=math.radians(20.0), given=0.0, planned=4)
    (tarn,) = bearings.sites
    assert tarn.agreement is not None
    site = replace(tarn, agreement=replace(tarn.agreement, fire=0.45), worst=np.array([0.45, 0.0, 0.25, 0.3]))
    assert read(though_words(site, bearings)) == ", though in most members from about 60°"
    assert read(agreement_words(site, bearings)).endswith("In 55 % the worst for fire is within 20° of 60°.")
