"""The crossing: incoming air taken over a transect, and what it is like in the lee."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from orolift.air.column import interpolated, vapour_flux, wind_component
from orolift.air.humidity import dew_point_from_mixing_ratio, relative_humidity_from_mixing_ratio
from orolift.air.parcel import Parcel, ascent, moved_to, without_condensate
from orolift.checks import within
from orolift.crossing.march import March, march
from orolift.errors import NoCrossingError
from orolift.terrain.features import Features, features
from orolift.terrain.transect import Transect, transect_elevation

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir

Side = Literal["windward", "crest", "lee"]
LEAST_CROSSING_WIND = 2.0
"""Weakest wind component across the crest [m s-1] that is still worked out; a judgement, no published source."""
CREST_LAYER = 500.0
"""Depth above the crest [m] over which that component is averaged; common practice, no published source."""
CREST_BAND = 0.1
"""A site within this share of the half width of the crest counts as on it; a judgement."""


@dataclass(frozen=True)
class Site:
    """A named place on the transect.

    Attributes
    ----------
    name : str
    distance : float [m]
        From the upwind end of the transect.
    elevation : float or None [m]
        Above sea level; None takes the terrain's.
    """

    name: str
    distance: float
    elevation: float | None = None


@dataclass(frozen=True)
class LeeAir:
    """The air at one site.

    Attributes
    ----------
    name : str
    side : 'windward', 'crest' or 'lee'
    distance, elevation : float [m]
    pressure : float [Pa]
    temperature, dew_point : float [K]
    relative_humidity : float [1]
        Over liquid water.
    mixing_ratio : float [kg per kg of dry air]
    upwind_temperature, upwind_dew_point : float [K]
        Of the incoming air at the height of the site; below the upwind ground
        the column is continued down at its lowest lapse rate.
    popular_picture : float [K]
        Temperature of the surface air lifted over the crest, all condensate
        removed, brought down dry: the textbook picture.
    """

    name: str
    side: Side
    distance: float
    elevation: float
    pressure: float
    temperature: float
    dew_point: float
    relative_humidity: float
    mixing_ratio: float
    upwind_temperature: float
    upwind_dew_point: float
    popular_picture: float

    @property
    def warming(self) -> float:
        """Temperature at the site minus that of the incoming air at its height [K]."""
        return self.temperature - self.upwind_temperature


@dataclass(frozen=True)
class Crossing:
    """What a crossing gives.

    Attributes
    ----------
    incoming : IncomingAir
    transect : Transect
    features : Features
    sites : tuple of Site
    removed_share : float [1]
        Prescribed share of the condensed water that left.
    start_height : ndarray, shape (nz,) [m]
        Heights of the streamlines at the upwind end.
    height : ndarray, shape (ns, nz) [m]
        Heights of the streamlines along the transect.
    air : March
        Their air, arrays (ns, nz).
    dew_point : ndarray, shape (ns, nz) [K]
    crest_wind : float [m s-1]
        Component along the transect, mean over the lowest 500 m above the crest.
    column_vapour_flux : float [kg m-1 s-1]
        Incoming vapour flux along the transect, ground to top.
    cloud_base, cloud_base_distance : float or None [m]
        Lowest height on the windward side at which the air is saturated.
    cloud_end, cloud_end_distance : float or None [m]
        Height and place in the lee at which the last cloud evaporates.
    vapour_in, condensed, removed : float [kg per kg of dry air]
        Of the lowest streamline: vapour at the upwind end, water condensed
        on the way, water that left as rain or snow.
    lee : tuple of LeeAir
        One for every site, in their order.
    notes, cautions : tuple of str
    """

    incoming: IncomingAir
    transect: Transect
    features: Features
    sites: tuple[Site, ...]
    removed_share: float
    start_height: NDArray[np.float64]
    height: NDArray[np.float64]
    air: March
    dew_point: NDArray[np.float64]
    crest_wind: float
    column_vapour_flux: float
    cloud_base: float | None
    cloud_base_distance: float | None
    cloud_end: float | None
    cloud_end_distance: float | None
    vapour_in: float
    condensed: float
    removed: float
    lee: tuple[LeeAir, ...]
    notes: tuple[str, ...]
    cautions: tuple[str, ...]


def cross(
    transect: Transect,
    incoming: IncomingAir,
    sites: tuple[Site, ...] = (),
    *,
    removed_share: float = 0.7,
    freezing: bool = True,
) -> Crossing:
    """Incoming air taken over a transect.

    Parameters
    ----------
    transect : Transect
    incoming : IncomingAir
        Undisturbed column upwind, its winds as measured.
    sites : tuple of Site
        Without any, the lee foot of the transect is the one site.
    removed_share : float [1]
        Share of the condensed water that rains out, 0 to 1.
    freezing : bool
        Whether condensate freezes between 0 and -20 degrees Celsius; False keeps it liquid.

    Returns
    -------
    Crossing

    Raises
    ------
    NoCrossingError
        If the wind component along the transect, averaged over 500 m above
        the crest, is 2 m/s or less.
    TerrainError
        If the transect has no crest with lower ground on both sides.
    OutOfRangeError
        If `removed_share` or the distance of a site is out of range.

    Notes
    -----
    Assumptions of this form: the air at the upwind ground follows the
    terrain, at the pressure of the undisturbed column at each height; nothing
    mixes into it; what condenses leaves at once by the prescribed share.
    """
    share = float(within("removed_share", removed_share, 0.0, 1.0, "1", "It is a share, not a percentage."))
    shape = features(transect, sites[0].distance if sites else None)
    crest_wind = crest_component(incoming, toward(transect, incoming), shape.crest)
    if not sites:
        sites = (Site("Lee foot", shape.lee_foot_distance),)
    height = transect.elevation
    start = ground_air(incoming)
    path = march(start, interpolated(incoming, height).pressure[:, np.newaxis], share, freezing=freezing)
    dew_point = dew_point_from_mixing_ratio(path.pressure, path.vapour)
    crest = int(np.argmin(np.abs(transect.distance - shape.crest_distance)))
    base_height, base_distance = _cloud_edge(transect.distance[: crest + 1], height[: crest + 1], path, 0)
    end_height, end_distance = _cloud_edge(transect.distance[crest:][::-1], height[crest:][::-1], path, crest)
    lee = tuple(_lee_air(site, transect, shape, incoming, path, freezing) for site in sites)
    return Crossing(
        incoming=incoming,
        transect=transect,
        features=shape,
        sites=sites,
        removed_share=share,
        start_height=incoming.height[:1],
        height=height[:, np.newaxis],
        air=path,
        dew_point=np.asarray(dew_point),
        crest_wind=crest_wind,
        column_vapour_flux=float(vapour_flux(incoming, toward(transect, incoming))),
        cloud_base=base_height,
        cloud_base_distance=base_distance,
        cloud_end=end_height,
        cloud_end_distance=end_distance,
        vapour_in=float(start.vapour),
        condensed=float(path.condensed.sum()),
        removed=float(path.removed.sum()),
        lee=lee,
        notes=(*incoming.notes, *transect.notes),
        cautions=(),
    )


def toward(transect: Transect, incoming: IncomingAir) -> float:
    """Bearing the air is taken along [rad]: the transect's, else that of the lowest wind.

    Parameters
    ----------
    transect : Transect
    incoming : IncomingAir

    Returns
    -------
    float [rad]
        Clockwise from north.
    """
    if transect.bearing is not None:
        return transect.bearing
    return float(np.arctan2(incoming.eastward_wind[..., 0], incoming.northward_wind[..., 0]))


def crest_component(incoming: IncomingAir, bearing: float, crest: float) -> float:
    """Wind component along a bearing, mean from the crest to 500 m above it.

    Parameters
    ----------
    incoming : IncomingAir
    bearing : float [rad]
        Direction toward which it counts as positive.
    crest : float [m]

    Returns
    -------
    float [m s-1]

    Raises
    ------
    NoCrossingError
        If it is 2 m/s or less.
    """
    heights = np.linspace(crest, crest + CREST_LAYER, 21)
    component = float(np.mean(wind_component(interpolated(incoming, heights), bearing)))
    if component <= LEAST_CROSSING_WIND:
        raise NoCrossingError(
            f"the air does not cross: the wind component along the line, averaged from the crest at {crest:.0f} m to "
            f"{crest + CREST_LAYER:.0f} m, is {component:.1f} m/s; more than {LEAST_CROSSING_WIND:g} m/s is needed. "
            "Check the wind direction. Shallow flow through passes is possible and is not computed."
        )
    return component


def ground_air(incoming: IncomingAir) -> Parcel:
    """Air at the ground of the upwind column.

    Parameters
    ----------
    incoming : IncomingAir

    Returns
    -------
    Parcel, shape of the leading axes
    """
    return Parcel(
        pressure=incoming.pressure[..., 0],
        temperature=incoming.temperature[..., 0],
        vapour=incoming.vapour[..., 0],
        cloud=incoming.cloud[..., 0],
    )


def popular_picture(start: Parcel, crest_pressure: float, pressure: float, *, freezing: bool = True) -> Parcel:
    """Surface air lifted to the crest, all condensate removed, brought to a pressure: the textbook picture.

    Parameters
    ----------
    start : Parcel
        Air at the upwind ground.
    crest_pressure, pressure : float [Pa]
    freezing : bool

    Returns
    -------
    Parcel

    Notes
    -----
    Cloud the air starts with is removed too. What it lifts over is the
    highest ground, whatever the flow; shown beside the crossing for comparison.
    """
    top, _ = ascent(start, crest_pressure, removed_share=1.0, freezing=freezing)
    dry, _ = without_condensate(top, 1.0)
    return moved_to(dry, pressure, freezing=freezing)


def _cloud_edge(
    distance: NDArray[np.float64], height: NDArray[np.float64], path: March, first: int
) -> tuple[float | None, float | None]:
    """Height and place at which air on the way to the crest, from either side, becomes saturated.

    The step on which cloud appears is divided at the share of it that the
    relative humidity needed to reach one.
    """
    part = slice(first, first + distance.size)
    cloud = path.cloud[part, 0]
    vapour, pressure, temperature = path.vapour[part, 0], path.pressure[part, 0], path.temperature[part, 0]
    if first:
        cloud, vapour, pressure, temperature = cloud[::-1], vapour[::-1], pressure[::-1], temperature[::-1]
    wet = cloud > 0.0
    if not wet.any():
        return None, None
    i = int(np.argmax(wet))
    if i == 0:
        return float(height[0]), float(distance[0])
    humidity = relative_humidity_from_mixing_ratio(
        pressure[i - 1 : i + 1], temperature[i - 1 : i + 1], vapour[i - 1 : i + 1]
    )
    share = float(np.clip((1.0 - humidity[0]) / max(humidity[1] - humidity[0], 1e-12), 0.0, 1.0))
    return (
        float(height[i - 1] + share * (height[i] - height[i - 1])),
        float(distance[i - 1] + share * (distance[i] - distance[i - 1])),
    )


def _lee_air(
    site: Site, transect: Transect, shape: Features, incoming: IncomingAir, path: March, freezing: bool
) -> LeeAir:
    """Air of the lowest streamline at a site, moved to its elevation without further removal."""
    ground = float(transect_elevation(transect, site.distance))
    elevation = ground if site.elevation is None else site.elevation
    i = int(np.argmin(np.abs(transect.distance - site.distance)))
    here = interpolated(incoming, np.array([elevation, shape.crest]))
    pressure = float(here.pressure[0])
    arrived = moved_to(
        Parcel(path.pressure[i, 0], path.temperature[i, 0], path.vapour[i, 0], path.cloud[i, 0]), pressure
    )
    dew_point = float(dew_point_from_mixing_ratio(pressure, arrived.vapour))
    picture = popular_picture(ground_air(incoming), float(here.pressure[1]), pressure, freezing=freezing)
    return LeeAir(
        name=site.name,
        side=side_of(site.distance, shape),
        distance=site.distance,
        elevation=elevation,
        pressure=pressure,
        temperature=float(arrived.temperature),
        dew_point=dew_point,
        relative_humidity=float(relative_humidity_from_mixing_ratio(pressure, arrived.temperature, arrived.vapour)),
        mixing_ratio=float(arrived.vapour),
        upwind_temperature=float(here.temperature[0]),
        upwind_dew_point=float(dew_point_from_mixing_ratio(pressure, here.vapour[0])),
        popular_picture=float(picture.temperature),
    )


def side_of(distance: float, shape: Features) -> Side:
    """Side of the crest a place is on; within a tenth of the half width it is on the crest."""
    offset = distance - shape.crest_distance
    if abs(offset) <= CREST_BAND * shape.half_width:
        return "crest"
    return "lee" if offset > 0.0 else "windward"
