"""A METAR or SPECI (WMO code form FM 15 and FM 16), decoded by the library metar, to the values of a station."""

from __future__ import annotations

import math
import re
import warnings
from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from typing import TYPE_CHECKING, Any, Literal

from orolift.errors import DataFileError
from orolift.sources.quality import Finding
from orolift.sources.units import to_si

if TYPE_CHECKING:
    from collections.abc import Sequence

LONGEST_REPORT = 1000
"""Characters: reports with long remarks have three hundred."""
T_GROUP_OFF = 1.0
"""Difference [K] between T group and body from which one of them is a slip of the coder: body values are rounded."""

_PRECISE = re.compile(r"T[01]\d{3}([01]\d{3})?", re.ASCII)
_WIND = re.compile(r"(\d{3}|VRB|///)(P?\d{2,3}|//)(G(P?\d{2,3}|//))?(KT|MPS|KMH)?", re.ASCII)
_TREND = frozenset({"TEMPO", "BECMG", "NOSIG", "INTER", "PROB30", "PROB40"})
_CODE = re.compile(r"[A-Z0-9/+\-$]{1,20}", re.ASCII)


@dataclass(frozen=True)
class MetarReport:
    """Values of a METAR in SI.

    Attributes
    ----------
    station : str
        ICAO indicator.
    observed : datetime or None
        With its zone; None when no time near it is known.
    temperature, dew_point : float [K]
    precise : bool
        Whether they come from the T group of the remarks, to 0.1 K, instead of whole degrees.
    qnh : float [Pa]
    altimeter : 'Q' or 'A'
        Whether it was given in whole hectopascals or in hundredths of inches of mercury.
    wind_speed : float [m s-1]
    wind_from : float or None [rad]
        None when calm or variable.
    gust : float or None [m s-1]
    findings : tuple of Finding
    """

    station: str
    observed: datetime | None
    temperature: float
    dew_point: float
    precise: bool
    qnh: float
    altimeter: Literal["Q", "A"]
    wind_speed: float
    wind_from: float | None
    gust: float | None
    findings: tuple[Finding, ...] = ()


def metar_report(text: str, where: str = "metar", *, near: datetime | None = None) -> MetarReport:
    """Values of one METAR or SPECI.

    Parameters
    ----------
    text : str
        One report, with or without the words METAR or SPECI in front.
    where : str
        Key or file, for messages.
    near : datetime or None
        A moment near the observation, with a time zone: the report has day,
        hour and minute only. Without it its time stays unknown.

    Returns
    -------
    MetarReport

    Raises
    ------
    DataFileError
        If it is no report, or lacks temperature, dew point, altimeter setting
        or wind with a unit.

    Notes
    -----
    Only the body up to the trend and the T group of the remarks are handed to
    the library: the rest is not needed, and free text can keep it busy for
    ever. Altimeter settings are rounded down to the whole hectopascal or
    hundredth of an inch (ICAO Annex 3), so that the true one is up to that
    much higher.

    Examples
    --------
    >>> report = metar_report("METAR XVAR 031150Z 24025G38KT 9999 BKN030 15/11 Q1009 NOSIG")
    >>> round(report.temperature - 273.15, 1), report.qnh, round(report.wind_speed, 2)
    (15.0, 100900.0, 12.86)
    """
    words = _words(text, where)
    body, t_group = _needed_words(words, where)
    moment = _moment(body, near, where)
    decoded, unread = _decoded(body, moment, where)
    temperature, dew_point = _celsius(decoded.temp, "temperature", where), _celsius(decoded.dewpt, "dew point", where)
    findings = _findings(decoded, unread, near, where)
    precise = False
    if t_group is not None:
        exact, _ = _decoded([*body, "RMK", t_group], moment, where)
        finer = _celsius(exact.temp, "temperature", where), _celsius(exact.dewpt, "dew point", where)
        precise = max(abs(finer[0] - temperature), abs(finer[1] - dew_point)) <= T_GROUP_OFF
        if precise:
            temperature, dew_point = finer
        else:
            value = f"{t_group}, body {temperature:.0f} and {dew_point:.0f} °C"
            findings.append(Finding(where, "T group contradicts the body", value, "body used", "doubtful"))
    if not precise:
        value = f"{temperature:.0f} and {dew_point:.0f} °C"
        findings.append(
            Finding(where, "temperature and dew point in whole degrees", value, "used as they are", "remark")
        )
    qnh, altimeter = _qnh(decoded, where)
    speed = float(decoded.wind_speed.value("MPS"))
    return MetarReport(
        station=str(decoded.station_id),
        observed=None if near is None else moment,
        temperature=to_si(temperature, "c"),
        dew_point=to_si(dew_point, "c"),
        precise=precise,
        qnh=qnh,
        altimeter=altimeter,
        wind_speed=speed,
        wind_from=None if decoded.wind_dir is None or speed == 0.0 else math.radians(decoded.wind_dir.value()),
        gust=None if decoded.wind_gust is None else float(decoded.wind_gust.value("MPS")),
        findings=tuple(findings),
    )


def _words(text: str, where: str) -> list[str]:
    """Words of the one report in a text."""
    if len(text) > LONGEST_REPORT:
        raise DataFileError(f"{where}: {len(text)} characters; a METAR has at most {LONGEST_REPORT}. Give one report.")
    reports = [part for part in re.split(r"=|(?=\b(?:METAR|SPECI)\b)", text.upper()) if part.strip()]
    if len(reports) != 1:
        raise DataFileError(f"{where}: {len(reports) or 'no'} reports are given; give exactly one METAR or SPECI.")
    return reports[0].split()


def _needed_words(words: Sequence[str], where: str) -> tuple[list[str], str | None]:
    """The body of the report without trend and remarks, and the T group of the remarks."""
    body: list[str] = []
    for word in words:
        if word in _TREND or word in {"RMK", "RMKS"}:
            break
        if not _CODE.fullmatch(word):
            raise DataFileError(f"{where}: '{word[:24]}' is no group of a METAR.")
        body.append(word)
    if not any(word in {"METAR", "SPECI"} for word in body[:1]):
        body.insert(0, "METAR")
    if "NIL" in body:
        raise DataFileError(f"{where}: the report is NIL, it holds no values.")
    winds = [word for word in body if _WIND.fullmatch(word)]
    if winds and not winds[0].endswith(("KT", "MPS", "KMH")):
        raise DataFileError(f"{where}: the wind '{winds[0]}' has no unit; write KT, MPS or KMH after it.")
    start = next((i for i, word in enumerate(words) if word in {"RMK", "RMKS"}), None)
    remarks = list(words[start + 1 :]) if start is not None else []
    return body, next((word for word in remarks if _PRECISE.fullmatch(word)), None)


def _moment(body: Sequence[str], near: datetime | None, where: str) -> datetime:
    """Time of the report; a stand-in with the right day of month when nothing near it is known."""
    group = next((word for word in body[1:5] if re.fullmatch(r"\d{6}Z?", word, re.ASCII)), None)
    if group is None:
        raise DataFileError(f"{where}: no day and time (ddhhmmZ) after the station indicator. Is it a METAR?")
    day, hour, minute = int(group[:2]), int(group[2:4]), int(group[4:6])
    if not 1 <= day <= 31 or hour > 23 or minute > 59:
        raise DataFileError(f"{where}: '{group}' is no day and time of the form ddhhmmZ.")
    if near is None:
        return datetime(2000, 1, day, hour, minute, tzinfo=UTC)
    near = near.astimezone(UTC)
    days = (near + timedelta(days=shift) for shift in range(-31, 32))
    moments = [date.replace(hour=hour, minute=minute, second=0, microsecond=0) for date in days if date.day == day]
    return min(moments, key=lambda moment: abs((moment - near).total_seconds()))


def _decoded(words: Sequence[str], moment: datetime, where: str) -> tuple[Any, str]:
    """The report as the library decodes it, and the groups it does not know."""
    from metar import Metar

    text = " ".join(words)
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("error", RuntimeWarning)
            warnings.filterwarnings("ignore", message="Unparsed groups", category=RuntimeWarning)
            report = Metar.Metar(text, month=moment.month, year=moment.year, strict=False)
    except Exception as error:  # its own warning made an error, and those of its conversions
        reason = " ".join(str(error).split())[:160]
        raise DataFileError(f"{where}: '{text[:80]}' cannot be decoded ({reason}).") from error
    if report.wind_speed is None:
        raise DataFileError(f"{where}: no wind is given. Give the values of the station by hand as station.")
    return report, " ".join(report._unparsed_groups)  # noqa: SLF001 (the library tells them in no other way)


def _celsius(value: Any, name: str, where: str) -> float:
    """Temperature in degrees Celsius, if it is there and possible."""
    if value is None:
        raise DataFileError(f"{where}: the {name} is missing. Give the values of the station by hand as station.")
    celsius = float(value.value("C"))
    if not -80.0 <= celsius <= 60.0:
        raise DataFileError(f"{where}: the {name} of {celsius:g} °C is outside -80 to 60 °C.")
    return celsius


def _qnh(decoded: Any, where: str) -> tuple[float, Literal["Q", "A"]]:
    """Altimeter setting in Pa and the form it was given in."""
    if decoded.press is None:
        raise DataFileError(
            f"{where}: no altimeter setting (Q1013 or A2992) is given. Give the station's values by hand as station."
        )
    inches = decoded.press.string().endswith("inches")
    # The library's own factor from inches is rounded, so its inches are converted here.
    value = to_si(float(decoded.press.value("IN")), "inhg") if inches else float(decoded.press.value("HPA")) * 100.0
    if not 86000.0 <= value <= 109000.0:
        raise DataFileError(f"{where}: the altimeter setting of {value / 100:.0f} hPa is outside 860 to 1090 hPa.")
    return value, "A" if inches else "Q"


def _findings(decoded: Any, unread: str, near: datetime | None, where: str) -> list[Finding]:
    place = f"{where} {decoded.station_id}"
    found = []
    speed = float(decoded.wind_speed.value("MPS"))
    if decoded.wind_dir is None and speed > 0.0:
        value, done = f"{speed:.1f} m/s", "taken from wind_from_deg"
        found.append(Finding(place, "wind direction variable or missing", value, done, "doubtful"))
    if unread:
        found.append(Finding(place, "groups not understood", unread[:60], "passed over", "doubtful"))
    if near is None:
        found.append(Finding(place, "time of the report not known to the month", "", "age not checked", "remark"))
    return found
