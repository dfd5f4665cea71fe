"""Which place each row of observations belongs to: sites of the case, and places of the file on its line."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.humidity import mixing_ratio_from_dew_point
from orolift.errors import CaseError, DataFileError
from orolift.sources.case_model import Place, SiteTable, TransectTable
from orolift.sources.site_places import (
    ELEVATION_CONTRADICTION,
    places_on_raster,
    places_on_ridge,
    sites_on_line,
)
from orolift.sources.sites_file import all_sites
from orolift.sources.units import nearest
from orolift.spread.comparison import Observations
from orolift.terrain.features import features

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from orolift.sources.inputs import Inputs
    from orolift.sources.observed import ObservedTable
    from orolift.sources.site_places import SitePlace
    from orolift.spread.estimates import Values

    Array = NDArray[np.float64]

_Key = tuple[str, float, float]
LONGEST_NAME = 200
MOST_PLACES = 1000
"""Places worked out at most: each is a site of the crossing."""


@dataclass(frozen=True, eq=False)
class Placed:
    """Observations with their places.

    Attributes
    ----------
    names : tuple of str
        Of the places.
    cases : tuple of Inputs
        The cases, with the places of the observations as their sites, after the first of their own.
    numbers : tuple of tuple of (int or None)
        For each case the number of the site of every place, from 1; None where its terrain does not reach there.
    elevations : tuple of float [m above sea level]
        Of the places.
    seen : Observations
        Rows whose place is known in some case.
    notes, cautions : tuple of str
    """

    names: tuple[str, ...]
    cases: tuple[Inputs, ...]
    numbers: tuple[tuple[int | None, ...], ...]
    elevations: tuple[float, ...]
    seen: Observations
    notes: tuple[str, ...]
    cautions: tuple[str, ...]


def placed(table: ObservedTable, cases: Sequence[Inputs]) -> Placed:
    """Observations put on the terrain of cases.

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
        If no row has a place.

    Notes
    -----
    A row that names a site of the case belongs to it, whatever position it
    gives. Any other needs a position, and becomes a site of its own; what lies off the ridge or outside the raster is
    left out, with a caution.
    """
    kind = _position_kind(table)
    keys, of_row = _keys(table, kind)
    if len(keys) > MOST_PLACES:
        raise DataFileError(
            f"{table.name}: {len(keys)} places, and {MOST_PLACES} at most are compared. Split the file."
        )
    lines = table.line[np.unique(of_row, return_index=True)[1]]
    cautions: dict[str, None] = {}
    every = [_with_places(table, inputs, keys, kind, lines, cautions) for inputs in cases]
    known = [i for i in range(len(keys)) if any(numbers[i] is not None for _, numbers in every)]
    if not known:
        raise DataFileError(f"{table.name}: no row can be placed. {' '.join(cautions)}")
    number = np.full(len(keys), -1)
    number[known] = np.arange(len(known))
    homes = [_home(i, every) for i in known]
    names = tuple(home.name for home in homes)
    elevations = tuple(home.height for home in homes)
    seen, notes = _observations(table, number[of_row], names, elevations, cases[0])
    return Placed(
        names,
        tuple(inputs for inputs, _ in every),
        tuple(tuple(numbers[i] for i in known) for _, numbers in every),
        elevations,
        seen,
        notes,
        tuple(cautions),
    )


def _home(key: int, every: Sequence[tuple[Inputs, list[int | None]]]) -> SitePlace:
    """A place in the first case that has it."""
    return next(inputs.places[n - 1] for inputs, numbers in every if (n := numbers[key]) is not None)


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


def _with_places(
    table: ObservedTable,
    inputs: Inputs,
    keys: list[_Key],
    kind: tuple[str, str] | None,
    lines: NDArray[np.int64],
    cautions: dict[str, None],
) -> tuple[Inputs, list[int | None]]:
    """The case with the places as its sites, and the number of each; those it cannot have with a caution."""
    listed = all_sites(inputs.case, inputs.path.parent)
    ours = {site.name.casefold(): i for i, site in enumerate(listed)}
    own: dict[int, int] = {}
    fresh: dict[int, SiteTable] = {}
    for i, key in enumerate(keys):
        found = ours.get(key[0].casefold(), 0 if not key[0] and kind is None and len(listed) == 1 else None)
        if found is not None:
            own[i] = found
        elif kind is not None and math.isfinite(key[1]) and math.isfinite(key[2]):
            fresh[i] = _site(table, inputs, key, kind, int(lines[i]))
        else:
            cautions.setdefault(_unknown(table, listed, key[0], int(lines[i])))
    # the first site, and the first on the line, decide crest and base: they stay, whether observed or not
    leading = {0} if listed else set()
    leading |= {next((i for i, place in enumerate(inputs.places) if place.on_line), 0)} if listed else set()
    kept = sorted(leading | set(own.values()))
    fresh = _usable(table, inputs, fresh, cautions)
    tables = [*(listed[i] for i in kept), *fresh.values()]
    numbers: list[int | None] = [None] * len(keys)
    for i, site in own.items():
        numbers[i] = kept.index(site) + 1
    for count, i in enumerate(fresh):
        numbers[i] = len(kept) + count + 1
    return _extended(inputs, tables), numbers


def _site(table: ObservedTable, inputs: Inputs, key: _Key, kind: tuple[str, str], line: int) -> SiteTable:
    """A place of the file as a site."""
    name, x, y = key
    if len(name) > LONGEST_NAME:
        raise DataFileError(f"{table.name}: line {line}: the name of the site has more than {LONGEST_NAME} letters.")
    by_hand = inputs.case.terrain.elevation_file is None
    if by_hand != (kind[0] == "distance"):
        have = "drawn by hand: give places as distance_km" if by_hand else "a raster: give longitude and latitude"
        raise DataFileError(f"{table.name}: the terrain of the case is {have}, not {kind[0]}.")
    height = table.columns["elevation"][table.line == line][0]
    elevation = None if math.isnan(height) else float(height)
    if by_hand:
        return SiteTable(name=name or f"km {x / 1000:.1f}", distance_km=x / 1000.0, elevation_m=elevation)
    name = name or f"{y:.3f}, {x:.3f}"
    if kind[0] == "easting":
        return SiteTable(name=name, easting_m=x, northing_m=y, elevation_m=elevation)
    return SiteTable(name=name, longitude=x, latitude=y, elevation_m=elevation)


def _usable(
    table: ObservedTable, inputs: Inputs, fresh: dict[int, SiteTable], cautions: dict[str, None]
) -> dict[int, SiteTable]:
    """Those of the new places that the terrain reaches; the rest with a caution."""
    try:
        _on_terrain(inputs, list(fresh.values()))
    except CaseError:
        found = {}
        for i, site in fresh.items():
            try:
                _on_terrain(inputs, [site])
                found[i] = site
            except CaseError as error:
                cautions.setdefault(f"{table.name}: {error} Left out.")
        return found
    return fresh


def _on_terrain(inputs: Inputs, tables: list[SiteTable]) -> tuple[SitePlace, ...]:
    if inputs.case.terrain.elevation_file is None:
        return places_on_ridge(tables, inputs.transect)
    return places_on_raster(inputs.case, tables, inputs.transect, inputs.path.parent)


def _extended(inputs: Inputs, tables: list[SiteTable]) -> Inputs:
    """The case with other sites, its line as it is."""
    case, line = inputs.case, inputs.transect
    if not inputs.places and line.longitude is not None and line.latitude is not None:
        # a line without a site passes through its highest cell, and goes on doing so
        table = case.transect or TransectTable()
        if table.through is None:
            crest = int(np.argmin(np.abs(line.distance - features(line).crest_distance)))
            through = Place(longitude=float(line.longitude[crest]), latitude=float(line.latitude[crest]))
            case = case.model_copy(update={"transect": table.model_copy(update={"through": through})})
    places = _on_terrain(inputs, tables)
    return replace(inputs, case=case, places=places, sites=sites_on_line(places))


def _unknown(table: ObservedTable, listed: Sequence[SiteTable], name: str, line: int) -> str:
    """What to say of rows whose place is not known."""
    names = [site.name for site in listed]
    have = f"Sites of the case: {', '.join(names)}." if names else "The case has no sites."
    more = "Correct the name, add a [[site]] to the case, or give longitude and latitude or distance_km."
    if not name:
        return f"{table.name}: rows from line {line} on name no site and no position: left out. {have} {more}"
    close = nearest(name, names)
    hint = f"Did you mean {close}?" if close else have
    return f"{table.name}: '{name}' (line {line}) is no site of the case and has no position: left out. {hint} {more}"


def _observations(
    table: ObservedTable,
    place: NDArray[np.int_],
    names: tuple[str, ...],
    elevations: tuple[float, ...],
    first: Inputs,
) -> tuple[Observations, tuple[str, ...]]:
    """Rows that have a place, every quantity that follows from what they hold."""
    kept = place >= 0
    columns = {name: values[kept] for name, values in table.columns.items()}
    place = place[kept]
    ground = np.array(elevations)[place]
    column = first.incoming
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
    values: Values = {
        name: columns[name] for name in ("temperature", "dew_point", "relative_humidity", "wind", "gust", "pressure")
    }
    seen = Observations(
        time=table.time[kept],
        place=place,
        values={**values, "mixing_ratio": mixing, "rain_rate": columns["rain_rate"]},
        wind_from=columns["wind_from"],
        elevation=columns["elevation"],
        crest_temperature=columns["crest_temperature"],
        crest_pressure=columns["crest_pressure"],
        crest_elevation=columns["crest_elevation"],
        line=table.line[kept],
    )
    return seen, tuple(notes)
