"""`orolift bearings`: every wind direction in turn, and a rose for each site."""

from __future__ import annotations

import logging
import math
from pathlib import Path
from typing import TYPE_CHECKING

import click

from orolift.cli.gathering import Gathered, gathered, leave_unfinished
from orolift.cli.options import (
    JOBS_OPTION,
    MEMBERS_OPTION,
    QUIET_OPTION,
    SCHEDULER_OPTION,
    UNITS_OPTION,
    VERBOSE_OPTION,
    file_option,
)
from orolift.cli.outputs import Outputs, made_now
from orolift.cli.spreading import Workers

if TYPE_CHECKING:
    from orolift.report.quantities import Units
    from orolift.sources.bearings_case import BearingSetup
    from orolift.spread.bearings import Bearings, Direction, SiteBearings

log = logging.getLogger(__name__)


@click.command(context_settings={"help_option_names": ["-h", "--help"]})
@click.argument("case")
@click.option("--step", type=int, default=10, show_default=True, metavar="DEGREES", help="Between two directions.")
@MEMBERS_OPTION
@file_option("--report", "Page to write; default CASE_bearings.html in the current folder.")
@file_option("--table", "Table to write as CSV, one row for each site and direction.")
@file_option("--results", "Results to write as JSON.")
@click.option("--folder", default=None, metavar="FOLDER", help="Folder for all of it, with an index page.")
@JOBS_OPTION
@SCHEDULER_OPTION
@UNITS_OPTION
@QUIET_OPTION
@VERBOSE_OPTION
def command(
    case: str,
    *,
    step: int,
    members: int | None,
    folder: str | None,
    jobs: int | None,
    scheduler: str | None,
    units: Units,
    quiet: bool,
    **files: str | None,
) -> None:
    """Work out the crossing of CASE for every direction its wind could come from."""
    from orolift.cli.folder import planned_files, where
    from orolift.sources.bearings_case import read_bearings
    from orolift.spread.bearings import bearings_of

    outputs = Outputs()
    files = planned_files(files, f"{Path(case).stem}_bearings", folder, outputs)
    setup = read_bearings(case, step, members)
    log.debug("%s read, %d directions", case, setup.directions)
    found, work = worked(setup, Workers(jobs, scheduler, quiet))
    if not found:
        leave_unfinished(work, "")
    bearings = bearings_of(
        found,
        [site.name for site in setup.sites],
        step=math.radians(step),
        given=setup.inputs.wind_from,
        planned=setup.directions,
    )
    for path, content in contents_of(bearings, setup, units, files).items():
        outputs.add(path, content, str(path))
    outputs.write()
    if not quiet:
        click.echo("\n".join([*summary_of(bearings, setup, units), *where(files)]))
    if not work.finished:
        leave_unfinished(work, f"{bearings.wind_from.size} of {bearings.planned} directions")


def worked(setup: BearingSetup, workers: Workers) -> tuple[list[Direction], Gathered[Direction]]:
    """Directions worked out, and how that ended."""
    from orolift.sources.bearings_case import bearing_tasks
    from orolift.spread.bearings import Direction, worked_direction
    from orolift.spread.site_state import SiteState

    work = gathered(worked_direction, bearing_tasks(setup), setup.directions, "Directions", workers)
    found = []
    for outcome in work.found:
        direction = outcome.value
        if direction is None:
            state = SiteState("missing", f"a fault of orolift itself: {outcome.error}")
            wind_from = math.radians(outcome.number * setup.step_deg)
            direction = Direction(wind_from, (state,) * len(setup.sites))
        found.append(direction)
    return found, work


def contents_of(
    bearings: Bearings, setup: BearingSetup, units: Units, files: dict[str, str | None]
) -> dict[Path, bytes]:
    """What stands in each file that was asked for."""
    from orolift import __version__
    from orolift.cli.folder import beside
    from orolift.report.bearings_page import bearings_page
    from orolift.report.render import render
    from orolift.report.site_index import bearings_index
    from orolift.sources.bearings_results import bearing_rows, bearings_results
    from orolift.sources.files import csv_text

    page = bearings_page(
        bearings,
        title=f"{setup.inputs.case.title or setup.inputs.path.stem}: every wind direction",
        made_at=made_now(),
        version=__version__,
        notes=setup.notes,
        drawn=setup.drawn,
        units=units,
    )
    out = {Path(str(files["report"])): render(page, "bearings.html.jinja").encode()}
    if files.get("index") is not None:
        index = bearings_index(bearings, page, report=Path(str(files["report"])).name, files=beside(files))
        out[Path(str(files["index"]))] = render(index, "site_index.html.jinja").encode()
    results = bearings_results(bearings, setup)
    if files["table"] is not None:
        out[Path(files["table"])] = csv_text(*bearing_rows(results)).encode()
    if files["results"] is not None:
        out[Path(files["results"])] = (results.model_dump_json(indent=1) + "\n").encode()
    return out


def summary_of(bearings: Bearings, setup: BearingSetup, units: Units) -> list[str]:
    """What was found, one or, with members, two lines a site; six sites at most."""
    from orolift.report.bearings_sure import members_line
    from orolift.report.words import plain, short_name

    lines = [setup.inputs.case.title or setup.inputs.path.stem]

    def said(number: int | None) -> str:
        return "none" if number is None else f"{math.degrees(bearings.wind_from[number]):.0f} degrees"

    def warmest(site: SiteBearings) -> str:
        state = None if site.warmest is None else site.states[site.warmest]
        if state is None or state.warming is None or state.warming <= 0.0:
            return "no direction warms it"  # as the page says
        return f"warmest from {said(site.warmest)}"

    for site in bearings.sites[:6]:
        crossing = sum(state.status == "crossing" for state in site.states)
        lines.append(
            f"{short_name(site.name)}  air crosses from {crossing} of {len(site.states)} directions; "
            f"{warmest(site)}, worst for fire {said(site.fire)}, best for rain {said(site.rain)}"
        )
        if setup.drawn is not None and (words := members_line(site, bearings, setup.drawn.members)):
            lines.append(f"          {plain(words, units)}")
    if len(bearings.sites) > 6:
        lines.append(f"          and {len(bearings.sites) - 6} more sites: see the report or --table")
    return lines
