"""A series of incoming air is read whole, or refused with the line at fault; hours that are not there stay empty."""

from datetime import UTC, datetime, timedelta

import numpy as np
import pytest

from orolift.errors import DataFileError, MissingFileError
from orolift.sources.series import read_series

HEAD = "time,temperature_c,dew_point_c,pressure_hpa,wind_from_deg,wind_ms"
ROW = "10,6,1004,235,12"


def series(tmp_path, *rows, head=HEAD):
    file = tmp_path / "series.csv"
    file.write_text("\n".join([head, *rows]) + "\n")
    return read_series(file)


def hour(number, row=ROW, zone="Z"):
    time = datetime(2026, 11, 3, tzinfo=UTC) + timedelta(hours=number)
    return f"{time:%Y-%m-%dT%H:%M:%S}{zone},{row}"


def test_values_are_in_si_and_other_units_are_read(tmp_path):
    """50 degF are 283.15 K, 10 kt 5.144 m/s (exact by definition of foot, knot and inch of mercury)."""
    head = "time,temperature_f,relative_humidity_percent,qnh_inhg,wind_from_deg,wind_kt"
    found = series(tmp_path, hour(0, "50,80,29.92,90,10"), head=head)
    assert found.kind == "station"
    assert found.columns["temperature"][0] == pytest.approx(283.15)
    assert found.columns["wind"][0] == pytest.approx(10 * 1852 / 3600)
    assert found.columns["wind_from"][0] == pytest.approx(np.pi / 2)


def test_times_keep_their_zone(tmp_path):
    """An offset moves the time; the zone of the file is kept for the page."""
    found = series(tmp_path, hour(0, zone="+12:00"), hour(1, zone="+12:00"))
    assert found.time[0] == datetime(2026, 11, 2, 12, tzinfo=UTC).timestamp()
    assert found.zone.utcoffset(None) == timedelta(hours=12)
    assert series(tmp_path, hour(0, zone="+12:00"), hour(20)).zone.utcoffset(None) == timedelta()


def test_local_time_without_zone_is_refused_with_its_line(tmp_path):
    with pytest.raises(DataFileError, match=r"line 3: time '2026-11-03T01:00:00' has no time zone. Write 2026.*Z for"):
        series(tmp_path, hour(0), hour(1, zone=""))


def test_a_time_that_is_none_is_refused_with_its_line(tmp_path):
    with pytest.raises(DataFileError, match=r"line 2: time '3.11.2026' is not a time of ISO 8601"):
        series(tmp_path, f"3.11.2026,{ROW}")


def test_rows_out_of_order_are_sorted_with_a_note(tmp_path):
    """Each row carries its own time; values and faults move with it."""
    found = series(tmp_path, hour(2, "12,6,1004,235,12"), hour(0), hour(1, "oops,6,1004,235,12"), hour(3))
    assert np.all(np.diff(found.time) == 3600.0)
    assert found.columns["temperature"][2] == pytest.approx(285.15)
    assert found.line.tolist() == [3, 4, 2, 5]
    assert list(found.faults) == [1]
    assert "line 3 is earlier than the line before it" in found.notes[0]


def test_a_time_that_stands_twice_is_refused_with_both_lines(tmp_path):
    """The same moment in two zones is the same moment."""
    with pytest.raises(DataFileError, match="line 2 and line 4 have the same time, 2026-11-03T00:00:00Z"):
        series(tmp_path, hour(0), hour(1), f"2026-11-03T13:00:00+13:00,{ROW}")


def test_hours_that_are_not_there_are_faults_and_nothing_is_interpolated(tmp_path):
    found = series(tmp_path, hour(0), hour(1), hour(4), hour(5))
    assert found.time.size == 6
    assert sorted(found.faults) == [2, 3]
    assert np.isnan(found.columns["temperature"][2:4]).all()
    assert "2 steps are missing" in found.notes[-1]


def test_one_wrong_row_is_a_fault_of_that_row(tmp_path):
    """A cell that is no number, out of range, or missing."""
    bad = [hour(4, "x,6,1004,235,12"), hour(5, "99,6,1004,235,12"), hour(6, ",6,1004,235,12")]
    found = series(tmp_path, *[hour(n) for n in range(4)], *bad)
    assert [found.faults[n].split(": ")[1] for n in (4, 5, 6)] == ["line 6", "line 7", "line 8"]
    assert "not a number" in found.faults[4]
    assert "outside the plausible range" in found.faults[5]
    assert "no temperature" in found.faults[6]


def test_mostly_wrong_rows_refuse_the_file(tmp_path):
    """Kelvin in a column of degrees Celsius is no fault of a row."""
    with pytest.raises(DataFileError, match="2 of 3 rows cannot be used, more than half: check columns and units"):
        series(tmp_path, hour(0), hour(1, "283,6,1004,235,12"), hour(2, "284,6,1004,235,12"))


def test_a_mistyped_year_is_no_gap_of_a_century(tmp_path):
    with pytest.raises(DataFileError, match=r"steps of 3600 s are missing, the longest gap from .* Is a year mistyped"):
        series(tmp_path, hour(0), hour(1), f"2126-11-03T02:00:00Z,{ROW}")


@pytest.mark.parametrize(
    ("head", "row", "message"),
    [
        ("temperature_c", "10", "has no column time"),
        ("time,temperature_c", "2026-11-03T00:00:00Z,10", "has no column dew_point_c or relative_humidity_percent"),
        (f"{HEAD},qnh_hpa", hour(0, f"{ROW},1004"), "has both columns pressure_hpa or qnh_hpa. Keep one"),
        (f"{HEAD},crest_wind_from_deg", hour(0, f"{ROW},240"), "crest_wind_from_deg needs crest_wind_ms"),
        ("time,sounding_file,wind_ms", "2026-11-03T00:00:00Z,a.csv,3", "sounding_file and wind both give"),
        ("time,tempreature_c", "2026-11-03T00:00:00Z,10", "Did you mean temperature_c"),
    ],
)
def test_columns_that_do_not_fit_are_refused(head, row, message, tmp_path):
    with pytest.raises(DataFileError, match=message):
        series(tmp_path, row, head=head)


def test_a_series_of_soundings(tmp_path):
    """A row names its file; one without is a fault of that row."""
    rows = ["2026-11-03T00:00:00Z,a.csv", "2026-11-03T06:00:00Z,b.csv", "2026-11-03T12:00:00Z,"]
    found = series(tmp_path, *rows, head="time,sounding_file")
    assert (found.kind, found.step, found.files) == ("sounding", 6 * 3600.0, ("a.csv", "b.csv", ""))
    assert "line 4: no sounding_file" in found.faults[2]


def test_a_hundred_thousand_rows_are_read(tmp_path):
    """More than eleven years of hours."""
    start = datetime(2010, 1, 1, tzinfo=UTC).timestamp()
    stamps = (np.datetime64("2010-01-01T00:00:00") + np.arange(100_000).astype("timedelta64[h]")).astype(str)
    found = series(tmp_path, *[f"{stamp}Z,{ROW}" for stamp in stamps])
    assert found.time.size == 100_000
    assert found.time[-1] == start + 99_999 * 3600.0


def test_times_of_model_output(tmp_path):
    """Its times make the series, in UTC."""
    netcdf4 = pytest.importorskip("netCDF4")
    file = tmp_path / "model.nc"
    with netcdf4.Dataset(file, "w") as data:
        data.createDimension("time", 3)
        time = data.createVariable("time", "f8", ("time",))
        time.units = "hours since 2026-11-03 00:00:00"
        time[:] = [0, 1, 2]
        made = data.createVariable("t", "f8", ("time",))
        made.standard_name = "air_temperature"
    found = read_series(file)
    assert (found.kind, found.time.tolist()) == ("model", [1793664000.0 + 3600.0 * n for n in range(3)])


def test_a_missing_file_is_named(tmp_path):
    with pytest.raises(MissingFileError, match=r"none.csv cannot be found"):
        read_series(tmp_path / "none.csv")
