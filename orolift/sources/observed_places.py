"""Which place each row of observations belongs to: sites of the case, and places of the file on its line."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.humidity import mixing_ratio_from_dew_point
from orolift.crossing.result import Site
from orolift.errors import DataFileError
from orolift.sources.inputs import ELEVATION_CONTRADICTION, OFF_LINE
from orolift.sources.units import nearest
from orolift.spread.comparison import Observations
from orolift.terrain.features import features
from orolift.terrain.transect import transect_elevation

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from orolift.sources.inputs import Inputs
    from orolift.sources.observed import ObservedTable

    Array = NDArray[np.float64]

_Key = tuple[str, float, float]
MOST_PLACES = 1000
"""Places worked out at most: each is a site of the crossing."""


@dataclass(frozen=True, eq=False)
class Placed:
    """Observations with their places.

    Attributes
    ----------
    names : tuple of str
        Of the places.
    leading : tuple of tuple of Site
        For each case: the site that decides its crest and base, to be worked out before the places.
    sites : tuple of tuple of (Site or None)
        For each case: the places on its line; None for one that is not on it.
    seen : Observations
        Rows whose place is known in some case.
    notes, cautions : tuple of str
    """

    names: tuple[str, ...]
    leading: tuple[tuple[Site, ...], ...]
    sites: tuple[tuple[Site | None, ...], ...]
    seen: Observations
    notes: tuple[str, ...]
    cautions: tuple[str, ...]


def placed(table: ObservedTable, cases: Sequence[Inputs]) -> Placed:
    """Observations put on the lines of cases.

    Parameters
    ----------
    table : ObservedTable
    cases : sequence of Inputs

    Returns
    -------
    Placed

    Raises
    ------
    DataFileError
        If no row has a place on any line.

    Notes
    -----
    A row that names a site of the case belongs to it, whatever position it
    gives. Any other needs a position; what lies off the ends of the line or outside the raster is left out, with a
    caution.
    """
    kind = _position_kind(table)
    keys, of_row = _keys(table, kind)
    if len(keys) > MOST_PLACES:
        raise DataFileError(
            f"{table.name}: {len(keys)} places, and {MOST_PLACES} at most are compared. Split the file."
        )
    lines = table.line[np.unique(of_row, return_index=True)[1]]
    cautions: dict[str, None] = {}
    every = [_sites(table, inputs, keys, kind, lines, cautions) for inputs in cases]
    known = [i for i in range(len(keys)) if any(sites[i] is not None for sites in every)]
    if not known:
        raise DataFileError(f"{table.name}: no row can be placed. {' '.join(cautions)}")
    number = np.full(len(keys), -1)
    number[known] = np.arange(len(known))
    sites = tuple(tuple(found[i] for i in known) for found in every)
    names = tuple(next(found[i].name for found in every if found[i] is not None) for i in known)  # type: ignore[union-attr]  # those that are not None
    seen, notes = _observations(table, number[of_row], names, sites, cases)
    return Placed(names, tuple(_leading(inputs) for inputs in cases), sites, seen, notes, tuple(cautions))


def _leading(inputs: Inputs) -> tuple[Site, ...]:
    """The first site of the case, which decides crest and base; without sites the lee foot, as a crossing has it."""
    if inputs.sites:
        return inputs.sites[:1]
    return (Site("Lee foot", features(inputs.transect).lee_foot_distance),)


def _position_kind(table: ObservedTable) -> tuple[str, str] | None:
    """Names of the columns that hold positions; None without any."""
    found = [pair for pair in (("longitude", "latitude"), ("easting", "northing")) if set(pair) <= table.given]
    if "distance" in table.given:
        found.append(("distance", "distance"))
    if len(found) > 1:
        raise DataFileError(
            f"{table.name}: gives places as {' and as '.join(pair[0] for pair in found)}; keep one kind of position."
        )
    half = {"longitude", "latitude", "easting", "northing"} & table.given
    if half and not found:
        raise DataFileError(f"{table.name}: {half.pop()} needs the other coordinate beside it.")
    return found[0] if found else None


def _keys(table: ObservedTable, kind: tuple[str, str] | None) -> tuple[list[_Key], NDArray[np.int_]]:
    """Distinct places by name and position, and the one of each row; a name stands for its first position."""
    count = table.line.size
    a, b = (np.full(count, np.nan) if kind is None else table.columns[name] for name in kind or ("", ""))
    numbers: dict[object, int] = {}
    keys: list[_Key] = []
    of_row = np.empty(count, dtype=np.int_)
    for i, (name, x, y) in enumerate(zip(table.site, a.tolist(), b.tolist(), strict=True)):
        identity: object = name.casefold() if name else (x, y) if x == x else None  # noqa: PLR0124 (NaN is no place)
        found = numbers.get(identity)
        if found is None:
            found = numbers[identity] = len(keys)
            keys.append((name, x, y))
        elif math.isnan(keys[found][1]) and x == x:  # noqa: PLR0124 (same)
            keys[found] = (keys[found][0], x, y)
        of_row[i] = found
    return keys, of_row


def _sites(
    table: ObservedTable,
    inputs: Inputs,
    keys: list[_Key],
    kind: tuple[str, str] | None,
    lines: NDArray[np.int64],
    cautions: dict[str, None],
) -> list[Site | None]:
    """Site of each place; None for one that cannot be used, with a caution."""
    ours = {site.name.casefold(): site for site in inputs.sites}
    found: list[Site | None] = [ours.get(name.casefold()) for name, _, _ in keys]
    fresh = [
        i for i, site in enumerate(found) if site is None and math.isfinite(keys[i][1]) and math.isfinite(keys[i][2])
    ]
    if fresh and kind is not None:
        for i, site in zip(fresh, _new_sites(table, inputs, [keys[i] for i in fresh], kind, cautions), strict=True):
            found[i] = site
    for i, (name, _, _) in enumerate(keys):
        if found[i] is None and i not in fresh:
            if not name and len(inputs.sites) == 1:
                found[i] = inputs.sites[0]
            else:
                cautions.setdefault(_unknown(table, inputs, name, int(lines[i])))
    return found


def _unknown(table: ObservedTable, inputs: Inputs, name: str, line: int) -> str:
    """What to say of rows whose place is not known."""
    names = [site.name for site in inputs.sites]
    have = f"Sites of the case: {', '.join(names)}." if names else "The case has no sites."
    more = "Correct the name, add a [[site]] to the case, or give longitude and latitude or distance_km."
    if not name:
        return f"{table.name}: rows from line {line} on name no site and no position: left out. {have} {more}"
    close = nearest(name, names)
    hint = f"Did you mean {close}?" if close else have
    return f"{table.name}: '{name}' (line {line}) is no site of the case and has no position: left out. {hint} {more}"


def _new_sites(
    table: ObservedTable, inputs: Inputs, keys: list[_Key], kind: tuple[str, str], cautions: dict[str, None]
) -> list[Site | None]:
    """Sites at positions of the file."""
    transect = inputs.transect
    if kind[0] == "distance":
        distance = np.array([key[1] for key in keys]) - transect.origin
        offset = np.zeros(distance.size)
        ground = np.zeros(distance.size)
    elif inputs.case.terrain.elevation_file is None:
        raise DataFileError(
            f"{table.name}: the ridge of the case is drawn by hand and has no {kind[0]}; give places as distance_km."
        )
    else:
        distance, offset, ground = _on_raster(inputs, keys, kind)
    found: list[Site | None] = []
    length = float(transect.distance[-1])
    for i, (name, x, y) in enumerate(keys):
        words = name or (f"km {x / 1000:.1f}" if kind[0] == "distance" else f"{x:.3f}, {y:.3f}")
        if not 0.0 <= distance[i] <= length or math.isnan(ground[i]):
            cautions.setdefault(
                f"{table.name}: {words} lies off the line of the case ({distance[i] / 1000:.1f} km from its upwind "
                f"end, the line is {length / 1000:.1f} km long) or outside the raster: left out."
            )
            found.append(None)
            continue
        if abs(offset[i]) > OFF_LINE:
            cautions.setdefault(
                f"{words} lies {abs(offset[i]) / 1000:.0f} km beside the line over the range; it is held against "
                "the line at the same distance along the wind."
            )
        elevation = None if kind[0] == "distance" else float(ground[i])
        found.append(Site(words, float(distance[i]), elevation))
    return found


def _on_raster(inputs: Inputs, keys: list[_Key], kind: tuple[str, str]) -> tuple[Array, Array, Array]:
    from orolift.sources.raster import MapPoint, site_positions

    projected = kind[0] == "easting"
    where = site_positions(
        str(inputs.case.terrain.elevation_file),
        inputs.transect,
        [MapPoint(x, y, projected=projected) for _, x, y in keys],
        unit=inputs.case.terrain.elevation_unit,
        folder=inputs.path.parent,
    )
    return where.distance, where.offset, where.elevation


def _observations(
    table: ObservedTable,
    place: NDArray[np.int_],
    names: tuple[str, ...],
    sites: tuple[tuple[Site | None, ...], ...],
    cases: Sequence[Inputs],
) -> tuple[Observations, tuple[str, ...]]:
    """Rows that have a place, every quantity that follows from what they hold."""
    kept = place >= 0
    columns = {name: values[kept] for name, values in table.columns.items()}
    place = place[kept]
    ground = np.array([_height(i, sites, cases) for i in range(len(names))])[place]
    column = cases[0].incoming
    assumed = np.exp(np.interp(ground, column.height, np.log(column.pressure)))
    pressure = np.where(np.isnan(columns["pressure"]), assumed, columns["pressure"])
    dew = columns["dew_point"]
    humid = np.isfinite(dew)
    mixing = np.full(dew.size, np.nan)
    mixing[humid] = mixing_ratio_from_dew_point(pressure[humid], dew[humid])
    off = np.abs(columns["elevation"] - ground) > ELEVATION_CONTRADICTION
    notes = [
        f"{names[number]}: the file puts it more than {ELEVATION_CONTRADICTION:.0f} m above or below the height its "
        "estimate is for; part of the difference may come from that."
        for number in np.unique(place[off]).tolist()
    ]
    if humid.any() and np.isnan(columns["pressure"][humid]).any():
        notes.append("Mixing ratios of rows without pressure are taken at that of the incoming air at the same height.")
    values = {
        name: columns[name] for name in ("temperature", "dew_point", "relative_humidity", "wind", "gust", "pressure")
    }
    seen = Observations(
        time=table.time[kept],
        place=place,
        values={**values, "mixing_ratio": mixing, "rain_rate": columns["rain_rate"]},  # type: ignore[dict-item]  # names are quantities
        wind_from=columns["wind_from"],
        elevation=columns["elevation"],
        crest_temperature=columns["crest_temperature"],
        crest_pressure=columns["crest_pressure"],
        crest_elevation=columns["crest_elevation"],
        line=table.line[kept],
    )
    return seen, tuple(notes)


def _height(number: int, sites: tuple[tuple[Site | None, ...], ...], cases: Sequence[Inputs]) -> float:
    """Height of a place in the first case that has it."""
    for found, inputs in zip(sites, cases, strict=True):
        site = found[number]
        if site is not None:
            ground = float(transect_elevation(inputs.transect, site.distance))
            return ground if site.elevation is None else site.elevation
    raise DataFileError(f"place {number} is in no case")
