"""Blocks of the results file about fire weather."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np
from pydantic import Field

from orolift.fire.chances import CODES_AFTER
from orolift.fire.words import limit_words, named
from orolift.sources.result_block import Block, Range

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

    from numpy.typing import ArrayLike

    from orolift.fire.sites import SiteFire, Threshold
    from orolift.fire.winds import WindMeant
    from orolift.fire.words import Measure

_WRITTEN: dict[Measure, tuple[float, float, str]] = {
    "share": (100.0, 0.0, "percent"),
    "temperature": (1.0, -273.15, "c"),
    "temperature_change": (1.0, 0.0, "c"),
    "vapour_pressure": (0.01, 0.0, "hpa"),
    "wind": (1.0, 0.0, "ms"),
    "height": (1.0, 0.0, "m"),
    "rain_rate": (3600.0, 0.0, "mm_per_h"),
    "plain": (1.0, 0.0, ""),
}


class NightBlock(Block):
    """The night from the valid time, the air staying as it is: highest relative humidity by place."""

    hours: float = Field(description="length of the night")
    hours_known: bool = Field(description="whether from the sun; else assumed")
    valley_floor_windy_percent: float = Field(description="at the site, wind keeping the air mixed")
    valley_floor_still_percent: float = Field(description="at the site, the air coming to rest")
    mid_slope_percent: float | None
    mid_slope_m: float
    ridge_percent: float | None
    ridge_m: float


class MoverBlock(Block):
    """Change of one input, by itself, that brings a condition to its limit."""

    input: str
    amount: float
    unit: str


class ConditionBlock(Block):
    """One condition of a rule at a site."""

    quantity: str
    unit: str = Field(description="of value, limit and margin; empty for an index")
    limit_kind: str = Field(description="at least or at most")
    limit: float
    value: float | None
    range: tuple[float, float] | None = Field(description="of the value: 10 and 90 % of the members; null without")
    margin: float | None = Field(description="by how much it is met; negative: missed")
    chance_percent: float | None
    movers: list[MoverBlock]


class RuleBlock(Block):
    """One rule at a site."""

    name: str
    status: str
    hours: int
    lasts: bool | None = Field(description="null where it cannot be judged, as from one hour")
    chance_percent: float | None = Field(description="of the members that cross; null without members")
    conditions: list[ConditionBlock]


class FireBlock(Block):
    """Fire weather at one site."""

    number: int = Field(description="of the site in the case, as in `lee`")
    name: str
    vapour_pressure_deficit_hpa: float
    equilibrium_fuel_moisture_percent: float
    fosberg_index: float | None = Field(description="at most 100")
    fosberg_index_raw: float | None
    fosberg_index_with_drought: float | None
    hot_dry_windy: float | None = Field(description="hPa m/s")
    fine_fuel_code: float | None = Field(description="daily")
    fine_fuel_code_after_1_h: float | None
    fine_fuel_code_after_3_h: float | None
    fine_fuel_code_after_6_h: float | None
    fine_fuel_code_after_12_h: float | None
    initial_spread_index: float | None
    angstroem_index: float
    mixing_height_m: float = Field(description="above ground, by heat alone; 3000 stands for at least that")
    mixing_height_by_day_m: float
    night: NightBlock
    rules: list[RuleBlock]
    range: Range = Field(default_factory=dict, description="key: [10 %, 90 %], error of the method included")
    input_range: Range = Field(default_factory=dict, description="the same by the uncertainty of the inputs alone")


NOT_FLAT = frozenset({"number", "name", "night", "rules", "range", "input_range"})
"""Keys of a block that are no values of their own."""


def fire_blocks(sites: Iterable[SiteFire]) -> list[FireBlock]:
    """Blocks of fire weather, one a site.

    Parameters
    ----------
    sites : iterable of SiteFire

    Returns
    -------
    list of FireBlock
    """
    return [_block(site) for site in sites]


def flat_fire(block: FireBlock) -> dict[str, object]:
    """Single values of a block under names of their own, for tables and points on a map.

    Parameters
    ----------
    block : FireBlock

    Returns
    -------
    dict
        Keys of `fire`; of the night ``night_valley_floor_still_percent`` and so on; with members the ends of ranges as
        ``fosberg_index_low`` and ``fosberg_index_high``, those by the inputs alone as ``fosberg_index_inputs_low``;
        last `thresholds_met`, the names of the rules that are met.
    """
    values = block.model_dump()
    flat = {key: value for key, value in values.items() if key not in NOT_FLAT}
    flat |= {f"night_{key}": value for key, value in values["night"].items()}
    for kind, added in (("range", ""), ("input_range", "_inputs")):
        for key, (low, high) in values[kind].items():
            name = key.replace(".", "_") + added
            flat[f"{name}_low"], flat[f"{name}_high"] = low, high
    flat["thresholds_met"] = "; ".join(rule.name for rule in block.rules if rule.status == "met")
    return flat


def _block(site: SiteFire) -> FireBlock:
    found = site.indices
    hours = [_known(value) for value in np.ravel(found.fine_fuel_code_hours)]
    return FireBlock(
        number=site.number,
        name=site.name,
        vapour_pressure_deficit_hpa=float(found.vapour_pressure_deficit) / 100.0,
        equilibrium_fuel_moisture_percent=100.0 * float(found.equilibrium_fuel_moisture),
        fosberg_index=_known(found.fosberg_index),
        fosberg_index_raw=_known(found.fosberg_index_raw),
        fosberg_index_with_drought=_known(found.fosberg_index_with_drought),
        hot_dry_windy=_known(found.hot_dry_windy),
        fine_fuel_code=_known(found.fine_fuel_code),
        fine_fuel_code_after_1_h=hours[0],
        fine_fuel_code_after_3_h=hours[1],
        fine_fuel_code_after_6_h=hours[2],
        fine_fuel_code_after_12_h=hours[3],
        initial_spread_index=_known(found.initial_spread_index),
        angstroem_index=float(found.angstroem_index),
        mixing_height_m=site.night.mixing_height,
        mixing_height_by_day_m=site.night.mixing_height_by_day,
        night=_night(site),
        rules=[_rule(threshold, site.rule_ranges) for threshold in site.thresholds],
        range=_ranges(site.ranges),
        input_range=_ranges(site.input_ranges),
    )


_RANGES = {
    "vapour_pressure_deficit": ("vapour_pressure_deficit_hpa", 0.01),
    "equilibrium_fuel_moisture": ("equilibrium_fuel_moisture_percent", 100.0),
    **{
        name: (name, 1.0)
        for name in (
            "fosberg_index",
            "fosberg_index_raw",
            "fosberg_index_with_drought",
            "hot_dry_windy",
            "fine_fuel_code",
            "initial_spread_index",
            "angstroem_index",
            *CODES_AFTER,
        )
    },
    "mixing_height": ("mixing_height_m", 1.0),
    "mixing_height_by_day": ("mixing_height_by_day_m", 1.0),
    "floor_windy": ("night.valley_floor_windy_percent", 100.0),
    "floor_still": ("night.valley_floor_still_percent", 100.0),
    "mid_slope": ("night.mid_slope_percent", 100.0),
    "ridge": ("night.ridge_percent", 100.0),
}


def _ranges(found: Mapping[str, tuple[float, float]]) -> Range:
    """Ranges of the members under the keys of the block."""
    return {
        key: (factor * found[name][0], factor * found[name][1])
        for name, (key, factor) in _RANGES.items()
        if name in found
    }


def _night(site: SiteFire) -> NightBlock:
    night = site.night
    return NightBlock(
        hours=night.length / 3600.0,
        hours_known=night.length_known,
        valley_floor_windy_percent=100.0 * night.floor_windy,
        valley_floor_still_percent=100.0 * night.floor_still,
        mid_slope_percent=_known(100.0 * night.mid_slope),
        mid_slope_m=night.mid_slope_height,
        ridge_percent=_known(100.0 * night.ridge),
        ridge_m=night.ridge_height,
    )


def _rule(threshold: Threshold, ranges: Mapping[str | WindMeant, tuple[float, float]]) -> RuleBlock:
    judged = threshold.judged
    conditions = []
    for judged_one, moves in zip(judged.conditions, threshold.movers, strict=True):
        condition = judged_one.condition
        words, measure, _ = named(condition.quantity)
        factor, offset, unit = _WRITTEN[measure]
        ends = ranges.get(condition.quantity)
        conditions.append(
            ConditionBlock(
                quantity=words,
                unit=unit,
                limit_kind=limit_words(condition),
                limit=condition.limit * factor + offset,
                value=None if judged_one.value is None else judged_one.value * factor + offset,
                range=None if ends is None else (ends[0] * factor + offset, ends[1] * factor + offset),
                margin=None if judged_one.margin is None else judged_one.margin * factor,
                chance_percent=_percent(judged_one.chance),
                movers=[MoverBlock(input=move.what, amount=move.amount, unit=MOVER_UNITS[move.what]) for move in moves],
            )
        )
    return RuleBlock(
        name=judged.rule.name,
        status=judged.status,
        hours=judged.rule.hours,
        lasts=judged.lasts,
        chance_percent=_percent(judged.chance),
        conditions=conditions,
    )


MOVER_UNITS = {"wind across the crest": "ms", "source level": "m", "temperature": "c", "dew point": "c"}
"""Units of the changes in the results file."""


def _percent(share: float | None) -> float | None:
    return None if share is None else 100.0 * share


def _known(value: ArrayLike) -> float | None:
    number = float(np.asarray(value))
    return number if math.isfinite(number) else None
