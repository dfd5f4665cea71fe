"""`orolift compare`: a crossing against what was observed in the lee, and what would explain the difference."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

from orolift.cli.options import (
    JOBS_OPTION,
    QUIET_OPTION,
    UNITS_OPTION,
    VERBOSE_OPTION,
    file_option,
)
from orolift.cli.outputs import Outputs, made_now

if TYPE_CHECKING:
    from orolift.report.quantities import Units


@click.command(context_settings={"help_option_names": ["-h", "--help"]})
@click.argument("cases", nargs=-1, metavar="CASE...")
@click.argument("observed", metavar="OBSERVED.csv")
@file_option("--report", "Report to write; default CASE-compared.html in the current folder.")
@file_option("--results", "Results to write as JSON.")
@file_option("--table", "Table to write as CSV: one row for each estimate against an observation.")
@click.option(
    "--series",
    default=None,
    metavar="FILE",
    help="Incoming air of many hours, as for 'orolift hours', in place of the case's own.",
)
@click.option(
    "--within",
    type=click.FloatRange(0.0, 1440.0),
    default=30.0,
    show_default=True,
    metavar="MINUTES",
    help="Observations farther than this from the time of a case are not held against it.",
)
@click.option("--explain", default=None, metavar="SITE", help="Place to explain; default: where it is farthest off.")
@click.option(
    "--event",
    "events",
    multiple=True,
    metavar="TEXT",
    help="Threshold to count hits and false alarms of, as in 'gust_ms >= 20'; may be given several times.",
)
@click.option(
    "--lee-sounding", default=None, metavar="FILE", help="Sounding in the lee, held against the estimated profile."
)
@click.option("--at", "sounding_at", default=None, metavar="SITE", help="Where that was; default: the first lee site.")
@click.option(
    "--onset-offset",
    "offset",
    type=click.FloatRange(-10.0, 20.0),
    default=1.0,
    show_default=True,
    metavar="K",
    help="By how much the potential temperature in the lee may fall short of that at the crest.",
)
@click.option(
    "--onset-sector",
    "sector",
    default=None,
    metavar="FROM-TO",
    help="Lee wind directions in degrees that count, clockwise, as in 190-280; default: 60 either side of across.",
)
@click.option(
    "--onset-wind",
    "least_wind",
    type=click.FloatRange(0.0, 50.0),
    default=2.0,
    show_default=True,
    metavar="M/S",
    help="Weakest lee wind that counts.",
)
@JOBS_OPTION
@UNITS_OPTION
@QUIET_OPTION
@VERBOSE_OPTION
def command(
    cases: tuple[str, ...],
    observed: str,
    *,
    report: str | None,
    results: str | None,
    table: str | None,
    units: Units,
    quiet: bool,
    **asked: object,
) -> None:
    """Hold the crossing of each CASE against what was OBSERVED in the lee."""
    from orolift import __version__
    from orolift.cli.compare_summary import summary_lines
    from orolift.cli.comparing import Asked, compared_of
    from orolift.report.compare import compare_page
    from orolift.report.render import render
    from orolift.sources.files import csv_text, existing_file

    if not cases:  # the one file given is taken for the last argument
        missing = "CASE..." if observed.lower().endswith(".csv") else "OBSERVED.csv"
        raise click.MissingParameter(ctx=click.get_current_context(), param_type="argument", param_hint=f"'{missing}'")
    page = Path(report) if report else Path(f"{Path(cases[0]).stem}-compared.html")
    outputs = Outputs()
    for option, path in {"--report": page, "--results": results, "--table": table}.items():
        if path is not None:
            outputs.plan(path, option)
    sounding = asked["lee_sounding"]
    if isinstance(sounding, str):  # it is opened last: what is wrong with it is said first
        existing_file(sounding, "--lee-sounding")
    found, inputs = compared_of(cases, observed, Asked(**asked, quiet=quiet))  # type: ignore[arg-type]  # click has checked the types
    title = inputs[0].case.title or inputs[0].path.stem
    data = compare_page(
        found, title=title, observed=Path(observed).name, made_at=made_now(), version=__version__, units=units
    )
    outputs.add(page, render(data, "compare.html.jinja").encode(), "--report")
    if results is not None:
        from orolift.sources.compare_results import compare_results

        outputs.add(results, (compare_results(found).model_dump_json(indent=2) + "\n").encode(), "--results")
    if table is not None:
        from orolift.sources.compare_results import value_rows

        outputs.add(table, csv_text(*value_rows(found)).encode(), "--table")
    outputs.write()
    if not quiet:
        click.echo("\n".join([*summary_lines(found, title, units), f"Report: {page}"]))
