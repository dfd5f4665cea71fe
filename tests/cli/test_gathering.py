"""Many tasks for one command: what is left of them when the work ends before its time."""

import os
import signal
import subprocess
import sys

import click
import pytest

from orolift.cli.executors import ended_as_by_ctrl_c
from orolift.cli.gathering import gathered, leave_unfinished
from orolift.cli.spreading import Workers
from orolift.errors import WorkersError


def lost_at(number):
    """The number, but the process that is given 30 ends as the system would end it."""
    if number == 30:
        os._exit(9)
    return number


def stopped_at(number):
    """The number, but at 3 a batch system asks the command to end."""
    if number == 3:
        os.kill(os.getpid(), signal.SIGTERM)
    return number


@pytest.mark.parametrize("jobs", [1, 2])
def test_everything_is_gathered(jobs):
    """Whatever the number of processes."""
    work = gathered(abs, range(-5, 0), 5, "Numbers", Workers(jobs, quiet=True))
    assert work.finished
    assert sorted(one.value for one in work.found) == [1, 2, 3, 4, 5]


def test_a_lost_process_leaves_what_was_finished(capfd):
    """The command writes that, then says what was lost."""
    tasks = (number for number in range(200))
    work = gathered(lost_at, tasks, 200, "Numbers", Workers(2, quiet=True))
    assert not work.finished
    assert 0 < len(work.found) < 200
    with pytest.raises(WorkersError, match="after 7 of 200 numbers, which are written: a process that worked ended"):
        leave_unfinished(work, "7 of 200 numbers")


def test_a_request_to_end_is_heard_as_ctrl_c():
    """What was finished is kept, and the signal means what it did before."""
    before = signal.getsignal(signal.SIGTERM)
    with ended_as_by_ctrl_c():
        work = gathered(stopped_at, range(9), 9, "Numbers", Workers(1, quiet=True))
    assert work.stopped
    assert [one.value for one in work.found] == [0, 1, 2]
    assert signal.getsignal(signal.SIGTERM) is before
    with pytest.raises(click.Abort, match="interrupted after 3 of 9 numbers"):
        leave_unfinished(work, "3 of 9 numbers")


SCRIPT = """
import time
from orolift.cli.executors import ended_as_by_ctrl_c
from orolift.cli.gathering import gathered
from orolift.cli.spreading import Workers
print("started", flush=True)
with ended_as_by_ctrl_c():
    work = gathered(time.sleep, [0.01] * 3 + [0.3] * 1000, 1003, "Naps", Workers(2, quiet=True))
print(len(work.found), work.stopped or work.lost is not None, flush=True)
"""


@pytest.mark.parametrize("everybody", [False, True], ids=["the command", "all its processes"])
def test_a_batch_system_ends_it_whole(everybody):
    """Asked to end alone or with its workers, the command goes on to what is finished, without a traceback."""
    run = subprocess.Popen(
        [sys.executable, "-c", SCRIPT],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        start_new_session=True,
    )
    assert run.stdout.readline()
    try:
        run.wait(timeout=1.5)
    except subprocess.TimeoutExpired:
        (os.killpg if everybody else os.kill)(run.pid, signal.SIGTERM)
    out, err = run.communicate(timeout=20)
    assert out.split()[1] == "True"
    assert err == ""
