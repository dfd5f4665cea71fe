"""Difficult air and difficult ground: worked out, or refused with a reason, and said."""

import math

import numpy as np
import pytest

from orolift.air.column import IncomingAir
from orolift.air.hydrostatic import hydrostatic_pressure
from orolift.air.saturation import saturation_mixing_ratio
from orolift.air.temperature import virtual_temperature
from orolift.crossing.crossing import cross
from orolift.crossing.result import Site, When
from orolift.terrain.range_normal import RangeNormal
from orolift.terrain.ridge import ridge_transect


def air_of(temperature, wind, humidity=0.6, ground=200.0):
    """Column of a temperature and a wind profile, functions of height above ground; wind from the west."""
    height = np.arange(ground, 20000.0, 50.0)
    above = height - ground
    t = np.maximum(np.broadcast_to(temperature(above), height.shape), 200.0)
    first = hydrostatic_pressure(height, t, 98e3)
    vapour = humidity * np.minimum(saturation_mixing_ratio(first, t), 0.02) * np.exp(-above / 3000.0)
    pressure = hydrostatic_pressure(height, virtual_temperature(t, vapour), 98e3)
    u = np.broadcast_to(wind(above), height.shape).astype(float)
    still = np.zeros_like(height)
    return IncomingAir(height, pressure, t, vapour, still, u, still, ("measured",) * height.size)


def usual(above):
    """6 K per km from 287 K."""
    return 287.0 - 0.006 * above


def steady(above):
    """15 m/s at all heights."""
    return np.full_like(above, 15.0)


def line(*points):
    """Ridge of (km, m) points along the wind."""
    x, z = np.array(points, dtype=float).T
    return ridge_transect(x * 1e3, z, bearing=math.pi / 2)


RIDGE = line((0, 200), (40, 250), (60, 1700), (75, 500), (120, 300))
AIR = {
    "critical level above": air_of(usual, lambda z: np.where(z < 3500.0, 15.0, 15.0 - 0.01 * (z - 3500.0)).clip(-10.0)),
    "low-level jet": air_of(usual, lambda z: 10.0 + 15.0 * np.exp(-(((z - 800.0) / 300.0) ** 2))),
    "superadiabatic layer": air_of(
        lambda z: np.where(z < 300.0, 291.0 - 0.014 * z, 286.8 - 0.006 * (z - 300.0)), steady
    ),
    "isothermal deep column": air_of(lambda z: np.full_like(z, 270.0), steady),
    "strong inversion at the crest": air_of(lambda z: usual(z) + 9.0 * np.clip((z - 1400.0) / 200.0, 0.0, 1.0), steady),
    "counter-flow below the crest": air_of(usual, lambda z: np.where(z < 700.0, -3.0, 14.0)),
    "calm below the crest": air_of(usual, lambda z: np.where(z < 900.0, 0.0, 12.0)),
    "saturated throughout the barrier": air_of(usual, steady, humidity=1.0),
    "very dry": air_of(usual, steady, humidity=0.02),
    "gale": air_of(usual, lambda z: 30.0 + 0.002 * z),
}
GROUND = {
    "very narrow ridge": line((0, 100), (48, 120), (50, 900), (52, 120), (100, 100)),
    "very wide plateau": line((0, 0), (100, 100), (250, 2000), (550, 2000), (700, 100), (800, 0)),
    "two crests": line((0, 0), (30, 1500), (50, 600), (70, 1900), (90, 300), (120, 200)),
    "lee higher than upwind ground": line((0, 0), (40, 50), (60, 2000), (80, 1200), (120, 1100)),
    "lee lower than upwind ground": line((0, 900), (40, 950), (60, 2000), (80, 300), (120, 100)),
    "ridge touching the ends": line((0, 1000), (30, 1800), (60, 900)),
    "ridge lower than 100 m": line((0, 0), (40, 0), (50, 80), (60, 0), (100, 0)),
}


def sound(done):
    """Everything finite, nothing under ground, nothing crossing, the budget closed."""
    ground = np.interp(done.distance, done.transect.distance, done.transect.elevation)
    assert (done.height[:, 0] >= ground - 1e-6).all()
    assert (np.diff(done.height, axis=1) > 0.0).all()
    for values in (done.air.temperature, done.air.vapour, done.wind, done.rain.rate, done.dew_point):
        assert np.isfinite(values).all()
    for site in done.lee:
        parts = site.parts
        total = parts.descent + parts.latent + parts.going_round + parts.mixing + parts.surface_heating + parts.pressure
        assert total == pytest.approx(site.warming, abs=1e-6)
        assert abs(site.warming) < 25.0
    return done


@pytest.mark.parametrize("name", AIR)
def test_difficult_air(name):
    """Every column is worked out."""
    done = sound(cross(RIDGE, AIR[name], (Site("lee", 90e3),)))
    said = " ".join(done.cautions)
    expected = {
        "critical level above": "waves do not pass",
        "counter-flow below the crest": "calm or moves away",
        "calm below the crest": "calm or moves away",
    }
    assert expected.get(name, "") in said


@pytest.mark.parametrize("name", GROUND)
def test_difficult_ground(name):
    """Every line is worked out, for its own lee foot."""
    air = air_of(usual, lambda z: 15.0 + 0.001 * z, ground=max(float(GROUND[name].elevation[0]), 0.0))
    done = sound(cross(GROUND[name], air, when=When(None, 0.0, 45.0)))
    if name == "ridge lower than 100 m":
        assert any("rises only 80 m" in text for text in done.cautions)
    if name == "very wide plateau":
        assert done.flow.rossby_number < 2.0


def test_the_highest_point_beyond_the_site():
    """A site between two crests gets the crest before it, not the higher one behind."""
    done = sound(cross(GROUND["two crests"], air_of(usual, steady, ground=0.0), (Site("between", 50e3),)))
    assert done.features.crest == pytest.approx(1500.0, abs=5.0)
    assert done.lee[0].side == "lee"


def test_oblique_wind_is_flagged_and_along_the_range_refused():
    """More than 45 degrees off the range normal is said; along the range does not cross."""
    from orolift.errors import NoCrossingError

    air = air_of(usual, steady)
    done = sound(cross(RIDGE, air, normal=RangeNormal(math.pi / 2 + math.radians(55.0), 0.9)))
    assert any("55 degrees off" in text for text in done.cautions)
    with pytest.raises(NoCrossingError, match="runs along the range, 85 degrees off"):
        cross(RIDGE, air, normal=RangeNormal(math.pi / 2 + math.radians(85.0), 0.9))
