"""Ranges of rain over the map in files: they go together, also where the answer has no rain."""

from types import SimpleNamespace

import numpy as np
import pytest

from orolift.rain.catchments import CatchmentRain
from orolift.sources.rain_ranges import catchment_ranges, map_ranges

HOUR = 3600.0
RATE = np.arange(11.0) / HOUR
NONE = np.full(11, np.nan)


def mapped(rate):
    """Eleven known cells of 4 km2 and one unknown with a rate [mm/h], and a catchment of 6 km2, half of it on them."""
    field = np.full((3, 4), rate / HOUR)
    field[0, 0] = np.nan
    basin = CatchmentRain(6e6, 0.5, rate / HOUR, 2.0 * rate, 2.0 * rate * 3e3, *(None,) * 6, ())
    known = ("windward_share", "snow_share", "snow_level", "drying_ratio")
    return SimpleNamespace(
        rain=SimpleNamespace(
            found=SimpleNamespace(rate=field, spacing=(2e3, 2e3)),
            duration=2.0 * HOUR,
            mean_rate=rate / HOUR,
            catchments=(SimpleNamespace(rain=basin),),
        ),
        members=SimpleNamespace(
            values={"mean_rate": RATE, "peak_rate": RATE, **dict.fromkeys(known, NONE)},
            catchments={"rate": RATE[:, np.newaxis], **dict.fromkeys(known[:2], NONE[:, np.newaxis])},
        ),
        duration=2.0 * HOUR,
    )


@pytest.mark.parametrize("rate", [0.0, 3.0])
def test_water_is_depth_times_area(rate):
    """Members from 0 to 10 mm/h have 1 to 9 mm/h between 10 and 90 %; 1 mm on 1 km2 is 1000 m3."""
    found = map_ranges(mapped(rate))
    assert found["mean_mm_per_h"] == pytest.approx((1.0, 9.0))
    assert found["volume_m3"] == pytest.approx((2.0 * 44e3, 18.0 * 44e3))
    assert found["total_kg_per_s"] == pytest.approx((44e6 / HOUR, 9.0 * 44e6 / HOUR))
    found = catchment_ranges(mapped(rate), 0)
    assert found["total_mm"] == pytest.approx((2.0, 18.0))
    assert found["volume_m3"] == pytest.approx((2.0 * 3e3, 18.0 * 3e3))
