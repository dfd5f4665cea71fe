"""A sounding in WMO code form FM 35 TEMP, parts A to D, to levels.

Land stations, ships and mobile stations are read. Winds by height in form
FM 32 PILOT (parts PPAA to PPDD) are not.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass, replace
from datetime import UTC, datetime, timedelta
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.errors import DataFileError
from orolift.sources.quality import Finding
from orolift.sources.reported_levels import blank_levels
from orolift.sources.temp_groups import GroupError, checked_group, ground_elevation, position
from orolift.sources.temp_parts import PartLevels, TempLevel, part_levels

if TYPE_CHECKING:
    from orolift.sources.reported_levels import ReportedLevels

PART = re.compile(r"(?<![A-Z0-9])(TT|UU|II|XX|PP|QQ|EE)(AA|BB|CC|DD)(?![A-Z0-9])")
KINDS_READ = {"TT": "land station", "UU": "ship", "II": "mobile station"}
MOST_PARTS = 400
"""Parts looked at in one file: more than any bulletin holds; keeps a wrong file from costing time."""
MOST_HEADING_WORDS = 7
"""Call sign, day, position in three groups, elevation, and one more: what a heading may take, and a group after it."""


@dataclass(frozen=True)
class _Part:
    """One part of a report before its levels are read."""

    letter: str
    station: str
    day_group: str
    body: str
    heading_words: int
    longitude: float | None = None
    latitude: float | None = None
    elevation: float | None = None


def holds_temp_report(text: str) -> bool:
    """Whether text holds a part of a TEMP report.

    Examples
    --------
    >>> holds_temp_report("TTAA 53121 99999 99012"), holds_temp_report("pressure_hpa,temperature_c")
    (True, False)
    """
    return any(match.group(1) in KINDS_READ or match.group(1) == "XX" for match in PART.finditer(text.upper()))


def levels_from_temp(
    text: str, name: str, *, station: str | None = None, near: datetime | None = None
) -> ReportedLevels:
    """Levels of a TEMP report.

    Parameters
    ----------
    text : str
        Any of the parts A to D in any order, with or without bulletin headings.
    name : str
        File, for messages.
    station : str or None
        Station number or call sign, where the text holds several.
    near : datetime or None
        A moment near the sounding, with a time zone: the report has day and
        hour only. Without it the time of the sounding stays unknown.

    Returns
    -------
    ReportedLevels
        Heights of the standard levels, and of the ground for mobile stations.

    Raises
    ------
    DataFileError
        If there is no report to read, or several and nothing says which.

    Notes
    -----
    WMO (2019) [1]_, code form FM 35 TEMP and its code tables. Temperatures
    are coded to 0.2 K and taken as the figure stands; dew-point depressions
    above 5 K are coded in whole kelvins.

    References
    ----------
    .. [1] WMO (2019), "Manual on Codes", WMO-No. 306, volume I.1, part A.

    Examples
    --------
    >>> text = "TTAA 53121 99999 99012 15256 24008 00110 14656 24510 85510 05461 25520 70030 03366 26025="
    >>> levels = levels_from_temp(text, "temp.txt")
    >>> levels.pressure / 100, levels.height
    (array([1012., 1000.,  850.,  700.]), array([  nan,  110., 1510., 3030.]))
    """
    parts = _one_report(_parts(text, name), name, station, near)
    found = [part_levels(part.letter, part.day_group, _groups(part)) for part in parts]
    levels = [level for part in found for level in part.levels]
    findings = _unread(text, name)
    findings += [
        Finding(f"{name} {place}", "group not understood", reason, "level or group left out", "wrong")
        for part in found
        for place, reason in part.faults
    ]
    if not levels:
        raise DataFileError(f"{name}: the report of station {parts[0].station} holds no level that can be read (NIL?).")
    filled = _filled(levels, name)
    elevation = next((part.elevation for part in parts if part.elevation is not None), None)
    where = next((part for part in parts if part.longitude is not None), parts[0])
    surface = [level.pressure for level in levels if level.surface]
    return replace(
        filled,
        in_order=False,
        surface_pressure=max(surface) if surface else None,
        elevation=elevation,
        observed=_observed(parts[0].day_group, found, near),
        longitude=where.longitude,
        latitude=where.latitude,
        station=parts[0].station,
        findings=tuple(findings),
    )


def _parts(text: str, name: str) -> list[_Part]:
    """Parts of the text, each with its station and groups."""
    upper = text.upper()
    found = []
    marks = list(PART.finditer(upper))[: MOST_PARTS + 1]
    if len(marks) > MOST_PARTS:
        raise DataFileError(f"{name}: holds more than {MOST_PARTS} parts of reports; cut out the one that is wanted.")
    kinds = {mark.group(1) for mark in marks}
    if not kinds & set(KINDS_READ):
        dropped = " It holds a dropsonde (XX), which does not begin at a station." if "XX" in kinds else ""
        raise DataFileError(f"{name}: no part TTAA, TTBB, TTCC or TTDD of a TEMP report is found.{dropped}")
    for mark, following in zip(marks, [*marks[1:], None], strict=True):
        if mark.group(1) not in KINDS_READ:
            continue
        end = len(upper) if following is None else following.start()
        part = _part(mark.group(1), mark.group(2)[0], upper[mark.end() : end].split("=")[0])
        if part is not None:
            found.append(part)
    if not found:
        raise DataFileError(f"{name}: TEMP parts are found, but none with a day, a station and levels (NIL?).")
    return found


def _figure_words(body: str) -> list[str]:
    """Words up to the first that cannot belong to the report: the heading of the next bulletin, or NIL."""
    words: list[str] = []
    for word in body.split():
        if len(words) >= 2 and re.search(r"[A-Z]", word) and not re.fullmatch(r"[0-9/A-Z]{5}", word):
            break
        words.append(word)
    return words


def _groups(part: _Part) -> list[str]:
    """Groups of a part after its heading."""
    return _figure_words(part.body)[part.heading_words :]


def _part(kind: str, letter: str, body: str) -> _Part | None:
    """Station and day of a part; None when they, or any group, are not there."""
    call = ""
    words = body.split(maxsplit=MOST_HEADING_WORDS)[:MOST_HEADING_WORDS]
    if kind != "TT" and words and not re.fullmatch(r"[0-9/]{5}", words[0]):
        call, words = words[0], words[1:]
    if len(words) < 3 or not re.fullmatch(r"\d{4}[0-9/]", words[0], re.ASCII):
        return None
    day, hour = int(words[0][:2]), int(words[0][2:4])
    if not 1 <= (day - 50 if day > 50 else day) <= 31 or hour > 23:
        return None
    if kind == "TT":
        if not re.fullmatch(r"\d{5}", words[1], re.ASCII):
            return None
        return _Part(letter, words[1], words[0], body, 2)
    try:
        longitude, latitude = position(*(checked_group(word) for word in words[1:3]))
        height = ground_elevation(checked_group(words[4])) if kind == "II" and len(words) > 4 else math.nan
    except GroupError:
        return None
    elevation = 0.0 if kind == "UU" else height
    heading = (5 if kind == "II" else 4) + (1 if call else 0)
    known = None if math.isnan(elevation) else elevation
    return _Part(letter, call or "unnamed", words[0], body, heading, longitude, latitude, known)


def _one_report(parts: list[_Part], name: str, station: str | None, near: datetime | None) -> list[_Part]:
    """The parts of one station and one hour, one of each letter; a later one stands for a correction."""
    stations = list(dict.fromkeys(part.station for part in parts))
    if station is not None:
        parts = [part for part in parts if part.station == station.upper().strip()]
        if not parts:
            raise DataFileError(f"{name}: station {station} is not in it; it holds {', '.join(stations[:8])}.")
    elif len(stations) > 1:
        raise DataFileError(
            f"{name}: holds soundings of {len(stations)} stations ({', '.join(stations[:8])}). Name one with "
            'station = "..." in sounding_at.'
        )
    hours = list(dict.fromkeys(part.day_group[:4] for part in parts))
    chosen = hours[0]
    if len({(int(hour[:2]) % 50, hour[2:]) for hour in hours}) > 1:
        if near is None:
            raise DataFileError(
                f"{name}: holds soundings of {len(hours)} times. Give valid_time or observed_time; the nearest is read."
            )
        moments = {hour: _nearest_moment(hour, near) for hour in hours}
        chosen = min(hours, key=lambda hour: abs((moments[hour] - near).total_seconds()))
    same = [
        part
        for part in parts
        if int(part.day_group[:2]) % 50 == int(chosen[:2]) % 50 and part.day_group[2:4] == chosen[2:]
    ]
    return list({part.letter: part for part in same}.values())


def _nearest_moment(day_and_hour: str, near: datetime) -> datetime:
    """The moment of a day of the month and an hour that is nearest to another."""
    day, hour = int(day_and_hour[:2]), int(day_and_hour[2:4])
    day -= 50 if day > 50 else 0
    near = near.astimezone(UTC)
    days = (near + timedelta(days=shift) for shift in range(-31, 32))
    moments = [date.replace(hour=hour, minute=0, second=0, microsecond=0) for date in days if date.day == day]
    return min(moments, key=lambda moment: abs((moment - near).total_seconds()))


def _observed(day_group: str, found: list[PartLevels], near: datetime | None) -> datetime | None:
    if near is None:
        return None
    nominal = _nearest_moment(day_group, near)
    launched = next((part.launched for part in found if part.launched is not None), None)
    if launched is None or int(launched[:2]) > 23 or int(launched[2:]) > 59:
        return nominal
    same_day = nominal.replace(hour=int(launched[:2]), minute=int(launched[2:]))
    choices = [same_day + timedelta(days=shift) for shift in (-1, 0, 1)]
    return min(choices, key=lambda moment: abs((moment - nominal).total_seconds()))


def _filled(levels: list[TempLevel], name: str) -> ReportedLevels:
    labels = [level.label for level in levels]
    fields: dict[str, Any] = {
        "pressure": np.array([level.pressure for level in levels]),
        "height": np.array([level.height for level in levels]),
        "temperature": np.array([level.temperature for level in levels]),
        "dew_point": np.array([level.dew_point for level in levels]),
        "wind_speed": np.array([level.wind.speed for level in levels]),
        "wind_from": np.array([level.wind.from_direction for level in levels]),
    }
    return replace(blank_levels(name, len(levels), lambda i: labels[i]), **fields)


def _unread(text: str, name: str) -> list[Finding]:
    """Parts of other code forms that the text holds, too."""
    kinds = {mark.group(1) for mark in PART.finditer(text.upper())}
    if not kinds & {"PP", "QQ", "EE"}:
        return []
    return [Finding(name, "winds by height (parts PPAA to PPDD)", "", "not read", "remark")]
