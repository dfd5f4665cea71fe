"""Columns from station values and what is read off a column."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.air.column import (
    IncomingAir,
    column_vapour,
    extended_down,
    freezing_level,
    interpolated,
    vapour_flux,
    wet_bulb_zero_level,
    wind_component,
)
from orolift.air.column_build import air_from_levels, air_from_station
from orolift.air.column_change import with_values
from orolift.air.humidity import mixing_ratio_from_dew_point, relative_humidity_from_mixing_ratio
from orolift.air.hydrostatic import hydrostatic_height, hydrostatic_pressure, layer_mean_virtual_temperature
from orolift.air.saturation import saturation_mixing_ratio
from orolift.air.standard import standard_pressure
from orolift.air.temperature import virtual_temperature
from orolift.air.wet_bulb import wet_bulb_from_mixing_ratio
from orolift.constants import GRAVITY, R_DRY
from orolift.errors import IncomingAirError, OutOfRangeError

WEST = 1.5 * np.pi
EAST = 0.5 * np.pi


def station(**changes):
    """A mild, moist station near the sea with a westerly."""
    values = {
        "elevation": 40.0,
        "pressure": 100400.0,
        "temperature": 287.65,
        "mixing_ratio": float(mixing_ratio_from_dew_point(100400.0, 284.15)),
        "wind_speed": 12.0,
        "wind_from_direction": WEST,
    }
    return air_from_station(**(values | changes))


def column(height, temperature, *, vapour=0.0, ground_pressure=1e5, wind=10.0):
    """Hydrostatic column with given temperatures, by hand."""
    z, t = np.asarray(height, float), np.asarray(temperature, float)
    r = np.broadcast_to(vapour, t.shape).astype(float)
    p = hydrostatic_pressure(z, virtual_temperature(t, r), np.full(t.shape[:-1], ground_pressure))
    return IncomingAir(z, p, t, r, 0 * t, wind + 0 * t, 0 * t, ("measured",) * z.size)


class TestFromStation:
    """Assumptions above a station."""

    @pytest.mark.parametrize("lapse_rate", [0.005, 0.0065, 0.0098])
    def test_dry_pressure_is_that_of_a_constant_lapse(self, lapse_rate):
        """Closed form p0 (T/T0)^(g / R L); to rounding, because layers are exact for it."""
        air = station(mixing_ratio=0.0, lapse_rate=lapse_rate)
        below = (air.height <= 11000.0) & (air.temperature > 193.15)  # above, the column is isothermal
        expected = 100400.0 * (air.temperature / 287.65) ** (GRAVITY / (R_DRY * lapse_rate))
        np.testing.assert_allclose(air.pressure[below], expected[below], rtol=1e-12)

    def test_isothermal_dry_pressure_is_exponential(self):
        """Closed form p0 exp(-g z / R T)."""
        air = station(mixing_ratio=0.0, lapse_rate=0.0)
        expected = 100400.0 * np.exp(-GRAVITY * (air.height - 40.0) / (R_DRY * 287.65))
        np.testing.assert_allclose(air.pressure, expected, rtol=1e-12)

    def test_standard_station_gives_the_standard_atmosphere(self):
        """ICAO Doc 7488 to 20 km; rtol 1e-4: its gas constant differs from CODATA 2018 by 1.7e-5, 5e-5 at the top."""
        air = air_from_station(0.0, 101325.0, 288.15, 0.0, 5.0, 0.0)
        np.testing.assert_allclose(air.pressure, standard_pressure(air.height), rtol=1e-4)

    def test_moist_pressure_is_hydrostatic(self):
        """dp = -rho g dz over 200 m, density from the virtual temperature in the middle; rtol 1e-3 for the step."""
        air = station()
        density = air.pressure / (R_DRY * virtual_temperature(air.temperature, air.vapour))
        slope = (air.pressure[2:] - air.pressure[:-2]) / (air.height[2:] - air.height[:-2])
        np.testing.assert_allclose(slope, -density[1:-1] * GRAVITY, rtol=1e-3)

    def test_moist_air_is_lighter(self):
        """The same station with dry air has lower pressure aloft."""
        assert (
            interpolated(station(), 5000.0).pressure > interpolated(station(mixing_ratio=0.0), 5000.0).pressure + 50.0
        )

    def test_relative_humidity_follows_the_assumption(self):
        """Constant to 500 hPa, half way to 10 % at 350 hPa, 10 % from 200 hPa up (warm air: no ice in the way)."""
        air = station(mixing_ratio=float(mixing_ratio_from_dew_point(100400.0, 275.0)))
        humidity = relative_humidity_from_mixing_ratio(air.pressure, air.temperature, air.vapour)
        first = humidity[0]
        np.testing.assert_allclose(humidity[air.pressure >= 5e4], first, rtol=1e-9)
        middle = float(np.interp(-3.5e4, -air.pressure, humidity))
        np.testing.assert_allclose(middle, (first + 0.1) / 2, atol=2e-3)
        np.testing.assert_allclose(humidity[air.pressure <= 2e4], 0.1, rtol=1e-9)

    def test_drier_air_than_ten_percent_stays_as_it_is(self):
        """Humidity relaxes toward 10 % only from above."""
        air = station(mixing_ratio=0.0005)
        humidity = relative_humidity_from_mixing_ratio(air.pressure, air.temperature, air.vapour)
        np.testing.assert_allclose(humidity, humidity[0], rtol=1e-9)
        assert any("at all heights" in note for note in air.notes)

    @given(st.floats(240, 310), st.floats(0.05, 1.3), st.floats(0.003, 0.010), st.floats(7e4, 1.04e5), st.booleans())
    @settings(deadline=None, max_examples=60)
    def test_never_supersaturated(self, temperature, share, lapse_rate, pressure, freezing):
        """Whatever the station, vapour does not exceed saturation and only the station has cloud."""
        water = min(share * float(saturation_mixing_ratio(pressure, temperature)), 0.06)
        air = station(
            temperature=temperature, mixing_ratio=water, lapse_rate=lapse_rate, pressure=pressure, freezing=freezing
        )
        saturated = saturation_mixing_ratio(air.pressure, air.temperature, freezing=freezing)
        assert np.all(air.vapour <= saturated * (1 + 1e-12))
        assert np.all(air.cloud[1:] == 0.0)
        np.testing.assert_allclose(air.vapour[0] + air.cloud[0], water, rtol=1e-12)
        assert np.all(np.diff(air.pressure) < 0)

    def test_supersaturated_station_starts_with_cloud_at_its_temperature(self):
        """1 g/kg above saturation becomes 1 g/kg of cloud; no heat is added."""
        saturated = float(saturation_mixing_ratio(100400.0, 287.65))
        air = station(mixing_ratio=saturated + 0.001)
        np.testing.assert_allclose(air.cloud[0], 0.001, rtol=1e-9)
        assert air.temperature[0] == 287.65
        assert any("1 g/kg of its water starts as cloud" in note for note in air.notes)

    def test_temperature_is_constant_above_the_standard_tropopause(self):
        """Lapse to 11 km, isothermal to the top at 20 km."""
        air = station(lapse_rate=0.006)
        np.testing.assert_allclose(air.temperature[air.height >= 11000.0], 287.65 - 0.006 * 10960.0, rtol=1e-12)
        assert air.height[0] == 40.0
        assert air.height[-1] == 20000.0
        assert 11000.0 in air.height

    def test_cold_station_with_steep_lapse_stops_at_minus_80(self):
        """No column colder than the coldest tropopauses; the note says so."""
        air = station(temperature=253.15, mixing_ratio=0.0005, lapse_rate=0.0095)
        assert air.temperature.min() == 193.15
        assert any("-80 °C" in note for note in air.notes)

    def test_wind_is_constant_without_a_crest_wind(self):
        """Westerly: all eastward; the note asks for the crest wind."""
        air = station()
        np.testing.assert_allclose(air.eastward_wind, 12.0, rtol=1e-12)
        np.testing.assert_allclose(air.northward_wind, 0.0, atol=1e-12)
        assert any("crest height decides" in note for note in air.notes)

    def test_crest_wind_is_reached_by_components(self):
        """South 10 at the ground and west 20 at 2040 m: half of each in the middle, constant above."""
        air = station(wind_speed=10.0, wind_from_direction=np.pi, crest_wind=(20.0, WEST, 2040.0))
        read = interpolated(air, [40.0, 1040.0, 2040.0, 9000.0])
        np.testing.assert_allclose(read.eastward_wind, [0, 10, 20, 20], atol=1e-9)
        np.testing.assert_allclose(read.northward_wind, [10, 5, 0, 0], atol=1e-9)
        assert any("2040 m" in note for note in air.notes)

    def test_members_equal_columns_of_their_own(self):
        """Arrays of station values give what single calls give."""
        t, w, lapse = np.array([280.0, 290.0, 300.0]), np.array([5.0, 10.0, 15.0]), np.array([0.006, 0.0065, 0.007])
        crest = (np.array([20.0, 25.0, 30.0]), WEST, 1500.0)
        together = station(temperature=t, wind_speed=w, lapse_rate=lapse, crest_wind=crest)
        assert together.pressure.shape == together.eastward_wind.shape == (3, together.height.size)
        for i in range(3):
            alone = station(
                temperature=t[i], wind_speed=w[i], lapse_rate=lapse[i], crest_wind=(crest[0][i], WEST, 1500.0)
            )
            for field in ("pressure", "temperature", "vapour", "cloud", "eastward_wind", "northward_wind"):
                np.testing.assert_allclose(getattr(together, field)[i], getattr(alone, field), rtol=1e-12, atol=1e-14)

    def test_origin_and_notes_say_what_was_assumed(self):
        """One origin for each level; lapse, humidity and wind are in the notes, in units of a forecaster."""
        air = station()
        assert air.origin[0] == "station"
        assert set(air.origin[1:]) == {"lapse rate"}
        assert len(air.origin) == air.height.size
        text = " ".join(air.notes)
        assert "6.5 °C per km" in text
        assert "500 hPa" in text
        assert "The wind is the station's" in text

    @pytest.mark.parametrize(
        ("changes", "error", "message"),
        [
            ({"pressure": 1004.0}, OutOfRangeError, r"pressure: 1 of 1 .*multiply hectopascals by 100"),
            ({"temperature": 14.5}, OutOfRangeError, r"temperature: 1 of 1 .*add 273\.15"),
            ({"mixing_ratio": 8.2}, OutOfRangeError, r"mixing_ratio: 1 of 1 .*divide grams"),
            ({"lapse_rate": 6.5}, OutOfRangeError, r"lapse_rate: 1 of 1 .*divide degrees per kilometre by 1000"),
            ({"wind_from_direction": 235.0}, OutOfRangeError, r"wind_from_direction: 1 of 1 .*radians"),
            ({"wind_speed": np.nan}, OutOfRangeError, r"wind_speed: 1 of 1 .*metres per second"),
            ({"top": 9000.0}, OutOfRangeError, r"top: 1 of 1 values lie outside 16000 to 30000 m"),
            (
                {"crest_wind": (20.0, 4.0, 30.0)},
                IncomingAirError,
                r"crest_wind: its height, 30 m, is not above the station",
            ),
            ({"crest_wind": (20.0, 270.0, 2000.0)}, OutOfRangeError, r"crest_wind from_direction: .*radians"),
        ],
    )
    def test_wrong_values_are_refused(self, changes, error, message):
        """Each argument is checked and the message says what to do."""
        with pytest.raises(error, match=message):
            station(**changes)


class TestReadings:
    """What is read off a column."""

    def test_interpolation_returns_the_levels_at_the_levels(self):
        """At a level all values are the level's own, in the order asked for."""
        air = station()
        order = [7, 0, 150, air.height.size - 1]
        read = interpolated(air, air.height[order])
        for field in ("pressure", "temperature", "vapour", "cloud", "eastward_wind", "northward_wind"):
            np.testing.assert_allclose(getattr(read, field), getattr(air, field)[order], rtol=1e-13, atol=1e-15)

    def test_interpolation_is_linear_and_pressure_logarithmic(self):
        """Half way: arithmetic mean of temperature, geometric mean of pressure."""
        air = column([0.0, 1000.0], [290.0, 280.0], vapour=[0.01, 0.004])
        read = interpolated(air, 500.0)
        np.testing.assert_allclose([read.temperature, read.vapour], [285.0, 0.007], rtol=1e-12)
        np.testing.assert_allclose(read.pressure, np.sqrt(air.pressure.prod()), rtol=1e-12)

    def test_interpolation_with_members(self):
        """Common heights serve all members; heights of their own serve each."""
        air = station(temperature=np.array([280.0, 290.0]))
        assert interpolated(air, 1000.0).temperature.shape == (2,)
        assert interpolated(air, [500.0, 1000.0, 1500.0]).temperature.shape == (2, 3)
        own = np.array([[500.0, 1000.0, 1500.0], [2000.0, 0.0, 700.0]])
        read = interpolated(air, own)
        np.testing.assert_allclose(read.temperature, np.array([[280.0], [290.0]]) - 0.0065 * (own - 40.0), rtol=1e-12)
        assert interpolated(station(), own).temperature.shape == (2, 3)

    def test_heights_outside_are_refused(self):
        """Above the top nothing is invented."""
        with pytest.raises(OutOfRangeError, match=r"height: 1 of 2 values lie outside -2960 to 20000 m"):
            interpolated(station(), [500.0, 20001.0])
        with pytest.raises(OutOfRangeError, match="ground: 1 of 1"):
            extended_down(station(), -5000.0)

    def test_column_goes_on_below_its_ground(self):
        """Terrain lower than the station: standard lapse, same vapour and wind, hydrostatic, said in the notes."""
        air = station(elevation=900.0, pressure=90000.0)
        deeper = extended_down(air, 150.0)
        added = deeper.height < 900.0
        assert deeper.height[0] == 150.0
        np.testing.assert_allclose(deeper.temperature[0], 287.65 + 0.0065 * 750.0, rtol=1e-12)
        np.testing.assert_allclose(deeper.vapour[added], air.vapour[0], rtol=1e-12)
        tv = virtual_temperature(deeper.temperature, deeper.vapour)
        np.testing.assert_allclose(
            hydrostatic_pressure(deeper.height, tv, deeper.pressure[0]), deeper.pressure, rtol=1e-11
        )
        assert set(np.array(deeper.origin)[added]) == {"standard lapse below the data"}
        assert "6.5 °C per km" in deeper.notes[-1]
        np.testing.assert_allclose(interpolated(air, 150.0).pressure, deeper.pressure[0], rtol=1e-12)
        assert extended_down(air, 950.0) is air

    @pytest.mark.parametrize(
        ("toward", "expected"), [(EAST, 12.0), (WEST, -12.0), (0.0, 0.0), (0.25 * np.pi, 12.0 / np.sqrt(2))]
    )
    def test_wind_component(self, toward, expected):
        """A westerly of 12 m/s goes east."""
        np.testing.assert_allclose(wind_component(station(), toward), expected, atol=1e-9)

    def test_degrees_are_refused(self):
        """A bearing in degrees is caught."""
        with pytest.raises(OutOfRangeError, match=r"toward_bearing: 1 of 1 .*radians, not degrees"):
            wind_component(station(), 235.0)

    def test_freezing_level_is_the_highest(self):
        """Frozen ground, a warm nose and cold air above: the level is above the nose. Frozen throughout: the ground."""
        height = [0.0, 500.0, 1000.0, 2000.0, 18000.0]
        air = column(height, [[270.15, 271.15, 275.15, 271.15, 220.0], [270.0, 269.0, 268.0, 262.0, 220.0]])
        np.testing.assert_allclose(freezing_level(air), [1500.0, 0.0], atol=1e-9)

    def test_freezing_level_of_a_station_column(self):
        """14.5 degrees at 40 m and 6.5 degrees per km: 40 + 14500 / 6.5 m."""
        np.testing.assert_allclose(freezing_level(station()), 40.0 + 14.5 / 6.5 * 1000.0, rtol=1e-12)

    def test_wet_bulb_zero_level_agrees_with_the_wet_bulb(self):
        """The wet bulb of the air at that height is 0 degrees; atol 0.01 K for the interpolation of 100 m layers."""
        air = station(mixing_ratio=0.004)
        level = wet_bulb_zero_level(air)
        assert level < freezing_level(air) - 300.0
        read = interpolated(air, level)
        wet = wet_bulb_from_mixing_ratio(read.pressure, read.temperature, read.vapour)
        np.testing.assert_allclose(wet, 273.15, rtol=0, atol=0.01)

    def test_column_vapour_of_mixed_air(self):
        """Constant mixing ratio r: r / (1 + r) of the mass of the column."""
        air = column(np.linspace(0, 16000, 41), np.linspace(290, 220, 41), vapour=0.005)
        mass = (air.pressure[0] - air.pressure[-1]) / GRAVITY
        np.testing.assert_allclose(column_vapour(air), 0.005 / 1.005 * mass, rtol=1e-12)

    def test_column_vapour_is_of_the_known_size(self):
        """Reitan (1963), J. Appl. Meteorol. 2: ln(W in cm) = 0.1102 + 0.06138 Td (coefficients from memory).

        Monthly means of its stations scatter by 15 %; a single assumed profile may be off by 30 %.
        """
        np.testing.assert_allclose(column_vapour(station()), 10 * np.exp(0.1102 + 0.06138 * 11.0), rtol=0.3)

    def test_vapour_flux_is_vapour_times_wind(self):
        """Uniform wind: the product, with the sign of the bearing; members keep their axis."""
        air = station()
        np.testing.assert_allclose(vapour_flux(air, EAST), 12.0 * column_vapour(air), rtol=1e-12)
        np.testing.assert_allclose(vapour_flux(air, WEST), -12.0 * column_vapour(air), rtol=1e-12)
        members = station(wind_speed=np.array([5.0, 10.0]))
        assert vapour_flux(members, EAST).shape == (2,)
        np.testing.assert_allclose(
            vapour_flux(members, np.array([EAST, WEST])) / column_vapour(members), [5, -10], rtol=1e-9
        )


class TestChanged:
    """The same column with other values."""

    def test_unchanged_values_return_the_column(self):
        """Nothing replaced: the same pressures, vapour and cloud."""
        air = station()
        same = with_values(air)
        np.testing.assert_allclose(same.pressure, air.pressure, rtol=1e-11)
        np.testing.assert_allclose(same.vapour, air.vapour, rtol=1e-9)

    def test_cooler_saturated_air_gets_cloud(self):
        """Water is kept: what the colder air cannot hold is cloud."""
        air = station(mixing_ratio=float(saturation_mixing_ratio(100400.0, 287.65)))
        cold = with_values(air, temperature=air.temperature - np.array([[0.0], [2.0]]))
        assert cold.cloud.shape == cold.eastward_wind.shape == (2, air.height.size)
        assert cold.cloud[1, :30].min() > 0.0
        np.testing.assert_allclose(cold.vapour + cold.cloud, np.tile(air.vapour + air.cloud, (2, 1)), rtol=1e-12)

    def test_other_units_are_refused(self):
        """Grams per kilogram are caught."""
        with pytest.raises(OutOfRangeError, match="water: "):
            with_values(station(), water=8.0)


class TestHydrostatic:
    """Height and pressure at rest."""

    @given(st.floats(200, 320), st.floats(200, 320))
    @settings(deadline=None)
    def test_layer_mean_is_the_logarithmic_mean(self, lower, upper):
        """Between geometric and arithmetic mean, and the closed form where that is not lost to rounding."""
        mean = layer_mean_virtual_temperature(lower, upper)
        assert np.sqrt(lower * upper) * (1 - 1e-14) <= mean <= 0.5 * (lower + upper) * (1 + 1e-14)
        if abs(upper - lower) > 0.1:
            np.testing.assert_allclose(mean, (upper - lower) / np.log(upper / lower), rtol=1e-11)

    def test_height_and_pressure_are_inverse(self):
        """Heights of pressures and back, upward and downward."""
        air = station()
        tv = virtual_temperature(air.temperature, air.vapour, air.cloud)
        np.testing.assert_allclose(hydrostatic_height(air.pressure, tv, 40.0), air.height, rtol=1e-11)
        down = hydrostatic_pressure(air.height[::-1], tv[::-1], air.pressure[-1])
        np.testing.assert_allclose(down[::-1], air.pressure, rtol=1e-11)


def test_station_and_levels_agree():
    """A station column given back as levels is the same column."""
    air = station()
    again = air_from_levels(
        air.height, air.pressure, air.temperature, air.vapour, air.eastward_wind, air.northward_wind
    )
    np.testing.assert_allclose(again.height, air.height, rtol=1e-11)
    np.testing.assert_allclose(again.vapour, air.vapour, rtol=1e-11)
    assert again.notes == ()
