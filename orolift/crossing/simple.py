"""Three simple answers for the air at a place, for the crossing to be held against."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.air.parcel import Parcel
from orolift.crossing.arrival import frozen_temperature
from orolift.crossing.picture import popular_picture, upwind_ground_air

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from orolift.air.column import IncomingAir


@dataclass(frozen=True, eq=False)
class SimpleAnswers:
    """Air at places by three rules that need no crossing; parcels of shape (n,).

    Attributes
    ----------
    unchanged : Parcel
        Incoming air at the height of the place.
    popular_picture : Parcel
        Surface air lifted over the crest, all condensate removed, brought down dry.
    crest_air : Parcel
        Incoming air at the height of the crest, brought down dry.
    """

    unchanged: Parcel
    popular_picture: Parcel
    crest_air: Parcel


def simple_answers(
    incoming: IncomingAir, crest: float, elevation: ArrayLike, *, freezing: bool = True
) -> SimpleAnswers:
    """Three simple answers at places.

    Parameters
    ----------
    incoming : IncomingAir, fields (nz,)
    crest : float [m above sea level]
    elevation : array_like (n,) [m above sea level]
        Of the places.
    freezing : bool

    Returns
    -------
    SimpleAnswers

    Raises
    ------
    OutOfRangeError
        If a height lies outside the column.

    Notes
    -----
    All at the pressure the incoming air has at the height of the place. The
    crest air keeps its vapour and its potential temperature on the way down; cloud it may hold goes with it.

    Examples
    --------
    >>> from orolift.air.column_build import air_from_station
    >>> air = air_from_station(40.0, 100400.0, 287.65, 0.0082, 12.9, 4.1)
    >>> answers = simple_answers(air, 1850.0, [210.0])
    >>> [float(x.temperature[0].round(1)) for x in (answers.unchanged, answers.popular_picture, answers.crest_air)]
    [286.5, 292.0, 292.0]
    """
    z = np.atleast_1d(np.asarray(elevation, dtype=np.float64))
    here, top = interpolated(incoming, z), interpolated(incoming, crest)
    p = here.pressure
    picture = popular_picture(upwind_ground_air(incoming), float(top.pressure), p, freezing=freezing)
    warmed = frozen_temperature(top.pressure, top.temperature, top.vapour, top.cloud, p)
    vapour, cloud = (np.broadcast_to(x, p.shape) for x in (top.vapour, top.cloud))
    return SimpleAnswers(
        unchanged=Parcel(p, here.temperature, here.vapour, here.cloud),
        popular_picture=Parcel(*(np.broadcast_to(x, p.shape) for x in _fields(picture))),
        crest_air=Parcel(p, warmed, vapour, cloud),
    )


def _fields(parcel: Parcel) -> tuple[np.ndarray[tuple[int, ...], np.dtype[np.float64]], ...]:
    return parcel.pressure, parcel.temperature, parcel.vapour, parcel.cloud
