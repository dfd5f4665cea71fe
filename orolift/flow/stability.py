"""Static stability of a column: buoyancy frequency squared, dry and saturated."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.air.saturation import latent_heat, saturation_mixing_ratio
from orolift.checks import within
from orolift.constants import (
    EPSILON,
    GRAVITY,
    HEAT_CAPACITY_DRY_AIR,
    HEAT_CAPACITY_VAPOUR,
    KAPPA,
    R_DRY,
)
from orolift.flow.profiles import checked_height, integral_to

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

_KELVIN = "orolift works in kelvin; add 273.15 to degrees Celsius."


def dry_n_squared(height: ArrayLike, virtual_potential_temperature: ArrayLike) -> NDArray[np.float64]:
    """Buoyancy frequency squared of unsaturated air.

    Negative where the air is unstable; such values are kept, and
    `unstable_share` tells how much of a layer they fill.

    Parameters
    ----------
    height : array_like, shape (nz,) [m]
        Strictly increasing.
    virtual_potential_temperature : array_like, shape (..., nz) [K]
        100 K to 3000 K.

    Returns
    -------
    ndarray, shape (..., nz) [s-2]
        At the levels: second-order differences inside, one-sided at the ends.

    Raises
    ------
    OutOfRangeError
        If heights do not increase or temperatures are outside the range.

    Notes
    -----
    ``N^2 = g d ln(theta_v) / dz``, the definition.

    Examples
    --------
    >>> dry_n_squared([0.0, 1000.0], [290.0, 293.0]).round(6)
    array([0.000101, 0.000101])
    """
    levels = checked_height(height)
    theta = within("virtual_potential_temperature", virtual_potential_temperature, 100.0, 3000.0, "K", _KELVIN)
    return np.asarray(GRAVITY * np.gradient(np.log(theta), levels, axis=-1))


def moist_n_squared(
    height: ArrayLike, pressure: ArrayLike, temperature: ArrayLike, total_water: ArrayLike, *, freezing: bool = True
) -> NDArray[np.float64]:
    """Buoyancy frequency squared of saturated air that keeps its cloud.

    The whole column is taken as saturated at its temperature; where it is not,
    use `dry_n_squared`, or `effective_n_squared` to join the two.

    Parameters
    ----------
    height : array_like, shape (nz,) [m]
        Strictly increasing.
    pressure : array_like, shape (..., nz) [Pa]
        100 Pa to 110000 Pa. Its change with height is not used: the column is
        taken as hydrostatic.
    temperature : array_like, shape (..., nz) [K]
        150 K to 340 K.
    total_water : array_like, shape (..., nz) [kg per kg of dry air]
        Vapour and cloud, 0 to 0.2. Less than saturation counts as saturation without
        cloud.
    freezing : bool
        Whether cloud freezes between 0 and -20 degrees Celsius.

    Returns
    -------
    ndarray, shape (..., nz) [s-2]
        Negative where saturated air is unstable; such values are kept.

    Raises
    ------
    OutOfRangeError
        If heights do not increase or a value is outside its range.

    Notes
    -----
    The full form of Durran and Klemp (1982) [1]_,
    ``N_m^2 = (g/T) (dT/dz + G) (1 + L qs / (R T)) - g / (1 + qw) dqw/dz`` with the
    saturated lapse rate G of air that keeps its cloud. The coefficients of this form
    are written from memory of that paper; the buoyancy of displaced parcels of this package's own
    thermodynamics gives the same to a thousandth: see ``tests/flow/test_stability.py``. Assumed: cloud is
    carried with the air, hydrostatic balance.

    References
    ----------
    .. [1] D. R. Durran and J. B. Klemp (1982), "On the effects of moisture on
       the Brunt-Vaisala frequency", J. Atmos. Sci. 39, 2152-2158.

    Examples
    --------
    >>> pressure, temperature = [85500.0, 85000.0], [280.24, 280.0]
    >>> moist_n_squared([-48.0, 0.0], pressure, temperature, [0.0076, 0.0076]).round(6)[1]
    np.float64(1.3e-05)
    """
    levels = checked_height(height)
    t, qs, heat, qw = _saturated(pressure, temperature, total_water, freezing)
    # Kirchhoff: heat capacity of the condensate, with the heat of freezing while its ice share grows
    warmer, colder = latent_heat(t + 0.05, freezing=freezing), latent_heat(t - 0.05, freezing=freezing)
    c_cloud = HEAT_CAPACITY_VAPOUR - (warmer - colder) / 0.1
    release = 1.0 + heat * qs / (R_DRY * t)
    capacity = HEAT_CAPACITY_DRY_AIR + HEAT_CAPACITY_VAPOUR * qs + c_cloud * (qw - qs)
    phase = EPSILON * heat**2 * qs / (R_DRY * t**2) * (1.0 + qs / EPSILON)
    lapse = GRAVITY * (1.0 + qw) * release / (capacity + phase)
    lift = (GRAVITY / t) * (np.gradient(t, levels, axis=-1) + lapse) * release
    return np.asarray(lift - GRAVITY / (1.0 + qw) * np.gradient(qw, levels, axis=-1))


def moist_n_squared_approximate_durran_klemp_1982(
    height: ArrayLike, pressure: ArrayLike, temperature: ArrayLike, total_water: ArrayLike, *, freezing: bool = True
) -> NDArray[np.float64]:
    """Buoyancy frequency squared of saturated air, approximate form.

    Use `moist_n_squared`; this one is kept to compare with.

    Parameters
    ----------
    height : array_like, shape (nz,) [m]
        Strictly increasing.
    pressure : array_like, shape (..., nz) [Pa]
        100 Pa to 110000 Pa.
    temperature : array_like, shape (..., nz) [K]
        150 K to 340 K.
    total_water : array_like, shape (..., nz) [kg per kg of dry air]
        Vapour and cloud, 0 to 0.2; less than saturation counts as saturation without
        cloud.
    freezing : bool
        Whether cloud freezes between 0 and -20 degrees Celsius.

    Returns
    -------
    ndarray, shape (..., nz) [s-2]

    Raises
    ------
    OutOfRangeError
        If heights do not increase or a value is outside its range.

    Notes
    -----
    Durran and Klemp (1982) [1]_: ``N_m^2 = g {[1 + L qs/(R T)] / [1 + eps L^2 qs /
    (cp R T^2)] (d ln(theta)/dz + L/(cp T) dqs/dz) - dqw/dz}``, with the potential
    temperature of dry air (not the equivalent one) and total water in the last term.

    References
    ----------
    .. [1] D. R. Durran and J. B. Klemp (1982), "On the effects of moisture on
       the Brunt-Vaisala frequency", J. Atmos. Sci. 39, 2152-2158.

    Examples
    --------
    >>> pressure, temperature = [85500.0, 85000.0], [280.24, 280.0]
    >>> column = ([-48.0, 0.0], pressure, temperature, [0.0076, 0.0076])
    >>> bool(moist_n_squared_approximate_durran_klemp_1982(*column)[1] < 2e-5)
    True
    """
    levels = checked_height(height)
    t, qs, heat, qw = _saturated(pressure, temperature, total_water, freezing)
    log_theta = np.log(t) - KAPPA * np.log(np.asarray(pressure, dtype=np.float64))
    slopes = [np.gradient(part, levels, axis=-1) for part in (log_theta, qs, qw)]
    return _approximate(t, qs, heat, slopes, GRAVITY, R_DRY, HEAT_CAPACITY_DRY_AIR, EPSILON)


def effective_n_squared(dry: ArrayLike, moist: ArrayLike, saturated: ArrayLike) -> NDArray[np.float64]:
    """Buoyancy frequency squared of air that is saturated in part.

    Parameters
    ----------
    dry, moist : array_like, any shape [s-2]
        From `dry_n_squared` and `moist_n_squared`.
    saturated : array_like, shape of the others [1]
        Share that is saturated, 0 to 1 (or a yes/no mask).

    Returns
    -------
    ndarray [s-2]

    Raises
    ------
    OutOfRangeError
        If a share is outside 0 to 1.

    Notes
    -----
    Weighted mean: below cloud base the dry value, above it the moist one.
    Common practice, from memory; no published constants.

    Examples
    --------
    >>> effective_n_squared(1e-4, 2e-5, [0.0, 0.5, 1.0])
    array([1.e-04, 6.e-05, 2.e-05])
    """
    share = within("saturated", saturated, 0.0, 1.0, "1", "Give a share, not per cent.")
    return np.asarray((1.0 - share) * np.asarray(dry, np.float64) + share * np.asarray(moist, np.float64))


def unstable_share(height: ArrayLike, n_squared: ArrayLike, bottom: ArrayLike, top: ArrayLike) -> NDArray[np.float64]:
    """Share of a layer whose stratification is unstable or neutral.

    Say so where it is not zero: blocking and waves treat such air as neutral.

    Parameters
    ----------
    height : array_like, shape (nz,) [m]
        Strictly increasing.
    n_squared : array_like, shape (..., nz) [s-2]
    bottom, top : array_like, shape (...) [m]
        The layer; without depth the share is 0.

    Returns
    -------
    ndarray, shape (...) [1]
        0 to 1.

    Examples
    --------
    >>> unstable_share([0.0, 500.0, 501.0, 2000.0], [-1e-5, -1e-5, 1e-4, 1e-4], 0.0, 1000.0).round(2)
    np.float64(0.5)
    """
    levels = checked_height(height)
    ends = np.stack(np.broadcast_arrays(np.asarray(bottom, float), np.asarray(top, float)), axis=-1)
    parts = integral_to(levels, np.where(np.asarray(n_squared) > 0.0, 0.0, 1.0), ends)
    depth = ends[..., 1] - ends[..., 0]
    share = (parts[..., 1] - parts[..., 0]) / np.where(depth > 0.0, depth, 1.0)
    return np.asarray(np.where(depth > 0.0, np.clip(share, 0.0, 1.0), 0.0))


def _approximate(
    t: NDArray[np.float64],
    qs: NDArray[np.float64],
    heat: NDArray[np.float64],
    slopes: list[NDArray[np.float64]],
    g: float,
    r: float,
    cp: float,
    eps: float,
) -> NDArray[np.float64]:
    """The approximate form from the slopes of ln(theta), qs and qw: apart, so that tests may use printed constants."""
    log_theta_slope, qs_slope, qw_slope = slopes
    factor = (1.0 + heat * qs / (r * t)) / (1.0 + eps * heat**2 * qs / (cp * r * t**2))
    return np.asarray(g * (factor * (log_theta_slope + heat / (cp * t) * qs_slope) - qw_slope))


def _saturated(
    pressure: ArrayLike, temperature: ArrayLike, total_water: ArrayLike, freezing: bool
) -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]:
    """Temperature, saturation mixing ratio, latent heat, and total water of at least saturation."""
    p = within("pressure", pressure, 100.0, 110000.0, "Pa", "Multiply hectopascals by 100.")
    t = within("temperature", temperature, 150.0, 340.0, "K", _KELVIN)
    water = within("total_water", total_water, 0.0, 0.2, "kg kg-1", "Divide g/kg by 1000.")
    qs = saturation_mixing_ratio(p, t, freezing=freezing)
    return t, qs, latent_heat(t, freezing=freezing), np.maximum(water, qs)
