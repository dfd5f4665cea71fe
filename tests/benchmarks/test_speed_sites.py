"""Many sites and the map of the lee: time in crossings, memory of the process that gathers them.

Work of many lines is that of as many crossings; what joins them must cost little beside it. Seconds on two cores
are printed.
"""

import resource
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pytest

from orolift.cli.executors import executor_of
from orolift.crossing.situation import crossing_of
from orolift.sources.inputs import read_inputs, situation_of
from orolift.sources.site_lines import site_groups
from orolift.sources.strips import strip_plan
from orolift.spread.lee_map import lee_map
from orolift.spread.sites import air_of_groups
from orolift.spread.strips import air_of_strips

DEMO = Path(__file__).parents[2] / "demo_terrain"


def many(folder, count):
    """The moist demo case with so many sites all over its raster."""
    rng = np.random.default_rng(3)
    rows = [
        f"Post {n},{x:.0f},{y:.0f}"
        for n, (x, y) in enumerate(rng.uniform((592e3, 4755e3), (692e3, 4849e3), (count, 2)), start=1)
    ]
    (folder / "sites.csv").write_text("name,easting_m,northing_m\n" + "\n".join(rows) + "\n")
    text = (DEMO / "varn_moist.toml").read_text()
    for name in ("varn.tif", "sounding.csv", "basins.geojson", "gauges.csv"):
        text = text.replace(f'"{name}"', f'"{DEMO / name}"')
    (folder / "many.toml").write_text(f'sites_file = "sites.csv"\n{text}')
    return folder / "many.toml"


def one_crossing(inputs):
    """Seconds of one crossing, the best of three."""
    situation, taken = situation_of(inputs), []
    for _ in range(3):
        start = time.perf_counter()
        crossing_of(situation)
        taken.append(time.perf_counter() - start)
    return min(taken)


@pytest.mark.speed
def test_a_thousand_sites(tmp_path):
    """Less time than 150 crossings, one after the other: sites share lines. Aim: 30 s on two cores."""
    inputs = read_inputs(many(tmp_path, 1000))
    one = one_crossing(inputs)
    start = time.perf_counter()
    with executor_of(2) as executor:
        parts = list(air_of_groups(site_groups(inputs), executor))
    seconds = time.perf_counter() - start
    done = sum(len(part.found) for part in parts)
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024.0
    print(f"\n{done} of 1000 sites: {seconds:.1f} s, {seconds / one:.0f} crossings of {one:.2f} s; {peak:.0f} MB here")
    assert done > 900
    assert seconds < 150.0 * one


@pytest.mark.speed
def test_map_of_the_lee():
    """More than 200 strips in the time of 150 crossings, joining in that of 20. Aim: 60 s on two cores, 1 GB."""
    inputs = read_inputs(DEMO / "varn_moist.toml")
    one = one_crossing(inputs)
    start = time.perf_counter()
    plan = strip_plan(inputs)
    drawn = time.perf_counter() - start
    with executor_of(2) as executor:
        parts = air_of_strips(plan.strips, executor)
    worked = time.perf_counter() - start
    found = lee_map(parts, plan.frame, plan.placed.grid, inputs.incoming)
    seconds = time.perf_counter() - start
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024.0
    print(
        f"\n{found.strips} strips: {seconds:.1f} s (drawing {drawn:.1f}, joining {seconds - worked:.1f}), "
        f"{seconds / one:.0f} crossings of {one:.2f} s; {peak:.0f} MB here"
    )
    assert found.strips > 200
    assert seconds < 150.0 * one
    assert seconds - worked < 20.0 * one


@pytest.mark.speed
def test_memory_does_not_grow_with_the_sites(tmp_path):
    """Ten times the sites, less than twice the memory: groups are made and given back one by one."""
    code = (
        "import resource, sys\n"
        "from orolift.sources.inputs import read_inputs\n"
        "from orolift.sources.site_lines import site_groups\n"
        "n = sum(len(group.sites) for group in site_groups(read_inputs(sys.argv[1])))\n"
        "print(n, resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024.0)\n"
    )
    peaks = {}
    for count in (1000, 10_000 - 3):
        done = subprocess.run(
            [sys.executable, "-c", code, str(many(tmp_path, count))], capture_output=True, text=True, check=True
        )
        peaks[count] = float(done.stdout.split()[1])
    print(f"\npeak memory by sites: {peaks}")
    assert peaks[9997] < 2.0 * peaks[1000]
