"""Levels of a sounding or model column as reported: put in order, merged, cut at the ground.

Every reader of soundings ends here, so that gaps, repeated levels and winds on
levels of their own are treated alike whatever the format was.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.errors import DataFileError
from orolift.sources.quality import Finding, shortened

if TYPE_CHECKING:
    from collections.abc import Callable
    from datetime import datetime

    from numpy.typing import NDArray

    Array = NDArray[np.float64]

FIELDS = ("pressure", "height", "temperature", "dew_point", "relative_humidity", "wind_speed", "wind_from")
SAME_TEMPERATURE = 1.0
"""Difference of temperature [K] at which two entries for one level still agree: a judgement, roundings of codes."""
SAME_DEW_POINT = 3.0
"""The same for dew points [K]: depressions above 5 K are coded in whole kelvins, and dry air is uncertain."""


@dataclass(frozen=True, eq=False)
class ReportedLevels:
    """Levels as a file reports them, in SI, NaN where a value is missing.

    Attributes
    ----------
    name : str
        File, for messages.
    pressure, height, temperature, dew_point, relative_humidity, wind_speed, wind_from : ndarray (n,)
        Pa, m above sea level, K, K over liquid water, 1 over liquid water, m s-1, rad.
    label : callable
        Words for the place of row i, "line 7".
    row : ndarray of int (n,)
        Row number of each level for `label`.
    in_order : bool
        The file is expected to run from the ground up or from the top down; else levels are sorted.
    surface_pressure : float or None [Pa]
        At the ground, where the file says so; levels of higher pressure lie below it.
    elevation : float or None [m above sea level]
        Of the ground, where the file says so.
    observed : datetime or None
        With a time zone.
    longitude, latitude : float or None [degrees east, degrees north]
    station : str or None
    findings : tuple of Finding
        What the reader has seen already.
    """

    name: str
    pressure: Array
    height: Array
    temperature: Array
    dew_point: Array
    relative_humidity: Array
    wind_speed: Array
    wind_from: Array
    label: Callable[[int], str]
    row: NDArray[np.int64]
    in_order: bool = True
    surface_pressure: float | None = None
    elevation: float | None = None
    observed: datetime | None = None
    longitude: float | None = None
    latitude: float | None = None
    station: str | None = None
    findings: tuple[Finding, ...] = ()


def blank_levels(name: str, count: int, label: Callable[[int], str]) -> ReportedLevels:
    """Levels without any value, for a reader to fill with ``dataclasses.replace``.

    Parameters
    ----------
    name : str
        File, for messages.
    count : int
    label : callable
        Words for the place of row i.

    Returns
    -------
    ReportedLevels

    Examples
    --------
    >>> blank_levels("s.csv", 2, str).height
    array([nan, nan])
    """
    none = np.full(count, np.nan)
    return ReportedLevels(name, none, none, none, none, none, none, none, label, np.arange(count))


def place_of(levels: ReportedLevels, i: int) -> str:
    """File, place in it and pressure of a level.

    Parameters
    ----------
    levels : ReportedLevels
    i : int

    Returns
    -------
    str
    """
    where = f"{levels.name} {levels.label(int(levels.row[i]))}"
    pressure = float(levels.pressure[i])
    return where if np.isnan(pressure) else f"{where}, {pressure / 100.0:g} hPa"


def taken(levels: ReportedLevels, index: NDArray[np.int64] | NDArray[np.bool_]) -> ReportedLevels:
    """The levels that an index or a mask picks."""
    picked = {name: getattr(levels, name)[index] for name in FIELDS}
    return replace(levels, row=levels.row[index], **picked)


def ordered(levels: ReportedLevels) -> ReportedLevels:
    """Levels from the ground up, each pressure once, each with a temperature or a wind.

    Parameters
    ----------
    levels : ReportedLevels

    Returns
    -------
    ReportedLevels
        Pressure strictly falling.

    Raises
    ------
    DataFileError
        If no level has a pressure, levels that are expected in order are not,
        or one level is given twice with values that contradict each other.
    """
    useful = np.isfinite(levels.temperature) | np.isfinite(levels.wind_speed)
    levels = _with_pressure(taken(levels, useful))
    levels = _sorted(levels)
    levels = _merged(levels)
    return _above_ground(levels)


def _with_pressure(levels: ReportedLevels) -> ReportedLevels:
    """Pressure by height where it is missing; levels with neither are left out."""
    missing = np.isnan(levels.pressure)
    if not missing.any():
        return levels
    known = ~missing & np.isfinite(levels.height)
    z, i = np.unique(levels.height[known], return_index=True)
    log_p = np.log(levels.pressure[known])[i]
    if missing.all() or (z.size > 1 and (np.diff(log_p) >= 0.0).any()):
        raise DataFileError(
            f"{levels.name}: {'no level has a pressure' if missing.all() else 'pressure does not fall with height'}; "
            "the levels need a pressure each, or a height beside others that have both."
        )
    found = levels.pressure.copy()
    if z.size > 1:
        found[missing] = np.exp(np.interp(levels.height[missing], z, log_p, left=np.nan, right=np.nan))
    worked_out, lost = missing & np.isfinite(found), missing & np.isnan(found)
    findings = [
        Finding(
            place_of(levels, int(i)),
            "no pressure, and no height between levels that have both",
            "",
            "left out",
            "doubtful",
        )
        for i in np.flatnonzero(lost)
    ]
    if worked_out.any():
        which = f"{int(worked_out.sum())} levels"
        done = "worked out from height, between levels that have both"
        findings.append(Finding(levels.name, "no pressure", which, done, "remark"))
    full = replace(levels, pressure=found, findings=(*levels.findings, *shortened(findings)))
    return taken(full, ~lost)


def _sorted(levels: ReportedLevels) -> ReportedLevels:
    """Levels from the ground up; a broken order is refused where an order is expected."""
    if levels.in_order:
        _refuse_disorder(levels)
        if levels.pressure.size > 1 and levels.pressure[0] < levels.pressure[-1]:
            levels = taken(levels, np.arange(levels.pressure.size)[::-1])
    return taken(levels, np.argsort(-levels.pressure, kind="stable"))


def _refuse_disorder(levels: ReportedLevels) -> None:
    """Refuse levels with temperature whose pressure goes up and down. Winds alone may stand anywhere."""
    main = np.flatnonzero(np.isfinite(levels.temperature))
    p = levels.pressure[main]
    if p.size < 2:
        return
    steps = np.diff(p) if p[0] > p[-1] else -np.diff(p)
    wrong = np.flatnonzero(steps > 0.0)
    if wrong.size:
        i = int(main[wrong[0] + 1])
        raise DataFileError(
            f"{levels.name}: {levels.label(int(levels.row[i]))}: {levels.pressure[i] / 100:g} hPa is out of order. "
            "Sort the levels from the ground up (or from the top down)."
        )


def _merged(levels: ReportedLevels) -> ReportedLevels:
    """Entries for one level made one: the first value of each kind stays."""
    p = levels.pressure
    again = np.concatenate([[False], np.abs(np.diff(p)) <= 1e-9 * p[1:]])
    if not again.any():
        return levels
    group = np.cumsum(~again) - 1
    first = np.flatnonzero(~again)
    merged = {name: getattr(levels, name)[first].copy() for name in FIELDS}
    findings = []
    for i in np.flatnonzero(again):  # few: each is looked at
        g = int(group[i])
        fault = _contradiction(levels, int(first[g]), int(i))
        if fault:
            findings.append(fault)
        elif levels.in_order and np.isfinite(merged["temperature"][g]) and np.isfinite(levels.temperature[i]):
            findings.append(Finding(place_of(levels, int(i)), "repeated level", "", "merged with the first", "remark"))
        windy = bool(np.isfinite(merged["wind_speed"][g]))  # speed and direction come from one entry
        for name in FIELDS:
            if np.isnan(merged[name][g]) and not (name.startswith("wind") and windy):
                merged[name][g] = getattr(levels, name)[i]
    out = replace(taken(levels, first), findings=(*levels.findings, *shortened(findings)))
    return replace(out, **merged)


def _contradiction(levels: ReportedLevels, first: int, again: int) -> Finding | None:
    """What to say where two entries for one level differ; refused where an order is expected of the file."""
    for name, allowed in (("temperature", SAME_TEMPERATURE), ("dew_point", SAME_DEW_POINT)):
        one, two = float(getattr(levels, name)[first]), float(getattr(levels, name)[again])
        if not abs(one - two) > allowed:  # NaN: nothing to compare
            continue
        if levels.in_order:
            lines = sorted(int(levels.row[i]) for i in (first, again))
            level = f"{levels.pressure[first] / 100:g} hPa"
            raise DataFileError(
                f"{levels.name}: {levels.label(lines[0])} and {levels.label(lines[1])} repeat {level} with different "
                f"values; keep one."
            )
        value = f"{one - 273.15:.1f} and {two - 273.15:.1f} °C"
        return Finding(
            place_of(levels, again), f"two values of {name.replace('_', ' ')}", value, "the first kept", "doubtful"
        )
    return None


def _above_ground(levels: ReportedLevels) -> ReportedLevels:
    """Levels from the ground to the highest temperature."""
    findings = list(levels.findings)
    below = np.zeros(levels.pressure.size, dtype=np.bool_)
    if levels.surface_pressure is not None:
        below = levels.pressure > levels.surface_pressure * (1.0 + 1e-9)
    if below.any():
        top = float(levels.pressure[below].min()) / 100.0
        findings.append(
            Finding(
                levels.name, "below the ground", f"{int(below.sum())} levels, up to {top:g} hPa", "left out", "remark"
            )
        )
    warm = np.isfinite(levels.temperature) & ~below
    if not warm.any():
        raise DataFileError(f"{levels.name}: no level has a pressure and a temperature.")
    first, last = int(np.argmax(warm)), warm.size - 1 - int(np.argmax(warm[::-1]))
    lower, upper = int((~below[:first]).sum()), warm.size - 1 - last
    if lower:
        what = "no temperature at the lowest levels"
        done = "left out; the column starts at the first with temperature"
        findings.append(Finding(levels.name, what, f"{lower} levels", done, "doubtful"))
    if upper:
        what = "winds above the highest temperature"
        findings.append(Finding(levels.name, what, f"{upper} levels", "left out", "remark"))
    return replace(taken(levels, np.arange(first, last + 1)), findings=tuple(findings))
