"""The main job on real elevation and real soundings (origin and licence beside the data)."""

import json
from pathlib import Path

import pytest

from orolift.cli.main import exit_code

DATA = Path(__file__).parents[1] / "data"


@pytest.mark.parametrize(
    ("raster", "pair", "wind_from", "upwind_km", "downwind_km"),
    [
        ("coast_9km.tif", "pair_62", 280, 120, 120),
        ("coast_9km.tif", "pair_08", 300, 120, 120),
        ("range_90m.tif", "pair_01", 95, 36, 10),
    ],
)
def test_real_terrain_with_real_air(raster, pair, wind_from, upwind_km, downwind_km, tmp_path, monkeypatch, capsys):
    """A coarse coastal range and a fine inland one cross with the upwind sounding of a real pair."""
    monkeypatch.chdir(tmp_path)
    sounding = DATA / "real_crossings" / pair / "upwind.csv"
    (tmp_path / "real.toml").write_text(
        f"""[terrain]
elevation_file = "{DATA / "real_terrain" / raster}"
[transect]
upwind_km = {upwind_km}
downwind_km = {downwind_km}
[incoming]
wind_from_deg = {wind_from}
sounding_file = "{sounding}"
"""
    )
    code = exit_code(["cross", "real.toml", "--results", "real.json"])
    assert code == 0, capsys.readouterr().err
    results = json.loads((tmp_path / "real.json").read_text())
    assert results["terrain"]["crest_m"] > 1000.0
    assert -40.0 < results["lee"][0]["temperature_c"] < 40.0
