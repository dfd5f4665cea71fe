"""The index of hours and of directions: key numbers worked out by hand, whatever is not there said as such."""

import math
from datetime import UTC, datetime

from orolift.fire.rules import Condition, Rule, RuleSet
from orolift.fire.sites import FireSettings
from orolift.report.bearings_page import bearings_page
from orolift.report.hours_page import hours_page
from orolift.report.render import render
from orolift.report.site_index import bearings_index, hours_index
from orolift.report.words import plain
from orolift.spread.bearings import Direction, bearings_of
from orolift.spread.hours import Hour
from orolift.spread.site_state import SiteState, Travel
from orolift.spread.timeline import hours_of

HOUR = 3600.0
START = datetime(2026, 11, 3, 5, 30, tzinfo=UTC).timestamp()
MADE = datetime(2026, 1, 1, tzinfo=UTC)


def said(row):
    """The cells of a row as read, without the spaces that do not break."""
    return [plain(words, "metric").replace("\u00a0", " ") for words in row.cells]


def test_onset_and_end_are_those_of_the_longest_spell():
    """Air an hour on its way: half past the hour before and after the dry ones, ± half an hour; no air in one hour."""

    def crossing(dry):
        return SiteState(
            "crossing",
            side="lee",
            descending=dry,
            travel=Travel(HOUR, 0.0),
            temperature=288.0,
            relative_humidity=0.2 if dry else 0.6,
            rule_values={"relative_humidity": 0.2 if dry else 0.6},
        )

    calm = SiteState("no crossing", "calm")
    dry = [crossing(one) for one in (False, True, True, False, True, False)]
    sites = zip([*dry, calm], [calm] * 7, strict=True)
    found = hours_of(
        [Hour(i, START + i * HOUR, states) for i, states in enumerate(sites)],
        ["Tarn", "Flats"],
        HOUR,
        planned=8,
        fire=FireSettings(
            rules=RuleSet(
                "Tarn", "none", "2026-05-01", (Rule("Dry grass", (Condition("relative_humidity", at_most=0.3),)),)
            )
        ),
        wind_error=0.0,
    )
    page = hours_page(found, title="T", zone=UTC, made_at=MADE, version="0", notes=())
    index = hours_index(found, page, UTC, report="a b.html", files={"table": "a b.csv"})
    tarn, flats = index.rows
    assert said(tarn) == [
        "6 of 7",
        "two times",
        "3 November 2026, 07:00 (± 0.5 h)",
        "3 November 2026, 09:00 (± 0.5 h)",
        "Dry grass",
    ]
    assert said(flats) == ["0 of 7", "none", "", "", "none"]
    text = render(index, "site_index.html.jinja")
    assert 'href="a%20b.html#site-2"' in text
    assert "The work was interrupted" in text
    assert 'class="danger"' in text


def test_directions_named_are_the_best_and_the_worst():
    """East is warmest, south the driest and windiest, west the wettest; a site without air has none of them."""
    values = {  # warming, humidity, wind, deficit times wind, rain
        0: (-1.0, 0.9, 2.0, 10.0, 0.0),
        90: (6.0, 0.5, 4.0, 40.0, 0.0),
        180: (4.0, 0.25, 9.0, 90.0, 0.0),
        270: (1.0, 0.8, 3.0, 20.0, 2.0 / HOUR),
    }
    keys = ("warming", "relative_humidity", "wind_10m", "drying_power", "rain")
    calm = SiteState("no crossing", "calm")
    found = bearings_of(
        [
            Direction(math.radians(d), (SiteState("crossing", side="lee", **dict(zip(keys, v, strict=True))), calm))
            for d, v in values.items()
        ],
        ["Tarn", "Flats"],
        step=0.5 * math.pi,
        given=0.0,
        planned=4,
    )
    page = bearings_page(found, title="T", made_at=MADE, version="0", notes=())
    index = bearings_index(found, page, report="b.html", files={})
    tarn, flats = index.rows
    cells = said(tarn)
    assert cells[0] == "4 of 4"
    assert cells[1].startswith("90°: warmer by 6.0 ")
    assert cells[2].startswith("180°: humidity 25 %, wind 9 m/s")
    assert cells[3].startswith("270°: 2.0 mm")
    assert said(flats) == ["0 of 4", "none", "none", "none"]
    assert "interrupted" not in render(index, "site_index.html.jinja")
