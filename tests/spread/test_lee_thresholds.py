"""Thresholds on a map: which cells meet them, at the limit too, and which rules a map cannot judge."""

import math
from types import SimpleNamespace

import numpy as np
import pytest
from affine import Affine

from orolift.cli.lee_map import _thresholds
from orolift.fire.fosberg import fosberg_index
from orolift.fire.rules import Condition, Rule, RuleSet
from orolift.fire.sites import FireSettings
from orolift.fire.winds import WindMeant
from orolift.report.figures import lee_map as maps
from orolift.report.lee_map import lee_on_map
from orolift.report.words import plain
from orolift.sources.geotiff import threshold_maps
from orolift.spread.lee_map import LeeMap
from orolift.spread.lee_thresholds import thresholds_on_map
from orolift.terrain.grid import ElevationGrid

MEANT = WindMeant(10.0, "sustained", 600.0)
DRY = Condition("relative_humidity", at_most=0.25)
DRY_AND_WINDY = Rule("Dry and windy", (DRY, Condition(MEANT, at_least=8.0)))
GUSTY = Rule("Gusty", (DRY, Condition(WindMeant(6.1, "gust", 3.0), at_least=12.0)))
# met; at both limits; too damp; too calm; dry, wind not known; damp, wind not known; nothing known; windward and met
HUMIDITY = [0.10, 0.25, np.nextafter(0.25, 1.0), 0.10, 0.10, 0.60, np.nan, 0.10]
WIND = [12.0, 8.0, 12.0, np.nextafter(8.0, 0.0), np.nan, np.nan, np.nan, 12.0]
BEHIND = [1e3] * 6 + [np.nan, -1e3]
MET = [1.0, 1.0, 0.0, 0.0, np.nan, 0.0, np.nan, 1.0]


def rules(*those):
    """Of an invented office."""
    return RuleSet("Varn", "Fire office (invented)", "2027-01-01", those)


@pytest.fixture
def found():
    """One row of cells."""
    humidity, wind = np.array([HUMIDITY]), np.array([WIND])
    temperature = np.where(np.isfinite(humidity), 298.15, np.nan)
    none = np.full(humidity.shape, np.nan)
    grid = ElevationGrid(np.zeros((1, 8)), np.arange(8) * 500.0, np.zeros(1))
    warming = temperature - 290.15
    return LeeMap(grid, temperature, warming, humidity, wind, none, none, np.array([BEHIND]), strips=3, failed=())


def test_cells_drier_and_windier_than_the_limits_are_counted(found):
    """The limit itself meets a rule; what is not known matters only where the known does not decide."""
    dry = Rule("Dry", (DRY,))
    on_map = thresholds_on_map(found, rules(DRY_AND_WINDY, dry), 0.03)
    assert np.array_equal(on_map.judged[0].met, [MET], equal_nan=True)
    assert np.array_equal(on_map.judged[1].met, [[1, 1, 0, 1, 1, 0, np.nan, 1]], equal_nan=True)
    assert np.array_equal(on_map.count, [[2, 2, 0, 1, 1, 0, np.nan, 2]], equal_nan=True)


def test_the_wind_is_that_of_the_height_a_rule_means(found):
    """Logarithmic law (WMO-No. 8): at 20 feet over 0.1 m roughness, ln(61) / ln(100) of the wind at 10 m."""
    at_20_feet = 12.0 * math.log(61.0) / math.log(100.0)
    for limit, met in ((at_20_feet - 0.01, 1.0), (at_20_feet + 0.01, 0.0)):
        rule = Rule("Windy", (Condition(WindMeant(6.1, "sustained", 600.0), at_least=limit),))
        assert thresholds_on_map(found, rules(rule), 0.1).judged[0].met[0, 0] == met


@pytest.mark.parametrize(
    ("quantity", "value"),
    [
        ("fosberg_index", float(fosberg_index(298.15, 0.1, 12.0))),
        ("warming", 8.0),
        ("dew_point", 263.7),  # e = 0.1 * 31.7 hPa, dew point -9.4 °C by Magnus' formula
        ("vapour_pressure_deficit", 2850.0),  # 0.9 * 31.7 hPa
    ],
)
def test_indices_of_a_cell_are_those_of_its_air(found, quantity, value):
    """Just below its value a limit is met, just above it is not."""
    for share, met in ((0.99, 1.0), (1.01, 0.0)):
        on_map = thresholds_on_map(found, rules(Rule("One", (Condition(quantity, at_least=share * value),))), 0.03)
        assert on_map.judged[0].met[0, 0] == met
        assert np.isnan(on_map.count[0, 6])


@pytest.mark.parametrize("quantity", ["hot_dry_windy", "rain_rate", "fine_fuel_code", "drought_index"])
def test_what_a_map_does_not_have_is_not_judged(found, quantity):
    """Neither met nor not met, and nothing is counted."""
    rule = Rule("Other", (DRY, Condition(quantity, at_least=1.0)))
    on_map = thresholds_on_map(found, rules(rule), 0.03)
    assert on_map.unknown == ((rule, (quantity,)),)
    assert on_map.judged == ()
    assert np.isnan(on_map.count).all()


def test_the_page_gives_shares_and_names_the_rule_with_a_gust(found):
    """Two of the five known cells behind the crest meet the rule."""
    on_map = thresholds_on_map(found, rules(DRY_AND_WINDY, GUSTY), 0.03)
    frame = SimpleNamespace(across=np.array([0.0, 5e3]), smoothing=2.5e3)
    mapped = SimpleNamespace(map=found, plan=SimpleNamespace(frame=frame), thresholds=on_map, spread=None)
    text = [plain(remark, "metric") for remark in lee_on_map(mapped, ()).remarks]
    said = " ".join(text).replace("\u00a0", " ").replace("\u202f", " ")
    assert "“Dry and windy” on 40 %" in said
    assert "“Gusty” cannot be judged on the map, which does not have: gust at 6.1 m, mean of 3 s." in said
    mapped.thresholds = None
    assert not any("hreshold" in plain(remark, "metric") for remark in lee_on_map(mapped, ()).remarks)


def in_members(found, chance):
    """Three members of the row, and chances in its cells."""
    behind = found.relative_humidity[0, :6]
    return SimpleNamespace(
        members=3,
        strips=2,
        low={"relative_humidity": found.relative_humidity - 0.05, "warming": found.warming, "wind_10m": found.wind_10m},
        high={
            "relative_humidity": found.relative_humidity + 0.05,
            "warming": found.warming,
            "wind_10m": found.wind_10m,
        },
        met=(chance,),
        any_met=chance,
        humidity=np.array([behind + shift for shift in (-0.05, -0.03, 0.0, 0.02, 0.04)]),
        warming=np.array([np.full(6, 6.0 + shift) for shift in (-2.0, -1.0, 0.0, 1.0, 3.0)]),
        share_met=(np.array([0.0, 0.2, 0.4, 0.6, 1.0]),),
    )


def test_numbers_of_the_map_have_the_range_of_its_members(found):
    """10 and 90 % of what the same number is in each member, by numpy's linear quantiles of five."""
    on_map = thresholds_on_map(found, rules(DRY_AND_WINDY), 0.03)
    frame = SimpleNamespace(across=np.array([0.0, 5e3]), smoothing=2.5e3)
    spread = in_members(found, np.array([MET]))
    mapped = SimpleNamespace(map=found, plan=SimpleNamespace(frame=frame), thresholds=on_map, spread=spread)
    said = lee_on_map(mapped, ())
    text = " ".join(plain(one, "metric") for one in (said.heading, *said.remarks))
    text = text.replace("\u00a0", " ").replace("\u202f", " ")
    assert "“Dry and windy” on 40 % (8 to 84)" in text
    assert "half of the ground has a humidity of 18 % (13 to 21) or less" in text
    assert "between +8.0 °C (+4.4 to +8.2)" in text
    assert "Ranges are 10 to 90 % of 3 members" in text
    assert "two strips" in text


def test_the_figure_of_chances_has_steps_of_chances(found):
    """Named rules are those with more than a tenth somewhere; without any there is no figure."""
    on_map = thresholds_on_map(found, rules(DRY_AND_WINDY), 0.03)
    chance = np.array([[0.0, 0.2, 0.4, 0.95, 0.0, 0.0, np.nan, 0.0]])
    mapped = SimpleNamespace(map=found, thresholds=on_map, spread=in_members(found, chance))
    (shown,) = maps._chance(mapped)
    assert [level for level, *_ in shown.levels] == [0.1, 0.3, 0.5, 0.7, 0.9]
    assert np.array_equal(shown.values, chance, equal_nan=True)
    assert "“Dry and windy”" in shown.caption
    mapped.spread = in_members(found, 0.05 * np.ones((1, 8)))
    assert maps._chance(mapped) == ()
    mapped.spread = None
    assert maps._chance(mapped) == maps._dry_end(mapped) == ()


def test_captions_say_how_wide_ranges_are(found):
    """10 points everywhere."""
    mapped = SimpleNamespace(map=found, spread=in_members(found, np.array([MET])))
    assert "up to 10 percentage points wide on half of the ground, 10 percentage points on nearly all" in maps._width(
        mapped, "relative_humidity", "share", "metric"
    )


def test_the_file_of_chances_has_any_and_each(found):
    """Beside the file of what is met."""
    from rasterio.io import MemoryFile

    placed = SimpleNamespace(grid=found.grid, crs="EPSG:32632", transform=Affine(500.0, 0.0, 0.0, 0.0, -500.0, 0.0))
    on_map = thresholds_on_map(found, rules(DRY_AND_WINDY), 0.03)
    chance = np.array([[0.0, 0.2, 0.4, 0.95, 0.0, 0.0, np.nan, 0.0]])
    files = threshold_maps(placed, on_map, {}, in_members(found, chance))
    assert list(files) == ["lee_thresholds", "lee_threshold_chance"]
    with MemoryFile(files["lee_threshold_chance"]) as memory, memory.open() as file:
        assert file.descriptions == ("chance that a threshold is met", "chance of the threshold: Dry and windy")
        np.testing.assert_allclose(file.read(2, masked=True).filled(np.nan), chance, rtol=1e-6)


def test_the_file_has_the_number_met_and_each_rule(found):
    """Read back by rasterio: counts, each rule, nothing where nothing is known, what was not judged by name."""
    from rasterio.io import MemoryFile

    placed = SimpleNamespace(grid=found.grid, crs="EPSG:32632", transform=Affine(500.0, 0.0, 0.0, 0.0, -500.0, 0.0))
    on_map = thresholds_on_map(found, rules(DRY_AND_WINDY, GUSTY), 0.03)
    files = threshold_maps(placed, on_map, {"title": "Row"})
    assert list(files) == ["lee_thresholds"]
    with MemoryFile(files["lee_thresholds"]) as memory, memory.open() as file:
        count = file.read(1, masked=True)
        assert np.array_equal(count.filled(np.nan), [MET], equal_nan=True)
        assert file.descriptions == ("number of thresholds met", "threshold met: Dry and windy")
        assert file.units == ("1", "1")
        assert file.tags()["rules_not_judged"] == "Gusty (gust at 6.1 m, mean of 3 s)"


def test_a_case_without_rules_has_no_thresholds(found):
    """Nothing is judged without a rules_file."""
    case = SimpleNamespace(lee=SimpleNamespace(roughness_m=0.03))
    assert _thresholds(SimpleNamespace(fire=FireSettings(), case=case), found) is None
    given = SimpleNamespace(fire=FireSettings(rules=rules(DRY_AND_WINDY)), case=case)
    assert len(_thresholds(given, found).judged) == 1


def test_the_figure_marks_what_is_met_in_the_danger_colour(found):
    """Cells with a threshold met are above its one level; without any there is no figure."""
    on_map = thresholds_on_map(found, rules(DRY_AND_WINDY), 0.03)
    (shown,) = maps._thresholds(SimpleNamespace(thresholds=on_map))
    ((level, kind, _),) = shown.levels
    assert kind.endswith("danger")
    assert (shown.values > level).tolist() == [[one == 1.0 for one in MET]]
    never = Rule("Never", (Condition("temperature", at_least=330.0),))
    assert maps._thresholds(SimpleNamespace(thresholds=thresholds_on_map(found, rules(never), 0.03))) == ()
