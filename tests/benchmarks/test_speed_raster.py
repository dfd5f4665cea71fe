"""A transect from a large raster reads only what it needs.

The raster is one-arc-second, 14 400 x 14 400 cells, DEFLATE in tiles of 512,
without overviews. Time and memory are those of a process of its own, the best
of three; the import of the libraries is not counted in the time. The memory is
read from Linux (VmHWM): getrusage would count the process that started it too.
"""

import subprocess
import sys

import numpy as np
import pytest

SIZE, TILE = 14_400, 512
ARC_SECOND = 1.0 / 3600.0

MEASURED = """
import sys, time
from pathlib import Path
import numpy as np
import rasterio
from orolift.sources.raster import MapPoint, raster_transect
start = time.perf_counter()
line = raster_transect(
    sys.argv[1], wind_from=np.radians(float(sys.argv[2])), through=MapPoint(-121.0, -46.0), upwind=120e3, downwind=80e3
)
seconds = time.perf_counter() - start
peak = next(row for row in Path("/proc/self/status").read_text().splitlines() if row.startswith("VmHWM"))
print(seconds, int(peak.split()[1]) / 1024.0, line.elevation.max())
"""


@pytest.fixture(scope="module")
def large_raster(tmp_path_factory):
    """Ranges 30 km wide with a rough surface, which compresses as badly as a real survey."""
    import rasterio
    from rasterio.transform import from_origin
    from rasterio.windows import Window

    file = tmp_path_factory.mktemp("large") / "large.tif"
    rng = np.random.default_rng(5)
    rough = rng.normal(0.0, 4.0, (TILE, SIZE)).cumsum(axis=1).astype(np.float32)
    rough -= rough.mean()
    column = np.arange(SIZE, dtype=np.float32)
    with rasterio.open(
        file,
        "w",
        driver="GTiff",
        width=SIZE,
        height=SIZE,
        count=1,
        dtype="int16",
        crs="EPSG:4326",
        transform=from_origin(-123.0, -44.0, ARC_SECOND, ARC_SECOND),
        tiled=True,
        blockxsize=TILE,
        blockysize=TILE,
        compress="deflate",
        zlevel=1,
    ) as out:
        for top in range(0, SIZE, TILE):
            rows = np.arange(top, min(top + TILE, SIZE), dtype=np.float32)[:, None]
            ground = (
                1000.0 + 900.0 * np.cos((rows + column) / 700.0) + 0.3 * np.roll(rough, 37 * top, axis=1)[: rows.size]
            )
            out.write(np.clip(ground, 0.0, 4000.0).astype(np.int16), 1, window=Window(0, top, SIZE, rows.size))
    return file


@pytest.mark.speed
@pytest.mark.parametrize("wind_from_deg", [270.0, 235.0])
def test_transect_from_a_large_raster(large_raster, wind_from_deg):
    """At most 1 s and 300 MB for 200 km along and across the tiles."""
    command = [sys.executable, "-c", MEASURED, str(large_raster), str(wind_from_deg)]
    runs = [subprocess.run(command, capture_output=True, text=True, timeout=300, check=True) for _ in range(3)]
    seconds, megabytes, highest = min(tuple(float(word) for word in run.stdout.split()) for run in runs)
    print(
        f"\n{wind_from_deg:.0f} degrees: {seconds:.2f} s, {megabytes:.0f} MB, {large_raster.stat().st_size / 2**20:.0f} MB file"
    )
    assert highest > 1500.0
    assert seconds <= 1.0
    assert megabytes <= 300.0
