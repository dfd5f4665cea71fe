"""Unit suffixes of keys and column names, and their way to SI.

A key is a quantity followed by its unit: ``temperature_c``, ``wind_kt``. Each
quantity may be given in any unit of its kind; this table is the only place
that knows the factors.
"""

from __future__ import annotations

import difflib
from dataclasses import dataclass
from typing import TYPE_CHECKING, TypeVar

if TYPE_CHECKING:
    from collections.abc import Iterable

    import numpy as np
    from numpy.typing import NDArray

Number = TypeVar("Number", float, "NDArray[np.float64]")


@dataclass(frozen=True)
class Unit:
    """One unit: SI value = value x `factor` + `offset`.

    Attributes
    ----------
    kind : str
        What it measures; units of one kind may replace each other.
    factor, offset : float
    """

    kind: str
    factor: float
    offset: float = 0.0


# Factors: BIPM SI brochure (2019) for C; NIST SP 811 (2008) Appendix B for F, ft, mi, kt, mph, in, inHg (0 degC).
UNITS: dict[str, Unit] = {
    "c": Unit("temperature", 1.0, 273.15),
    "f": Unit("temperature", 5.0 / 9.0, 273.15 - 32.0 * 5.0 / 9.0),
    "m": Unit("height", 1.0),
    "ft": Unit("height", 0.3048),
    "km": Unit("distance", 1000.0),
    "mi": Unit("distance", 1609.344),
    "ms": Unit("wind", 1.0),
    "kt": Unit("wind", 1852.0 / 3600.0),
    "kmh": Unit("wind", 1.0 / 3.6),
    "mph": Unit("wind", 0.44704),
    "hpa": Unit("pressure", 100.0),
    "inhg": Unit("pressure", 3386.389),
    "deg": Unit("angle", 3.141592653589793 / 180.0),
    "percent": Unit("share", 0.01),
    "g_per_kg": Unit("mixing ratio", 1.0e-3),
    "c_per_km": Unit("lapse", 1.0e-3),
    "mm": Unit("water depth", 1.0),  # kg m-2
    "mm_per_h": Unit("rain rate", 1.0 / 3600.0),  # kg m-2 s-1
    "in_per_h": Unit("rain rate", 25.4 / 3600.0),
    "s": Unit("time", 1.0),
    "h": Unit("duration", 3600.0),
    "in": Unit("water depth", 25.4),
    "f_per_1000ft": Unit("lapse", 5.0 / 9.0 / 304.8),
}


def suffix_of(key: str) -> tuple[str, str] | None:
    """Quantity and unit suffix of a key, or None when it ends in no known unit.

    Parameters
    ----------
    key : str

    Returns
    -------
    (str, str) or None

    Examples
    --------
    >>> suffix_of("lapse_rate_c_per_km"), suffix_of("wind_from_deg"), suffix_of("name")
    (('lapse_rate', 'c_per_km'), ('wind_from', 'deg'), None)
    """
    for suffix in sorted(UNITS, key=len, reverse=True):
        if key.endswith(f"_{suffix}"):
            return key[: -len(suffix) - 1], suffix
    return None


def alternatives(key: str) -> list[str]:
    """Every key that says the same quantity in another unit of the same kind.

    Examples
    --------
    >>> alternatives("temperature_c")
    ['temperature_f']
    """
    parts = suffix_of(key)
    if parts is None:
        return []
    stem, suffix = parts
    kind = UNITS[suffix].kind
    return [f"{stem}_{other}" for other, unit in UNITS.items() if unit.kind == kind and other != suffix]


def to_si(value: Number, suffix: str) -> Number:
    """Value in SI of a number given in the unit of `suffix`."""
    unit = UNITS[suffix]
    return value * unit.factor + unit.offset


def converted(value: float, suffix: str, wanted: str, *, difference: bool = False) -> float:
    """Value in the unit `wanted` of a number given in the unit `suffix`; of a difference, without any offset.

    Examples
    --------
    >>> round(converted(50.0, "f", "c"), 9)
    10.0
    >>> round(converted(1.8, "f", "c", difference=True), 9)
    1.0
    """
    if difference:
        return value * UNITS[suffix].factor / UNITS[wanted].factor
    si: float = to_si(value, suffix)
    unit = UNITS[wanted]
    return (si - unit.offset) / unit.factor


def nearest(word: str, choices: Iterable[str]) -> str | None:
    """The choice most like `word`, or None when nothing is alike.

    Examples
    --------
    >>> nearest("temprature_c", ["temperature_c", "pressure_hpa"])
    'temperature_c'
    """
    found = difflib.get_close_matches(word, list(choices), n=1, cutoff=0.6)
    return found[0] if found else None
