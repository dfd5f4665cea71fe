"""`orolift hours`: one crossing an hour, and a timeline for each site."""

from __future__ import annotations

import logging
from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING

import click

from orolift.cli.executors import executor_of, progress
from orolift.cli.options import (
    JOBS_OPTION,
    QUIET_OPTION,
    SCHEDULER_OPTION,
    UNITS_OPTION,
    VERBOSE_OPTION,
    file_option,
)
from orolift.cli.outputs import Outputs, made_now

if TYPE_CHECKING:
    from orolift.report.quantities import Units
    from orolift.sources.hours_case import HourSetup
    from orolift.spread.hours import Hour
    from orolift.spread.timeline import Hours

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
    type=click.IntRange(min=0),
    default=None,
    metavar="M",
    help="How often each hour is worked out for the ranges, 10 or more; 0 leaves them out. Default: as [spread], 32, "
    "up to 100 hours; none in longer series.",
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
    found, stopped = worked(setup, jobs, scheduler, quiet=quiet)
    if not found:
        raise click.Abort
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
    if stopped:
        raise click.Abort(
            f"interrupted after {hours.time.size} of {hours.planned} hours; what was finished is written."
        )


def worked(setup: HourSetup, jobs: int | None, scheduler: str | None, *, quiet: bool) -> tuple[list[Hour], bool]:
    """Hours worked out, and whether the person stopped the work before its end."""
    from orolift.sources.hours_case import hour_tasks
    from orolift.spread.engine import outcomes
    from orolift.spread.hours import Hour, worked_hour
    from orolift.spread.site_state import SiteState

    found: list[Hour] = []
    count = setup.series.time.size
    try:
        with (
            executor_of(1 if jobs is None and count == 1 and scheduler is None else jobs, scheduler) as executor,
            progress(count, "Hours", quiet=quiet) as bar,
        ):
            for outcome in outcomes(worked_hour, hour_tasks(setup), executor):
                hour = outcome.value
                if hour is None:
                    state = SiteState("missing", f"a fault of orolift itself: {outcome.error}")
                    time = float(setup.series.time[outcome.number])
                    hour = Hour(outcome.number, time, (state,) * len(setup.sites))
                found.append(hour)
                bar.update(1)
    except KeyboardInterrupt:
        return filled(found, setup), True
    return found, False


def filled(found: list[Hour], setup: HourSetup) -> list[Hour]:
    """Hours that were finished, and those between them that were not, as missing: workers finish in any order."""
    from orolift.spread.hours import Hour
    from orolift.spread.site_state import SiteState

    done = {hour.number for hour in found}
    state = SiteState("missing", "The work was interrupted before this hour.")
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
    from orolift.report.hours_words import about, dangers, likely_all_the_same, total_rain
    from orolift.report.quantities import NO_BREAK_SPACE, Amount
    from orolift.report.spans import ranged
    from orolift.report.words import plain, zone_words

    zone = setup.series.zone

    def said(time: float | None, error: float | None, open_end: str) -> str:
        return open_end if time is None else about(time, error or 0.0, zone)

    first = datetime.fromtimestamp(float(hours.time[0]), zone)
    lines = [f"{setup.inputs.case.title or setup.inputs.path.stem} (times in {zone_words(first)})"]
    lines += [f"Note      {text}" for text in setup.series.notes[:2]]
    for site in hours.sites[:5]:
        spells = [
            f"{said(one.onset, one.onset_error, 'the start')} to {said(one.end, one.end_error, 'the end')}"
            for one in site.dry_winds[:2]
        ]
        more = f", and {len(site.dry_winds) - 2} more" if len(site.dry_winds) > 2 else ""
        dry = f"descending warm dry air from {', from '.join(spells)}{more}" if spells else "no descending warm dry air"
        if site.ranges is not None:
            dry += f" (in {100.0 * site.ranges.dry_wind.ever:.0f} % of the members)"
        rain = plain(ranged(Amount(site.rain, "water_depth", 0), total_rain(site)), units).replace(NO_BREAK_SPACE, " ")
        lines.append(
            f"{site.name[:24]}  {site.crossing_hours} of {len(site.states)} hours cross; {dry}; {rain} of rain and snow"
        )
        met = " ".join(plain(words, units) for words in dangers(site, zone)).replace("\u00a0", " ")
        lines += [f"Fire      {met} A threshold met is not a warning."] if met else []
        doubt = [plain(words, units).replace(NO_BREAK_SPACE, " ") for words in likely_all_the_same(site)]
        lines += [f"Fire      {' '.join(doubt)}"] if doubt else []
    if len(hours.sites) > 5:
        lines.append(f"          and {len(hours.sites) - 5} more sites: see the report or --table")
    return lines
