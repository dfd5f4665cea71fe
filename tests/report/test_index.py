"""The index of several reports: links that lead somewhere, numbers of the crossings, names that stay names."""

import re
from datetime import UTC, datetime

import pytest

from orolift.report.index import entry_of, index_of
from orolift.report.render import render

MADE = datetime(2026, 11, 3, 6, 5, tzinfo=UTC)
HOSTILE = "<script>alert('x')</script>\" onload=\"a{{ 7 * 7 }}&amp;"


def index_for(named, units="metric", title="Case"):
    entries = [
        entry_of(
            named(name), title=f"{title} {name}", valid_time=None, report=f"{name}.html", files={"results": "a.json"}
        )
        for name in ("rain that drifts", "cold pool", "no cloud")
    ]
    return index_of(entries, title="Side by side", made_at=MADE, version="0.0.0", units=units)


def test_links_name_files_as_addresses(named):
    """A space in a name is written as an address has it (RFC 3986: %20)."""
    html = render(index_for(named), "index.html.jinja")
    assert re.findall(r'<li>\s*<p><a href="([^"]+)">', html) == [
        "rain%20that%20drifts.html",
        "cold%20pool.html",
        "no%20cloud.html",
    ]


def test_heading_names_the_coolest_and_the_warmest(named):
    page = index_for(named)
    temperatures = {name: named(name).lee[0].temperature for name in ("rain that drifts", "cold pool", "no cloud")}
    words = [part if isinstance(part, str) else part.value for part in page.heading]
    assert min(temperatures.values()) == words[1]
    assert max(temperatures.values()) == words[3]
    assert min(temperatures, key=temperatures.get) in words[2]
    assert max(temperatures, key=temperatures.get) in words[4]


@pytest.mark.parametrize("units", ["metric", "us"])
def test_numbers_of_every_report_stand_in_the_table(named, units):
    page = index_for(named, units)
    for entry, name in zip(page.entries, ("rain that drifts", "cold pool", "no cloud"), strict=True):
        crossing = named(name)
        assert entry.temperature[0].value == crossing.lee[0].temperature
        assert (entry.fallen is None) == (crossing.cloud.base is None)
        assert bool(entry.cloud) == (crossing.cloud.base is not None)
    assert ("°F" in render(page, "index.html.jinja")) == (units == "us")


def test_hostile_titles_stay_words(named):
    html = render(index_for(named, title=HOSTILE), "index.html.jinja")
    assert "<script" not in html
    assert 'onload="' not in html
    assert "script-src" not in html


def test_index_has_the_policy_of_the_report_without_script(named):
    html = render(index_for(named), "index.html.jinja")
    assert "default-src 'none'; style-src 'sha256-" in html
    assert "unsafe" not in html
