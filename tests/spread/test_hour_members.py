"""Members of an hour: those of one crossing, put in short; each by its own air and its own time on the way."""

from concurrent.futures import ProcessPoolExecutor
from dataclasses import fields, replace
from types import SimpleNamespace

import numpy as np
import pytest

from orolift.crossing.situation import crossing_of
from orolift.errors import CaseError
from orolift.fire.chances import with_members as fire_with_members
from orolift.fire.rules import Condition, Rule, RuleSet
from orolift.fire.sites import FireSettings, fire_at_sites
from orolift.fire.winds import WindMeant
from orolift.sources.hours_case import USUAL_HOURS, hour_task, hour_tasks, read_hours, with_members
from orolift.spread.engine import in_order, outcomes
from orolift.spread.hour_members import RANGED, descending_members
from orolift.spread.hours import _line_rain, when_there, worked_hour
from orolift.spread.ranges import range_of
from orolift.spread.site_state import states_of
from orolift.spread.spread import spread_of
from orolift.spread.uncertainty import Uncertainty

CASE = """
[terrain]
ridge_km_m = [[0, 40], [25, 1250], [60, 210]]
longitude = -121.1
latitude = -46.95
[incoming]
wind_from_deg = 235
lapse_rate_c_per_km = 4
station = { elevation_m = 40, temperature_c = 14.5, dew_point_c = 7.0, pressure_hpa = 1004.0, wind_kt = 25 }
[spread]
seed = 5
[fire]
rules_file = "rules.toml"
[[site]]
name = "Lower Tarn"
distance_km = 50
"""
HEAD = "time,temperature_c,dew_point_c,pressure_hpa,wind_from_deg,wind_kt"
SAME = "14.5,7.0,1004.0,235,25"
CALM = "14.5,7.0,1004.0,235,3.5"
RULES = """
region = "Tarn"
authority = "none, invented"
taken = 2026-05-01
[[rule]]
name = "dry"
[[rule.condition]]
quantity = "relative_humidity_percent"
at_most = 65
"""
NONE = Uncertainty(
    **{one.name: 0.0 for one in fields(Uncertainty) if one.name not in {"model_temperature", "model_vapour"}},
    model_temperature=0.0,
    model_vapour=0.0,
)


def read(folder, *rows, head=HEAD, case=CASE):
    """Case and series read together."""
    (folder / "case.toml").write_text(case)
    (folder / "rules.toml").write_text(RULES)
    times = (f"2026-11-{3 + i // 24:02d}T{i % 24:02d}:00:00Z" for i in range(len(rows)))
    lines = "".join(f"{time},{row}\n" for time, row in zip(times, rows, strict=True))
    (folder / "series.csv").write_text(f"{head}\n{lines}")
    return read_hours(folder / "case.toml", folder / "series.csv")


@pytest.fixture(scope="module")
def constant(tmp_path_factory):
    """Two hours of the same air, in 20 members, with what they are made of."""
    found = with_members(read(tmp_path_factory.mktemp("constant"), SAME, SAME), 20)
    return found, [worked_hour(task) for task in hour_tasks(found)]


def alone(task):
    """The situation of an hour, as one crossing works it out."""
    return replace(task.lines[0].situation, when=when_there(task.lines[0], task.time))


def test_hours_of_a_constant_series_have_the_ranges_of_one_crossing(constant):
    """Law: the same seed draws the same, whether for one crossing or for any of the hours; only the sun differs."""
    found, hours = constant
    for task, hour in zip(hour_tasks(found), hours, strict=True):
        situation = alone(task)
        one = spread_of(situation, crossing_of(situation), task.drawn.uncertainty, members=20, seed=5)
        ends = hour.members[0].ends
        for number, arrays in enumerate((one.full_sites, one.sites)):
            expected = np.array([range_of(arrays[name][:, 0]) for name in RANGED])
            assert ends[number] == pytest.approx(expected, rel=1e-12)
        assert hour.members[0].crosses.tolist() == one.crosses.astype(int).tolist()
        rain = one.values["total"] / situation.transect.distance[-1]
        assert hour.line_rain.members == pytest.approx(rain, rel=0.02, abs=1e-12)
    assert hours[0].sites[0].members is None  # put in short, and gone


def test_nothing_depends_on_the_number_of_processes(constant):
    found, hours = constant
    with ProcessPoolExecutor(2) as executor:
        others = [one.value for one in in_order([*outcomes(worked_hour, hour_tasks(found), executor)])]
    for one, other in zip(hours, others, strict=True):
        assert np.array_equal(one.members[0].ends, other.members[0].ends)
        assert np.array_equal(one.members[0].carried, other.members[0].carried)
        assert np.array_equal(one.members[0].descending, other.members[0].descending)


def test_without_uncertainty_every_member_is_the_answer(tmp_path):
    """Law: ranges by the inputs have no width, all members are as dry and as long on their way as the answer."""
    blocked = CASE.replace("[25, 1250]", "[25, 1800]").replace("km = 4", "km = 3") + "[flow]\ngoing_round_share = 0.0\n"
    found = with_members(read(tmp_path, "16,4,1004.0,235,10", case=blocked), 10)
    task = hour_task(found, 0)
    hour = worked_hour(replace(task, drawn=replace(task.drawn, uncertainty=NONE)))
    state, members = hour.sites[0], hour.members[0]
    low, high = members.ends[1].T
    assert high - low == pytest.approx(0.0, abs=1e-9)
    assert members.ends[0, RANGED.index("temperature")] == pytest.approx(state.temperature, abs=1e-3)
    assert members.ends[0, RANGED.index("warming_descent")] == pytest.approx(state.parts.descent, abs=1e-3)
    assert state.descending
    assert members.descending.all()
    assert members.carried[4] == pytest.approx(state.travel.time, rel=1e-4)


def test_members_with_more_wind_are_there_earlier(constant):
    """Law: wind is the only thing that hastens; way times wind hardly varies where both do."""
    found, hours = constant
    task = hour_task(found, 0)
    situation = task.lines[0].situation
    one = spread_of(situation, crossing_of(situation), task.drawn.uncertainty, members=20, seed=5)
    way = hours[0].members[0].carried[4]
    assert np.corrcoef(one.values["cross_range_wind"], 1.0 / way)[0, 1] > 0.8
    assert way.std() / way.mean() > 0.1


def test_members_are_dry_wind_by_the_definition_of_the_answer():
    """Air as warm as over the crest, and drier; but beside it, in a pool, kept off, moister, or not there it is not."""
    site = SimpleNamespace(side="lee")
    names = ("in_pool", "kept_off", "relative_humidity", "warming", "temperature")
    rows = np.array(
        [
            # pool, kept off, humidity, warming, temperature at 1000 hPa
            [0.0, 0.0, 0.3, 8.0, 298.0],
            [0.0, 0.0, 0.3, 1.5, 291.5],
            [1.0, 0.0, 0.3, 8.0, 298.0],
            [0.0, 1.0, 0.3, 8.0, 298.0],
            [0.0, 0.0, 0.7, 8.0, 298.0],
            [np.nan, np.nan, np.nan, np.nan, np.nan],
        ]
    )
    members = dict(zip(names, rows.T, strict=True))
    beside = {"pressure": 1e5, "potential_beside": 290.0, "potential_crest": 300.0, "humidity_beside": 0.6}
    members |= {name: np.full(6, value) for name, value in beside.items()}
    assert descending_members(site, members).tolist() == [True, False, False, False, False, False]
    assert not descending_members(SimpleNamespace(side="windward"), members).any()


def test_thresholds_in_members_are_those_of_fire_weather(constant):
    """The chance of an hour is the chance that fire weather of the same crossing gives, the depth of mixing too."""
    found, _ = constant
    rules = (
        Rule("dry", (Condition("relative_humidity", at_most=0.65),)),
        Rule("deep", (Condition("mixing_height", at_least=1100.0),)),
        Rule("windy", (Condition(WindMeant(6.1, "gust", 3.0), at_least=23.0),)),
    )
    task = replace(hour_task(found, 0), fire=FireSettings(rules=RuleSet("Tarn", "none", "2026-05-01", rules)))
    situation = alone(task)
    crossing = crossing_of(situation)
    one = spread_of(situation, crossing, task.drawn.uncertainty, members=20, seed=5)
    fire = fire_at_sites(crossing, situation.when, task.fire)[0]
    here = {name: value[:, 0] for name, value in one.full_sites.items()}
    roughness = float(crossing.settings.roughness)
    expected = fire_with_members(fire, here, task.fire, roughness, situation.when).thresholds
    members = worked_hour(task).members[0].rules
    for number, threshold in enumerate(expected):
        assert 0.0 < threshold.judged.chance < 1.0
        assert (members[number] == 1).mean() == pytest.approx(threshold.judged.chance)


def test_codes_are_left_to_the_hours(constant):
    """A rule that asks for a carried code as well is met in a member as far as the rest of it is."""
    found, hours = constant
    rule = Rule("both", (Condition("relative_humidity", at_most=0.65), Condition("fine_fuel_code", at_least=88.0)))
    fire = FireSettings(rules=RuleSet("Tarn", "none", "2026-05-01", (rule,)))
    both = worked_hour(replace(hour_task(found, 0), fire=fire)).members[0].rules
    assert np.array_equal(both, hours[0].members[0].rules)


def test_an_hour_that_hardly_crosses_says_how_likely_it_is(tmp_path):
    """3.5 kt along 235 degrees over a crest: too weak itself, not so in all members; and no range without an answer."""
    found = with_members(read(tmp_path, SAME, CALM), 20)
    hour = worked_hour(hour_task(found, 1))
    assert hour.sites[0].status == "no crossing"
    assert 0.0 < hour.members[0].crosses.mean() < 0.5
    assert hour.members[0].ends is None


def test_lost_members_have_the_rain_of_the_answer(constant):
    """On the line, for sums over catchments: a member that could not be worked out does not make them drier."""
    found, _ = constant
    task = hour_task(found, 0)
    line = task.lines[0]
    (state,), crossing = states_of(line.situation, line.observed_at, drawn=task.drawn)
    crosses = state.members.crosses.copy()
    crosses[0] = np.nan
    lost = replace(state.members, crosses=crosses, line_rain=np.where(np.isnan(crosses), np.nan, 0.0))
    rain = _line_rain(replace(state, members=lost), crossing)
    assert rain.answer > 0.0
    assert rain.members[0] == pytest.approx(rain.answer, rel=1e-6)
    assert rain.members[1:] == pytest.approx(0.0)


def test_missing_hours_have_no_members(tmp_path):
    found = with_members(read(tmp_path, SAME, "14.5,19.0,1004.0,235,25"), 10)
    hour = worked_hour(hour_task(found, 1))
    assert hour.sites[0].status == "missing"
    assert hour.members == (None,)


def test_each_row_is_as_uncertain_as_its_own_kind(tmp_path):
    """A wind at the crest makes the wind surer, in the rows that have one; what [spread] says holds for all."""
    found = with_members(read(tmp_path, f"{SAME},30", f"{SAME},", head=f"{HEAD},crest_wind_kt"), 10)
    assert [hour_task(found, row).drawn.uncertainty.wind for row in (0, 1)] == [0.2, 0.35]
    said = with_members(read(tmp_path, SAME, case=CASE.replace("seed = 5", "seed = 5\nwind_percent = 7")), 10)
    assert hour_task(said, 0).drawn.uncertainty.wind == pytest.approx(0.07)


def test_members_where_nobody_says_it(tmp_path):
    """As [spread] says for short series, none for long ones, with a note that says how to have them."""
    short = read(tmp_path, *[SAME] * USUAL_HOURS)
    assert with_members(short).drawn.members == 32
    long = read(tmp_path, *[SAME] * (USUAL_HOURS + 1))
    assert with_members(long).drawn is None
    assert "--members 32 works them out" in with_members(long).notes[-1]
    assert with_members(long, 12).drawn.members == 12
    assert with_members(short, 0).drawn is None
    assert "as --members 0 says" in with_members(short, 0).notes[-1]
    none = read(tmp_path, SAME, case=CASE.replace("seed = 5", "members = 0"))
    assert "[spread] members = 0" in with_members(none).notes[-1]
    with pytest.raises(CaseError, match=r"--members 5: fewer than 10"):
        with_members(short, 5)
