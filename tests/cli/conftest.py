"""A case in a folder of its own, run as its user would."""

import pytest

CASE = """title = "Test ridge"
valid_time = 2026-11-03T12:00:00Z
[terrain]
ridge_km_m = [[0, 40], [25, 1850], [60, 210]]
[incoming]
wind_from_deg = 235
station = { elevation_m = 40, temperature_c = 14.5, dew_point_c = 11.0, pressure_hpa = 1004.0, wind_kt = 25 }
[spread]
members = 10
[rain]
removed_share = 0.7
[[site]]
name = "Lower Tarn"
distance_km = 50
"""
SOUNDING = """pressure_hpa,height_m,temperature_c,dew_point_c,wind_from_deg,wind_kt
1004,40,14.5,11.0,235,20
900,975,8,5,240,30
800,1950,2,0,245,40
700,3020,-4,-9,250,45
500,5590,-19,-30,260,60
300,9200,-45,-60,265,80
"""


@pytest.fixture
def case_folder(tmp_path, monkeypatch):
    """A folder with a good case, a ridge, a sounding; the current folder."""
    (tmp_path / "case.toml").write_text(CASE)
    (tmp_path / "ridge.csv").write_text("distance_km,elevation_m\n0,40\n25,1850\n60,210\n")
    (tmp_path / "sounding.csv").write_text(SOUNDING)
    monkeypatch.chdir(tmp_path)
    return tmp_path


@pytest.fixture
def edited(case_folder):
    """Write the case with one thing changed."""

    def write(*changes):
        text = CASE
        for old, new in changes:
            assert old in text, old
            text = text.replace(old, new, 1)
        (case_folder / "case.toml").write_text(text)
        return "case.toml"

    return write
