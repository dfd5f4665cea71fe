"""Ranges and chances of sites in many crossings, hours or wind directions, as files have them."""

from __future__ import annotations

from typing import TYPE_CHECKING

from pydantic import Field

from orolift.sources.result_block import Block
from orolift.sources.spread_results import KEYS
from orolift.spread.state_ranges import Event, chance_at, range_at

if TYPE_CHECKING:
    from collections.abc import Sequence

    from orolift.spread.site_state import SiteState
    from orolift.spread.spread import Drawn

Ends = list[tuple[float, float] | None]
Chances = list[float | None]
Keys = dict[str, tuple[str, float, float]]

RANGED: Keys = {
    **{
        key: KEYS["lee"][key]
        for key in ("temperature_c", "dew_point_c", "relative_humidity_percent", "wind_10m_ms", "gust_ms", "warming_c")
    },
    "rain_mm_per_h": ("rain", 3600.0, 0.0),
}
"""Keys of the columns that have ranges, the array of members each comes from, and factor and offset from SI."""
EVENTS: tuple[Event, ...] = ("crosses", "rain", "in_pool")


class MembersBlock(Block):
    """The members the ranges come from."""

    members: int = Field(description="how often each crossing is worked out")
    seed: int = Field(description="the same for every crossing: a member that is too warm is so throughout")


class StateRangesBlock(Block):
    """Ranges and chances of a site, arrays in the order of the other columns; null where there is none."""

    range: dict[str, Ends] = Field(description="key of a column: [10 %, 90 %] of the members")
    input_range: dict[str, Ends] = Field(description="the same by the uncertainty of the inputs alone")
    chance: dict[str, Chances] = Field(
        description="crosses, of hours descending_warm_dry, of wind directions worst_for_fire (share of the members "
        "whose worst direction it is): of all members; rain (0.1 mm/h or more), in_pool: of those that cross; 0 to 1"
    )


def members_block(drawn: Drawn | None) -> MembersBlock | None:
    """What the members are, for a file; None without.

    Parameters
    ----------
    drawn : Drawn or None

    Returns
    -------
    MembersBlock or None
    """
    return None if drawn is None else MembersBlock(members=drawn.members, seed=drawn.seed)


def state_ranges(states: Sequence[SiteState], keys: Keys = RANGED) -> StateRangesBlock:
    """Ranges and chances of one site.

    Parameters
    ----------
    states : sequence of SiteState
        In the order of the columns; with members in one of them at least, else everything is null.
    keys : dict of str to (str, float, float)
        As `RANGED`.

    Returns
    -------
    StateRangesBlock
    """
    return StateRangesBlock(
        range={key: _ends(states, of) for key, of in keys.items()},
        input_range={key: _ends(states, of, inputs_only=True) for key, of in keys.items()},
        chance={event: [chance_at(state, event) for state in states] for event in EVENTS},
    )


def _ends(states: Sequence[SiteState], of: tuple[str, float, float], *, inputs_only: bool = False) -> Ends:
    name, factor, offset = of
    found = (range_at(state, name, inputs_only=inputs_only) for state in states)
    return [None if one is None else (one[0] * factor + offset, one[1] * factor + offset) for one in found]


def range_columns(block: StateRangesBlock) -> dict[str, list[float | None]]:
    """Ranges and chances as columns of a table.

    Parameters
    ----------
    block : StateRangesBlock

    Returns
    -------
    dict of str to list
        Ends as ``temperature_c_low`` and ``temperature_c_high``, by the inputs alone as ``temperature_c_inputs_low``,
        chances as ``chance_crosses``: names as in the table of a single crossing.
    """
    out: dict[str, list[float | None]] = {}
    for suffix, ranges in (("", block.range), ("_inputs", block.input_range)):
        for key, ends in ranges.items():
            out[f"{key}{suffix}_low"] = [None if one is None else one[0] for one in ends]
            out[f"{key}{suffix}_high"] = [None if one is None else one[1] for one in ends]
    return {**{f"chance_{name}": values for name, values in block.chance.items()}, **out}
