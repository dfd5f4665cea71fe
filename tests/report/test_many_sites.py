"""Sites in short rows, where they are very many: the same numbers and ranges as in full rows."""

import pytest

from orolift.report import sites as module
from orolift.report.sites import sites
from orolift.report.spans import Spans


@pytest.fixture
def both(with_members, monkeypatch):
    """Full rows and short rows of one crossing, by the number of the site."""
    spans = Spans(*with_members)
    full = sites(spans.crossing, spans).rows
    monkeypatch.setattr(module, "MOST_FULL", 0)
    return {row.number: row for row in full}, sites(spans.crossing, spans).short_rows


def test_short_rows_carry_the_ranges_of_full_ones(both):
    """Temperature, humidity, warming and the heights the air comes from; wind has one there alone."""
    full, short = both
    assert len(short) == len(full) > 0
    for row in short:
        for name in ("temperature", "relative_humidity", "warming", "source"):
            assert row.spans[name] == full[row.number].spans[name]
        assert row.spans["temperature"]
        assert row.wind_10m is None or row.spans["wind_10m"]


def test_without_members_only_the_heights_of_the_air_have_one(with_members, monkeypatch):
    """They are shares of its mass, not of members."""
    monkeypatch.setattr(module, "MOST_FULL", 0)
    for row in sites(with_members[0]).short_rows:
        assert {name for name, words in row.spans.items() if words} <= {"source"}
