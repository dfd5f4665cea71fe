"""What went in: the incoming air, the range, the options."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import column_vapour, interpolated
from orolift.air.humidity import dew_point_from_mixing_ratio, relative_humidity_from_mixing_ratio
from orolift.report.quantities import Amount, Kind, Units, from_displayed
from orolift.report.spans import Spans, ranged
from orolift.report.story import removal_words

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing
    from orolift.report.words import Words

LEVELS: dict[Units, tuple[float, ...]] = {
    "metric": (500.0, 1000.0, 1500.0, 2000.0, 3000.0, 4000.0, 5000.0, 7000.0, 9000.0),
    "us": (1000.0, 3000.0, 5000.0, 7000.0, 10e3, 13e3, 16e3, 23e3, 30e3),
}
"""Heights above sea level, in shown units, at which the incoming air is listed with its ground."""


PROFILE = frozenset({"measured", "model", "between stations", "surface report blended in"})
"""Origins of levels above the ground that are known from more than a lapse rate."""


@dataclass(frozen=True)
class Fact:
    """A name and what it is."""

    name: str
    words: Words


@dataclass(frozen=True)
class FactGroup:
    """Facts that belong together."""

    name: str
    facts: tuple[Fact, ...]


@dataclass(frozen=True)
class Level:
    """The incoming air at one height.

    Attributes
    ----------
    height, pressure, temperature, dew_point, relative_humidity : Amount
    wind_from, wind : Amount
    origin : str
        Where it comes from.
    """

    height: Amount
    pressure: Amount
    temperature: Amount
    dew_point: Amount
    relative_humidity: Amount
    wind_from: Amount
    wind: Amount
    origin: str


@dataclass(frozen=True)
class Inputs:
    """Everything that went in, as it was understood.

    Attributes
    ----------
    heading : Words
    groups : tuple of FactGroup
    levels : tuple of Level
    case_text : str or None
        The case file, word for word.
    """

    heading: Words
    groups: tuple[FactGroup, ...]
    levels: tuple[Level, ...]
    case_text: str | None


def inputs(
    spans: Spans, bearing: float, freezing_level: float, case_text: str | None, units: Units = "metric"
) -> Inputs:
    """What went in.

    Parameters
    ----------
    spans : Spans
    bearing : float [rad]
        Direction the wind comes from.
    freezing_level : float [m]
    case_text : str or None
    units : 'metric' or 'us'
        In which the heights listed are round.

    Returns
    -------
    Inputs
    """
    crossing = spans.crossing
    levels = _levels(crossing, units)
    ground = levels[0]
    heading: Words = (
        _source(crossing.incoming.origin),
        ": ",
        *ranged(ground.temperature, spans.of("temperature")),
        " and ",
        *ranged(ground.relative_humidity, spans.of("relative_humidity")),
        " humidity at ",
        ground.height,
    )
    groups = (
        _air_facts(spans, ground, freezing_level),
        _range_facts(crossing, bearing),
        _flow_facts(spans),
        _options(crossing),
    )
    return Inputs(heading=heading, groups=groups, levels=levels, case_text=case_text)


def _source(origin: tuple[str, ...]) -> str:
    """What the incoming air comes from, in a few words."""
    if not PROFILE & set(origin):
        return "A station report, continued upward"
    if "between stations" in origin:
        return f"{origin.count('station')} stations at different heights"
    fresh = " under a fresh surface report" if "surface report blended in" in origin else ""
    if "model" in origin:
        return f"{origin.count('model')} levels of a model column{fresh}"
    return f"{origin.count('measured')} measured levels{fresh}"


def _air_facts(spans: Spans, ground: Level, freezing_level: float) -> FactGroup:
    crossing = spans.crossing
    column = Amount(float(column_vapour(crossing.incoming)), "water_depth", 1)
    carried = Amount(crossing.water.column_vapour_flux, "vapour_flux")
    facts = (
        Fact("Ground", (ground.height,)),
        Fact("Pressure", ranged(ground.pressure, spans.of("pressure"))),
        Fact("Temperature", ranged(ground.temperature, spans.of("temperature"))),
        Fact("Dew point", ranged(ground.dew_point, spans.of("dew_point"))),
        Fact("Humidity", (*ranged(ground.relative_humidity, spans.of("relative_humidity")), " over liquid water")),
        Fact("Wind", (*ranged(ground.wind, spans.of("wind")), " from ", ground.wind_from)),
        Fact(
            "Wind across the crest", ranged(Amount(crossing.flow.crest_wind, "wind", 1), spans.of("cross_range_wind"))
        ),
        Fact("Freezing level", ranged(Amount(freezing_level, "height"), spans.of("freezing_level"))),
        Fact("Vapour in the column", (*ranged(column, spans.of("column_vapour")), " of water")),
        Fact("Vapour carried along the line", ranged(carried, spans.of("column_vapour_flux"))),
    )
    return FactGroup("Incoming air (at its ground)", facts)


def _range_facts(crossing: Crossing, bearing: float) -> FactGroup:
    shape, line = crossing.features, crossing.transect
    length = float(line.distance[-1] - line.distance[0])

    def at(height: float, distance: float) -> Words:
        return (Amount(height, "height"), " at ", Amount(distance + line.origin, "distance", 1))

    facts = (
        Fact("Line runs from", (Amount(bearing, "bearing"),)),
        Fact("Length", (Amount(length, "distance", 1), f", {line.distance.size} points")),
        Fact("Base", at(shape.base, shape.base_distance)),
        Fact("Crest", at(shape.crest, shape.crest_distance)),
        Fact("Lee foot", at(shape.lee_foot, shape.lee_foot_distance)),
        Fact("Half width", (Amount(shape.half_width, "distance", 1),)),
    )
    return FactGroup("Range", facts)


def _flow_facts(spans: Spans) -> FactGroup:
    """How the range and the column stand to each other."""
    flow = spans.crossing.flow

    def said(name: str, kind: Kind, digits: int = 0) -> Words:
        return ranged(Amount(getattr(flow, name), kind, digits), spans.of(name))

    facts = [
        Fact("Range normal, upwind", (Amount((flow.normal + math.pi) % (2.0 * math.pi), "bearing"),)),
        Fact("Stability N, base to crest", said("stability", "stability", 4)),
        Fact("N h/U", (*said("nondimensional_height", "plain", 2), f", {flow.regime}")),
        Fact("Dividing height (c = 1)", said("dividing_height", "height")),
        Fact("Blocked top", ranged(Amount(flow.blocked_top, "height"), spans.blocked_top())),
        Fact("Goes round", (*said("going_round_share", "share"), f", {flow.going_round_source}")),
        Fact("Pressure fall to the lee", said("pressure_difference", "pressure_difference", 1)),
    ]
    if flow.rossby_number is not None and flow.deformation_radius is not None:
        facts.append(Fact("Rossby number", said("rossby_number", "plain", 1)))
        facts.append(Fact("Deformation radius", said("deformation_radius", "distance")))
    if flow.trapped_wavelength is not None:
        long = Amount(flow.trapped_wavelength, "distance")
        facts.append(Fact("Trapped lee waves", (long, " long, in the answer alone")))
    if flow.critical_level is not None:
        facts.append(Fact("Critical level", said("critical_level", "height", -1)))
    return FactGroup("Flow", tuple(facts))


def _options(crossing: Crossing) -> FactGroup:
    settings = crossing.settings

    def number(value: object) -> float:
        return float(np.asarray(value, dtype=np.float64))

    freezing: Words = ("none",)
    if settings.freezing:
        freezing = (
            "ice share from none at ",
            Amount(273.15, "temperature"),
            " to all at ",
            Amount(253.15, "temperature"),
        )
    return FactGroup(
        "Options",
        (
            Fact("Rain and snow", removal_words(crossing)),
            Fact("Critical N h/U", (Amount(number(settings.critical_value), "plain", 2),)),
            Fact("Mixed before the range", ("lowest ", Amount(settings.inflow_depth, "height"), " of unblocked air")),
            Fact("Mixed at a site", ("lowest ", Amount(number(settings.mixing_depth), "height"))),
            Fact("Roughness length", (Amount(settings.roughness, "height", 2),)),
            Fact("Heat from the ground", (_heat_words(on=settings.surface_heat),)),
            Fact("Freezing of cloud", freezing),
            Fact("Streamlines", (f"{crossing.height.shape[1]}, at {crossing.distance.size} places",)),
        ),
    )


def _heat_words(*, on: bool) -> str:
    """Whether the ground gives heat, and under what sky."""
    return "on; the raining cloud of the crossing shades it, other cloud is not known" if on else "off"


def _levels(crossing: Crossing, units: Units) -> tuple[Level, ...]:
    """The incoming air at its ground and at round heights above."""
    column = crossing.incoming
    ground, top = float(column.height[0]), float(column.height[-1])
    wanted = (from_displayed(level, "height", units) for level in LEVELS[units])
    heights = np.array([ground, *(h for h in wanted if ground + 100.0 < h <= top)])
    air = interpolated(column, heights)
    dew_point = dew_point_from_mixing_ratio(air.pressure, air.vapour)
    humidity = relative_humidity_from_mixing_ratio(air.pressure, air.temperature, air.vapour)
    nearest = np.abs(column.height[:, np.newaxis] - heights).argmin(axis=0)
    wind_from = np.arctan2(-air.eastward_wind, -air.northward_wind) % (2.0 * math.pi)
    wind = np.hypot(air.eastward_wind, air.northward_wind)
    return tuple(
        Level(
            height=Amount(float(heights[i]), "height"),
            pressure=Amount(float(air.pressure[i]), "pressure", 1),
            temperature=Amount(float(air.temperature[i]), "temperature", 1),
            dew_point=Amount(float(dew_point[i]), "temperature", 1),
            relative_humidity=Amount(float(humidity[i]), "share"),
            wind_from=Amount(float(wind_from[i]), "bearing"),
            wind=Amount(float(wind[i]), "wind"),
            origin=column.origin[int(nearest[i])] if column.origin else "",
        )
        for i in range(heights.size)
    )
