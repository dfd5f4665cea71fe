"""How likely the fire thresholds of the sites are, from the members of a spread."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.fire.chances import NEEDED, with_members
from orolift.spread.at_sites import columns_of

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing
    from orolift.fire.sites import FireSettings, SiteFire
    from orolift.spread.spread import Spread

TAKEN = (*NEEDED, "source_level", "warming")
"""Arrays of a spread that fire weather takes."""


def fire_with_chances(
    found: tuple[SiteFire, ...], crossing: Crossing, spread: Spread, settings: FireSettings
) -> tuple[SiteFire, ...]:
    """Fire weather at the sites with chances and ranges.

    Parameters
    ----------
    found : tuple of SiteFire
        The answer at the sites.
    crossing : Crossing
        Of all sites.
    spread : Spread
        Of that crossing.
    settings : FireSettings
        Those of the answer.

    Returns
    -------
    tuple of SiteFire
        With the error of the method in the members, as in every chance of the page. A site without members is
        left as it is.
    """
    if not set(NEEDED) <= set(spread.full_sites):
        return found
    columns = {air.number: column for column, air in enumerate(columns_of(crossing))}
    roughness = float(np.asarray(crossing.settings.roughness))
    out = []
    for site in found:
        column = columns.get(site.number)
        if column is None:
            out.append(site)
            continue
        members = {name: spread.full_sites[name][:, column] for name in TAKEN if name in spread.full_sites}
        out.append(with_members(site, members, settings, roughness))
    return tuple(out)
