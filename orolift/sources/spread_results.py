"""Ranges, chances and influences of the results file, from the members of a spread."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from pydantic import Field

from orolift.crossing.members import PARTS
from orolift.sources.result_block import Block, Chance, Range
from orolift.sources.units import UNITS
from orolift.spread.at_sites import on_the_line
from orolift.spread.ranges import chance_of, influences, noise, range_of
from orolift.spread.spread import CHANCE_OF_RAIN

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing
    from orolift.spread.spread import Spread

    Array = NDArray[np.float64]

OFFSET = UNITS["c"].offset
KEYS: dict[str, dict[str, tuple[str, float, float]]] = {
    "incoming": {
        "temperature_c": ("temperature", 1.0, -OFFSET),
        "dew_point_c": ("dew_point", 1.0, -OFFSET),
        "relative_humidity_percent": ("relative_humidity", 100.0, 0.0),
        "wind_ms": ("wind", 1.0, 0.0),
        "cross_range_wind_ms": ("cross_range_wind", 1.0, 0.0),
        "stability_per_s": ("stability", 1.0, 0.0),
        "freezing_level_m": ("freezing_level", 1.0, 0.0),
        "column_vapour_kg_m2": ("column_vapour", 1.0, 0.0),
    },
    "flow": {
        "nondimensional_height": ("nondimensional_height", 1.0, 0.0),
        "dividing_height_m": ("dividing_height", 1.0, 0.0),
        "blocked_top_m": ("blocked_top", 1.0, 0.0),
        "going_round_share": ("going_round_share", 1.0, 0.0),
        "cloud_base_m": ("cloud_base", 1.0, 0.0),
        "pressure_difference_hpa": ("pressure_difference", 0.01, 0.0),
    },
    "rain": {
        "rain_out_share": ("rain_out_share", 1.0, 0.0),
        "drying_ratio": ("drying_ratio", 1.0, 0.0),
        "drying_ratio_full_column": ("drying_ratio_full_column", 1.0, 0.0),
        "windward_share": ("windward_share", 1.0, 0.0),
        "peak_mm_per_h": ("peak_rate", 3600.0, 0.0),
        "total_kg_per_m_s": ("total", 1.0, 0.0),
        "snow_share": ("snow_share", 1.0, 0.0),
    },
    "lee_wind": {
        "strongest_ms": ("lee_wind", 1.0, 0.0),
        "conditions_held": ("windstorm_conditions", 1.0, 0.0),
    },
    "lee": {
        "blocked_top_m": ("blocked_top", 1.0, 0.0),
        "temperature_c": ("temperature", 1.0, -OFFSET),
        "dew_point_c": ("dew_point", 1.0, -OFFSET),
        "relative_humidity_percent": ("relative_humidity", 100.0, 0.0),
        "wind_ms": ("wind", 1.0, 0.0),
        "wind_10m_ms": ("wind_10m", 1.0, 0.0),
        "gust_ms": ("gust", 1.0, 0.0),
        "source_level_m": ("source_level", 1.0, 0.0),
        "warming_c": ("warming", 1.0, 0.0),
        **{f"warming_parts_c.{name}": (f"warming_{name}", 1.0, 0.0) for name in PARTS},
        "popular_picture_c": ("popular_picture", 1.0, -OFFSET),
        "descent_only_c": ("descent_only", 1.0, -OFFSET),
    },
}
"""Keys of each block, the member array each comes from, and the factor and offset from SI."""


class InfluenceBlock(Block):
    """How one input goes with a result."""

    input: str = Field(description="as in [spread], without its unit; model_... is the error of the method")
    rank_correlation: float = Field(description="-1 to 1, over the members")


class InfluencesBlock(Block):
    """Which inputs matter most, the most important first."""

    site: str = Field(description="name of the site the first two belong to")
    temperature: list[InfluenceBlock] = Field(description="of the temperature there, error of the method included")
    dew_point: list[InfluenceBlock] = Field(description="of the dew point there, error of the method included")
    rain: list[InfluenceBlock] = Field(description="of the total on the line, inputs alone")
    noise: float = Field(description="rank correlation that chance alone exceeds once in about twenty times")


class SpreadBlock(Block):
    """The members the ranges come from."""

    members: int
    crossing_members: int = Field(description="of them, those with more than 2 m/s across the range; ranges are theirs")
    failed_members: int = Field(description="those that could not be worked out; they count nowhere")
    failures: list[str] = Field(description="why, each reason once")
    chance: Chance = Field(
        description="crosses, breaks_through, blocked, cloud, wave_breaking, freezing_rain, and with "
        "snow_cover_above_m rain_on_snow: 0 to 1"
    )
    influences: InfluencesBlock | None = Field(description="null where no member crosses")


def ranges_of(block: str, values: Mapping[str, Array]) -> Range:
    """Ranges of a block from arrays (m,) of its members; a key without one is left out.

    Parameters
    ----------
    block : str
        A name in `KEYS`.
    values : mapping of str to ndarray (m,)

    Returns
    -------
    dict of str to (float, float)
    """
    out: Range = {}
    for key, (name, factor, offset) in KEYS[block].items():
        found = range_of(values[name]) if name in values else None
        if found is not None:
            out[key] = (found[0] * factor + offset, found[1] * factor + offset)
    return out


def at_site(sites: Mapping[str, Array], number: int) -> dict[str, Array]:
    """Arrays (m,) of one site."""
    return {name: value[:, number] for name, value in sites.items()}


def site_chances(spread: Spread, number: int) -> Chance:
    """Chances at a site: that it lies in a cold pool, in cloud, that it rains there."""
    here = at_site(spread.sites, number)
    if not here:
        return {}
    rain = np.where(np.isfinite(here["rain"]), here["rain"] >= CHANCE_OF_RAIN, np.nan)
    found = {"in_pool": chance_of(here["in_pool"]), "cloud": chance_of(here["cloudy"]), "rain": chance_of(rain)}
    return {name: value for name, value in found.items() if value is not None}


def spread_block(spread: Spread, crossing: Crossing, winter: Mapping[str, float]) -> SpreadBlock:
    """What the results say of the spread as a whole.

    Parameters
    ----------
    spread : Spread
    crossing : Crossing
    winter : mapping of str to float
        From `orolift.spread.winter_chances.winter_chances`.

    Returns
    -------
    SpreadBlock
    """
    across = int(spread.crosses.sum())
    line = on_the_line(crossing)
    site = next((i for i, air in enumerate(line) if air.side == "lee"), 0)
    return SpreadBlock(
        members=spread.members,
        crossing_members=across,
        failed_members=len(spread.failed),
        failures=sorted({one.reason for one in spread.failed}),
        chance={**chances(spread), **winter},
        influences=_influences(spread, site, line[site].name) if across else None,
    )


def chances(spread: Spread) -> Chance:
    """Chances of the crossing as a whole.

    Parameters
    ----------
    spread : Spread

    Returns
    -------
    dict of str to float
        Of crossing at all among all members, of the rest among those that cross.
    """
    worked = spread.members - len(spread.failed)
    out = {"crosses": float(spread.crosses.sum()) / worked} if worked else {}
    values = spread.values
    if not spread.crosses.any():
        return out
    found = {name: chance_of(values[name]) for name in ("breaks_through", "blocked", "wave_breaking")}
    found["cloud"] = float(np.isfinite(values["cloud_base"][spread.crosses]).mean())
    return out | {name: value for name, value in found.items() if value is not None}


def _influences(spread: Spread, site: int, name: str) -> InfluencesBlock:
    full = at_site(spread.full_sites, site)

    def listed(values: Array, extra: tuple[str, ...] = ()) -> list[InfluenceBlock]:
        found = influences(spread, values, (*spread.varied, *extra))
        return [InfluenceBlock(input=one.name, rank_correlation=one.correlation) for one in found]

    return InfluencesBlock(
        site=name,
        temperature=listed(full["temperature"], ("model_temperature",)),
        dew_point=listed(full["dew_point"], ("model_vapour",)),
        rain=listed(spread.values["total"]),
        noise=noise(int(spread.crosses.sum())),
    )
