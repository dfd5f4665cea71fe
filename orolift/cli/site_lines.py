"""Sites beside the line of their case: worked out on lines of their own, as many at once as there are cores."""

from __future__ import annotations

import logging
from collections import Counter
from contextlib import nullcontext
from dataclasses import replace
from typing import TYPE_CHECKING

from orolift.cli.executors import executor_of, progress
from orolift.errors import OroliftError

if TYPE_CHECKING:
    from collections.abc import Iterator

    from orolift.cli.executors import Progress
    from orolift.crossing.result import Crossing
    from orolift.sources.inputs import Inputs
    from orolift.spread.sites import GroupAir, SiteGroup

log = logging.getLogger(__name__)

FEW = 6
"""So many lines are worked out here: starting other processes would take longer."""
MOST_SAID = 4
"""Cautions of sites' own lines, and failed sites, that are said one by one."""


def with_own_lines(
    inputs: Inputs, crossing: Crossing, *, jobs: int | None = None, scheduler: str | None = None, quiet: bool = False
) -> tuple[Crossing, tuple[GroupAir, ...]]:
    """The crossing of a case with the air at all its sites.

    Parameters
    ----------
    inputs : Inputs
    crossing : Crossing
        Of the case's own line.
    jobs : int, optional
    scheduler : str, optional
        As for `orolift.cli.executors.executor_of`.
    quiet : bool
        Show no progress.

    Returns
    -------
    crossing : Crossing
    parts : tuple of GroupAir
        What came of the lines.

    Raises
    ------
    OroliftError
        If the map of the case cannot be read.
    """
    beside = sum(not place.on_line for place in inputs.places)
    if not beside:
        return crossing, ()
    from orolift.sources.site_lines import site_groups
    from orolift.spread.sites import air_of_groups, with_sites

    try:
        groups = list(site_groups(inputs))
    except OroliftError as error:
        error.args = (f"{inputs.path}: {error}",)
        raise
    log.debug("%d sites beside the line on %d lines of their own", beside, len(groups))
    few = len(groups) <= FEW and scheduler is None
    with (
        nullcontext() if few else executor_of(jobs, scheduler) as executor,
        progress(beside, "Sites", quiet=quiet or few) as bar,
    ):
        parts = tuple(_counted(air_of_groups(groups, executor), bar))
    on_line = tuple(number for number, place in enumerate(inputs.places, start=1) if place.on_line)
    out = with_sites(crossing, on_line, parts, elsewhere=True)
    out = replace(out, notes=(*out.notes, _note(groups, beside)), cautions=(*out.cautions, *_cautions(out)))
    return out, parts


def _counted(parts: Iterator[GroupAir], bar: Progress) -> Iterator[GroupAir]:
    for part in parts:
        bar.update(len(part.found) + len(part.failed))
        yield part


def _note(groups: list[SiteGroup], beside: int) -> str:
    sites = "1 site lies" if beside == 1 else f"{beside} sites lie"
    has = "has a line of its own" if beside == 1 else f"have lines of their own ({len(groups)} crossings)"
    return (
        f"{sites} beside the line of the case and {has}, parallel to it, with its own crest and range; lines lie a "
        "fifth of the swath apart, and the incoming air is the same for all."
    )


def _cautions(crossing: Crossing) -> list[str]:
    """What is doubtful on sites' own lines and not on the case's, and which sites failed."""
    seen = set(crossing.cautions)
    doubts: Counter[str] = Counter()
    first: dict[str, str] = {}
    for air in crossing.lee:
        for text in () if air.own is None else air.own.cautions:
            if text not in seen:
                doubts[text] += 1
                first.setdefault(text, air.name)
    out = [
        f"On the line of {first[text]}{f' and {count - 1} more sites' if count > 1 else ''}: {text}"
        for text, count in doubts.most_common(MOST_SAID)
    ]
    if len(doubts) > MOST_SAID:
        out.append(f"{len(doubts) - MOST_SAID} more cautions hold on lines of sites.")
    out += [f"{site.name} could not be worked out: {site.reason}" for site in crossing.failed[:MOST_SAID]]
    if len(crossing.failed) > MOST_SAID:
        out.append(f"{len(crossing.failed) - MOST_SAID} more sites could not be worked out; the table has the reasons.")
    return out
