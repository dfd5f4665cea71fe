"""Where many crossings are worked out: here, in processes of this machine, or on a cluster; and how far they are."""

from __future__ import annotations

import gc
import logging
import os
import signal
import sys
import threading
from contextlib import contextmanager
from typing import TYPE_CHECKING, Any, NoReturn, Protocol

import click

from orolift.errors import MissingExtraError, WorkersError

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator
    from concurrent.futures import Executor, Future

THREADS = ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS", "VECLIB_MAXIMUM_THREADS")
"""What the libraries of linear algebra read: one thread in each process, for there is a process on each core."""
PRELOADED = ["orolift.crossing.situation"]
"""Modules that every worker needs, loaded once and shared between the workers where the system can."""
PATIENCE = 5.0
"""Time [s] after which a scheduler that does not answer is given up."""


def usable_cores() -> int:
    """Cores that this process may run on."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1


@contextmanager
def executor_of(jobs: int | None = None, scheduler: str | None = None) -> Iterator[Executor | None]:
    """Executor for the length of a block.

    Parameters
    ----------
    jobs : int, optional
        Processes on this machine; the number of usable cores when left out. 1 means here, without any.
    scheduler : str, optional
        Address of a dask scheduler, which then decides where the work is done.

    Yields
    ------
    Executor or None
        None for work in this process, as `orolift.spread.engine.outcomes` takes it.

    Raises
    ------
    MissingExtraError
        If a scheduler is given and the extra for clusters is not installed.
    WorkersError
        If the scheduler does not answer.
    click.UsageError
        If both are given.

    Notes
    -----
    Tasks that have not begun when the block is left are cancelled; those that have are waited for.
    """
    if scheduler is not None:
        if jobs is not None:
            raise click.UsageError("--jobs counts processes here, and with --scheduler the cluster decides. Give one.")
        with _cluster(scheduler) as executor:
            yield executor
        return
    count = usable_cores() if jobs is None else jobs
    if count <= 1:
        yield None
        return
    with _processes(count) as executor:
        yield executor


@contextmanager
def _processes(count: int) -> Iterator[Executor]:
    """Processes on this machine, each with one thread of linear algebra."""
    import multiprocessing
    from concurrent.futures import ProcessPoolExecutor

    class Pool(ProcessPoolExecutor):
        """Processes that are started whole or not at all: one started half would look for us when we have gone."""

        def submit(self, fn: Callable[..., Any], /, *args: Any, **kwargs: Any) -> Future[Any]:
            with _interrupt_held():
                return super().submit(fn, *args, **kwargs)

    method = "forkserver" if "forkserver" in multiprocessing.get_all_start_methods() else "spawn"
    context = multiprocessing.get_context(method)
    if method == "forkserver":
        context.set_forkserver_preload(PRELOADED)
    before = {name: os.environ.get(name) for name in THREADS}
    os.environ.update(dict.fromkeys(THREADS, "1"))
    if method == "forkserver":
        _start_server()
    executor = Pool(count, mp_context=context, initializer=worker)
    try:
        yield executor
    finally:
        executor.shutdown(wait=True, cancel_futures=True)
        for name, value in before.items():
            if value is None:
                del os.environ[name]
            else:
                os.environ[name] = value


def _start_server() -> None:
    """Start the process that starts the workers, deaf to Ctrl-C from its first moment, and they with it.

    A terminal sends Ctrl-C to all of them; one that is still loading would end with a traceback, and we would wait
    for it without end.
    """
    from multiprocessing import forkserver, resource_tracker

    resource_tracker.ensure_running()  # starting it lifts the block
    with _interrupt_held():
        before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})  # which it inherits, and the workers from it
        try:
            forkserver.ensure_running()
        finally:
            signal.pthread_sigmask(signal.SIG_SETMASK, before)


@contextmanager
def ended_as_by_ctrl_c() -> Iterator[None]:
    """Within the block a request to end (SIGTERM), as batch systems and shutdowns send it, does what Ctrl-C does."""
    if threading.current_thread() is not threading.main_thread():
        yield  # signals are heard in the main thread alone
        return

    def interrupt(_number: int, _frame: object) -> NoReturn:
        raise KeyboardInterrupt

    before = signal.signal(signal.SIGTERM, interrupt)
    try:
        yield
    finally:
        signal.signal(signal.SIGTERM, before)


@contextmanager
def _interrupt_held() -> Iterator[None]:
    """Ctrl-C within the block is heard at its end, and a request to end where somebody listens to it.

    By a handler: a signal that one thread blocks goes to another, those of linear algebra among them.
    """
    if threading.current_thread() is not threading.main_thread():
        yield  # signals are heard in the main thread alone
        return
    heard: list[int] = []
    held = [signal.SIGINT, *([signal.SIGTERM] if callable(signal.getsignal(signal.SIGTERM)) else [])]
    before = {number: signal.signal(number, lambda number, _frame: heard.append(number)) for number in held}
    try:
        yield
    finally:
        for number, handler in before.items():
            signal.signal(number, handler)
    if heard:
        raise KeyboardInterrupt


def worker() -> None:
    """What a process does first: leave Ctrl-C to the process that started it, take one thread, and end with it."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    os.environ.update(dict.fromkeys(THREADS, "1"))
    threading.Thread(target=_end_with_parent, daemon=True).start()


def _end_with_parent() -> None:
    """End this process once the one that gives it work is gone, killed without a word: nobody else would end it."""
    import multiprocessing

    parent = multiprocessing.parent_process()
    if parent is not None:
        parent.join()
        os._exit(1)


@contextmanager
def _cluster(scheduler: str) -> Iterator[Executor]:
    """Executor of a running dask scheduler."""
    try:
        from distributed import Client
    except ImportError as error:
        raise MissingExtraError(
            "--scheduler needs dask.distributed: install the extra for clusters, pip install 'orolift[cluster]'."
        ) from error
    logging.getLogger("distributed").setLevel(logging.CRITICAL)  # what it has to say, we say in one line
    gc.collect()  # a client left behind closes when it is collected: amid the start of another it would wait for ever
    try:
        client = Client(scheduler, timeout=PATIENCE, set_as_default=False)
    except (OSError, ValueError, TypeError) as error:
        reason = str(error).splitlines()[0] if str(error) else type(error).__name__
        raise WorkersError(
            f"--scheduler {scheduler}: no dask scheduler answers there within {PATIENCE:g} s ({reason}). "
            "Check the address, for example tcp://192.0.2.7:8786, and that `dask scheduler` runs."
        ) from error
    try:
        executor: Executor = client.get_executor(pure=False)
        yield executor
        executor.shutdown(wait=False)
    finally:
        client.close(timeout=PATIENCE)


class Progress(Protocol):
    """Something that is told how much has been done."""

    def update(self, n_steps: int) -> None:
        """Take note that `n_steps` more are done."""


class _Silent:
    """Progress that nobody sees."""

    def update(self, n_steps: int) -> None:
        """Do nothing."""


@contextmanager
def progress(length: int, label: str, *, quiet: bool = False) -> Iterator[Progress]:
    """Progress bar with the time left, on stderr; nothing when it is no terminal.

    Parameters
    ----------
    length : int
        Steps in all.
    label : str
        What they are.
    quiet : bool
        Show nothing anyway.

    Yields
    ------
    Progress
        Its `update` is called with the number of steps done since the last call.
    """
    if quiet or not sys.stderr.isatty():
        yield _Silent()
        return
    with click.progressbar(length=length, label=label, file=sys.stderr, show_eta=True, show_pos=True) as bar:
        yield bar
