"""Sentences of lower layers in the units of the page: conversions, figures kept, and no metric measure left over."""

import re

import pytest

from orolift.report.local_units import local
from orolift.report.render import render

# Exact definitions, NIST SP 811 (2008) Appendix B: 1 ft is 0.3048 m, 1 mi is 1609.344 m, 1 in is 25.4 mm,
# 1 inHg (0 degrees Celsius) is 3386.389 Pa, 1 mph is 0.44704 m/s; rounded to the figures of the metric number.
SAID = [
    ("a point every 215 m", "a point every 705 ft"),
    ("at least 1 km above the lee", "at least 3300 ft above the lee"),
    ("The data end at 16.2 km (99 hPa).", "The data end at 53 100 ft (2.92 inHg)."),
    ("vanishes between 1.5 and 4 km above the crest", "vanishes between 4900 and 13 000 ft above the crest"),
    ("drifts 39 km on average", "drifts 24 mi on average"),
    ("one wind of 20 m/s (39 kt) in it", "one wind of 45 mph in it"),
    ("falls by 6.5 °C per km", "falls by 3.6 °F per 1000 ft"),
    ("between 0 and \u221220 °C", "between 32 and \u22124 °F"),
    ("falls by 10 °C over 2 km", "falls by 18 °F over 1.2 mi"),
    ("+1.2 °C against the column", "+2.2 °F against the column"),
    ("25.4 mm in 6 h", "1.00 in in 6 h"),
]


@pytest.mark.parametrize(("metric", "us"), SAID, ids=[us for _, us in SAID])
def test_measures_are_converted(metric, us):
    assert local(metric, "us").replace("\u00a0", " ").replace("\u202f", " ") == us
    assert local(metric, "metric") == metric


@pytest.mark.parametrize(
    "text",
    [
        "N h/U is 1.2",
        "1000 s",
        "kg/m/s",
        "2 x 2 cells",
        "7.8 g/kg",
        "12 members",
        "case_5 m",
        "5 m² of it",
        "J kg-1 K-1",
    ],
)
def test_what_is_no_measure_stays(text):
    assert local(text, "us") == text


def test_no_metric_measure_is_left_on_a_page_in_us_units(page_for, any_crossing):
    """Outside of constants and citations; mixing ratio, vapour flux and potential temperature are metric in both."""
    html = re.sub(r"</?data[^>]*>", "", render(page_for(any_crossing, units="us")))
    html = re.sub(
        r"(?s)<style>.*?</style>|<script.*?</script>|<pre>.*?</pre>|<table id=.constants.*?</table>", "", html
    )
    html = re.sub(r'(?s)<table id="windstorm-conditions".*?</table>|<table id="wind-methods".*?</table>', "", html)
    words = re.sub(r"<[^>]*>", " ", html)
    assert not re.findall(r".{30}\d[\s\u00a0\u202f]?(?:m|km|°C|hPa|m/s|mm|mm/h|kt|km²)\b", words)
