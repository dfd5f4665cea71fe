"""A whole crossing against a published exercise, its limits and its laws."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.air.column import IncomingAir, interpolated
from orolift.air.hydrostatic import hydrostatic_pressure
from orolift.air.temperature import virtual_temperature
from orolift.crossing.crossing import Site, cross
from orolift.errors import NoCrossingError, OutOfRangeError
from orolift.terrain.ridge import ridge_transect


def column(pressure=95e3, temperature=287.15, vapour=0.008, wind=15.0, lapse=0.0065, ground=500.0) -> IncomingAir:
    """A plain hydrostatic column: constant lapse rate, vapour falling with a 2.5 km scale, wind from the west."""
    height = np.arange(ground, 20000.0, 50.0)
    t = np.maximum(temperature - lapse * (height - ground), 200.0)
    v = vapour * np.exp(-(height - ground) / 2500.0)
    p = hydrostatic_pressure(height, virtual_temperature(t, v), pressure)
    still = np.zeros_like(height)
    return IncomingAir(height, p, t, v, still, np.full_like(height, wind), still, ("measured",) * height.size)


def ridge_between(air: IncomingAir, foot: float, top: float):
    """A ridge whose foot and crest lie at two pressures of the column; wind from the west."""
    height = np.linspace(air.height[0], 9000.0, 200001)
    pressure = interpolated(air, height).pressure
    low, high = (float(np.interp(-p, -pressure, height)) for p in (foot, top))
    return ridge_transect([0.0, 40e3, 80e3], [low, high, low], bearing=math.pi / 2, spacing=160.0)


def exercise(removed_share):
    """Wallace and Hobbs (2006), exercise 3.10: 950 hPa, 14 degC, 8 g/kg, over 700 hPa and back, liquid only."""
    air = column()
    return cross(
        ridge_between(air, 95e3, 70e3), air, (Site("foot", 80e3),), removed_share=removed_share, freezing=False
    )


def test_wallace_and_hobbs_partial_rain_out():
    """70 % of the condensate rains out.

    Wallace and Hobbs (2006), Atmospheric Science, 2nd ed., exercise 3.10 (statement and answers from memory,
    recomputed with reference libraries): 20 degC and 5.7 g/kg at the end, 3.3 g/kg condensed, cloud gone at
    760 hPa, condensation level near 890 hPa. Tolerances: the answers are read off a chart.
    """
    done = exercise(0.7)
    site = done.lee[0]
    assert site.temperature - 273.15 == pytest.approx(20.0, abs=0.3)
    assert site.mixing_ratio == pytest.approx(5.7e-3, abs=0.1e-3)
    assert done.condensed == pytest.approx(3.3e-3, abs=0.05e-3)
    assert done.removed == pytest.approx(0.7 * 3.3e-3, abs=0.05e-3)
    pressure = interpolated(done.incoming, np.array([done.cloud_base, done.cloud_end])).pressure
    assert pressure[0] == pytest.approx(890.7e2, abs=1.5e2)
    assert pressure[1] == pytest.approx(760e2, abs=5e2)


def test_nothing_removed_returns_exactly():
    """14 degC and 8 g/kg come back to rounding (the closure of the same exercise)."""
    site = exercise(0.0).lee[0]
    assert site.temperature == pytest.approx(287.15, abs=1e-9)
    assert site.mixing_ratio == pytest.approx(0.008, abs=1e-14)


def test_everything_removed():
    """22.54 degC, 4.69 g/kg and 26.0 % at the end: recomputed with reference libraries, all condensate removed."""
    site = exercise(1.0).lee[0]
    assert site.temperature - 273.15 == pytest.approx(22.54, abs=0.15)
    assert site.mixing_ratio == pytest.approx(4.69e-3, abs=0.05e-3)
    assert site.relative_humidity == pytest.approx(0.26, abs=0.005)
    assert site.popular_picture == pytest.approx(site.temperature, abs=0.02)


def test_dry_lapse_and_saturated_lapse():
    """Dry air cools about 10 degC per 1000 m, saturated air 4 to 9 (common practice, no published source)."""
    air = column(temperature=293.15, vapour=0.010, ground=0.0, pressure=101325.0)
    done = cross(ridge_transect([0.0, 40e3, 80e3], [0.0, 3000.0, 0.0], bearing=math.pi / 2), air, removed_share=1.0)
    z, t, cloudy = done.height[:, 0], done.air.temperature[:, 0], done.air.vapour[:, 0] < 0.0099999
    up = slice(0, int(np.argmax(z)))
    dry = ~cloudy[up]
    assert 1000.0 * np.ptp(t[up][dry]) / np.ptp(z[up][dry]) == pytest.approx(10.0, abs=0.4)
    wet_rate = 1000.0 * np.ptp(t[up][~dry]) / np.ptp(z[up][~dry])
    assert 4.0 < wet_rate < 9.0


@pytest.mark.parametrize("spread", [2.0, 5.0, 10.0])
def test_cloud_base_by_the_spread_rule(spread):
    """About 125 m a degree of dew-point spread (common practice, no published source), within 4 %."""
    from orolift.air.humidity import mixing_ratio_from_dew_point

    vapour = float(mixing_ratio_from_dew_point(101325.0, 290.0 - spread))
    air = column(temperature=290.0, vapour=vapour, ground=0.0, pressure=101325.0)
    done = cross(ridge_transect([0.0, 40e3, 80e3], [0.0, 3000.0, 0.0], bearing=math.pi / 2), air)
    assert done.cloud_base == pytest.approx(125.0 * spread, rel=0.04)


@settings(deadline=None, max_examples=20)
@given(share=st.floats(0.0, 0.95), more=st.floats(0.01, 0.05))
def test_more_rain_makes_a_warmer_and_drier_lee(share, more):
    """Monotone: the more condensate leaves, the warmer and drier the lee."""
    wetter, drier = exercise(share).lee[0], exercise(share + more).lee[0]
    assert drier.temperature > wetter.temperature
    assert drier.mixing_ratio < wetter.mixing_ratio


def test_dry_air_crosses_unchanged():
    """Without cloud nothing happens: no base, nothing condensed, the air is as before."""
    air = column(vapour=0.001)
    done = cross(ridge_between(air, 95e3, 85e3), air)
    assert done.cloud_base is None
    assert done.cloud_end is None
    assert done.condensed == 0.0
    assert done.lee[0].temperature == pytest.approx(287.15, abs=1e-9)


def test_a_site_on_a_bench_gets_its_own_height():
    """The air is moved to the height given for the site, on at the dry rate."""
    air = column(vapour=0.001)
    low, high = cross(ridge_between(air, 95e3, 85e3), air, (Site("foot", 80e3), Site("bench", 80e3, 700.0))).lee
    assert low.temperature - high.temperature == pytest.approx((700.0 - 500.0) * 9.80665 / 1005.7, rel=0.01)
    assert [site.side for site in (low, high)] == ["lee", "lee"]


@pytest.mark.parametrize("wind", [-10.0, 0.0, 1.9])
def test_no_crossing_is_said(wind):
    """Wind away from the range, none, or too little: refused with the reason."""
    air = column(wind=wind)
    with pytest.raises(NoCrossingError, match=r"does not cross.*more than 2 m/s is needed.*through passes"):
        cross(ridge_between(air, 95e3, 80e3), air)


def test_a_share_is_no_percentage():
    """70 for 0.7 is refused with a hint."""
    air = column()
    with pytest.raises(OutOfRangeError, match="It is a share, not a percentage"):
        cross(ridge_between(air, 95e3, 80e3), air, removed_share=70.0)
