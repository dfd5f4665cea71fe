"""Crossings made by hand, with invented numbers, so that the report is tested apart from the physics."""

from dataclasses import replace
from datetime import UTC, datetime

import numpy as np
import pytest

from orolift.air.column import IncomingAir
from orolift.crossing.crossing import Crossing, LeeAir, Site
from orolift.crossing.march import March
from orolift.report.page import page_of
from orolift.terrain import Features, Transect


def made_up_column():
    """A station's air with 6.5 K/km and a wind of 15 m/s from the west."""
    height = np.array([40.0, 1000.0, 2000.0, 4000.0, 8000.0, 17000.0])
    temperature = 288.15 - 0.0065 * np.minimum(height, 11000.0)
    pressure = 101325.0 * np.exp(-height / 8000.0)
    still = np.zeros(height.size)
    return IncomingAir(
        height=height,
        pressure=pressure,
        temperature=temperature,
        vapour=0.007 * np.exp(-height / 2500.0),
        cloud=still,
        eastward_wind=still + 15.0,
        northward_wind=still,
        origin=("station", *("lapse rate",) * 5),
        notes=("The air above the station is assumed.",),
    )


def made_up_lee(name, side, distance, elevation, temperature):
    """The air at one site."""
    return LeeAir(
        name=name,
        side=side,
        distance=distance,
        elevation=elevation,
        pressure=97000.0,
        temperature=temperature,
        dew_point=278.35,
        relative_humidity=0.44,
        mixing_ratio=0.0056,
        upwind_temperature=286.05,
        upwind_dew_point=280.15,
        popular_picture=temperature + 1.1,
    )


def made_up_crossing(**changes):
    """A triangle of 1850 m with cloud from 905 m on the windward side to 1240 m in the lee."""
    distance = np.linspace(0.0, 60e3, 241)
    ground = np.interp(distance, [0.0, 25e3, 60e3], [40.0, 1850.0, 210.0])
    crest = 100
    up = np.arange(distance.size) <= crest
    cloud = np.where(up, np.clip((ground - 905.0) * 1e-6, 0.0, None), np.clip((ground - 1240.0) * 1.5e-6, 0.0, None))
    removed = np.where(up & (ground > 905.0), 2.7e-3 / np.count_nonzero(up & (ground > 905.0)), 0.0)
    temperature = np.where(up, 287.65 - 0.0065 * ground, 293.0 - 0.0085 * ground)
    lee = (made_up_lee("Lower Tarn", "lee", 52e3, 584.9, 290.45), made_up_lee("Mill", "windward", 12e3, 908.8, 281.6))
    pressure = 101325.0 * np.exp(-ground / 8000.0)
    column = made_up_column()
    parts = {
        "incoming": column,
        "transect": Transect(distance, ground, bearing=np.pi / 2, notes=("The ridge was drawn by hand.",)),
        "features": Features(40.0, 0.0, 1850.0, 25e3, 210.0, 60e3, 15e3),
        "sites": tuple(Site(air.name, air.distance) for air in lee),
        "removed_share": 0.7,
        "start_height": np.array([40.0]),
        "height": ground[:, np.newaxis],
        "air": March(
            pressure=pressure[:, np.newaxis],
            temperature=temperature[:, np.newaxis],
            vapour=np.full((distance.size, 1), 5.5e-3),
            cloud=cloud[:, np.newaxis],
            condensed=removed[:, np.newaxis] / 0.7,
            removed=removed[:, np.newaxis],
            entropy=np.full((distance.size, 1), 120.0),
        ),
        "dew_point": np.where(cloud > 0.0, temperature, temperature - 4.0)[:, np.newaxis],
        "crest_wind": 19.2,
        "column_vapour_flux": 310.0,
        "cloud_base": 905.0,
        "cloud_base_distance": 11.95e3,
        "cloud_end": 1240.0,
        "cloud_end_distance": 38.0e3,
        "vapour_in": 8.2e-3,
        "condensed": 3.857e-3,
        "removed": 2.7e-3,
        "lee": lee,
        "notes": ("The air above the station is assumed.", "The ridge was drawn by hand."),
        "cautions": (),
    }
    return Crossing(**(parts | changes))


def without_cloud():
    """The same crossing with air too dry for cloud."""
    wet = made_up_crossing()
    dry = np.zeros_like(wet.air.cloud)
    return made_up_crossing(
        air=replace(wet.air, cloud=dry, condensed=dry, removed=dry),
        dew_point=wet.air.temperature - 12.0,
        cloud_base=None,
        cloud_base_distance=None,
        cloud_end=None,
        cloud_end_distance=None,
        condensed=0.0,
        removed=0.0,
    )


def all_in_cloud():
    """The same crossing with cloud from the first point to the last and no rain."""
    wet = made_up_crossing()
    return made_up_crossing(
        air=replace(wet.air, cloud=np.full_like(wet.air.cloud, 1e-4), removed=np.zeros_like(wet.air.removed)),
        dew_point=wet.air.temperature,
        cloud_base=40.0,
        cloud_base_distance=0.0,
        cloud_end=210.0,
        cloud_end_distance=60e3,
        removed=0.0,
        removed_share=0.0,
    )


def with_sites(*sites):
    """The same crossing with other sites, each (name, side, distance, elevation, temperature)."""
    lee = tuple(made_up_lee(*site) for site in sites)
    return made_up_crossing(lee=lee, sites=tuple(Site(air.name, air.distance) for air in lee))


CROSSINGS = {
    "cloud and rain": made_up_crossing(),
    "no cloud": without_cloud(),
    "all in cloud": all_in_cloud(),
    "crowded sites": with_sites(
        *((f"Hamlet {n}", "lee", 40e3 + 600.0 * n, 1147.0 - 28.0 * n, 285.0 + n / 3) for n in range(6))
    ),
    "many sites": with_sites(
        *((f"Farm {n}", "lee", 26e3 + 1400.0 * n, 1803.0 - 65.6 * n, 277.0 + n / 2) for n in range(24))
    ),
    "site on the crest": with_sites(("Top", "crest", 25e3, 1850.0, 275.6)),
    "doubtful": made_up_crossing(cautions=("The wind is oblique to the range.",)),
}


@pytest.fixture
def page_for():
    """Page of a crossing with fixed times."""

    def built(crossing, **more):
        options = {
            "title": "Westerly over an invented range",
            "valid_time": datetime(2026, 11, 3, 12, tzinfo=UTC),
            "made_at": datetime(2026, 11, 3, 6, 5, tzinfo=UTC),
            "version": "0.0.0",
        }
        return page_of(crossing, **(options | more))

    return built


@pytest.fixture
def crossing():
    """The crossing with cloud and rain."""
    return made_up_crossing()


@pytest.fixture
def fog():
    """The crossing that is in cloud all the way."""
    return all_in_cloud()


@pytest.fixture
def site_crossing():
    """Maker of crossings with given sites."""
    return with_sites


@pytest.fixture(params=CROSSINGS.values(), ids=CROSSINGS.keys())
def any_crossing(request):
    """Every made-up crossing in turn."""
    return request.param
