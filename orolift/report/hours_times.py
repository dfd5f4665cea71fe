"""Times of a series of hours in words: as their error allows, with their ranges."""

from __future__ import annotations

from datetime import datetime
from typing import TYPE_CHECKING

from orolift.report.quantities import NO_BREAK_SPACE, Amount
from orolift.report.words import month, rounded_time

if TYPE_CHECKING:
    from datetime import tzinfo

    from orolift.report.words import Words
    from orolift.spread.stretches import Stretch
    from orolift.spread.timeline_members import MaybeEnds, StretchRange


def about(seconds: float, error: float, zone: tzinfo) -> str:
    """A time for people, to the half hour or ten minutes that its error allows.

    Parameters
    ----------
    seconds, error : float [s]
    zone : tzinfo

    Returns
    -------
    str

    Examples
    --------
    >>> from datetime import UTC
    >>> about(1793741400.0, 5000.0, UTC), about(1793741700.0, 900.0, UTC)
    ('3 November 2026, 21:30', '3 November 2026, 21:40')
    """
    return stamp(rounded_time(seconds, error), zone)


def times_of(one: Stretch, members: StretchRange | None, zone: tzinfo) -> tuple[Words | None, Words | None]:
    """Onset and end of a stretch, each with the range of the members, or with the stated error where there is none.

    Parameters
    ----------
    one : Stretch
    members : StretchRange or None
    zone : tzinfo
        In which they are said.

    Returns
    -------
    (Words or None, Words or None)
        None for one that lies outside what can be judged.
    """
    ranges = (None, None) if members is None else (members.onset, members.end)
    return (
        _with_doubt(one.onset, one.onset_error or 0.0, ranges[0], zone),
        _with_doubt(one.end, one.end_error or 0.0, ranges[1], zone),
    )


def _with_doubt(seconds: float | None, error: float, ends: MaybeEnds | None, zone: tzinfo) -> Words | None:
    if seconds is None:
        return None
    if ends is None:
        return (f"{about(seconds, error, zone)} (±{NO_BREAK_SPACE}", Amount(error, "hours", 1), ")")
    return (about(seconds, error, zone), " (", short_between(ends, zone), ")")


def stamp(seconds: float, zone: tzinfo) -> str:
    """A time for people, short, in a zone that is named beside it.

    Parameters
    ----------
    seconds : float [s]
        Since 1970-01-01T00:00:00 UTC.
    zone : tzinfo

    Returns
    -------
    str

    Examples
    --------
    >>> from datetime import UTC
    >>> stamp(1793741400.0, UTC)
    '3 November 2026, 21:30'
    """
    time = datetime.fromtimestamp(round(seconds / 60.0) * 60.0, zone)
    return f"{time.day} {month(time)} {time.year}, {time.hour:02d}:{time.minute:02d}"


def short_stamp(seconds: float, zone: tzinfo) -> str:
    """The same in short, for a table: its day is kept on one line.

    Parameters
    ----------
    seconds : float [s]
    zone : tzinfo

    Returns
    -------
    str

    Examples
    --------
    >>> from datetime import UTC
    >>> short_stamp(1793741400.0, UTC).replace(NO_BREAK_SPACE, " ")
    '3 Nov 2026, 21:30'
    """
    time = datetime.fromtimestamp(round(seconds / 60.0) * 60.0, zone)
    date = f"{time.day} {month(time)[:3]} {time.year}".replace(" ", NO_BREAK_SPACE)
    return f"{date}, {time.hour:02d}:{time.minute:02d}"


def short_between(ends: MaybeEnds, zone: tzinfo) -> str:
    """The same in short, for a table.

    Parameters
    ----------
    ends : (float or None, float or None) [s]
    zone : tzinfo

    Returns
    -------
    str

    Examples
    --------
    >>> from datetime import UTC
    >>> short_between((1793741400.0, 1793745000.0), UTC), short_between((None, 1793745000.0), UTC)
    ('3 Nov 21:30 to 22:30', 'before 3 Nov 22:30')
    """
    first, last = (None if end is None else datetime.fromtimestamp(rounded_time(end, 0.0), zone) for end in ends)
    if first is None and last is None:
        return "outside what can be judged"
    if first is None or last is None:
        word, one = ("before", last) if first is None else ("after", first)
        return f"{word} {_short(one)}" if one is not None else ""
    if first == last:
        return _short(first)
    same = first.date() == last.date()
    return f"{_short(first)} to {f'{last:%H:%M}' if same else _short(last)}"


def _short(time: datetime) -> str:
    return f"{time.day} {month(time)[:3]} {time:%H:%M}"
