"""The crossing: incoming air taken over a transect, and what it is like in the lee."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated, vapour_flux, wind_component
from orolift.air.humidity import dew_point_from_mixing_ratio
from orolift.crossing.cloud import clouds
from orolift.crossing.facts import crest_line_notes, flow_facts, remarks, water
from orolift.crossing.heat import heat_cautions, heat_notes
from orolift.crossing.lee_wind import lee_winds
from orolift.crossing.march import March
from orolift.crossing.pool import Lee, humidity_note
from orolift.crossing.rainfall import rainfall
from orolift.crossing.result import Crossing, Site, When
from orolift.crossing.settings import Settings, checked
from orolift.crossing.sites import site_air
from orolift.crossing.solve import CrestLine, Ground, ends, solve
from orolift.errors import NoCrossingError
from orolift.terrain.features import Features, features

if TYPE_CHECKING:
    from orolift.air.column import IncomingAir
    from orolift.terrain.range_normal import RangeNormal
    from orolift.terrain.transect import Transect

LEAST_CROSSING_WIND = 2.0
"""Weakest wind component across the crest [m s-1] that is still worked out; a judgement, no published source."""
CREST_LAYER = 500.0
"""Depth above the crest [m] over which that component is averaged; common practice, no published source."""
LEAST_COHERENCE = 0.3
"""Below this coherence the ground has no direction and the transect itself is taken as the normal; a judgement."""
LEAST_COSINE = 0.2
"""Smallest cosine between transect and range normal that is worked out: 78 degrees off; a judgement."""


def cross(
    transect: Transect,
    incoming: IncomingAir,
    sites: tuple[Site, ...] = (),
    settings: Settings | None = None,
    *,
    lee: Lee | None = None,
    when: When | None = None,
    normal: RangeNormal | None = None,
    lowest_pass: float | None = None,
    crest_line: CrestLine | None = None,
    stagnant_top: float | None = None,
    background: float = 0.0,
    streamlines: int = 60,
    in_full: bool = True,
) -> Crossing:
    """Incoming air taken over a transect.

    Parameters
    ----------
    transect : Transect
    incoming : IncomingAir
        Undisturbed column upwind, its winds as measured.
    sites : tuple of Site
        Without any, the lee foot of the transect is the one site.
    settings : Settings, optional
        Single values.
    lee : Lee, optional
        What is known of the air lying in the lee.
    when : When, optional
        Time and place, for the sun and for rotation.
    normal : RangeNormal, optional
        Direction across the range; the transect's when left out or without coherence.
    lowest_pass : float, optional [m above sea level]
    crest_line : CrestLine, optional
        Ground along the range, for its gaps.
    stagnant_top : float, optional [m above sea level]
        Top of a stagnant layer at the ground of the incoming column, which is no inflow of the range.
    background : float [kg m-2 s-1]
        Rain that falls anyway.
    streamlines : int
        How many, 20 or more.
    in_full : bool
        False leaves out what many crossings do without: the ends without blocking and with full blocking are then
        the answer itself, and trapped waves are not looked for.

    Returns
    -------
    Crossing

    Raises
    ------
    NoCrossingError
        If the wind component across the range, averaged over 500 m above
        the crest, is 2 m/s or less, or the transect runs along the range.
    TerrainError
        If the transect has no crest with lower ground on both sides.
    OutOfRangeError
        If a setting or the distance of a site is out of range.

    Notes
    -----
    How it is worked out: `orolift.crossing.upwind` (stability, blocking),
    `streams` (streamlines and the march along them), `arrival` (mixing at a site, budget),
    `pool` and `heat`. The ends without blocking and with full blocking are worked out beside the answer.
    """
    settings, when, lee = checked(settings or Settings()), when or When(), lee or Lee()
    shape = features(transect, sites[0].distance if sites else None)
    ground = ground_under(
        transect,
        shape,
        incoming,
        normal,
        when,
        lowest_pass=lowest_pass,
        crest_line=crest_line,
        stagnant_top=stagnant_top,
    )
    crest_wind = crest_component(incoming, ground.normal, shape.crest)
    sites = sites or (Site("Lee foot", shape.lee_foot_distance),)
    tried, members = (ends(settings), 3) if in_full else (settings, 1)
    solution = solve(ground, incoming, tried, lee, members=members, streamlines=streamlines)
    solution.going_round[1:] = 0.0
    streams = solution.streams
    air = March(**{key: getattr(streams.air, key)[:, 0, :] for key in March.__dataclass_fields__})
    flow = flow_facts(ground, solution, crest_wind, settings, lee, when, trapped=in_full)
    height = streams.flow.heights[0][:, streams.place].T
    (winds,) = lee_winds(ground, solution, [crest_wind], [flow.pressure_difference], members=1)
    cloud = clouds(solution, transect.distance, shape, freezing=settings.freezing)
    places, rain = transect.distance[streams.place], rainfall(ground, solution, background)
    lee_airs = tuple(
        replace(
            site_air(site, ground, incoming, solution, settings, when, winds),
            number=number,
            rain=float(np.interp(site.distance, places, rain.rate)) + rain.background,
        )
        for number, site in enumerate(sites, start=1)
    )
    return Crossing(
        incoming=incoming,
        transect=transect,
        features=shape,
        sites=sites,
        settings=settings,
        distance=places,
        start_height=streams.flow.start_heights[0],
        height=height,
        air=air,
        dew_point=np.asarray(dew_point_from_mixing_ratio(air.pressure, np.maximum(air.vapour, LEAST_VAPOUR))),
        wind=(streams.wind[0][:, np.newaxis] * streams.flow.speed_factor[0][:, streams.place]).T,
        breaking=streams.flow.breaking[0][:, streams.place].T,
        flow=flow,
        cloud=cloud,
        water=water(solution, float(vapour_flux(incoming, ground.normal))),
        rain=rain,
        pool=solution.pools[0],
        winds=winds,
        lee=lee_airs,
        notes=(
            *incoming.notes,
            *transect.notes,
            *crest_line_notes(ground, flow.blocked_top),
            *heat_notes(settings, when),
            *humidity_note(lee, solution.pools[0]),
        ),
        cautions=(*remarks(ground, solution, flow), *heat_cautions(lee_airs, cloudy=cloud.base is not None)),
    )


LEAST_VAPOUR = 1e-8
"""Vapour [kg per kg] below which a dew point is that of this much."""


def ground_under(
    transect: Transect,
    shape: Features,
    incoming: IncomingAir,
    normal: RangeNormal | None,
    when: When,
    *,
    lowest_pass: float | None = None,
    crest_line: CrestLine | None = None,
    stagnant_top: float | None = None,
) -> Ground:
    """Terrain with its normal; the transect's own direction where the ground has none.

    Parameters
    ----------
    transect : Transect
    shape : Features
    incoming : IncomingAir
        Of one member.
    normal : RangeNormal or None
    when : When
    lowest_pass, crest_line, stagnant_top
        As for `cross`.

    Returns
    -------
    Ground

    Raises
    ------
    NoCrossingError
        If the transect runs along the range.
    """
    along = toward(transect, incoming)
    bearing = along if normal is None or normal.coherence < LEAST_COHERENCE else normal.bearing
    cosine = float(np.cos(bearing - along))
    if cosine < LEAST_COSINE:
        off = np.degrees(np.arccos(np.clip(cosine, -1.0, 1.0)))
        raise NoCrossingError(
            f"the air does not cross: the line runs along the range, {off:.0f} degrees off the direction across it "
            f"({np.degrees(bearing):.0f} degrees). Check the wind direction, or give range_normal_deg in [flow]."
        )
    return Ground(
        transect,
        shape,
        bearing,
        cosine,
        lowest_pass=lowest_pass,
        crest_line=crest_line,
        latitude=when.latitude,
        stagnant_top=stagnant_top,
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
            f"the air does not cross: the wind component across the range, averaged from the crest at {crest:.0f} m to "
            f"{crest + CREST_LAYER:.0f} m, is {component:.1f} m/s; more than {LEAST_CROSSING_WIND:g} m/s is needed. "
            "Check the wind direction. Shallow flow through passes is possible and is not computed."
        )
    return component
