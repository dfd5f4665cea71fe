"""`orolift check`: everything a case names is read, nothing is computed."""

from __future__ import annotations

from math import degrees
from typing import TYPE_CHECKING

import click

from orolift.cli.options import VERBOSE_OPTION

MOST_NAMES = 12
"""Sites that are named."""

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
        *_found(inputs),
        (
            f"Incoming air: {_given(inputs)}, ground {air.height[0]:.0f} m, "
            f"{air.pressure[0] / 100:.1f} hPa, {air.temperature[0] - 273.15:.1f} °C."
        ),
        f"Sites: {_named_sites(inputs)}.",
    ]
    rules = inputs.fire.rules
    if rules is not None:
        count = len(rules.rules)
        lines.append(f"Fire: {count} {'rule' if count == 1 else 'rules'} of {rules.region}, by {rules.authority}.")
    from orolift.sources.quality import cautions, table_lines

    in_table = set(cautions(inputs.findings))
    lines += [f"Doubtful: {text}" for text in inputs.cautions if text not in in_table]
    if inputs.findings:
        lines += ["Quality control of the incoming air:", *(f"  {row}" for row in table_lines(inputs.findings))]
    lines += [f"Assumed: {text}" for text in (*air.notes, *line.notes)]
    return lines


def _named_sites(inputs: Inputs) -> str:
    """Names of the sites, the first dozen."""
    names = [place.name for place in inputs.places]
    if not names:
        return "none; the lee foot is used"
    more = f" and {len(names) - MOST_NAMES} more" if len(names) > MOST_NAMES else ""
    beside = sum(not place.on_line for place in inputs.places)
    own = f"; {beside} of them beside the line, on lines of their own" if beside else ""
    return f"{', '.join(names[:MOST_NAMES])}{more}{own}"


def _found(inputs: Inputs) -> list[str]:
    """The direction of the line, if it was not given."""
    if inputs.case.incoming.wind_from_deg is not None:
        return []
    direction = degrees(inputs.wind_from)
    return [f"Wind: from {direction:.0f} degrees, the mean from the base of the range to 500 m above its crest."]


def _given(inputs: Inputs) -> str:
    """What of the column was given."""
    origin = inputs.incoming.origin
    levels = sum(kind in {"measured", "model", "surface report blended in"} for kind in origin)
    stations = origin.count("station")
    given = f"{stations} stations" if stations > 1 else "a station report"
    return f"{levels} levels given" if levels else given
