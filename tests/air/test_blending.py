"""A surface report blended into a column: met at the station, gone at the top, hydrostatic all through."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.air.blending import SurfaceValues, blended_with_surface
from orolift.air.column import interpolated
from orolift.air.column_build import air_from_levels
from orolift.air.hydrostatic import hydrostatic_height
from orolift.air.temperature import potential_temperature, virtual_temperature
from orolift.errors import IncomingAirError, OutOfRangeError


def stale():
    """An invented morning sounding over 300 m."""
    p = np.array([980e2, 965e2, 940e2, 900e2, 850e2, 780e2, 700e2, 500e2, 300e2])
    t = np.array([281.0, 283.0, 282.5, 280.5, 278.0, 274.0, 269.0, 252.0, 228.0])
    r = np.array([5.0, 5.0, 4.8, 4.5, 4.0, 3.0, 2.0, 0.6, 0.1]) * 1e-3
    return air_from_levels(None, p, t, r, np.linspace(3, 40, 9), np.zeros(9), elevation=300.0)


@settings(max_examples=40)
@given(st.floats(-12.0, 15.0), st.floats(1e-3, 9e-3), st.floats(-900.0, 900.0), st.floats(250.0, 700.0))
def test_report_is_met_and_the_free_air_kept(change, moisture, pressure_change, elevation):
    """At the station its temperature, water and pressure; above the top temperature and vapour as before."""
    air = stale()
    here = interpolated(air, elevation)
    report = SurfaceValues(
        elevation, float(here.temperature) + change, moisture, float(here.pressure) + pressure_change, 6.0, -2.0
    )
    blend = blended_with_surface(air, report)
    at = interpolated(blend.air, elevation)
    assert float(at.temperature) == pytest.approx(report.temperature, abs=1e-9)
    assert float(at.vapour + at.cloud) == pytest.approx(moisture, rel=1e-9)
    assert float(at.pressure) == pytest.approx(report.pressure, rel=1e-10)
    assert (float(at.eastward_wind), float(at.northward_wind)) == pytest.approx((6.0, -2.0))
    high = np.array([max(blend.top, elevation + 200.0) + 1.0, 6000.0, 15000.0])
    before, after = interpolated(air, high), interpolated(blend.air, high)
    np.testing.assert_allclose(after.temperature, before.temperature, rtol=1e-12)
    # Shifted pressure changes saturation, so that cloud may take some: the sum of both is kept.
    np.testing.assert_allclose(after.vapour + after.cloud, before.vapour + before.cloud, rtol=1e-9)
    np.testing.assert_allclose(after.eastward_wind, before.eastward_wind, rtol=1e-12)


@settings(max_examples=20)
@given(st.floats(-10.0, 12.0))
def test_blend_is_hydrostatic(change):
    """The law: heights follow from pressure and virtual temperature."""
    air = stale()
    out = blended_with_surface(air, SurfaceValues(300.0, float(air.temperature[0]) + change, 0.005, 97500.0)).air
    tv = virtual_temperature(out.temperature, out.vapour, out.cloud)
    np.testing.assert_allclose(hydrostatic_height(out.pressure, tv, out.height[0]), out.height, atol=1e-6)


def test_warm_report_mixes_the_layer():
    """Afternoon: potential temperature of the report up to where the column is as warm, unchanged above."""
    blend = blended_with_surface(stale(), SurfaceValues(300.0, 290.0, 0.005))
    inside = blend.air.height < blend.top
    theta = potential_temperature(blend.air.pressure, blend.air.temperature)
    p_here = float(blend.air.pressure[0])
    np.testing.assert_allclose(theta[inside], potential_temperature(p_here, 290.0), atol=0.3)  # moisture shifts the top
    assert 800.0 < blend.top < 3300.0
    assert "mixed with the air above" in blend.air.notes[-1]


def test_cold_report_stays_near_the_ground():
    """5 K colder: 10 K per km makes it 500 m deep, fading evenly."""
    air = stale()
    blend = blended_with_surface(air, SurfaceValues(300.0, float(air.temperature[0]) - 5.0, 0.004))
    assert blend.top == pytest.approx(800.0)
    middle = float(interpolated(blend.air, 550.0).temperature - interpolated(air, 550.0).temperature)
    assert middle == pytest.approx(-2.5, abs=0.2)  # levels between are linear


def test_same_values_change_nothing():
    """A report that says what the column says."""
    air = stale()
    blend = blended_with_surface(air, SurfaceValues(300.0, float(air.temperature[0]), float(air.vapour[0])))
    same = np.isin(blend.air.height, air.height)
    np.testing.assert_allclose(blend.air.temperature[same], air.temperature, atol=1e-9)
    assert blend.pressure_change == 0.0


def test_levels_say_where_they_come_from():
    """Below the top blended, above measured."""
    blend = blended_with_surface(stale(), SurfaceValues(300.0, 276.0, 0.004))
    kinds = np.array(blend.air.origin)
    assert set(kinds[blend.air.height < blend.top]) == {"surface report blended in"}
    assert "surface report blended in" not in kinds[blend.air.height >= blend.top]


def test_far_stations_and_odd_values_are_refused():
    """A summit station 1500 m up is not a surface report of this ground."""
    with pytest.raises(
        IncomingAirError, match=r"station at 1900 m is too far from the ground of the incoming air at 300"
    ):
        blended_with_surface(stale(), SurfaceValues(1900.0, 275.0, 0.003))
    with pytest.raises(OutOfRangeError, match="kelvin"):
        blended_with_surface(stale(), SurfaceValues(300.0, 15.0, 0.003))
