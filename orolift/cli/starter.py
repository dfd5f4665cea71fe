"""`orolift starter`: a small commented case to edit."""

from __future__ import annotations

from importlib import resources
from pathlib import Path

import click

from orolift.cli.options import QUIET_OPTION, VERBOSE_OPTION
from orolift.errors import MissingFileError

FILES = ("case.toml", "ridge.csv")


@click.command(context_settings={"help_option_names": ["-h", "--help"]})
@click.argument("folder", metavar="DIR")
@QUIET_OPTION
@VERBOSE_OPTION
def command(folder: str, *, quiet: bool) -> None:
    """Write a small commented case into DIR, which is made when missing."""
    from orolift.sources.files import write_all

    target = Path(folder)
    taken = [name for name in FILES if (target / name).exists()]
    if taken:
        raise MissingFileError(f"{target / taken[0]} is there already and is not overwritten. Name another folder.")
    try:
        target.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise MissingFileError(f"{target} cannot be made a folder ({str(error.strerror).lower()}).") from error
    source = resources.files("orolift.cli") / "starter_case"
    write_all({target / name: (source / name).read_bytes() for name in FILES})
    if not quiet:
        click.echo(f"Written: {', '.join(str(target / name) for name in FILES)}")
        click.echo(f"Next: edit {target / 'case.toml'}, then run: orolift cross {target / 'case.toml'}")
