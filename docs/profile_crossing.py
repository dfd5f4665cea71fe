"""Says where the time of a crossing goes: the tables of docs/performance.md.

Run it on a quiet machine:  python docs/profile_crossing.py
"""

from __future__ import annotations

import cProfile
import pstats
import sys
import time
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column_change import with_values
from orolift.crossing.crossing import cross, toward
from orolift.crossing.pool import Lee
from orolift.crossing.settings import Settings, checked
from orolift.crossing.solve import Ground, solve
from orolift.sources.inputs import read_inputs
from orolift.sources.ridge_csv import read_ridge
from orolift.terrain.features import features
from orolift.terrain.ridge import ridge_transect

if TYPE_CHECKING:
    from collections.abc import Callable

DEMO = Path(__file__).resolve().parents[1] / "demo_terrain"
TIMES, MANY = 7, 32
# row of the table: functions whose time, with all they call, counts for it, and functions in them that do not
ROWS: tuple[tuple[str, tuple[str, ...], tuple[str, ...]], ...] = (
    ("march, share prescribed", ("march.py:march",), ()),
    ("march with rain worked out", ("falling.py:march_with_rain",), ()),
    ("waves: solver and transforms", ("waves.py:waves",), ()),
    ("layers, boundary, streamlines, speed", ("airflow.py:airflow", "airflow.py:joined"), ("waves.py:waves",)),
    ("pressure", ("passes.py:_pressure",), ()),
    ("column, stability, blocking", ("upwind.py:upwind_column", "upwind.py:blocking"), ()),
    ("lee wind, trapped waves", ("lee_wind.py:lee_winds", "trapped.py:trapped_waves"), ()),
    ("sites: arrival, profile, popular picture", ("sites.py:site_air",), ()),
)


def runs() -> dict[str, Callable[[], object]]:
    """What is measured, by name."""
    inputs = read_inputs(DEMO / "varn_ridge.toml")
    distance, elevation = read_ridge("ridge.csv", "ridge_file", DEMO)
    spacing = float(np.ptp(distance)) / 2047.0
    fine = ridge_transect(distance, elevation, spacing=spacing, bearing=inputs.transect.bearing)
    shape = features(fine, inputs.sites[0].distance)
    ground = Ground(fine, shape, toward(fine, inputs.incoming), 1.0)
    coarse = ridge_transect(
        distance, elevation, spacing=float(np.ptp(distance)) / 511.0, bearing=ground.transect.bearing
    )
    grounds = Ground(coarse, features(coarse, inputs.sites[0].distance), ground.normal, 1.0)
    warmer = np.linspace(-2.0, 2.0, MANY)[:, np.newaxis]
    many = with_values(inputs.incoming, temperature=inputs.incoming.temperature + warmer)
    found: dict[str, Callable[[], object]] = {
        f"`solve`, {MANY} members, rain worked out": lambda: solve(
            grounds, many, checked(Settings()), Lee(), members=MANY
        )
    }
    for name, share in (("70 % removed", 0.7), ("rain worked out", None)):
        settings = checked(replace(inputs.settings, removed_share=share))

        def whole(settings: Settings = settings) -> object:
            return cross(inputs.transect, inputs.incoming, inputs.sites, settings, when=inputs.when)

        def large(settings: Settings = settings) -> object:
            return solve(ground, inputs.incoming, settings, Lee(), streamlines=150, passes=3)

        found[f"`cross`, demo ridge, {name}"] = whole
        found[f"`solve`, 2048 x 150, 3 passes, {name}"] = large
    return dict(sorted(found.items()))


def shares(run: Callable[[], object]) -> list[float]:
    """Share of each row in the time of a run, and what is left."""
    profile = cProfile.Profile()
    profile.runcall(run)
    stats = pstats.Stats(profile)
    inclusive: dict[str, float] = {}
    for (file, _, name), (_, _, _, cumulative, _) in stats.stats.items():  # type: ignore[attr-defined]
        key = f"{Path(file).name}:{name}"
        inclusive[key] = inclusive.get(key, 0.0) + cumulative
    total = stats.total_tt  # type: ignore[attr-defined]
    out = [
        (sum(inclusive.get(key, 0.0) for key in own) - sum(inclusive.get(key, 0.0) for key in but)) / total
        for _, own, but in ROWS
    ]
    return [*out, 1.0 - sum(out)]


def shortest(measured: dict[str, Callable[[], object]]) -> dict[str, float]:
    """Shortest of some rounds of each run [s]; in turn, so that a busy moment does not fall on one alone."""
    best = dict.fromkeys(measured, np.inf)
    for _ in range(TIMES):
        for name, run in measured.items():
            began = time.perf_counter()
            run()
            best[name] = min(best[name], time.perf_counter() - began)
    return best


def main() -> None:
    """Print the table."""
    measured = runs()
    seconds = shortest(measured)
    first = next(iter(seconds.values()))
    columns = [shares(run) for run in measured.values()]
    rows = [["step", *measured], ["---"] * (len(measured) + 1)]
    names = [*(name for name, _, _ in ROWS), "the rest"]
    rows += [[name, *(f"{100.0 * column[i]:.0f} %" for column in columns)] for i, name in enumerate(names)]
    rows.append(["time, the first column as 1", *(f"{one / first:.1f}" for one in seconds.values())])
    sys.stdout.write("".join("| " + " | ".join(row) + " |\n" for row in rows))
    sys.stdout.write(f"seconds, best of {TIMES}: {', '.join(f'{one:.2f}' for one in seconds.values())}\n")


if __name__ == "__main__":
    main()
