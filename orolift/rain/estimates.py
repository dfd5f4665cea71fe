"""Simple estimates of the rain on the windward slope of a line, to hold crossing and map against."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.rain.laminar import NODAL_PRESSURE, laminar_rain
from orolift.rain.line import line_cosine, steps_across
from orolift.rain.upslope import drying_ratio_bound, drying_ratio_upslope

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing
    from orolift.rain.line import LineRain
    from orolift.rain.parameters import ColumnRain

SHALLOWEST_VAPOUR = 100.0  # [m] least vapour height that the drying ratios are worked out for
STEEPEST = 5.0  # largest ratio of lapse rates, the same
LEAST_SLOPE = 10.0  # [m] of relief below which there is no slope to speak of
CLEAR_OF_NODE = 2.0e3  # [Pa] the crest must lie below the level surface by this much


@dataclass(frozen=True)
class SimpleEstimates:
    """Crossing, map and textbook estimates beside each other. The background rain is in none of them.

    Attributes
    ----------
    relief : float [m]
        Crest of the line above the height from which on the air crosses and condenses.
    slope_length : float [m]
        From where the line first rises above the air that stays, to the crest, across the range.
    crossing_rate, map_rate : float [kg m-2 s-1]
        Mean over that slope.
    upslope_rate : float [kg m-2 s-1]
        If all the vapour rose with the ground and fell where it condensed: raw upslope.
    laminar_rate : float or None [kg m-2 s-1]
        From the water balance of layers between streamlines that keep their share of the pressure; None where the
        crest is too low or too high for it.
    crossing_drying, map_drying : float [1]
        Rain on the line over the vapour that flows in above the height from which on air crosses.
    upslope_drying : float [1]
        Of the raw upslope estimate; may exceed 1.
    largest_drying : float [1]
        If all the air were lifted by the relief, saturated, and lost what condenses: exponential bound.
    """

    relief: float
    slope_length: float
    crossing_rate: float
    map_rate: float
    upslope_rate: float
    laminar_rate: float | None
    crossing_drying: float
    map_drying: float
    upslope_drying: float
    largest_drying: float


def simple_estimates(
    crossing: Crossing, column: ColumnRain, on_line: LineRain, *, reference: float, north: float = 0.0
) -> SimpleEstimates:
    """Crossing and map beside raw upslope, the exponential drying bound and the laminar estimate.

    Parameters
    ----------
    crossing : Crossing
    column : ColumnRain
        Of the air above `reference`.
    on_line : LineRain
    reference : float [m above sea level]
        Lowest air that crosses.
    north : float [rad]
        Bearing of true north on the grid of the map.

    Returns
    -------
    SimpleEstimates

    Notes
    -----
    Raw upslope over the slope: uplift sensitivity times wind across the range times relief over length
    (`orolift.rain.upslope`). The laminar estimate (`orolift.rain.laminar`) has the form of WMO-No. 1045 (2009)
    and is one for this situation: it is no probable maximum precipitation. Both let all that condenses fall on
    the slope; what drifts over the crest and what evaporates makes the rain smaller.
    """
    p, shape = column.parameters, crossing.features
    wind = p.wind_speed * float(np.cos(p.bearing - north - crossing.flow.normal))
    relief = max(shape.crest - reference - column.dry_lift, 0.0)
    start = _slope_start(crossing, reference)
    cosine = line_cosine(crossing)
    length = max((shape.crest_distance - start) * cosine, 1.0)
    steps = steps_across(crossing)
    slope = (crossing.distance > start) & (crossing.distance <= shape.crest_distance)
    flux = column.column_vapour * max(wind, 1e-3)
    ratio = min(p.uplift_sensitivity * p.vapour_height / column.column_vapour, STEEPEST)
    depth = max(p.vapour_height, SHALLOWEST_VAPOUR)
    return SimpleEstimates(
        relief=relief,
        slope_length=length,
        crossing_rate=float((crossing.rain.rate * steps)[slope].sum() / length),
        map_rate=float((np.nan_to_num(on_line.rate) * steps)[slope].sum() / length),
        upslope_rate=p.uplift_sensitivity * max(wind, 0.0) * relief / length,
        laminar_rate=_laminar(crossing, reference, length),
        crossing_drying=crossing.rain.total / flux,
        map_drying=on_line.total / flux,
        upslope_drying=float(drying_ratio_upslope(relief, depth, ratio)),
        largest_drying=float(drying_ratio_bound(relief, depth, ratio)),
    )


def _slope_start(crossing: Crossing, reference: float) -> float:
    """Where, going down from the crest, the line first reaches the air that stays or the base [m]."""
    line, shape = crossing.transect, crossing.features
    upwind = line.distance <= shape.crest_distance
    low = upwind & (line.elevation <= max(reference, shape.base) + 1.0)
    return float(line.distance[low].max()) if low.any() else shape.base_distance


def _laminar(crossing: Crossing, reference: float, length: float) -> float | None:
    """The laminar estimate [kg m-2 s-1], where it can be made."""
    crest = crossing.features.crest
    if crest < reference + LEAST_SLOPE:
        return None
    air = crossing.incoming
    pressure = float(np.exp(np.interp(crest, air.height, np.log(air.pressure))))
    if pressure < NODAL_PRESSURE + CLEAR_OF_NODE:
        return None
    return laminar_rain(air, crossing.flow.normal, reference, crest, length)
