"""The results file: every key from the first version on, null where nothing is worked out yet."""

from __future__ import annotations

import platform
from dataclasses import asdict
from importlib import metadata
from typing import TYPE_CHECKING, Literal

import numpy as np
from pydantic import Field

from orolift import __version__
from orolift.air.column import column_vapour, freezing_level
from orolift.air.humidity import dew_point_from_mixing_ratio, relative_humidity_from_mixing_ratio
from orolift.constants import MELTING_POINT
from orolift.sources.fire_results import FireBlock, fire_blocks
from orolift.sources.rain_results import (
    CatchmentBlock,
    GaugesBlock,
    MapBlock,
    catchment_blocks,
    gauges_block,
    map_block,
)
from orolift.sources.result_block import Block, Chance, Range
from orolift.sources.spread_results import SpreadBlock, at_site, ranges_of, site_chances, spread_block
from orolift.sources.units import UNITS
from orolift.sources.wind_results import LeeWindBlock, lee_wind_block
from orolift.spread.at_sites import column_of, on_its_line
from orolift.spread.ranges import range_of

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from orolift.crossing.result import Crossing, LeeAir
    from orolift.fire.sites import SiteFire
    from orolift.sources.case_model import Case
    from orolift.sources.map_inputs import Mapped
    from orolift.sources.site_places import SitePlace
    from orolift.spread.spread import Spread

SCHEMA_VERSION = "1"
LIBRARIES = ("numpy", "scipy", "rasterio", "shapely", "jinja2", "contourpy", "pydantic", "click", "metar")


class Program(Block):
    """What made the file."""

    version: str
    python: str
    libraries: dict[str, str] = Field(description="versions of the libraries used")


class CaseBlock(Block):
    """Which case it was."""

    title: str | None
    valid_time: str | None = Field(description="ISO 8601 with zone")
    seed: int | None = Field(description="of the random members; null when there are none")


class IncomingBlock(Block):
    """The air before the range, at the upwind ground unless said otherwise."""

    temperature_c: float
    dew_point_c: float
    relative_humidity_percent: float = Field(description="over liquid water")
    wind_ms: float
    cross_range_wind_ms: float | None = Field(description="component along the transect, crest to crest + 500 m")
    stability_per_s: float | None = Field(description="buoyancy frequency, mean from base to crest")
    freezing_level_m: float | None = Field(description="above sea level; null when the whole column is below 0 degC")
    column_vapour_kg_m2: float
    range: Range = Field(
        default_factory=dict, description="key: [10 %, 90 %], error of the method included where stated"
    )
    input_range: Range = Field(default_factory=dict, description="the same by the uncertainty of the inputs alone")


class TerrainBlock(Block):
    """Base, crest and lee foot; distances from the upwind end, or in the numbers of a hand-entered ridge."""

    base_m: float
    base_km: float
    crest_m: float
    crest_km: float
    lee_foot_m: float
    lee_foot_km: float
    half_width_km: float
    range: Range = Field(default_factory=dict, description="key: [10 %, 90 %]")


class FlowBlock(Block):
    """How the air crosses."""

    nondimensional_height: float | None
    regime: str | None
    dividing_height_m: float | None
    blocked_top_m: float | None
    blocked_top_range_m: tuple[float, float] | None
    going_round_share: float | None
    source_level_m: float | None
    cloud_base_m: float | None = Field(description="above sea level; null when no cloud forms")
    breaks_through: bool | None
    wave_breaking: bool | None
    pressure_difference_hpa: float | None
    range: Range = Field(
        default_factory=dict, description="key: [10 %, 90 %], error of the method included where stated"
    )
    input_range: Range = Field(default_factory=dict, description="the same by the uncertainty of the inputs alone")


class RainBlock(Block):
    """How much rains out, and where."""

    rain_out_share: float | None = Field(description="precipitation / water that condensed; null when none did")
    drying_ratio: float | None = Field(description="precipitation / incoming vapour of the crossing air")
    drying_ratio_full_column: float | None
    windward_share: float | None
    peak_mm_per_h: float | None
    peak_km: float | None
    total_kg_per_m_s: float | None
    snow_share: float | None = Field(description="of what falls on the line; null without rain")
    map: MapBlock | None = Field(description="rain over the map; null without a raster")
    range: Range = Field(
        default_factory=dict, description="key: [10 %, 90 %], error of the method included where stated"
    )
    input_range: Range = Field(default_factory=dict, description="the same by the uncertainty of the inputs alone")


class WarmingParts(Block):
    """Warming at a site, split; adds up to `warming_c`."""

    descent: float
    latent: float
    going_round: float
    mixing: float
    surface_heating: float
    pressure: float


class Profile(Block):
    """Lee air above a site, to 3 km."""

    height_above_ground_m: list[float]
    temperature_c: list[float]
    mixing_ratio_g_kg: list[float]


class LeeBlock(Block):
    """The air at one site."""

    name: str
    number: int = Field(description="of the site in the case, from 1")
    longitude: float | None = Field(description="degrees east; null without a raster")
    latitude: float | None = Field(description="degrees north; null without a raster")
    side: Literal["windward", "crest", "lee"] = Field(description="of the crest of its own line")
    distance_km: float = Field(description="along the line of the case, abreast of the site")
    offset_km: float | None = Field(description="across it, positive to the right of the wind; null without a raster")
    own_line: bool = Field(description="whether the site has a line of its own, parallel to that of the case")
    crest_m: float = Field(description="of its line, above sea level")
    beyond_crest_km: float = Field(description="distance downwind of that crest")
    blocked_top_m: float = Field(description="on its line, above sea level")
    elevation_m: float
    temperature_c: float
    dew_point_c: float
    relative_humidity_percent: float
    wind_ms: float | None
    wind_10m_ms: float | None
    gust_ms: float | None
    source_level_m: float | None
    source_level_range_m: tuple[float, float] | None
    warming_c: float = Field(description="site minus incoming air at the same height")
    warming_parts_c: WarmingParts | None
    popular_picture_c: float = Field(description="surface air lifted, all condensate removed, brought down")
    descent_only_c: float | None
    profile: Profile | None
    chance: Chance = Field(default_factory=dict, description="in_pool, cloud, rain: 0 to 1, over the members")
    range: Range = Field(
        default_factory=dict, description="key: [10 %, 90 %], error of the method included where stated"
    )
    input_range: Range = Field(default_factory=dict, description="the same by the uncertainty of the inputs alone")


class FailedSiteBlock(Block):
    """A site that could not be worked out."""

    number: int = Field(description="of the site in the case, from 1")
    name: str
    reason: str


class Results(Block):
    """The whole results file."""

    schema_version: str
    orolift: Program
    case: CaseBlock
    incoming: IncomingBlock
    terrain: TerrainBlock
    flow: FlowBlock
    rain: RainBlock
    lee_wind: LeeWindBlock
    lee: list[LeeBlock]
    failed_sites: list[FailedSiteBlock] = Field(description="sites of which nothing could be worked out, and why")
    spread: SpreadBlock | None = Field(description="the members the ranges come from; null without")
    catchments: list[CatchmentBlock]
    gauges: GaugesBlock | None = Field(description="map against gauges; null without gauges")
    fire: list[FireBlock] = Field(description="fire weather by site")
    flags: list[str]
    cautions: list[str]
    notes: list[str] = Field(description="assumptions made, in sentences")


def celsius(kelvin: float) -> float:
    """Degrees Celsius of a temperature in kelvin."""
    return float(kelvin) - UNITS["c"].offset


def results_of(
    crossing: Crossing,
    case: Case,
    mapped: Mapped | None = None,
    flags: tuple[str, ...] = (),
    fire: tuple[SiteFire, ...] = (),
    places: Sequence[SitePlace] = (),
    spread: Spread | None = None,
    winter: Mapping[str, float] | None = None,
) -> Results:
    """Results of a crossing, unrounded.

    Parameters
    ----------
    crossing : Crossing
    case : Case
    mapped : Mapped, optional
        Rain over the map.
    flags : tuple of str
        Danger thresholds reached, in sentences.
    fire : tuple of SiteFire
        Fire weather at the sites.
    places : sequence of SitePlace
        Of all sites of the case, for their positions.
    spread : Spread, optional
        Members, for the ranges.
    winter : mapping of str to float, optional
        From `orolift.spread.winter_chances.winter_chances`.

    Returns
    -------
    Results
    """
    return Results(
        schema_version=SCHEMA_VERSION,
        orolift=program(),
        case=case_block(case, None if spread is None else spread.seed),
        incoming=_incoming(crossing, spread),
        terrain=_terrain(crossing),
        flow=_flow(crossing, spread),
        rain=_rain(crossing, mapped, spread),
        lee_wind=lee_wind_block(crossing, spread),
        lee=[_lee(site, crossing, places, spread) for site in crossing.lee],
        failed_sites=[FailedSiteBlock(**asdict(site)) for site in crossing.failed],
        spread=None if spread is None else spread_block(spread, crossing, winter or {}),
        catchments=[] if mapped is None else catchment_blocks(mapped),
        gauges=None if mapped is None else gauges_block(mapped),
        fire=fire_blocks(fire),
        flags=[*flags],
        cautions=[*crossing.cautions],
        notes=[*crossing.notes],
    )


def program() -> Program:
    """What makes a file: versions of orolift, Python and the libraries."""
    return Program(
        version=__version__,
        python=platform.python_version(),
        libraries={name: metadata.version(name) for name in LIBRARIES},
    )


def case_block(case: Case, seed: int | None = None) -> CaseBlock:
    """Which case it is, and the seed of its members."""
    return CaseBlock(
        title=case.title,
        valid_time=None if case.valid_time is None else case.valid_time.isoformat(),
        seed=seed,
    )


def _both(block: str, spread: Spread | None) -> dict[str, Range]:
    """Range and input range of a block for whose numbers no error of the method is stated."""
    found = {} if spread is None else ranges_of(block, spread.values)
    return {"range": found, "input_range": found}


def _incoming(crossing: Crossing, spread: Spread | None) -> IncomingBlock:
    air = crossing.incoming
    pressure, temperature, vapour = air.pressure[0], air.temperature[0], air.vapour[0]
    level = float(freezing_level(air))
    return IncomingBlock(
        temperature_c=celsius(temperature),
        dew_point_c=celsius(float(dew_point_from_mixing_ratio(pressure, vapour))),
        relative_humidity_percent=100.0 * float(relative_humidity_from_mixing_ratio(pressure, temperature, vapour)),
        wind_ms=float((air.eastward_wind[0] ** 2 + air.northward_wind[0] ** 2) ** 0.5),
        cross_range_wind_ms=crossing.flow.crest_wind,
        stability_per_s=crossing.flow.stability,
        freezing_level_m=level if level > air.height[0] or temperature >= MELTING_POINT else None,
        column_vapour_kg_m2=float(column_vapour(air)),
        **_both("incoming", spread),
    )


def _terrain(crossing: Crossing) -> TerrainBlock:
    shape, origin = crossing.features, crossing.transect.origin
    return TerrainBlock(
        base_m=shape.base,
        base_km=(shape.base_distance + origin) / 1000.0,
        crest_m=shape.crest,
        crest_km=(shape.crest_distance + origin) / 1000.0,
        lee_foot_m=shape.lee_foot,
        lee_foot_km=(shape.lee_foot_distance + origin) / 1000.0,
        half_width_km=shape.half_width / 1000.0,
    )


def _flow(crossing: Crossing, spread: Spread | None) -> FlowBlock:
    flow = crossing.flow
    first = (crossing.on_line or crossing.lee)[0]
    source = None
    if spread is not None and spread.sites:
        source = range_of(spread.sites["source_level"][:, 0])
    both = _both("flow", spread)
    if source is not None:
        both = {name: {**found, "source_level_m": source} for name, found in both.items()}
    return FlowBlock(
        nondimensional_height=flow.nondimensional_height,
        regime=flow.regime,
        dividing_height_m=flow.dividing_height,
        blocked_top_m=flow.blocked_top,
        blocked_top_range_m=(flow.blocked_top_low, flow.blocked_top_high),
        going_round_share=flow.going_round_share,
        source_level_m=first.source_level,
        cloud_base_m=crossing.cloud.base,
        breaks_through=flow.breaks_through,
        wave_breaking=flow.wave_breaking,
        pressure_difference_hpa=flow.pressure_difference / 100.0,
        **both,
    )


def _rain(crossing: Crossing, mapped: Mapped | None, spread: Spread | None) -> RainBlock:
    water, rain, origin = crossing.water, crossing.rain, crossing.transect.origin
    column = water.column_vapour_flux
    both = _both("rain", spread)
    if spread is None:
        both["range"] = {"drying_ratio": (rain.drying_ratio_low, rain.drying_ratio_high)}
    peak = None if spread is None else range_of(spread.values.get("peak_distance", np.empty(0)))
    if peak is not None:
        where = ((peak[0] + origin) / 1000.0, (peak[1] + origin) / 1000.0)
        both = {name: {**found, "peak_km": where} for name, found in both.items()}
    return RainBlock(
        rain_out_share=water.removed / water.condensed if water.condensed > 0.0 else None,
        drying_ratio=water.removed / water.vapour_in,
        drying_ratio_full_column=water.removed / column if column > 0.0 else None,
        windward_share=rain.windward_share,
        peak_mm_per_h=3600.0 * rain.peak_rate,
        peak_km=None if rain.peak_distance is None else (rain.peak_distance + origin) / 1000.0,
        total_kg_per_m_s=rain.total,
        snow_share=rain.snow_share,
        map=None if mapped is None else map_block(mapped, origin),
        **both,
    )


def _lee(site: LeeAir, crossing: Crossing, places: Sequence[SitePlace], spread: Spread | None) -> LeeBlock:
    column = None if spread is None else column_of(crossing, site)
    wind, parts, profile = site.wind, site.parts, site.profile
    low, high = site.source_level_low, site.source_level_high
    ranges: Range = {}
    inputs: Range = {}
    if spread is not None and column is not None:
        line = on_its_line(spread, crossing, site)
        ranges = ranges_of("lee", at_site(spread.full_sites, column) | line)
        inputs = ranges_of("lee", at_site(spread.sites, column) | line)
    elif wind is not None:
        ranges = {"wind_ms": (wind.low, wind.high), "gust_ms": (wind.gust_low, wind.gust_high)}
    own, shape = site.own, crossing.features
    place = places[site.number - 1] if 0 < site.number <= len(places) else None
    offset = None if place is None else place.offset
    return LeeBlock(
        name=site.name,
        number=site.number,
        longitude=None if place is None else place.longitude,
        latitude=None if place is None else place.latitude,
        side=site.side,
        distance_km=(site.distance + crossing.transect.origin) / 1000.0,
        offset_km=None if offset is None else offset / 1000.0,
        own_line=own is not None,
        crest_m=shape.crest if own is None else own.crest,
        beyond_crest_km=(site.distance - shape.crest_distance if own is None else own.beyond_crest) / 1000.0,
        blocked_top_m=crossing.flow.blocked_top if own is None else own.blocked_top,
        elevation_m=site.elevation,
        temperature_c=celsius(site.temperature),
        dew_point_c=celsius(site.dew_point),
        relative_humidity_percent=100.0 * site.relative_humidity,
        wind_ms=None if wind is None else wind.wind,
        wind_10m_ms=None if wind is None else wind.at_10m,
        gust_ms=None if wind is None else 0.5 * (wind.gust_low + wind.gust_high),
        source_level_m=site.source_level,
        source_level_range_m=None if low is None or high is None else (low, high),
        warming_c=site.warming,
        warming_parts_c=None if parts is None else WarmingParts(**asdict(parts)),
        popular_picture_c=celsius(site.popular_picture),
        descent_only_c=None if site.descent_only is None else celsius(site.descent_only),
        profile=Profile(
            height_above_ground_m=profile.height_above_ground.tolist(),
            temperature_c=[celsius(t) for t in profile.temperature],
            mixing_ratio_g_kg=(1000.0 * profile.vapour).tolist(),
        ),
        chance={} if spread is None or column is None else site_chances(spread, column),
        range=ranges,
        input_range=inputs,
    )
