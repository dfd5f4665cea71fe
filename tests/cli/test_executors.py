"""Where the work is done: here, in processes, on a cluster; and what is said when that cannot be."""

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import click
import pytest

from orolift.cli.executors import executor_of, progress, usable_cores
from orolift.errors import MissingExtraError, WorkersError
from orolift.spread.engine import in_order, outcomes

TASKS = [3, -4, 0, 7]


def found(executor):
    return [outcome.value for outcome in in_order(outcomes(abs, TASKS, executor))]


def test_one_job_means_here():
    """No process is started for it."""
    with executor_of(1) as executor:
        assert executor is None
    assert usable_cores() >= 1


def test_processes_take_one_thread_and_leave_ctrl_c_to_the_command():
    """Each has its core; the variables that say so are as before afterwards."""
    before = dict(os.environ)
    with executor_of(2) as executor:
        assert found(executor) == [3, 4, 0, 7]
        assert executor.submit(os.getenv, "OPENBLAS_NUM_THREADS").result() == "1"
        assert executor.submit(signal.getsignal, signal.SIGINT).result() == signal.SIG_IGN
    assert dict(os.environ) == before


def test_processes_are_deaf_to_ctrl_c_while_they_load():
    """They inherit the block: one that a terminal's Ctrl-C ended while loading left the command waiting for ever."""
    with executor_of(2) as executor:
        blocked = executor.submit(signal.pthread_sigmask, signal.SIG_BLOCK, []).result()
    assert signal.SIGINT in blocked
    assert signal.SIGINT not in signal.pthread_sigmask(signal.SIG_BLOCK, [])


def test_ctrl_c_waits_until_a_process_is_started(monkeypatch):
    """A task is handed out whole; then the command hears of it."""
    from concurrent.futures import ProcessPoolExecutor

    handed = []

    def interrupted(*_arguments):
        os.kill(os.getpid(), signal.SIGINT)
        time.sleep(0.01)
        handed.append(1)

    monkeypatch.setattr(ProcessPoolExecutor, "submit", interrupted)
    with executor_of(2) as executor, pytest.raises(KeyboardInterrupt):
        executor.submit(abs, 3)
    assert handed == [1]


def test_a_lost_process_is_one_error(capfd):
    """One that the system ended stops the run with a sentence, and what was finished is kept."""
    with executor_of(2) as executor:
        kept = list(outcomes(abs, TASKS, executor))
        with pytest.raises(WorkersError, match="a process that worked ended before its work was done"):
            list(outcomes(os._exit, [3, 3], executor))
    assert len(kept) == len(TASKS)


@pytest.fixture(scope="module")
def cluster():
    """A dask cluster on the loopback, in this process."""
    distributed = pytest.importorskip("distributed")
    with distributed.LocalCluster(
        n_workers=2, threads_per_worker=1, processes=False, protocol="tcp://", dashboard_address=":0", silence_logs=50
    ) as running:
        yield running


@pytest.mark.filterwarnings("ignore")  # those of the library's own event loop
def test_a_cluster_gives_the_same(cluster):
    """The address is all it takes."""
    with executor_of(scheduler=cluster.scheduler_address) as executor:
        assert found(executor) == [3, 4, 0, 7]
        failed = in_order(outcomes(bytes.fromhex, ["00", "no"], executor))
    assert failed[0].value == b"\0"
    assert isinstance(failed[1].error, ValueError)


@pytest.mark.parametrize("address", ["tcp://127.0.0.1:9", "nowhere", "tcp://nowhere.invalid:8786"])
@pytest.mark.filterwarnings("ignore")
def test_a_scheduler_that_does_not_answer_is_one_line(address, monkeypatch):
    """With the address in it, as soon as patience ends."""
    pytest.importorskip("distributed")
    monkeypatch.setattr("orolift.cli.executors.PATIENCE", 0.5)
    began = time.monotonic()
    with (
        pytest.raises(WorkersError, match=f"--scheduler {address}: no dask scheduler answers"),
        executor_of(None, address),
    ):
        pass
    assert time.monotonic() - began < 10.0


def test_without_the_extra_it_says_which(monkeypatch):
    """The name of the extra, as pip takes it."""
    monkeypatch.setitem(sys.modules, "distributed", None)
    with pytest.raises(MissingExtraError, match=r"orolift\[cluster\]"), executor_of(scheduler="tcp://127.0.0.1:9"):
        pass


def test_jobs_and_a_scheduler_exclude_each_other():
    """Whoever gives both is asked to choose."""
    with pytest.raises(click.UsageError, match="Give one"), executor_of(2, "tcp://127.0.0.1:9"):
        pass


def test_no_bar_where_nobody_looks(capsys):
    """Output that goes to a file holds no bar."""
    with progress(3, "Members") as bar:
        bar.update(3)
    assert capsys.readouterr().err == ""


SCRIPT = """
import signal
import sys
import time
signal.signal(signal.SIGINT, signal.default_int_handler)  # a shell without job control starts what is behind deaf to it
from orolift.cli.executors import executor_of
from orolift.spread.engine import outcomes
try:
    with executor_of(2) as executor:
        for outcome in outcomes(time.sleep, [0.01] * 3 + [0.3] * 1000, executor):
            print(outcome.number, flush=True)
except KeyboardInterrupt:
    sys.exit(130)
"""


def test_ctrl_c_ends_it_without_a_word_of_the_workers():
    """Finished tasks were handed on; no worker prints a traceback of its own."""
    run = subprocess.Popen(
        [sys.executable, "-c", SCRIPT],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        start_new_session=True,
    )
    assert run.stdout.readline()
    os.killpg(run.pid, signal.SIGINT)
    _, err = run.communicate(timeout=20)
    assert run.returncode == 130
    assert err == ""


ORPHANS = """
import os, sys, time
from orolift.cli.executors import executor_of
if __name__ == "__main__":
    with executor_of(2) as executor:
        print(executor.submit(os.getpid).result(), flush=True)
        time.sleep(60)
"""


@pytest.mark.skipif(not Path("/proc/self").exists(), reason="reads the list of processes of Linux")
def test_workers_end_when_the_command_is_killed():
    """Kill -9 leaves nobody who could end them; a worker that waits for work would wait for ever."""
    run = subprocess.Popen([sys.executable, "-c", ORPHANS], stdout=subprocess.PIPE, text=True, start_new_session=True)
    worker = int(run.stdout.readline())
    assert _runs(worker)
    run.kill()
    run.wait()  # the worker holds the pipe open, so not until its end
    until = time.monotonic() + 10.0
    while _runs(worker) and time.monotonic() < until:
        time.sleep(0.05)
    left = _runs(worker)
    if left:
        os.kill(worker, signal.SIGKILL)
    run.stdout.close()
    assert not left


def _runs(pid):
    """Whether a process is there and has not ended."""
    try:
        return Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()[0] != "Z"
    except OSError:
        return False
