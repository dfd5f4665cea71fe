"""Small crossings of invented air over invented ranges, worked out once, for the tests of the report."""

import math
from dataclasses import replace
from datetime import UTC, datetime
from functools import cache

import numpy as np
import pytest

from orolift.air.column import IncomingAir
from orolift.air.hydrostatic import hydrostatic_pressure
from orolift.air.saturation import saturation_mixing_ratio
from orolift.air.temperature import virtual_temperature
from orolift.crossing.crossing import cross
from orolift.crossing.pool import Lee
from orolift.crossing.result import Site, When
from orolift.crossing.settings import Settings
from orolift.crossing.situation import Situation
from orolift.report.page import page_of
from orolift.spread.spread import spread_of
from orolift.spread.uncertainty import Uncertainty
from orolift.terrain.ridge import ridge_transect

NIGHT = When(1793692800.0, -121.0, -46.9)  # 2026-11-03T08:00Z, midnight on the invented range


def small_column(temperature=285.0, humidity=0.8, wind=16.0, lapse=0.0065, ground=40.0, spacing=200.0):
    """A hydrostatic column with a constant lapse, humidity and westerly wind."""
    height = np.arange(ground, 17000.0, spacing)
    t = np.maximum(temperature - lapse * (height - ground), 210.0)
    pressure = 101000.0 * np.exp(-(height - ground) / 8000.0)
    for _ in range(2):
        vapour = humidity * np.exp(-(height - ground) / 9000.0) * saturation_mixing_ratio(pressure, t)
        pressure = hydrostatic_pressure(height, virtual_temperature(t, vapour), 101000.0)
    still = np.zeros_like(height)
    notes = ("The air above the station is assumed.",)
    origin = ("station", *("lapse rate",) * (height.size - 1))
    return IncomingAir(height, pressure, t, vapour, still, still + wind, still, origin, notes)


def small_ridge(crest=1850.0, foot=40.0, beyond=210.0):
    """A triangle of 60 km, wind from the west."""
    return ridge_transect(
        [0.0, 8e3, 25e3, 52e3, 60e3], [foot, foot, crest, beyond, beyond], bearing=math.pi / 2, spacing=400.0
    )


NOON = When(1793736000.0, -121.0, -46.9)  # 20:00Z, noon there

TWO = (Site("Lower Tarn", 45e3), Site("Mill", 16e3))
DRY = {"humidity": 0.25, "lapse": 0.003, "wind": 9.0}


@cache
def worked_out(name):
    """One crossing by its name."""
    ridge = small_ridge()
    moist, dry = small_column(), small_column(**DRY)
    made = {
        "cloud and rain": lambda: cross(ridge, moist, TWO, Settings(removed_share=0.7), streamlines=30),
        "rain that drifts": lambda: cross(ridge, moist, TWO, streamlines=30),
        "snow": lambda: cross(ridge, small_column(temperature=270.0), TWO, streamlines=30),
        "no cloud": lambda: cross(small_ridge(crest=600.0), small_column(humidity=0.2, wind=25.0), TWO, streamlines=30),
        "all in cloud": lambda: cross(
            ridge, small_column(humidity=1.3), TWO, Settings(removed_share=0.0), streamlines=30
        ),
        "open at night": lambda: cross(ridge, dry, TWO, streamlines=30, when=NIGHT),
        "blocked": lambda: cross(ridge, dry, (*TWO, Site("Bench", 35e3)), streamlines=30, when=NOON),
        "cold pool": lambda: cross(ridge, dry, (*TWO, Site("Bench", 30e3)), lee=Lee(temperature=278.0), streamlines=30),
        "pool displaced": lambda: cross(ridge, dry, TWO, lee=Lee(temperature=300.0), streamlines=30),
        "blocked site only": lambda: cross(ridge, dry, (Site("Mill", 12e3),), streamlines=30),
        "crowded sites": lambda: cross(
            ridge, moist, tuple(Site(f"Hamlet {n}", 40e3 + 600.0 * n) for n in range(6)), streamlines=30
        ),
        "many sites": lambda: cross(
            ridge, moist, tuple(Site(f"Farm {n}", 26e3 + 1400.0 * n) for n in range(24)), streamlines=30
        ),
        "site on the crest": lambda: cross(ridge, moist, (Site("Top", 25e3),), streamlines=30),
        "high ground": lambda: cross(
            small_ridge(crest=4350.0, foot=2540.0, beyond=2710.0),
            small_column(temperature=278.0, ground=2540.0),
            TWO,
            streamlines=30,
        ),
    }
    if name == "doubtful":
        return replace(worked_out("cloud and rain"), cautions=("The wind is oblique to the range.",))
    return made[name]()


NAMES = (
    "cloud and rain",
    "rain that drifts",
    "snow",
    "no cloud",
    "all in cloud",
    "blocked",
    "open at night",
    "cold pool",
    "pool displaced",
    "blocked site only",
    "crowded sites",
    "many sites",
    "site on the crest",
    "high ground",
    "doubtful",
)


PAGES = {}
"""Pages built before, each with its crossing so that its id stays its own."""


@pytest.fixture
def page_for():
    """Page of a crossing with fixed times; built once for each crossing and choice, unless fresh."""

    def built(crossing, *, fresh=False, **more):
        options = {
            "title": "Westerly over an invented range",
            "valid_time": datetime(2026, 11, 3, 12, tzinfo=UTC),
            "made_at": datetime(2026, 11, 3, 6, 5, tzinfo=UTC),
            "version": "0.0.0",
        } | more
        if fresh:
            return page_of(crossing, **options)
        key = id(crossing), tuple(sorted(options.items(), key=lambda item: item[0]))
        if key not in PAGES:
            PAGES[key] = page_of(crossing, **options), crossing
        return PAGES[key][0]

    return built


@pytest.fixture
def named():
    """A crossing by its name."""
    return worked_out


@pytest.fixture
def crossing():
    """The crossing with cloud and rain."""
    return worked_out("cloud and rain")


@pytest.fixture(params=NAMES)
def any_crossing(request):
    """Every crossing in turn."""
    return worked_out(request.param)


@pytest.fixture(scope="session")
def with_members():
    """A crossing and its members."""
    crossing = worked_out("rain that drifts")
    situation = Situation(crossing.transect, crossing.incoming, crossing.sites, crossing.settings)
    return crossing, spread_of(situation, crossing, Uncertainty(), members=12, seed=1, streamlines=24)
