"""Rain over a map: seconds and memory beside a bare transform of the same padded array, and 200 catchments."""

import subprocess
import sys
import time

import numpy as np
import pytest
import shapely

from orolift.rain.catchments import catchment_rain
from orolift.rain.parameters import RainParameters
from orolift.rain.rain_map import rain_map
from orolift.rain.spectral import WORKERS
from orolift.rain.windward import crest_divide, windward_cells
from orolift.terrain.grid import ElevationGrid

pytestmark = pytest.mark.speed

FLOW = RainParameters(12.0, 9.0, 0.005, 2500.0, 0.004)
# Run in a fresh process: peak resident memory beyond what the ground itself and the imports take.
MEMORY = """
import sys
from pathlib import Path
import numpy as np
from scipy import fft, ndimage
from orolift.rain.parameters import RainParameters
from orolift.rain.rain_map import rain_map
from orolift.terrain.grid import ElevationGrid
n = int(sys.argv[1])
def peak():
    # high-water mark of this process alone, in bytes; that of getrusage includes the parent's at the fork
    line = next(line for line in Path("/proc/self/status").read_text().splitlines() if line.startswith("VmHWM"))
    return 1024 * int(line.split()[1])
x = np.arange(n) * 100.0
ground = 1500.0 * np.exp(-(((x - 50.0 * n) / 2e4) ** 2)) * np.ones((n, 1))
grid = ElevationGrid(ground, x, x[::-1])
fft.irfft2(fft.rfft2(np.zeros((64, 64)), workers=2), workers=2)
before = peak()
found = rain_map(grid, RainParameters(12.0, 9.0, 0.005, 2500.0, 0.004))
print((peak() - before) / (8 * found.padded_shape[0] * found.padded_shape[1]), peak() / 2**20)
"""


def rugged(n):
    """A map of n x n cells of 100 m."""
    x = np.arange(n) * 100.0
    noise = np.random.default_rng(1).uniform(0.5, 1.5, (n, 1))
    return ElevationGrid(1500.0 * np.exp(-(((x - 50.0 * n) / 2e4) ** 2)) * noise, x, x[::-1])


def best_of(work, times=5):
    """Shortest wall time [s]."""
    taken = []
    for _ in range(times):
        began = time.perf_counter()
        work()
        taken.append(time.perf_counter() - began)
    return min(taken)


@pytest.mark.parametrize("n", [512, 2048])
def test_map_beside_a_bare_transform(n):
    """At most four times the real transform there and back of the padded array, by the same number of threads."""
    from scipy import fft

    grid = rugged(n)
    shape = rain_map(grid, FLOW).padded_shape
    bare = np.random.default_rng(1).normal(size=shape)
    trip = best_of(lambda: fft.irfft2(fft.rfft2(bare, workers=WORKERS), s=shape, workers=WORKERS))
    whole = best_of(lambda: rain_map(grid, FLOW))
    print(f"\n{n} x {n}, padded {shape[0]} x {shape[1]}: {whole:.2f} s, {whole / trip:.2f} times the bare round trip")
    assert whole <= 4.0 * trip


@pytest.mark.parametrize(("n", "times", "megabytes"), [(2048, 5.0, 1200.0), (4096, 5.0, 3000.0)])
def test_memory_of_a_map(n, times, megabytes):
    """At most five padded arrays beyond the ground; 4096 cells a side within 3 GB in all."""
    done = subprocess.run([sys.executable, "-c", MEMORY, str(n)], capture_output=True, text=True, check=True)
    arrays, peak = (float(word) for word in done.stdout.split())
    print(f"\n{n} x {n}: {arrays:.2f} padded arrays, peak {peak:.0f} MB")
    assert arrays <= times
    assert peak <= megabytes


def test_two_hundred_catchments():
    """Two hundred winding catchments of 300 vertices on 2048 x 2048 cells within 5 s, with snow and windward share."""
    grid = rugged(2048)
    rate = rain_map(grid, FLOW).rate
    windward = windward_cells(grid, crest_divide(grid, FLOW.bearing))
    snow = np.clip(grid.elevation / 2000.0, 0.0, 1.0)
    rng = np.random.default_rng(2)
    angle = np.linspace(0.0, 2.0 * np.pi, 300, endpoint=False)
    polygons = []
    for east, north, size in zip(*rng.uniform(20e3, 180e3, (2, 200)), rng.uniform(1e3, 20e3, 200), strict=True):
        reach = size * (1.0 + 0.2 * np.sin(7 * angle) + 0.05 * rng.normal(size=300))
        polygons.append(shapely.Polygon(np.column_stack([east + reach * np.cos(angle), north + reach * np.sin(angle)])))
    taken = best_of(
        lambda: [catchment_rain(p, grid, rate, 21600.0, snow_share=snow, windward=windward) for p in polygons], times=2
    )
    print(f"\n200 catchments: {taken:.2f} s")
    assert taken <= 5.0


def test_windward_side_of_a_large_map():
    """Two seconds for 2048 x 2048 cells: less than the rain."""
    grid = rugged(2048)
    taken = best_of(lambda: windward_cells(grid, crest_divide(grid, 0.9)), times=2)
    print(f"\nwindward side: {taken:.2f} s")
    assert taken <= 3.0
