"""The way of the lowest air: its time, and the shade of the crossing's own raining cloud on it."""

import numpy as np
import pytest

from orolift.air.column_build import air_from_station
from orolift.air.humidity import mixing_ratio_from_relative_humidity
from orolift.crossing import solve as solve_module
from orolift.crossing.crossing import cross
from orolift.crossing.result import Site, When
from orolift.crossing.way import cloud_water, cover_on_the_way
from orolift.terrain.ridge import ridge_transect

RIDGE = ridge_transect([0.0, 25e3, 45e3, 60e3], [40.0, 1850.0, 300.0, 210.0], spacing=600.0, bearing=np.pi / 2)
AFTERNOON, NIGHT = (When(time, -121.0, -46.9) for time in (1_793_739_600.0, 1_793_782_800.0))  # 13 and 1 h there
LEE = Site("foot", 59e3)


def air(humidity):
    """Air of a station in a west wind."""
    vapour = float(mixing_ratio_from_relative_humidity(1.01e5, 285.0, humidity))
    return air_from_station(40.0, 1.01e5, 285.0, vapour, 16.0, 1.5 * np.pi)


def heating(monkeypatch, humidity, when):
    """Warming by the ground at the lee foot with the cloud's shade, without it, and the most cover on the line."""
    seen = []
    with monkeypatch.context() as patch:
        plain = solve_module.overcast

        def spy(*given):
            seen.append(plain(*given))
            return seen[-1]

        patch.setattr(solve_module, "overcast", spy)
        shaded = cross(RIDGE, air(humidity), (LEE,), when=when, streamlines=30)
        patch.setattr(solve_module, "overcast", lambda *given: np.zeros_like(plain(*given)))
        clear = cross(RIDGE, air(humidity), (LEE,), when=when, streamlines=30)
    return shaded.lee[0].parts.surface_heating, clear.lee[0].parts.surface_heating, float(seen[0][0].max())


def test_raining_cloud_takes_sun_by_day_and_keeps_warmth_by_night(monkeypatch):
    """Less warming in the afternoon, less cooling at night."""
    shaded, clear, cover = heating(monkeypatch, 0.95, AFTERNOON)
    assert cover == 1.0
    assert 0.0 < shaded < clear - 0.1
    shaded, clear, _ = heating(monkeypatch, 0.95, NIGHT)
    assert clear + 0.02 < shaded < 0.0


def test_a_crossing_without_cloud_is_not_shaded(monkeypatch):
    """Dry air: the same to the last digit."""
    shaded, clear, cover = heating(monkeypatch, 0.2, AFTERNOON)
    assert cover == 0.0
    assert shaded == clear > 0.0


def test_cloud_water_of_an_even_cloud():
    """1 g per kg over 100 hPa: 10000 Pa / 9.80665 m s-2 times 0.001."""
    pressure = np.linspace(9e4, 8e4, 11)
    assert float(cloud_water(pressure, np.full(11, 1e-3))) == pytest.approx(1.0197, abs=1e-4)


def test_cover_is_read_off_where_the_air_was():
    """Cloud over the middle third of a way; each member by its own; only the last day of a long way counts."""
    times = np.array([np.linspace(0.0, 9000.0, 91), np.linspace(0.0, 9e5, 91)])
    cover = np.where(np.abs(np.arange(91) - 45) <= 15, 1.0, 0.0) * np.ones((2, 1))
    found = cover_on_the_way(times, cover, times[:, -1])
    assert found.shape == (2, 145)
    assert found[0].mean() == pytest.approx(1.0 / 3.0, abs=0.02)
    assert found[0, 0] == found[0, -1] == 0.0
    assert found[0, 72] == 1.0
    assert not found[1].any()
    assert cover_on_the_way(times, cover, times[:, 45:46])[1].all()
