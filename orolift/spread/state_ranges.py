"""Ranges and chances of a site in one of many crossings, in SI, from the members that are kept of it."""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal

import numpy as np

from orolift.spread.ranges import chance_of, range_of
from orolift.spread.spread import CHANCE_OF_RAIN

if TYPE_CHECKING:
    from orolift.spread.site_state import SiteState

Event = Literal["crosses", "rain", "in_pool"]


def range_at(state: SiteState, name: str, *, inputs_only: bool = False) -> tuple[float, float] | None:
    """10 and 90 % of a number of a site.

    Parameters
    ----------
    state : SiteState
    name : str
        One of `orolift.spread.site_state.KEPT`, or `drying_power`.
    inputs_only : bool
        Without the error of the method. For rain no such error is stated: both are the same.

    Returns
    -------
    (float, float) or None
        In SI; None without members, or with fewer than five that have a value.
    """
    if state.members is None:
        return None
    arrays = state.members.inputs if inputs_only else state.members.full
    return range_of(arrays[name]) if name in arrays else None


def lost_members(state: SiteState) -> bool:
    """Whether members of a crossing could not be worked out, some or all of them.

    Parameters
    ----------
    state : SiteState
        Of a run with members.

    Returns
    -------
    bool
    """
    if state.members is None:
        return state.status == "crossing"
    return bool(np.isnan(state.members.crosses).any())


def chance_at(state: SiteState, event: Event) -> float | None:
    """Share of the members in which something happens at a site.

    Parameters
    ----------
    state : SiteState
    event : 'crosses', 'rain' or 'in_pool'
        Crossing at all counts among all members that could be worked out; rain (0.1 mm/h or more) and lying in a cold
        pool among those that cross.

    Returns
    -------
    float or None [1]
        None without members that count.
    """
    members = state.members
    if members is None:
        return None
    if event == "crosses":
        return chance_of(members.crosses)
    if event not in members.inputs:
        return None
    values = members.inputs[event]
    if event == "rain":
        values = np.where(np.isfinite(values), values >= CHANCE_OF_RAIN, np.nan)
    return chance_of(values)
