"""Air near the ground along a line is that of sites put there."""

from dataclasses import replace

import numpy as np
import pytest

from orolift.air.column import IncomingAir
from orolift.air.hydrostatic import hydrostatic_pressure
from orolift.air.saturation import saturation_mixing_ratio
from orolift.air.temperature import virtual_temperature
from orolift.crossing.crossing import cross
from orolift.crossing.ground_values import ground_values
from orolift.crossing.pool import Lee
from orolift.crossing.result import Site, When
from orolift.crossing.situation import Situation, crossing_of
from orolift.terrain.ridge import ridge_transect

RIDGE = ridge_transect([0.0, 25e3, 45e3, 60e3], [40.0, 1850.0, 300.0, 210.0], spacing=400.0, bearing=np.pi / 2)
WHEN = When(1_793_739_600.0, -121.0, -46.9)


def column(wind=16.0, humidity=0.8):
    """A plain hydrostatic column, wind from the west."""
    height = np.arange(40.0, 17000.0, 200.0)
    t = np.maximum(285.0 - 0.006 * (height - 40.0), 210.0)
    pressure = 101000.0 * np.exp(-height / 8000.0)
    vapour = humidity * np.exp(-height / 9000.0) * saturation_mixing_ratio(pressure, t)
    pressure = hydrostatic_pressure(height, virtual_temperature(t, vapour), 101000.0)
    vapour = humidity * np.exp(-height / 9000.0) * saturation_mixing_ratio(pressure, t)
    still = np.zeros_like(height)
    return IncomingAir(height, pressure, t, vapour, still, still + wind, still, ("measured",) * height.size)


def situations():
    """Everything flows over; much is blocked and goes round; cold air stays in the lee."""
    moist = column()
    return {
        "over": Situation(RIDGE, moist, when=WHEN),
        "blocked": Situation(RIDGE, column(wind=6.0), when=WHEN),
        "pool": Situation(RIDGE, moist, lee=Lee(temperature=270.0)),
    }


@pytest.fixture(scope="module", params=["over", "blocked", "pool"])
def worked(request):
    """A situation, its values along the line, and the crossing with a site at many of them."""
    situation = situations()[request.param]
    values = ground_values(situation, streamlines=30)
    places = [(i, q) for i in range(3, values.distance.size - 3, 9) for q in (1, 3, 5, 9)]
    sites = (
        Site("foot", 59e3),
        *(Site(f"{i} {q}", float(values.distance[i]), float(values.ground[i] + values.level[q])) for i, q in places),
    )
    crossing = cross(
        situation.transect,
        situation.incoming,
        sites,
        lee=situation.lee,
        when=situation.when,
        streamlines=30,
    )
    return values, places, crossing.lee[1:], request.param


def test_temperature_and_vapour_are_those_of_sites(worked):
    """Two ways to the same air; 0.05 K is left for what is iterated."""
    values, places, sites, _ = worked
    seen = 0
    for (i, q), site in zip(places, sites, strict=True):
        if site.in_blocked_air or site.in_pool:
            continue
        seen += 1
        assert values.temperature[i, q] == pytest.approx(site.temperature, abs=0.05), site
        assert values.vapour[i, q] == pytest.approx(site.mixing_ratio, rel=0.01)
        assert values.wind_10m[i] == pytest.approx(site.wind.at_10m, rel=0.02, abs=0.02)
    assert seen > 20


def test_pools_and_blocked_air_are_known(worked):
    """Their tops, and the air of the pool, as sites in them have it."""
    values, places, sites, kind = worked
    blocked = [site for site in sites if site.in_blocked_air]
    pooled = [(place, site) for place, site in zip(places, sites, strict=True) if site.in_pool]
    assert blocked or kind != "blocked"
    assert all(site.elevation < values.blocked_top for site in blocked)
    assert bool(pooled) == (kind == "pool")
    for (i, q), site in pooled:
        assert values.pool_temperature[i, q] == pytest.approx(site.temperature, abs=0.05)
        assert site.elevation < values.pool_top


def test_no_cloud_in_dry_air():
    """No water, no cloud; with it the base lies over the ground."""
    dry = ground_values(Situation(RIDGE, column(humidity=0.05)), streamlines=30)
    assert np.isinf(dry.cloud_base).all()
    assert not dry.cloud_water.any()
    wet = ground_values(Situation(RIDGE, column(humidity=0.95)), streamlines=30)
    cloudy = np.isfinite(wet.cloud_base)
    assert cloudy.any()
    assert (wet.cloud_base[cloudy] >= wet.lowest[cloudy] - 1e-6).all()
    assert (wet.cloud_water[cloudy] > 0.0).all()


def test_the_first_site_says_which_crest_counts():
    """As in a crossing."""
    two = ridge_transect([0.0, 15e3, 30e3, 45e3, 60e3], [0.0, 1200.0, 200.0, 1700.0, 100.0], spacing=400.0)
    situation = Situation(two, column(), sites=(Site("valley", 30e3),))
    crest = ground_values(situation, streamlines=30).crest
    assert crest == crossing_of(situation).features.crest == pytest.approx(1200.0, abs=20.0)
    assert ground_values(replace(situation, sites=()), streamlines=30).crest == pytest.approx(1700.0, abs=20.0)
