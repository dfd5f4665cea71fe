"""Words for numbers: fractions, points of the compass, dates; and sentences whose numbers stay numbers."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from orolift.report.quantities import Amount, Units, shown

if TYPE_CHECKING:
    from datetime import datetime

Words = tuple[str | Amount, ...]
"""A sentence or heading: text with amounts between, so that every number can be checked against its raw value."""

_FRACTIONS = (
    (0.05, "a twentieth"),
    (0.1, "a tenth"),
    (1.0 / 7.0, "a seventh"),
    (1.0 / 6.0, "a sixth"),
    (0.2, "a fifth"),
    (0.25, "a quarter"),
    (1.0 / 3.0, "a third"),
    (0.4, "two fifths"),
    (0.5, "half"),
    (0.6, "three fifths"),
    (2.0 / 3.0, "two thirds"),
    (0.75, "three quarters"),
    (0.8, "four fifths"),
    (0.9, "nine tenths"),
)
_POINTS = (
    "north",
    "northeast",
    "east",
    "southeast",
    "south",
    "southwest",
    "west",
    "northwest",
)
_MONTHS = (
    "January",
    "February",
    "March",
    "April",
    "May",
    "June",
    "July",
    "August",
    "September",
    "October",
    "November",
    "December",
)


def fraction_in_words(share: float) -> str:
    """Nearest everyday fraction of a share.

    Parameters
    ----------
    share : float [1]
        0 to 1.

    Returns
    -------
    str
        ``"none"`` only for zero and ``"all"`` only for one, to rounding.

    Examples
    --------
    >>> fraction_in_words(0.31), fraction_in_words(0.01), fraction_in_words(0.98)
    ('a third', 'very little', 'nearly all')
    """
    if share <= 5e-4:
        return "none"
    if share >= 1.0 - 5e-4:
        return "all"
    if share < 0.03:
        return "very little"
    if share > 0.95:
        return "nearly all"
    return min(_FRACTIONS, key=lambda pair: abs(pair[0] - share))[1]


def point_of_compass(bearing: float) -> str:
    """Nearest of the eight points of the compass.

    Parameters
    ----------
    bearing : float [rad]
        Clockwise from north.

    Returns
    -------
    str

    Examples
    --------
    >>> point_of_compass(math.radians(235.0)), point_of_compass(math.radians(-10.0))
    ('southwest', 'north')
    """
    return _POINTS[round(math.degrees(bearing) / 45.0) % 8]


def month(time: datetime) -> str:
    """Name of the month of a time.

    Examples
    --------
    >>> from datetime import datetime
    >>> month(datetime(2026, 11, 3))
    'November'
    """
    return _MONTHS[time.month - 1]


def zone_words(time: datetime) -> str:
    """The zone of a time.

    Examples
    --------
    >>> from datetime import datetime, timedelta, timezone
    >>> zone_words(datetime(2026, 11, 3, tzinfo=timezone(timedelta(hours=-3, minutes=-30))))
    'UTC-03:30'
    """
    offset = time.utcoffset()
    minutes = 0 if offset is None else round(offset.total_seconds() / 60.0)
    sign = "-" if minutes < 0 else "+"
    return "UTC" if minutes == 0 else f"UTC{sign}{abs(minutes) // 60:02d}:{abs(minutes) % 60:02d}"


def moment(time: datetime) -> str:
    """A time for people, in its own zone and with the zone named.

    Parameters
    ----------
    time : datetime
        With a zone.

    Returns
    -------
    str

    Examples
    --------
    >>> from datetime import datetime, timezone
    >>> moment(datetime(2026, 11, 3, 12, 0, tzinfo=timezone.utc))
    '3 November 2026, 12:00 UTC'
    """
    return f"{time.day} {_MONTHS[time.month - 1]} {time.year}, {time.hour:02d}:{time.minute:02d} {zone_words(time)}"


def day(date: str) -> str:
    """A date for people.

    Parameters
    ----------
    date : str
        As ISO 8601 writes it.

    Returns
    -------
    str
        Kept on one line by no-break spaces.

    Examples
    --------
    >>> day("2026-05-01").replace("\u00a0", " ")
    '1 May 2026'
    """
    year, month, number = date.split("-")
    return f"{int(number)}\u00a0{_MONTHS[int(month) - 1]}\u00a0{year}"


def rounded_time(seconds: float, error: float) -> float:
    """A time to the half hour or ten minutes that its error allows.

    Parameters
    ----------
    seconds, error : float [s]

    Returns
    -------
    float [s]

    Examples
    --------
    >>> rounded_time(1000.0, 900.0), rounded_time(1000.0, 5000.0)
    (1200.0, 1800.0)
    """
    step = 1800.0 if error >= 3600.0 else 600.0
    return math.floor(seconds / step + 0.5) * step


def counted(count: int, one: str, many: str) -> str:
    """A count in words up to ten, with the noun in the right number.

    Examples
    --------
    >>> counted(1, "site", "sites"), counted(12, "site", "sites")
    ('one site', '12 sites')
    """
    names = ("no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten")
    return f"{names[count] if count < len(names) else count} {one if count == 1 else many}"


def short_name(name: str) -> str:
    """A name for a line on the terminal, cut with three dots after 24 letters.

    Examples
    --------
    >>> short_name("Lower Tarn"), short_name("Long Reach aerodrome and the land south of it")
    ('Lower Tarn', 'Long Reach aerodrome an…')
    """
    return name if len(name) <= 24 else f"{name[:23].rstrip()}…"


def plain(words: Words, units: Units) -> str:
    r"""A sentence as plain text.

    Examples
    --------
    >>> plain(("Cloud from ", Amount(910.0, "height"), " up."), "metric").replace("\u00a0", " ")
    'Cloud from 910 m up.'
    """
    return "".join(part if isinstance(part, str) else shown(part, units) for part in words)


def sentence(words: Words) -> Words:
    """Words with the first letter made a capital."""
    first, *rest = words
    return (f"{first[:1].upper()}{first[1:]}" if isinstance(first, str) else first, *rest)
