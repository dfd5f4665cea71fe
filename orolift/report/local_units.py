"""Sentences that lower layers wrote in metric units, said in the units of the page.

Notes, cautions and findings are the same text in the results file, where units never change; only the page restates
them.
"""

from __future__ import annotations

import math
import re
from functools import cache

from orolift.report.quantities import NO_BREAK_SPACE, Kind, Units, displayed, form, number, unit

_NUMBER = r"[+\u2212-]?\d+(?:\.\d+)?"
_MEASURED = re.compile(
    rf"(?<![\w./])(?:(?P<first>{_NUMBER})(?P<joint> to | and | or ))?(?P<last>{_NUMBER})[ \u00a0]"
    r"(?P<unit>(?:°C|K) per km|m/s(?:[ \u00a0]\(\d+[ \u00a0]kt\))?|mm/h|mm|°C|hPa|km/h|km|m)(?![\w/²³])"
)
_HEIGHT_BEFORE = re.compile(r"(?:end at|up to|at least|lowest|depth of) $")
_HEIGHT_AFTER = re.compile(r"^ (?:above|over|deep|high)\b|^ \(|^, \d+ hPa|^ (?:and|or) (?:is )?constant")
_DIFFERENCE_BEFORE = re.compile(r"(?:\bby|falls|rises|drops|more than|less than|differ by|within) $")
_DIFFERENCE_AFTER = re.compile(r"^ (?:warmer|cooler|colder|apart|below the|above the|over \d|against|of )")
_LEAST_FIGURES = {"pressure": 3, "lapse_rate": 2}


def local(text: str, units: Units) -> str:
    """A sentence with its measures in the units of the page.

    Parameters
    ----------
    text : str
        With measures in metric units, each a number, a space and the unit.
    units : 'metric' or 'us'

    Returns
    -------
    str
        Rounded to as many figures as the number was written with, at least two; the text itself for metric units.

    Examples
    --------
    >>> local("The lowest 300 m, 5 km along the slope, between 0 and 20 °C.", "us").replace(NO_BREAK_SPACE, " ")
    'The lowest 980 ft, 3.1 mi along the slope, between 32 and 68 °F.'
    >>> local("It falls by 6.5 °C per km up to 2 km.", "us").replace(NO_BREAK_SPACE, " ")
    'It falls by 3.6 °F per 1000 ft up to 6600 ft.'
    """
    return text if units == "metric" else _local(text, units)


@cache
def _local(text: str, units: Units) -> str:
    return _MEASURED.sub(lambda found: _restated(found, units), text)


def _restated(found: re.Match[str], units: Units) -> str:
    kind, scale, offset = _meaning(found)
    signed = found["last"][0] == "+" and kind == "temperature_difference"
    kind = "temperature_change" if signed else kind
    numbers = [_written(text, kind, scale, offset, units) for text in (found["first"], found["last"]) if text]
    return f"{(found['joint'] or '').join(numbers)}{NO_BREAK_SPACE}{unit(kind, units)}"


def _meaning(found: re.Match[str]) -> tuple[Kind, float, float]:
    """What is measured, and the SI value as scale times the number plus an offset."""
    before, after = found.string[: found.start()], found.string[found.end() :]
    name = found["unit"].partition("(")[0].strip()
    if name == "km":
        tall = _HEIGHT_BEFORE.search(before) or _HEIGHT_AFTER.search(after)
        return ("height" if tall else "distance"), 1e3, 0.0
    if name == "°C":
        apart = _DIFFERENCE_BEFORE.search(before) or _DIFFERENCE_AFTER.search(after) or found["last"][0] == "+"
        return ("temperature_difference", 1.0, 0.0) if apart else ("temperature", 1.0, 273.15)
    return _PLAIN[name]


_PLAIN: dict[str, tuple[Kind, float, float]] = {
    "m": ("height", 1.0, 0.0),
    "m/s": ("wind", 1.0, 0.0),
    "km/h": ("wind", 1.0 / 3.6, 0.0),
    "mm": ("water_depth", 1.0, 0.0),
    "mm/h": ("rain_rate", 1.0 / 3600.0, 0.0),
    "hPa": ("pressure", 100.0, 0.0),
    "°C per km": ("lapse_rate", 1e-3, 0.0),
    "K per km": ("lapse_rate", 1e-3, 0.0),
}


def _written(text: str, kind: Kind, scale: float, offset: float, units: Units) -> str:
    """A number of a sentence in the units of the page."""
    value = float(text.replace("\u2212", "-")) * scale + offset
    shape = form(kind, units)
    decimals = len(text.partition(".")[2])
    if kind.startswith("temperature"):
        return number(value, kind, decimals, units)
    return number(value, kind, _decimals(text, displayed(value, kind, units), kind) - shape.extra_digits, units)


def _decimals(text: str, shown: float, kind: Kind) -> int:
    """Decimals that leave as many figures as the number was written with."""
    figures = max(len(text.strip("+-\u2212").replace(".", "").strip("0")), _LEAST_FIGURES.get(kind, 2))
    if shown == 0.0:
        return 0
    return figures - 1 - math.floor(math.log10(abs(shown)) + 1e-9)
