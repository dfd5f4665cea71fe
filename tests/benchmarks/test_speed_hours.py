"""Hours of a series: what one costs beside a crossing with its ends, and memory that does not grow with their number."""

import pickle
import subprocess
import sys
import time
from dataclasses import replace
from pathlib import Path

import pytest

from orolift.crossing.situation import crossing_of
from orolift.sources.hours_case import hour_task, read_hours, with_members
from orolift.spread.hours import worked_hour

pytestmark = pytest.mark.speed

DEMO = Path(__file__).parents[2] / "demo_terrain"
# Run in a fresh process: growth of resident memory from the first hours to many more of them.
MEMORY = """
import sys
from pathlib import Path
from orolift.sources.hours_case import hour_task, read_hours
from orolift.spread.hours import worked_hour
def now():
    line = next(line for line in Path("/proc/self/status").read_text().splitlines() if line.startswith("VmHWM"))
    return int(line.split()[1]) / 1024
setup = read_hours(*sys.argv[1:3])
rows = [row for row in range(setup.series.time.size) if row not in setup.series.faults]
kept = [worked_hour(hour_task(setup, row)) for row in rows[:10]]
before = now()
kept += [worked_hour(hour_task(setup, row)) for _ in range(2) for row in rows[10:]]
print(now() - before, now(), len(kept))
"""


def cpu(work, items):
    """Mean processor time [s] of each item."""
    began = time.process_time()
    for item in items:
        work(item)
    return (time.process_time() - began) / len(items)


def test_an_hour_beside_a_crossing_with_its_ends():
    """An hour leaves the ends out; with column, thresholds and time on the way it costs less than such a crossing."""
    setup = read_hours(DEMO / "varn_hours.toml", DEMO / "varn_hours.csv")
    rows = [row for row in range(setup.series.time.size) if row not in setup.series.faults][:20]
    hour_task(setup, rows[0])
    made = cpu(lambda row: hour_task(setup, row), rows)
    tasks = [hour_task(setup, row) for row in rows]
    worked_hour(tasks[0])
    hour = cpu(worked_hour, tasks) + made
    whole = cpu(lambda task: crossing_of(replace(task.lines[0].situation, in_full=True)), tasks)
    print(
        f"\none hour {hour:.3f} s of processor ({made:.4f} s of it the column), a crossing with its ends {whole:.3f} s"
    )
    print(f"{1 / hour:.1f} hours a second on one core; a year on two cores {8760 * hour / 2 / 60:.1f} min")
    assert hour <= 1.2 * whole


def test_members_of_an_hour():
    """32 members, marched together, cost no more than 48 hours on a busy machine; and what is kept of them is a few kilobytes a site."""
    setup = read_hours(DEMO / "varn_hours.toml", DEMO / "varn_hours.csv")
    rows = [row for row in range(setup.series.time.size) if row not in setup.series.faults][8:14]
    alone, many = ([hour_task(one, row) for row in rows] for one in (setup, with_members(setup, 32)))
    worked_hour(alone[0])
    hour, members = cpu(worked_hour, alone), cpu(worked_hour, many)
    size = len(pickle.dumps(worked_hour(many[0]))) / len(setup.sites)
    print(f"\nan hour {hour:.3f} s of processor, with 32 members {members:.2f} s: {members / hour:.0f} times as much")
    print(f"{size / 1000:.1f} kB a site and hour")
    assert members <= 48 * hour
    assert size < 4000


def test_memory_does_not_grow_with_the_hours():
    """Fifty hours more take less than 20 MB, and all of it far less than 1 GB."""
    files = [str(DEMO / "varn_hours.toml"), str(DEMO / "varn_hours.csv")]
    done = subprocess.run([sys.executable, "-c", MEMORY, *files], capture_output=True, text=True, check=True)
    more, peak, count = (float(word) for word in done.stdout.split())
    print(f"\n{count:.0f} hours: {more:.1f} MB more, peak {peak:.0f} MB")
    assert more <= 20.0
    assert peak <= 400.0
