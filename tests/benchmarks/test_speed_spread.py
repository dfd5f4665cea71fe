"""A thousand members of one crossing of 512 x 80 cells, on one core and on two."""

import os
import time
from pathlib import Path

import pytest

from orolift.cli.executors import executor_of, usable_cores
from orolift.crossing.situation import crossing_of
from orolift.sources.inputs import read_inputs, situation_of
from orolift.sources.spread_model import uncertainty_of
from orolift.spread.spread import spread_of

CASE = Path(__file__).resolve().parents[2] / "demo_terrain" / "varn_ridge.toml"
MEMBERS = int(os.environ.get("OROLIFT_MEMBERS", "1000"))


@pytest.mark.speed
@pytest.mark.skipif(usable_cores() < 2, reason="needs two cores")
def test_a_thousand_members(capsys):
    """At least 1.8 times as fast on two cores as on one, and at most 20 s on two of a quiet machine."""
    inputs = read_inputs(CASE)
    situation = situation_of(inputs)
    crossing, uncertainty = crossing_of(situation), uncertainty_of(inputs.case)

    def seconds(executor):
        began = time.perf_counter()
        spread_of(situation, crossing, uncertainty, members=MEMBERS, streamlines=80, executor=executor)
        return time.perf_counter() - began

    with executor_of(2) as executor:
        spread_of(situation, crossing, uncertainty, members=100, streamlines=24, executor=executor)  # workers start
        two = seconds(executor)
    one = seconds(None)
    with capsys.disabled():
        print(
            f"\n{MEMBERS} members, {situation.transect.distance.size} x 80 cells: {one:.1f} s on one core, {two:.1f} s on two"
        )
    assert one / two >= 1.8
    assert two * 1000.0 / MEMBERS <= 20.0
