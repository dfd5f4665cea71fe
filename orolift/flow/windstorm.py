"""Conditions that favour a downslope windstorm, each with its source."""

from __future__ import annotations

import math
from dataclasses import dataclass


@dataclass(frozen=True)
class Condition:
    """One condition that favours a downslope windstorm.

    Attributes
    ----------
    key : str
        A word.
    statement : str
        What favours it, a sentence.
    met : bool or None
        Whether it holds; None when what it needs is not known.
    source : str
    """

    key: str
    statement: str
    met: bool | None
    source: str


@dataclass(frozen=True)
class Setting:
    """What the conditions are judged by; None where it is not known.

    Attributes
    ----------
    crest_wind : float or None [m s-1]
        Component across the range, from the crest to 500 m above it.
    angle_off_normal : float or None [rad]
        Between the wind at the crest and the range normal.
    wind_well_above : float or None [m s-1]
        Component across the range 3 km above the crest.
    relief : float or None [m]
        Crest above the lee foot.
    lee_slope : float or None [1]
        Mean fall of the ground from crest to lee foot over the distance.
    nondimensional_height : float or None [1]
        N h / U of the air that crosses.
    inversion_above_crest : float or None [m]
        Height of the strongest inversion above the crest, negative when below; infinite when there is none.
    crest_n, upper_n : float or None [s-1]
        Buoyancy frequency within 500 m of the crest, and from 1 to 4 km above it.
    critical_level_above_crest : float or None [m]
        Infinite when there is none.
    tropopause_factor : float or None [1]
        From `amplification.tropopause_wind_factor`.
    """

    crest_wind: float | None = None
    angle_off_normal: float | None = None
    wind_well_above: float | None = None
    relief: float | None = None
    lee_slope: float | None = None
    nondimensional_height: float | None = None
    inversion_above_crest: float | None = None
    crest_n: float | None = None
    upper_n: float | None = None
    critical_level_above_crest: float | None = None
    tropopause_factor: float | None = None


CONDITIONS = (
    "crest_wind",
    "square_across",
    "little_shear",
    "high_crest",
    "steep_slope",
    "inversion",
    "stable_crest",
    "critical_level",
    "breaking_ridge",
    "tropopause",
)
"""Keys of the conditions, in their order."""


def windstorm_conditions(setting: Setting) -> tuple[Condition, ...]:
    """Conditions that favour a downslope windstorm, and whether they hold.

    Parameters
    ----------
    setting : Setting

    Returns
    -------
    tuple of Condition
        Always all of them, in the same order.

    Notes
    -----
    Colman and Dierking (1992), Wea. Forecasting 7, 49-64, found a wind across the ridge of 15 to 20 m/s, an
    inversion at or just above its top (1500 to 2000 m above sea level) and a critical level at 3000 to 5500 m
    above sea level: taken here as 1.5 to 4 km above the crest. Figures said to be from memory were not read again.

    Examples
    --------
    >>> found = windstorm_conditions(Setting(crest_wind=18.0, relief=700.0))
    >>> [one.met for one in found][:4]
    [True, None, None, False]
    """
    s = setting
    return (
        Condition(
            "crest_wind",
            "The wind across the crest is at least 15 m/s.",
            _at_least(s.crest_wind, 15.0),
            "Colman and Dierking (1992), Wea. Forecasting 7, 49-64",
        ),
        Condition(
            "square_across",
            "The wind at the crest is within 30 degrees of square across the range.",
            _at_most(s.angle_off_normal, math.radians(30.0) + 1e-9),
            "from memory: Brinkmann (1974), Mon. Weather Rev. 102, 592-602",
        ),
        Condition(
            "little_shear",
            "The wind across the range falls, or hardly grows, from the crest to 3 km above it.",
            _ratio_at_most(s.wind_well_above, s.crest_wind, 1.2),
            "AMS Glossary of Meteorology, downslope windstorm; the factor 1.2 is a judgement",
        ),
        Condition(
            "high_crest",
            "The crest stands at least 1 km above the lee.",
            _at_least(s.relief, 1000.0),
            "AMS Glossary of Meteorology, downslope windstorm",
        ),
        Condition(
            "steep_slope",
            "The lee slope is steep: at least 1 in 20 on the whole.",
            _at_least(s.lee_slope, 0.05),
            "AMS Glossary of Meteorology, downslope windstorm; the figure is a judgement",
        ),
        Condition(
            "inversion",
            "An inversion lies within 600 m of the crest.",
            _at_most(None if s.inversion_above_crest is None else abs(s.inversion_above_crest), 600.0),
            "Colman and Dierking (1992), Wea. Forecasting 7, 49-64; 600 m from memory: Brinkmann (1974)",
        ),
        Condition(
            "stable_crest",
            "Air near the crest is more stable than the air above it.",
            _ratio_at_most(s.upper_n, s.crest_n, 0.8),
            "AMS Glossary of Meteorology, downslope windstorm; the factor 0.8 is a judgement",
        ),
        Condition(
            "critical_level",
            "The wind across the range vanishes between 1.5 and 4 km above the crest.",
            _between(s.critical_level_above_crest, 1500.0, 4000.0),
            "Colman and Dierking (1992), Wea. Forecasting 7, 49-64",
        ),
        Condition(
            "breaking_ridge",
            "The ridge is high enough for its wave to break: N h / U is at least 0.85.",
            _at_least(s.nondimensional_height, 0.85),
            "Huppert and Miles (1969), J. Fluid Mech. 35, 481-496",
        ),
        Condition(
            "tropopause",
            "The tropopause sends the wave back so that it strengthens the wind by half or more.",
            _at_least(s.tropopause_factor, 1.5),
            "Klemp and Lilly (1975), J. Atmos. Sci. 32, 320-339; the factor 1.5 is a judgement",
        ),
    )


def _at_least(value: float | None, limit: float) -> bool | None:
    """Whether a value reaches a limit."""
    return None if value is None else bool(value >= limit)


def _at_most(value: float | None, limit: float) -> bool | None:
    """Whether a value stays within a limit."""
    return None if value is None else bool(value <= limit)


def _between(value: float | None, low: float, high: float) -> bool | None:
    """Whether a value lies between two limits."""
    return None if value is None else bool(low <= value <= high)


def _ratio_at_most(value: float | None, other: float | None, limit: float) -> bool | None:
    """Whether a value is at most so many times another one."""
    return None if value is None or other is None else bool(value <= limit * other)
