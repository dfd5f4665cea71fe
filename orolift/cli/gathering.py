"""Many crossings worked out for one command, and what is left of them when the work ends before its time."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Generic, NoReturn, TypeVar

import click

from orolift.cli.executors import executor_of, progress
from orolift.errors import WorkersError

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable

    from orolift.cli.spreading import Workers
    from orolift.spread.engine import Outcome

Value = TypeVar("Value")


@dataclass(frozen=True, eq=False)
class Gathered(Generic[Value]):
    """What came of many tasks.

    Attributes
    ----------
    found : tuple of Outcome
        In the order they were finished.
    stopped : bool
        Whether the person, or the system by its request to end, stopped the work.
    lost : WorkersError or None
        Why the work could not go on.
    """

    found: tuple[Outcome[Value], ...]
    stopped: bool = False
    lost: WorkersError | None = None

    @property
    def finished(self) -> bool:
        """Whether everything was worked out."""
        return not self.stopped and self.lost is None


def gathered(
    work: Callable[[Any], Value], tasks: Iterable[Any], count: int, label: str, workers: Workers
) -> Gathered[Value]:
    """Tasks worked out wherever --jobs and --scheduler say, with a bar.

    Parameters
    ----------
    work : callable
        As `orolift.spread.engine.outcomes` takes it.
    tasks : iterable
    count : int
        How many there are.
    label : str
        What they are, for the bar.
    workers : Workers

    Returns
    -------
    Gathered
        Ctrl-C and a lost process leave what was finished.

    Raises
    ------
    WorkersError
        If no executor can be had.
    """
    from orolift.spread import engine

    found: list[Outcome[Value]] = []
    jobs = 1 if workers.jobs is None and count == 1 and workers.scheduler is None else workers.jobs
    try:
        with (
            executor_of(jobs, workers.scheduler) as executor,
            progress(count, label, quiet=workers.quiet) as bar,
        ):
            try:
                for outcome in engine.outcomes(work, tasks, executor):
                    found.append(outcome)
                    bar.update(1)
            except WorkersError as error:
                return Gathered(tuple(found), lost=error)
    except KeyboardInterrupt:
        return Gathered(tuple(found), stopped=True)
    return Gathered(tuple(found))


def leave_unfinished(work: Gathered[Any], done: str) -> NoReturn:
    """End a command whose work was not finished, after what was finished is written.

    Parameters
    ----------
    work : Gathered
    done : str
        How much was finished, in words; empty when it was nothing.

    Raises
    ------
    click.Abort
        If it was stopped.
    WorkersError
        If a process was lost.
    """
    if work.lost is not None:
        if not done:
            raise work.lost
        raise WorkersError(f"after {done}, which are written: {work.lost}") from work.lost
    if not done:
        raise click.Abort
    raise click.Abort(f"interrupted after {done}; what was finished is written.")
