"""Rain and snow on the way: water and energy closed, drift, evaporation, melting, limits."""

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from orolift.air.parcel import Parcel, enthalpy
from orolift.air.saturation import saturation_mixing_ratio
from orolift.constants import (
    HEAT_CAPACITY_ICE,
    HEAT_CAPACITY_LIQUID,
    LATENT_HEAT_SUBLIMATION_TRIPLE,
    LATENT_HEAT_VAPORISATION_TRIPLE,
    TRIPLE_POINT_TEMPERATURE,
)
from orolift.crossing.falling import Path, _sunk, march_with_rain

LEVELS = 24
PLACES = 160
MEMBERS = 1


def column(ground_temperature=283.15, humidity=0.9):
    """Layers 100 m apart, 6 K per km, one humidity, no cloud."""
    height = 50.0 + 100.0 * np.arange(LEVELS)
    temperature = ground_temperature - 0.006 * height
    pressure = 1e5 * np.exp(-height / 8000.0)
    vapour = humidity * saturation_mixing_ratio(pressure, temperature)
    return height, Parcel(pressure[None], temperature[None], vapour[None], np.zeros((1, LEVELS)))


def over_a_hump(start, height, rise=1500.0, wind=15.0, spacing=500.0):
    """Streamlines that rise and fall together over a hump; pressure by the undisturbed scale height."""
    x = spacing * np.arange(PLACES)
    hump = rise * np.exp(-(((x - 30e3) / 9e3) ** 2))
    z = height[None, None] + hump[:, None, None] * np.exp(-height / 4000.0)
    pressure = 1e5 * np.exp(-z / 8000.0)
    time = np.full(z.shape, spacing / wind)
    time[0] = 0.0
    carried = np.full((1, LEVELS), 1.1 * wind * 100.0)
    return x, Path(pressure, z, time, carried)


def worked(cloud_time=1000.0, fall_time=1000.0, humidity=0.9, ground=283.15, freezing=True, **options):
    """A march over the hump."""
    height, start = column(ground, humidity)
    x, path = over_a_hump(start, height, **options)
    air, falling = march_with_rain(start, path, np.array([cloud_time]), np.array([fall_time]), freezing=freezing)
    return x, start, path, air, falling


def falling_enthalpy(temperature):
    """Enthalpy of falling water [J kg-1] from liquid at the triple point: snow below 0, rain above 2 degrees Celsius."""
    fusion = LATENT_HEAT_SUBLIMATION_TRIPLE - LATENT_HEAT_VAPORISATION_TRIPLE
    snow = np.clip((275.15 - temperature) / 2.0, 0.0, 1.0)
    above = temperature - TRIPLE_POINT_TEMPERATURE
    return (1.0 - snow) * HEAT_CAPACITY_LIQUID * above + snow * (HEAT_CAPACITY_ICE * above - fusion)


def water_out(path, air, falling):
    """Water that leaves: vapour and cloud downwind, landed, still falling."""
    return float(np.sum(path.carried * (air.vapour[-1] + air.cloud[-1])) + falling.landed.sum() + falling.beyond.sum())


@given(
    cloud_time=st.floats(100.0, 5000.0),
    fall_time=st.floats(200.0, 4000.0),
    humidity=st.floats(0.3, 1.0),
    ground=st.floats(262.0, 298.0),
    freezing=st.booleans(),
)
def test_water_closes(cloud_time, fall_time, humidity, ground, freezing):
    """Vapour in = vapour out + cloud out + landed + still falling, to 1e-10."""
    _, start, path, air, falling = worked(cloud_time, fall_time, humidity, ground, freezing)
    water_in = float(np.sum(path.carried * (start.vapour + start.cloud)))
    assert water_out(path, air, falling) == pytest.approx(water_in, rel=1e-10)
    assert (falling.landed >= 0.0).all()
    assert (falling.aloft >= -1e-15).all()
    assert (falling.landed_snow <= falling.landed + 1e-15).all()


@given(ground=st.floats(265.0, 295.0), cloud=st.floats(0.7e-3, 2e-3), humidity=st.floats(0.2, 0.9))
@example(ground=276.0, cloud=0.0015911151245079948, humidity=0.875)  # a cloudy layer crosses the freezing point
def test_enthalpy_closes_at_constant_pressure(ground, cloud, humidity):
    """On level streamlines, where no work is done, the enthalpy of air and water in = out, to 1e-9.

    A cloudy layer aloft rains through dry layers below: formation, fall, evaporation and melting all take part.
    """
    height, start = column(ground, humidity)
    wet = height > 1500.0
    vapour = np.where(wet, saturation_mixing_ratio(start.pressure, start.temperature), start.vapour)
    start = Parcel(start.pressure, start.temperature, vapour, np.where(wet, cloud, 0.0)[None])
    _, path = over_a_hump(start, height, rise=0.0)
    path = Path(np.broadcast_to(start.pressure, path.pressure.shape), path.height, path.step_time, path.carried)
    air, falling = march_with_rain(start, path, np.array([800.0]), np.array([1000.0]))
    came = np.sum(path.carried * enthalpy(start))
    last = Parcel(air.pressure[-1], air.temperature[-1], air.vapour[-1], air.cloud[-1])
    # falling water leaves a layer at the temperature the layer had before it evaporated and melted there
    went = np.sum(path.carried * enthalpy(last))
    ground_temperature = np.concatenate([start.temperature[None], air.temperature[:-1]])
    landed = np.sum(falling.landed[:, 0] * falling_enthalpy(ground_temperature[:, 0, 0]))
    aloft = np.sum(path.carried * falling.aloft[-1] * falling_enthalpy(ground_temperature[-1]))
    scale = np.sum(path.carried * np.abs(falling.aloft).max()) * 2.5e6 + abs(came)
    assert went + landed + aloft == pytest.approx(came, abs=1e-9 * scale)
    assert falling.landed.sum() > 0.0


def test_thin_cloud_does_not_rain():
    """Kessler (1969): cloud under about half a gram does not turn to rain; twice as much does."""
    fallen = []
    for cloud in (0.45e-3, 0.9e-3):
        height, start = column(280.0, 0.5)
        wet = height > 1500.0
        vapour = np.where(wet, saturation_mixing_ratio(start.pressure, start.temperature), start.vapour)
        start = Parcel(start.pressure, start.temperature, vapour, np.where(wet, cloud, 0.0)[None])
        _, path = over_a_hump(start, height, rise=0.0)
        path = Path(np.broadcast_to(start.pressure, path.pressure.shape), path.height, path.step_time, path.carried)
        air, _ = march_with_rain(start, path, np.array([800.0]), np.array([1000.0]))
        fallen.append(float(air.removed.sum()))
    assert fallen[0] == 0.0
    assert fallen[1] > 0.0


def test_rain_drifts_downwind():
    """The longer water takes to fall, the further downwind its centre lands; with no delay it falls where it forms."""
    centres = []
    for times in ((50.0, 50.0), (500.0, 500.0), (2000.0, 2000.0)):
        x, *_, falling = worked(*times)
        centres.append(float(np.sum(x * falling.landed[:, 0]) / falling.landed.sum()))
    assert centres[0] < centres[1] < centres[2]
    assert centres[0] < 30e3


def test_no_rain_before_the_first_cloud():
    """Causality: nothing lands upwind of the first place with cloud."""
    _, _, _, air, falling = worked()
    first = np.flatnonzero((air.cloud[:, 0] > 0.0).any(axis=-1))[0]
    assert falling.landed[:first].sum() == 0.0


def test_snow_falls_slower_and_further():
    """Colder air: snow, which drifts further than rain (reported: colder air spills more over the crest)."""
    x, *_, warm = worked(ground=290.0)
    _, *_, cold = worked(ground=266.0)
    centre = [float(np.sum(x * f.landed[:, 0]) / f.landed.sum()) for f in (warm, cold)]
    assert centre[1] > centre[0]
    assert warm.landed_snow.sum() == 0.0
    assert cold.landed_snow.sum() == pytest.approx(cold.landed.sum())


def test_dry_air_below_takes_rain_and_cools():
    """Rain from a cloudy layer evaporates in the dry layers below: less lands, and they cool and moisten."""
    height, start = column(288.15, 0.4)
    wet = height > 1200.0
    vapour = np.where(wet, saturation_mixing_ratio(start.pressure, start.temperature), start.vapour)
    start = Parcel(start.pressure, start.temperature, vapour, np.where(wet, 1e-3, 0.0)[None])
    _, path = over_a_hump(start, height, rise=0.0)
    path = Path(np.broadcast_to(start.pressure, path.pressure.shape), path.height, path.step_time, path.carried)
    air, falling = march_with_rain(start, path, np.array([800.0]), np.array([1000.0]))
    low = ~wet
    assert falling.evaporated.sum() > 0.1 * falling.landed.sum()
    assert (air.temperature[-1, 0, low] < start.temperature[0, low] - 0.05).any()
    assert (air.vapour[-1, 0, low] > start.vapour[0, low]).all()
    assert (air.vapour[-1] <= saturation_mixing_ratio(air.pressure[-1], air.temperature[-1]) * (1 + 1e-9)).all()


@given(
    flux=st.lists(st.floats(0.0, 5.0), min_size=6, max_size=6),
    leaving=st.lists(st.floats(0.0, 1.0), min_size=6, max_size=6),
)
def test_sinking_is_the_recursion(flux, leaving):
    """The running products give what layer by layer from the top gives."""
    expected, above = np.zeros(6), 0.0
    for i in range(5, -1, -1):
        above = expected[i] = leaving[i] * (flux[i] + above)
    np.testing.assert_allclose(_sunk(np.array([flux]), np.array([leaving]))[0], expected, rtol=1e-9, atol=1e-12)


def test_steps_converge():
    """Half the spacing, nearly the same rain and lee temperature."""
    height, start = column()
    answers = []
    for spacing, places in ((1000.0, 80), (500.0, 160), (250.0, 320)):
        x = spacing * np.arange(places)
        z = height[None, None] + (1500.0 * np.exp(-(((x - 30e3) / 9e3) ** 2)))[:, None, None]
        time = np.full(z.shape, spacing / 15.0)
        time[0] = 0.0
        path = Path(1e5 * np.exp(-z / 8000.0), z, time, np.full((1, LEVELS), 1650.0))
        air, falling = march_with_rain(start, path, np.array([1000.0]), np.array([1000.0]))
        answers.append((falling.landed.sum(), air.temperature[-1, 0, 0]))
    assert answers[1][0] == pytest.approx(answers[2][0], rel=0.03)
    assert abs(answers[1][0] - answers[2][0]) < abs(answers[0][0] - answers[1][0])
    assert answers[1][1] == pytest.approx(answers[2][1], abs=0.05)
