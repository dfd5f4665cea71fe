"""Gauges: comparison by hand, and fits that find what the gauges were made with."""

from dataclasses import replace

import numpy as np
import pytest

from orolift.errors import OutOfRangeError
from orolift.rain.gauge_fit import LONGEST, fit_to_gauges
from orolift.rain.gauges import gauge_comparison, gauges_at, rain_at
from orolift.rain.parameters import RainParameters
from orolift.rain.rain_map import rain_map
from orolift.terrain.grid import ElevationGrid

HOUR = 3600.0
SIX = 6 * HOUR
TRUE = RainParameters(14.0, 5.0, 0.005, 2500.0, 0.006, 600.0, 1500.0, 0.5 / HOUR)
USUAL = replace(TRUE, cloud_time=1000.0, fall_time=1000.0, background=0.0)


@pytest.fixture(scope="module")
def ridge():
    """A rugged invented range, 80 km across, cells of 2 km."""
    x = np.arange(-80e3, 81e3, 2e3)
    xx, yy = np.meshgrid(x, x[::-1])
    ground = (
        1400.0 * np.exp(-((xx / 18e3) ** 2)) * (1.0 + 0.3 * np.sin(yy / 9e3))
        + 150.0 * np.cos(xx / 7e3 + yy / 11e3)
        + 200.0
    )
    return ElevationGrid(ground, x, x[::-1])


@pytest.fixture(scope="module")
def places():
    """Twenty gauges scattered over it."""
    return np.random.default_rng(11).uniform(-45e3, 45e3, (20, 2))


def made(ridge, places, parameters=TRUE, noise=0.0):
    """Gauges that caught what the map gives, and noise."""
    rate = rain_map(ridge, parameters).rate
    total = SIX * rain_at(ridge, rate, places[:, 0], places[:, 1])
    total = np.maximum(total * (1.0 + noise * np.random.default_rng(1).normal(size=total.size)), 0.0)
    return gauges_at(places[:, 0], places[:, 1], total)


def test_comparison_by_hand():
    """Map 6 and 12 mm, gauges 8 and 10, one off the map."""
    x = np.arange(0.0, 9e3, 1e3)
    grid = ElevationGrid(np.zeros((9, 9)), x, x[::-1])
    rate = np.tile(np.arange(9.0), (9, 1)) / HOUR
    found = gauge_comparison(
        gauges_at([1e3, 2e3, 99e3], [2e3, 2e3, 0.0], [8.0, 10.0, 3.0], ("A", "B", "Far")), grid, rate, SIX
    )
    assert (found.used, found.bias, found.ratio, found.mean_error, found.rms_error) == (2, 0.0, 1.0, 2.0, 2.0)
    assert found.correlation is None
    assert np.isnan(found.modelled[2])
    assert "Far" in found.notes[0]


def test_correlation_is_that_of_pearson():
    """Of a straight line 1, of its mirror -1, of equal values none."""
    x = np.arange(0.0, 9e3, 1e3)
    grid = ElevationGrid(np.zeros((9, 9)), x, x[::-1])
    rate = np.tile(np.arange(9.0), (9, 1)) / HOUR
    at = np.arange(5) * 1e3
    for total, wanted in (([1, 3, 5, 7, 9], 1.0), ([9, 7, 5, 3, 1], -1.0), ([4] * 5, None)):
        found = gauge_comparison(gauges_at(at, at * 0 + 2e3, total), grid, rate, HOUR).correlation
        assert found == (None if wanted is None else pytest.approx(wanted, abs=1e-12))


def test_no_gauge_on_the_map_and_no_rain_caught():
    """Nothing is divided by zero."""
    grid = ElevationGrid(np.zeros((9, 9)), np.arange(9.0), np.arange(9.0)[::-1])
    found = gauge_comparison(gauges_at([99.0], [0.0], [1.0]), grid, np.ones((9, 9)), HOUR)
    assert (found.used, found.bias) == (0, None)
    dry = gauge_comparison(gauges_at([2.0, 6.0], [2.0, 2.0], [0.0, 0.0]), grid, np.ones((9, 9)), HOUR)
    assert dry.ratio is None


def test_gauges_at_one_place_are_averaged():
    """In the order given, with a note."""
    found = gauges_at([5e3, 0.0, 5e3], [1.0, 2.0, 1.2], [10.0, 4.0, 20.0], ("Mill", "Top", "Mill again"))
    np.testing.assert_array_equal(found.total, [15.0, 4.0])
    assert found.name == ("Mill", "Top")
    assert "Mill" in found.notes[0]


@pytest.mark.parametrize(
    ("total", "message"),
    [([-1.0, 2.0], "Take out missing gauges"), ([np.nan, 1.0], "total: 1 of 2"), ([1.0], "2 places, 1 totals")],
)
def test_impossible_gauges(total, message):
    """Negative, missing, too few."""
    with pytest.raises(OutOfRangeError, match=message):
        gauges_at([0.0, 5e3], [0.0, 0.0], total)


def test_perfect_gauges_give_back_what_made_them(ridge, places):
    """Times and background within 3 %, little doubt.

    Maps and fit have other paddings, so that the images of the waves differ by 0.3 % of the peak: 0.05 mm/h.
    """
    fit = fit_to_gauges(made(ridge, places), ridge, USUAL, SIX)
    assert fit.gauges == 20
    assert fit.cloud_time.value == pytest.approx(600.0, rel=0.03)
    assert fit.fall_time.value == pytest.approx(1500.0, rel=0.03)
    assert fit.background.value == pytest.approx(0.5 / HOUR, abs=0.06 / HOUR)
    assert fit.total_time.value == pytest.approx(2100.0, rel=0.02)
    assert fit.rms_fitted < 0.1 * fit.rms_before
    assert fit.rms_left_out < 0.03 * fit.rms_of_mean
    assert fit.total_time.error < 50.0
    found = {name: getattr(fit, name).value for name in ("cloud_time", "fall_time", "background")}
    fitted = rain_map(ridge, replace(USUAL, **found)).rate
    np.testing.assert_allclose(fitted, rain_map(ridge, TRUE).rate, atol=0.03 * fitted.max())


def test_equal_times_are_found_too(ridge, places):
    """Where the difference of the two times vanishes the derivative takes over."""
    equal = replace(TRUE, cloud_time=900.0, fall_time=900.0)
    fit = fit_to_gauges(made(ridge, places, equal), ridge, USUAL, SIX)
    assert fit.total_time.value == pytest.approx(1800.0, rel=0.03)
    assert fit.rms_fitted < 0.1 * fit.rms_before


@pytest.mark.parametrize(("cloud", "fall"), [(900.0, 900.0), (50.0, 50.0), (300.0, 3000.0), (3900.0, 4000.0)])
def test_single_delays_make_any_pair(ridge, places, cloud, fall):
    """The divided difference of maps with one delay is the map with two. 0.2 % of the most: the spline.

    Padding is that of the fit, so that nothing else differs.
    """
    from orolift.rain import gauge_fit
    from orolift.rain.ground import padded_ground, padding_for
    from orolift.rain.spectral import rain_from_spectrum, spectrum_of

    model = gauge_fit._model_at(ridge, USUAL, places[:, 0], places[:, 1], None, SIX)
    pair = replace(USUAL, cloud_time=cloud, fall_time=fall)
    padding = padding_for(ridge.elevation.shape, (2e3, 2e3), replace(USUAL, cloud_time=LONGEST, fall_time=LONGEST / 2))
    rain = rain_from_spectrum(
        spectrum_of(padded_ground(ridge.elevation, padding, pair)), padding.shape, (2e3, 2e3), pair
    )
    direct = SIX * np.maximum(rain_at(ridge, rain[:81, :81], places[:, 0], places[:, 1]) + 1e-4, 0.0)
    np.testing.assert_allclose(model(np.array([cloud, fall, 1e-4])), direct, atol=2e-3 * direct.max())


def test_noise_shows_as_doubt(ridge, places):
    """With 20 % noise the truth lies within three standard errors, left-out gauges are off by more than fitted ones."""
    fit = fit_to_gauges(made(ridge, places, noise=0.2), ridge, USUAL, SIX)
    assert abs(fit.total_time.value - 2100.0) < 3.0 * fit.total_time.error
    assert fit.total_time.error > 50.0
    assert fit.rms_fitted < fit.rms_left_out
    assert fit.total_time.low <= fit.total_time.value <= fit.total_time.high


def test_gauges_without_relation_to_the_map_are_called_useless(ridge, places):
    """Shuffled totals: the sentences say that the fit explains nothing."""
    gauges = made(ridge, places)
    shuffled = replace(gauges, total=np.random.default_rng(4).permutation(gauges.total))
    fit = fit_to_gauges(shuffled, ridge, USUAL, SIX)
    assert any("explains nothing" in note for note in fit.notes)


def test_a_value_at_its_bound_is_said(ridge, places):
    """Even rain asks for the longest times there are."""
    even = gauges_at(places[:, 0], places[:, 1], np.full(20, 6.0) + 1e-3 * np.arange(20))
    fit = fit_to_gauges(even, ridge, USUAL, SIX)
    assert fit.fall_time.at_bound
    assert fit.fall_time.value <= LONGEST
    assert any("do not determine it" in note for note in fit.notes)


def test_too_few_gauges(ridge, places):
    """Six are needed on the map."""
    far = np.vstack([places[:5], [[9e5, 0.0]]])
    gauges = gauges_at(far[:, 0], far[:, 1], np.ones(6))
    with pytest.raises(OutOfRangeError, match="5 of 6 lie on the map"):
        fit_to_gauges(gauges, ridge, USUAL, SIX)
