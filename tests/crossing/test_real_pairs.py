"""Every real pair of soundings with a range between them is worked out (origin and licence beside the data)."""

import csv
import math
from pathlib import Path

import numpy as np
import pytest

from orolift.air.column_build import air_from_levels
from orolift.air.humidity import mixing_ratio_from_dew_point_checked
from orolift.crossing.crossing import cross
from orolift.crossing.result import Site
from orolift.sources.sounding_csv import read_sounding
from orolift.terrain.ridge import ridge_transect

DATA = Path(__file__).parents[1] / "data" / "real_crossings"
PAIRS = sorted(path.name for path in DATA.glob("pair_*"))
INDEX = {row["pair"]: row for row in csv.DictReader((DATA / "index.csv").read_text().splitlines())}


def bearing(start, end) -> float:
    """Initial bearing of the great circle between two (latitude, longitude)."""
    (la1, lo1), (la2, lo2) = (tuple(map(math.radians, point)) for point in (start, end))
    east = math.sin(lo2 - lo1) * math.cos(la2)
    return math.atan2(east, math.cos(la1) * math.sin(la2) - math.sin(la1) * math.cos(la2) * math.cos(lo2 - lo1))


def worked(pair):
    """Crossing of a pair: from the upwind station to 60 km beyond the lee one, one setting for all."""
    sounding = read_sounding(DATA / pair / "upwind.csv")
    vapour, _ = mixing_ratio_from_dew_point_checked(sounding.pressure, sounding.temperature, sounding.dew_point)
    air = air_from_levels(
        sounding.height,
        sounding.pressure,
        sounding.temperature,
        vapour,
        sounding.eastward_wind,
        sounding.northward_wind,
    )
    rows = list(csv.DictReader((DATA / pair / "transect.csv").read_text().splitlines()))
    x, z, latitude, longitude = (
        np.array([float(row[key]) for row in rows])
        for key in ("distance_km", "elevation_m", "latitude_deg", "longitude_deg")
    )
    length = float(INDEX[pair]["distance_km"])
    first, last = int(np.argmin(np.abs(x))), int(np.argmin(np.abs(x - length)))
    toward = bearing((latitude[first], longitude[first]), (latitude[last], longitude[last]))
    end = int(np.argmin(np.abs(x - length - 60.0)))
    line = ridge_transect(x[first : end + 1] * 1e3, z[first : end + 1], bearing=toward % (2 * math.pi))
    lee_ground = float(INDEX[pair]["lee_elevation_m"])
    return cross(line, air, (Site("lee", length * 1e3 - line.origin, lee_ground),))


def test_there_are_66_pairs():
    """The whole set is there."""
    assert len(PAIRS) == len(INDEX) == 66


@pytest.mark.parametrize("pair", PAIRS)
def test_the_pair_computes(pair):
    """No error, no NaN, no streamline under ground or across another, a closed budget, a plausible lee."""
    done = worked(pair)
    site = done.lee[0]
    ground = np.interp(done.distance, done.transect.distance, done.transect.elevation)
    assert (done.height[:, 0] >= ground - 1e-6).all()
    assert (np.diff(done.height, axis=1) > 0.0).all()
    for values in (done.air.temperature, done.air.vapour, done.air.cloud, done.wind):
        assert np.isfinite(values).all()
    parts = site.parts
    total = parts.descent + parts.latent + parts.going_round + parts.mixing + parts.surface_heating + parts.pressure
    assert total == pytest.approx(site.warming, abs=1e-6)
    assert abs(site.warming) < 25.0
    assert 0.0 < site.relative_humidity <= 1.001
    assert done.features.base <= done.flow.blocked_top < done.features.crest
    assert site.source_level_low <= site.source_level <= site.source_level_high
