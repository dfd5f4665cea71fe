"""The invented Varn range and its soundings are what the examples say they are."""

import csv
import importlib.util
from pathlib import Path

import numpy as np
import pytest

from orolift.sources.raster import MapPoint, raster_transect, site_positions
from orolift.sources.ridge_csv import read_ridge
from orolift.terrain import features, ridge_transect

DEMO = Path(__file__).parents[2] / "demo_terrain"


def test_raster_is_small_and_in_metres():
    import rasterio

    file = DEMO / "varn.tif"
    assert file.stat().st_size <= 1_200_000
    with rasterio.open(file) as dataset:
        assert dataset.crs.to_epsg() == 32710
        assert dataset.units == ("m",)
        cells = dataset.read(1)
    assert 1900 <= cells.max() <= 2400
    assert cells.min() == 0


def test_transect_has_coast_crest_and_basin():
    line = raster_transect(DEMO / "varn.tif", wind_from=np.radians(235.0), through=MapPoint(-121.02, -46.80))
    found = features(line)
    assert found.base == 0.0
    assert 1000.0 < found.crest < 1800.0
    assert 250.0 < found.lee_foot < 350.0
    assert line.high_elevation.max() > found.crest + 200.0


def test_default_line_through_the_highest_cell_has_room_upwind():
    found = features(raster_transect(DEMO / "varn.tif", wind_from=np.radians(235.0)))
    assert found.crest_distance > 20e3


def test_example_site_lies_in_the_lee():
    file = DEMO / "varn.tif"
    line = raster_transect(file, wind_from=np.radians(235.0), through=MapPoint(-121.02, -46.80))
    site = site_positions(file, line, [MapPoint(-121.02, -46.80)])
    assert site.distance[0] > features(line).crest_distance + 10e3
    assert site.offset[0] == pytest.approx(0.0, abs=1.0)
    assert 250.0 < site.elevation[0] < 350.0


def test_hand_entered_ridge_is_the_same_range():
    found = features(ridge_transect(*read_ridge(DEMO / "ridge.csv")))
    assert (found.base, found.crest) == (0.0, 1900.0)
    assert 250.0 < found.lee_foot < 350.0


@pytest.mark.parametrize("name", ["sounding.csv", "sounding_dry.csv"])
def test_heights_and_pressures_of_the_soundings_are_hydrostatic(name):
    """Thickness of each layer by the hypsometric equation (WMO-No. 8, virtual temperature of the layer mean).

    atol: 0.05 hPa of rounding is 4 m at 100 hPa, 0.5 m at the ground; temperatures are rounded to 0.1 K.
    """
    rows = [row for row in csv.reader((DEMO / name).read_text().splitlines()) if not row[0].startswith("#")]
    assert rows[0] == ["pressure_hpa", "height_m", "temperature_c", "dew_point_c", "wind_from_deg", "wind_kt"]
    p, z, t, td, bearing, _ = np.array(rows[1:], dtype=float).T
    vapour = 6.112 * np.exp(17.67 * td / (td + 243.5))  # Bolton (1980) eq. 10
    virtual = (t + 273.15) / (1.0 - vapour / p * (1.0 - 0.62198))
    thickness = 287.05 / 9.80665 * 0.5 * (virtual[1:] + virtual[:-1]) * np.log(p[:-1] / p[1:])
    np.testing.assert_allclose(thickness, np.diff(z), atol=5.0)
    assert abs(thickness.sum() - (z[-1] - z[0])) < 12.0
    assert np.all(td <= t)
    assert 10.0 <= z[0] <= 40.0
    assert p[-1] < 105.0
    assert np.all((bearing > 200.0) & (bearing < 260.0))


def test_moist_sounding_is_moist_and_windy_at_crest_height_and_the_other_dry():
    moist, dry = (np.genfromtxt(DEMO / n, delimiter=",", skip_header=2).T for n in ("sounding.csv", "sounding_dry.csv"))
    near_crest = np.argmin(np.abs(moist[1] - 2000.0))
    assert 35.0 <= moist[5][near_crest] <= 40.0
    below = moist[1] < 3000.0
    assert np.all(moist[2][below] - moist[3][below] <= 2.0)
    assert np.all(dry[2][dry[1] < 3000.0] - dry[3][dry[1] < 3000.0] >= 4.0)


def test_hours_are_those_of_the_script():
    """36 hours of which two did not report, as `make_demo.py` writes them."""
    spec = importlib.util.spec_from_file_location("make_demo", DEMO / "make_demo.py")
    script = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(script)
    text = (DEMO / "varn_hours.csv").read_text()
    assert text == script.hours()
    assert len(text.splitlines()) == 2 + 34
