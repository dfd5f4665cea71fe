"""The air at the places that matter along its path, number by number, for those who check."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.humidity import relative_humidity_from_mixing_ratio
from orolift.report.briefing import (
    ROUNDING,
    cloudy_to_the_end,
    crest_index,
    difference,
    falling,
    main_site,
    starts_saturated,
)
from orolift.report.quantities import Amount

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing, LeeAir
    from orolift.report.words import Words


@dataclass(frozen=True)
class Place:
    """The lowest air at one place of its path.

    Attributes
    ----------
    name : str
    distance, height, pressure, temperature, dew_point, relative_humidity : Amount
    vapour, cloud, fallen : Amount
        Water in the air as vapour and cloud, and water that has left it by here.
    entropy : Amount
        Moist entropy; falls only by what the falling water takes along.
    """

    name: str
    distance: Amount
    height: Amount
    pressure: Amount
    temperature: Amount
    dew_point: Amount
    relative_humidity: Amount
    vapour: Amount
    cloud: Amount
    fallen: Amount
    entropy: Amount


@dataclass(frozen=True)
class Journey:
    """The path of the air in words and numbers."""

    heading: Words
    balance: Words
    places: tuple[Place, ...]


def journey(crossing: Crossing) -> Journey:
    """The path of the lowest air.

    Parameters
    ----------
    crossing : Crossing

    Returns
    -------
    Journey
    """
    return Journey(heading=_heading(crossing), balance=_balance(crossing), places=_places(crossing))


def section_heading(crossing: Crossing) -> Words:
    """What the section shows, as a conclusion."""
    climb = crossing.features.crest - float(crossing.height[0, 0])
    if crossing.cloud.base is None:
        return ("The air climbs ", Amount(climb, "height", -1), " to the crest and stays clear")
    if starts_saturated(crossing):
        start: Words = ("Cloud covers the whole windward slope",)
    else:
        start = (
            "Cloud covers the upper ",
            Amount(crossing.features.crest - crossing.cloud.base, "height", -1),
            " of the windward slope",
        )
    if cloudy_to_the_end(crossing):
        return (*start, " and all of the lee")
    down = 0.0 if crossing.cloud.end is None else crossing.features.crest - crossing.cloud.end
    if down < ROUNDING:
        return (*start, " and ends at the crest")
    return (*start, " and reaches ", Amount(down, "height", -1), " down the lee side")


def _rising_temperature(crossing: Crossing, level: float) -> float | None:
    """Temperature of the air when it last passed a height on its way to the crest; None when it never did."""
    crest = crest_index(crossing)
    height = crossing.height[: crest + 1, 0]
    below = np.flatnonzero(height <= level)
    if not below.size or below[-1] == crest:
        return None
    last = int(below[-1])
    pair = slice(last, last + 2)
    return float(np.interp(level, height[pair], crossing.air.temperature[pair, 0]))


def _heading(crossing: Crossing) -> Words:
    site = main_site(crossing)
    before = _rising_temperature(crossing, site.elevation) if site.side == "lee" else None
    if before is None:
        return _cooling_and_warming(crossing, site)
    return (
        "Back at ",
        Amount(site.elevation, "height"),
        ", the air is ",
        *difference(
            site.temperature - before,
            "warmer than it was there on its way up",
            "cooler than it was there on its way up",
            "as warm as it was there on its way up",
        ),
    )


def _cooling_and_warming(crossing: Crossing, site: LeeAir) -> Words:
    """What the air loses on the way up and gains on the way down, for sites that it passes only once."""
    start, top = (float(crossing.air.temperature[i, 0]) for i in (0, crest_index(crossing)))
    words: Words = (f"The air {_verb(top - start)} by ", _size(top - start), " on its way up")
    if site.side != "lee":
        return words
    change = site.temperature - top
    return (*words, f" and {_verb(change)} by ", _size(change), f" down to {site.name}")


def _verb(change: float) -> str:
    return "warms" if change > 0.0 else "cools"


def _size(change: float) -> Amount:
    return Amount(abs(change), "temperature_difference", 1)


def _balance(crossing: Crossing) -> Words:
    came = Amount(crossing.water.vapour_in, "vapour_flux")
    if crossing.water.condensed <= 0.0:
        return ("All of the ", came, " of vapour that came goes on, for nothing condenses.")
    return (
        "Of ",
        came,
        " of vapour that came, ",
        Amount(crossing.water.condensed, "vapour_flux"),
        " condensed on the way, ",
        Amount(crossing.water.removed, "vapour_flux"),
        f" of it {falling(crossing)}.",
    )


def _places(crossing: Crossing) -> tuple[Place, ...]:
    shape = crossing.features
    distance = crossing.distance
    marks: list[tuple[float, str]] = [(float(distance[0]), "Upwind end"), (shape.crest_distance, "Crest")]
    if crossing.cloud.base_distance is not None and not starts_saturated(crossing):
        marks.append((crossing.cloud.base_distance, "Cloud base"))
    if crossing.cloud.end_distance is not None and not cloudy_to_the_end(crossing):
        marks.append((crossing.cloud.end_distance, "End of cloud"))
    marks.append((shape.lee_foot_distance, "Lee foot"))
    if shape.lee_foot_distance < distance[-1]:
        marks.append((float(distance[-1]), "Downwind end"))
    return tuple(_place(crossing, at, name) for at, name in sorted(marks, key=lambda mark: mark[0]))


def _place(crossing: Crossing, at: float, name: str) -> Place:
    """The lowest air at a distance, on straight lines between the points of the transect."""
    air, x = crossing.air, crossing.distance
    pressure, temperature, vapour, cloud, dew_point, entropy, height, fallen = (
        float(np.interp(at, x, values[:, 0]))
        for values in (
            air.pressure,
            air.temperature,
            air.vapour,
            air.cloud,
            crossing.dew_point,
            air.entropy,
            crossing.height,
            np.cumsum(air.removed, axis=0),
        )
    )
    humidity = float(relative_humidity_from_mixing_ratio(pressure, temperature, vapour))
    return Place(
        name=name,
        distance=Amount(at + crossing.transect.origin, "distance", 1),
        height=Amount(height, "height"),
        pressure=Amount(pressure, "pressure", 1),
        temperature=Amount(temperature, "temperature", 2),
        dew_point=Amount(dew_point, "temperature", 2),
        relative_humidity=Amount(humidity, "share"),
        vapour=Amount(vapour, "mixing_ratio", 2),
        cloud=Amount(cloud, "mixing_ratio", 2),
        fallen=Amount(fallen, "mixing_ratio", 2),
        entropy=Amount(entropy, "entropy", 2),
    )
