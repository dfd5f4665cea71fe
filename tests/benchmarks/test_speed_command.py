"""Cold starts of the command: seconds and memory of a fresh process, beside a bare Python with numpy.

Memory is the high-water mark that Linux keeps for a process since it was started (VmHWM). The one of getrusage goes
through the start: it would count the memory of the process that measures.
"""

import shutil
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pytest

DEMO = Path(__file__).parents[2] / "demo_terrain"
MEASURE = """
import sys
from orolift.cli.main import exit_code
code = exit_code(sys.argv[1:])
with open("/proc/self/status") as status:
    peak = next(line for line in status if line.startswith("VmHWM"))
print("peak_mb", int(peak.split()[1]) / 1024, file=sys.stderr)
sys.exit(code)
"""


def best_of(arguments, folder, times=5) -> tuple[float, float]:
    """Shortest wall time [s] of some fresh processes, and the peak memory [MB] of the last."""
    shortest, peak = float("inf"), float("nan")
    for _ in range(times):
        began = time.perf_counter()
        done = subprocess.run([sys.executable, *arguments], cwd=folder, capture_output=True, text=True, check=True)
        shortest = min(shortest, time.perf_counter() - began)
        peak = next((float(line.split()[1]) for line in done.stderr.splitlines() if line.startswith("peak_mb")), peak)
    return shortest, peak


@pytest.mark.speed
@pytest.mark.parametrize(
    ("name", "arguments", "seconds", "megabytes"),
    [
        ("help", ["--help"], 0.3, 60.0),
        ("ridge, 32 members", ["cross", "varn_ridge.toml", "--quiet"], 2.5, 250.0),
        ("ridge, no members", ["cross", "alone_ridge.toml", "--quiet"], 1.5, 250.0),
        ("raster, 32 members", ["cross", "varn_moist.toml", "--quiet"], 4.0, 400.0),
        ("raster, no members", ["cross", "alone_moist.toml", "--quiet"], 2.0, 400.0),
        ("check", ["check", "varn_ridge.toml"], 1.0, 250.0),
    ],
)
def test_cold_command(name, arguments, seconds, megabytes, tmp_path):
    """Seconds are for a quiet machine of two cores; the ratio to a bare start travels better."""
    for file in DEMO.iterdir():
        shutil.copy(file, tmp_path)
    for case in ("ridge", "moist"):
        text = (DEMO / f"varn_{case}.toml").read_text()
        (tmp_path / f"alone_{case}.toml").write_text(f"{text}\n[spread]\nmembers = 0\n")
    bare, _ = best_of(["-c", "import numpy"], tmp_path)
    taken, peak = best_of(["-c", MEASURE, *arguments], tmp_path)
    print(f"\n{name}: {taken:.2f} s, {taken / bare:.1f} times a bare start with numpy, peak {peak:.0f} MB")
    assert taken <= seconds
    assert peak <= megabytes


@pytest.mark.speed
def test_memory_is_that_of_the_process_itself(tmp_path):
    """A large process that measures a small one does not count."""
    held = np.ones(40_000_000)  # 320 MB
    _, peak = best_of(["-c", MEASURE, "--help"], tmp_path, times=1)
    assert held.all()
    assert peak <= 60.0
