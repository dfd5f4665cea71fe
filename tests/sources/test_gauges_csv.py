"""Gauges from CSV, catchment and gauge tables, and the piece of TOML a fit gives."""

import tomllib

import numpy as np
import pytest
from rasterio.crs import CRS

from orolift.errors import DataFileError
from orolift.rain.catchments import CatchmentRain
from orolift.rain.gauge_fit import Fitted, RainFit
from orolift.rain.gauges import GaugeComparison
from orolift.sources.gauges_csv import fitted_rain_toml, read_gauges
from orolift.sources.rain_tables import CATCHMENT_HEADER, catchments_csv, gauges_csv

UTM = CRS.from_epsg(32632)


@pytest.fixture
def gauges_from(tmp_path):
    """Read gauges from text."""

    def read(text, **options):
        (tmp_path / "gauges.csv").write_text(text)
        return read_gauges(tmp_path / "gauges.csv", UTM, **options)

    return read


def test_longitude_and_latitude(gauges_from):
    """9 E is the central meridian: easting 500 km. 0.9996 of the arc of the meridian north of the equator."""
    from geographiclib.geodesic import Geodesic

    found = gauges_from("name,longitude,latitude,total_mm\nMill,9.0,46.0,41.5\nTop,9.1,46.0,80\n")
    assert found.name == ("Mill", "Top")
    assert found.x[0] == pytest.approx(500e3, abs=0.01)
    assert found.y[0] == pytest.approx(0.9996 * Geodesic.WGS84.Inverse(0.0, 9.0, 46.0, 9.0)["s12"], abs=0.01)
    np.testing.assert_array_equal(found.total, [41.5, 80.0])


def test_inches_and_eastings(gauges_from):
    """25.4 mm to the inch, exactly; easting and northing are in the raster's own system."""
    found = gauges_from("easting_m;northing_m;total_in\n500000;5100000;2\n")
    assert found.total[0] == pytest.approx(50.8, rel=1e-12)
    assert found.name == ("gauge of line 2",)
    lonlat = gauges_from("easting_m,northing_m,total_mm\n9.0,46.0,1\n", source_crs=CRS.from_epsg(4326))
    assert lonlat.x[0] == pytest.approx(500e3, abs=0.01)


def test_gauges_without_total_and_at_one_place(gauges_from):
    """Left out and averaged, each with a note."""
    found = gauges_from("name,longitude,latitude,total_mm\nA,9,46,10\nB,9.5,46,-9999\nC,9,46,20\n")
    np.testing.assert_array_equal(found.total, [15.0])
    assert "1 gauges have no total" in found.notes[0]
    assert "averaged: A" in found.notes[1]


@pytest.mark.parametrize(
    ("text", "message"),
    [
        (
            "name,longitude,latitude,total_mm\nA,9,46,-4\n",
            r"line 2: total_mm -4 is outside the plausible range of total_mm, 0 to 10000",
        ),
        ("longitude,latitude,total_mm\n9,46,5\n9,146,5\n", "line 3: latitude 146 is outside"),
        ("longitude,total_mm\n9,5\n", "a gauge needs its place"),
        ("longitude,latitude,easting_m,northing_m,total_mm\n9,46,1,1,5\n", "a gauge needs its place"),
        ("longitude,latitude,total_mm\n,46,5\n", "line 2: the place is missing"),
        ("longitude,latitude\n9,46\n", "has no column total_mm"),
        ("longitude,latitude,total_mm\n9,46,\n", "no gauge has a total"),
        ("longitude,latitude,total\n9,46,1\n", r"column 'total' is not known. Did you mean total_mm"),
        ("longitude,latitude,total_mm\n9,46,much\n", "total 'much' is not a number"),
        ("lon,latitude,total_mm\n9,46,1\n", "column 'lon' is not known"),
    ],
)
def test_bad_tables(gauges_from, text, message):
    """File and line are named."""
    with pytest.raises(DataFileError, match=message) as caught:
        gauges_from(text)
    assert "gauges.csv" in str(caught.value)


def test_fit_as_toml():
    """The lines can be pasted: they parse, with the fitted values; doubts are comments."""
    time = Fitted(812.4, 95.0, 700.0, 900.0, at_bound=False)
    fit = RainFit(
        time,
        Fitted(1500.0, 200.0, 1300.0, 1700.0, at_bound=True),
        Fitted(2312.0, 150.0, 2200.0, 2400.0, at_bound=False),
        Fitted(0.5 / 3600, 0.1 / 3600, 0.4 / 3600, 0.6 / 3600, at_bound=False),
        12,
        9.0,
        5.0,
        7.0,
        11.0,
        ("Mind this.",),
    )
    text = fitted_rain_toml(fit)
    assert tomllib.loads(text) == {"rain": {"cloud_time_s": 812, "fall_time_s": 1500, "background_mm_per_h": 0.5}}
    assert "# Mind this." in text
    assert "standard error 95; 700 to 900 with one gauge left out" in text
    assert "at the end of its range" in text


def test_catchments_as_csv():
    """Units in the header; what is not known is empty; names cannot become formulas."""
    known = CatchmentRain(25e6, 1.0, 2.0 / 3600, 12.0, 3e5, 0.25, 0.4, 0.8, 100.0, 900.0, 2000.0, ())
    unknown = CatchmentRain(1e6, 0.0, None, None, None, None, None, None, None, None, None, ("Outside.",))
    header, first, second = catchments_csv([("=Tarn", known), ("Far", unknown)]).splitlines()
    assert header == ",".join(f'"{head}"' for head in CATCHMENT_HEADER)
    cells = first.split(",")
    assert cells[0] == '"\'=Tarn"'
    np.testing.assert_allclose([float(c) for c in cells[1:12]], [25, 100, 2, 12, 3e5, 25, 40, 80, 100, 900, 2000])
    nothing = '"",' * (len(CATCHMENT_HEADER) - 4)
    assert second == f'"Far",1.0,0.0,{nothing}"Outside."'
    ranged = catchments_csv([("A", known)], [{"mean_mm_per_h": (1.0, 3.0), "snow_share": (0.1, 0.5)}]).splitlines()[1]
    row = dict(zip(CATCHMENT_HEADER, ranged.split(","), strict=True))
    assert [row[f"{name}_{end}"] for name in ("mean_mm_per_h", "snow_percent") for end in ("low", "high")] == [
        *("1.0", "3.0"),
        *("10.0", "50.0"),
    ]
    assert row["windward_percent_low"] == '""'


def test_gauges_as_csv(gauges_from):
    """Map beside observation."""
    gauges = gauges_from("name,easting_m,northing_m,total_mm\nA,1,2,10\nB,100,2,20\n")
    compared = GaugeComparison(np.array([12.0, np.nan]), 1, 2.0, 1.2, 2.0, 2.0, None, ())
    lines = gauges_csv(gauges, compared).splitlines()
    assert lines[1].endswith('10.0,12.0,2.0,"",""')
    assert lines[2].endswith('20.0,"","","",""')
    assert gauges_csv(gauges, compared, [{"map_mm": (9.0, 15.0)}, {}]).splitlines()[1].endswith("12.0,2.0,9.0,15.0")
