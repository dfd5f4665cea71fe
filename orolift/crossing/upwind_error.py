"""How wrong the wind or the humidity before the range would have to be to give what was observed in the lee."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Literal

import numpy as np

from orolift.air.column_change import with_values
from orolift.air.saturation import saturation_mixing_ratio
from orolift.crossing.situation import crossing_of
from orolift.errors import IncomingAirError, NoCrossingError, OutOfRangeError

if TYPE_CHECKING:
    from collections.abc import Callable

    from orolift.air.column import IncomingAir
    from orolift.crossing.explain import Observed
    from orolift.crossing.result import LeeAir
    from orolift.crossing.situation import Situation

What = Literal["wind", "humidity"]

WIND_FACTORS = (0.4, 0.65, 1.0, 1.5, 2.2)
"""Factors of the wind that are looked at: beyond them it is another day's wind; a judgement."""
HUMIDITY_FACTORS = (0.4, 0.7, 1.0, 1.5)
"""Factors of the humidity that are looked at; no level goes above saturation. A judgement."""
REFINEMENTS = 5
"""Crossings spent on the best factor after the scan."""
SAME = 0.05
"""A change that lessens the misfit by less than this explains nothing; a judgement."""


@dataclass(frozen=True)
class UpwindError:
    """The error of one quantity before the range that comes nearest to what was observed.

    Attributes
    ----------
    what : 'wind' or 'humidity'
        The whole column times a factor.
    factor : float
        True value over the one given.
    temperature : float [K]
    mixing_ratio : float [kg per kg of dry air]
        At the place, with that factor.
    source_level : float or None [m above sea level]
    misfit, misfit_before : float [1]
        Larger of both errors in units of its tolerance, with the factor and without; up to 1 it reproduces the
        observation.
    at_bound : bool
        Whether the best factor is the end of those looked at.
    refused : tuple of float
        Factors with which the air does not cross.
    """

    what: What
    factor: float
    temperature: float
    mixing_ratio: float
    source_level: float | None
    misfit: float
    misfit_before: float
    at_bound: bool
    refused: tuple[float, ...]

    @property
    def explains(self) -> bool:
        """Whether the observation is reproduced."""
        return self.misfit <= 1.0

    @property
    def helps(self) -> bool:
        """Whether the change brings the estimate nearer at all."""
        return self.misfit < self.misfit_before - SAME


def upwind_error(
    situation: Situation, place: int, observed: Observed, what: What, now: LeeAir | None = None
) -> UpwindError:
    """The factor of the wind, or of the humidity, with which the crossing comes nearest to what was observed.

    Parameters
    ----------
    situation : Situation
        With at least one site.
    place : int
        Number of the site.
    observed : Observed
    what : 'wind' or 'humidity'
    now : LeeAir, optional
        What the situation as it is gives at the site, where it is known already.

    Returns
    -------
    UpwindError

    Raises
    ------
    NoCrossingError, TerrainError, OutOfRangeError
        If the situation itself cannot be worked out.

    Notes
    -----
    Whole crossings, every other input as given: wind changes blocking, and
    with it the source level; humidity changes cloud and rain. A scan of four or five factors, then a bounded
    search (scipy) between the neighbours of the best one. An estimate that
    is within the tolerance needs no error, and none is looked for.
    """
    found: dict[float, LeeAir] = {} if now is None else {1.0: now}
    refused: list[float] = []

    def misfit(factor: float) -> float:
        if factor not in found:
            try:
                found[factor] = crossing_of(_changed(situation, what, factor)).lee[place]
            except (NoCrossingError, IncomingAirError, OutOfRangeError):
                if factor == 1.0:
                    raise
                refused.append(factor)
                return float("inf")
        return _misfit(observed, found[factor])

    before = misfit(1.0)
    factors = WIND_FACTORS if what == "wind" else HUMIDITY_FACTORS
    scan = [misfit(factor) for factor in factors] if before > 1.0 else [before]
    if max(_finite(scan), default=0.0) - min(_finite(scan)) > SAME:
        _search(misfit, factors, scan)
    best = min(found, key=lambda factor: (_misfit(observed, found[factor]), abs(np.log(factor))))
    air = found[best]
    return UpwindError(
        what=what,
        factor=best,
        temperature=air.temperature,
        mixing_ratio=air.mixing_ratio,
        source_level=air.source_level,
        misfit=_misfit(observed, air),
        misfit_before=before,
        at_bound=best in {min(found), max(found)} and best != 1.0,
        refused=tuple(sorted(refused)),
    )


def _finite(values: list[float]) -> list[float]:
    return [value for value in values if np.isfinite(value)]


def _search(misfit: Callable[[float], float], factors: tuple[float, ...], scan: list[float]) -> None:
    """Look between the neighbours of the best factor."""
    from scipy.optimize import minimize_scalar

    best = int(np.argmin(scan))
    low, high = factors[max(best - 1, 0)], factors[min(best + 1, len(factors) - 1)]
    minimize_scalar(
        lambda log: min(misfit(float(np.exp(log))), 1e3),
        bounds=(np.log(low), np.log(high)),
        method="bounded",
        options={"maxiter": REFINEMENTS},
    )


def _misfit(observed: Observed, air: LeeAir) -> float:
    warm = abs(air.temperature - observed.temperature) / observed.temperature_tolerance
    moist = abs(air.mixing_ratio - observed.mixing_ratio) / observed.mixing_ratio_tolerance
    return max(warm, moist)


def _changed(situation: Situation, what: What, factor: float) -> Situation:
    """The situation with one quantity of the whole column multiplied."""
    if factor == 1.0:
        return situation
    air = situation.incoming
    return replace(situation, incoming=_windier(air, factor) if what == "wind" else _moister(air, factor))


def _windier(air: IncomingAir, factor: float) -> IncomingAir:
    return with_values(air, eastward_wind=factor * air.eastward_wind, northward_wind=factor * air.northward_wind)


def _moister(air: IncomingAir, factor: float) -> IncomingAir:
    """Water times a factor; air that is not saturated is not made so."""
    water = air.vapour + air.cloud
    full = np.maximum(saturation_mixing_ratio(air.pressure, air.temperature), water)
    return with_values(air, water=np.minimum(factor * water, full))
