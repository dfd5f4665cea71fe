"""Many tasks on any executor: failures are reported, nothing depends on the workers."""

from concurrent.futures import ProcessPoolExecutor, ThreadPoolExecutor
from multiprocessing import get_context

import pytest

from orolift.errors import OroliftError
from orolift.spread.engine import in_order, outcomes


def tenth(task):
    """A tenth of a number, and no number below 0."""
    if task < 0:
        raise OroliftError(f"{task} is below 0")
    return task / 10.0


TASKS = [5, -1, 7, 0, 12, -3, 2]


def shown(found):
    return [(one.number, one.value, str(one.error) if one.error else None) for one in in_order(found)]


def test_a_failed_task_is_reported_and_the_rest_goes_on():
    """Every task has its outcome, failed ones with their reason."""
    assert shown(outcomes(tenth, TASKS)) == [
        (0, 0.5, None),
        (1, None, "-1 is below 0"),
        (2, 0.7, None),
        (3, 0.0, None),
        (4, 1.2, None),
        (5, None, "-3 is below 0"),
        (6, 0.2, None),
    ]


@pytest.mark.parametrize("workers", [1, 3])
def test_threads_give_what_one_after_the_other_gives(workers):
    """Whatever their number, and with fewer tasks in flight than there are."""
    with ThreadPoolExecutor(workers) as executor:
        assert shown(outcomes(tenth, TASKS, executor, in_flight=2)) == shown(outcomes(tenth, TASKS))


def test_processes_give_the_same():
    """Tasks, values and errors survive the way to another process."""
    with ProcessPoolExecutor(2, mp_context=get_context("forkserver")) as executor:
        assert shown(outcomes(abs, TASKS, executor)) == [(i, abs(x), None) for i, x in enumerate(TASKS)]


def test_tasks_are_taken_only_as_they_are_needed():
    """A long list of tasks is never held whole."""
    taken = []

    def many():
        for number in range(1000):
            taken.append(number)
            yield number

    with ThreadPoolExecutor(1) as executor:
        found = outcomes(tenth, many(), executor, in_flight=8)
        next(found)
        found.close()
    assert len(taken) <= 16
