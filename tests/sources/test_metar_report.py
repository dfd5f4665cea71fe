"""METARs: reports of our own by the code tables, against the library's own fields, and what is refused."""

import math
import time
from datetime import UTC, datetime

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.errors import DataFileError, OroliftError
from orolift.sources.metar_report import metar_report

NEAR = datetime(2026, 11, 3, 12, tzinfo=UTC)
REPORT = "METAR XVAR 031150Z 24025G38KT 9999 -RA BKN030 OVC060 15/11 Q1009 NOSIG"
US_REPORT = "METAR KXYZ 031153Z AUTO 24015G25KT 10SM -RA FEW030 BKN045 14/08 A2992 RMK AO2 SLP132 P0002 T01390083 $"


def test_a_report_in_si():
    """FM 15: wind in knots with gust, whole degrees, Q form in hectopascals."""
    report = metar_report(REPORT, near=NEAR)
    assert report.station == "XVAR"
    assert report.observed == datetime(2026, 11, 3, 11, 50, tzinfo=UTC)
    assert report.temperature == pytest.approx(288.15)
    assert report.dew_point == pytest.approx(284.15)
    assert not report.precise
    assert (report.qnh, report.altimeter) == (100900.0, "Q")
    assert report.wind_speed == pytest.approx(25 * 1852 / 3600, rel=1e-5)
    assert math.degrees(report.wind_from) == pytest.approx(240.0)
    assert report.gust == pytest.approx(38 * 1852 / 3600, rel=1e-5)


def test_tenths_from_the_remarks_and_inches():
    """T group: sign, tens, units, tenths of both. A form: hundredths of an inch of mercury (NIST SP 811: 3386.389 Pa)."""
    report = metar_report(US_REPORT, near=NEAR)
    assert report.precise
    assert report.temperature == pytest.approx(273.15 + 13.9)
    assert report.dew_point == pytest.approx(273.15 + 8.3)
    assert report.altimeter == "A"
    assert report.qnh == pytest.approx(29.92 * 3386.389)


@pytest.mark.parametrize(
    "report",
    [
        REPORT,
        "SPECI XVAR 031207Z 00000KT CAVOK M05/M07 Q1031",
        "METAR XVAR 031150Z 08007MPS 040V120 3000 BR OVC004 02/02 Q0998",
        "METAR KXYZ 031153Z 35004KT 1/2SM FG VV002 M02/M03 A3015",
    ],
)
def test_the_library_says_the_same(report):
    """Decoded by the library from the whole report, in its own units."""
    from metar import Metar

    own = metar_report(report, near=NEAR)
    theirs = Metar.Metar(report, month=11, year=2026)
    assert own.temperature == pytest.approx(theirs.temp.value("K"))
    assert own.dew_point == pytest.approx(theirs.dewpt.value("K"))
    assert own.wind_speed == pytest.approx(theirs.wind_speed.value("MPS"))
    assert own.qnh == pytest.approx(theirs.press.value("HPA") * 100, rel=5e-6)  # its factor from inches is rounded
    assert own.observed.replace(tzinfo=None) == theirs.time


@pytest.mark.parametrize(
    ("near", "group", "expected"),
    [
        (datetime(2026, 3, 1, 0, 10, tzinfo=UTC), "282350Z", datetime(2026, 2, 28, 23, 50, tzinfo=UTC)),
        (datetime(2024, 3, 1, 0, 10, tzinfo=UTC), "292350Z", datetime(2024, 2, 29, 23, 50, tzinfo=UTC)),
        (datetime(2026, 1, 1, 1, tzinfo=UTC), "312350Z", datetime(2025, 12, 31, 23, 50, tzinfo=UTC)),
        (datetime(1999, 5, 4, 0, tzinfo=UTC), "032356Z", datetime(1999, 5, 3, 23, 56, tzinfo=UTC)),
        (datetime(2026, 12, 31, 23, tzinfo=UTC), "010020Z", datetime(2027, 1, 1, 0, 20, tzinfo=UTC)),
    ],
)
def test_month_and_year_are_those_nearest(near, group, expected):
    """An old report is of its own year, whatever the clock says."""
    report = metar_report(REPORT.replace("031150Z", group), near=near)
    assert report.observed == expected


def test_without_a_time_it_stays_unknown():
    """Nothing is guessed from the clock; the finding says so. Day 31 is fine."""
    report = metar_report(REPORT.replace("031150Z", "311150Z"))
    assert report.observed is None
    assert any("not known to the month" in finding.what for finding in report.findings)


def test_variable_wind_has_no_direction():
    """VRB: speed only, with a finding. Calm: no direction, no finding."""
    report = metar_report(REPORT.replace("24025G38KT", "VRB04KT"), near=NEAR)
    assert report.wind_from is None
    assert any("variable" in finding.what for finding in report.findings)
    calm = metar_report(REPORT.replace("24025G38KT", "00000KT"), near=NEAR)
    assert (calm.wind_speed, calm.wind_from) == (0.0, None)
    assert not any("variable" in finding.what for finding in calm.findings)


def test_a_t_group_that_contradicts_the_body_is_not_used():
    """T01390083 against 24/08: ten degrees are a slip, and the body stands."""
    report = metar_report(US_REPORT.replace("14/08", "24/08"), near=NEAR)
    assert report.temperature == pytest.approx(297.15)
    assert any(finding.what == "T group contradicts the body" for finding in report.findings)


def test_unknown_groups_are_said():
    """A group the library does not know is passed over, with a finding."""
    report = metar_report(REPORT.replace("9999", "9999 QWERTY7"), near=NEAR)
    assert [finding.value for finding in report.findings if finding.what == "groups not understood"] == ["QWERTY7"]


@pytest.mark.parametrize(
    ("report", "message"),
    [
        ("", "no reports are given"),
        ("METAR XVAR NIL", "NIL|no day and time"),
        ("METAR XVAR 031150Z NIL", "NIL, it holds no values"),
        (f"{REPORT} {REPORT}", "2 reports are given; give exactly one"),
        (REPORT.replace("24025G38KT", "24025"), "'24025' has no unit; write KT, MPS or KMH"),
        (REPORT.replace("24025G38KT", "/////KT"), "no wind is given"),
        (REPORT.replace("15/11", "15///"), "the dew point is missing"),
        (REPORT.replace("15/11", "////11"), "is missing|no wind|cannot be decoded"),
        (REPORT.replace("Q1009", "Q////"), "no altimeter setting"),
        (REPORT.replace("Q1009", ""), "no altimeter setting"),
        (REPORT.replace("Q1009", "Q0100"), "100 hPa is outside 860 to 1090"),
        (REPORT.replace("Q1009", "A1009"), "outside 860 to 1090"),
        (REPORT.replace("031150Z", "351150Z"), "'351150Z' is no day and time"),
        (REPORT.replace("031150Z", ""), "no day and time"),
        (REPORT.replace("9999", "über"), "'ÜBER' is no group"),
        ("METAR " + "X" * 1200, "1206 characters"),
    ],
)
def test_what_cannot_be_used_is_refused(report, message):
    """Empty, NIL, several, no unit, missing and impossible values."""
    with pytest.raises(DataFileError, match=message):
        metar_report(report, near=NEAR)


def test_remarks_cannot_keep_the_library_busy():
    """Its pattern for lightning tries every split of a run of points of the compass; the remarks are not handed over.

    The limit is far above the milliseconds this takes, and far below the hours a run of 40 would.
    """
    start = time.perf_counter()
    metar_report(f"{US_REPORT} LTG DSNT {'NE' * 40}! ", near=NEAR)
    metar_report(f"{US_REPORT} TS {'NE AND ' * 60}", near=NEAR)
    assert time.perf_counter() - start < 10.0


WORDS = [
    *US_REPORT.split(),
    *REPORT.split(),
    "RMK",
    "TEMPO",
    "////",
    "M",
    "24025",
    "R24/1000",
    "=",
    "LTG",
    "NENE",
    "TS",
]


@settings(max_examples=300)
@given(st.lists(st.sampled_from(WORDS), max_size=25))
def test_shuffled_words_never_crash(words):
    """Words of reports in any order: a report or a message."""
    try:
        metar_report(" ".join(words), near=NEAR)
    except OroliftError as error:
        assert str(error).startswith("metar")


@settings(max_examples=300)
@given(st.text(alphabet="ABCKMNQRSTVZ0123456789/ +-=\n$", max_size=120))
def test_any_text_never_crashes(text):
    """Any characters after a heading: a report or a message."""
    try:
        metar_report("METAR XVAR 031150Z " + text, near=NEAR)
    except OroliftError as error:
        assert str(error).startswith("metar")
