"""A small ridge in moist and in stable air."""

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
