"""Air along a line in members is what the same members have at sites put there."""

from dataclasses import replace

import numpy as np
import pytest

from orolift.crossing.ground_values import ground_values_of_members
from orolift.crossing.members import members_of
from orolift.crossing.pool import Lee
from orolift.crossing.result import Site, When
from orolift.spread.draws import variations_of
from orolift.spread.uncertainty import COLUMNS, Uncertainty, latin_hypercube

NOON = When(time=1_784_736_000.0, longitude=0.0, latitude=45.0)  # 22 July 2026, 16 UTC: sun on the lee
LEVELS = (0.0, 200.0, 700.0)


@pytest.mark.parametrize("name", ["moist and sunlit", "pool", "calm"])
def test_a_place_on_the_line_has_the_air_of_a_site_there(name, moist, calm):
    """All members, on both sides, where heat from the ground, cold pools and members that do not cross matter.

    Tolerance: a site takes the march between two places, which differ by some hundredths of a kelvin.
    """
    situation = {
        "moist and sunlit": replace(moist, when=NOON),
        "pool": replace(moist, lee=Lee(temperature=281.0)),
        "calm": calm,
    }[name]
    ((_, variation),) = variations_of(situation, Uncertainty(), latin_hypercube(6, len(COLUMNS), 3))
    along = ground_values_of_members(situation, variation, levels=LEVELS, every=2, streamlines=30)
    first = next(values for values in along if values is not None)
    near = [int(np.argmin(np.abs(first.distance - x))) for x in (44e3, 52e3, 66e3, 78e3, 100e3)]
    places = [Site("", float(first.distance[i]), float(first.ground[i] + level)) for i in near for level in LEVELS]
    whole = members_of(situation, variation, beside=tuple(places), streamlines=30)
    at = {key: value[:, len(situation.sites) :] for key, value in whole.sites.items()}
    assert [values is not None for values in along] == whole.crosses.tolist()
    for m, values in enumerate(along):
        if values is None:
            continue
        crossing = ~(np.isnan(at["wind_10m"][m]) | (at["in_pool"][m] > 0.0))
        assert crossing.sum() > 3
        for key, field, tolerance in (("temperature", "temperature", 0.1), ("mixing_ratio", "vapour", 5e-5)):
            found = getattr(values, field)[near].ravel()
            np.testing.assert_allclose(found[crossing], at[key][m][crossing], atol=tolerance, err_msg=f"{key} {m}")
        wind = np.repeat(values.wind_10m[near], len(LEVELS))
        np.testing.assert_allclose(wind[crossing], at["wind_10m"][m][crossing], atol=0.1)
        pooled = at["in_pool"][m] > 0.0
        if pooled.any():
            found = values.pool_temperature[near].ravel()[pooled]
            np.testing.assert_allclose(found, at["temperature"][m][pooled], atol=1e-6)
