"""The parts A to D of a report in WMO code form FM 35 TEMP: groups in their order, to levels."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from orolift.sources.temp_groups import (
    GROUP,
    NO_WIND,
    GroupError,
    Wind,
    checked_group,
    level_pressure,
    standard_level_height,
    temperature_and_dew_point,
    wind,
)

if TYPE_CHECKING:
    from collections.abc import Sequence

STANDARD_LEVELS = {
    "A": ("00", "92", "85", "70", "50", "40", "30", "25", "20", "15", "10"),
    "C": ("70", "50", "30", "20", "10"),
}
"""Two figures of the standard levels: 1000, 925, 850, ... 100 hPa; 70, 50, ... 10 hPa."""
LAST_WIND = {
    "A": {"0": 1000, "9": 925, "8": 850, "7": 700, "5": 500, "4": 400, "3": 300, "2": 200, "1": 100},
    "C": {"7": 70, "5": 50, "3": 30, "2": 20, "1": 10},
}
"""Pressure [hPa] of the highest standard level with a wind group, by Id (code table 1734)."""
SECTIONS = frozenset(
    ["21212", "31313", "41414", *(f"{region}{i}{region}{i}{region}" for region in "56" for i in "123456789")]
)
SECTIONS -= {"55555", "66666"}  # these may be levels numbered 55 and 66 at 555 and 666 hPa
"""Groups that open the sections after the levels; 5xxx and 6xxx are regional and national."""
SPECIAL = frozenset({"88", "77", "66"})
"""First figures of tropopauses (88) and strongest winds (77; 66 where it may be stronger above)."""


@dataclass(frozen=True)
class TempLevel:
    """One level of a part: Pa, m above sea level, K, K, m s-1, rad; NaN where missing."""

    label: str
    pressure: float
    height: float = math.nan
    temperature: float = math.nan
    dew_point: float = math.nan
    wind: Wind = NO_WIND
    surface: bool = False


@dataclass
class PartLevels:
    """What a part has given so far."""

    letter: str
    knots: bool
    last_wind: str
    levels: list[TempLevel] = field(default_factory=list)
    faults: list[tuple[str, str]] = field(default_factory=list)
    launched: str | None = None


def part_levels(letter: str, day_group: str, groups: Sequence[str]) -> PartLevels:
    """Levels of one part.

    Parameters
    ----------
    letter : 'A', 'B', 'C' or 'D'
    day_group : str
        YYGGId of the part: 50 is added to the day where winds are in knots.
    groups : sequence of str
        Groups after the station.

    Returns
    -------
    PartLevels
        With the groups that could not be read in `faults`, as (place, reason).
    """
    part = PartLevels(letter, knots=int(day_group[:2]) > 50, last_wind=day_group[4:5])
    read = _standard_part if letter in "AC" else _significant_part
    end = read(part, groups)
    _launch_time(part, groups, end)
    return part


def _standard_part(part: PartLevels, groups: Sequence[str]) -> int:
    """Parts A and C: surface, standard levels, tropopauses, strongest winds."""
    i, passed = 0, -1
    codes = STANDARD_LEVELS[part.letter]
    while i < len(groups) and groups[i] not in SECTIONS:
        code = groups[i][:2]
        if code in SPECIAL:
            i = _special_level(part, groups, i)
        elif code == "99" and i == 0 and part.letter == "A":
            i = _surface(part, groups, i)
        elif code in codes[passed + 1 :]:
            passed = codes.index(code)
            i = _standard_level(part, groups, i, codes[passed + 1 :])
        else:
            part.faults.append((f"group '{groups[i][:12]}'", "not expected at its place"))
            i += 1
    return i


def _surface(part: PartLevels, groups: Sequence[str], i: int) -> int:
    _append(part, "surface", groups[i][2:], groups[i + 1 : i + 2], groups[i + 2 : i + 3], surface=True)
    return i + 3


def _standard_level(part: PartLevels, groups: Sequence[str], i: int, later: Sequence[str]) -> int:
    high = part.letter == "C"
    code = groups[i][:2]
    hectopascals = {"00": 1000, "92": 925}.get(code, int(code) * (1 if high else 10))
    label = f"{hectopascals} hPa"
    windy = _has_wind(part, hectopascals, groups[i + 2 :], later)
    as_it_stands = _opens_level(groups, i + (3 if windy else 2), later)
    if not as_it_stands and _opens_level(groups, i + (2 if windy else 3), later):
        windy = not windy
        reason = "wind group given though Id says none" if windy else "wind group missing"
        part.faults.append((f"part {part.letter}, {label}", reason))
    moving = groups[i + 2 : i + 3] if windy else []
    _append(part, label, None, groups[i + 1 : i + 2], moving, standard=(hectopascals * 100.0, groups[i][2:]))
    return i + (3 if windy else 2)


def _opens_level(groups: Sequence[str], i: int, later: Sequence[str]) -> bool:
    """Whether a level, a section or the end may begin at a group."""
    return i >= len(groups) or groups[i] in SECTIONS or groups[i][:2] in SPECIAL or groups[i][:2] in later


def _has_wind(part: PartLevels, hectopascals: int, rest: Sequence[str], later: Sequence[str]) -> bool:
    """Whether a wind group follows. Id 1 and 2 may mean 100 or 150, 200 or 250 hPa: what follows decides."""
    last = LAST_WIND[part.letter].get(part.last_wind)
    if last is None or hectopascals < last:
        return False
    if part.letter == "C" or hectopascals > last or last > 200:
        return True
    if not rest or rest[0] in SECTIONS or rest[0][:2] in SPECIAL:
        return False
    return rest[0][:2] not in later or _opens_level(rest, 1, later)


def _special_level(part: PartLevels, groups: Sequence[str], i: int) -> int:
    """Tropopause (88) or strongest wind (77, 66); 999 means there is none."""
    code, figures_of_level = groups[i][:2], groups[i][2:]
    if figures_of_level == "999":
        return i + 1
    if code == "88":
        _append(part, "tropopause", figures_of_level, groups[i + 1 : i + 2], groups[i + 2 : i + 3])
        return i + 3
    _append(part, "strongest wind", figures_of_level, [], groups[i + 1 : i + 2])
    shear = groups[i + 2 : i + 3]
    return i + (3 if shear and shear[0].startswith("4") and shear[0] not in SECTIONS else 2)


def _significant_part(part: PartLevels, groups: Sequence[str]) -> int:
    """Parts B and D: significant levels of temperature, and after 21212 of wind."""
    i = _numbered(part, groups, 0, winds=False)
    if i < len(groups) and groups[i] == "21212":
        i = _numbered(part, groups, i + 1, winds=True)
    return i


def _numbered(part: PartLevels, groups: Sequence[str], i: int, *, winds: bool) -> int:
    """Levels numbered 00, 11, 22, ... 99, 11, ..., a group each after the pressure."""
    number = 0 if part.letter == "B" else 1
    kind = "significant wind" if winds else "significant level"
    while i < len(groups) and groups[i] not in SECTIONS:
        code = groups[i][:2]
        if i == 0 or groups[i - 1] == "21212":
            number = 0 if code == "00" else 1
        if code != f"{number}{number}":
            part.faults.append((f"group '{groups[i][:12]}'", f"level {number}{number} expected"))
            i += 1
            continue
        value = groups[i + 1 : i + 2]
        surface = number == 0
        if winds:
            _append(part, kind, groups[i][2:], [], value, surface=surface)
        else:
            _append(part, kind, groups[i][2:], value, [], surface=surface)
        number = number % 9 + 1
        i += 2
    return i


def _append(
    part: PartLevels,
    label: str,
    figures_of_level: str | None,
    air: Sequence[str],
    moving: Sequence[str],
    *,
    standard: tuple[float, str] | None = None,
    surface: bool = False,
) -> None:
    """Add a level from its groups; what cannot be read is a fault and the level is left out."""
    place = f"part {part.letter}, {label}"
    high = part.letter in "CD"
    try:
        air, moving = [checked_group(group) for group in air], [checked_group(group) for group in moving]
        if standard is not None:
            pressure, height = standard[0], standard_level_height(*standard)
        else:
            pressure, height = level_pressure(figures_of_level or "///", high=high), math.nan
        if math.isnan(pressure) or pressure <= 0.0:
            return
        temperature, dew_point = temperature_and_dew_point(air[0]) if air else (math.nan, math.nan)
        blowing = wind(moving[0], knots=part.knots) if moving else NO_WIND
    except GroupError as error:
        part.faults.append((place, str(error)))
        return
    part.levels.append(TempLevel(place, pressure, height, temperature, dew_point, blowing, surface))


def _launch_time(part: PartLevels, groups: Sequence[str], end: int) -> None:
    """Time of launch, 8GGgg after 31313."""
    if end >= len(groups) or groups[end] != "31313":
        return
    for group in groups[end + 1 :]:
        if group in SECTIONS:
            return
        if group[:1] == "8" and GROUP.fullmatch(group) and "/" not in group:
            part.launched = group[1:]
            return
