"""How sure the map of the lee is: its ranges are those of a crossing, without stripes, and chances are chances."""

from dataclasses import fields, replace
from types import SimpleNamespace

import numpy as np
import pytest

from orolift.cli.lee_map import _members, _with_members
from orolift.crossing.result import Site
from orolift.crossing.situation import crossing_of
from orolift.fire.rules import Condition, Rule
from orolift.sources import strips as plans
from orolift.sources.geotiff import lee_maps
from orolift.sources.inputs import read_inputs, situation_of
from orolift.spread.deviations import read
from orolift.spread.lee_map import lee_map
from orolift.spread.lee_spread import RANGED, MembersDrawn, RulesAsked, _judged, _tenths, lee_spread
from orolift.spread.spread import Drawn, spread_of
from orolift.spread.strip_members import draw, members_of_strips, strips_with_members
from orolift.spread.strips import air_of_strips
from orolift.spread.uncertainty import COLUMNS, Uncertainty, latin_hypercube

NORTHING = 5_100_000.0
MEMBERS = 12
RULES = (
    Rule("Always", (Condition("temperature", at_least=200.0),)),
    Rule("Never", (Condition("temperature", at_least=330.0),)),
    Rule("At times", (Condition("relative_humidity", at_most=0.65),)),
)


def planned(folder, ridge_case, more=""):
    """Inputs and strips 5 km apart over a straight ridge of one height."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(plans, "STRIP_SHARE", 0.5)
        patch.setattr("orolift.sources.line_axis.POINTS", 120)
        path = ridge_case(folder, {"foot": (530_000, 0)}, notch=0.0)
        path.write_text(path.read_text() + more)
        inputs = read_inputs(path)
        return inputs, plans.strip_plan(inputs)


@pytest.fixture(scope="module")
def ridge(tmp_path_factory, ridge_case):
    """Inputs, strips, their answers, the frame, the map."""
    inputs, plan = planned(tmp_path_factory.mktemp("ridge"), ridge_case)
    strips = plan.strips[8:-8]
    frame = replace(plan.frame, across=plan.frame.across[8:-8])
    parts = air_of_strips(strips, methods=range(len(strips)))
    return inputs, plan, strips, parts, frame, lee_map(parts, frame, plan.placed.grid, inputs.incoming)


def drawn_on(ridge, uncertainty, level, numbers):
    """Members on some strips of the ridge."""
    strips = ridge[2]
    found = members_of_strips(strips, numbers, uncertainty, level)
    return MembersDrawn(found, strips[numbers[0]].situation, uncertainty, level)


@pytest.fixture(scope="module")
def spread(ridge):
    """Members on every third strip, and what the map says by them."""
    _, plan, _, parts, frame, _ = ridge
    own = int(np.argmin(np.abs(frame.across)))
    level = draw(Drawn(Uncertainty(), MEMBERS, 3))
    drawn = drawn_on(ridge, Uncertainty(), level, (own - 3, own, own + 3))
    return drawn, lee_spread(parts, frame, plan.placed.grid, drawn, RulesAsked(RULES))


def middle_rows(found, frame):
    """Rows of the map well inside the strips."""
    reach = 0.5 * float(np.ptp(frame.across)) - 3.0 * frame.smoothing
    return np.abs(found.grid.y - NORTHING) < reach


def test_ranges_along_the_line_are_those_of_its_crossing(ridge, spread):
    """Cells on the line, and sites put there in the same members.

    Tolerance: places and levels of members lie 1.7 km and some hundred metres apart; waves of the wind are that long.
    The ranges are 4 to 6 K, 30 points and 4 to 10 m/s wide.
    """
    inputs, *_, found = ridge
    _, said = spread
    row = int(np.argmin(np.abs(found.grid.y - NORTHING)))
    columns = np.flatnonzero(np.isfinite(found.temperature[row]) & (np.abs(found.behind_crest[row]) > 3e3))[5:-5:10]
    own = situation_of(inputs)
    sites = [own.sites[0]]
    for c in columns:  # the line begins 50 km upwind of its place; the map has UTM's scale of 0.9996
        away = 50_000.0 + (float(found.grid.x[c]) - 500_000.0) / 0.9996
        sites.append(Site(str(c), away, float(found.grid.elevation[row, c])))
    own = replace(own, sites=tuple(sites))
    of_sites = spread_of(own, crossing_of(own), Uncertainty(), members=MEMBERS, seed=3).full_sites
    crossing = np.isfinite(of_sites["wind_10m"][:, 1:]).all(axis=0)  # windward, some members are blocked there
    assert crossing.sum() > 5
    assert (~crossing).sum() > 2
    near = {"temperature": (0.1, 0), "warming": (0.1, 0), "relative_humidity": (0.008, 0), "wind_10m": (0.25, 0.06)}
    for name, (atol, rtol) in near.items():
        for share, values in ((0.1, said.low[name]), (0.9, said.high[name])):
            ends = np.nanquantile(of_sites[name][:, 1:], share, axis=0)
            here = crossing if name == "wind_10m" else slice(None)
            np.testing.assert_allclose(
                values[row, columns][here], ends[here], rtol=rtol, atol=atol, err_msg=f"{name} {share}"
            )


def test_in_a_cold_pool_ranges_are_those_of_its_crossing(tmp_path, ridge_case):
    """Cold air known to lie in the lee: some members stay in it, some come over it, as at sites put there.

    Tolerance: as above; where the pool ends, a member more or less lies in it.
    """
    inputs, plan = planned(tmp_path, ridge_case, "[lee]\ntemperature_c = 3\n")
    middle = len(plan.strips) // 2
    strips = plan.strips[middle - 1 : middle + 2]
    frame = replace(plan.frame, across=plan.frame.across[middle - 1 : middle + 2])
    parts = air_of_strips(strips, methods=(1,))
    assert [part.values.wind_low < 1.0 or part.values.wind_high > 1.0 for part in parts] == [False, True, False]
    assert all(part.values.pool_top is not None for part in parts)
    level = draw(Drawn(Uncertainty(), MEMBERS, 3))
    drawn = drawn_on((inputs, plan, strips), Uncertainty(), level, (1,))
    said = lee_spread(parts, frame, plan.placed.grid, drawn)
    found = lee_map(parts, frame, plan.placed.grid, inputs.incoming)
    row = int(np.argmin(np.abs(found.grid.y - NORTHING)))
    columns = np.flatnonzero(np.isfinite(found.temperature[row]) & (found.behind_crest[row] > 6e3))[:-5:6]
    own = situation_of(inputs)
    sites = [own.sites[0]]
    for c in columns:
        away = 50_000.0 + (float(found.grid.x[c]) - 500_000.0) / 0.9996
        sites.append(Site(str(c), away, float(found.grid.elevation[row, c])))
    own = replace(own, sites=tuple(sites))
    spread = spread_of(own, crossing_of(own), Uncertainty(), members=MEMBERS, seed=3)
    assert 0.1 < spread.full_sites["in_pool"][:, 1:].mean() < 0.95
    for share, values in ((0.1, said.low), (0.9, said.high)):
        for name, near in (("temperature", 0.3), ("relative_humidity", 0.03)):
            ends = np.nanquantile(spread.full_sites[name][:, 1:], share, axis=0)
            np.testing.assert_allclose(values[name][row, columns], ends, atol=near, err_msg=f"{name} {share}")


def test_a_straight_ridge_has_ranges_without_stripes(ridge, spread):
    """Symmetry along the ridge: low and high ends are the same in every row, at strips with members and between."""
    *_, frame, found = ridge
    rows = middle_rows(found, frame)
    for name, near in (("temperature", 0.05), ("relative_humidity", 0.005), ("wind_10m", 0.3)):
        for values in (spread[1].low[name], spread[1].high[name]):
            inside = values[rows]
            known = np.isfinite(inside).all(axis=0)
            assert known.sum() > 100
            assert np.ptp(inside[:, known], axis=0).max() < near, name


def test_without_doubt_the_range_is_the_map(ridge):
    """All standard deviations 0: both ends are the answer, and of the wind the methods are left.

    Tolerance: members that are marched together agree to about 1e-4 K with one alone.
    """
    _, plan, _, parts, frame, found = ridge
    sure = Uncertainty(**{field.name: 0.0 for field in fields(Uncertainty)})
    level = latin_hypercube(6, len(COLUMNS), 0)
    drawn = drawn_on(ridge, sure, level, (int(np.argmin(np.abs(frame.across))),))
    said = lee_spread(parts, frame, plan.placed.grid, drawn)
    for name, near in (("temperature", 2e-3), ("warming", 2e-3), ("relative_humidity", 2e-4)):
        answer = getattr(found, name)
        known = np.isfinite(said.low[name])
        assert known.sum() > 0.99 * np.isfinite(answer).sum()
        np.testing.assert_allclose(said.low[name][known], answer[known], atol=near)
        np.testing.assert_allclose(said.high[name][known], answer[known], atol=near)
    assert np.nanmax(said.high["wind_10m"] / said.low["wind_10m"]) > 1.05


def test_chances_lie_between_never_and_always(spread):
    """1 where all members meet a rule, 0 where none does; the chance of any is no less than that of each."""
    _, said = spread
    always, never, at_times = said.met
    known = np.isfinite(always)
    assert known.sum() > 10_000
    assert (always[known] == 1.0).all()
    assert (never[known] == 0.0).all()
    assert 0.0 < np.nanmean(at_times) < 1.0
    assert np.nanmin(at_times) >= 0.0
    assert np.nanmax(at_times) <= 1.0
    assert (said.any_met[known] >= at_times[known]).all()
    assert (said.share_met[0] == 1.0).all()
    cloud = said.cloud[np.isfinite(said.cloud)]
    assert ((cloud >= 0.0) & (cloud <= 1.0)).all()


def test_a_chance_fits_the_range(spread):
    """Where the high end of the humidity is below the limit, nine tenths meet the rule; above the low end, hardly any."""
    _, said = spread
    surely = said.high["relative_humidity"] < 0.65
    hardly = said.low["relative_humidity"] > 0.65
    assert surely.any()
    assert hardly.any()
    assert (said.met[2][surely] >= 0.8).all()
    assert (said.met[2][hardly] <= 0.2).all()


def test_a_rule_that_many_members_cannot_judge_has_no_chance():
    """As at sites: of members that lack one value only those too moist for the rule are judged, no share of all."""
    humidity = np.tile(np.where(np.arange(20) < 8, 0.6, 0.2), (3, 1))
    warming = np.full((3, 20), 2.0)
    warming[0, 8:] = np.nan
    warming[1, 8:10] = np.nan
    both = Rule("both", (Condition("relative_humidity", at_most=0.3), Condition("warming", at_least=1.0)))
    values = {"temperature": np.full((3, 20), 290.0), "warming": warming, "relative_humidity": humidity}
    values["wind_10m"] = np.full((3, 20), 5.0)
    maps, _ = _judged(values, RulesAsked((both, RULES[1])), np.ones(3, dtype=bool))
    assert maps["met_0"] == pytest.approx([np.nan, 10 / 18, 0.6], nan_ok=True)
    assert maps["met_1"] == pytest.approx([0.0, 0.0, 0.0])
    assert maps["any_met"] == pytest.approx([np.nan, 10 / 18, 0.6], nan_ok=True)


def test_members_that_do_not_cross_count_nowhere(ridge, spread):
    """With four members left there is no range."""
    _, plan, _, parts, frame, _ = ridge
    drawn, _ = spread
    few = tuple(replace(one, values=(*one.values[:4], *(None,) * (MEMBERS - 4))) for one in drawn.strips)
    said = lee_spread(parts, frame, plan.placed.grid, replace(drawn, strips=few))
    assert np.isnan(said.low["temperature"]).all()
    assert np.isnan(said.cloud).all()


def test_a_member_beyond_what_is_physical_counts_nowhere(ridge, spread):
    """One that would be far too cold has no strip and no incoming air; the others go on."""
    _, plan, _, parts, frame, _ = ridge
    drawn, before = spread
    wild = Uncertainty(temperature=15.0)
    level = drawn.level.copy()
    level[0, COLUMNS.index("temperature")] = 1e-30
    own = int(np.argmin(np.abs(frame.across)))
    lost = drawn_on(ridge, wild, level, (own,))
    assert lost.strips[0].values[0] is None
    assert lost.strips[0].values[1] is not None
    said = lee_spread(parts, frame, plan.placed.grid, lost)
    assert np.isfinite(said.low["temperature"]).sum() == np.isfinite(before.low["temperature"]).sum()


def test_a_member_is_the_same_on_every_strip_and_at_the_sites():
    """The draws of a crossing with as many members; more than 32 are not taken for a map."""
    assert np.array_equal(draw(Drawn(Uncertainty(), 20, 5)), latin_hypercube(20, len(COLUMNS), 5))
    assert draw(Drawn(Uncertainty(), 500, 5)).shape[0] == 32


def test_strips_with_members_are_even_and_hold_the_line_of_the_case():
    """Those that could not be worked out are left out."""
    across = np.arange(-110.0, 115.0)
    numbers = strips_with_members([i > 20 for i in range(225)], across)
    assert 110 in numbers
    assert min(numbers) > 20
    assert set(np.diff(numbers)) == {15}
    assert strips_with_members([i in range(43, 200, 10) for i in range(225)], across)
    assert strips_with_members([i == 7 for i in range(225)], across) == (7,)


def test_reading_nodes_changes_nothing_and_leaves_out_what_has_no_weight():
    """Twice the same numbers give the same; a node not known counts only where it has weight."""
    number, weight = np.array([[0, 1], [1, 2]]), np.array([[1.0, 0.0], [0.25, 0.75]])
    values = np.array([[2.0], [4.0], [8.0]])
    for _ in range(2):
        assert read(number, weight, values).ravel().tolist() == [2.0, 7.0]
    values[1] = np.nan
    assert np.array_equal(read(number, weight, values).ravel(), [2.0, np.nan], equal_nan=True)


def test_tenths_are_quantiles():
    """As numpy's linear quantiles where five or more are known."""
    values = np.random.default_rng(1).normal(size=(50, 12))
    values[:30, :5] = np.nan
    values[:3, :9] = np.nan
    low, high = _tenths(values)
    np.testing.assert_allclose(low[3:], np.nanquantile(values[3:], 0.1, axis=1))
    np.testing.assert_allclose(high[3:], np.nanquantile(values[3:], 0.9, axis=1))
    assert np.isnan(low[:3]).all()


def test_files_carry_both_ends_and_the_chance_of_cloud(ridge, spread):
    """Read back by rasterio, in the units of the answer."""
    from rasterio.io import MemoryFile

    _, plan, *_, found = ridge
    files = lee_maps(plan.placed, found, {}, spread[1])
    for name in RANGED:
        with MemoryFile(files[f"lee_{name}"]) as memory, memory.open() as file:
            _, low, high = file.read(masked=True)
            assert file.descriptions[1].endswith("10 % of the members")
            assert len(set(file.units)) == 1
            assert (high >= low).all()
    with MemoryFile(files["lee_temperature"]) as memory, memory.open() as file:
        low = file.read(2, masked=True).filled(np.nan)
        np.testing.assert_allclose(low, spread[1].low["temperature"] - 273.15, atol=1e-3)
    with MemoryFile(files["lee_cloud"]) as memory, memory.open() as file:
        assert file.descriptions[2] == "chance of cloud over the ground"


def test_no_members_switch_it_off():
    """`members = 0` in the case."""
    inputs = SimpleNamespace(case=SimpleNamespace(spread=SimpleNamespace(members=0)))
    assert _with_members(inputs, None) == ()
    assert _members(inputs, None, (), None, quiet=True) is None
