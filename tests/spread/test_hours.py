"""One crossing an hour: a constant series is one crossing, hours at fault say why, times follow the wind."""

from dataclasses import replace

import numpy as np
import pytest

from orolift.air.column import interpolated
from orolift.air.temperature import potential_temperature
from orolift.crossing.situation import crossing_of
from orolift.errors import CaseError, DataFileError
from orolift.fire.rules import Condition, Rule, RuleSet
from orolift.fire.sites import FireSettings, fire_at_sites
from orolift.fire.winds import WindMeant
from orolift.rain.line import MapLine
from orolift.rain.over_map import Catchment, map_rain
from orolift.sources.hours_case import hour_task, hour_tasks, read_hours
from orolift.sources.inputs import situation_of
from orolift.spread.hours import MapGround, _catchment_rates, when_there, worked_hour
from orolift.spread.site_state import descending_warm_dry, states_of
from orolift.terrain.grid import ElevationGrid

CASE = """
[terrain]
ridge_km_m = [[0, 40], [25, 1250], [60, 210]]
longitude = -121.1
latitude = -46.95
[incoming]
wind_from_deg = 235
station = { elevation_m = 40, temperature_c = 14.5, dew_point_c = 9.0, pressure_hpa = 1004.0, wind_kt = 25 }
[[site]]
name = "Lower Tarn"
distance_km = 50
"""
HEAD = "time,temperature_c,dew_point_c,pressure_hpa,wind_from_deg,wind_kt\n"
SAME = "14.5,9.0,1004.0,235,25"


@pytest.fixture
def setup(tmp_path):
    """Case and series read together."""

    def write(*rows, head=HEAD, case=CASE):
        (tmp_path / "case.toml").write_text(case)
        (tmp_path / "series.csv").write_text(
            head + "".join(f"2026-11-03T{i:02d}:00:00Z,{r}\n" for i, r in enumerate(rows))
        )
        return read_hours(tmp_path / "case.toml", tmp_path / "series.csv")

    return write


def test_hours_of_a_constant_series_equal_one_crossing(setup):
    """The crossing of the case, whose station has the same values, with its ends worked out; only the sun differs."""
    found = setup(SAME, SAME, case=CASE.replace("[[site]]", "[heat]\nsurface_heat = false\n[[site]]"))
    one, two = (worked_hour(task).sites[0] for task in hour_tasks(found))
    whole = crossing_of(situation_of(found.inputs))
    site = whole.lee[0]
    assert one == two
    assert one.temperature == pytest.approx(site.temperature, abs=1e-9)
    assert one.relative_humidity == pytest.approx(site.relative_humidity, abs=1e-9)
    assert one.wind_10m == pytest.approx(site.wind.at_10m, abs=1e-9)
    assert one.source_level == pytest.approx(site.source_level, abs=1e-6)
    assert one.rain == pytest.approx(float(np.interp(site.distance, whole.distance, whole.rain.rate)), abs=1e-12)


def test_time_on_the_way_is_distance_over_wind_over_low_ground(setup):
    """Over 60 m of ground the wind stays that of the station, the same at all heights: 50 km at 10 m/s."""
    flat = CASE.replace("[[0, 40], [25, 1250], [60, 210]]", "[[0, 40], [25, 100], [60, 40]]")
    found = setup("14.5,9.0,1004.0,235,19.438", case=flat)
    state = worked_hour(hour_task(found, 0)).sites[0]
    assert state.travel.time == pytest.approx(50e3 / 10.0, rel=0.03)
    assert state.travel.spread < 0.05 * state.travel.time


def test_time_on_the_way_counts_from_where_the_air_is_observed(setup):
    """A station halfway to the site takes half the time, the wind being the same."""
    flat = CASE.replace("[[0, 40], [25, 1250], [60, 210]]", "[[0, 40], [25, 100], [60, 40]]")
    found = setup("14.5,9.0,1004.0,235,19.438", case=flat.replace("wind_kt = 25 }", "wind_kt = 25, distance_km = 20 }"))
    task = hour_task(found, 0)
    assert task.lines[0].observed_at == 20e3
    assert worked_hour(task).sites[0].travel.time == pytest.approx(30e3 / 10.0, rel=0.04)


def test_a_wind_along_or_from_behind_the_range_does_not_cross(setup):
    """The station lies before the range: wind from its other side brings other air."""
    found = setup("14.5,9.0,1004.0,325,25", "14.5,9.0,1004.0,55,25")
    for task in hour_tasks(found):
        state = worked_hour(task).sites[0]
        assert state.status == "no crossing"
        assert "component across the range" in state.reason


def test_a_row_that_contradicts_itself_is_missing_with_its_line(setup):
    """Dew point over temperature, and a pressure that does not fit the station's height."""
    found = setup(SAME, "14.5,19.0,1004.0,235,25", "14.5,9.0,850.0,235,25")
    reasons = [worked_hour(hour_task(found, row)).sites[0].reason for row in (1, 2)]
    assert "series.csv: line 3: dew_point" in reasons[0]
    assert "line 4: pressure_hpa 850 and elevation_m 40 contradict each other" in reasons[1]


def test_a_series_no_row_of_which_can_be_used_is_refused(setup):
    with pytest.raises(DataFileError, match=r"series.csv: line 2: dew_point"):
        setup("14.5,19.0,1004.0,235,25", "14.5,19.0,1004.0,235,25")


def test_a_case_without_a_station_cannot_take_station_values(setup, tmp_path):
    levels = "\n".join(f"{1004 - 90 * i},{40 + 900 * i},{14 - 6 * i},{8 - 6 * i},235,25" for i in range(8))
    (tmp_path / "up.csv").write_text(
        f"pressure_hpa,height_m,temperature_c,dew_point_c,wind_from_deg,wind_kt\n{levels}\n"
    )
    station = next(line for line in CASE.splitlines() if line.startswith("station"))
    with pytest.raises(CaseError, match=r"gives values of a station, and .incoming. has none"):
        setup(SAME, case=CASE.replace(station, 'sounding_file = "up.csv"'))


def test_lee_temperature_goes_hour_by_hour(setup):
    """Cold air in the lee stays in one hour, and nothing is known of it in the next."""
    found = setup(f"{SAME},-2", f"{SAME},", head=HEAD.replace("\n", ",lee_temperature_c\n"))
    cold, unknown = (hour_task(found, row).lines[0].situation.lee for row in (0, 1))
    assert cold.temperature == pytest.approx(271.15)
    assert not unknown.known


def test_rain_on_catchments_is_that_of_the_map(setup):
    """The same rates as those of the whole map of a crossing."""
    shapely = pytest.importorskip("shapely")
    found = setup("14.5,14.0,1004.0,235,25")
    _, crossing = states_of(hour_task(found, 0).lines[0].situation)
    x = np.arange(0.0, 64e3, 1e3)
    ground = 1000.0 * np.exp(-(((x - 32e3) / 8e3) ** 2)) * np.ones((64, 1))
    grid = ElevationGrid(ground, x, x[::-1])
    basin = Catchment("Tarn", shapely.box(20e3, 20e3, 40e3, 40e3))
    points = crossing.transect.distance.size
    rates = _catchment_rates(MapGround(grid, 0.0, (basin,)), crossing)
    whole = map_rain(
        crossing, grid, MapLine(np.linspace(5e3, 60e3, points), np.full(points, 30e3), 5e3), catchments=(basin,)
    )
    assert rates[0] > 0.0
    assert rates[0] == pytest.approx(whole.catchments[0].rain.rate)
    assert _catchment_rates(MapGround(grid, 0.0, (basin,)), None) == (None,)


def test_values_for_thresholds_are_those_of_fire_weather(setup):
    """What rules are judged by in an hour is what they are judged by in a crossing, the depth of mixing too."""
    rule = Rule(
        "all",
        (
            Condition("relative_humidity", at_most=0.4),
            Condition("fosberg_index", at_least=20.0),
            Condition("mixing_height", at_least=500.0),
            Condition(WindMeant(6.1, "gust", 3.0), at_least=7.0),
        ),
    )
    fire = FireSettings(rules=RuleSet("Tarn", "none", "2026-05-01", (rule,)))
    found = replace(hour_task(setup(SAME), 0), fire=fire)
    values = worked_hour(found).sites[0].rule_values
    situation = found.lines[0].situation
    when = when_there(found.lines[0], found.time)
    judged = fire_at_sites(crossing_of(replace(situation, when=when)), when, fire)[0].thresholds[0].judged
    for one in judged.conditions:
        assert values[one.condition.quantity] == pytest.approx(one.value)


def test_air_counts_as_descended_from_halfway_to_the_potential_temperature_of_the_crest(setup):
    """Just over and just under halfway; and never in a pool, before the crest, moister than beside it, or kept off."""
    found = setup(
        "14.5,7.0,1004.0,235,25",
        case=CASE.replace("wind_from_deg = 235", "wind_from_deg = 235\nlapse_rate_c_per_km = 4"),
    )
    _, crossing = states_of(hour_task(found, 0).lines[0].situation)
    site = crossing.lee[0]
    air = interpolated(crossing.incoming, np.array([site.elevation, crossing.features.crest]))
    beside, crest = potential_temperature(air.pressure, air.temperature)
    exner = float(site.temperature / potential_temperature(site.pressure, site.temperature))

    def descended(theta, **more):
        changed = {"temperature": theta * exner, "relative_humidity": 0.1, "in_pool": False, **more}
        return descending_warm_dry(crossing, replace(site, **changed))

    middle = 0.5 * (beside + crest)
    assert middle > beside + 1.5  # so that warming by 1 K is not what decides
    assert descended(middle + 0.01)
    assert not descended(middle - 0.01)
    assert not descended(crest, in_pool=True)
    assert not descended(crest, side="windward")
    assert not descended(crest, relative_humidity=0.99)
    kept_off = replace(crossing, flow=replace(crossing.flow, breaks_through=False))
    assert not descending_warm_dry(kept_off, replace(site, temperature=crest * exner, relative_humidity=0.1))
