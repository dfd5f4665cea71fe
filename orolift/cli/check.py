"""`orolift check`: everything a case names is read, nothing is computed."""

from __future__ import annotations

from typing import TYPE_CHECKING

import click

from orolift.cli.options import VERBOSE_OPTION

if TYPE_CHECKING:
    from orolift.sources.inputs import Inputs


@click.command(context_settings={"help_option_names": ["-h", "--help"]})
@click.argument("case")
@VERBOSE_OPTION
def command(case: str) -> None:
    """Read CASE and every file it names, and say what is wrong or doubtful."""
    from orolift.cli.over_map import map_findings
    from orolift.sources.inputs import read_inputs

    inputs = read_inputs(case)
    for line in [*findings(inputs), *map_findings(inputs)]:
        click.echo(line)


def findings(inputs: Inputs) -> list[str]:
    """What was read and what is doubtful, a line each."""
    line, air = inputs.transect, inputs.incoming
    end = line.origin + float(line.distance[-1])
    lines = [
        f"{inputs.path}: reads without an error.",
        (
            f"Line: {line.origin / 1000:g} to {end / 1000:.1f} km, ground {line.elevation.min():.0f} to "
            f"{line.elevation.max():.0f} m, {line.distance.size} points."
        ),
        (
            f"Incoming air: {_given(inputs)}, ground {air.height[0]:.0f} m, "
            f"{air.pressure[0] / 100:.1f} hPa, {air.temperature[0] - 273.15:.1f} °C."
        ),
        f"Sites: {', '.join(site.name for site in inputs.sites) or 'none; the lee foot is used'}.",
    ]
    lines += [f"Doubtful: {text}" for text in inputs.cautions]
    lines += [f"Assumed: {text}" for text in (*air.notes, *line.notes)]
    return lines


def _given(inputs: Inputs) -> str:
    """What of the column was given."""
    levels = inputs.incoming.origin.count("measured")
    return f"{levels} levels given" if levels else "a station report"
