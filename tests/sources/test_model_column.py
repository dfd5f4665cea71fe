"""Model columns in NetCDF, written by the tests with fields that are linear, so that the right values are known."""

import sys
from datetime import UTC, datetime

import numpy as np
import pytest

from orolift.air.vapour import mixing_ratio_from_specific_humidity
from orolift.errors import DataFileError, MissingExtraError
from orolift.sources.model_column import read_model_column
from orolift.sources.model_grid import mixed
from orolift.sources.model_units import converted_from
from orolift.sources.sounding import sounding_from_levels

nc = pytest.importorskip("netCDF4")

LEVELS = np.array([1000.0, 925.0, 850.0, 700.0, 500.0, 300.0])
LON, LAT = np.arange(-125.0, -119.9, 0.5), np.arange(49.0, 44.9, -0.5)  # rows north to south
HOURS = np.array([0.0, 6.0, 12.0])


def temperature(hour, hpa, lat, lon):
    """Linear in everything."""
    return 220.0 + 0.07 * hpa + 0.1 * hour - 0.8 * (lat - 47.0) + 0.4 * (lon + 122.0)


def write(
    path,
    *,
    form="NETCDF4",
    units=None,
    names=None,
    without=(),
    reverse=False,
    surface=101500.0,
    ground=50.0,
    heights=True,
):
    """A small analysis: pressure levels, three hours, 9 x 11 points."""
    units, names = units or {}, names or {}
    levels = LEVELS[::-1] if reverse else LEVELS
    hour, hpa, lat, lon = np.meshgrid(HOURS, levels, LAT, LON, indexing="ij")
    fields = {
        "air_temperature": ("K", temperature(hour, hpa, lat, lon)),
        "specific_humidity": ("kg kg-1", 0.008 * (hpa / 1000.0) ** 3 + 0.0 * hour),
        "eastward_wind": ("m s-1", 30.0 - 0.02 * hpa + 0.1 * (lon + 122.0)),
        "northward_wind": ("m s-1", 3.0 + 0.0 * hpa),
    }
    if heights:
        fields["geopotential_height"] = ("m", 8000.0 * np.log(1000.0 / hpa) + 100.0)
    with nc.Dataset(path, "w", format=form) as data:
        for name, values in (("time", HOURS), ("level", levels), ("latitude", LAT), ("longitude", LON)):
            data.createDimension(name, values.size)
            data.createVariable(name, "f8", (name,))[:] = values
        data["time"].setncatts({"standard_name": "time", "units": "hours since 2026-11-03 00:00:00"})
        data["level"].setncatts({"standard_name": "air_pressure", "units": "hPa", "positive": "down"})
        data["latitude"].setncatts({"standard_name": "latitude", "units": "degrees_north"})
        data["longitude"].setncatts({"standard_name": "longitude", "units": "degrees_east"})
        for key, (unit, values) in fields.items():
            if key in without:
                continue
            one = data.createVariable(key[:6], "f8", ("time", "level", "latitude", "longitude"), fill_value=-9999.0)
            one.setncatts({"standard_name": names.get(key, key), "units": units.get(key, unit)})
            one[:] = values
        if surface:
            one = data.createVariable("sp", "f8", ("time", "latitude", "longitude"))
            one.setncatts({"standard_name": "surface_air_pressure", "units": "Pa"})
            one[:] = surface
            one = data.createVariable("zs", "f8", ("latitude", "longitude"))
            one.setncatts({"standard_name": "surface_altitude", "units": "m"})
            one[:] = ground
    return path


NOON = datetime(2026, 11, 3, 11, 30, tzinfo=UTC)
PLACE = {"longitude": -122.1, "latitude": 47.3, "time": NOON}


@pytest.mark.parametrize("form", ["NETCDF4", "NETCDF3_CLASSIC", "NETCDF3_64BIT_OFFSET"])
@pytest.mark.parametrize("reverse", [False, True])
def test_nearest_column(tmp_path, form, reverse):
    """The nearest point and hour, levels in any order, in each form of the file."""
    levels = read_model_column(write(tmp_path / "m.nc", form=form, reverse=reverse), **PLACE)
    order = np.argsort(-levels.pressure)
    np.testing.assert_allclose(levels.pressure[order], LEVELS * 100.0)
    np.testing.assert_allclose(levels.temperature[order], temperature(12.0, LEVELS, 47.5, -122.0))
    assert levels.observed == datetime(2026, 11, 3, 12, tzinfo=UTC)


def test_bilinear_column_of_linear_fields_is_exact(tmp_path):
    """Linear fields: the value at the place itself."""
    levels = read_model_column(write(tmp_path / "m.nc"), **PLACE, method="bilinear")
    np.testing.assert_allclose(levels.temperature, temperature(12.0, LEVELS, 47.3, -122.1), rtol=1e-12)
    east = -levels.wind_speed * np.sin(levels.wind_from)
    np.testing.assert_allclose(east, 30.0 - 0.02 * LEVELS + 0.1 * -0.1, rtol=1e-9)


def test_becomes_a_column_above_its_ground(tmp_path):
    """Surface at 980 hPa: 1000 hPa is left out, and the humidity comes back as specific humidity."""
    sounding = sounding_from_levels(read_model_column(write(tmp_path / "m.nc", surface=98000.0, ground=200.0), **PLACE))
    np.testing.assert_allclose(sounding.pressure, LEVELS[1:] * 100.0)
    from orolift.air.humidity import mixing_ratio_from_dew_point

    ratio = mixing_ratio_from_dew_point(sounding.pressure, sounding.dew_point)
    expected = mixing_ratio_from_specific_humidity(0.008 * (LEVELS[1:] / 1000.0) ** 3)
    cold = sounding.dew_point >= sounding.temperature + 0.499  # the file's water is above saturation there: clipped
    np.testing.assert_allclose(ratio[~cold], expected[~cold], rtol=1e-9)
    assert sounding.ground == pytest.approx(8000.0 * np.log(1000 / 925) + 100.0)


def test_ground_from_surface_pressure(tmp_path):
    """Without heights the lowest level stands above the model's ground by the hypsometric equation."""
    sounding = sounding_from_levels(
        read_model_column(write(tmp_path / "m.nc", heights=False, surface=98000.0, ground=200.0), **PLACE)
    )
    t = float(temperature(12.0, 925.0, 47.5, -122.0))
    assert sounding.ground == pytest.approx(200.0 + 287.05 * t / 9.80665 * np.log(980 / 925), abs=0.1)


@pytest.mark.parametrize(
    ("key", "unit", "factor", "offset"),
    [
        ("air_temperature", "degC", 1.0, -273.15),
        ("eastward_wind", "knot", 3600.0 / 1852.0, 0.0),
        ("specific_humidity", "g kg-1", 1000.0, 0.0),
        ("geopotential_height", "km", 0.001, 0.0),
    ],
)
def test_units_are_converted(tmp_path, key, unit, factor, offset):
    """The same column in other units."""
    right = read_model_column(write(tmp_path / "m.nc"), **PLACE)
    path = write(tmp_path / "u.nc", units={key: unit})
    with nc.Dataset(path, "a") as data:
        data[key[:6]][:] = data[key[:6]][:] * factor + offset
    other = read_model_column(path, **PLACE)
    for field in ("temperature", "dew_point", "wind_speed", "height"):
        np.testing.assert_allclose(getattr(other, field), getattr(right, field), rtol=1e-9)


def test_height_levels_with_pressure_as_a_variable(tmp_path):
    """Altitude as coordinate, one column, one time, no time axis at all."""
    z = np.array([150.0, 800.0, 1500.0, 3000.0, 5600.0, 9000.0])
    path = tmp_path / "h.nc"
    with nc.Dataset(path, "w") as data:
        data.createDimension("z", z.size)
        for name, unit, values in (
            ("altitude", "m", z),
            ("air_pressure", "Pa", 1e5 * np.exp(-z / 8000.0)),
            ("air_temperature", "K", 290.0 - 0.0065 * z),
            ("relative_humidity", "%", np.full(z.size, 60.0)),
            ("eastward_wind", "m s-1", np.full(z.size, 10.0)),
            ("northward_wind", "m s-1", np.zeros(z.size)),
        ):
            one = data.createVariable("z" if name == "altitude" else name, "f4", ("z",))
            one.setncatts({"standard_name": name, "units": unit})
            one[:] = values
    sounding = sounding_from_levels(read_model_column(path))
    np.testing.assert_allclose(sounding.pressure, 1e5 * np.exp(-z / 8000.0), rtol=1e-6)
    np.testing.assert_allclose(sounding.relative_humidity, 0.6, rtol=1e-6)
    assert sounding.ground == 150.0
    assert any("no surface pressure" in finding.what for finding in sounding.findings)


def test_longitudes_of_another_turn(tmp_path):
    """237.9 east is 122.1 west; a globe that closes is interpolated across its seam."""
    same = read_model_column(write(tmp_path / "m.nc"), longitude=237.9, latitude=47.3, time=NOON)
    np.testing.assert_array_equal(same.temperature, read_model_column(tmp_path / "m.nc", **PLACE).temperature)


def test_curvilinear_grid_takes_the_nearest_point(tmp_path):
    """Longitude and latitude as maps: nearest on the sphere; bilinear is refused."""
    path = tmp_path / "c.nc"
    j, i = np.mgrid[0:5, 0:6]
    lon, lat = -122.0 + 0.5 * i + 0.05 * j, 45.0 + 0.4 * j - 0.03 * i
    with nc.Dataset(path, "w") as data:
        for name, size in (("y", 5), ("x", 6), ("p", LEVELS.size)):
            data.createDimension(name, size)
        data.createVariable("p", "f8", ("p",))[:] = LEVELS
        data["p"].setncatts({"standard_name": "air_pressure", "units": "hPa"})
        for name, values, unit in (("longitude", lon, "degrees_east"), ("latitude", lat, "degrees_north")):
            data.createVariable(name, "f8", ("y", "x"))[:] = values
            data[name].setncatts({"standard_name": name, "units": unit})
        for name, unit, base in (("air_temperature", "K", 270.0), ("eastward_wind", "m s-1", 5.0),
                                 ("northward_wind", "m s-1", 1.0), ("relative_humidity", "1", 0.5)):  # fmt: skip
            data.createVariable(name, "f8", ("p", "y", "x"))[:] = base + (
                10 * j + i if name == "air_temperature" else 0 * i
            )
            data[name].setncatts({"standard_name": name, "units": unit})
    found = read_model_column(path, longitude=-120.37, latitude=46.1)
    distance = np.hypot((lon + 120.37) * np.cos(np.radians(46.1)), lat - 46.1)
    nearest = np.unravel_index(np.argmin(distance), distance.shape)
    np.testing.assert_allclose(found.temperature, 270.0 + 10 * nearest[0] + nearest[1])
    with pytest.raises(DataFileError, match='are maps, not axes; use method = "nearest"'):
        read_model_column(path, longitude=-120.37, latitude=46.1, method="bilinear")
    with pytest.raises(DataFileError, match="degrees from the nearest grid point"):
        read_model_column(path, longitude=10.0, latitude=46.1)


@pytest.mark.parametrize(
    ("options", "place", "message"),
    [
        ({}, {"time": NOON}, r"holds 99 columns; give longitude and latitude in model_at"),
        ({}, {"longitude": -122.0, "latitude": 47.0}, "holds 3 times; give valid_time"),
        ({}, PLACE | {"longitude": 20.0}, "longitude 20 lies off the grid"),
        ({}, PLACE | {"latitude": 10.0}, "latitude 10 lies off the grid, which reaches from 45 to 49"),
        ({"without": ("specific_humidity",)}, PLACE, "no humidity .*It holds: air_pressure, air_temperature"),
        ({"without": ("air_temperature",)}, PLACE, "no variable with the CF standard_name air_temperature"),
        ({"names": {"eastward_wind": "x_wind"}}, PLACE, r"eastward_wind. Winds along a rotated grid .*are not turned"),
        ({"units": {"air_temperature": "furlong"}}, PLACE, "unit 'furlong' of a temperature is not known. Known: K"),
        (
            {"units": {"air_temperature": "degC"}},
            PLACE,
            "values lie outside 160 to 335 in SI units.*Is its unit 'degC' right",
        ),
    ],
)
def test_what_is_missing_or_wrong_is_said(tmp_path, options, place, message):
    """Place, time, quantities and units."""
    with pytest.raises(DataFileError, match=message):
        read_model_column(write(tmp_path / "m.nc", **options), **place)


def test_without_the_library_the_extra_is_named(tmp_path, monkeypatch):
    """The base installation has no netCDF4."""
    path = write(tmp_path / "m.nc")
    monkeypatch.setitem(sys.modules, "netCDF4", None)
    with pytest.raises(
        MissingExtraError, match=r"needs netCDF4. Install the extra 'netcdf': pip install 'orolift\[netcdf\]'"
    ):
        read_model_column(path, **PLACE)


def test_what_is_no_netcdf_is_refused(tmp_path):
    """Text, and a file cut short."""
    path = tmp_path / "t.nc"
    path.write_text("pressure,temperature\n1000,15\n")
    with pytest.raises(DataFileError, match="cannot be read as NetCDF"):
        read_model_column(path)
    path.write_bytes(write(tmp_path / "m.nc").read_bytes()[:3000])
    with pytest.raises(DataFileError, match=r"t.nc cannot be (read as NetCDF|used)"):
        read_model_column(path, **PLACE)


def test_missing_values_are_left_out_of_the_mean():
    """A corner under the model's ground has no value: the others make the mean, by their shares."""
    value = mixed([(0.25, np.array([1.0])), (0.25, np.array([np.nan])), (0.5, np.array([4.0]))])
    np.testing.assert_allclose(value, [(0.25 + 2.0) / 0.75])
    assert np.isnan(mixed([(1.0, np.array([np.nan]))])[0])


def test_units_by_their_definitions():
    """Fahrenheit, millibar, geopotential: the definitions (NIST SP 811; standard gravity)."""
    np.testing.assert_allclose(converted_from(np.array([50.0]), "degF", "temperature", "x"), [283.15])
    np.testing.assert_allclose(converted_from(np.array([850.0]), "millibar", "pressure", "x"), [85000.0])
    np.testing.assert_allclose(converted_from(np.array([9806.65]), "m2 s-2", "geopotential", "x"), [9806.65])
    np.testing.assert_allclose(converted_from(np.array([100.0]), "m", "geopotential", "x"), [980.665])
