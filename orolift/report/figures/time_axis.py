"""A horizontal axis of time, in the zone of the reader, from hours to decades."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import TYPE_CHECKING

from orolift.report.figures.axes import Scale, place
from orolift.report.figures.placing import text_width
from orolift.report.words import month

if TYPE_CHECKING:
    from datetime import tzinfo

HOUR = 3600.0
HOURS = (1, 3, 6, 12, 24)
DAYS = (2, 7, 14, 28)
MONTHS = (1, 3, 6, 12, 24, 60, 120)


@dataclass(frozen=True)
class TimeTick:
    """A mark on an axis of time.

    Attributes
    ----------
    at : float
        Drawing coordinate.
    text : str
        Hour, day or month; empty where there is no room for it.
    day : str
        Written below, where a day begins; else empty.
    """

    at: float
    text: str
    day: str


def time_ticks(scale: Scale, zone: tzinfo, letter: float) -> tuple[TimeTick, ...]:
    """Marks of an axis of time, as close as their words allow.

    Parameters
    ----------
    scale : Scale
        Of seconds since 1970-01-01T00:00:00 UTC.
    zone : tzinfo
    letter : float
        Height of the lettering.

    Returns
    -------
    tuple of TimeTick
        At whole hours, days or months of the zone.
    """
    room = 1.25 * text_width("30 Nov", letter)
    start, end = (datetime.fromtimestamp(value, zone) for value in (scale.low, scale.high))
    for step in HOURS:
        if step * HOUR * scale.units_per_value >= 0.8 * room:
            return _by_hours(scale, start, end, step, room)
    for step in DAYS:
        if step * 24.0 * HOUR * scale.units_per_value >= room:
            return _by_days(scale, start, end, step)
    longer = 1.25 * text_width("Nov 2026", letter)
    step = next((one for one in MONTHS if one * 28 * 24.0 * HOUR * scale.units_per_value >= longer), MONTHS[-1])
    return _by_months(scale, start, end, step)


def _at(scale: Scale, time: datetime) -> float:
    return round(place(scale, time.timestamp()), 1)


def _by_hours(scale: Scale, start: datetime, end: datetime, step: int, room: float) -> tuple[TimeTick, ...]:
    """Every few hours, with the day under the first mark of each day that has room for it."""
    time = start.replace(minute=0, second=0, microsecond=0)
    out: list[TimeTick] = []
    last_day, reached = None, -room
    while time <= end:
        if time >= start and time.hour % step == 0:
            at = _at(scale, time)
            new = time.date() != last_day and at >= reached + room
            text = f"{time.day} {month(time)[:3]}" if new else ""
            out.append(TimeTick(at, f"{time.hour:02d}", text))
            last_day, reached = (time.date(), at) if new else (last_day, reached)
        time += timedelta(hours=1)
    return tuple(out)


def _by_days(scale: Scale, start: datetime, end: datetime, step: int) -> tuple[TimeTick, ...]:
    time = start.replace(hour=0, minute=0, second=0, microsecond=0)
    out, number = [], 0
    while time <= end:
        if time >= start:
            if number % step == 0:
                out.append(TimeTick(_at(scale, time), f"{time.day} {month(time)[:3]}", ""))
            number += 1
        time += timedelta(days=1)
    return tuple(out)


def _by_months(scale: Scale, start: datetime, end: datetime, step: int) -> tuple[TimeTick, ...]:
    out = []
    for number in range(start.year * 12 + start.month - 1, end.year * 12 + end.month):
        time = start.replace(year=number // 12, month=number % 12 + 1, day=1, hour=0, minute=0, second=0, microsecond=0)
        if number % step == 0 and start <= time <= end:
            out.append(TimeTick(_at(scale, time), f"{month(time)[:3]} {time.year}", ""))
    return tuple(out)
