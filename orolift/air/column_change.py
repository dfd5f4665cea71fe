"""The same column with other values: members of an ensemble, or what would have been."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column_profile import balanced, split_at_saturation
from orolift.checks import within

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from orolift.air.column import IncomingAir

    Array = NDArray[np.float64]


def with_values(
    air: IncomingAir,
    *,
    ground_pressure: ArrayLike | None = None,
    temperature: ArrayLike | None = None,
    water: ArrayLike | None = None,
    eastward_wind: ArrayLike | None = None,
    northward_wind: ArrayLike | None = None,
    freezing: bool = True,
) -> IncomingAir:
    """The column with some of its values replaced, again hydrostatic, at the same heights.

    Parameters
    ----------
    air : IncomingAir
    ground_pressure : array_like, shape (...) [Pa] or None
        Pressure at the lowest level, 30000 Pa to 110000 Pa.
    temperature : array_like, shape (..., nz) [K] or None
        160 K to 335 K.
    water : array_like, shape (..., nz) [kg kg-1 of dry air] or None
        Vapour and cloud together, 0 to 0.1; what exceeds saturation is cloud.
        None: the vapour and cloud of the column together.
    eastward_wind, northward_wind : array_like, shape (..., nz) [m s-1] or None
    freezing : bool
        False: saturation is over liquid at all temperatures.

    Returns
    -------
    IncomingAir
        Fields of the broadcast shape of what is given and what is kept.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Examples
    --------
    >>> from orolift.air.column_build import air_from_station
    >>> air = air_from_station(40.0, 100400.0, 287.65, 0.0082, 12.9, 4.1)
    >>> warmer = with_values(air, temperature=air.temperature + np.array([[0.0], [1.0]]))
    >>> warmer.pressure.shape, bool(warmer.pressure[1, 50] > warmer.pressure[0, 50])
    ((2, 201), True)
    """
    p0 = within("ground_pressure", _or(ground_pressure, air.pressure[..., 0]), 3.0e4, 1.1e5, "Pa")
    t = within("temperature", _or(temperature, air.temperature), 160.0, 335.0, "K")
    total = within("water", _or(water, air.vapour + air.cloud), 0.0, 0.1, "kg/kg")
    u = within("eastward_wind", _or(eastward_wind, air.eastward_wind), -300.0, 300.0, "m/s")
    v = within("northward_wind", _or(northward_wind, air.northward_wind), -300.0, 300.0, "m/s")
    shape = np.broadcast_shapes(p0[..., np.newaxis].shape, t.shape, total.shape, u.shape, v.shape)
    t = np.broadcast_to(t, shape)

    def moisture(p: Array) -> tuple[Array, Array]:
        return split_at_saturation(p, t, total, freezing=freezing)

    p, vapour, cloud = balanced(air.height, t, p0, moisture)
    return replace(
        air,
        pressure=p,
        temperature=t,
        vapour=vapour,
        cloud=cloud,
        eastward_wind=np.broadcast_to(u, shape),
        northward_wind=np.broadcast_to(v, shape),
    )


def _or(given: ArrayLike | None, kept: Array) -> ArrayLike:
    """What is given, else what is kept."""
    return kept if given is None else given
