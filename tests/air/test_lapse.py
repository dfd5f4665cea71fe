"""Lapse rates and pseudoadiabats against printed tables."""

import numpy as np
import pytest

from orolift.air.lapse import dry_lapse_rate, pseudoadiabat_temperature, saturated_lapse_rate
from orolift.air.parcel import Parcel, moved_to
from orolift.air.saturation import saturation_mixing_ratio
from orolift.constants import GRAVITY, R_DRY, R_VAPOUR
from orolift.errors import OutOfRangeError

# Ahrens, Meteorology Today, table 6.1: moist adiabatic rate, K per km (numbers from memory; each was recomputed from
# the published formula and falls on the printed digit). hPa, Celsius, rate
TABLE = [
    *[(1000, t, rate) for t, rate in ((-40, 9.5), (-20, 8.6), (0, 6.4), (20, 4.3), (40, 3.0))],
    *[(800, t, rate) for t, rate in ((-40, 9.4), (-20, 8.3), (0, 6.0), (20, 3.9))],
    *[(600, t, rate) for t, rate in ((-40, 9.3), (-20, 7.9), (0, 5.4))],
    *[(400, t, rate) for t, rate in ((-40, 9.1), (-20, 7.3))],
    (200, -40, 8.6),
]
# Celsius at 1000 hPa; temperatures at 850, 700, 500, 300 hPa on the pseudoadiabat through it, from Bolton's
# (1980) eq. 43 solved for temperature, a fit to somebody else's integration
PSEUDOADIABATS = [
    (0.0, (-8.74, -20.03, -41.01, -72.02)),
    (8.0, (0.34, -9.61, -29.08, -60.64)),
    (16.0, (9.41, 0.99, -15.59, -45.72)),
    (20.0, (13.88, 6.18, -8.72, -36.67)),
    (28.0, (22.67, 16.15, 4.19, -17.21)),
]


@pytest.mark.parametrize(("hectopascal", "celsius", "rate"), TABLE)
def test_saturated_rate_is_the_printed_one(hectopascal, celsius, rate):
    """Over liquid as in the table; 0.06 K per km: half the printed digit and a little for other constants."""
    ours = saturated_lapse_rate(hectopascal * 100.0, celsius + 273.15, freezing=False)
    np.testing.assert_allclose(ours * 1000.0, rate, atol=0.06)


def test_dry_rate():
    """9.75 K per km dry (g / cp; AMS Glossary says 9.8), and in the limit of no vapour the saturated rate is dry."""
    np.testing.assert_allclose(dry_lapse_rate() * 1000.0, 9.8, atol=0.06)
    np.testing.assert_allclose(saturated_lapse_rate(1e5, 160.0), dry_lapse_rate(), rtol=1e-5)
    assert dry_lapse_rate(0.02) < dry_lapse_rate()


@pytest.mark.parametrize("freezing", [True, False])
@pytest.mark.parametrize("cloud", [0.0, 0.004])
def test_saturated_rate_is_that_of_the_parcel_march(freezing, cloud):
    """Move a parcel a little and divide by the height gained with its own density.

    Without cloud the reversible and the pseudoadiabatic move start alike. rtol 3e-5: over 1 Pa the rate itself changes.
    """
    p, t = np.array([9e4, 7e4, 5e4]), np.array([288.0, 266.0, 249.0])
    v = saturation_mixing_ratio(p, t, freezing=freezing)
    parcel = Parcel(p, t, v, np.full(3, cloud))
    # without cloud a downward half-step would leave saturation, so go one way
    up = moved_to(parcel, p - 1.0, freezing=freezing)
    volume = t * (R_DRY + v * R_VAPOUR) / p
    height = volume / (1.0 + v + cloud) / GRAVITY
    rate = saturated_lapse_rate(p, t, condensate=cloud, freezing=freezing)
    np.testing.assert_allclose((t - up.temperature) / height, rate, rtol=3e-5)


@pytest.mark.parametrize(("start", "expected"), PSEUDOADIABATS)
def test_pseudoadiabat_is_boltons(start, expected):
    """0.06 K: twice what Bolton's eq. 43 and 39 differ between themselves."""
    ours = pseudoadiabat_temperature(1e5, start + 273.15, [85e3, 70e3, 50e3, 30e3], freezing=False) - 273.15
    np.testing.assert_allclose(ours, expected, atol=0.06)


def test_pseudoadiabat_is_a_documented_example():
    """MetPy's documentation of moist_lapse: from 5 C at 925 hPa to 850, 700, 500, 300 hPa.

    That library keeps latent heat and heat capacity constant, so 0.1 K at low levels, 0.3 K at 500 hPa and 0.5 K above.
    """
    ours = pseudoadiabat_temperature(92500.0, 278.15, [85e3, 70e3, 50e3, 30e3], freezing=False) - 273.15
    assert np.all(np.abs(ours - [0.99635, -8.88958, -28.38863, -60.12004]) < [0.1, 0.1, 0.3, 0.5])


@pytest.mark.parametrize("freezing", [True, False])
def test_pseudoadiabat_returns(freezing):
    """Up and down the same curve: the error of the steps, which is the same both ways, 1e-6 K."""
    up = pseudoadiabat_temperature(1e5, [280.0, 300.0], 4e4, freezing=freezing)
    back = pseudoadiabat_temperature(4e4, up, 1e5, freezing=freezing)
    np.testing.assert_allclose(back, [280.0, 300.0], atol=1e-6)


def test_out_of_range_is_refused():
    """Wrong units and boiling water are named."""
    with pytest.raises(OutOfRangeError, match="temperature: 1 of 1 values lie outside 120 to 340 K"):
        saturated_lapse_rate(9e4, 15.0)
    with pytest.raises(OutOfRangeError, match=r"pressure_end: 1 of 1 values.*multiply hectopascal by 100"):
        pseudoadiabat_temperature(9e4, 288.0, 50.0)
    with pytest.raises(OutOfRangeError, match="water boils"):
        pseudoadiabat_temperature(1000.0, 288.0, 9e4)
    with pytest.raises(OutOfRangeError, match=r"mixing_ratio: 1 of 1 values lie outside 0 to 0\.2"):
        dry_lapse_rate(8.0)
