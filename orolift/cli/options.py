"""Options that several commands share, and what they switch on."""

from __future__ import annotations

import logging
from typing import TYPE_CHECKING, Any

import click

if TYPE_CHECKING:
    from collections.abc import Callable


class WholeNumber(click.IntRange):
    """Whole number in a range, named so in what is said of text that is none."""

    name = "whole number"


UNITS_OPTION = click.option(
    "--units",
    type=click.Choice(["metric", "us"]),
    default="metric",
    show_default=True,
    help="Units of page and terminal; JSON and CSV stay as documented.",
)
QUIET_OPTION = click.option("--quiet", is_flag=True, help="Print no summary.")
VERBOSE_OPTION = click.option(
    "--verbose",
    is_flag=True,
    expose_value=False,
    callback=lambda _context, _parameter, value: show_steps() if value else None,
    help="Say on stderr what is being done, and show the place of a fault.",
)
JOBS_OPTION = click.option(
    "--jobs",
    type=WholeNumber(min=1, max=1024),
    default=None,
    metavar="N",
    help="Processes to work with; default: one for each usable core. 1 uses none but this.",
)
SCHEDULER_OPTION = click.option(
    "--scheduler",
    default=None,
    metavar="ADDRESS",
    help="Work on the cluster of this dask scheduler, as in tcp://HOST:8786 (needs the extra 'cluster').",
)
MEMBERS_OPTION = click.option(
    "--members",
    type=WholeNumber(min=0),
    default=None,
    metavar="M",
    help="How often each crossing is worked out for the ranges, 10 or more; 0 leaves them out. Default: as [spread].",
)


def show_steps() -> None:
    """Send the log of every step to stderr."""
    logging.basicConfig(level=logging.DEBUG, format="%(relativeCreated)6.0f ms  %(name)s: %(message)s", force=True)
    logging.getLogger("rasterio").setLevel(logging.WARNING)  # its own log would drown ours


def steps_are_shown() -> bool:
    """Whether --verbose was given."""
    return logging.getLogger().isEnabledFor(logging.DEBUG)


def file_option(name: str, text: str) -> Callable[[Any], Any]:
    """Option that takes the path of a file to write."""
    return click.option(name, type=click.Path(path_type=str), default=None, metavar="FILE", help=text)
