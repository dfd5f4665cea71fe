"""What would explain an observation: synthetic observations give back what they were made with."""

import numpy as np
import pytest

from orolift.air.column import interpolated
from orolift.air.column_build import air_from_station
from orolift.air.parcel import Parcel, moved_to
from orolift.crossing.crossing import cross
from orolift.crossing.explain import Observed, Path, explanation, lee_air_from_source, way
from orolift.crossing.picture import popular_picture, upwind_ground_air
from orolift.crossing.result import Site
from orolift.crossing.simple import simple_answers
from orolift.crossing.situation import Situation, crossing_of
from orolift.crossing.upwind_error import upwind_error
from orolift.errors import NoCrossingError
from orolift.terrain import ridge_transect

CREST, LEE = 1850.0, 9.8e4


def column(speed=12.0, vapour=0.0082, lapse=0.0055):
    """Moist air before a ridge."""
    return air_from_station(
        40.0, 100400.0, 287.65, vapour, wind_speed=speed, wind_from_direction=np.radians(235.0), lapse_rate=lapse
    )


@pytest.fixture(scope="module")
def path():
    """The way over a ridge."""
    return Path(column(), CREST, LEE)


def observed_from(path, level, share, depth, **tolerance):
    """What the rule gives, as if it had been observed."""
    air, _ = lee_air_from_source(path, level, share, depth)
    return Observed(float(air.temperature), float(air.vapour), **tolerance)


@pytest.mark.parametrize(("level", "share", "depth"), [(300.0, 0.6, 100.0), (1300.0, 0.8, 60.0), (700.0, 0.2, 400.0)])
def test_finds_what_the_observation_was_made_with(path, level, share, depth):
    """The true values lie in the one family found, the best of it reproduces the observation, and so does the nearest."""
    found = explanation(path, observed_from(path, level, share, depth))
    assert found.nearest.misfit < 0.01
    assert len(found.valleys) == 1
    (valley,) = found.valleys
    assert valley.source_level[0] <= level <= valley.source_level[1]
    assert valley.removed_share[0] <= share <= valley.removed_share[1]
    assert valley.mixing_depth[0] <= depth <= valley.mixing_depth[1]
    assert valley.best.misfit <= 1.0


def test_with_share_and_depth_near_the_usual_the_level_is_found(path):
    """The pull towards the usual values picks the point of the valley the observation was made at."""
    seen = observed_from(path, 900.0, 0.7, 100.0, temperature_tolerance=0.05, mixing_ratio_tolerance=3e-5)
    found = explanation(path, seen, usual=(0.7, 100.0))
    best = found.valleys[0].best
    assert best.source_level == pytest.approx(900.0, abs=40.0)
    assert best.removed_share == pytest.approx(0.7, abs=0.05)


def test_says_when_nothing_explains(path):
    """40 degrees in that valley is not this air; the nearest is given all the same."""
    found = explanation(path, Observed(313.15, 0.012))
    assert found.valleys == ()
    assert found.nearest.misfit > 10.0


def test_a_wider_tolerance_widens_the_valley(path):
    """Monotone."""
    narrow = explanation(path, observed_from(path, 900.0, 0.6, 100.0)).valleys[0]
    wide = explanation(
        path, observed_from(path, 900.0, 0.6, 100.0, temperature_tolerance=1.0, mixing_ratio_tolerance=6e-4)
    ).valleys[0]
    assert wide.source_level[0] <= narrow.source_level[0]
    assert wide.source_level[1] >= narrow.source_level[1]


def test_nothing_removed_brings_the_air_back_as_it_was(path):
    """Reversible: unmixed source air brought straight to the place (1e-6 K)."""
    air, condenses = lee_air_from_source(path, 500.0, 0.0, 1e-6)
    here = interpolated(path.incoming, 500.0)
    straight = moved_to(Parcel(here.pressure, here.temperature, here.vapour, here.cloud), LEE)
    assert condenses
    assert air.temperature == pytest.approx(float(straight.temperature), abs=1e-4)
    assert air.vapour == pytest.approx(float(here.vapour), rel=1e-6)


def test_surface_air_that_loses_everything_is_the_popular_picture(path):
    """The limit of the rule at the ground."""
    air, _ = lee_air_from_source(path, 40.0, 1.0, 1e-6)
    top = interpolated(path.incoming, CREST)
    picture = popular_picture(upwind_ground_air(path.incoming), float(top.pressure), LEE)
    assert air.temperature == pytest.approx(float(picture.temperature), abs=1e-3)
    assert air.vapour == pytest.approx(float(picture.vapour), rel=1e-4)


def test_more_rain_is_warmer_and_drier(path):
    """Monotone in the share."""
    share = np.linspace(0.0, 1.0, 6)
    air, _ = lee_air_from_source(path, 200.0, share, 100.0)
    assert np.all(np.diff(air.temperature) > 0.0)
    assert np.all(np.diff(air.vapour) < 0.0)


def test_heat_of_the_ground_warms_by_what_it_is(path):
    """2 K more, to 3 % (the vapour shares in it)."""
    warmer = Path(path.incoming, CREST, LEE, heating=2.0)
    cold, hot = (way(p, Observed(285.0, 0.006), 1200.0, 0.5, 50.0) for p in (path, warmer))
    assert hot.temperature - cold.temperature == pytest.approx(2.0, rel=0.03)


def test_simple_answers_are_what_their_names_say():
    """Unchanged air is the column's; crest air keeps vapour and, dry, its potential temperature."""
    air = column(vapour=1e-5)
    found = simple_answers(air, CREST, [210.0, 600.0])
    here, top = interpolated(air, [210.0, 600.0]), interpolated(air, CREST)
    np.testing.assert_allclose(found.unchanged.temperature, here.temperature)
    # Rd / cp of dry air, WMO (1966); our heat capacity is 0.1 % larger, which is 0.02 K here
    np.testing.assert_allclose(
        found.crest_air.temperature, top.temperature * (here.pressure / top.pressure) ** 0.2857, rtol=1e-4
    )
    np.testing.assert_allclose(found.crest_air.vapour, top.vapour)


@pytest.fixture(scope="module")
def situation():
    """A dry stable crossing that is partly blocked, so that the wind decides the source level."""
    ridge = ridge_transect([0.0, 25e3, 60e3], [40.0, 1850.0, 210.0], spacing=500.0)
    return Situation(ridge, column(speed=8.0, vapour=0.004, lapse=0.003), (Site("Tarn", 52e3, 310.0),))


def test_wind_error_is_found(situation):
    """The lee of a wind 1.3 times as strong is explained by a wind of about that strength."""
    truth = crossing_of(
        Situation(situation.transect, column(speed=10.4, vapour=0.004, lapse=0.003), situation.sites)
    ).lee[0]
    seen = Observed(truth.temperature, truth.mixing_ratio, 0.1, 1e-4)
    found = upwind_error(situation, 0, seen, "wind")
    assert found.misfit < 1.0 < found.misfit_before
    assert found.explains
    assert found.factor == pytest.approx(1.3, abs=0.05)


def test_humidity_cannot_explain_warmth_without_cloud(situation):
    """Dry air is as warm whatever its vapour."""
    now = crossing_of(situation).lee[0]
    found = upwind_error(situation, 0, Observed(now.temperature + 4.0, now.mixing_ratio), "humidity")
    assert not found.explains


def test_the_estimate_itself_needs_no_error(situation):
    """Round trip at factor one."""
    now = crossing_of(situation).lee[0]
    found = upwind_error(situation, 0, Observed(now.temperature, now.mixing_ratio), "humidity")
    assert found.factor == 1.0
    assert found.misfit == pytest.approx(0.0, abs=1e-9)


def test_a_situation_that_does_not_cross_is_refused(situation):
    """The message of the crossing comes through."""
    still = Situation(situation.transect, column(speed=0.5), situation.sites)
    with pytest.raises(NoCrossingError, match="does not cross"):
        upwind_error(still, 0, Observed(285.0, 0.004), "wind")


def test_popular_picture_and_crossing_agree_on_it(situation):
    """The simple answer beside the crossing is the same one."""
    over = cross(situation.transect, situation.incoming, situation.sites)
    simple = simple_answers(over.incoming, over.features.crest, over.lee[0].elevation)
    assert over.lee[0].popular_picture == pytest.approx(float(simple.popular_picture.temperature[0]), abs=1e-9)
    assert over.lee[0].upwind_temperature == pytest.approx(float(simple.unchanged.temperature[0]), abs=1e-9)
