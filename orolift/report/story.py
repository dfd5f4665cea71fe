"""What a page leads with: the site, the crest, and what is open in this case."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.quantities import Amount

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing, LeeAir, SimpleAir
    from orolift.report.words import Words

MOST_IN_DETAIL = 12
"""Sites that are taken one by one beyond the table of all (design choice)."""
MOST_ON_LINE = 24
"""Sites that the section shows (design choice)."""
SAME = 0.05
"""Temperatures nearer than this [K] read alike at one decimal."""
ROUNDING = 10.0
"""Heights of cloud are shown to this [m]."""
LIKELY = 0.8
"""Chance of reaching the ground below which the page leads with both answers (design choice)."""
SOME_SNOW = 0.02
"""Share of snow in what falls [1] below which it is called rain, and the other way round (design choice)."""
HARDLY = 0.005
"""Share of the vapour [1] below which what falls out counts as none: it reads as 0 % (design choice)."""


def main_site(crossing: Crossing) -> LeeAir:
    """The site the page leads with: the first in the lee of the crossing's own line, else the first on it, else any."""
    own = [air for air in crossing.lee if air.own is None] or crossing.lee
    return next((air for air in own if air.side == "lee"), own[0])


def line_view(crossing: Crossing) -> Crossing:
    """The crossing with the sites on its own line only, as the section and what goes with it show them."""
    on_line = crossing.lee if crossing.on_line is None else crossing.on_line
    return replace(crossing, lee=on_line[:MOST_ON_LINE])


def first_sites(crossing: Crossing) -> Crossing:
    """The crossing with a dozen sites at most, those that parts of the page take one by one: on its line first."""
    if len(crossing.lee) <= MOST_IN_DETAIL:
        return crossing
    ordered = sorted(crossing.lee, key=lambda air: (air.own is not None, air.side != "lee", air.number))
    chosen = sorted(ordered[:MOST_IN_DETAIL], key=lambda air: air.number)
    return replace(crossing, lee=tuple(chosen))


def crest_index(crossing: Crossing) -> int:
    """Index of the crest among the places of the crossing."""
    return int(np.argmin(np.abs(crossing.distance - crossing.features.crest_distance)))


def is_blocked(crossing: Crossing) -> bool:
    """Whether any air is blocked."""
    return crossing.flow.blocked_top > crossing.features.base + 1.0


def regime_words(crossing: Crossing) -> str:
    """What the range does to the air; close to blocked where it should block and yet no layer is stopped."""
    regime = crossing.flow.regime
    return "close to blocked" if regime.endswith("blocked") and not is_blocked(crossing) else regime


def reaches_the_ground_or_not(crossing: Crossing, site: LeeAir) -> bool:
    """Whether it is open that the crossing air reaches the lee ground, so that two answers must be said."""
    flow = crossing.flow
    return flow.breaks_through is None and flow.break_through_chance < LIKELY and site.side == "lee"


def starts_saturated(crossing: Crossing) -> bool:
    """Whether the air is in cloud from the upwind end on, to the rounding of heights."""
    base = crossing.cloud.base
    return base is not None and base - float(crossing.height[0, 0]) < ROUNDING


def cloudy_to_the_end(crossing: Crossing) -> bool:
    """Whether cloud of the air that comes over the crest goes on at the downwind end."""
    if crossing.cloud.base is None or crossing.cloud.end is not None:
        return False
    wet = crossing.air.cloud[[crest_index(crossing), -1]] > 0.0
    low = crossing.start_height < crossing.features.crest
    return bool((wet[0] & wet[1] & low).any())


def rains(crossing: Crossing) -> bool:
    """Whether any water leaves the air."""
    return crossing.water.removed > HARDLY * crossing.water.vapour_in


def fallen_share(crossing: Crossing) -> float:
    """Water that fell out, as a share of the vapour that came with the crossing air."""
    water = crossing.water
    return water.removed / water.vapour_in if water.vapour_in > 0.0 else 0.0


def drying_ends(crossing: Crossing) -> tuple[float, float] | None:
    """Share of the crossing vapour that falls out, over the answer and its two ends; None when they read alike."""
    low, high = crossing.rain.drying_ratio_low, crossing.rain.drying_ratio_high
    return (low, high) if high - low >= 0.01 else None


def removal_words(crossing: Crossing) -> Words:
    """How water leaves the air in this crossing."""
    settings = crossing.settings
    if settings.removed_share is not None:
        share = Amount(float(np.asarray(settings.removed_share)), "share")
        return (share, " of what condenses leaves at once, as prescribed")
    cloud, fall = (Amount(float(np.asarray(time)), "duration") for time in (settings.cloud_time, settings.fall_time))
    return ("cloud turns to rain in ", cloud, ", fall time ", fall)


def snow_words(crossing: Crossing) -> str:
    """Rain, snow, or both: what reaches the ground."""
    share = crossing.rain.snow_share
    if share is None or share < SOME_SNOW:
        return "rain"
    return "snow" if share > 1.0 - SOME_SNOW else "rain or snow"


def falling(crossing: Crossing) -> str:
    """What happens to the water: it rains out, or falls as snow."""
    kind = snow_words(crossing)
    return "rains out" if kind == "rain" else f"falls as {kind}"


def difference(amount: float, more: str, less: str, same: str) -> Words:
    """A temperature difference in words: how much, and which way.

    Parameters
    ----------
    amount : float [K]
    more, less : str
        Words after the number when it is above or below zero.
    same : str
        Words when it reads as zero.

    Returns
    -------
    Words
    """
    if abs(amount) < SAME:
        return (same,)
    return (Amount(abs(amount), "temperature_difference", 1), f" {more if amount > 0.0 else less}")


def where_words(site: LeeAir) -> str:
    """Air that stays in which a site lies; empty where the crossing air reaches it."""
    return "in the cold pool" if site.in_pool else "in blocked air" if site.in_blocked_air else ""


def ends_of(site: LeeAir) -> tuple[SimpleAir, SimpleAir] | None:
    """The ends without blocking and with full blocking; None where they say nothing of this site."""
    if site.in_pool or site.in_blocked_air or site.side == "windward":
        return None
    return site.no_blocking, site.full_blocking


def temperature_ends(site: LeeAir) -> tuple[float, float] | None:
    """Lowest and highest of the answer and its two ends [K]; None when they read alike."""
    return _span(site, "temperature")


def dew_point_ends(site: LeeAir) -> tuple[float, float] | None:
    """The same for the dew point [K]."""
    return _span(site, "dew_point")


def _span(site: LeeAir, name: str) -> tuple[float, float] | None:
    ends = ends_of(site)
    if ends is None:
        return None
    values = [float(getattr(air, name)) for air in (site, *ends)]
    low, high = min(values), max(values)
    return (low, high) if high - low >= 2.0 * SAME else None


def with_ends(amount: Amount, ends: tuple[float, float] | None) -> Words:
    """An amount with its range in brackets, when there is one: 17.3 °C (16.1 to 18.6)."""
    if ends is None:
        return (amount,)
    low, high = (Amount(value, amount.kind, amount.digits, bare=True) for value in ends)
    return (amount, " (", low, " to ", high, ")")


def height_with_ends(height: float, low: float, high: float) -> Words:
    """A height to tens with its range: 860 m (640 to 1080)."""
    return with_ends(Amount(height, "height", -1), (low, high) if high - low >= ROUNDING else None)


def source_words(site: LeeAir) -> Words:
    """The heights the air of a site comes from; empty in a pool."""
    if site.source_level is None or site.source_level_low is None or site.source_level_high is None:
        return ()
    return height_with_ends(site.source_level, site.source_level_low, site.source_level_high)
