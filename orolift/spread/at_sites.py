"""Members at the sites: those beside the line of a case, and the error of the method."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.air.humidity import dew_point_from_mixing_ratio, relative_humidity_from_mixing_ratio
from orolift.air.saturation import saturation_mixing_ratio
from orolift.crossing.layer_above import own_differences
from orolift.crossing.members import PARTS, Members
from orolift.crossing.model_error import model_error
from orolift.crossing.result import Site
from orolift.spread.uncertainty import METHOD, Uncertainty

if TYPE_CHECKING:
    from collections.abc import Iterator

    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing, LeeAir
    from orolift.spread.spread import Spread

    Array = NDArray[np.float64]

LEAST_VAPOUR = 1e-6
"""Vapour [kg per kg] that is left however dry the error of the method would make the air."""
TENTH = 1.2815515655446004
"""Standard normal number above which a tenth lies."""


def on_the_line(crossing: Crossing) -> tuple[LeeAir, ...]:
    """The sites on the line of a crossing, in the order of the columns of its spread."""
    return crossing.lee if crossing.on_line is None else crossing.on_line


def columns_of(crossing: Crossing) -> tuple[LeeAir, ...]:
    """The sites in the order of the columns of a spread: those on the line, then those with lines of their own."""
    return (*on_the_line(crossing), *(air for air in crossing.lee if air.own is not None))


def column_of(crossing: Crossing, site: LeeAir) -> int | None:
    """Column of a site in the arrays of a spread; None when it has none."""
    return next((i for i, air in enumerate(columns_of(crossing)) if air.number == site.number), None)


def members_at(
    spread: Spread, crossing: Crossing, site: LeeAir, *, inputs_only: bool = False
) -> dict[str, Array] | None:
    """What the members give at a site.

    Parameters
    ----------
    spread : Spread
    crossing : Crossing
    site : LeeAir
    inputs_only : bool
        Whether the error of the method is left out.

    Returns
    -------
    dict of str to ndarray (m,) or None
        In SI, NaN where a member has no such value; None for a site that is in no column.
    """
    column = column_of(crossing, site)
    arrays = spread.sites if inputs_only else spread.full_sites
    if column is None or not arrays:
        return None
    return {name: value[:, column] for name, value in arrays.items()}


def on_its_line(spread: Spread, crossing: Crossing, site: LeeAir) -> dict[str, Array]:
    """What the members give for the line a site is on.

    Parameters
    ----------
    spread : Spread
    crossing : Crossing
    site : LeeAir

    Returns
    -------
    dict of str to ndarray (m,)
        ``blocked_top`` and ``cross_range_wind`` in SI; empty where no member crosses.

    Notes
    -----
    A line of the site's own takes the deviations of the crossing's line around its own answer: differences of the
    blocked top, which is not below the base of its line, and factors of the wind.
    """
    values, own, flow = spread.values, site.own, crossing.flow
    if not spread.crosses.any():
        return {}
    top, wind = values["blocked_top"], values["cross_range_wind"]
    if own is None:
        return {"blocked_top": top, "cross_range_wind": wind}
    return {
        "blocked_top": np.maximum(own.blocked_top + top - flow.blocked_top, own.base),
        "cross_range_wind": wind * own.crest_wind / flow.crest_wind,
    }


MANY = 24
"""Sites beside the line from which on those whose places on it are about the same share one."""
SAME_DISTANCE, SAME_HEIGHT = 1000.0, 100.0
"""Steps [m] of distance and height within which they do; deviations of members hardly change over them: a judgement."""


def alike(places: tuple[Site, ...]) -> tuple[tuple[Site, ...], NDArray[np.intp]]:
    """Places without those about the same, and for each place the number of the one that stands for it."""
    if len(places) <= MANY:
        return places, np.arange(len(places))
    kept: dict[tuple[int, int], int] = {}
    first: list[Site] = []
    back = []
    for place in places:
        key = round(place.distance / SAME_DISTANCE), round((place.elevation or 0.0) / SAME_HEIGHT)
        if key not in kept:
            kept[key] = len(first)
            first.append(place)
        back.append(kept[key])
    return tuple(first), np.array(back, dtype=np.intp)


def spread_out(whole: Members, first: int, back: NDArray[np.intp]) -> Members:
    """Members with a column for every site: those on the line, then that of the place that stands for each other."""
    columns = np.concatenate([np.arange(first), first + back])
    return Members(whole.crosses, whole.values, {name: value[:, columns] for name, value in whole.sites.items()})


def shadows(crossing: Crossing) -> tuple[Site, ...]:
    """For each site with a line of its own, the place on this line that is as far from its crest."""
    length, crest = float(crossing.transect.distance[-1]), crossing.features.crest_distance
    return tuple(
        Site(air.name, float(np.clip(crest + air.own.beyond_crest, 0.0, length)), air.elevation)
        for air in crossing.lee
        if air.own is not None
    )


FACTORS = ("mixing_ratio", "wind", "wind_10m", "gust")
"""Numbers whose deviations are factors; those of the others are differences. Rain has factors where there is any."""


def centred(whole: Members, crossing: Crossing) -> Members:
    """Members without the last, which is the middle, and around the own answers of sites beside the line."""
    sites = {name: value[:-1].copy() for name, value in whole.sites.items()}
    first = len(on_the_line(crossing))
    for column, air in enumerate(columns_of(crossing)[first:], start=first):
        for name, own in _answers(air).items():
            if name not in sites:
                continue
            middle = whole.sites[name][-1, column]
            value = np.nan if own is None else own
            if name in FACTORS:
                sites[name][:, column] *= value / middle if middle > 0.0 else np.nan
            elif name == "rain" and middle > 0.0:
                sites[name][:, column] *= value / middle
            else:
                sites[name][:, column] += value - middle
        if sites:
            sites["went_round"][:, column] = np.clip(sites["went_round"][:, column], 0.0, 1.0)
            p, t, v = (sites[name][:, column] for name in ("pressure", "temperature", "mixing_ratio"))
            v = sites["mixing_ratio"][:, column] = np.minimum(v, _most_vapour(p, t))
            sites["dew_point"][:, column], sites["relative_humidity"][:, column] = _humidity(p, t, v)
    return Members(whole.crosses[:-1], {name: value[:-1] for name, value in whole.values.items()}, sites)


def _answers(air: LeeAir) -> dict[str, float | None]:
    """The answer at a site under the names of the arrays of members; without its humidity."""
    wind, parts = air.wind, air.parts
    return {
        "pressure": air.pressure,
        "temperature": air.temperature,
        "mixing_ratio": air.mixing_ratio,
        "wind": None if wind is None else wind.wind,
        "wind_10m": None if wind is None else wind.at_10m,
        "gust": None if wind is None else 0.5 * (wind.gust_low + wind.gust_high),
        "source_level": air.source_level,
        "source_level_low": air.source_level_low,
        "source_level_high": air.source_level_high,
        "upwind_temperature": air.upwind_temperature,
        "upwind_dew_point": air.upwind_dew_point,
        "warming": air.warming,
        "went_round": air.went_round,
        "rain": air.rain,
        **{f"warming_{name}": None if parts is None else getattr(parts, name) for name in PARTS},
        "popular_picture": air.popular_picture,
        "descent_only": air.descent_only,
        **own_differences(air),
    }


def with_method_error(
    sites: dict[str, Array], crossing: Crossing, uncertainty: Uncertainty, error: dict[str, Array]
) -> dict[str, Array]:
    """What members give at the sites, with the error of the method added.

    Parameters
    ----------
    sites : dict of str to ndarray (m, ns)
    crossing : Crossing
        For the range of the methods of the lee wind.
    uncertainty : Uncertainty
        Where it states the error of the method itself.
    error : dict of str to ndarray (m,)
        Standard normal numbers by the names in `uncertainty.METHOD`.

    Returns
    -------
    dict of str to ndarray (m, ns)

    Notes
    -----
    Temperature and vapour: `crossing.model_error.model_error` with the distance along the line, the same
    sign at all sites. The vapour stays between nothing and saturation. The wind at a site is multiplied
    by a log-normal factor, of its own width up and down, such that without any other doubt its 10 and
    90 % are the range of the methods (wind and wind at 10 m) and of the gusts. For rain, cloud and
    heights no error of the method is stated.
    """
    if not sites:
        return {}
    lee = columns_of(crossing)
    distance = np.array([max(place.distance, 0.0) for place in lee])
    sigma_t, sigma_v = model_error(distance)
    if uncertainty.model_temperature is not None:
        sigma_t = np.full_like(sigma_t, uncertainty.model_temperature)
    if uncertainty.model_vapour is not None:
        sigma_v = np.full_like(sigma_v, uncertainty.model_vapour)
    z_t, z_v, z_w = (error[name][:, np.newaxis] for name in METHOD)
    out = dict(sites)
    out["temperature"] = sites["temperature"] + sigma_t * z_t
    out["warming"] = sites["warming"] + sigma_t * z_t
    p, t = sites["pressure"], out["temperature"]
    v = np.minimum(np.maximum(sites["mixing_ratio"] + sigma_v * z_v, LEAST_VAPOUR), _most_vapour(p, t))
    out["mixing_ratio"] = v
    out["dew_point"], out["relative_humidity"] = _humidity(p, t, v)
    for name, low, high in _wind_ranges(lee):
        out[name] = sites[name] * np.exp(np.where(z_w < 0.0, low, high) * z_w / TENTH)
    return out


def values_with_method_error(values: dict[str, Array], crossing: Crossing, error: dict[str, Array]) -> dict[str, Array]:
    """What members give for the crossing as a whole, with the error of the method added where it is stated.

    Parameters
    ----------
    values : dict of str to ndarray (m,)
    crossing : Crossing
        For the range of the methods of the lee wind.
    error : dict of str to ndarray (m,)
        As for `with_method_error`.

    Returns
    -------
    dict of str to ndarray (m,)
        The strongest wind down the lee has the factor that `with_method_error` gives the winds at the sites: without
        any other doubt its 10 and 90 % are the range of the methods.
    """
    if "lee_wind" not in values:
        return values
    winds, z = crossing.winds, error["model_wind"]
    least, strongest, most = (max(wind, 0.1) for wind in (winds.low, winds.strongest, winds.high))
    down, up = float(np.log(strongest / least)), float(np.log(most / strongest))
    width: Array = np.where(z < 0.0, down, up)
    return values | {"lee_wind": values["lee_wind"] * np.exp(width * z / TENTH)}


def _wind_ranges(lee: tuple[LeeAir, ...]) -> Iterator[tuple[str, Array, Array]]:
    """Logarithm of answer over lower end, and of upper end over answer, by site; 0 where there is no wind."""
    winds = [place.wind for place in lee]
    low = np.array([0.0 if w is None else np.log(max(w.wind, 0.1) / max(w.low, 0.1)) for w in winds])
    high = np.array([0.0 if w is None else np.log(max(w.high, 0.1) / max(w.wind, 0.1)) for w in winds])
    yield "wind", np.maximum(low, 0.0), np.maximum(high, 0.0)
    yield "wind_10m", np.maximum(low, 0.0), np.maximum(high, 0.0)
    half = [0.0 if w is None else np.log(w.gust_high / max(0.5 * (w.gust_low + w.gust_high), 0.1)) for w in winds]
    less = [0.0 if w is None else np.log(0.5 * (w.gust_low + w.gust_high) / max(w.gust_low, 0.1)) for w in winds]
    yield "gust", np.hypot(low, np.maximum(less, 0.0)), np.hypot(high, np.maximum(half, 0.0))


def _most_vapour(p: Array, t: Array) -> Array:
    """Mixing ratio of saturated air; NaN where there is no air."""
    here = np.isfinite(t)
    most = np.full(t.shape, np.nan)
    most[here] = saturation_mixing_ratio(p[here], np.clip(t[here], 160.0, 340.0))
    return most


def _humidity(p: Array, t: Array, v: Array) -> tuple[Array, Array]:
    """Dew point and relative humidity; NaN where there is no air."""
    here = np.isfinite(t) & np.isfinite(v)
    dew_point, relative = np.full(t.shape, np.nan), np.full(t.shape, np.nan)
    dew_point[here] = dew_point_from_mixing_ratio(p[here], np.maximum(v[here], LEAST_VAPOUR))
    relative[here] = relative_humidity_from_mixing_ratio(p[here], t[here], v[here])
    return dew_point, relative
