"""What source level, rain-out share and mixing depth would give the air that was observed in the lee."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.air.parcel import Parcel, ascent, enthalpy, equilibrium_from_enthalpy, moved_to
from orolift.constants import HEAT_CAPACITY_DRY_AIR

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from orolift.air.column import IncomingAir

    Array = NDArray[np.float64]

SAMPLES = 8
"""Parcels over the mixing depth."""
HIGHEST_OVER_CREST = 2000.0
"""How far above the crest a source level is looked for [m]; documented source levels reach 3 km. A judgement."""
DEPTHS = (10.0, 1000.0)
"""Mixing depths [m] looked at: those a setting may have."""
GRID = (91, 11, 7)
"""Source levels, shares and depths worked out."""
MOST_VALLEYS = 3
"""Separate groups of answers that are told of."""
LEAST_VALLEY = 0.01
"""Size, as a share of the largest, below which a group is not told of; a judgement."""
FINER = (8, 4, 4)
"""Steps between them in which temperature and humidity are taken as straight lines, so that thin valleys hang
together."""


@dataclass(frozen=True, eq=False)
class Path:
    """What air meets between the incoming column and a place in the lee.

    Attributes
    ----------
    incoming : IncomingAir, fields (nz,)
    crest : float [m above sea level]
    pressure : float [Pa]
        At the place.
    heating : float [K]
        By the ground on the way, negative for cooling.
    freezing : bool
    """

    incoming: IncomingAir
    crest: float
    pressure: float
    heating: float = 0.0
    freezing: bool = True


@dataclass(frozen=True)
class Observed:
    """What was observed, and how near an answer must come.

    Attributes
    ----------
    temperature : float [K]
    mixing_ratio : float [kg per kg of dry air]
    temperature_tolerance : float [K]
    mixing_ratio_tolerance : float [kg per kg]
        Half a kelvin and 0.3 g/kg: what one station says of the air around it; a judgement.
    """

    temperature: float
    mixing_ratio: float
    temperature_tolerance: float = 0.5
    mixing_ratio_tolerance: float = 3e-4


@dataclass(frozen=True)
class Way:
    """One set of the three values, and what it gives.

    Attributes
    ----------
    source_level : float [m above sea level]
        Where the lowest air comes from.
    removed_share : float [1]
        Of what condenses on the way up, the share that does not come down again.
    mixing_depth : float [m]
    temperature : float [K]
    mixing_ratio : float [kg per kg of dry air]
    misfit : float [1]
        Larger of both errors in units of its tolerance; up to 1 it reproduces the observation.
    condenses : bool
        Whether anything condenses on this way; if not, the share does not matter.
    """

    source_level: float
    removed_share: float
    mixing_depth: float
    temperature: float
    mixing_ratio: float
    misfit: float
    condenses: bool


@dataclass(frozen=True)
class Valley:
    """Answers that are equally good and hang together.

    Attributes
    ----------
    best : Way
        The best of them.
    source_level, removed_share, mixing_depth : (float, float)
        Lowest and highest value among them; not every combination of them is an answer.
    """

    best: Way
    source_level: tuple[float, float]
    removed_share: tuple[float, float]
    mixing_depth: tuple[float, float]


@dataclass(frozen=True, eq=False)
class Track:
    """What air from every source level gives, with one share and the usual depth; arrays (n,).

    Attributes
    ----------
    removed_share : float [1]
    source_level : ndarray [m above sea level]
    temperature : ndarray [K]
    mixing_ratio : ndarray [kg per kg of dry air]
    """

    removed_share: float
    source_level: Array
    temperature: Array
    mixing_ratio: Array


@dataclass(frozen=True, eq=False)
class Explanation:
    """What would explain one observation.

    Attributes
    ----------
    observed : Observed
    valleys : tuple of Valley
        The widest first; none when nothing within the bounds reproduces the observation.
    nearest : Way
        The best there is, whether it reproduces the observation or not.
    bounds : (float, float) [m above sea level]
        Source levels looked at.
    tracks : tuple of Track
        Air of every level with nothing removed, the usual share, and all removed.
    """

    observed: Observed
    valleys: tuple[Valley, ...]
    nearest: Way
    bounds: tuple[float, float]
    tracks: tuple[Track, ...]


def lee_air_from_source(
    path: Path, source_level: ArrayLike, removed_share: ArrayLike, mixing_depth: ArrayLike
) -> tuple[Parcel, NDArray[np.bool_]]:
    """Air in the lee that comes from a level, loses a share of what condenses, and is mixed over a depth.

    Parameters
    ----------
    path : Path
    source_level : array_like, broadcasts [m above sea level]
        Of the lowest air.
    removed_share : array_like, broadcasts [1]
    mixing_depth : array_like, broadcasts [m]

    Returns
    -------
    parcel : Parcel, broadcast shape
    condenses : ndarray of bool
        Whether any of it condensed on the way.

    Raises
    ------
    OutOfRangeError
        If a level lies outside the column or a share outside 0 to 1.

    Notes
    -----
    Eight parcels, evenly over the mixing depth from the source level up. Each
    is lifted to the crest, or passes at its own height where that is higher;
    `removed_share` of what condenses leaves; the rest evaporates on the way
    down to the place. They are mixed by mass in enthalpy and water at the pressure of the place, heated by the ground,
    and brought to equilibrium. Unlike the crossing it prescribes the source
    level instead of finding it, knows no air that went round, and takes the spacing of
    streamlines in the lee to be that before the range.
    """
    z, share, depth = np.broadcast_arrays(
        *(np.asarray(x, dtype=np.float64) for x in (source_level, removed_share, mixing_depth))
    )
    offset = depth[..., np.newaxis] * (np.arange(SAMPLES) + 0.5) / SAMPLES
    level = z[..., np.newaxis] + offset
    start = interpolated(path.incoming, level.ravel())
    top = interpolated(path.incoming, np.maximum(start.height, path.crest + offset.ravel()))
    parcel = Parcel(start.pressure, start.temperature, start.vapour, start.cloud)
    over, removed = ascent(
        parcel, top.pressure, removed_share=np.repeat(share.ravel(), SAMPLES), freezing=path.freezing
    )
    down = moved_to(over, path.pressure, freezing=path.freezing)
    mass = start.pressure.reshape(level.shape)
    mass = mass / mass.sum(axis=-1, keepdims=True)
    heat = np.sum(mass * enthalpy(down, freezing=path.freezing).reshape(level.shape), axis=-1)
    water = np.sum(mass * (down.vapour + down.cloud).reshape(level.shape), axis=-1)
    heat = heat + HEAT_CAPACITY_DRY_AIR * path.heating
    air = equilibrium_from_enthalpy(np.full(z.shape, path.pressure), heat, water, freezing=path.freezing)
    condensed = (removed + over.cloud - start.cloud).reshape(level.shape)
    return air, np.any(condensed > 1e-9, axis=-1)


def way(path: Path, observed: Observed, source_level: float, removed_share: float, mixing_depth: float) -> Way:
    """One set of the three values, what it gives and how far off that is."""
    air, condenses = lee_air_from_source(path, source_level, removed_share, mixing_depth)
    return Way(
        source_level=source_level,
        removed_share=removed_share,
        mixing_depth=mixing_depth,
        temperature=float(air.temperature),
        mixing_ratio=float(air.vapour),
        misfit=float(_misfit(observed, air.temperature, air.vapour)),
        condenses=bool(condenses),
    )


def explanation(path: Path, observed: Observed, usual: tuple[float, float] = (0.7, 100.0)) -> Explanation:
    """Every set of source level, rain-out share and mixing depth that gives the observed air.

    Parameters
    ----------
    path : Path
    observed : Observed
    usual : (float, float)
        Share and depth that the answer named as best should be near to, where many are equally good.

    Returns
    -------
    Explanation

    Notes
    -----
    Two numbers cannot fix three values: what is found is a valley, not a
    point. All of `GRID` is worked out and read linearly between (`FINER`); points within the tolerance that touch
    form one valley. The best of each is refined by bounded least squares (scipy) with a weak pull towards
    the usual share and depth; so is the nearest point of all, without the pull.
    """
    axes = _axes(path)
    level, share, depth = np.meshgrid(*axes, indexing="ij")
    air, _ = lee_air_from_source(path, level, share, 10.0**depth)
    warm, moist = air.temperature, air.vapour
    for number, steps in enumerate(FINER):
        warm, moist = (_finer(field, number, steps) for field in (warm, moist))
    levels, shares, depths = (_finer(axis, 0, steps) for axis, steps in zip(axes, FINER, strict=True))
    fine = (levels, shares, 10.0**depths)
    misfit = _misfit(observed, warm, moist)
    bounds = (float(levels[0]), float(levels[-1]))
    lowest = np.unravel_index(int(np.argmin(misfit)), misfit.shape)
    start = (float(levels[lowest[0]]), float(shares[lowest[1]]), float(fine[2][lowest[2]]))
    nearest = _refined(path, observed, start, bounds, usual, 0.0)
    valleys = _valleys(path, observed, misfit, fine, usual)
    tracks = tuple(_track(path, axes[0], share, usual[1]) for share in sorted({0.0, usual[0], 1.0}))
    return Explanation(observed, valleys, nearest, bounds, tracks)


def _track(path: Path, levels: Array, share: float, depth: float) -> Track:
    air, _ = lee_air_from_source(path, levels, share, depth)
    return Track(share, levels, air.temperature, air.vapour)


def _axes(path: Path) -> tuple[Array, Array, Array]:
    """Levels, shares and depths that are worked out; depths as logarithms to base ten."""
    column = path.incoming.height
    top = min(path.crest + HIGHEST_OVER_CREST, float(column[-1]) - DEPTHS[1])
    return (
        np.linspace(float(column[0]), top, GRID[0]),
        np.linspace(0.0, 1.0, GRID[1]),
        np.linspace(np.log10(DEPTHS[0]), np.log10(DEPTHS[1]), GRID[2]),
    )


def _finer(field: Array, axis: int, steps: int) -> Array:
    """A field read linearly at more points along one axis."""
    count = field.shape[axis]
    at = np.arange(steps * (count - 1) + 1) / steps
    low = np.minimum(at.astype(int), count - 2)
    share = (at - low).reshape([-1 if i == axis else 1 for i in range(field.ndim)])
    lower, upper = np.take(field, low, axis=axis), np.take(field, low + 1, axis=axis)
    return np.asarray(lower + share * (upper - lower))


def _misfit(observed: Observed, temperature: Array, mixing_ratio: Array) -> Array:
    """Larger of both errors, each in units of its tolerance."""
    warm = np.abs(temperature - observed.temperature) / observed.temperature_tolerance
    moist = np.abs(mixing_ratio - observed.mixing_ratio) / observed.mixing_ratio_tolerance
    return np.asarray(np.maximum(warm, moist))


def _valleys(
    path: Path, observed: Observed, misfit: Array, axes: tuple[Array, Array, Array], usual: tuple[float, float]
) -> tuple[Valley, ...]:
    """Groups of touching points within the tolerance, the widest first; the smallest are left out."""
    from scipy.ndimage import label

    names, count = label(misfit <= 1.0, structure=np.ones((3, 3, 3)))
    sizes = np.bincount(names.ravel(), minlength=count + 1)[1:]
    kept = [int(i) + 1 for i in np.argsort(-sizes)[:MOST_VALLEYS] if sizes[i] >= LEAST_VALLEY * sizes.max()]
    found = []
    for name in kept:
        cells = np.nonzero(names == name)
        level, share, depth = (axis[i] for axis, i in zip(axes, cells, strict=True))
        spans = tuple((float(x.min()), float(x.max())) for x in (level, share, depth))
        pull = np.abs(share - usual[0]) + 0.5 * np.abs(np.log10(depth / usual[1]))
        first = int(np.argmin(misfit[cells] + pull))
        at = (float(level[first]), float(share[first]), float(depth[first]))
        best = _refined(path, observed, at, spans[0], usual, 0.05)
        if best.misfit > 1.0:
            best = way(path, observed, *at)
        found.append(Valley(best, *(_with(span, x) for span, x in zip(spans, _values(best), strict=True))))
    return tuple(found)


def _values(one: Way) -> tuple[float, float, float]:
    return one.source_level, one.removed_share, one.mixing_depth


def _with(span: tuple[float, float], value: float) -> tuple[float, float]:
    return min(span[0], value), max(span[1], value)


def _refined(
    path: Path,
    observed: Observed,
    start: tuple[float, float, float],
    levels: tuple[float, float],
    usual: tuple[float, float],
    pull: float,
) -> Way:
    """Bounded least squares from a starting point; coordinates of about one."""
    from scipy.optimize import least_squares

    span = max(levels[1] - levels[0], 1.0)

    def values(x: Array) -> tuple[float, float, float]:
        return levels[0] + span * float(x[0]), float(np.clip(x[1], 0.0, 1.0)), float(10.0 ** x[2])

    def residual(x: Array) -> list[float]:
        level, share, depth = values(x)
        air, _ = lee_air_from_source(path, level, share, depth)
        return [
            (float(air.temperature) - observed.temperature) / observed.temperature_tolerance,
            1e3 * (float(air.vapour) - observed.mixing_ratio) / (1e3 * observed.mixing_ratio_tolerance),
            pull * (share - usual[0]),
            pull * 0.5 * float(np.log10(depth / usual[1])),
        ]

    low, high = np.array([0.0, 0.0, np.log10(DEPTHS[0])]), np.array([1.0, 1.0, np.log10(DEPTHS[1])])
    first = np.array([(start[0] - levels[0]) / span, start[1], np.log10(start[2])])
    found = least_squares(residual, np.clip(first, low, high), bounds=(low, high), diff_step=1e-3, max_nfev=60)
    return way(path, observed, *values(found.x))
