"""`orolift cross`: the main job, from case to report."""

from __future__ import annotations

import logging
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

import click

from orolift.cli.lee_map import lee_files, mapped_lee
from orolift.cli.options import JOBS_OPTION, QUIET_OPTION, SCHEDULER_OPTION, UNITS_OPTION, VERBOSE_OPTION, file_option
from orolift.cli.outputs import Outputs, made_now, refuse_together
from orolift.cli.over_map import RainFiles, map_inputs_of, map_of, rain_files, refuse_what_cannot_be
from orolift.cli.spreading import Workers, spread_for

if TYPE_CHECKING:
    from collections.abc import Mapping

    from orolift.crossing.result import Crossing, LeeAir
    from orolift.crossing.situation import Situation
    from orolift.fire.sites import SiteFire
    from orolift.report.quantities import Units
    from orolift.sources.inputs import Inputs
    from orolift.sources.map_inputs import Mapped
    from orolift.sources.results import Results
    from orolift.sources.strips import MappedLee
    from orolift.spread.sites import GroupAir
    from orolift.spread.spread import Spread

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
    lee: MappedLee | None
    results: Results
    spread: Spread | None
    winter: Mapping[str, float]


@click.command(context_settings={"help_option_names": ["-h", "--help"]})
@click.argument("cases", nargs=-1, required=True, metavar="CASE...")
@file_option("--report", "Report to write; default CASE.html in the current folder.")
@file_option("--results", "Results to write as JSON.")
@file_option("--table", "Table to write as CSV, one row a site.")
@file_option("--geojson", "Sites to write as GeoJSON points.")
@click.option("--maps", default=None, metavar="FOLDER", help="Folder for GeoTIFF maps: rate, total, rain and snow.")
@click.option(
    "--lee-map", default=None, metavar="FOLDER", help="Folder for GeoTIFF maps of the lee, shown in the report."
)
@file_option("--catchments", "Catchments to write as CSV.")
@file_option("--gauges", "Gauges to write as CSV, map beside observation.")
@file_option("--fit", "TOML to write with the times fitted to the gauges; the case needs fit = true.")
@click.option(
    "--folder", default=None, metavar="FOLDER", help="Folder for all of it, with an index page: several cases."
)
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
    folder: str | None,
    jobs: int | None,
    scheduler: str | None,
    units: Units,
    quiet: bool,
    **rain: str | None,
) -> None:
    """Work out the crossing of each CASE and write its report."""
    files = RainFiles(**rain)
    named = {"--report": report, "--results": results, "--table": table, **files.asked()}
    refuse_together([option for option, value in named.items() if value is not None], len(cases), folder)
    outputs = Outputs()
    for case in cases:
        outputs.keep(case, "a case")
    wanted = Wanted(report, results, table, files)
    _plan(cases, wanted, folder, outputs)
    work = Workers(jobs, scheduler, quiet)
    if folder is not None:
        from orolift.cli.folder import into_folder

        summaries = into_folder(cases, Path(folder), units, outputs, work)
    else:
        summaries = [_one_by_one(case, wanted, units, outputs, work) for case in cases]
    outputs.write()
    if not quiet:
        _say(summaries, units)
        if folder is not None:
            click.echo(f"Index: {Path(folder) / 'index.html'}")


@dataclass(frozen=True)
class Wanted:
    """Files asked for by name."""

    report: str | None
    results: str | None
    table: str | None
    rain: RainFiles


def _plan(cases: tuple[str, ...], wanted: Wanted, folder: str | None, outputs: Outputs) -> None:
    """Name what is going to be written, so that what cannot be is refused before any work."""
    if folder is not None:
        from orolift.cli.folder import plan_folder

        plan_folder(cases, Path(folder), outputs)
        return
    rain = wanted.rain.asked()
    for option in ("--maps", "--lee-map"):
        if option in rain:
            outputs.plan_folder(Path(rain.pop(option)), option)
    for case in cases:
        outputs.plan(*_page(case, wanted.report))
    for option, path in {"--results": wanted.results, "--table": wanted.table, **rain}.items():
        if path is not None:
            outputs.plan(path, option)


def _page(case: str, report: str | None) -> tuple[Path, str]:
    """The page of a case, and what it is for."""
    return (Path(report), "--report") if report else (Path(f"{Path(case).stem}.html"), f"the report of {case}")


def _one_by_one(case: str, wanted: Wanted, units: Units, outputs: Outputs, work: Workers) -> tuple[Worked, Path]:
    """Work out a case and take in the files asked for."""
    worked = work_out(case, wanted.rain, work)
    page, what = _page(case, wanted.report)
    outputs.add(page, report_of(worked, units).encode(), what)
    add_results(worked, wanted.results, wanted.table, outputs)
    for path, (content, option) in rain_files(wanted.rain, worked.inputs, worked.mapped, worked.results).items():
        outputs.add(path, content, option)
    for path, content in lee_files(wanted.rain.lee_map, worked.inputs, worked.lee).items():
        outputs.add(path, content, "--lee-map")
    return worked, page


def add_results(
    worked: Worked,
    results: str | None,
    table: str | None,
    outputs: Outputs,
    what: tuple[str, str] = ("--results", "--table"),
) -> None:
    """Take in the results and the table of the sites, each where it is asked for."""
    from orolift.sources.files import csv_text
    from orolift.sources.site_table import site_rows

    if results is not None:
        outputs.add(results, (worked.results.model_dump_json(indent=2) + "\n").encode(), what[0])
    if table is not None:
        outputs.add(table, csv_text(*site_rows(worked.results)).encode(), what[1])


def _say(summaries: list[tuple[Worked, Path]], units: Units) -> None:
    """A few lines on each case."""
    from orolift.cli.summary import members_words, summary_lines

    for worked, page in summaries:
        lines = summary_lines(worked.crossing, worked.inputs.case, worked.inputs.path.stem, units, worked.spread)
        click.echo(
            "\n".join(
                [*lines, *fire_lines(worked), f"Report: {page}{members_words(worked.crossing, units, worked.spread)}"]
            )
        )


def work_out(case: str, files: RainFiles | None = None, workers: Workers | None = None) -> Worked:
    """A case read, its crossing, its members, and the rain over its map; refused where a file asked for cannot be."""
    from orolift.crossing.situation import crossing_of
    from orolift.sources.inputs import read_inputs, situation_of
    from orolift.sources.results import results_of
    from orolift.spread.ranges import remarks

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
    own = crossing
    parts: tuple[GroupAir, ...] = ()
    workers = workers or Workers(quiet=True)
    if inputs.case.terrain.elevation_file is not None:
        from orolift.cli.site_lines import with_own_lines

        crossing, parts = with_own_lines(
            inputs, crossing, jobs=workers.jobs, scheduler=workers.scheduler, quiet=workers.quiet
        )
    spread = spread_for(inputs, situation, crossing, workers)
    doubts = (*doubts, *(() if spread is None else remarks(spread)))
    mapped, more = map_of(found, inputs, crossing, needed=needed)
    if mapped is not None and spread is not None and spread.crosses.any():
        from orolift.spread.rain_members import rain_members

        north = mapped.inputs.placed.north
        mapped = replace(mapped, members=rain_members(spread, situation, crossing, mapped.rain, north=north))
    notes = () if mapped is None else (*mapped.inputs.notes, *mapped.rain.notes)
    if inputs.ground_layer.note is not None:
        notes = (inputs.ground_layer.note, *notes)
    crossing = replace(
        crossing, cautions=(*inputs.cautions, *crossing.cautions, *doubts, *more), notes=(*crossing.notes, *notes)
    )
    lee = None
    if files.lee_map is not None:
        lee = mapped_lee(inputs, jobs=workers.jobs, scheduler=workers.scheduler, quiet=workers.quiet)
    from orolift.spread.winter_chances import winter_chances

    winter = winter_chances(
        spread,
        snow_cover_above=inputs.case.rain.snow_cover_above_m,
        mapped=None if mapped is None else mapped.members,
    )
    flags = flags_of(inputs, crossing, mapped, winter)
    fire, reached, to_know = fire_of(inputs, own, crossing, parts, spread)
    crossing = replace(crossing, cautions=(*crossing.cautions, *to_know))
    results = results_of(crossing, inputs.case, mapped, (*flags, *reached), fire, inputs.places, spread, winter)
    return Worked(inputs, situation, crossing, mapped, flags, fire, lee, results, spread, winter)


def fire_of(
    inputs: Inputs, own: Crossing, crossing: Crossing, parts: tuple[GroupAir, ...], spread: Spread | None = None
) -> tuple[tuple[SiteFire, ...], tuple[str, ...], tuple[str, ...]]:
    """Fire weather at the sites, with chances by the members; thresholds met in sentences, what to know about them."""
    from orolift.fire.flags import fire_flags, windward_cautions
    from orolift.fire.sites import fire_at_sites
    from orolift.spread.sites import fire_by_number

    at_own = fire_at_sites(own, inputs.when, inputs.fire)
    by_number = fire_by_number(crossing, at_own, parts)
    found = tuple(by_number[air.number] for air in crossing.lee)
    if spread is not None and spread.crosses.any():
        found = tuple(
            _with_chances(one, air, inputs, crossing, spread) for one, air in zip(found, crossing.lee, strict=True)
        )
    rules = inputs.fire.rules
    return found, fire_flags(found, rules), windward_cautions(found, rules)


def _with_chances(one: SiteFire, air: LeeAir, inputs: Inputs, crossing: Crossing, spread: Spread) -> SiteFire:
    """Fire weather of a site judged on the members, the error of the method included."""
    from orolift.fire.chances import with_members
    from orolift.spread.at_sites import members_at

    arrays = members_at(spread, crossing, air)
    if arrays is None:
        return one
    alone = members_at(spread, crossing, air, inputs_only=True)
    return with_members(one, arrays, inputs.fire, crossing.settings.roughness, inputs.when, inputs=alone)


def flags_of(inputs: Inputs, crossing: Crossing, mapped: Mapped | None, winter: Mapping[str, float]) -> tuple[str, ...]:
    """Danger thresholds reached, in sentences."""
    from orolift.rain.winter import winter_flags

    return winter_flags(
        crossing,
        snow_cover_above=inputs.case.rain.snow_cover_above_m,
        grid=None if mapped is None else mapped.inputs.placed.grid,
        rain_on_map=None if mapped is None else mapped.rain.rain,
        chances=winter,
    )


def fire_lines(worked: Worked) -> list[str]:
    """What the fire thresholds of the case come to, a line; none without a rule file."""
    from orolift.report.fire_thresholds import headline, likeliest

    words, chance = headline(worked.fire).words, likeliest(worked.fire)
    most = f"; likeliest {chance}" if chance else ""
    return [f"Fire      {words}{most} (a threshold met is not a warning)"] if words else []


def report_of(worked: Worked, units: Units) -> str:
    """The report as one HTML page."""
    from orolift import __version__
    from orolift.report.page import page_of
    from orolift.report.render import render

    case = worked.inputs.case
    page = page_of(
        worked.crossing,
        title=case.title or worked.inputs.path.stem,
        valid_time=case.valid_time,
        made_at=made_now(),
        version=__version__,
        case_text=worked.inputs.text,
        units=units,
        mapped=worked.mapped,
        lee=worked.lee,
        flags=worked.flags,
        findings=worked.inputs.findings,
        stagnant_top=worked.situation.stagnant_top,
        spread=worked.spread,
        winter=worked.winter,
        fire=worked.fire,
        rules=worked.inputs.fire.rules,
    )
    html = render(page)
    log.debug("report rendered, %d kB", len(html) // 1024)
    return html
