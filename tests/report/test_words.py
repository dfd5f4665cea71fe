"""Words for numbers."""

import math
from datetime import UTC, datetime, timedelta, timezone

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.report.quantities import Amount
from orolift.report.words import counted, fraction_in_words, moment, plain, point_of_compass, sentence


@pytest.mark.parametrize(
    ("share", "words"),
    [
        (0.0, "none"),
        (0.004, "very little"),
        (0.24, "a quarter"),
        (0.33, "a third"),
        (0.52, "half"),
        (0.68, "two thirds"),
        (0.97, "nearly all"),
        (1.0, "all"),
    ],
)
def test_fractions_are_the_nearest_everyday_ones(share, words):
    assert fraction_in_words(share) == words


@settings(deadline=None)
@given(st.floats(0.001, 0.999))
def test_none_and_all_are_said_only_of_nothing_and_everything(share):
    assert fraction_in_words(share) not in {"none", "all"}


@pytest.mark.parametrize(
    ("degrees", "point"), [(0, "north"), (22, "north"), (23, "northeast"), (235, "southwest"), (338, "north")]
)
def test_compass_has_eight_points(degrees, point):
    assert point_of_compass(math.radians(degrees)) == point


def test_moments_name_their_zone():
    assert moment(datetime(2026, 1, 9, 4, 5, tzinfo=UTC)) == "9 January 2026, 04:05 UTC"
    west = timezone(timedelta(hours=-3, minutes=-30))
    assert moment(datetime(2026, 12, 31, 23, 0, tzinfo=west)) == "31 December 2026, 23:00 UTC-03:30"


def test_counts_are_spelt_out_up_to_ten():
    assert [counted(n, "site", "sites") for n in (0, 1, 10, 11)] == ["no sites", "one site", "ten sites", "11 sites"]


def test_sentences_keep_their_numbers():
    words = sentence(("cloud at ", Amount(912.0, "height", -1), "."))
    assert words[1] == Amount(912.0, "height", -1)
    assert plain(words, "us").replace("\u00a0", " ") == "Cloud at 2990 ft."
