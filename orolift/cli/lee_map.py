"""The lee of a case as a map: worked out where it is asked for, and its GeoTIFF files."""

from __future__ import annotations

import logging
from pathlib import Path
from typing import TYPE_CHECKING

from orolift.cli.executors import executor_of, progress
from orolift.errors import OroliftError

if TYPE_CHECKING:
    from collections.abc import Sequence
    from concurrent.futures import Executor

    from orolift.sources.inputs import Inputs
    from orolift.sources.strips import MappedLee, StripPlan
    from orolift.spread.lee_map import LeeMap
    from orolift.spread.lee_spread import LeeSpread, MembersDrawn
    from orolift.spread.lee_thresholds import LeeThresholds
    from orolift.spread.strips import StripAir

log = logging.getLogger(__name__)


def mapped_lee(
    inputs: Inputs, *, jobs: int | None = None, scheduler: str | None = None, quiet: bool = False
) -> MappedLee:
    """The lee of a case as a map.

    Parameters
    ----------
    inputs : Inputs
        Of a case with a raster.
    jobs : int, optional
    scheduler : str, optional
        As for `orolift.cli.executors.executor_of`.
    quiet : bool
        Show no progress.

    Returns
    -------
    MappedLee

    Raises
    ------
    OroliftError
        If the map cannot be read, or no strip be worked out.
    """
    from orolift.sources.strips import MappedLee, sites_on, strip_plan
    from orolift.spread.lee_map import lee_map
    from orolift.spread.strips import air_of_strips

    try:
        plan = strip_plan(inputs)
        log.debug("%d strips drawn", len(plan.strips))
        with executor_of(jobs, scheduler) as executor:
            numbers = _with_members(inputs, plan)
            with progress(len(plan.strips), "Strips", quiet=quiet) as bar:
                parts = air_of_strips(plan.strips, executor, lambda: bar.update(1), numbers)
            found = lee_map(parts, plan.frame, plan.placed.grid, inputs.incoming)
            thresholds = _thresholds(inputs, found)
            numbers = tuple(i for i in numbers if parts[i].values is not None)
            drawn = _members(inputs, plan, numbers, executor, quiet=quiet)
        spread = None if drawn is None else _spread(inputs, plan, parts, drawn, thresholds)
    except OroliftError as error:
        error.args = (f"{inputs.path}: {error}",)
        raise
    log.debug("map of the lee worked out")
    return MappedLee(plan, found, sites_on(plan.placed, inputs.places), thresholds, spread)


def _with_members(inputs: Inputs, plan: StripPlan) -> tuple[int, ...]:
    """Numbers of the strips that get members; none where the case has none."""
    from orolift.spread.strip_members import strips_with_members

    if inputs.case.spread.members == 0:
        return ()
    return strips_with_members([strip.situation is not None for strip in plan.strips], plan.frame.across)


def _members(
    inputs: Inputs, plan: StripPlan, numbers: tuple[int, ...], executor: Executor | None, *, quiet: bool
) -> MembersDrawn | None:
    """Members on some of the strips; None where none of them has an answer, or the case no members."""
    from orolift.sources.spread_model import uncertainty_of
    from orolift.spread.lee_spread import MembersDrawn
    from orolift.spread.spread import Drawn
    from orolift.spread.strip_members import draw, members_of_strips

    spread = inputs.case.spread
    if not numbers:
        return None
    drawn = Drawn(uncertainty_of(inputs.case), spread.members, spread.seed)
    level = draw(drawn)
    with progress(len(numbers), "Members of strips", quiet=quiet) as bar:
        found = members_of_strips(plan.strips, numbers, drawn.uncertainty, level, executor, lambda: bar.update(1))
    log.debug("%d members on %d strips worked out", level.shape[0], len(numbers))
    situations = [strip.situation for strip in (plan.strips[i] for i in numbers) if strip.situation is not None]
    return MembersDrawn(found, situations[0], drawn.uncertainty, level)


def _spread(
    inputs: Inputs, plan: StripPlan, parts: Sequence[StripAir], drawn: MembersDrawn, thresholds: LeeThresholds | None
) -> LeeSpread:
    """How sure the map is."""
    from orolift.spread.lee_spread import RulesAsked, lee_spread

    rules = () if thresholds is None else tuple(one.rule for one in thresholds.judged)
    asked = RulesAsked(rules, inputs.case.lee.roughness_m, inputs.fire.drought_index)
    return lee_spread(parts, plan.frame, plan.placed.grid, drawn, asked)


def _thresholds(inputs: Inputs, found: LeeMap) -> LeeThresholds | None:
    """The rules of the case on its map; None without any."""
    from orolift.spread.lee_thresholds import thresholds_on_map

    fire = inputs.fire
    if fire.rules is None:
        return None
    return thresholds_on_map(found, fire.rules, inputs.case.lee.roughness_m, fire.drought_index)


def lee_files(folder: str | None, inputs: Inputs, mapped: MappedLee | None) -> dict[Path, bytes]:
    """The GeoTIFF files of a map of the lee.

    Parameters
    ----------
    folder : str or None
    inputs : Inputs
    mapped : MappedLee or None
        Nothing is written without both.

    Returns
    -------
    dict of Path to bytes
    """
    if folder is None or mapped is None:
        return {}
    from orolift import __version__
    from orolift.sources.geotiff import lee_maps, threshold_maps

    case = inputs.case
    tags = {"title": case.title or inputs.path.stem, "software": f"orolift {__version__}"}
    if case.valid_time is not None:
        tags["valid_time"] = case.valid_time.isoformat()
    spread = mapped.spread
    if spread is not None:
        tags["members"] = str(spread.members)
    maps = lee_maps(mapped.plan.placed, mapped.map, tags, spread)
    if mapped.thresholds is not None:
        maps |= threshold_maps(mapped.plan.placed, mapped.thresholds, tags, spread)
    return {Path(folder) / f"{inputs.path.stem}_{name}.tif": content for name, content in maps.items()}
