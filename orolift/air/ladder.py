"""Incoming air from several stations at different elevations: a station ladder."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import IncomingAir, Origin
from orolift.air.column_build import HIGHEST_LEVEL, CrestWind, air_from_station
from orolift.air.column_profile import balanced, levels_through, vapour_at
from orolift.air.saturation import saturation_vapour_pressure, saturation_vapour_pressure_over_liquid
from orolift.air.standard import standard_pressure
from orolift.checks import within
from orolift.constants import STANDARD_LAPSE_RATE
from orolift.errors import IncomingAirError

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from orolift.air.column_profile import Moisture

    Array = NDArray[np.float64]

SAME_ELEVATION = 20.0
"""Stations this near in height [m] count as one, the mean of them: a judgement."""
_SPACING = 100.0
_ROUNDS = 20
_STATION: Origin = "station"
_BETWEEN: Origin = "between stations"


@dataclass(frozen=True)
class LadderStation:
    """One station of a ladder.

    Attributes
    ----------
    elevation : float [m above sea level]
        -500 m to 6000 m.
    temperature : float [K]
        180 K to 330 K.
    relative_humidity : float [1]
        Over liquid water, 0 to 1.05; capped at saturation.
    pressure : float or None [Pa]
        At the station; one station of the ladder needs it.
    eastward_wind, northward_wind : float or None [m s-1]
        One station of the ladder needs them.
    """

    elevation: float
    temperature: float
    relative_humidity: float
    pressure: float | None = None
    eastward_wind: float | None = None
    northward_wind: float | None = None


def air_from_ladder(
    stations: Sequence[LadderStation],
    *,
    lapse_rate: float = STANDARD_LAPSE_RATE,
    crest_wind: CrestWind | None = None,
    top: float = HIGHEST_LEVEL,
    freezing: bool = True,
) -> IncomingAir:
    """Column through several stations, from the lowest to above the highest.

    Parameters
    ----------
    stations : sequence of LadderStation
        In any order.
    lapse_rate : float [K m-1]
        Above the highest station.
    crest_wind : CrestWind or None
        Wind at a height, if known; it goes before those of the stations above it.
    top : float [m above sea level]
        16000 m to 30000 m.
    freezing : bool
        False: saturation is over liquid at all temperatures.

    Returns
    -------
    IncomingAir

    Raises
    ------
    OutOfRangeError
        If a value is outside its range.
    IncomingAirError
        If there is no station, or none with a pressure, or no wind at all.

    Notes
    -----
    Assumptions, each in the notes: temperature, relative humidity over liquid
    and the components of the wind change evenly with height between stations;
    stations within 20 m of height count as one; above the highest, the column
    of `air_from_station`. The pressure is that of the lowest station that has
    one, hydrostatic from there.

    Examples
    --------
    >>> valley = LadderStation(400.0, 288.0, 0.7, 96600.0, 3.0, 0.0)
    >>> summit = LadderStation(2400.0, 276.0, 0.9, None, 12.0, 0.0)
    >>> air = air_from_ladder([valley, summit])
    >>> air.temperature[[0, 10, 20]].round(1), air.pressure[20].round(-2), air.origin[10]
    (array([288., 282., 276.]), np.float64(75900.0), 'between stations')
    """
    _check(stations)
    rungs = _rungs(stations)
    z = np.array([rung.elevation for rung in rungs])
    t_known = np.array([rung.temperature for rung in rungs])
    rh_known = np.array([rung.relative_humidity for rung in rungs])
    low_crest = crest_wind is not None and crest_wind.height <= z[-1]
    kinks = (*z, crest_wind.height) if crest_wind is not None and crest_wind.height > z[0] and low_crest else tuple(z)
    height = levels_through((z[0], *kinks, z[-1]), _SPACING)
    t = np.interp(height, z, t_known)
    humidity = np.interp(height, z, rh_known)
    e_liquid, e_most = saturation_vapour_pressure_over_liquid(t), saturation_vapour_pressure(t, freezing=freezing)

    def moisture(p: Array) -> tuple[Array, Array]:
        return vapour_at(p, e_liquid, e_most, humidity), np.zeros_like(p)

    p, vapour = _pressure(height, t, rungs, moisture)
    eastward, northward = _winds(height, rungs, crest_wind if low_crest else None)
    speed, direction = float(np.hypot(eastward[-1], northward[-1])), float(np.arctan2(-eastward[-1], -northward[-1]))
    above = air_from_station(
        float(z[-1]),
        p[-1],
        t[-1],
        vapour[-1],
        speed,
        direction,
        lapse_rate=lapse_rate,
        crest_wind=None if low_crest else crest_wind,
        top=top,
        freezing=freezing,
        station="station" if len(rungs) == 1 else "highest station",
    )
    origin = tuple(_STATION if np.min(np.abs(z - level)) < 1e-6 else _BETWEEN for level in height)
    note = (
        f"Between the {len(rungs)} stations, from {z[0]:.0f} to {z[-1]:.0f} m, temperature, relative humidity and wind "
        "change evenly with height (assumed)."
    )
    notes = (note,) if len(rungs) > 1 else ()
    low = IncomingAir(height, p, t, vapour, np.zeros_like(vapour), eastward, northward, origin, notes)
    return _joined(low, above)


def _joined(low: IncomingAir, high: IncomingAir) -> IncomingAir:
    """Two columns, the upper of which begins with the last level of the lower."""
    names = ("height", "pressure", "temperature", "vapour", "cloud", "eastward_wind", "northward_wind")
    fields = {name: np.concatenate([getattr(low, name), getattr(high, name)[1:]]) for name in names}
    return IncomingAir(**fields, origin=(*low.origin, *high.origin[1:]), notes=(*low.notes, *high.notes))


def _check(stations: Sequence[LadderStation]) -> None:
    if not stations:
        raise IncomingAirError("stations: none is given; at least one is needed.")
    within("elevation", [one.elevation for one in stations], -500.0, 6000.0, "m", "Give metres above sea level.")
    within("temperature", [one.temperature for one in stations], 180.0, 330.0, "K", "orolift works in kelvin.")
    within(
        "relative_humidity", [one.relative_humidity for one in stations], 0.0, 1.05, "", "Give a share, not per cent."
    )
    pressures = [one.pressure for one in stations if one.pressure is not None]
    within("pressure", pressures, 3.0e4, 1.1e5, "Pa", "orolift works in pascals.")
    if not pressures:
        raise IncomingAirError("stations: none has a pressure; one of them needs it.")
    if all(one.eastward_wind is None or one.northward_wind is None for one in stations):
        raise IncomingAirError("stations: none has a wind; without wind no air crosses.")


def _rungs(stations: Sequence[LadderStation]) -> list[LadderStation]:
    """Stations from the lowest up, those of one height made one."""
    rungs: list[list[LadderStation]] = []
    for one in sorted(stations, key=lambda station: station.elevation):
        if rungs and one.elevation - rungs[-1][0].elevation < SAME_ELEVATION:
            rungs[-1].append(one)
        else:
            rungs.append([one])
    return [rung[0] if len(rung) == 1 else _mean(rung) for rung in rungs]


def _mean(rung: list[LadderStation]) -> LadderStation:
    def of(values: list[float | None]) -> float | None:
        known = [value for value in values if value is not None]
        return sum(known) / len(known) if known else None

    first = next((one for one in rung if one.pressure is not None), None)
    return LadderStation(
        elevation=rung[0].elevation if first is None else first.elevation,
        temperature=float(np.mean([one.temperature for one in rung])),
        relative_humidity=float(np.mean([one.relative_humidity for one in rung])),
        pressure=None if first is None else first.pressure,
        eastward_wind=of([one.eastward_wind for one in rung]),
        northward_wind=of([one.northward_wind for one in rung]),
    )


def _pressure(height: Array, temperature: Array, rungs: list[LadderStation], moisture: Moisture) -> tuple[Array, Array]:
    """Hydrostatic pressure that meets the lowest known one, with the vapour that belongs to it."""
    known = next(rung for rung in rungs if rung.pressure is not None)
    wanted = float(known.pressure or 0.0)
    at = int(np.argmin(np.abs(height - known.elevation)))
    ground = wanted if at == 0 else wanted * float(standard_pressure(height[0]) / standard_pressure(height[at]))
    p, vapour = np.empty(0), np.empty(0)
    for _ in range(_ROUNDS):
        p, vapour, _cloud = balanced(height, temperature, np.asarray(ground), moisture)
        miss = wanted / float(p[at])
        if abs(miss - 1.0) < 1e-13:
            break
        ground *= miss
    return p, vapour


def _winds(height: Array, rungs: list[LadderStation], crest: CrestWind | None) -> tuple[Array, Array]:
    """Wind components between the stations that have a wind, constant beyond."""
    points = [
        (rung.elevation, rung.eastward_wind, rung.northward_wind)
        for rung in rungs
        if rung.eastward_wind is not None and rung.northward_wind is not None
    ]
    if crest is not None:
        speed, direction = float(np.asarray(crest.speed)), float(np.asarray(crest.from_direction))
        points = [point for point in points if point[0] < crest.height]
        points.append((crest.height, -speed * float(np.sin(direction)), -speed * float(np.cos(direction))))
    z, u, v = (np.array(values, dtype=np.float64) for values in zip(*points, strict=True))
    return np.interp(height, z, u), np.interp(height, z, v)
