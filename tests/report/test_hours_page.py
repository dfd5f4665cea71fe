"""Pages of many crossings: times as people read them, and axes of time from hours to decades."""

import re
from datetime import UTC, datetime, timedelta, timezone
from itertools import pairwise
from types import SimpleNamespace

import numpy as np
import pytest

from orolift.fire.rules import Condition, Rule, RuleSet
from orolift.fire.sites import FireSettings
from orolift.report.figures.axes import Scale
from orolift.report.figures.placing import text_width
from orolift.report.figures.time_axis import time_ticks
from orolift.report.figures.timeline_panels import _holding
from orolift.report.hours_page import hours_page
from orolift.report.hours_words import heading
from orolift.report.words import plain
from orolift.spread.hour_members import RANGED, HourMembers
from orolift.spread.hours import Hour
from orolift.spread.site_state import SiteState, Travel
from orolift.spread.timeline import hours_of

HOUR = 3600.0
START = datetime(2026, 11, 3, 5, 30, tzinfo=UTC).timestamp()


@pytest.mark.parametrize("hours", [3, 12, 36, 100, 400, 3000, 8760, 100_000, 350_000])
@pytest.mark.parametrize("width", [300.0, 880.0])
def test_marks_of_time_are_round_and_apart(hours, width):
    """Whole hours, days or months of the zone, whose words do not touch, and not fewer than two of them."""
    zone = timezone(timedelta(hours=-7))
    scale = Scale(START, START + hours * HOUR, 40.0, 40.0 + width)
    marks = time_ticks(scale, zone, 12.5)
    assert len(marks) >= 2
    assert all(scale.start <= mark.at <= scale.end for mark in marks)
    for texts in ([(mark.at, mark.text) for mark in marks], [(mark.at, mark.day) for mark in marks if mark.day]):
        ends = [(at - 0.5 * text_width(text, 12.5), at + 0.5 * text_width(text, 12.5)) for at, text in texts]
        assert all(one[1] < other[0] for one, other in pairwise(ends))


def test_hours_of_a_mark_are_those_of_the_zone():
    """05:30 UTC is 22:30 the day before, seven hours west; the first whole hour after it is 23."""
    marks = time_ticks(Scale(START, START + 4 * HOUR, 0.0, 400.0), timezone(timedelta(hours=-7)), 12.5)
    assert [mark.text for mark in marks] == ["23", "00", "01", "02"]
    assert [mark.day for mark in marks] == ["2 Nov", "3 Nov", "", ""]
    assert marks[0].at == 50.0


def page(count, **more):
    """A page of hours of which every tenth does not cross and every eleventh is missing."""
    hours = []
    for number in range(count):
        state = SiteState(
            "crossing",
            side="lee",
            descending=number % 40 > 20,
            travel=Travel(HOUR, 60.0),
            temperature=288.0 + number % 7,
            dew_point=280.0,
            relative_humidity=0.4,
            wind_10m=5.0,
            gust=8.0,
            warming=3.0,
            rain=0.0,
        )
        state = SiteState("no crossing", "calm") if number % 10 == 9 else state
        state = SiteState("missing", "no row") if number % 11 == 10 else state
        hours.append(Hour(number, START + number * HOUR, (state,)))
    found = hours_of(hours, ["Tarn"], HOUR, planned=count)
    return hours_page(
        found, title="T", zone=UTC, made_at=datetime(2026, 1, 1, tzinfo=UTC), version="0", notes=(), **more
    )


def test_gaps_stay_gaps_in_the_figure():
    """No line bridges an hour without air: of 30 hours in pieces, each panel has as many lines as there are pieces."""
    drawing = page(30).sites[0].figure.drawing
    absent = [number % 10 == 9 or number % 11 == 10 for number in range(30)]
    pieces = sum(not here and (number == 0 or absent[number - 1]) for number, here in enumerate(absent))
    assert len([curve for curve in drawing.panels[1].curves if "dew" in curve.kind]) == pieces
    blanks = [curve.kind for curve in drawing.blanks]
    assert blanks.count("unknown") + blanks.count("no-crossing") == sum(absent)


def test_the_strip_is_the_stated_spell_without_its_gaps():
    """Half past the hour before the first to half past the last by hand, and nothing bold where nothing is known."""
    rows = [False, True, True, None, True, False]
    hours = [
        Hour(
            i,
            START + i * HOUR,
            (
                SiteState("missing", "no row")
                if dry is None
                else SiteState("crossing", side="lee", descending=dry, travel=Travel(HOUR, 0.0), temperature=288.0),
            ),
        )
        for i, dry in enumerate(rows)
    ]
    found = hours_of(hours, ["Tarn"], HOUR, planned=6)
    made = hours_page(found, title="T", zone=UTC, made_at=datetime(2026, 1, 1, tzinfo=UTC), version="0", notes=())
    drawing = made.sites[0].figure.drawing
    bold = [re.findall(r"[MH]([\d.]+)", curve.path) for curve in drawing.states if curve.kind == "dry-wind"]
    (a, b), (c, d) = [[float(end) for end in ends] for ends in bold]
    hour = (drawing.layout.right - drawing.layout.left) / 6.0  # hours arrive at 6:30 to 11:30, half an hour either side
    assert "from 3 November 2026, 07:00" in "".join(map(str, made.sites[0].heading))
    ends = np.array([a, b, c, d]) - drawing.layout.left
    assert ends / hour == pytest.approx([1.0, 3.0, 4.0, 5.0], abs=0.01)


def test_a_long_series_keeps_the_page_small():
    """Three months of hours: lines are thinned, the table ends, and what is left out is said."""
    found = page(2000)
    site = found.sites[0]
    assert len(site.rows) == 400
    assert site.left_out == 2000 - 400
    assert np.isfinite(site.figure.drawing.layout.height)


def test_units_of_the_page_change_words_not_numbers():
    """US pages show degrees Fahrenheit of the same value."""
    metric, us = page(5), page(5, units="us")
    assert metric.sites[0].rows[0].temperature == us.sites[0].rows[0].temperature
    first = [panel.labels[0].text for panel in us.sites[0].figure.drawing.panels]
    assert "Temperature and dew point, °F" in first


def test_thresholds_met_are_marked_and_said():
    """A rule met in some hours has a row in the figure, a sentence at the head and at its site; one not met has none."""
    rules = (
        Rule("dry", (Condition("relative_humidity", at_most=0.3),)),
        Rule("never", (Condition("relative_humidity", at_most=0.01),)),
    )
    states = [
        SiteState(
            "crossing",
            travel=Travel(HOUR, 0.0),
            temperature=290.0,
            relative_humidity=u,
            rule_values={"relative_humidity": u},
        )
        for u in (0.5, 0.2, 0.2, 0.5)
    ]
    hours = [Hour(i, START + i * HOUR, (state,)) for i, state in enumerate(states)]
    fire = FireSettings(rules=RuleSet("Tarn", "none", "2026-05-01", rules))
    found = hours_of(hours, ["Tarn"], HOUR, planned=4, fire=fire)
    made = hours_page(found, title="T", zone=UTC, made_at=datetime(2026, 1, 1, tzinfo=UTC), version="0", notes=())
    assert len(made.dangers) == len(made.sites[0].dangers) == 1
    assert "Threshold met at Tarn: dry" in made.dangers[0][0]
    drawing = made.sites[0].figure.drawing
    assert [curve.kind for curve in drawing.states].count("met") == 1
    assert {"threshold met: dry", "threshold not met: never"} <= {label.text for label in drawing.labels}


def with_members(dry, rain=0.0):
    """A page of four hours, of whose 20 members so many are dry in each; the answer is so in the two in the middle."""
    number, hours = np.arange(20), []
    for i, count in enumerate(dry):
        state = SiteState(
            "crossing",
            side="lee",
            descending=i in {1, 2},
            travel=Travel(HOUR, 0.0),
            temperature=290.15,
            relative_humidity=0.4,
            rain=rain,
        )
        values = np.broadcast_arrays(290.15, 0.4, np.nan, rain * (1.0 + 0.05 * number), HOUR, number)[:-1]
        ends = np.full((2, len(RANGED), 2), np.nan)
        ends[:, RANGED.index("temperature")] = 288.15, 293.15
        ends[:, RANGED.index("wind_10m")] = 4.0, 8.0  # of members out of the pool that the answer lies in
        one = HourMembers(np.ones(20, np.int8), ends, 1.0, 0.0, number < count, np.array(values, np.float32))
        hours.append(Hour(i, START + i * HOUR, (state,), members=(one,)))
    found = hours_of(hours, ["Tarn"], HOUR, planned=len(hours))
    return hours_page(found, title="T", zone=UTC, made_at=datetime(2026, 1, 1, tzinfo=UTC), version="0", notes=())


def read(sentences):
    """Sentences as read, without the spaces that do not break."""
    return " ".join(plain(words, "metric") for words in sentences).replace("\u00a0", " ")


def test_the_site_says_what_its_members_say():
    """Half past the hour before and after by hand: ten begin an hour before the other ten; two of 20 never do."""
    site = with_members([9, 18, 18, 0]).sites[0]
    said = read(site.sentences)
    assert "Descending warm dry air comes in 90 % of 20 members, most likely at 3 November 2026, 07:30 (90 %)" in said
    assert "in all it lasts 2 h" in said
    assert "This stretch is there in 90 % of the members" in said
    said = read([site.heading])
    assert "(before 3 Nov 07:00)" in said  # those that begin with the first hour may have begun before it
    assert "to 3 November 2026, 09:00 (3 Nov 09:00)" in said  # all end alike


def test_the_head_says_how_likely_the_longest_stretch_is():
    """Six of twenty members share it: the answer is not what most of them say."""
    assert read(with_members([0, 6, 6, 0]).lead).split(". ")[0].rstrip(".").endswith("; in 30 % of the members")


def test_rows_have_their_ranges_below():
    row = with_members([0, 20, 20, 0]).sites[0].rows[1]
    assert [part if isinstance(part, str) else part.value for part in row.spans["temperature"]] == [
        288.15,
        " to ",
        293.15,
    ]
    assert row.chance.value == 1.0
    assert "dew_point" not in row.spans
    assert page(5).sites[0].rows[0].spans == {}


def test_rain_of_the_hours_has_the_range_of_the_members():
    """Four hours of 1 mm, and of 1 mm times 1 to 1.95 in the members: 4.4 to 7.4 mm."""
    assert "4.0 mm (4.0 to 7.4) of rain and snow" in read(with_members([0, 0, 0, 0], 1.0 / HOUR).sites[0].sentences)


def test_bands_lie_around_their_line_and_only_there():
    """One band of the temperature, none of the wind, which has no answer; and none of them without members."""
    panels = with_members([0, 20, 20, 0]).sites[0].figure.drawing.panels
    assert not any("between" in curve.kind for curve in panels[3].curves)
    panel = panels[1]
    bands = [curve for curve in panel.curves if "warm-between" in curve.kind]
    line = next(curve for curve in panel.curves if curve.kind == "warm")
    heights = [[float(y) for y in re.findall(r"[ML][\d.]+[ ,]([\d.]+)", curve.path)] for curve in (bands[0], line)]
    assert len(bands) == 1
    assert min(heights[0]) < min(heights[1]) <= max(heights[1]) < max(heights[0])
    assert not any("between" in c.kind for panel in page(5).sites[0].figure.drawing.panels for c in panel.curves)


def test_a_range_is_widened_to_the_answer_as_in_words():
    """Of the members 289 to 292 K: the answer above it is its upper end, and where there is no answer there is none."""
    held = _holding(np.array([290.0, 295.0, np.nan]), np.array([[289.0, 292.0]] * 3))
    np.testing.assert_array_equal(held, [[289.0, 292.0], [289.0, 295.0], [np.nan, np.nan]])


def test_pages_with_members_say_what_ranges_hold():
    made, bare = with_members([0, 20, 20, 0]), page(5)
    assert len(made.how) > len(bare.how)
    assert "worked out once" in read(bare.cautions)
    assert "worked out once" not in read(made.cautions)


def test_a_threshold_that_most_members_meet_is_named_at_the_head():
    """The answer misses it; 12 of 20 members meet it, then 8: half of them is where it is named, and no warning."""
    rule = Rule("dry", (Condition("relative_humidity", at_most=0.3),))
    fire = FireSettings(rules=RuleSet("Tarn", "none", "2026-05-01", (rule,)))
    state = SiteState("crossing", travel=Travel(HOUR, 0.0), temperature=290.0, rule_values={"relative_humidity": 0.35})
    for count, named in ((12, True), (8, False)):
        met = np.where(np.arange(20) < count, 1, -1)[np.newaxis].astype(np.int8)
        nothing = np.zeros(20, np.bool_)
        one = HourMembers(np.ones(20, np.int8), None, 1.0, 0.0, nothing, np.full((5, 20), np.nan, np.float32), met)
        found = hours_of([Hour(0, START, (state,), members=(one,))], ["Tarn"], HOUR, planned=1, fire=fire)
        made = hours_page(found, title="T", zone=UTC, made_at=datetime(2026, 1, 1, tzinfo=UTC), version="0", notes=())
        assert ("Threshold not met at Tarn: dry, but in 60 % of the members." in read(made.lead)) is named
        assert made.dangers == ()


@pytest.mark.parametrize(
    ("rain", "ends", "said"),
    [
        (12.0, (4.0, 21.0), "and 12 mm (4 to 21) of rain"),
        (12.0, None, "and 12 mm of rain"),
        (0.2, (0.0, 3.0), "and hardly any rain"),
        (0.2, (0.0, 0.3), "and no rain"),
        (0.2, None, "and no rain"),
    ],
)
def test_rain_in_the_heading_has_its_range(rain, ends, said):
    """And none is said only where the members have none to speak of."""
    ranges = None if ends is None else SimpleNamespace(total_rain=ends)
    hours = SimpleNamespace(sites=(SimpleNamespace(dry_winds=(), rain=rain, ranges=ranges),))
    assert read([heading(hours)]).strip() == f"No descending warm dry air, {said}"
