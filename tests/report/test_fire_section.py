"""The section on fire weather: a conclusion, thresholds with margins, dryness, the night, cautions."""

import re
from dataclasses import replace
from datetime import UTC, datetime

import numpy as np
import pytest

from orolift.crossing.result import When
from orolift.fire.chances import NEEDED, with_members
from orolift.fire.rules import Condition, Rule, RuleSet
from orolift.fire.sites import FireSettings, fire_at_sites
from orolift.fire.winds import WindMeant
from orolift.report.fire import _DRYNESS, CAUTIONS, fire_weather
from orolift.report.fire_thresholds import headline, likeliest
from orolift.report.page import page_of
from orolift.report.quantities import NO_BREAK_SPACE, Amount, quantity
from orolift.report.render import render
from orolift.report.words import plain

NIGHT = When(1793692800.0, -121.0, -46.9)  # midnight there
WIND = WindMeant(10.0, "sustained", 600.0)


def rules(humidity=0.99, wind=0.5, hours=3):
    """Two rules, one of which asks for a wind."""
    dry = Condition("relative_humidity", at_most=humidity)
    windy = Condition(WIND, at_least=wind)
    both = (Rule("dry <b>", (dry,)), Rule("dry and windy", (dry, windy), hours=hours))
    return RuleSet("Tarn (invented)", "nobody & co", "2026-05-01", both)


@pytest.fixture
def crossing(named):
    """Dry air, one site in the lee and one before the crest."""
    return named("open at night")


def judged(crossing, given, **more):
    """Fire weather of the crossing."""
    return fire_at_sites(crossing, NIGHT, FireSettings(rules=given, **more))


def page(crossing, found, given, units="metric"):
    """The page as HTML."""
    made = datetime(2026, 11, 3, tzinfo=UTC)
    data = page_of(
        crossing, title="t", valid_time=None, made_at=made, version="0", fire=found, rules=given, units=units
    )
    return render(data)


def section(html):
    """That of fire weather."""
    return html[html.index('<section id="fire"') :].split("</section>")[0]


def test_heading_is_what_is_met(crossing):
    """One rule at one site by its name, several by their number, none in words."""
    given = rules()
    found = judged(crossing, given)
    heading = plain(fire_weather(crossing, found, given).heading, "metric")
    assert heading.startswith("Two thresholds are met at two sites; ")
    given = rules(humidity=0.001)
    heading = plain(fire_weather(crossing, judged(crossing, given), given).heading, "metric")
    assert heading.startswith("No threshold is met; Lower Tarn has a humidity of ")
    found = judged(crossing, None)
    heading = plain(fire_weather(crossing, found, None).heading, "metric")
    assert heading.startswith("Lower Tarn has a humidity of ")
    assert headline(found).words == likeliest(found) == ""


def test_the_likeliest_threshold_is_named(crossing):
    """By its chance over the members, whether the answer meets it or not; nothing without members or chances."""
    found = judged(crossing, rules())
    assert likeliest(found) == ""
    first = found[0].thresholds
    chances = [0.2, 0.47] + [0.0] * (len(first) - 2)
    sure = tuple(replace(one, judged=replace(one.judged, chance=c)) for one, c in zip(first, chances, strict=True))
    named = likeliest((replace(found[0], thresholds=sure), *found[1:]))
    assert named == f"“{sure[1].judged.rule.name}” at {found[0].name} in 47 % of the members"
    never = tuple(replace(one, judged=replace(one.judged, chance=0.0)) for one in first)
    assert likeliest((replace(found[0], thresholds=never),)) == ""


def test_numbers_are_those_of_the_computation(crossing):
    """Every number carries its raw value; shown rounded in the units of the page."""
    given = rules()
    found = judged(crossing, given, previous_code=88.0, drought_index=300.0)
    for units in ("metric", "us"):
        text = section(page(crossing, found, given, units)).replace(NO_BREAK_SPACE, " ")
        pairs = re.findall(r'<data value="([^"]+)">([^<]+)</data>', text)
        assert str(float(found[0].indices.vapour_pressure_deficit)) in [value for value, _ in pairs]
        shown = [words.replace(NO_BREAK_SPACE, " ") for value, words in pairs if value == str(WIND_LIMIT)]
        assert quantity(WIND_LIMIT, "wind", 1, units).replace(NO_BREAK_SPACE, " ") in shown


WIND_LIMIT = 0.5


def test_marks_a_threshold_that_is_met_and_no_other(crossing):
    """The danger mark stands for what is met."""
    given = rules()
    found = judged(crossing, given)
    met = [one.judged.status for site in found for one in site.thresholds].count("met")
    assert met > 0
    assert section(page(crossing, found, given)).count('class="danger"') == met
    given = rules(humidity=0.001)
    text = section(page(crossing, judged(crossing, given), given))
    assert 'class="threshold"' in text
    assert "danger" not in text


def test_says_what_one_hour_cannot_say(crossing):
    """Duration, and that a threshold is no warning."""
    given = rules()
    text = section(page(crossing, judged(crossing, given), given))
    assert "met at this hour; 3 h cannot be judged from one hour" in text
    assert "A threshold met is not a warning." in text
    assert "Thresholds of Tarn (invented), set by nobody &amp; co, taken over on 1\u00a0May\u00a02026." in text
    assert "dry &lt;b&gt;" in text


def test_columns_come_with_what_they_need(crossing):
    """Codes with yesterday's code, drought with its index, chances with members."""
    given = rules()
    bare = section(page(crossing, judged(crossing, given), given))
    full = section(page(crossing, judged(crossing, given, previous_code=88.0, drought_index=300.0), given))
    assert 'id="fire-codes"' not in bare
    assert 'id="fire-codes"' in full
    assert "With drought" not in bare
    assert "With drought" in full
    assert "Chance" not in bare


def members(air, count):
    """Members of a site with a spread in temperature and wind, the rest that of the answer."""
    z = np.linspace(-1.0, 1.0, count)
    gust = 0.5 * (air.wind.gust_low + air.wind.gust_high)
    given = (air.pressure, air.temperature, air.mixing_ratio, air.wind.at_10m * (1.0 + 0.3 * z), gust * (1.0 + 0.3 * z))
    found = {name: np.broadcast_to(np.asarray(value), (count,)) for name, value in zip(NEEDED, given, strict=True)}
    return found | {"temperature": air.temperature + 2.0 * z}


def test_every_number_of_the_tables_has_its_range(crossing):
    """With members each cell has a second line, the ends of the range of the site; without, none has."""
    given = rules()
    settings = FireSettings(88.0, 300.0, given)
    alone = fire_at_sites(crossing, NIGHT, settings)
    found = tuple(
        site if air.wind is None else with_members(site, members(air, 11), settings, 0.03, NIGHT)
        for site, air in zip(alone, crossing.lee, strict=True)
    )
    assert any(site.ranges for site in found)
    data = fire_weather(crossing, found, given)
    for row, site in zip(data.rows, found, strict=True):
        for column, name in _DRYNESS.items() if site.ranges else ():
            low, high = (one.value for one in row.spans[column] if isinstance(one, Amount))
            assert (low, high) == site.ranges[name]
            assert low <= getattr(row, column).value <= high
    for row, site in zip(data.codes, found, strict=True):
        if not site.ranges:
            continue
        assert {name for name, words in row.spans.items() if words} >= {"day", "spread", "hour_3", "hour_12"}
        assert row.spans["hour_12"][0].value == site.ranges["fine_fuel_code_after_12_h"][0]
    for row, site in zip(data.nights, found, strict=True):
        assert bool(row.spans.get("windy")) is bool(row.spans.get("still")) is bool(site.ranges)
    html = section(page(crossing, found, given))
    assert html.count('class="span"') > 15
    assert "The second line of a cell is the range" in html
    bare = section(page(crossing, alone, given))
    assert 'class="span"' not in bare
    assert "second line" not in bare
    heading = plain(data.heading, "metric")
    driest = next(site for site in found if site.ranges)
    low, high = driest.ranges["relative_humidity"]
    assert f" % ({100.0 * low:.0f} to {100.0 * high:.0f})".replace(" ", NO_BREAK_SPACE, 1) in heading


def test_cautions_of_fire_stand_there(crossing):
    """All of them, whatever the case; the section is left out without fire weather."""
    found = judged(crossing, None)
    text = section(page(crossing, found, None))
    assert all(caution in text for caution in CAUTIONS)
    assert '<section id="fire"' not in page(crossing, (), None)


def test_every_crossing_has_its_fire_weather(any_crossing):
    """Pools, cloud, snow, sites on the crest: a row for each site, nothing that is no number, one conclusion."""
    given = rules()
    found = judged(any_crossing, given, previous_code=85.0)
    data = fire_weather(any_crossing, found, given)
    assert len(data.rows) == len(data.nights) == len(any_crossing.lee)
    amounts = [value for row in (*data.rows, *data.nights, *data.codes) for value in vars(row).values()]
    assert all(np.isfinite(one.value) for one in amounts if isinstance(one, Amount))
    for one, air in zip(found, any_crossing.lee, strict=True):
        windy = one.thresholds[1].judged
        assert (windy.status == "cannot be judged") <= (air.wind is None)
        assert 0.0 <= one.night.floor_windy <= one.night.floor_still + 1e-12 <= 1.0 + 1e-9
    assert len(plain(data.heading, "metric")) < 120
