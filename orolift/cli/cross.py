"""`orolift cross`: the main job, from case to report."""

from __future__ import annotations

import logging
import os
from dataclasses import dataclass, replace
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING

import click

from orolift.cli.options import QUIET_OPTION, UNITS_OPTION, VERBOSE_OPTION, file_option
from orolift.errors import CaseError

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing
    from orolift.report.quantities import Units
    from orolift.sources.inputs import Inputs
    from orolift.sources.results import Results

log = logging.getLogger(__name__)


@dataclass(frozen=True)
class Worked:
    """One case worked out."""

    inputs: Inputs
    crossing: Crossing
    results: Results


@click.command(context_settings={"help_option_names": ["-h", "--help"]})
@click.argument("cases", nargs=-1, required=True, metavar="CASE...")
@file_option("--report", "Report to write; default CASE.html in the current folder.")
@file_option("--results", "Results to write as JSON.")
@file_option("--table", "Table to write as CSV, one row a site.")
@UNITS_OPTION
@QUIET_OPTION
@VERBOSE_OPTION
def command(
    cases: tuple[str, ...], *, report: str | None, results: str | None, table: str | None, units: Units, quiet: bool
) -> None:
    """Work out the crossing of each CASE and write its report."""
    if len(cases) > 1:
        for option, value in (("--report", report), ("--results", results), ("--table", table)):
            if value is not None:
                raise CaseError(f"{option} takes one case, and {len(cases)} are given. Run it once for each case.")
    from orolift.sources.files import write_all

    contents: dict[Path, bytes] = {}
    summaries = []
    for case in cases:
        worked = work_out(case)
        page = Path(report) if report else Path(f"{Path(case).stem}.html")
        if page in contents:
            raise CaseError(f"{case}: another case of this run already writes {page}. Give the cases different names.")
        contents[page] = report_of(worked, units).encode()
        if results:
            contents[Path(results)] = (worked.results.model_dump_json(indent=2) + "\n").encode()
        if table:
            from orolift.sources.files import csv_text
            from orolift.sources.results import site_rows

            contents[Path(table)] = csv_text(*site_rows(worked.results)).encode()
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


def work_out(case: str) -> Worked:
    """A case read and its crossing worked out."""
    from orolift.crossing.crossing import cross
    from orolift.sources.inputs import read_inputs
    from orolift.sources.results import results_of
    from orolift.sources.units import to_si

    inputs = read_inputs(case)
    log.debug("%s read", case)
    try:
        crossing = cross(
            inputs.transect,
            inputs.incoming,
            inputs.sites,
            inputs.settings,
            lee=inputs.lee,
            when=inputs.when,
            normal=inputs.normal,
            lowest_pass=inputs.case.terrain.pass_m,
            crest_line=inputs.crest_line,
            background=to_si(inputs.case.rain.background_mm_per_h, "mm_per_h"),
        )
    except ValueError as error:
        error.args = (f"{case}: {error}",)
        raise
    log.debug("crossing worked out")
    crossing = replace(crossing, cautions=(*inputs.cautions, *crossing.cautions))
    return Worked(inputs, crossing, results_of(crossing, inputs.case))


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
    )
    html = render(page)
    log.debug("report rendered, %d kB", len(html) // 1024)
    return html
