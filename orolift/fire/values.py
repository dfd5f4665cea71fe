"""Quantities of a site that a rule may speak of, by name, in SI."""

from __future__ import annotations

from typing import TYPE_CHECKING

from orolift.fire.winds import WindMeant, wind_as_meant

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

    from numpy.typing import ArrayLike

    from orolift.fire.indices import Indices
    from orolift.fire.rules import Rule
    from orolift.fire.weather import SiteWeather
    from orolift.fire.winds import End

INDICES = (
    "temperature",
    "dew_point",
    "relative_humidity",
    "vapour_pressure_deficit",
    "equilibrium_fuel_moisture",
    "fosberg_index",
    "fosberg_index_raw",
    "fosberg_index_with_drought",
    "hot_dry_windy",
    "fine_fuel_code",
    "initial_spread_index",
    "angstroem_index",
)
"""Those that `indices.site_fire` gives."""
OTHERS = ("rain_rate", "drought_index", "mixing_height", "source_level", "warming")
"""Those that come from elsewhere; without members of their own they are given to `values` by the caller."""
QUANTITIES = (*INDICES, *OTHERS)
"""All names a rule may use, the wind apart."""


def site_values(
    weather: SiteWeather,
    indices: Indices,
    rules: Iterable[Rule],
    roughness: float,
    *,
    others: Mapping[str, ArrayLike] | None = None,
    end: End = "middle",
) -> dict[str | WindMeant, ArrayLike]:
    """Values of a site for rules, with each wind as a rule means it.

    Parameters
    ----------
    weather : SiteWeather, leading axes (...)
    indices : Indices, leading axes (...)
        Of that weather.
    rules : iterable of Rule
    roughness : float [m]
        At the site.
    others : mapping of name to array_like, optional
        Of `OTHERS`, what is known.
    end : 'middle' or 'upper'
        Of the range of winds.

    Returns
    -------
    dict of quantity to array (...)
        NaN where a value is not known.

    Raises
    ------
    OutOfRangeError
        If a wind that a rule means is out of range.
    """
    values: dict[str | WindMeant, ArrayLike] = {name: getattr(indices, name) for name in INDICES}
    values["rain_rate"] = weather.rain
    values.update(others or {})
    for rule in rules:
        for condition in rule.conditions:
            if isinstance(condition.quantity, WindMeant):
                values[condition.quantity] = wind_as_meant(weather, condition.quantity, roughness, end=end)
    return values
