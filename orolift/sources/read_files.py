"""What a run has read and what it is going to write: no output takes the place of an input."""

from __future__ import annotations

import os
from contextlib import contextmanager
from contextvars import ContextVar
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from orolift.errors import CaseError

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping
    from pathlib import Path


@dataclass(frozen=True)
class _Run:
    """Files of a run by their place, with the key or option each comes from."""

    read: dict[str, str] = field(default_factory=dict)
    written: dict[str, str] = field(default_factory=dict)


_run: ContextVar[_Run | None] = ContextVar("run", default=None)


@contextmanager
def inputs_kept() -> Iterator[None]:
    """Refuse outputs over inputs while this lasts: one run of the command. Outside of it nothing is recorded."""
    token = _run.set(_Run())
    try:
        yield
    finally:
        _run.reset(token)


def to_be_written(files: Mapping[str, str] | Mapping[Path, str]) -> None:
    """Say what a run is going to write, before it reads: reading such a file is refused from here on.

    Parameters
    ----------
    files : mapping of path to str
        Option each comes from.

    Raises
    ------
    CaseError
        If one was read already.
    """
    refuse_over_inputs(files)
    run = _run.get()
    if run is not None:
        run.written.update({place_of(path): option for path, option in files.items()})


def note_read(path: Path, where: str) -> None:
    """Record that a file is read.

    Parameters
    ----------
    path : Path
    where : str
        Key or option it comes from.

    Raises
    ------
    CaseError
        If the run is going to write it.
    """
    run = _run.get()
    if run is None:
        return
    place = place_of(path)
    if place in run.written:
        raise _refusal(run.written[place], path, where)
    run.read.setdefault(place, where)


def refuse_over_inputs(files: Mapping[str, str] | Mapping[Path, str]) -> None:
    """Refuse to write over a file that this run has read.

    Parameters
    ----------
    files : mapping of path to str
        Option each comes from, for the message.

    Raises
    ------
    CaseError
    """
    run = _run.get()
    if run is None:
        return
    for path, option in files.items():
        where = run.read.get(place_of(path))
        if where is not None:
            raise _refusal(option, path, where)


def place_of(path: str | Path) -> str:
    """A path as one word, however it is written."""
    return os.path.normcase(os.path.realpath(path))


def _refusal(option: str, path: str | Path, where: str) -> CaseError:
    return CaseError(
        f"{option}: {path} is an input of this run ({where}) and is not written over. Nothing is written; "
        "give another name."
    )
