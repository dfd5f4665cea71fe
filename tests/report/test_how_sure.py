"""How sure: ranges as fine as they are wide, what they hold, chances, what matters most."""

import re
from dataclasses import replace

import numpy as np
import pytest

from orolift.report.briefing import briefing
from orolift.report.figures.influences import influences_figure
from orolift.report.figures.section import WIDE, section
from orolift.report.how_sure import WITH_METHOD, how_sure, input_words
from orolift.report.index import entry_of
from orolift.report.places import section_heading
from orolift.report.quantities import Amount
from orolift.report.sites import sites
from orolift.report.spans import Spans, changed, ranged
from orolift.report.story import first_sites
from orolift.report.trace import trace
from orolift.report.words import plain
from orolift.spread.ranges import range_of
from orolift.spread.spread import Failed


def text(words, units="metric"):
    return plain(words, units).replace("\u00a0", " ")


RANGES = [
    (Amount(290.45, "temperature", 1), (289.25, 291.75), "17.3 °C (16.1 to 18.6)"),
    (Amount(290.45, "temperature", 1), (282.0, 298.0), "17 °C (9 to 25)"),
    (Amount(290.45, "temperature", 1), (290.44, 290.46), "17.3 °C"),
    (Amount(912.0, "height", 0), (640.0, 1080.0), "910 m (640 to 1080)"),
    (Amount(912.0, "height", -1), (240.0, 2080.0), "900 m (200 to 2100)"),
    (Amount(0.31, "share"), (0.04, 0.36), "31 % (4 to 36)"),
    (Amount(0.55, "plain", 2), (0.5, 0.61), "0.55 (0.50 to 0.61)"),
    (Amount(10.0, "wind"), (7.6, 14.4), "10 m/s (8 to 14), 19 kt"),
    (Amount(10.0, "wind"), None, "10 m/s (19 kt)"),
]


@pytest.mark.parametrize(("amount", "ends", "expected"), RANGES, ids=[row[2] for row in RANGES])
def test_a_range_has_at_least_ten_steps(amount, ends, expected):
    """As fine as the range allows, and no finer than the number is known; one number where its ends read alike."""
    assert text(ranged(amount, ends)) == expected


def test_briefing_carries_the_range_of_every_key_number(with_members):
    """The same ends as the members have, for the numbers that have members."""
    crossing, spread = with_members
    spans = Spans(crossing, spread)
    found = briefing(crossing, 4.7, 2000.0, spans)
    numbers = {number.name: number for number in found.key_numbers}
    site = crossing.lee[0]
    assert site.name == "Lower Tarn"
    low, high = range_of(spread.full_sites["temperature"][:, 0])
    ends = [part.value for part in numbers["Lower Tarn, temperature"].span if isinstance(part, Amount)]
    assert ends == [low, high]
    for name in ("Lower Tarn, humidity", "Lower Tarn, wind", "Cloud base", "Falls out", "Wind across the crest"):
        assert any(isinstance(part, Amount) for part in numbers[name].span), name
    assert f"({low - 273.15:.1f} to {high - 273.15:.1f})" in text(found.sentences[1])


def test_a_site_has_its_own_range_where_only_some_are_shown(named, with_members):
    """Of two dozen sites a dozen are taken one by one; each keeps its column of the members."""
    crossing, spread = named("many sites"), with_members[1]
    own = np.tile(np.arange(float(len(crossing.lee))), (12, 1))
    spans = Spans(first_sites(crossing), replace(spread, full_sites={"temperature": own}), crossing)
    assert 0 < len(spans.crossing.lee) < len(crossing.lee)
    for site in spans.crossing.lee:
        assert spans.at(site, "temperature") == (site.number - 1.0, site.number - 1.0)


def test_differences_count_in_their_own_direction():
    """Cooler by 2: between 3 cooler and half a degree warmer; about nothing keeps its signs."""
    assert text(changed(-2.0, (-3.0, 0.5), "warmer", "cooler", "as warm")) == "2.0 °C (−0.5 to 3.0) cooler"
    assert text(changed(1.0, (-0.5, 2.0), "warmer", "cooler", "as warm"), "us") == "1.8 °F (−0.9 to 3.6) warmer"
    assert text(changed(0.01, (-1.0, 1.5), "warmer", "cooler", "as warm")) == "as warm (−1.0 to +1.5 °C)"
    assert text(changed(0.01, None, "warmer", "cooler", "as warm")) == "as warm"


def test_cloud_depths_are_counted_from_the_crest(with_members):
    """The heading of the section: where a member's cloud starts above the crest, none of the slope is covered."""
    crossing, spread = with_members
    crest = crossing.features.crest
    assert crossing.cloud.base < crest
    base = np.linspace(crossing.cloud.base, crest + 500.0, spread.members)
    spread = replace(spread, full_values=spread.full_values | {"cloud_base": base})
    heading = section_heading(Spans(crossing, spread), trace(crossing))
    high = crest - np.quantile(base, 0.1)
    amounts = [part.value for part in heading if isinstance(part, Amount)]
    assert amounts[:2] == [crest - crossing.cloud.base, 0.0]
    assert amounts[2] == pytest.approx(max(high, crest - crossing.cloud.base))


def test_says_what_the_ranges_hold(with_members):
    """How many members, both ranges of the main site, every input that was drawn."""
    crossing, spread = with_members
    found = how_sure(Spans(crossing, spread))
    assert text(found.heading).startswith("Lower Tarn has ")
    assert "12 crossings" in text(found.remarks[0])
    assert text(found.remarks[-1]) == "All 12 members cross the range (seed 1)."
    assert len(found.rows) == len(crossing.lee)
    row = found.rows[0]
    for name in WITH_METHOD:
        inner, outer = (
            [part.value for part in words if isinstance(part, Amount)]
            for words in (row.spans[name], getattr(row, name))
        )
        assert inner == list(range_of(spread.sites[name][:, 0])), name
        assert outer == list(range_of(spread.full_sites[name][:, 0])), name
        if name in ("temperature", "warming"):
            assert outer[0] < inner[0] < inner[1] < outer[1], name
    assert len(found.inputs) == len(spread.varied)
    assert "liquid_cloud" not in spread.varied
    assert text(found.chances[0].event) == "the air crosses the range at all"
    assert found.chances[0].chance.value == 1.0


def test_what_matters_most_comes_first(with_members):
    """Panels in the order of their correlations; names of the method and of inputs in words; the figure says the same."""
    crossing, spread = with_members
    found = how_sure(Spans(crossing, spread))
    for panel in found.panels:
        sizes = [abs(one.correlation) for one in panel.influences]
        assert sizes == sorted(sizes, reverse=True)
    assert found.panels[0].title == "Temperature at Lower Tarn"
    assert "the method itself" in [input_words(one.name) for one in found.panels[0].influences]
    figure = influences_figure(found)
    strongest = found.panels[0].influences[0]
    assert (
        f"{input_words(strongest.name)} {'+' if strongest.correlation > 0 else '−'}{abs(strongest.correlation):.2f}"
        in figure.alt
    )
    for drawing in (figure.drawing, figure.narrow):
        assert len(drawing.bars) == sum(len(panel.influences) for panel in found.panels)
        assert all(0.0 <= label.x <= drawing.layout.width for label in drawing.labels)


def test_members_that_do_not_count_are_said(with_members):
    """No crossing, and lost ones."""
    crossing, spread = with_members
    crosses = spread.crosses.copy()
    crosses[:3] = False
    lost = replace(spread, crosses=crosses, failed=(Failed(0, "temperature: too cold."),))
    words = text(how_sure(Spans(crossing, lost)).remarks[-1])
    assert words.startswith("In 2 of 12 members the wind across the crest is 2 m/s or less")
    assert "1 could not be worked out (temperature: too cold)" in words
    none = replace(spread, crosses=np.zeros(12, dtype=bool), sites={}, full_sites={})
    assert text(how_sure(Spans(crossing, none)).heading) == "No member crosses: there is no range"


def test_without_members_it_says_so(with_members):
    """No figure, no table."""
    crossing, _ = with_members
    found = how_sure(Spans(crossing, None))
    assert "switches the members off" in text(found.heading)
    assert influences_figure(found) is None
    assert found.rows == found.chances == ()


def test_a_limit_of_rain_is_not_nothing_in_us_units(with_members):
    """0.1 mm/h is 0.0039 in/h (NIST SP 811: an inch is 25.4 mm), and does not read as none."""
    found = how_sure(Spans(*with_members))
    (said,) = (text(row.event, "us") for row in found.chances if "rain or snow at" in text(row.event))
    assert "0.004 in/h or more" in said


def test_cautions_say_which_ranges_the_page_has(with_members, page_for):
    """With members the ends of blocking are no range of the page, and input is not left out."""
    crossing, spread = with_members
    said = " ".join(text(words) for words in page_for(crossing, spread=spread, fresh=True).cautions.always)
    assert "middle eight tenths of the members" in said
    assert "full blocking" not in said
    assert "no members" not in said
    said = " ".join(text(words) for words in page_for(crossing, fresh=True).cautions.always)
    assert "from no blocking to full blocking" in said
    assert "the case has no members" in said


def test_cards_and_index_have_the_ranges_of_the_page(with_members):
    """One number, one range, wherever it stands: wind and gusts of a site card, temperature and gusts of the index."""
    crossing, spread = with_members
    spans = Spans(crossing, spread)
    numbers = {one.name: one for one in briefing(crossing, 4.7, 2000.0, spans).key_numbers}
    card = dict(sites(crossing, spans).panels[0].facts)
    wind = numbers["Lower Tarn, wind"]
    assert text(card["Wind"]) == text((wind.amount, *wind.span, " ", *wind.remark)).replace("; gusts", ", gusts")
    entry = entry_of(crossing, title="Case", valid_time=None, report="a.html", files={}, spread=spread)
    warm = numbers["Lower Tarn, temperature"]
    assert text(entry.temperature) == text((warm.amount, *warm.span))
    assert text(entry.gusts) in text(wind.remark)


def test_the_bar_on_blocked_air_is_the_range_of_the_members(named):
    """Its ends stand at the heights that are given, else at those of the thresholds; the caption says which."""
    crossing = named("blocked")
    flow = crossing.flow
    for given, said in (
        (None, "thresholds of N h/U from 3 to 0.75"),
        ((flow.blocked_top - 50.0, flow.blocked_top + 100.0), "10 to 90 % of the members"),
    ):
        drawn = section(crossing, trace(crossing), 4.7, 2000.0, "metric", given)
        low, high = given or (flow.blocked_top_low, flow.blocked_top_high)
        (bar,) = (curve.path for curve in drawn.drawing.leaders if curve.kind == "reach")
        ends = [float(y) for y in re.match(r"M[\d.]+ ([\d.]+)V([\d.]+)M", bar).groups()]
        scale = drawn.drawing.ruler.high - drawn.drawing.ruler.low
        per_metre = (WIDE.bottom - WIDE.top) / scale
        assert ends[0] - ends[1] == pytest.approx(per_metre * (high - low), abs=0.3)
        assert said in drawn.caption
