"""Quality control: each fault found at its place, and nothing found in a clean sounding."""

from datetime import UTC, datetime, timedelta

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.errors import DataFileError
from orolift.sources.quality import (
    Finding,
    age_findings,
    cautions,
    sentence,
    shortened,
    station_findings,
    table_lines,
)
from orolift.sources.sounding_csv import sounding_from_text

HEADER = "pressure_hpa,height_m,temperature_c,dew_point_c,wind_from_deg,wind_ms\n"
NOON = datetime(2026, 11, 3, 12, tzinfo=UTC)


def clean_rows():
    """Fifteen levels, 6.5 K per km, hydrostatic to a few metres, wind rising and veering slowly."""
    p = np.array([1000, 975, 950, 925, 900, 875, 850, 800, 750, 700, 650, 600, 550, 500, 400.0])
    t0, lapse = 288.15, 0.0065
    z = t0 / lapse * (1.0 - (p / 1000.0) ** (287.053 * lapse / 9.80665)) * 1.0035  # moisture lifts the heights a little
    t = t0 - lapse * z - 273.15
    return [
        [f"{p[i]:.0f}", f"{120 + z[i]:.0f}", f"{t[i]:.1f}", f"{t[i] - 4:.1f}", f"{240 + i}", f"{8 + i}"]
        for i in range(p.size)
    ]


def read(rows):
    return sounding_from_text(HEADER + "\n".join(",".join(row) for row in rows), "s.csv")


def kinds(sounding):
    return [(finding.what, finding.severity) for finding in sounding.findings]


def test_a_clean_sounding_has_no_finding():
    """Nothing to say, and all levels as given."""
    sounding = read(clean_rows())
    assert sounding.findings == ()
    assert sounding.height is not None
    assert sounding.pressure.size == 15


@pytest.mark.parametrize("level", range(1, 14))
@pytest.mark.parametrize("error", [9.0, -9.0])
def test_a_spike_of_temperature_is_found_at_its_level(level, error):
    """9 K off at one level: left out, interpolated, said with line and value."""
    rows = clean_rows()
    right = float(rows[level][2])
    rows[level][2] = f"{right + error:.1f}"
    rows[level][3] = f"{right - 14:.1f}"
    sounding = read(rows)
    said = [finding for finding in sounding.findings if finding.what == "temperature spike"]
    if not said:  # a cold spike on thick layers need not be impossible air: then it stays, as a doubtful layer or none
        assert abs(float(rows[level + 1][1]) - float(rows[level - 1][1])) > 500.0
        return
    assert said[0].severity == "wrong"
    assert f"line {level + 2}," in said[0].place
    assert f"{right + error:.1f} °C" in said[0].value
    assert sounding.temperature[level] == pytest.approx(273.15 + right, abs=0.4)


def test_a_small_spike_on_thin_layers_is_found():
    """4.5 K off between levels 10 hPa apart: 50 K per km on one side, which no air keeps."""
    rows = clean_rows()
    p, z, t = (np.array([float(row[i]) for row in rows]) for i in range(3))
    for hpa, error in ((845.0, 0.0), (840.0, 4.5), (835.0, 0.0)):
        height, value = np.interp(-hpa, -p, z), np.interp(-hpa, -p, t) + error
        rows.append([f"{hpa:.0f}", f"{height:.0f}", f"{value:.1f}", f"{value - 9:.1f}", "245", "14"])
    rows.sort(key=lambda row: -float(row[0]))
    said = [finding for finding in read(rows).findings if finding.what == "temperature spike"]
    assert len(said) == 1
    assert "840 hPa" in said[0].place


@pytest.mark.parametrize(("off", "severity"), [(30.0, None), (120.0, "remark"), (-220.0, "remark"), (420.0, "wrong")])
def test_heights_off_by_so_much(off, severity):
    """40 m are said, 300 m are wrong and not used."""
    rows = clean_rows()
    rows[9][1] = f"{float(rows[9][1]) + off:.0f}"
    sounding = read(rows)
    said = [finding.severity for finding in sounding.findings if "height contradicts" in finding.what]
    assert said == ([severity] if severity else [])
    assert (sounding.height is None) == (severity == "wrong")


def test_a_sharp_inversion_is_no_spike():
    """8 K warmer 10 hPa higher: a subsidence inversion, kept."""
    rows = clean_rows()
    for row in rows[5:]:
        row[2] = f"{float(row[2]) + 8:.1f}"
    assert not any("spike" in what for what, _ in kinds(read(rows)))


def test_many_spikes_mean_mixed_units():
    """Every other temperature in Fahrenheit under a Celsius key."""
    rows = clean_rows()
    for row in rows[::2]:
        row[2] = f"{float(row[2]) * 1.8 + 32:.1f}"
    with pytest.raises(DataFileError, match=r"more than 25% of 15 temperatures contradict.*Are two units mixed"):
        read(rows)


def test_fahrenheit_throughout_without_heights():
    """11.7 K per km over 5 km: no air is like that."""
    rows = clean_rows()
    for row in rows:
        row[1] = ""
        row[2] = f"{float(row[2]) * 1.8 + 32 - 25:.1f}"  # cold enough to stay in range
        row[3] = "-60"
    rows[0][1] = "120"
    with pytest.raises(DataFileError, match=r"temperature falls by .* per km, more than air can keep up.*Fahrenheit"):
        read(rows)


def test_fahrenheit_throughout_with_heights():
    """The heights fit once the temperatures are taken for Fahrenheit; or the lapse alone says it."""
    rows = clean_rows()
    for row in rows[:14]:
        row[2] = f"{float(row[2]) * 1.8 + 32:.1f}"
        row[3] = f"{min(float(row[2]) - 5, 44):.1f}"
    with pytest.raises(DataFileError, match="Fahrenheit"):
        read(rows)


def test_one_height_in_feet_is_said_and_not_used():
    """A single height of another unit: worked out from pressure instead."""
    rows = clean_rows()
    right = read(rows).height[8]
    rows[8][1] = f"{float(rows[8][1]) / 0.3048:.0f}"
    sounding = read(rows)
    assert ("height contradicts pressure: in feet?", "wrong") in kinds(sounding)
    assert sounding.height is None
    assert sounding.ground == 120.0
    assert right > 2000


def test_wrong_height_of_the_lowest_level():
    """The other levels agree on another ground: theirs is used, and the finding is that the first is wrong."""
    rows = clean_rows()
    rows[0][1] = "1120"
    sounding = read(rows)
    assert sounding.ground == pytest.approx(120.0, abs=12.0)
    assert ("height of the lowest level", "wrong") in kinds(sounding)


def test_dew_point_above_temperature_is_left_out():
    """One level: its humidity is interpolated. Half a kelvin is fog rounding and stays."""
    rows = clean_rows()
    rows[4][3] = f"{float(rows[4][2]) + 2:.1f}"
    rows[6][3] = f"{float(rows[6][2]) + 0.4:.1f}"
    sounding = read(rows)
    assert kinds(sounding).count(("dew point above temperature", "wrong")) == 1
    assert sounding.dew_point[4] < sounding.temperature[4]
    assert sounding.dew_point[6] - sounding.temperature[6] == pytest.approx(0.4)


def test_wind_spikes_and_fast_winds():
    """One wind 60 m/s off its equal neighbours is left out; 110 m/s throughout is doubted and used."""
    rows = clean_rows()
    rows[7][5] = "75"
    sounding = read(rows)
    assert ("wind spike", "wrong") in kinds(sounding)
    assert np.hypot(sounding.eastward_wind[7], sounding.northward_wind[7]) == pytest.approx(15.0, abs=0.5)
    rows = clean_rows()
    for i, row in enumerate(rows):
        row[5] = f"{80 + 3 * i}"
    fast = read(rows)
    assert ("wind too fast for its unit?", "doubtful") in kinds(fast)
    assert fast.eastward_wind.max() > 100.0


def test_superadiabatic_layers():
    """Aloft doubtful, over the heated ground a remark, with the rate."""
    rows = clean_rows()
    rows[9][2], rows[9][3] = f"{float(rows[9][2]) - 3.5:.1f}", "-30"
    aloft = read(rows)
    said = [finding for finding in aloft.findings if finding.what == "superadiabatic layer"]
    assert said[0].severity == "doubtful"
    assert "°C per km" in said[0].value
    rows = clean_rows()
    rows[0][2] = f"{float(rows[0][2]) + 2.5:.1f}"
    assert ("superadiabatic layer", "remark") in kinds(read(rows))


def test_gaps_are_said():
    """No level between 875 and 600 hPa; no wind below 700 hPa."""
    rows = clean_rows()
    gap = read(rows[:6] + rows[11:])
    assert ("gap without temperature", "remark") in kinds(gap)
    for row in rows[:9]:
        row[4] = row[5] = ""
    assert ("lowest wind", "doubtful") in kinds(read(rows))


def test_repeated_levels():
    """The same level twice with the same values is one level and a remark."""
    rows = clean_rows()
    rows.insert(5, list(rows[5]))
    sounding = read(rows)
    assert sounding.pressure.size == 15
    assert kinds(sounding) == [("repeated level", "remark")]


@pytest.mark.parametrize(
    ("hours", "severity", "word"),
    [(0, None, ""), (2.9, None, ""), (6, "doubtful", "before"), (13, "wrong", "before"), (-5, "doubtful", "after")],
)
def test_age(hours, severity, word):
    """Three hours are fresh, twelve are not."""
    found = age_findings(NOON - timedelta(hours=hours), NOON, "sounding")
    assert [finding.severity for finding in found] == ([severity] if severity else [])
    assert all(word in finding.value for finding in found)


def test_observations_from_the_future():
    """An hour of slack for clocks."""
    assert age_findings(NOON, None, "s", now=NOON - timedelta(minutes=50)) == []
    found = age_findings(NOON, None, "s", now=NOON - timedelta(hours=30))
    assert found[0].severity == "wrong"
    assert "30 h ahead" in found[0].value
    assert age_findings(None, NOON, "s", now=NOON) == []


@pytest.mark.parametrize(
    ("values", "what"),
    [
        # elevation, pressure (US Standard Atmosphere 1976, printed table: 1000 m 898.76 hPa, 3000 m 701.21), T, Td, wind
        ((3281.0, 89876.0, 288.0, 280.0, 5.0), "feet taken for metres"),
        ((305.0, 89876.0, 288.0, 280.0, 5.0), "metres taken for feet"),
        ((3000.0, 101300.0, 288.0, 280.0, 5.0), "reduced to sea level"),
        ((0.0, 101325.0, 273.15 + 59, 280.0, 5.0), "Fahrenheit"),
        ((0.0, 101325.0, 300.0, 250.0, 5.0), "dew point"),
        ((0.0, 101325.0, 288.0, 280.0, 60.0), "windy"),
    ],
)
def test_units_of_stations(values, what):
    """Each mix-up is named; plain values are not."""
    assert any(what in finding.what for finding in station_findings(*values, "station"))
    assert station_findings(1000.0, 89876.0, 288.0, 280.0, 5.0, "station") == []


def test_words_and_tables():
    """Sentences, the table of the terminal, and the order of cautions."""
    findings = [
        Finding("a", "gap", "3 km", "interpolated", "doubtful"),
        Finding("b", "spike", "", "left out", "wrong"),
        Finding("c", "merge", "", "done", "remark"),
    ]
    assert sentence(findings[0]) == "a: gap (3 km): interpolated."
    assert cautions(findings) == ("b: spike: left out.", "a: gap (3 km): interpolated.")
    lines = table_lines(findings)
    assert len(lines) == 4
    assert lines[0].split() == ["severity", "place", "finding", "value", "what", "was", "done"]
    assert table_lines([]) == []
    assert len(table_lines([Finding("x" * 500, "y", "", "z", "wrong")])[1]) < 200


@settings(max_examples=50)
@given(st.lists(st.sampled_from(["spike", "gap", "merge"]), max_size=40))
def test_shortened_lists_lose_no_kind(said_of):
    """Every kind stays, none has more than seven lines, and short lists stay as they are."""
    findings = [Finding(f"line {i}", what, "", "done", "wrong") for i, what in enumerate(said_of)]
    short = shortened(findings)
    assert {finding.what for finding in short} == set(said_of)
    assert all(sum(finding.what == what for finding in short) <= 6 for what in set(said_of))
    if all(said_of.count(what) <= 6 for what in set(said_of)):
        assert sorted(short, key=lambda finding: finding.place) == sorted(findings, key=lambda finding: finding.place)
