"""Members of every wind direction: limits, laws of the ridge and of the circular hill, the spread of the case itself."""

import math
from dataclasses import replace

import numpy as np
import pytest

from orolift.crossing.situation import crossing_of
from orolift.sources.bearings_case import bearing_task, read_bearings
from orolift.sources.bearings_results import WITH_RANGE, bearing_rows, bearings_results
from orolift.sources.inputs import read_inputs, situation_of
from orolift.sources.spread_model import uncertainty_of
from orolift.spread.bearings import Direction, bearings_of, worked_direction
from orolift.spread.draws import draws_of
from orolift.spread.site_state import KEPT
from orolift.spread.spread import Drawn, crosses_of, spread_of
from orolift.spread.state_ranges import chance_at, range_at
from orolift.spread.uncertainty import COLUMNS, INPUTS, Uncertainty, latin_hypercube

MEMBERS = 12
KNOTS_30 = 30 * 1852 / 3600
SURE = Uncertainty(**dict.fromkeys(INPUTS, 0.0), model_temperature=0.0, model_vapour=0.0)


@pytest.fixture(scope="module")
def ridge(straight_ridge):
    return read_bearings(straight_ridge, 10, MEMBERS)


def sites(setup, degrees):
    return worked_direction(bearing_task(setup, math.radians(degrees))).sites


@pytest.fixture(scope="module")
def own(ridge):
    """The direction of the case itself."""
    return sites(ridge, 240)


def test_nothing_uncertain_leaves_no_range(ridge):
    """Limit: all standard deviations zero; members then are the answer, to the tolerance of their iterations."""
    for state in sites(replace(ridge, drawn=Drawn(SURE, MEMBERS, 1)), 260):
        for name in ("temperature", "dew_point", "relative_humidity", "warming", "rain"):
            low, high = range_at(state, name)
            assert low == pytest.approx(high, rel=1e-12, abs=1e-15), name
            assert low == pytest.approx(getattr(state, name), rel=1e-5, abs=2e-3 if name == "warming" else 1e-7), name
        assert range_at(state, "drying_power", inputs_only=True) == pytest.approx([state.drying_power] * 2, rel=1e-3)
        assert chance_at(state, "crosses") == 1.0


def test_the_direction_of_the_case_has_the_members_of_the_case(straight_ridge, own):
    """The same seed draws the same for a single crossing: equal to rounding, not only in their ranges."""
    inputs = read_inputs(straight_ridge)
    situation = situation_of(inputs)
    spread = spread_of(situation, crossing_of(situation), uncertainty_of(inputs.case), members=MEMBERS, seed=1)
    for column, state in enumerate(own):
        np.testing.assert_array_equal(state.members.crosses, spread.crosses)
        for arrays, expected in ((state.members.inputs, spread.sites), (state.members.full, spread.full_sites)):
            for name in KEPT:
                np.testing.assert_allclose(arrays[name], expected[name][:, column], rtol=1e-6, atol=1e-9, err_msg=name)


@pytest.mark.parametrize("degrees", [240, 300, 325, 330, 60])
def test_members_cross_a_ridge_by_the_cosine_of_their_own_wind(ridge, degrees):
    """Law: what crosses is U cos of the angle as drawn, more than 2 m/s of it; also where the case itself does not."""
    situation = bearing_task(ridge, math.radians(degrees)).lines[0].situation
    many = replace(ridge.drawn, members=200)
    drawn = draws_of(situation, many.uncertainty, latin_hypercube(200, len(COLUMNS), many.seed))
    off = math.radians(degrees) + drawn["wind_from"] - situation.transect.bearing - math.pi
    expected = KNOTS_30 * drawn["wind"] * np.cos(off) > 2.0
    np.testing.assert_array_equal(crosses_of(situation, many), expected)
    assert expected.any()


def test_a_direction_that_does_not_cross_may_do_so_in_members(ridge):
    """Along the ridge the answer does not cross; some members do, and there is no range without an answer."""
    state = sites(ridge, 330)[0]
    assert state.status == "no crossing"
    assert 0.0 < chance_at(state, "crosses") < 1.0
    assert (range_at(state, "temperature"), chance_at(state, "rain")) == (None, None)


def test_a_symmetric_ridge_gives_the_two_sides_each_others_ranges(ridge, own):
    """Law: with the wind turned round, as many kilometres from the other end."""
    back = sites(ridge, 60)
    for there, other in zip(own, reversed(back), strict=True):
        for name in ("temperature", "relative_humidity", "wind_10m", "gust", "warming", "rain"):
            assert range_at(other, name) == pytest.approx(range_at(there, name), rel=1e-5, abs=1e-6), name


def test_ranges_behind_a_circular_hill_are_the_same_from_every_side(circular_hill):
    """Law, within the grid error that the answer has, too; see the test of the answer."""
    setup = read_bearings(circular_hill, 45, MEMBERS)
    behind = []
    for number, wind_from in enumerate((180, 270, 45)):
        task = bearing_task(setup, math.radians(wind_from))
        line = next(one for one in task.lines if one.numbers == (number,))
        behind.append(worked_direction(replace(task, lines=(line,))).sites[number])
    for state in behind[1:]:
        assert range_at(state, "temperature") == pytest.approx(range_at(behind[0], "temperature"), abs=0.15)
        assert range_at(state, "warming") == pytest.approx(range_at(behind[0], "warming"), abs=0.15)
        humidity = range_at(behind[0], "relative_humidity")
        assert range_at(state, "relative_humidity") == pytest.approx(humidity, abs=0.02)
        assert range_at(state, "wind_10m") == pytest.approx(range_at(behind[0], "wind_10m"), rel=0.05)


def test_files_have_ranges_and_agreement_only_with_members(ridge, own):
    """Ends enclose most answers; low is never above high; the table says the same as the results."""

    def together(states, setup):
        found = [Direction(math.radians(240), tuple(states)), Direction(math.radians(150), sites(ridge, 150))]
        return bearings_results(
            bearings_of(found, ["Tarn", "Kell"], step=math.radians(10), given=math.radians(240), planned=2), setup
        )

    results = together(own, ridge)
    assert results.spread.model_dump() == {"members": MEMBERS, "seed": 1}
    tarn = results.sites[0]
    assert tarn.agreement.warmest == 1.0
    assert tarn.agreement.within_deg == 10.0
    header, rows = bearing_rows(results)
    calm, crossing = (dict(zip(header, row, strict=True)) for row in rows[:2])
    for key in WITH_RANGE:
        low, high = tarn.ranges.range[key][1]
        assert low <= high
        assert (crossing[f"{key}_low"], crossing[f"{key}_high"]) == (low, high)
        assert calm[f"{key}_low"] is None
    assert crossing["temperature_c_low"] < crossing["temperature_c"] < crossing["temperature_c_high"]
    assert crossing["temperature_c_low"] < crossing["temperature_c_inputs_low"]
    assert crossing["chance_crosses"] == 1.0
    bare = together([replace(state, members=None) for state in own], replace(ridge, drawn=None))
    assert bare.spread is None
    assert not [key for key in bearing_rows(bare)[0] if key.endswith("_low")]
