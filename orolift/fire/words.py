"""Names of the quantities of fire weather, what they measure, and conditions in words."""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal, NamedTuple

from orolift.fire.winds import WindMeant

if TYPE_CHECKING:
    from orolift.fire.rules import Condition

Measure = Literal[
    "share", "temperature", "temperature_change", "vapour_pressure", "wind", "height", "rain_rate", "plain"
]


class Named(NamedTuple):
    """What a quantity is called, what it measures and how many decimals are worth saying."""

    words: str
    measure: Measure
    digits: int


NAMES: dict[str, Named] = {
    "temperature": Named("temperature", "temperature", 1),
    "dew_point": Named("dew point", "temperature", 1),
    "relative_humidity": Named("relative humidity", "share", 0),
    "vapour_pressure_deficit": Named("vapour pressure deficit", "vapour_pressure", 1),
    "equilibrium_fuel_moisture": Named("moisture of fine dead fuel", "share", 1),
    "fosberg_index": Named("Fosberg index", "plain", 0),
    "fosberg_index_raw": Named("Fosberg index without its cap", "plain", 0),
    "fosberg_index_with_drought": Named("Fosberg index with drought", "plain", 0),
    "hot_dry_windy": Named("Hot-Dry-Windy index", "plain", 0),
    "fine_fuel_code": Named("Fine Fuel Moisture Code", "plain", 1),
    "initial_spread_index": Named("Initial Spread Index", "plain", 1),
    "angstroem_index": Named("Ångström index", "plain", 1),
    "rain_rate": Named("rain", "rain_rate", 1),
    "drought_index": Named("Keetch-Byram drought index", "plain", 0),
    "mixing_height": Named("mixing height", "height", 0),
    "source_level": Named("source level", "height", 0),
    "warming": Named("warming over the incoming air", "temperature_change", 1),
}
"""Of every quantity a rule may name, the wind apart."""


def named(quantity: str | WindMeant) -> Named:
    """Name of a quantity or of the wind that is meant.

    Examples
    --------
    >>> named(WindMeant(10.0, "sustained", 600.0)).words, named(WindMeant(6.1, "gust", 3.0)).words
    ('sustained wind at 10 m, mean of 10 min', 'gust at 6.1 m, mean of 3 s')
    """
    if not isinstance(quantity, WindMeant):
        return NAMES[quantity]
    kind, average = wind_words(quantity)
    return Named(f"{kind} at {quantity.height:.2g} m, mean of {average}", "wind", 1)


def wind_words(meant: WindMeant) -> tuple[str, str]:
    """Kind of a wind and its averaging time.

    Examples
    --------
    >>> wind_words(WindMeant(10.0, "gust", 3.0))
    ('gust', '3 s')
    """
    average = f"{meant.averaging / 60.0:g} min" if meant.averaging >= 60.0 else f"{meant.averaging:g} s"
    return "sustained wind" if meant.kind == "sustained" else "gust", average


def limit_words(condition: Condition) -> str:
    """``at least`` or ``at most``."""
    return "at least" if condition.at_least is not None else "at most"
