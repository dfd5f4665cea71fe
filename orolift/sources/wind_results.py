"""Blocks of the results file about the wind down the lee."""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal

import numpy as np
from pydantic import Field

from orolift.sources.result_block import Block, Range
from orolift.sources.spread_results import ranges_of
from orolift.spread.ranges import chance_of, range_of, share_of_members

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing
    from orolift.spread.spread import Spread

    Array = NDArray[np.float64]


class WindEstimateBlock(Block):
    """The strongest wind down the lee by one method."""

    method: str
    wind_ms: float
    kind: Literal["estimate", "upper end", "limit"] = Field(description="an upper end may be reached, a limit not")
    source: str
    chance: float | None = Field(description="share of the members in which the method applies; null without members")
    range_ms: tuple[float, float] | None = Field(
        description="10 and 90 % of those members, by the uncertainty of the inputs alone"
    )


class WindstormConditionBlock(Block):
    """One condition that favours a downslope windstorm."""

    statement: str
    holds: bool | None = Field(description="null where what it needs is not known")
    source: str
    chance: float | None = Field(description="share of the members in which it holds; null without members")


class LeeWindBlock(Block):
    """The wind down the lee slope, where it is strongest."""

    strongest_ms: float = Field(description="by the spacing of streamlines, over the lowest 300 m and 5 km of slope")
    strongest_km: float = Field(description="where; distance along the line")
    methods_ms: tuple[float, float] = Field(description="range of all methods for the air as given")
    estimates: list[WindEstimateBlock] = Field(description="by the other methods that apply")
    conditions_held: int = Field(description="of the conditions for a windstorm, those that hold")
    conditions: list[WindstormConditionBlock]
    range: Range = Field(
        default_factory=dict, description="key: [10 %, 90 %], range of the methods included where stated"
    )
    input_range: Range = Field(default_factory=dict, description="the same by the uncertainty of the inputs alone")


def lee_wind_block(crossing: Crossing, spread: Spread | None) -> LeeWindBlock:
    """The wind down the lee with what the members say of it.

    Parameters
    ----------
    crossing : Crossing
    spread : Spread or None

    Returns
    -------
    LeeWindBlock
    """
    winds, origin = crossing.winds, crossing.transect.origin
    values: dict[str, Array] = {} if spread is None else spread.values
    full: dict[str, Array] = {} if spread is None else spread.full_values
    place: Range = {}
    where = range_of(values["lee_wind_distance"]) if "lee_wind_distance" in values else None
    if where is not None:
        place = {"strongest_km": ((where[0] + origin) / 1000.0, (where[1] + origin) / 1000.0)}
    return LeeWindBlock(
        strongest_ms=winds.strongest,
        strongest_km=(winds.strongest_distance + origin) / 1000.0,
        methods_ms=(winds.low, winds.high),
        estimates=[
            WindEstimateBlock(
                method=one.method,
                wind_ms=one.wind,
                kind=one.kind,
                source=one.source,
                chance=share_of_members(spread, f"lee_wind_{one.key}"),
                range_ms=range_of(values.get(f"lee_wind_{one.key}", np.empty(0))),
            )
            for one in winds.estimates
        ],
        conditions_held=sum(one.met is True for one in winds.conditions),
        conditions=[
            WindstormConditionBlock(
                statement=one.statement,
                holds=one.met,
                source=one.source,
                chance=chance_of(values.get(f"windstorm_{one.key}", np.empty(0))),
            )
            for one in winds.conditions
        ],
        range=ranges_of("lee_wind", full) | place,
        input_range=ranges_of("lee_wind", values) | place,
    )
