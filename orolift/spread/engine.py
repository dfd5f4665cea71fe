"""One function over many tasks, on any executor of `concurrent.futures`."""

from __future__ import annotations

from concurrent.futures import FIRST_COMPLETED, BrokenExecutor, CancelledError, wait
from dataclasses import dataclass
from itertools import islice
from typing import TYPE_CHECKING, Generic, TypeVar

from orolift.errors import WorkersError

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Iterator
    from concurrent.futures import Executor, Future

Task = TypeVar("Task")
Value = TypeVar("Value")

IN_FLIGHT = 64
"""Tasks handed out at once; enough to keep every worker busy, few enough that memory stays flat."""


@dataclass(frozen=True, eq=False)
class Outcome(Generic[Value]):
    """What came of one task.

    Attributes
    ----------
    number : int
        Of the task, from 0.
    value : Value or None
        None when it failed.
    error : Exception or None
        Why it failed.
    """

    number: int
    value: Value | None
    error: Exception | None = None


def outcomes(
    work: Callable[[Task], Value],
    tasks: Iterable[Task],
    executor: Executor | None = None,
    *,
    in_flight: int = IN_FLIGHT,
) -> Iterator[Outcome[Value]]:
    """What comes of each task, as it is finished.

    Parameters
    ----------
    work : callable
        Of one task. With an executor of processes it must be a function of a module.
    tasks : iterable
        Taken one by one, so that a generator need not fit into memory.
    executor : Executor, optional
        None works here, one after the other.
    in_flight : int
        Tasks handed out at once.

    Yields
    ------
    Outcome
        In the order they are finished; a failed task is an outcome too, and the rest goes on.

    Raises
    ------
    WorkersError
        If a process of the executor is lost; what was yielded before holds.

    Notes
    -----
    Nothing depends on the order: what is random is drawn before. When the
    caller stops early, tasks that have not begun are cancelled.
    """
    numbered = enumerate(tasks)
    if executor is None:
        for number, task in numbered:
            yield _outcome(number, work, task)
        return
    running: dict[Future[Value], int] = {}
    try:
        while True:
            for number, task in islice(numbered, in_flight - len(running)):
                running[executor.submit(work, task)] = number
            if not running:
                return
            done, _ = wait(running, return_when=FIRST_COMPLETED)
            for future in sorted(done, key=running.__getitem__):
                number, error = running.pop(future), future.exception()
                if isinstance(error, BrokenExecutor) or not isinstance(error, Exception | None):
                    raise error
                yield Outcome(number, None if error else future.result(), error)
    except (BrokenExecutor, CancelledError) as error:
        raise WorkersError(
            "a process that worked ended before its work was done, most likely for lack of memory. "
            "Work with fewer at once, for example --jobs 1."
        ) from error
    finally:
        for future in running:
            future.cancel()


def in_order(found: Iterable[Outcome[Value]]) -> list[Outcome[Value]]:
    """Outcomes by the number of their task."""
    return sorted(found, key=lambda outcome: outcome.number)


def _outcome(number: int, work: Callable[[Task], Value], task: Task) -> Outcome[Value]:
    try:
        return Outcome(number, work(task))
    except Exception as error:  # noqa: BLE001 (a failed task is reported, whatever it failed of)
        return Outcome(number, None, error)
