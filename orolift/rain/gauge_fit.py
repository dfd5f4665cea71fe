"""Cloud time, fall time and background rain fitted to gauges, with the doubt that leaving gauges out shows."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.errors import OutOfRangeError
from orolift.rain.gauges import rain_at
from orolift.rain.ground import filled_ground, grid_spacing, padded_ground, padding_for
from orolift.rain.spectral import rain_from_spectrum, spectrum_of

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    from orolift.rain.gauges import Gauges
    from orolift.rain.parameters import RainParameters
    from orolift.terrain.grid import ElevationGrid

    Array = NDArray[np.float64]
    Model = Callable[[Array], Array]

LEAST_GAUGES = 6  # twice the number of fitted values: a judgement
SHORTEST, LONGEST = 50.0, 4000.0  # [s] of each time: twice the usual 200 to 2000 s either way, Smith and Barstad (2004)
MOST_BACKGROUND = 10.0 / 3600.0  # [kg m-2 s-1] twice the usual 0 to 5 mm/h
NODES = 25
_STARTS = ((300.0, 300.0), (1000.0, 1000.0), (500.0, 2500.0), (2500.0, 3500.0))  # [s]
_AT_BOUND = 0.01


@dataclass(frozen=True)
class Fitted:
    """One fitted value and its doubt.

    Attributes
    ----------
    value : float
    error : float
        Standard error by the jackknife.
    low, high : float
        Range of the fits that leave out one gauge.
    at_bound : bool
        The fit ran into the end of the allowed range: the gauges do not determine it.
    """

    value: float
    error: float
    low: float
    high: float
    at_bound: bool


@dataclass(frozen=True)
class RainFit:
    """Values of the theory fitted to gauges.

    Attributes
    ----------
    cloud_time, fall_time : Fitted [s]
        The theory is the same with the two exchanged; the shorter is called cloud time.
    total_time : Fitted [s]
        Their sum, which gauges tell best.
    background : Fitted [kg m-2 s-1]
    gauges : int
        Used in the fit.
    rms_before, rms_fitted : float [kg m-2]
        Root mean square difference to the gauges with the values given, and fitted.
    rms_left_out : float [kg m-2]
        The same where each gauge is predicted by the fit to the others: what to expect at a place without gauge.
    rms_of_mean : float [kg m-2]
        The same if every gauge is predicted by the mean of the others.
    notes : tuple of str
    """

    cloud_time: Fitted
    fall_time: Fitted
    total_time: Fitted
    background: Fitted
    gauges: int
    rms_before: float
    rms_fitted: float
    rms_left_out: float
    rms_of_mean: float
    notes: tuple[str, ...]


def fit_to_gauges(
    gauges: Gauges, grid: ElevationGrid, parameters: RainParameters, duration: float, *, floor: float | None = None
) -> RainFit:
    """Fit cloud time, fall time and background rain to gauges.

    Parameters
    ----------
    gauges : Gauges
        At least six on the map.
    grid : ElevationGrid
    parameters : RainParameters
        The other values, kept as they are; its times and background are what `rms_before` is for.
    duration : float [s]
        Above 0, at most 60 days.
    floor : float, optional [m above sea level]
        As in `rain_map`.

    Returns
    -------
    RainFit

    Raises
    ------
    OutOfRangeError
        If fewer than six gauges lie on the map or the duration is out of range.
    TerrainError
        As in `rain_map`.

    Notes
    -----
    Least squares of the totals, bounded (times 50 to 4000 s, background 0 to 10 mm/h), from four
    starts. The error is the jackknife's, sqrt((n - 1) / n sum (t_i - mean)^2) over the fits that leave one gauge out:
    Efron (1982) [1]_ (from memory).

    The rain with two delays is the divided difference of t R(t), R(t) being the rain with the single
    delay t, because 1 / [(1 + i s a)(1 + i s b)] = [a / (1 + i s a) - b / (1 + i s b)] / (a - b). So 25
    maps with one delay, read at the gauges and joined by a cubic spline, serve every fit.

    References
    ----------
    .. [1] B. Efron (1982), "The jackknife, the bootstrap and other resampling
       plans", SIAM.
    """
    seconds = float(within("duration", duration, 1.0, 60 * 86400.0, "s", "Give the hours it rains, times 3600."))
    on_map = np.isfinite(rain_at(grid, np.where(np.isnan(grid.elevation), np.nan, 0.0), gauges.x, gauges.y))
    if int(on_map.sum()) < LEAST_GAUGES:
        raise OutOfRangeError(
            f"gauges: {int(on_map.sum())} of {on_map.size} lie on the map, and a fit of three values needs at least "
            f"{LEAST_GAUGES}. Give more gauges, or keep the usual values."
        )
    model = _model_at(grid, parameters, gauges.x[on_map], gauges.y[on_map], floor, seconds)
    caught = gauges.total[on_map]
    best, others = _fits(model, caught)
    left_out = np.array([model(value)[i] for i, value in enumerate(others)])
    before = model(np.array([parameters.cloud_time, parameters.fall_time, parameters.background]))
    times = np.column_stack([others, others[:, 0] + others[:, 1]])
    values = [*best, best[0] + best[1]]
    lows, highs = (SHORTEST, SHORTEST, 0.0, 2 * SHORTEST), (LONGEST, LONGEST, MOST_BACKGROUND, 2 * LONGEST)
    cloud, fall, background, total = (
        _fitted(float(v), times[:, i], lo, hi) for i, (v, lo, hi) in enumerate(zip(values, lows, highs, strict=True))
    )
    n = caught.size
    of_mean = _rms((caught.mean() - caught) * n / (n - 1))
    scores = _rms(before - caught), _rms(model(best) - caught), _rms(left_out - caught)
    notes = _notes(scores[0], scores[2], of_mean, (cloud, fall, background))
    return RainFit(cloud, fall, total, background, n, scores[0], scores[1], scores[2], of_mean, notes)


def _model_at(
    grid: ElevationGrid, parameters: RainParameters, x: Array, y: Array, floor: float | None, seconds: float
) -> Model:
    """Totals at the gauges as a function of (cloud time, fall time, background)."""
    from scipy.interpolate import CubicSpline

    spacing = grid_spacing(grid)
    ground, _ = filled_ground(grid.elevation)
    if floor is not None:
        ground = np.maximum(ground, floor)
    slowest = replace(parameters, cloud_time=LONGEST, fall_time=0.5 * LONGEST)
    padding = padding_for(ground.shape, spacing, slowest)
    shape = padding.shape
    spectrum = spectrum_of(padded_ground(ground, padding, parameters))
    ny, nx = ground.shape
    delay = np.linspace(0.0, np.sqrt(1.01 * LONGEST), NODES) ** 2
    rain = []
    for t in delay:
        single = replace(parameters, cloud_time=float(t), fall_time=0.0)
        rate = rain_from_spectrum(spectrum, shape, spacing, single, keep=True)[:ny, :nx]
        rain.append(t * rain_at(grid, rate, x, y))
    moment = CubicSpline(np.sqrt(delay), np.array(rain))  # in the root of the delay, where the nodes are even

    def totals(values: Array) -> Array:
        a, b = float(values[0]), float(values[1])
        if abs(a - b) < 1.0:
            middle = np.sqrt(max(0.5 * (a + b), 1.0))
            added = moment(middle, 1) / (2.0 * middle)
        else:
            added = (moment(np.sqrt(a)) - moment(np.sqrt(b))) / (a - b)
        return np.asarray(seconds * np.maximum(added + values[2], 0.0))

    return totals


def _fits(model: Model, caught: Array) -> tuple[Array, Array]:
    """Best values for all gauges, and for all but each one."""
    weights = np.ones(caught.size)
    starts = [np.array([a, b, 0.0]) for a, b in _STARTS]
    best = min((_least_squares(model, caught, weights, start) for start in starts), key=lambda found: found[1])[0]
    others = []
    for i in range(caught.size):
        weights[i] = 0.0
        others.append(_least_squares(model, caught, weights, best)[0])
        weights[i] = 1.0
    return best, np.array(others)


def _least_squares(model: Model, caught: Array, weights: Array, start: Array) -> tuple[Array, float]:
    """Values that fit best, the shorter time first, and the sum of squares left."""
    from scipy.optimize import least_squares

    scale = np.array([1000.0, 1000.0, 1.0 / 3600.0])
    low = np.array([SHORTEST, SHORTEST, 0.0]) / scale
    high = np.array([LONGEST, LONGEST, MOST_BACKGROUND]) / scale
    inside = np.clip(start / scale, low + 1e-6, high - 1e-6)
    found = least_squares(lambda v: weights * (model(v * scale) - caught), inside, bounds=(low, high))
    values = found.x * scale
    return np.array([values[:2].min(), values[:2].max(), values[2]]), float(found.cost)


def _fitted(value: float, others: Array, low: float, high: float) -> Fitted:
    n = others.size
    error = float(np.sqrt((n - 1) / n * ((others - others.mean()) ** 2).sum()))
    edge = _AT_BOUND * (high - low)
    near = value < low + edge or value > high - edge
    return Fitted(value, error, float(others.min()), float(others.max()), near)


def _rms(error: Array) -> float:
    return float(np.sqrt((error**2).mean()))


def _notes(before: float, left_out: float, of_mean: float, fitted: tuple[Fitted, ...]) -> tuple[str, ...]:
    notes = ["The theory is the same with cloud time and fall time exchanged; gauges tell their sum."]
    for name, found in zip(("cloud time", "fall time", "background rain"), fitted, strict=True):
        if found.at_bound:
            notes.append(f"The fitted {name} is at the end of its allowed range: these gauges do not determine it.")
    if left_out >= before:
        notes.append(
            "Gauges left out of the fit are predicted no better than with the values it started from: do not use it."
        )
    if left_out >= of_mean:
        notes.append(
            "Gauges left out of the fit are predicted no better than by the mean of the others: the map explains "
            "nothing of their differences."
        )
    return tuple(notes)
