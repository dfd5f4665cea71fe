"""`orolift cross`: the main job, from case to report."""

from __future__ import annotations

import logging
import os
from dataclasses import dataclass, replace
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING

import click

from orolift.cli.options import JOBS_OPTION, QUIET_OPTION, SCHEDULER_OPTION, UNITS_OPTION, VERBOSE_OPTION, file_option
from orolift.cli.over_map import RainFiles, map_inputs_of, map_of, rain_files, refuse_what_cannot_be
from orolift.errors import CaseError

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing
    from orolift.crossing.situation import Situation
    from orolift.fire.sites import SiteFire
    from orolift.report.quantities import Units
    from orolift.sources.inputs import Inputs
    from orolift.sources.map_inputs import Mapped
    from orolift.sources.results import Results

log = logging.getLogger(__name__)


@dataclass(frozen=True)
class Worked:
    """One case worked out."""

    inputs: Inputs
    situation: Situation
    crossing: Crossing
    mapped: Mapped | None
    flags: tuple[str, ...]
    fire: tuple[SiteFire, ...]
    results: Results


@click.command(context_settings={"help_option_names": ["-h", "--help"]})
@click.argument("cases", nargs=-1, required=True, metavar="CASE...")
@file_option("--report", "Report to write; default CASE.html in the current folder.")
@file_option("--results", "Results to write as JSON.")
@file_option("--table", "Table to write as CSV, one row a site.")
@file_option("--geojson", "Sites to write as GeoJSON points.")
@click.option("--maps", default=None, metavar="FOLDER", help="Folder for GeoTIFF maps: rate, total, rain and snow.")
@file_option("--catchments", "Catchments to write as CSV.")
@file_option("--gauges", "Gauges to write as CSV, map beside observation.")
@file_option("--fit", "TOML to write with the times fitted to the gauges; the case needs fit = true.")
@JOBS_OPTION
@SCHEDULER_OPTION
@UNITS_OPTION
@QUIET_OPTION
@VERBOSE_OPTION
def command(
    cases: tuple[str, ...],
    *,
    report: str | None,
    results: str | None,
    table: str | None,
    jobs: int | None,
    scheduler: str | None,
    units: Units,
    quiet: bool,
    **rain: str | None,
) -> None:
    """Work out the crossing of each CASE and write its report."""
    files = RainFiles(**rain)
    if len(cases) > 1:
        named = {"--report": report, "--results": results, "--table": table, **files.asked()}
        for option, value in named.items():
            if value is not None and option != "--maps":
                raise CaseError(f"{option} takes one case, and {len(cases)} are given. Run it once for each case.")
    from orolift.sources.files import csv_text, write_all
    from orolift.sources.site_table import site_rows

    contents: dict[Path, bytes] = {}
    summaries = []
    for case in cases:
        worked = work_out(case, files, Work(jobs, scheduler, quiet))
        page = Path(report) if report else Path(f"{Path(case).stem}.html")
        if page in contents:
            raise CaseError(f"{case}: another case of this run already writes {page}. Give the cases different names.")
        contents[page] = report_of(worked, units).encode()
        if results:
            contents[Path(results)] = (worked.results.model_dump_json(indent=2) + "\n").encode()
        if table:
            contents[Path(table)] = csv_text(*site_rows(worked.results)).encode()
        contents |= rain_files(files, worked.inputs, worked.mapped, worked.results)
        summaries.append((worked, page))
    write_all(contents)
    log.debug("written: %s", ", ".join(map(str, contents)))
    if not quiet:
        from orolift.cli.summary import summary_lines

        for worked, page in summaries:
            click.echo(
                "\n".join(
                    [
                        *summary_lines(worked.crossing, worked.inputs.case, worked.inputs.path.stem, units),
                        f"Report: {page}",
                    ]
                )
            )


@dataclass(frozen=True)
class Work:
    """Where many crossings are worked out, and whether progress is shown; as for `orolift.cli.executors`."""

    jobs: int | None = None
    scheduler: str | None = None
    quiet: bool = True


def work_out(case: str, files: RainFiles | None = None, work: Work | None = None) -> Worked:
    """A case read, its crossing worked out, and the rain over its map; refused where a file asked for cannot be."""
    from orolift.crossing.situation import crossing_of
    from orolift.sources.inputs import read_inputs, situation_of
    from orolift.sources.results import results_of

    inputs = read_inputs(case)
    situation = situation_of(inputs)
    log.debug("%s read", case)
    files = files or RainFiles()
    refuse_what_cannot_be(files, inputs)
    needed = files.maps is not None
    found, doubts = map_inputs_of(inputs, needed=needed)
    try:
        crossing = crossing_of(situation)
    except ValueError as error:
        error.args = (f"{case}: {error}",)
        raise
    log.debug("crossing worked out")
    if inputs.case.terrain.elevation_file is not None:
        from orolift.cli.site_lines import with_own_lines

        work = work or Work()
        crossing = with_own_lines(inputs, crossing, jobs=work.jobs, scheduler=work.scheduler, quiet=work.quiet)
    mapped, more = map_of(found, inputs, crossing, needed=needed)
    notes = () if mapped is None else (*mapped.inputs.notes, *mapped.rain.notes)
    if inputs.ground_layer.note is not None:
        notes = (inputs.ground_layer.note, *notes)
    crossing = replace(
        crossing, cautions=(*inputs.cautions, *crossing.cautions, *doubts, *more), notes=(*crossing.notes, *notes)
    )
    flags = flags_of(inputs, crossing, mapped)
    fire, reached, to_know = fire_of(inputs, crossing)
    crossing = replace(crossing, cautions=(*crossing.cautions, *to_know))
    results = results_of(crossing, inputs.case, mapped, (*flags, *reached), fire, inputs.places)
    return Worked(inputs, situation, crossing, mapped, flags, fire, results)


def fire_of(inputs: Inputs, crossing: Crossing) -> tuple[tuple[SiteFire, ...], tuple[str, ...], tuple[str, ...]]:
    """Fire weather at the sites, the thresholds met in sentences, and what to know about them."""
    from orolift.fire.flags import fire_flags, windward_cautions
    from orolift.fire.sites import fire_at_sites

    found = fire_at_sites(crossing, inputs.when, inputs.fire)
    rules = inputs.fire.rules
    return found, fire_flags(found, rules), windward_cautions(found, rules)


def flags_of(inputs: Inputs, crossing: Crossing, mapped: Mapped | None) -> tuple[str, ...]:
    """Danger thresholds reached, in sentences."""
    from orolift.rain.winter import winter_flags

    return winter_flags(
        crossing,
        snow_cover_above=inputs.case.rain.snow_cover_above_m,
        grid=None if mapped is None else mapped.inputs.placed.grid,
        rain_on_map=None if mapped is None else mapped.rain.rain,
    )


def report_of(worked: Worked, units: Units) -> str:
    """The report as one HTML page; the time stamp honours SOURCE_DATE_EPOCH."""
    from orolift import __version__
    from orolift.report.page import page_of
    from orolift.report.render import render

    stamp = os.environ.get("SOURCE_DATE_EPOCH")
    made_at = datetime.fromtimestamp(int(stamp), UTC) if stamp and stamp.isdigit() else datetime.now(UTC)
    case = worked.inputs.case
    page = page_of(
        worked.crossing,
        title=case.title or worked.inputs.path.stem,
        valid_time=case.valid_time,
        made_at=made_at,
        version=__version__,
        case_text=worked.inputs.text,
        units=units,
        mapped=worked.mapped,
        flags=worked.flags,
        findings=worked.inputs.findings,
        stagnant_top=worked.situation.stagnant_top,
        fire=worked.fire,
        rules=worked.inputs.fire.rules,
    )
    html = render(page)
    log.debug("report rendered, %d kB", len(html) // 1024)
    return html
