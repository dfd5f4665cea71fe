"""When warm air from over the crest has reached the lee: potential temperature against the crest, and the wind."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.temperature import potential_temperature
from orolift.checks import within
from orolift.constants import GRAVITY, HEAT_CAPACITY_DRY_AIR

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    Array = NDArray[np.float64]

DRY_LAPSE = GRAVITY / HEAT_CAPACITY_DRY_AIR


@dataclass(frozen=True)
class OnsetRule:
    """What must hold for lee air to count as air from over the crest.

    Attributes
    ----------
    offset : float [K]
        By how much the potential temperature in the lee may fall short of that at the crest. 0 is the
        strict rule; 1 leaves room for instruments and for heat lost to the ground, a judgement.
    sector : (float, float) or None [rad]
        Wind directions, clockwise from the first to the second, from which it counts; None takes any.
    least_speed : float [m s-1]
        Weakest wind that counts; 2 is common practice, no published source was read.
    bridge : float [s]
        Longest interruption that does not end a spell; a judgement.
    """

    offset: float = 1.0
    sector: tuple[float, float] | None = None
    least_speed: float = 2.0
    bridge: float = 3600.0


@dataclass(frozen=True)
class Spell:
    """A time in which the rule holds.

    Attributes
    ----------
    start, end : float [s]
        First and last time at which it holds.
    open_start, open_end : bool
        Whether it holds at the first, or last, time anything is known: then it began earlier, or lasts longer.
    count : int
        Times at which it holds.
    """

    start: float
    end: float
    open_start: bool
    open_end: bool
    count: int


def potential_excess(
    lee_temperature: ArrayLike,
    crest_temperature: ArrayLike,
    *,
    pressures: tuple[ArrayLike, ArrayLike] | None = None,
    elevations: tuple[ArrayLike, ArrayLike] | None = None,
) -> Array:
    """Potential temperature in the lee minus that at the crest.

    Parameters
    ----------
    lee_temperature, crest_temperature : array_like [K]
        NaN where unknown.
    pressures : (lee, crest) of array_like [Pa], optional
    elevations : (lee, crest) of array_like [m above sea level], optional
        Used where a pressure is missing.

    Returns
    -------
    ndarray [K]
        NaN where anything needed is unknown.

    Notes
    -----
    With pressures the difference of both potential temperatures; with
    elevations that of T + g z / cp, the temperature both would have at one
    height: within a few per cent of the other, and the sign is the same.

    Examples
    --------
    >>> potential_excess([285.0], [275.0], elevations=([600.0], [1600.0])).round(2)
    array([0.25])
    """
    lee, crest = (np.asarray(t, dtype=np.float64) for t in (lee_temperature, crest_temperature))
    excess = np.full(np.broadcast_shapes(lee.shape, crest.shape), np.nan)
    if elevations is not None:
        low, high = (np.asarray(z, dtype=np.float64) for z in elevations)
        excess = np.broadcast_to(lee + DRY_LAPSE * low - crest - DRY_LAPSE * high, excess.shape).copy()
    if pressures is not None:
        fields = np.broadcast_arrays(lee, crest, *(np.asarray(p, dtype=np.float64) for p in pressures))
        known = np.all(np.isfinite(fields), axis=0)
        t1, t2, p1, p2 = (np.asarray(field)[known] for field in fields)
        excess[known] = potential_temperature(p1, t1) - potential_temperature(p2, t2)
    return excess


def holds(
    rule: OnsetRule, excess: ArrayLike, wind_from: ArrayLike | None = None, speed: ArrayLike | None = None
) -> Array:
    """Whether the rule holds: 1 where it does, 0 where not, NaN where it cannot be said.

    Parameters
    ----------
    rule : OnsetRule
    excess : array_like (n,) [K]
        Potential temperature in the lee minus that at the crest, as of `potential_excess`.
    wind_from : array_like (n,) [rad], optional
        Direction the lee wind blows from. Left out, and where the rule has a sector, nothing can be said.
    speed : array_like (n,) [m s-1], optional
        Of the lee wind; left out, it is not asked for.

    Returns
    -------
    ndarray (n,)

    Raises
    ------
    OutOfRangeError
        If the rule is out of range.

    Notes
    -----
    Wind in the sector of air from over the range, and a potential temperature
    in the valley that equals or exceeds that at the crest: Vergeiner (2004);
    with two stations and the wind sector also Drechsel and Mayr (2008). One condition that fails decides; one
    that is unknown leaves it open only if no other fails.

    Examples
    --------
    >>> rule = OnsetRule(offset=0.0, sector=(2.0, 4.0))
    >>> holds(rule, [0.0, 2.0, -0.1, 1.0], [3.0, 1.0, 3.0, np.nan], [5.0, 5.0, 5.0, 5.0])
    array([ 1.,  0.,  0., nan])
    """
    within("offset", rule.offset, -10.0, 20.0, "K", "It is a tolerance of about 1 K.")
    gap = np.asarray(excess, dtype=np.float64)
    tests = [(gap >= -rule.offset, np.isfinite(gap))]
    if rule.sector is not None:
        bearing = np.full(gap.shape, np.nan) if wind_from is None else np.asarray(wind_from, dtype=np.float64)
        start, end = rule.sector
        turn = 2.0 * np.pi
        width = (end - start) % turn or turn
        tests.append(((bearing - start) % turn <= width + 1e-9, np.isfinite(bearing)))
    if speed is not None:
        wind = np.asarray(speed, dtype=np.float64)
        tests.append((wind >= rule.least_speed, np.isfinite(wind)))
    fails = np.any([known & ~true for true, known in tests], axis=0)
    sure = np.all([known for _, known in tests], axis=0)
    return np.where(fails, 0.0, np.where(sure, 1.0, np.nan))


def spells(rule: OnsetRule, time: ArrayLike, state: ArrayLike) -> tuple[Spell, ...]:
    """Spells in which the rule holds, short interruptions bridged.

    Parameters
    ----------
    rule : OnsetRule
    time : array_like (n,) [s]
        In any order.
    state : array_like (n,)
        As `holds` gives it.

    Returns
    -------
    tuple of Spell
        In order of time.

    Notes
    -----
    A spell ends when the rule fails, or nothing is known for twice the usual
    step, and it does not hold again within the bridge.

    Examples
    --------
    >>> found = spells(OnsetRule(bridge=600.0), [0.0, 600.0, 1200.0, 1800.0, 2400.0], [0.0, 1.0, 1.0, 0.0, 0.0])
    >>> [(spell.start, spell.end) for spell in found]
    [(600.0, 1200.0)]
    """
    when, what = np.asarray(time, dtype=np.float64), np.asarray(state, dtype=np.float64)
    known = np.isfinite(when) & np.isfinite(what)
    order = np.argsort(when[known], kind="stable")
    when, what = when[known][order], what[known][order]
    at = np.flatnonzero(what > 0.5)
    times = when[at]
    if times.size == 0:
        return ()
    usual = float(np.median(np.diff(when))) if when.size > 1 else 0.0
    wait = np.diff(times)
    broken = (np.diff(at) > 1) | (wait > 2.0 * usual)
    first = np.concatenate([[0], np.flatnonzero(broken & (wait > rule.bridge + 1e-6)) + 1])
    last = np.concatenate([first[1:] - 1, [times.size - 1]])
    return tuple(
        Spell(
            float(times[a]),
            float(times[b]),
            bool(times[a] <= when[0]),
            bool(times[b] >= when[-1]),
            int(b - a + 1),
        )
        for a, b in zip(first, last, strict=True)
    )
