"""Units and rounding of the report against published conversions."""

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.report.quantities import METRIC, Amount, bare, displayed, from_displayed, number, quantity, shown, unit

# value [SI], kind, digits, units, what must be read; no-break spaces written as "~", thin ones as "_"
PUBLISHED = [
    pytest.param(273.15, "temperature", 1, "us", "32.0~°F", id="ice point, NIST SP 811 B.9: 32 F"),
    pytest.param(373.15, "temperature", 0, "us", "212~°F", id="NIST SP 811 B.9: 100 C is 212 F"),
    pytest.param(1609.344, "height", 1, "us", "5280.0~ft", id="NIST SP 811 B.8: a mile is 5280 ft"),
    pytest.param(1609344.0, "distance", 1, "us", "1000.0~mi", id="NIST SP 811 B.8: a mile is 1609.344 m"),
    pytest.param(101325.0, "pressure", 1, "us", "29.92~inHg", id="ICAO Doc 7488: 1013.25 hPa is 29.92 inHg"),
    pytest.param(101325.0, "pressure", 2, "metric", "1013.25~hPa", id="ICAO Doc 7488: standard pressure"),
    pytest.param(51.4444, "wind", 0, "metric", "51~m/s~(100~kt)", id="BIPM SI brochure: a knot is 1852/3600 m/s"),
    pytest.param(44.704, "wind", 2, "us", "100.00~mph", id="NIST SP 811 B.8: a mile per hour is 0.44704 m/s"),
    pytest.param(25.4, "water_depth", 0, "us", "1.00~in", id="NIST SP 811 B.8: an inch is 25.4 mm"),
    pytest.param(5.0, "temperature_difference", 1, "us", "9.0~°F", id="a difference has no offset: 5 K is 9 F"),
]


@pytest.mark.parametrize(("value", "kind", "digits", "units", "read"), PUBLISHED)
def test_reads_as_published(value, kind, digits, units, read):
    """Exact: the printed digits are fewer than those of the conversion."""
    assert quantity(value, kind, digits, units) == read.replace("~", "\u00a0")


@pytest.mark.parametrize(
    ("value", "kind", "digits", "read"),
    [
        pytest.param(268.15, "temperature", 0, "−5", id="true minus sign"),
        pytest.param(273.13, "temperature", 1, "0.0", id="no minus before a zero"),
        pytest.param(0.04, "temperature_change", 1, "0.0", id="no plus before a zero"),
        pytest.param(3.04, "temperature_change", 1, "+3.0", id="changes carry their plus"),
        pytest.param(914.0, "height", -1, "910", id="to tens"),
        pytest.param(1850.0, "height", 0, "1850", id="four digits stay together"),
        pytest.param(12345.0, "height", 0, "12_345", id="thin space from ten thousand on"),
        pytest.param(0.318, "share", 0, "32", id="share in per cent"),
    ],
)
def test_is_written_for_readers(value, kind, digits, read):
    assert number(value, kind, digits, "metric") == read.replace("_", "\u202f")


def test_bearing_keeps_its_degree_sign_close():
    assert quantity(4.101523742, "bearing", 0, "metric") == "235°"


def test_amounts_read_with_and_without_unit():
    wind = Amount(10.0, "wind")
    assert shown(wind, "metric").replace("\u00a0", " ") == "10 m/s (19 kt)"
    assert bare(wind, "metric") == "10 (19)"
    assert unit("wind", "metric") == "m/s (kt)"


@settings(deadline=None)
@given(st.floats(-1e4, 1e4), st.sampled_from(sorted(METRIC)), st.sampled_from(["metric", "us"]))
def test_displayed_values_lead_back(value, kind, units):
    """Round trip; abs tolerance: the offset of 459.67 costs digits near zero."""
    assert from_displayed(displayed(value, kind, units), kind, units) == pytest.approx(value, rel=1e-12, abs=1e-9)
