"""The lee of a case as a map: worked out where it is asked for, and its GeoTIFF files."""

from __future__ import annotations

import logging
from pathlib import Path
from typing import TYPE_CHECKING

from orolift.cli.executors import executor_of, progress
from orolift.errors import OroliftError

if TYPE_CHECKING:
    from orolift.sources.inputs import Inputs
    from orolift.sources.strips import MappedLee

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
        with (
            executor_of(jobs, scheduler) as executor,
            progress(len(plan.strips), "Strips", quiet=quiet) as bar,
        ):
            parts = air_of_strips(plan.strips, executor, lambda: bar.update(1))
        found = lee_map(parts, plan.frame, plan.placed.grid, inputs.incoming)
    except OroliftError as error:
        error.args = (f"{inputs.path}: {error}",)
        raise
    log.debug("map of the lee worked out")
    return MappedLee(plan, found, sites_on(plan.placed, inputs.places))


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
    from orolift.sources.geotiff import lee_maps

    case = inputs.case
    tags = {"title": case.title or inputs.path.stem, "software": f"orolift {__version__}"}
    if case.valid_time is not None:
        tags["valid_time"] = case.valid_time.isoformat()
    maps = lee_maps(mapped.plan.placed, mapped.map, tags)
    return {Path(folder) / f"{inputs.path.stem}_{name}.tif": content for name, content in maps.items()}
