"""Wind directions worked out as a results file and as a table: numbers by site and direction, unrounded."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Literal

import numpy as np
from pydantic import Field

from orolift.sources.hours_blocks import Flags, Numbers  # noqa: TC001 (pydantic reads them when the models are made)
from orolift.sources.hours_results import QUANTITIES, numbers, said
from orolift.sources.result_block import Block
from orolift.sources.results import CaseBlock, Program, case_block, program
from orolift.sources.state_ranges import (
    RANGED,
    MembersBlock,
    StateRangesBlock,
    members_block,
    range_columns,
    state_ranges,
)
from orolift.spread.agreement import reach_of
from orolift.spread.timeline import values_of

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from orolift.sources.bearings_case import BearingSetup
    from orolift.spread.bearings import Bearings, SiteBearings
    from orolift.spread.site_state import SiteState

    Array = NDArray[np.float64]

BEARINGS_VERSION = "1"
WITH_RANGE = RANGED | {"drying_power_hpa_ms": ("drying_power", 0.01, 0.0)}
"""Columns that have ranges."""


class DirectionColumns(Block):
    """Arrays, one value for each direction, in the order of `wind_from_deg`."""

    wind_from_deg: list[float]
    status: list[Literal["crossing", "no crossing", "missing"]]
    reason: list[str] = Field(description="why there is no crossing; empty where there is one")
    side: list[Literal["windward", "crest", "lee"] | None]
    shelter_height_m: Numbers = Field(description="highest ground of the line before the site")
    shelter_distance_km: Numbers = Field(description="from there to the site")
    shelter_longitude: Numbers = Field(description="where it is; null for a hand-entered ridge")
    shelter_latitude: Numbers
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
    off_normal_deg: Numbers = Field(description="angle between the line and the direction across the range")
    drying_power_hpa_ms: Numbers = Field(description="vapour pressure deficit times wind at 10 m")
    descending_warm_dry: Flags


class AgreementBlock(Block):
    """Shares of the members, 0 to 1, whose own direction is that of the answer or beside it; null without one."""

    within_deg: float = Field(description="how far beside it still counts: one step, none where that is above 30")
    worst_for_fire: float | None
    best_for_rain: float | None = Field(description="of the members that rain in a direction at all")
    warmest: float | None
    driest: float | None


class SiteBearingsBlock(Block):
    """One site under every wind direction."""

    name: str
    worst_for_fire_deg: float | None = Field(description="largest vapour pressure deficit times wind at 10 m")
    best_for_rain_deg: float | None = Field(description="null where no direction brings rain")
    warmest_deg: float | None = Field(description="strongest warming")
    driest_deg: float | None = Field(description="lowest relative humidity")
    agreement: AgreementBlock | None = Field(description="how many members agree on these; null without members")
    directions: DirectionColumns
    ranges: StateRangesBlock | None = Field(description="ranges and chances by direction; null without members")


class BearingsResults(Block):
    """The whole file of wind directions."""

    schema_version: str
    orolift: Program
    case: CaseBlock
    step_deg: int
    case_wind_from_deg: float
    spread: MembersBlock | None = Field(description="the members the ranges come from; null without")
    interrupted: bool = Field(description="whether the work was stopped before its end")
    sites: list[SiteBearingsBlock]
    notes: list[str]


def bearings_results(bearings: Bearings, setup: BearingSetup) -> BearingsResults:
    """The results file of wind directions worked out.

    Parameters
    ----------
    bearings : Bearings
    setup : BearingSetup

    Returns
    -------
    BearingsResults
    """
    return BearingsResults(
        schema_version=BEARINGS_VERSION,
        orolift=program(),
        case=case_block(setup.inputs.case),
        step_deg=setup.step_deg,
        case_wind_from_deg=math.degrees(bearings.given),
        spread=members_block(setup.drawn),
        interrupted=bearings.interrupted,
        sites=[_site(site, bearings) for site in bearings.sites],
        notes=[*setup.notes],
    )


def _site(site: SiteBearings, bearings: Bearings) -> SiteBearingsBlock:
    degrees = [degrees_of(value) for value in bearings.wind_from.tolist()]

    def direction(number: int | None) -> float | None:
        return None if number is None else degrees[number]

    states = site.states
    found = {one.key: numbers(values_of(states, one.of) * one.factor + one.offset) for one in QUANTITIES}
    return SiteBearingsBlock(
        name=site.name,
        worst_for_fire_deg=direction(site.fire),
        best_for_rain_deg=direction(site.rain),
        warmest_deg=direction(site.warmest),
        driest_deg=direction(site.driest),
        agreement=_agreement(site, bearings),
        ranges=None if site.worst is None else _ranges(states, site.worst),
        directions=DirectionColumns(
            wind_from_deg=degrees,
            status=[state.status for state in states],
            reason=[state.reason for state in states],
            side=[state.side for state in states],
            shelter_height_m=numbers(values_of(states, "shelter_height")),
            shelter_distance_km=numbers(values_of(states, "shelter_distance") / 1000.0),
            shelter_longitude=numbers(values_of(states, "shelter_longitude")),
            shelter_latitude=numbers(values_of(states, "shelter_latitude")),
            drying_power_hpa_ms=numbers(values_of(states, "drying_power") / 100.0),
            off_normal_deg=numbers(np.degrees(values_of(states, "oblique"))),
            descending_warm_dry=[state.descending for state in states],
            **found,
        ),
    )


def _ranges(states: Sequence[SiteState], worst: Array) -> StateRangesBlock:
    """Ranges and chances, with the share of the members for which each direction is the worst for fire."""
    found = state_ranges(states, WITH_RANGE)
    return found.model_copy(update={"chance": found.chance | {"worst_for_fire": numbers(worst)}})


def _agreement(site: SiteBearings, bearings: Bearings) -> AgreementBlock | None:
    found = site.agreement
    if found is None:
        return None
    return AgreementBlock(
        within_deg=degrees_of(reach_of(bearings.step)),
        worst_for_fire=found.fire,
        best_for_rain=found.rain,
        warmest=found.warmest,
        driest=found.driest,
    )


def degrees_of(bearing: float) -> float:
    """A bearing in degrees, without the noise of converting there and back.

    Examples
    --------
    >>> degrees_of(math.radians(50.0))
    50.0
    """
    return round(math.degrees(bearing), 9) + 0.0


def bearing_rows(results: BearingsResults) -> tuple[list[str], list[list[object]]]:
    """Header and one row for each site and direction, for the CSV table.

    Parameters
    ----------
    results : BearingsResults

    Returns
    -------
    header : list of str
    rows : list of lists
        All directions of the first site, then of the next. Ranges and chances come last, and only with members.
    """
    keys = list(DirectionColumns.model_fields)
    rows: list[list[object]] = []
    more = [] if results.spread is None else list(range_columns(_ranges((), np.empty(0))))
    for site in results.sites:
        columns = [getattr(site.directions, key) for key in keys]
        found = {} if site.ranges is None else range_columns(site.ranges)
        columns += [found.get(key, [None] * len(columns[0])) for key in more]
        rows += [[site.name, *map(said, row)] for row in zip(*columns, strict=True)]
    return ["site", *keys, *more], rows
