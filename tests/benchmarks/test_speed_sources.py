"""Reading soundings: time after imports, memory against the size of the file, and a cold check.

Run with: python -m pytest -n 0 -m speed tests/benchmarks/test_speed_sources.py -s
"""

import subprocess
import sys
import time
import tracemalloc
from pathlib import Path

import numpy as np
import pytest

from orolift.sources.sounding_air import air_from_sounding, read_any_sounding

DATA = Path(__file__).parents[1] / "data"  # origin and licence in the READMEs beside the files
pytestmark = pytest.mark.speed

TEMP = (
    "TTAA 53121 99999 99012 15256 24008 00110 14656 24510 92785 10020 25018 85470 05461 25520 70030 03366 26025 "
    "50560 19180 27040 40722 31380 27050 30918 46780 27560 25039 55380 27570 20182 60980 27080 15365 58180 27060 "
    "10622 57180 28030 88211 61580 27582 77255 27590 40510 31313 40102 81105=\n"
    "TTBB 53128 99999 00012 15256 11980 13840 22930 11020 33890 08811 44760 01756 55540 16976 66400 31380 "
    "21212 00012 24008 11950 25015 22800 26022="
)


def best(action, rounds=7):
    """Shortest of several runs [s]: others may use the machine."""
    times = []
    for _ in range(rounds):
        start = time.perf_counter()
        action()
        times.append(time.perf_counter() - start)
    return min(times)


def column(path):
    return air_from_sounding(read_any_sounding(str(path), "sounding_file", None), "sounding_file")


def test_one_sounding_takes_twenty_milliseconds(tmp_path):
    """CSV and TEMP text, read, checked and made a column."""
    temp = tmp_path / "t.txt"
    temp.write_text(TEMP)
    for path in (DATA / "real_crossings" / "pair_01" / "upwind.csv", temp):
        taken = best(lambda path=path: column(path))
        print(f"{path.name}: {taken * 1e3:.1f} ms")
        assert taken <= 0.020


def test_memory_of_the_readers(tmp_path):
    """At most ten times the file, by the interpreter's count, for a long CSV file and a long bulletin."""
    table = tmp_path / "long.csv"
    with table.open("w") as stream:
        stream.write("pressure_hpa,height_m,temperature_c,dew_point_c,wind_from_deg,wind_ms\n")
        stream.writelines(
            f"{p:.4f},,{15 + 35 * np.log(p / 1000):.2f},{-5 + 35 * np.log(p / 1000):.2f},240,8.0\n"
            for p in np.geomspace(1000, 100, 90_000)
        )
    bulletin = tmp_path / "long.txt"
    bulletin.write_text("\n".join(TEMP.replace("99999", f"{i:05d}") for i in range(1, 200)) + "\n" + TEMP)
    for path, station in ((table, None), (bulletin, "99999")):
        read_any_sounding(str(path), "x", None, station=station)
        tracemalloc.start()
        read_any_sounding(str(path), "x", None, station=station)
        peak = tracemalloc.get_traced_memory()[1]
        tracemalloc.stop()
        print(f"{path.name}: {peak / path.stat().st_size:.1f} times the file")
        assert peak <= 10 * path.stat().st_size


def test_check_cold_takes_a_second(tmp_path):
    """A new process, a case with a sounding and a METAR beside it."""
    (tmp_path / "s.csv").write_bytes((DATA / "real_crossings" / "pair_01" / "upwind.csv").read_bytes())
    (tmp_path / "case.toml").write_text(
        "valid_time = 1999-05-04T02:00:00Z\n[terrain]\nridge_km_m = [[0, 100], [40, 1400], [90, 50]]\n[incoming]\n"
        'sounding_file = "s.csv"\nsounding_at = { observed_time = 1999-05-04T00:00:00Z }\n'
        'surface_metar = { report = "METAR XVAR 040150Z 02010KT 9999 04/00 Q0999", elevation_m = 130 }\n'
    )
    command = [sys.executable, "-c", "from orolift.cli.main import run; run()", "check", str(tmp_path / "case.toml")]
    taken = best(lambda: subprocess.run(command, check=True, capture_output=True), rounds=5)
    bare = best(lambda: subprocess.run([sys.executable, "-c", "import numpy"], check=True), rounds=5)
    print(f"orolift check, cold: {taken:.2f} s, {taken / bare:.1f} times a bare start with numpy")
    assert taken <= max(1.0, 6.0 * bare)  # on a busy machine the ratio is what counts
