"""Options of `orolift compare` that are little languages: thresholds, sectors, the rule of the onset test."""

from __future__ import annotations

import math
import re
from typing import TYPE_CHECKING

import numpy as np

from orolift.errors import CaseError

if TYPE_CHECKING:
    from collections.abc import Sequence

    from orolift.cli.comparing import Asked
    from orolift.crossing.onset import OnsetRule
    from orolift.sources.observed_places import Placed
    from orolift.spread.compared import Event
    from orolift.spread.estimates import Estimates

SECTOR_HALF_WIDTH = math.radians(60.0)
"""Half the sector of lee wind that counts as from over the range, where none is given; a judgement."""
EVENT = re.compile(r"\s*([a-z][a-z0-9_]*)\s*(>=|<=|>|<)\s*([-+]?\d+(?:\.\d+)?)\s*")


def rule_of(asked: Asked, estimates: Sequence[Estimates], put: Placed) -> tuple[OnsetRule, list[str]]:
    """The rule of the onset test, and notes on what is missing for it.

    Parameters
    ----------
    asked : Asked
    estimates : sequence of Estimates
    put : Placed

    Returns
    -------
    OnsetRule, list of str
    """
    from orolift.crossing.onset import OnsetRule

    notes = []
    sector: tuple[float, float] | None = None
    if asked.sector is not None:
        sector = sector_of(asked.sector)
    elif np.isfinite(put.seen.wind_from).any():
        bearings = np.concatenate([one.wind_from for one in estimates])
        bearings = bearings[np.isfinite(bearings)]
        upwind = math.atan2(float(np.sin(bearings).sum()), float(np.cos(bearings).sum()))
        sector = ((upwind - SECTOR_HALF_WIDTH) % math.tau, (upwind + SECTOR_HALF_WIDTH) % math.tau)
    else:
        notes.append("No wind direction was observed: the onset test asks for potential temperature and speed only.")
    if not np.isfinite(put.seen.crest_temperature).any():
        notes.append(
            "No crest_temperature_c is in the file: the onset test is made on the estimate only. With it, and "
            "crest_pressure_hpa or crest_elevation_m, it is made on the observations too."
        )
    elif not (np.isfinite(put.seen.crest_pressure).any() or np.isfinite(put.seen.crest_elevation).any()):
        notes.append(
            "crest_temperature_c has neither crest_pressure_hpa nor crest_elevation_m beside it: the onset test needs "
            "one of them and is made on the estimate only."
        )
    return OnsetRule(asked.offset, sector, asked.least_wind), notes


def sector_of(text: str) -> tuple[float, float]:
    """Sector of wind directions [rad] written as FROM-TO in degrees.

    Examples
    --------
    >>> [round(math.degrees(x)) for x in sector_of("330-40")]
    [330, 40]
    """
    found = re.fullmatch(r"\s*(\d+(?:\.\d+)?)\s*-\s*(\d+(?:\.\d+)?)\s*", text)
    if found is None or not all(0.0 <= float(x) <= 360.0 for x in found.groups()):
        raise CaseError(f"--onset-sector '{text}': write two directions of 0 to 360 degrees, clockwise, as in 190-280.")
    start, end = (math.radians(float(x)) for x in found.groups())
    return start, end


def event_of(text: str) -> Event:
    """Event of a text such as ``gust_ms >= 20``.

    Examples
    --------
    >>> event = event_of("relative_humidity_percent <= 25")
    >>> event.quantity, event.threshold, event.above
    ('relative_humidity', 0.25, False)
    """
    from orolift.sources.units import suffix_of, to_si
    from orolift.spread.compared import Event
    from orolift.spread.estimates import QUANTITIES

    found = EVENT.fullmatch(text)
    parts = None if found is None else suffix_of(found[1])
    usual = {"temperature": "c", "dew_point": "c", "relative_humidity": "percent", "wind": "ms", "gust": "ms"}
    usual |= {"pressure": "hpa", "rain_rate": "mm_per_h"}
    quantity = next((name for name in QUANTITIES if parts is not None and name == parts[0] and name in usual), None)
    if found is None or parts is None or quantity is None or not _same_kind(parts[1], usual[quantity]):
        names = ", ".join(f"{name}_{unit}" for name, unit in usual.items())
        raise CaseError(
            f"--event '{text}': write a quantity with its unit, >= or <=, and a number. Quantities: {names}."
        )
    return Event(quantity, to_si(float(found[3]), parts[1]), found[2] in {">=", ">"}, text.strip())


def _same_kind(unit: str, usual: str) -> bool:
    from orolift.sources.units import UNITS

    return UNITS[unit].kind == UNITS[usual].kind
