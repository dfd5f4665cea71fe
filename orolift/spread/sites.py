"""Sites on lines of their own: a crossing for each line, and the air at its sites in the order of the case."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from orolift.crossing.result import FailedSite, SiteLine, When
from orolift.crossing.situation import crossing_of
from orolift.errors import OroliftError
from orolift.fire.sites import fire_at_sites
from orolift.spread.engine import outcomes

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator
    from concurrent.futures import Executor

    from orolift.crossing.result import Crossing, LeeAir
    from orolift.crossing.situation import Situation
    from orolift.fire.sites import FireSettings, SiteFire


@dataclass(frozen=True)
class PlacedSite:
    """A site beside the case's own line.

    Attributes
    ----------
    number : int
        In the case, from 1.
    name : str
    along, offset : float [m]
        Along and across the case's own line.
    """

    number: int
    name: str
    along: float
    offset: float


@dataclass(frozen=True, eq=False)
class SiteGroup:
    """Sites that share a line and its crest.

    Attributes
    ----------
    sites : tuple of PlacedSite
    situation : Situation or None
        Their line, with the same sites in the same order; None when it cannot be drawn.
    reason : str
        Why not.
    fire : FireSettings or None
        What fire weather there is judged by.
    """

    sites: tuple[PlacedSite, ...]
    situation: Situation | None
    reason: str = ""
    fire: FireSettings | None = None


@dataclass(frozen=True, eq=False)
class GroupAir:
    """What came of a group: air and fire weather at its sites, or why there is none."""

    found: tuple[LeeAir, ...]
    fire: tuple[SiteFire, ...]
    failed: tuple[FailedSite, ...]


def air_of_groups(groups: Iterable[SiteGroup], executor: Executor | None = None) -> Iterator[GroupAir]:
    """The air at sites on lines of their own.

    Parameters
    ----------
    groups : iterable of SiteGroup
        Taken one by one.
    executor : Executor, optional
        None works here.

    Yields
    ------
    GroupAir
        As they are finished. A site that cannot be worked out comes with the reason, and the rest goes on.

    Raises
    ------
    Exception
        If a group fails of anything but its terrain or its air: that is a fault of ours.
    """
    for outcome in outcomes(group_air, groups, executor):
        if outcome.error is not None:
            raise outcome.error
        if outcome.value is not None:
            yield outcome.value


def group_air(group: SiteGroup) -> GroupAir:
    """The air at the sites of one group.

    Parameters
    ----------
    group : SiteGroup

    Returns
    -------
    GroupAir
    """
    if group.situation is None:
        return _failed(group, group.reason)
    try:
        crossing = crossing_of(group.situation)
        fire = fire_at_sites(crossing, group.situation.when or When(), group.fire)
    except OroliftError as error:
        return _failed(group, str(error))
    return GroupAir(
        tuple(_placed(site, air, crossing) for site, air in zip(group.sites, crossing.lee, strict=True)),
        tuple(replace(one, number=site.number) for site, one in zip(group.sites, fire, strict=True)),
        (),
    )


def _failed(group: SiteGroup, reason: str) -> GroupAir:
    return GroupAir((), (), tuple(FailedSite(site.number, site.name, reason) for site in group.sites))


def _placed(site: PlacedSite, air: LeeAir, crossing: Crossing) -> LeeAir:
    """The air at a site with its number in the case, and what its own line is like."""
    own = SiteLine(
        offset=site.offset,
        base=crossing.features.base,
        crest=crossing.features.crest,
        blocked_top=crossing.flow.blocked_top,
        beyond_crest=air.distance - crossing.features.crest_distance,
        crest_wind=crossing.flow.crest_wind,
        cloud_base=crossing.cloud.base,
        cautions=crossing.cautions,
    )
    return replace(air, number=site.number, distance=site.along, own=own)


def fire_by_number(crossing: Crossing, own: Iterable[SiteFire], parts: Iterable[GroupAir]) -> dict[int, SiteFire]:
    """Fire weather at sites by their numbers in the case.

    Parameters
    ----------
    crossing : Crossing
        Of all sites, from `with_sites`.
    own : iterable of SiteFire
        At the sites of the case's own line.
    parts : iterable of GroupAir

    Returns
    -------
    dict of int to SiteFire
    """
    on_line = crossing.lee if crossing.on_line is None else crossing.on_line
    found = {air.number: replace(fire, number=air.number) for air, fire in zip(on_line, own, strict=True)}
    for part in parts:
        found |= {air.number: fire for air, fire in zip(part.found, part.fire, strict=True)}
    return found


def with_sites(crossing: Crossing, on_line: tuple[int, ...], parts: Iterable[GroupAir], *, elsewhere: bool) -> Crossing:
    """A crossing with the air at all sites of its case.

    Parameters
    ----------
    crossing : Crossing
        Of the case's own line.
    on_line : tuple of int
        Numbers in the case of its sites, in their order; empty when none lies on it.
    parts : iterable of GroupAir
    elsewhere : bool
        Whether any site lies beside the line.

    Returns
    -------
    Crossing
        `lee` in the order of the case. When not a single site could be worked out, the lee foot of the
        case's own line stays.
    """
    if not elsewhere:
        return crossing
    groups = list(parts)
    own = tuple(replace(air, number=number) for air, number in zip(crossing.lee, on_line, strict=False))
    found = sorted((*own, *(air for group in groups for air in group.found)), key=lambda air: air.number)
    failed = sorted((site for group in groups for site in group.failed), key=lambda site: site.number)
    last = max([air.number for air in found] + [site.number for site in failed], default=0)
    line = own or tuple(replace(air, number=last + 1) for air in crossing.lee)
    return replace(crossing, lee=tuple(found) or line, on_line=line, failed=tuple(failed))
