"""What can be read off the section: the air on some of its paths, place by place, for script and table."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.humidity import relative_humidity_from_mixing_ratio
from orolift.report.figures.axes import round_step
from orolift.report.figures.streams import LINES, at_numbers, starts
from orolift.report.figures.view import frame_heights
from orolift.report.figures.wind_panel import near_ground
from orolift.report.quantities import Amount, Kind, Units, displayed, form, from_displayed
from orolift.report.story import source_words
from orolift.report.words import Words, plain

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing, LeeAir
    from orolift.report.quantities import Form

    Array = NDArray[np.float64]

PLACES = 121
"""Places along the line at which the section can be read off."""
ROWS = 6
"""About how many places the table has."""


@dataclass(frozen=True)
class Field:
    """A number that is read off.

    Attributes
    ----------
    key, name : str
    kind : str
    digits : int
        Decimals with which it is shown, and so carried: rounded once.
    """

    key: str
    name: str
    kind: Kind
    digits: int


OF_PLACE = (
    Field("distance", "Place", "distance", 1),
    Field("ground", "Ground", "height", -1),
    Field("rain", "Rain and snow", "rain_rate", 1),
    Field("near_ground", "Wind near the ground", "wind", 0),
)
OF_AIR = (
    Field("height", "Height", "height", -1),
    Field("temperature", "Temperature", "temperature", 1),
    Field("dew_point", "Dew point", "temperature", 1),
    Field("humidity", "Humidity", "share", 0),
    Field("wind", "Wind", "wind", 0),
    Field("cloud", "Cloud water", "mixing_ratio", 2),
)
ACROSS, UP = Field("across", "", "distance", 3), Field("up", "", "height", 0)
"""Finer than shown: what the line is drawn by."""


@dataclass(frozen=True)
class AirRow:
    """The air of one path at a place."""

    start: Amount
    height: Amount
    temperature: Amount
    dew_point: Amount
    humidity: Amount
    wind: Amount
    cloud: Amount


@dataclass(frozen=True)
class PlaceRows:
    """A place, and the air over it from the lowest up."""

    distance: Amount
    ground: Amount
    rain: Amount
    near_ground: Amount
    rows: tuple[AirRow, ...]


@dataclass(frozen=True)
class SiteWay:
    """What is said of a site when the way of its air is shown."""

    number: int
    name: str
    words: str


@dataclass(frozen=True)
class Reading:
    """Everything that can be read off the section.

    Attributes
    ----------
    of_place, of_air : tuple of Field
    last_place, last_path : int
        Highest numbers of places and paths, from 0.
    first_place : int
        Where the reading starts: the first site, or the crest.
    sites : tuple of SiteWay
    places : tuple of PlaceRows
        The table.
    data : dict
        For the script: numbers in the units of the page as whole numbers of their last decimal.
    """

    of_place: tuple[Field, ...]
    of_air: tuple[Field, ...]
    last_place: int
    last_path: int
    first_place: int
    sites: tuple[SiteWay, ...]
    places: tuple[PlaceRows, ...]
    data: dict[str, object]


def reading(crossing: Crossing, units: Units) -> Reading:
    """What can be read off the section of a crossing.

    Parameters
    ----------
    crossing : Crossing
    units : 'metric' or 'us'

    Returns
    -------
    Reading
    """
    count = crossing.distance.size
    columns = np.unique(np.linspace(0, count - 1, min(PLACES, count)).round().astype(np.intp))
    start = np.concatenate([crossing.start_height[:1], starts(crossing, frame_heights(crossing, units)[1], LINES)])
    place, air = _of_places(crossing), _of_air(crossing, start)
    site = crossing.lee[0].distance if crossing.lee else crossing.features.crest_distance
    first = int(np.argmin(np.abs(crossing.distance[columns] - site)))
    ways = tuple(SiteWay(one.number, one.name, _way_words(one, units)) for one in crossing.lee)
    return Reading(
        of_place=OF_PLACE,
        of_air=OF_AIR,
        last_place=columns.size - 1,
        last_path=start.size - 1,
        first_place=first,
        sites=ways,
        places=_table(place, air, start, units),
        data={
            "fields": {field.key: _described(field, units) for field in (*OF_PLACE, *OF_AIR, ACROSS, UP)},
            "starts": [plain((Amount(float(value), "height", -1),), units) for value in start],
            "places": _lists({key: values[columns] for key, values in place.items()}, (*OF_PLACE, ACROSS), units),
            "paths": [
                _lists({key: values[columns, row] for key, values in air.items()}, (*OF_AIR, UP), units)
                for row in range(start.size)
            ],
            "ways": {str(way.number): way.words for way in ways},
        },
    )


def _of_places(crossing: Crossing) -> dict[str, Array]:
    line = crossing.transect
    return {
        "distance": crossing.distance + line.origin,
        "across": crossing.distance + line.origin,
        "ground": np.interp(crossing.distance, line.distance, line.elevation),
        "rain": crossing.rain.rate + crossing.rain.background,
        "near_ground": near_ground(crossing.height, crossing.wind),
    }


def _of_air(crossing: Crossing, start: Array) -> dict[str, Array]:
    """Fields of the paths that start at some heights, (nk, n)."""
    number = np.interp(start, crossing.start_height, np.arange(crossing.start_height.size))
    air = crossing.air
    fields = {
        "height": crossing.height,
        "pressure": air.pressure,
        "temperature": air.temperature,
        "dew_point": crossing.dew_point,
        "vapour": air.vapour,
        "wind": crossing.wind,
        "cloud": air.cloud,
    }
    found = {key: at_numbers(values, number) for key, values in fields.items()}
    humidity = relative_humidity_from_mixing_ratio(found["pressure"], found["temperature"], found["vapour"])
    return {
        **found,
        "up": found["height"],
        "humidity": humidity,
        "dew_point": np.minimum(found["dew_point"], found["temperature"]),
    }


def _way_words(site: LeeAir, units: Units) -> str:
    """Where the air of a site comes from, in one sentence."""
    if site.in_pool:
        return f"{site.name} lies in the cold pool: the crossing air passes over it."
    if site.in_blocked_air:
        return f"{site.name} lies in blocked air: its air stays as it came."
    here = Amount(site.temperature, "temperature", 1)
    words: Words = (f"{site.name}: air from ", *source_words(site), ", with ", here, " on arrival")
    if site.went_round > 0.0:
        words = (*words, "; ", Amount(site.went_round, "share"), " of it went round")
    return plain((*words, "."), units)


def _described(field: Field, units: Units) -> dict[str, object]:
    """How the script writes a field."""
    shape = form(field.kind, units)
    out: dict[str, object] = {"unit": shape.unit, "digits": field.digits + shape.extra_digits}
    return out if shape.beside is None else {**out, "beside": shape.beside.unit}


def _lists(values: dict[str, Array], fields: tuple[Field, ...], units: Units) -> dict[str, list[int]]:
    """Values in shown units as whole numbers of the last decimal shown; a second unit in a list of its own."""
    out = {}
    for field in fields:
        shape = form(field.kind, units)
        out[field.key] = _whole(values[field.key], shape, field.digits)
        if shape.beside is not None:
            out[f"{field.key}_beside"] = _whole(values[field.key], shape.beside, field.digits)
    return out


def _whole(values: Array, shape: Form, digits: int) -> list[int]:
    scaled = (values * shape.factor + shape.offset) * 10.0 ** (digits + shape.extra_digits)
    return [int(value) for value in np.round(scaled)]


def _table(place: dict[str, Array], air: dict[str, Array], start: Array, units: Units) -> tuple[PlaceRows, ...]:
    """Numbers at the nearest places to round distances."""
    low, high = (displayed(float(place["distance"][end]), "distance", units) for end in (0, -1))
    step = round_step(high - low, ROWS)
    wanted = from_displayed(1.0, "distance", units) * step * np.arange(np.ceil(low / step), np.floor(high / step) + 1.0)
    columns = np.unique(np.argmin(np.abs(place["distance"][:, None] - wanted), axis=0))
    return tuple(
        PlaceRows(
            **{field.key: _amount(place[field.key][at], field) for field in OF_PLACE},
            rows=tuple(
                AirRow(
                    start=Amount(float(start[row]), "height", -1),
                    **{field.key: _amount(air[field.key][at, row], field) for field in OF_AIR},
                )
                for row in range(start.size)
            ),
        )
        for at in columns
    )


def _amount(value: float, field: Field) -> Amount:
    return Amount(float(value), field.kind, field.digits)
