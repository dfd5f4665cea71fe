"""Blocks of the results file of hours."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from orolift.sources.result_block import Block
from orolift.sources.results import CaseBlock, Program  # noqa: TC001 (pydantic reads them when the models are made)
from orolift.sources.state_ranges import MembersBlock, StateRangesBlock  # noqa: TC001 (same)

Numbers = list[float | None]
Flags = list[bool | None]
Times = tuple[str | None, str | None]


class SeriesBlock(Block):
    """The series of incoming air."""

    file: str
    kind: Literal["station", "sounding", "model"]
    first_time: str | None
    last_time: str | None
    step_s: float = Field(description="usual time between two hours")
    hours: int = Field(description="hours from the first to the last, gaps included")
    worked: int = Field(description="hours worked out; fewer when interrupted")


class StretchBlock(Block):
    """A stretch of time in which something holds at a site."""

    first_hour: int = Field(description="number of its first hour in the arrays, from 0")
    last_hour: int
    onset: str | None = Field(description="null when it holds from the first hour that is known")
    onset_error_h: float | None = Field(description="one standard deviation")
    end: str | None = Field(description="null when it holds to the last hour that is known")
    end_error_h: float | None
    unknown_hours: int = Field(description="hours in it of which nothing is known")
    chance: float | None = Field(description="share of the members that share an hour with it; null without members")
    onset_range: Times | None = Field(
        description="[10 %, 90 %] of those members; null at an end before or after what can be judged"
    )
    end_range: Times | None


class ThresholdBlock(Block):
    """A threshold of the region at a site."""

    rule: str
    hours_asked: int = Field(description="for how long in a row it must be met")
    met: Flags = Field(description="hour by hour; null where it cannot be judged")
    stretches: list[StretchBlock]
    chance: Numbers | None = Field(description="hour by hour, of the members; the hours asked for count")
    chance_of_any: float | None = Field(description="that it is met in any of the hours; null without members")


class HourColumns(Block):
    """Arrays, one value for each hour, in the order of `time`."""

    time: list[str] = Field(description="upwind, ISO 8601 in UTC")
    status: list[Literal["crossing", "no crossing", "missing"]]
    reason: list[str] = Field(description="why there is no crossing; empty where there is one")
    arrival_time: list[str | None] = Field(description="when the air is at the site; null where it does not arrive")
    arrival_error_h: Numbers
    side: list[Literal["windward", "crest", "lee"] | None]
    temperature_c: Numbers
    dew_point_c: Numbers
    relative_humidity_percent: Numbers
    wind_10m_ms: Numbers
    gust_ms: Numbers
    warming_c: Numbers
    warming_descent_c: Numbers
    warming_latent_c: Numbers
    warming_going_round_c: Numbers
    warming_mixing_c: Numbers
    warming_surface_heating_c: Numbers
    warming_pressure_c: Numbers
    source_level_m: Numbers
    rain_mm_per_h: Numbers
    snow_mm_per_h: Numbers
    crest_wind_ms: Numbers
    in_cold_pool: Flags
    breaks_through: Flags = Field(description="null when nothing is known of the lee")
    descending_warm_dry: Flags
    fine_fuel_code: Numbers = Field(description="hourly Fine Fuel Moisture Code, carried on; null where not known")


class SiteHoursBlock(Block):
    """One site through the hours."""

    name: str
    hours: HourColumns
    dry_winds: list[StretchBlock] = Field(description="with descending warm dry air")
    thresholds: list[ThresholdBlock] = Field(description="of the rule file; empty without one")
    dry_wind_hours: float = Field(description="hours with descending warm dry air, all stretches together")
    dry_wind_hours_range: tuple[float, float] | None = Field(description="[10 %, 90 %] of the members")
    dry_wind_chance: float | None = Field(description="of descending warm dry air in any of the hours")
    rain_mm: float = Field(description="over the hours that cross")
    rain_range_mm: tuple[float, float] | None = Field(description="[10 %, 90 %] of the members")
    crossing_hours: int
    caught_up_hours: int = Field(description="hours whose air is caught up by faster air behind it")
    ranges: StateRangesBlock | None = Field(description="null without members")


class CatchmentHoursBlock(Block):
    """One catchment through the hours."""

    name: str
    rain_mm_per_h: Numbers = Field(description="mean over it, by upwind hour")
    rain_mm: float = Field(description="over the hours that are known")
    rain_range_mm: tuple[float, float] | None = Field(
        description="[10 %, 90 %] by the rain on the line; null without members or with hardly any rain on it"
    )
    known_hours: int


class HoursResults(Block):
    """The whole file of hours."""

    schema_version: str
    orolift: Program
    case: CaseBlock
    series: SeriesBlock
    members: MembersBlock | None = Field(description="null without ranges")
    interrupted: bool = Field(description="whether the work was stopped before its end")
    sites: list[SiteHoursBlock]
    catchments: list[CatchmentHoursBlock]
    notes: list[str]
