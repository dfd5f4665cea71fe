"""A small ridge in moist and in stable air."""

import math
from dataclasses import replace

import numpy as np
import pytest

from orolift.air.column_build import air_from_station
from orolift.air.humidity import mixing_ratio_from_relative_humidity
from orolift.crossing.result import Site
from orolift.crossing.settings import Settings
from orolift.crossing.situation import Situation, crossing_of
from orolift.terrain.ridge import ridge_transect

RIDGE = (np.array([0.0, 40e3, 60e3, 75e3, 120e3]), np.array([20.0, 60.0, 1500.0, 200.0, 180.0]))


def situation(wind, lapse_rate, sites, *, pressure=100400.0, humidity=0.75, settings=None):
    """Wind straight across the ridge from the west, one lapse rate."""
    transect = ridge_transect(*RIDGE, bearing=np.pi / 2)
    vapour = float(mixing_ratio_from_relative_humidity(pressure, 285.0, humidity))
    air = air_from_station(20.0, pressure, 285.0, vapour, wind, 1.5 * np.pi, lapse_rate=lapse_rate)
    return Situation(transect, air, sites, settings or Settings())


@pytest.fixture(scope="session")
def moist():
    """Rain on the windward slope; a site on either side."""
    return situation(16.0, 6.5e-3, (Site("Before", 50e3), Site("Behind", 78e3)))


@pytest.fixture(scope="session")
def stable():
    """Air that is blocked deep, and a site that lies in it."""
    return situation(5.0, 2.0e-3, (Site("Before", 44e3, 300.0),), humidity=0.4)


@pytest.fixture(scope="session")
def moist_crossing(moist):
    return crossing_of(moist)


@pytest.fixture(scope="session")
def stable_crossing(stable):
    return crossing_of(stable)


@pytest.fixture(scope="session")
def with_pressure(moist):
    """The moist situation at another pressure."""
    return lambda pressure: replace(moist, incoming=situation(16.0, 6.5e-3, (), pressure=pressure).incoming)


@pytest.fixture(scope="session")
def calm():
    """Wind across the crest that a few members do not have."""
    return situation(4.0, 6.5e-3, (Site("Behind", 78e3),))


STRAIGHT_RIDGE = """
[terrain]
ridge_km_m = [[0, 40], [30, 1250], [60, 40]]
[incoming]
wind_from_deg = 240
station = { elevation_m = 40, temperature_c = 14.5, dew_point_c = 7.0, pressure_hpa = 1004.0, wind_kt = 30 }
[[site]]
name = "Tarn"
distance_km = 50
[[site]]
name = "Kell"
distance_km = 10
"""


@pytest.fixture(scope="session")
def straight_ridge(tmp_path_factory):
    """A case: a symmetric ridge, the wind straight across it, a site in the lee and one as far from the other end."""
    file = tmp_path_factory.mktemp("ridge") / "case.toml"
    file.write_text(STRAIGHT_RIDGE)
    return file


@pytest.fixture(scope="session")
def circular_hill(tmp_path_factory):
    """A case: a circular hill, sites on three sides of it."""
    return hill(tmp_path_factory.mktemp("hill"))


def hill(folder, cell=1000.0, half=100):
    """A circular hill of 1200 m on the central meridian of its zone, and sites 25 km from its middle all round."""
    import rasterio
    from rasterio.transform import from_origin

    east, north = 500e3, 5000e3
    across = (np.arange(2 * half) - half + 0.5) * cell
    ground = 1200.0 * np.exp(-(across**2 + across[:, np.newaxis] ** 2) / (2.0 * 10e3**2)) + 10.0
    place = from_origin(east - half * cell, north + half * cell, cell, cell)
    shape = {"width": 2 * half, "height": 2 * half, "count": 1, "dtype": "float32", "crs": "EPSG:32633"}
    with rasterio.open(folder / "hill.tif", "w", driver="GTiff", transform=place, **shape) as out:
        out.write(ground.astype(np.float32), 1)
    sites = "".join(
        f'[[site]]\nname = "{bearing}"\neasting_m = {east + 25e3 * math.sin(math.radians(bearing))}\n'
        f"northing_m = {north + 25e3 * math.cos(math.radians(bearing))}\nelevation_m = 60\n"
        for bearing in (0, 90, 225)
    )
    (folder / "case.toml").write_text(
        f"""
[terrain]
elevation_file = "hill.tif"
[transect]
through = {{ easting_m = {east}, northing_m = {north} }}
upwind_km = 60
downwind_km = 30
swath_km = 0
[incoming]
wind_from_deg = 270
station = {{ elevation_m = 10, temperature_c = 14, dew_point_c = 6, pressure_hpa = 1010, wind_kt = 30 }}
{sites}"""
    )
    return folder / "case.toml"
