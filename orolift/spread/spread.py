"""How sure a crossing is: the same situation in many members, with and without the error of the method."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.humidity import dew_point_from_mixing_ratio, relative_humidity_from_mixing_ratio
from orolift.air.saturation import saturation_mixing_ratio
from orolift.crossing.members import Members, members_of
from orolift.crossing.model_error import model_error
from orolift.errors import OroliftError, OutOfRangeError
from orolift.spread.draws import draws_of, variation_of, what_varies
from orolift.spread.engine import in_order, outcomes
from orolift.spread.uncertainty import COLUMNS, METHOD, Uncertainty, checked, latin_hypercube, normal

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator
    from concurrent.futures import Executor

    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing, LeeAir
    from orolift.crossing.situation import Situation

    Array = NDArray[np.float64]

USUAL_MEMBERS = 32
"""Members where nobody says how many: another seed moves a range of 10 to 90 % by about a fifth of itself."""
LEAST_MEMBERS, MOST_MEMBERS = 10, 100_000
"""Fewer have no 10 % and 90 %; more do not fit into memory."""
CHUNK = 50
"""Members marched together. It is fixed, so that nothing depends on the number of processes."""
CHANCE_OF_RAIN = 0.1 / 3600.0
"""Rate [kg m-2 s-1] from which it rains at a place: 0.1 mm/h, what gauges resolve; common practice, no source."""
LEAST_VAPOUR = 1e-6
"""Vapour [kg per kg] that is left however dry the error of the method would make the air."""
TENTH = 1.2815515655446004
"""Standard normal number above which a tenth lies."""


@dataclass(frozen=True)
class Failed:
    """A member that could not be worked out.

    Attributes
    ----------
    number : int
        From 0.
    reason : str
    """

    number: int
    reason: str


@dataclass(frozen=True, eq=False)
class Spread:
    """A situation in members. Arrays (m,) and (m, ns), NaN where a member has no such value.

    Attributes
    ----------
    members, seed : int
    uncertainty : Uncertainty
    varied : tuple of str
        Inputs that differ between members and can make a difference.
    level : dict of str to ndarray (m,) [1]
        Where each member lies, between 0 and 1, in what each input may be and in what the method gets wrong.
    crosses : ndarray of bool, (m,)
    values, sites : dict of str to ndarray
        As in `orolift.crossing.members.Members`: of the inputs alone.
    full_sites : dict of str to ndarray (m, ns)
        `sites` with the error of the method.
    failed : tuple of Failed
        Members that could not be worked out; they count nowhere.
    """

    members: int
    seed: int
    uncertainty: Uncertainty
    varied: tuple[str, ...]
    level: dict[str, Array]
    crosses: NDArray[np.bool_]
    values: dict[str, Array]
    sites: dict[str, Array]
    full_sites: dict[str, Array]
    failed: tuple[Failed, ...]


@dataclass(frozen=True, eq=False)
class _Chunk:
    """Members that are worked out together."""

    situation: Situation
    uncertainty: Uncertainty
    first: int
    level: Array
    streamlines: int


def spread_of(
    situation: Situation,
    crossing: Crossing,
    uncertainty: Uncertainty,
    *,
    members: int = USUAL_MEMBERS,
    seed: int = 0,
    executor: Executor | None = None,
    told: Callable[[int], object] | None = None,
    streamlines: int = 60,
) -> Spread:
    """A situation in members.

    Parameters
    ----------
    situation : Situation
    crossing : Crossing
        Its crossing, for the range of the methods of the lee wind.
    uncertainty : Uncertainty
    members : int
        10 to 100 000.
    seed : int
        0 or more.
    executor : Executor, optional
        None works here.
    told : callable, optional
        Is given the number of members that are done since the last call.
    streamlines : int
        As for `crossing.cross`.

    Returns
    -------
    Spread

    Raises
    ------
    OutOfRangeError
        If the number of members, the seed or a standard deviation is out of range.
    WorkersError
        If a process of the executor is lost.

    Notes
    -----
    Everything is drawn before, and members are marched in groups of 50 whatever
    the executor: the same seed gives the same numbers anywhere. A member that
    fails is counted and the rest goes on.
    """
    _check_count(members, seed)
    level = latin_hypercube(members, len(COLUMNS), seed)
    chunks = (
        _Chunk(situation, checked(uncertainty), first, level[first : first + CHUNK], streamlines)
        for first in range(0, members, CHUNK)
    )
    found = []
    for outcome in outcomes(_worked, chunks, executor):
        found.append(outcome)
        if told is not None:
            told(min(CHUNK, members - outcome.number * CHUNK))
    parts: list[Members] = []
    failed: list[Failed] = []
    for outcome in in_order(found):
        if outcome.value is None:
            raise outcome.error or OroliftError("a group of members was lost")
        parts.append(outcome.value[0])
        failed += outcome.value[1]
    whole = _joined(parts, [min(CHUNK, members - first) for first in range(0, members, CHUNK)])
    named = dict(zip(COLUMNS, level.T, strict=True))
    full = with_method_error(whole.sites, crossing, uncertainty, {name: normal(named[name]) for name in METHOD})
    return Spread(
        members=members,
        seed=seed,
        uncertainty=uncertainty,
        varied=what_varies(situation, uncertainty),
        level=named,
        crosses=whole.crosses,
        values=whole.values,
        sites=whole.sites,
        full_sites=full,
        failed=tuple(failed),
    )


def _check_count(members: int, seed: int) -> None:
    if not LEAST_MEMBERS <= members <= MOST_MEMBERS:
        raise OutOfRangeError(
            f"members: {members} is outside {LEAST_MEMBERS} to {MOST_MEMBERS}. Fewer than {LEAST_MEMBERS} have no "
            "range of 10 to 90 %; a few hundred are plenty. Leave the spread out where no range is wanted."
        )
    if seed < 0:
        raise OutOfRangeError(f"seed: {seed} is below 0. Give a whole number, 0 or more.")


def _worked(chunk: _Chunk) -> tuple[Members, list[Failed]]:
    """Members of a chunk, those that fail apart."""
    try:
        return _together(chunk), []
    except OroliftError as error:
        if chunk.level.shape[0] == 1:
            return Members(np.zeros(1, dtype=bool), {}, {}), [Failed(chunk.first, str(error))]
    parts, failed = [], []
    for i in range(chunk.level.shape[0]):
        alone = replace(chunk, first=chunk.first + i, level=chunk.level[i : i + 1])
        part, lost = _worked(alone)
        parts.append(part)
        failed += lost
    return _joined(parts, [1] * len(parts)), failed


def _together(chunk: _Chunk) -> Members:
    """Members of a chunk, marched together; those without ice apart from the others."""
    situation, uncertainty = chunk.situation, chunk.uncertainty
    drawn = draws_of(situation, uncertainty, chunk.level)
    as_set = situation.settings is None or situation.settings.freezing
    liquid = (drawn["liquid_cloud"] > 0.0) | (not as_set)
    parts, rows = [], []
    for frozen in (True, False):
        some = np.flatnonzero(liquid != frozen)
        if some.size:
            own = {name: value[some] for name, value in drawn.items()}
            variation = variation_of(situation, uncertainty, own, freezing=frozen)
            parts.append(members_of(situation, variation, streamlines=chunk.streamlines))
            rows.append(some)
    whole = _joined(parts, [one.size for one in rows])
    back = np.argsort(np.concatenate(rows))
    return Members(
        whole.crosses[back],
        {name: value[back] for name, value in whole.values.items()},
        {name: value[back] for name, value in whole.sites.items()},
    )


def _joined(parts: list[Members], sizes: list[int]) -> Members:
    """Members one after the other; NaN where a part has nothing."""

    def one(part: dict[str, Array], name: str, size: int, shape: tuple[int, ...]) -> Array:
        return part[name] if name in part else np.full((size, *shape), np.nan)

    values: dict[str, Array] = {}
    sites: dict[str, Array] = {}
    for out, dicts in ((values, [part.values for part in parts]), (sites, [part.sites for part in parts])):
        shapes = {name: value.shape[1:] for found in dicts for name, value in found.items()}
        for name, shape in shapes.items():
            rows = [one(found, name, size, shape) for found, size in zip(dicts, sizes, strict=True)]
            out[name] = np.concatenate(rows)
    return Members(np.concatenate([part.crosses for part in parts]), values, sites)


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
    distance = np.array([place.distance for place in crossing.lee])
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
    here = np.isfinite(t)
    most = np.full(t.shape, np.nan)
    most[here] = saturation_mixing_ratio(p[here], np.clip(t[here], 160.0, 340.0))
    v = np.minimum(np.maximum(sites["mixing_ratio"] + sigma_v * z_v, LEAST_VAPOUR), most)
    out["mixing_ratio"] = v
    for name, value in (("dew_point", t), ("relative_humidity", t)):
        out[name] = np.full(value.shape, np.nan)
    out["dew_point"][here] = dew_point_from_mixing_ratio(p[here], v[here])
    out["relative_humidity"][here] = relative_humidity_from_mixing_ratio(p[here], t[here], v[here])
    for name, low, high in _wind_ranges(crossing.lee):
        out[name] = sites[name] * np.exp(np.where(z_w < 0.0, low, high) * z_w / TENTH)
    return out


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
