"""`orolift hours`: one crossing an hour, and a timeline for each site."""

from __future__ import annotations

import logging
from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING

import click

from orolift.cli.gathering import Gathered, gathered, leave_unfinished
from orolift.cli.options import (
    JOBS_OPTION,
    QUIET_OPTION,
    SCHEDULER_OPTION,
    UNITS_OPTION,
    VERBOSE_OPTION,
    WholeNumber,
    file_option,
)
from orolift.cli.outputs import Outputs, made_now
from orolift.cli.spreading import Workers

if TYPE_CHECKING:
    from orolift.report.quantities import Units
    from orolift.sources.hours_case import HourSetup
    from orolift.spread.hours import Hour
    from orolift.spread.timeline import Hours, SiteTimeline

log = logging.getLogger(__name__)


@click.command(context_settings={"help_option_names": ["-h", "--help"]})
@click.argument("case")
@click.argument("series")
@file_option("--report", "Page to write; default CASE_hours.html in the current folder.")
@file_option("--table", "Table to write as CSV, one row for each site and hour.")
@file_option("--results", "Results to write as JSON.")
@file_option("--netcdf", "Results to write as NetCDF (needs the extra 'netcdf').")
@click.option("--folder", default=None, metavar="FOLDER", help="Folder for all of it, with an index page.")
@click.option(
    "--members",
    type=WholeNumber(min=0),
    default=None,
    metavar="M",
    help="How often each hour is worked out for the ranges, 10 or more; 0 leaves them out. Default: as [spread], 32, "
    "up to 48 hours; none in longer series.",
)
@JOBS_OPTION
@SCHEDULER_OPTION
@UNITS_OPTION
@QUIET_OPTION
@VERBOSE_OPTION
def command(
    case: str,
    series: str,
    *,
    folder: str | None,
    members: int | None,
    jobs: int | None,
    scheduler: str | None,
    units: Units,
    quiet: bool,
    **files: str | None,
) -> None:
    """Work out one crossing for each hour of SERIES over the terrain of CASE.

    SERIES is a CSV table of station values or of sounding files, each row with its time, or NetCDF with times.
    """
    from orolift.cli.folder import planned_files, where
    from orolift.sources.hours_case import read_hours, with_members
    from orolift.spread.timeline import hours_of

    outputs = Outputs()
    files = planned_files(files, f"{Path(case).stem}_hours", folder, outputs)
    if files["netcdf"] is not None:
        from orolift.sources.hours_netcdf import refuse_without_netcdf

        refuse_without_netcdf("--netcdf")
    setup = with_members(read_hours(case, series), members)
    log.debug("%s and %s read, %d hours", case, series, setup.series.time.size)
    found, work = worked(setup, Workers(jobs, scheduler, quiet))
    if not found:
        leave_unfinished(work, "")
    ground = setup.ground
    hours = hours_of(
        found,
        [site.name for site in setup.sites],
        setup.series.step,
        planned=setup.series.time.size,
        catchments=() if ground is None else [one.name for one in ground.catchments],
        fire=setup.inputs.fire,
        wind_error=setup.wind_error,
    )
    for path, content in contents_of(hours, setup, units, files).items():
        outputs.add(path, content, str(path))
    outputs.write()
    if not quiet:
        click.echo("\n".join([*summary_of(hours, setup, units), *where(files)]))
    if not work.finished:
        leave_unfinished(work, f"{hours.time.size} of {hours.planned} hours")


def worked(setup: HourSetup, workers: Workers) -> tuple[list[Hour], Gathered[Hour]]:
    """Hours worked out, and how that ended."""
    from orolift.sources.hours_case import hour_tasks
    from orolift.spread.hours import Hour, worked_hour
    from orolift.spread.site_state import SiteState

    work = gathered(worked_hour, hour_tasks(setup), setup.series.time.size, "Hours", workers)
    found = []
    for outcome in work.found:
        hour = outcome.value
        if hour is None:
            state = SiteState("missing", f"a fault of orolift itself: {outcome.error}")
            time = float(setup.series.time[outcome.number])
            hour = Hour(outcome.number, time, (state,) * len(setup.sites))
        found.append(hour)
    return (found if work.finished else filled(found, setup)), work


def filled(found: list[Hour], setup: HourSetup) -> list[Hour]:
    """Hours that were finished, and those between them that were not, as missing: workers finish in any order."""
    from orolift.spread.hours import Hour
    from orolift.spread.site_state import SiteState

    done = {hour.number for hour in found}
    state = SiteState("missing", "The work ended before this hour.")
    between = [number for number in range(max(done, default=0)) if number not in done]
    time = setup.series.time
    return [*found, *(Hour(number, float(time[number]), (state,) * len(setup.sites)) for number in between)]


def contents_of(hours: Hours, setup: HourSetup, units: Units, files: dict[str, str | None]) -> dict[Path, bytes]:
    """What stands in each file that was asked for."""
    from orolift import __version__
    from orolift.cli.folder import beside
    from orolift.report.hours_page import hours_page
    from orolift.report.render import render
    from orolift.report.site_index import hours_index
    from orolift.sources.files import csv_text
    from orolift.sources.hours_results import hour_rows, hours_results, notes_of

    page = hours_page(
        hours,
        title=setup.inputs.case.title or setup.inputs.path.stem,
        zone=setup.series.zone,
        made_at=made_now(),
        version=__version__,
        notes=notes_of(hours, setup),
        units=units,
    )
    out = {Path(str(files["report"])): render(page, "hours.html.jinja").encode()}
    if files.get("index") is not None:
        index = hours_index(hours, page, setup.series.zone, report=Path(str(files["report"])).name, files=beside(files))
        out[Path(str(files["index"]))] = render(index, "site_index.html.jinja").encode()
    results = hours_results(hours, setup)
    if files["table"] is not None:
        out[Path(files["table"])] = csv_text(*hour_rows(results)).encode()
    if files["results"] is not None:
        out[Path(files["results"])] = (results.model_dump_json(indent=1) + "\n").encode()
    if files["netcdf"] is not None:
        from orolift.sources.hours_netcdf import hours_netcdf

        out[Path(files["netcdf"])] = hours_netcdf(hours, setup, __version__)
    return out


def summary_of(hours: Hours, setup: HourSetup, units: Units = "metric") -> list[str]:
    """What happened, a line a site and one for the thresholds met at it, for at most five sites."""
    from orolift.report.hours_times import times_of
    from orolift.report.hours_words import dangers, likely_all_the_same, total_rain
    from orolift.report.quantities import NO_BREAK_SPACE, Amount
    from orolift.report.spans import ranged
    from orolift.report.words import plain, short_name, zone_words

    zone = setup.series.zone

    def said(site: SiteTimeline, number: int) -> str:
        members = None if site.ranges is None else site.ranges.dry_wind.stretches[number]
        onset, end = times_of(site.dry_winds[number], members, zone)
        return f"{plain(onset or ('the start',), units)} to {plain(end or ('the end',), units)}"

    first = datetime.fromtimestamp(float(hours.time[0]), zone)
    lines = [f"{setup.inputs.case.title or setup.inputs.path.stem} (times in {zone_words(first)})"]
    lines += [f"Note      {text}" for text in setup.series.notes[:2]]
    for site in hours.sites[:5]:
        spells = [said(site, number).replace(NO_BREAK_SPACE, " ") for number in range(len(site.dry_winds))[:2]]
        more = f", and {len(site.dry_winds) - 2} more" if len(site.dry_winds) > 2 else ""
        dry = f"descending warm dry air from {', from '.join(spells)}{more}" if spells else "no descending warm dry air"
        if site.ranges is not None and site.ranges.dry_wind.ever is not None:
            dry += f" (in {100.0 * site.ranges.dry_wind.ever:.0f} % of the members)"
        rain = plain(ranged(Amount(site.rain, "water_depth", 0), total_rain(site)), units).replace(NO_BREAK_SPACE, " ")
        lines.append(
            f"{short_name(site.name)}  {site.crossing_hours} of {len(site.states)} hours cross; {dry}; "
            f"{rain} of rain and snow"
        )
        met = " ".join(plain(words, units) for words in dangers(site, zone)).replace("\u00a0", " ")
        lines += [f"Fire      {met} A threshold met is not a warning."] if met else []
        doubt = [plain(words, units).replace(NO_BREAK_SPACE, " ") for words in likely_all_the_same(site)]
        lines += [f"Fire      {' '.join(doubt)}"] if doubt else []
    if len(hours.sites) > 5:
        lines.append(f"          and {len(hours.sites) - 5} more sites: see the report or --table")
    return lines
