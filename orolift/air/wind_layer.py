"""Wind of a layer of the incoming air: its mean, its parts along and across a line, how it turns with height."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated, wind_component
from orolift.checks import within
from orolift.errors import IncomingAirError

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from orolift.air.column import IncomingAir

ABOVE_CREST = 500.0
"""Depth above the crest [m] that still belongs to the barrier layer; common practice, no published source."""
TURNING_FLAGGED = float(np.radians(45.0))
"""Turning across the barrier [rad] from which one direction no longer stands for the layer (a judgement)."""
LEAST_WIND = 2.0
"""Wind [m s-1] below which a direction says nothing (a judgement)."""


@dataclass(frozen=True, eq=False)
class LayerWind:
    """Mean wind of a layer and how it turns in it.

    Attributes
    ----------
    speed : ndarray, shape (...) [m s-1]
        Of the mean of the components: less than the mean speed where the wind turns.
    from_direction : ndarray, shape (...) [rad]
        0 to 2 pi, clockwise from north.
    turning : ndarray, shape (...) [rad]
        Direction in the upper third minus that in the lower third, -pi to pi;
        positive: veering (clockwise with height). 0 where either is weaker than 2 m/s.
    bottom, top : float [m above sea level]
        The layer that was used.
    """

    speed: NDArray[np.float64]
    from_direction: NDArray[np.float64]
    turning: NDArray[np.float64]
    bottom: float
    top: float


@dataclass(frozen=True, eq=False)
class LineWind:
    """Wind along and across a line at every level of a column.

    Attributes
    ----------
    height : ndarray, shape (nz,) [m above sea level]
    along : ndarray, shape (..., nz) [m s-1]
        Positive toward the bearing of the line.
    across : ndarray, shape (..., nz) [m s-1]
        Positive toward the right of the line, seen along it.
    """

    height: NDArray[np.float64]
    along: NDArray[np.float64]
    across: NDArray[np.float64]


def line_wind(air: IncomingAir, bearing: ArrayLike) -> LineWind:
    """Wind along and across a line at every level.

    Parameters
    ----------
    air : IncomingAir
    bearing : array_like, scalar or shape (..., 1) [rad]
        Direction the line runs toward, clockwise from north.

    Returns
    -------
    LineWind

    Raises
    ------
    OutOfRangeError
        If the bearing is NaN or outside -3 pi to 3 pi.

    Examples
    --------
    >>> from orolift.air.column_build import air_from_station
    >>> air = air_from_station(40.0, 100400.0, 287.65, 0.0082, 10.0, np.radians(270.0))
    >>> wind = line_wind(air, np.radians(60.0))
    >>> wind.along[0].round(2), wind.across[0].round(2)
    (np.float64(8.66), np.float64(5.0))
    """
    toward = within("bearing", bearing, -3 * np.pi, 3 * np.pi, "rad", "orolift works in radians, not degrees.")
    return LineWind(air.height, wind_component(air, toward), wind_component(air, toward + 0.5 * np.pi))


def barrier_wind(air: IncomingAir, base: float, crest: float) -> LayerWind:
    """Wind of the layer that meets a range: from its base to 500 m above its crest.

    Parameters
    ----------
    air : IncomingAir
    base, crest : float [m above sea level]
        Where the base is below the ground of the column, the layer begins at that ground.

    Returns
    -------
    LayerWind

    Raises
    ------
    IncomingAirError
        If the layer is empty or the column does not reach through it.

    Examples
    --------
    >>> from orolift.air.column_build import air_from_station
    >>> air = air_from_station(40.0, 100400.0, 287.65, 0.0082, 5.0, np.pi, crest_wind=(15.0, 1.5 * np.pi, 1500.0))
    >>> wind = barrier_wind(air, 0.0, 1500.0)
    >>> np.degrees(wind.from_direction).round(0), np.degrees(wind.turning).round(0), wind.bottom
    (np.float64(259.0), np.float64(49.0), 40.0)
    """
    return layer_wind(air, base, crest + ABOVE_CREST)


def layer_wind(air: IncomingAir, bottom: float, top: float) -> LayerWind:
    """Wind of any layer of the column.

    Parameters
    ----------
    air : IncomingAir
    bottom, top : float [m above sea level]
        The part above the ground of the column is used.

    Returns
    -------
    LayerWind

    Raises
    ------
    IncomingAirError
        If the layer lies below the column, above it or upside down.

    Notes
    -----
    Means of the components over height, exact for components that are linear
    between levels.
    """
    lower, upper = max(bottom, float(air.height[0])), min(top, float(air.height[-1]))
    if not lower < upper:
        raise IncomingAirError(
            f"bottom, top: the layer from {bottom:.0f} to {top:.0f} m does not lie in the column, which reaches from "
            f"{air.height[0]:.0f} to {air.height[-1]:.0f} m."
        )
    third = (upper - lower) / 3.0
    mean = _mean(air, lower, upper)
    low, high = _mean(air, lower, lower + third), _mean(air, upper - third, upper)
    turn = np.angle(high * np.conj(low))
    steady = (np.abs(low) >= LEAST_WIND) & (np.abs(high) >= LEAST_WIND)
    return LayerWind(
        speed=np.abs(mean),
        from_direction=np.mod(np.angle(mean) + np.pi, 2.0 * np.pi),
        turning=np.asarray(np.where(steady, turn, 0.0), dtype=np.float64),
        bottom=lower,
        top=upper,
    )


def _mean(air: IncomingAir, lower: float, upper: float) -> NDArray[np.complex128]:
    """Mean wind of a layer as north + i east, so that its angle is the bearing it blows toward."""
    between = air.height[(air.height > lower) & (air.height < upper)]
    z = np.concatenate([[lower], between, [upper]])
    read = interpolated(air, z)
    wind = read.northward_wind + 1j * read.eastward_wind
    total = np.sum(0.5 * (wind[..., :-1] + wind[..., 1:]) * np.diff(z), axis=-1)
    return np.asarray(total / (upper - lower), dtype=np.complex128)


def turning_note(wind: LayerWind) -> str | None:
    """A sentence where the wind turns so much that one direction does not stand for the layer.

    Parameters
    ----------
    wind : LayerWind
        Of one column.

    Returns
    -------
    str or None

    Examples
    --------
    >>> turning_note(LayerWind(np.array(9.0), np.array(4.2), np.array(-1.0), 40.0, 2300.0))
    'The wind backs by 57 degrees between the lowest and the highest third of the air from 40 to 2300 m: one direction does not stand for it.'
    """  # noqa: E501 (a doctest shows the whole sentence)
    turn = float(np.max(np.abs(wind.turning)))
    if turn < TURNING_FLAGGED:
        return None
    veers = float(np.ravel(wind.turning)[int(np.argmax(np.abs(np.ravel(wind.turning))))]) > 0.0
    return (
        f"The wind {'veers' if veers else 'backs'} by {np.degrees(turn):.0f} degrees between the lowest and the "
        f"highest third of the air from {wind.bottom:.0f} to {wind.top:.0f} m: one direction does not stand for it."
    )
