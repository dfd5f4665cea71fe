"""Findings of quality control: what is doubtful about the incoming air, where, and what was done about it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from orolift.air.standard import standard_pressure

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Sequence
    from datetime import datetime

    from numpy.typing import NDArray

Severity = Literal["remark", "doubtful", "wrong"]
"""Remark: worth knowing. Doubtful: used, with care. Wrong: not used as it stands."""

STALE_HOURS = 3.0
"""Age of a report or sounding [h] from which it is doubtful: a judgement, half the usual spacing of soundings."""
VERY_STALE_HOURS = 12.0
"""Age [h] from which it hardly speaks of the air at the valid time: a judgement, the spacing of most soundings."""
CLOCK_HOURS = 1.0
"""Hours by which an observation may lie in the future before that is said: slack for clocks and rounded hours."""
HOT = 318.15
"""Temperature of a station [K], 45 °C, from which Fahrenheit under a Celsius key is suspected (a judgement)."""
PRESSURE_OFF = 3500.0
"""Departure from the standard atmosphere at the elevation [Pa] that is said: sea-level pressures of 978 to 1048 hPa are
within it, and few days are outside (a judgement)."""
SHOWN = 5
"""Findings of one kind and one severity that are listed one by one; the rest are counted."""


@dataclass(frozen=True)
class Finding:
    """One thing quality control has seen.

    Attributes
    ----------
    place : str
        File and line, level, station or key.
    what : str
        What is wrong or unusual, without the value.
    value : str
        The value with its unit, and what it was compared with.
    done : str
        What was done: "left out", "used as it is", ...
    severity : 'remark', 'doubtful' or 'wrong'
    """

    place: str
    what: str
    value: str
    done: str
    severity: Severity


def sentence(finding: Finding) -> str:
    """The finding as one sentence.

    Examples
    --------
    >>> sentence(Finding("s.csv line 4", "temperature spike", "31.0 °C", "left out, interpolated", "wrong"))
    's.csv line 4: temperature spike (31.0 °C): left out, interpolated.'
    """
    value = f" ({finding.value})" if finding.value else ""
    return f"{finding.place}: {finding.what}{value}: {finding.done}."


def cautions(findings: Iterable[Finding]) -> tuple[str, ...]:
    """Sentences of the findings that are more than remarks, wrong ones first.

    Examples
    --------
    >>> cautions([Finding("a", "b", "", "c", "remark"), Finding("d", "e", "1 m", "f", "doubtful")])
    ('d: e (1 m): f.',)
    """
    serious = [finding for finding in findings if finding.severity != "remark"]
    return tuple(sentence(finding) for finding in sorted(serious, key=lambda finding: finding.severity == "doubtful"))


def table_lines(findings: Sequence[Finding], width: int = 100) -> list[str]:
    """Findings as the lines of a table for the terminal.

    Parameters
    ----------
    findings : sequence of Finding
    width : int
        Widest a cell may become; longer ones end in an ellipsis.

    Returns
    -------
    list of str
        A header and a line each; nothing for no findings.

    Examples
    --------
    >>> print(*table_lines([Finding("line 4", "spike", "31 °C", "left out", "wrong")]), sep=chr(10))
    severity  place   finding  value  what was done
    wrong     line 4  spike    31 °C  left out
    """
    if not findings:
        return []
    rows: list[tuple[str, ...]] = [("severity", "place", "finding", "value", "what was done")]
    rows += [(one.severity, one.place, one.what, one.value, one.done) for one in findings]
    rows = [tuple(cell if len(cell) <= width else f"{cell[: width - 1]}…" for cell in row) for row in rows]
    wide = [max(len(row[i]) for row in rows) for i in range(5)]
    return ["  ".join(cell.ljust(size) for cell, size in zip(row, wide, strict=True)).rstrip() for row in rows]


def shortened(findings: Sequence[Finding]) -> tuple[Finding, ...]:
    """The same findings, the first few of each kind in full and the rest of it as one line.

    Examples
    --------
    >>> many = [Finding(f"line {i}", "spike", "", "left out", "wrong") for i in range(9)]
    >>> [finding.place for finding in shortened(many)][-2:]
    ['line 4', '4 more places, the last line 8']
    """
    kinds = list(dict.fromkeys((finding.what, finding.severity) for finding in findings))
    out: list[Finding] = []
    for what, severity in kinds:
        same = [finding for finding in findings if (finding.what, finding.severity) == (what, severity)]
        if len(same) <= SHOWN + 1:
            out += same
            continue
        out += same[:SHOWN]
        last = same[-1]
        place = f"{len(same) - SHOWN} more places, the last {last.place}"
        out.append(Finding(place, what, last.value, last.done, severity))
    return tuple(out)


def at_levels(
    wrong: NDArray[np.bool_],
    label: Callable[[int], str],
    what: str,
    value: Callable[[int], str],
    done: str,
    severity: Severity,
) -> list[Finding]:
    """One finding for each level that is marked.

    Parameters
    ----------
    wrong : ndarray of bool (nz,)
    label, value : callable
        Place and value of a level, from its number.
    what, done, severity
        As in `Finding`.

    Returns
    -------
    list of Finding
    """
    return [Finding(label(int(i)), what, value(int(i)), done, severity) for i in np.flatnonzero(wrong)]


def age_findings(
    observed: datetime | None,
    valid: datetime | None,
    place: str,
    now: datetime | None = None,
    *,
    done: str = "used as it is",
) -> list[Finding]:
    """What is to be said about the time of an observation.

    Parameters
    ----------
    observed : datetime or None
        With a time zone. None: it is not known, and nothing is said.
    valid : datetime or None
        For which the crossing is wanted, with a time zone.
    place : str
    now : datetime or None
        The clock; given, an observation from the future is wrong.
    done : str
        What is done about an old one.

    Returns
    -------
    list of Finding

    Examples
    --------
    >>> from datetime import UTC, datetime
    >>> noon, six = datetime(2026, 11, 3, 12, tzinfo=UTC), datetime(2026, 11, 3, 6, tzinfo=UTC)
    >>> [finding.value for finding in age_findings(six, noon, "sounding")]
    ['6.0 h before valid_time']
    """
    if observed is None:
        return []
    found = []
    if now is not None and (ahead := (observed - now).total_seconds() / 3600.0) > CLOCK_HOURS:
        found.append(
            Finding(
                place,
                "observed in the future",
                f"{observed:%Y-%m-%d %H:%M} UTC, {ahead:.0f} h ahead",
                "used as it is; check the date",
                "wrong",
            )
        )
    if valid is None:
        return found
    hours = (valid - observed).total_seconds() / 3600.0
    if abs(hours) < STALE_HOURS:
        return found
    what = "older than the valid time" if hours > 0 else "observed after the valid time"
    size = f"{abs(hours):.1f} h" if abs(hours) < 100.0 else f"{abs(hours) / 24.0:.0f} days"
    value = f"{size} {'before' if hours > 0 else 'after'} valid_time"
    found.append(Finding(place, what, value, done, "doubtful" if abs(hours) < VERY_STALE_HOURS else "wrong"))
    return found


def station_findings(
    elevation: float, pressure: float, temperature: float, dew_point: float, wind_speed: float, place: str
) -> list[Finding]:
    """Units that seem to be mixed up in the values of one station.

    Parameters
    ----------
    elevation : float [m above sea level]
    pressure : float [Pa]
        At the station.
    temperature, dew_point : float [K]
    wind_speed : float [m s-1]
    place : str

    Returns
    -------
    list of Finding

    Examples
    --------
    >>> [finding.what for finding in station_findings(3281.0, 89900.0, 288.0, 280.0, 5.0, "Upper Tarn")]
    ['pressure does not fit the elevation: feet taken for metres?']
    """
    found = []
    off = pressure - float(standard_pressure(elevation))
    if abs(off) > PRESSURE_OFF:
        found.append(
            Finding(
                place,
                f"pressure does not fit the elevation{_pressure_cause(elevation, pressure)}",
                f"{pressure / 100:.1f} hPa at {elevation:.0f} m, {abs(off) / 100:.0f} hPa "
                f"{'above' if off > 0 else 'below'} standard",
                "used as it is",
                "doubtful",
            )
        )
    if temperature > HOT:
        found.append(
            Finding(
                place,
                "unusually hot: Fahrenheit taken for Celsius?",
                f"{temperature - 273.15:.1f} °C",
                "used as it is",
                "doubtful",
            )
        )
    if temperature - dew_point > 45.0:
        found.append(
            Finding(
                place,
                "unusually dry: is the dew point right?",
                f"dew point {temperature - dew_point:.0f} °C below the temperature",
                "used as it is",
                "doubtful",
            )
        )
    if wind_speed > 50.0:
        found.append(
            Finding(place, "unusually windy: is the unit right?", f"{wind_speed:.0f} m/s", "used as it is", "doubtful")
        )
    return found


def _pressure_cause(elevation: float, pressure: float) -> str:
    """Likely cause of a pressure that does not fit."""
    if abs(float(standard_pressure(elevation * 0.3048)) - pressure) < PRESSURE_OFF:
        return ": feet taken for metres?"
    if abs(elevation) < 2700.0 and abs(float(standard_pressure(elevation / 0.3048)) - pressure) < PRESSURE_OFF:
        return ": metres taken for feet?"
    if abs(pressure - 101325.0) < PRESSURE_OFF and elevation > 300.0:
        return ": reduced to sea level?"
    return ""
