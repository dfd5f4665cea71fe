"""Rain over the map: what the map says, catchments, gauges, the two estimates side by side, and their limits."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from orolift.rain.over_map import bands_of_map
from orolift.report.quantities import Amount, Units
from orolift.report.rain import band_step
from orolift.report.spans import Ends, ranged, span_of
from orolift.report.words import counted, fraction_in_words, sentence
from orolift.spread.ranges import range_of

if TYPE_CHECKING:
    from orolift.rain.catchments import ElevationBands
    from orolift.rain.gauge_fit import Fitted, RainFit
    from orolift.rain.over_map import MapRain, RainOnCatchment
    from orolift.report.words import Words
    from orolift.sources.map_inputs import Mapped
    from orolift.spread.rain_members import RainMembers

WHAT_RANGES_ARE = (
    "The ranges are those of the members, worked out on coarser cells around this map; no error of the theory is in "
    "them. What the map has by height of the ground, and the estimates for the slope, have none."
)
FEW_GAUGES = 2
"""Gauges from which on errors are said."""


@dataclass(frozen=True)
class CatchmentRow:
    """One catchment; None where it lies off the map."""

    name: str
    remark: str
    area: Amount
    mean_elevation: Amount | None
    rate: Amount | None
    total: Amount | None
    volume: Amount | None
    snow_share: Amount | None
    windward_share: Amount | None
    spans: dict[str, Words]


@dataclass(frozen=True)
class GaugeRow:
    """One gauge; None where it lies off the map."""

    name: str
    caught: Amount
    on_map: Amount | None
    difference: Amount | None
    spans: dict[str, Words]


@dataclass(frozen=True)
class EstimateRow:
    """One estimate of the rain on the windward slope of the line."""

    name: str
    rate: Amount | None
    drying: Amount | None
    meaning: str


@dataclass(frozen=True)
class BandRow:
    """Rain of the map between two heights of the ground."""

    lower: Amount
    upper: Amount
    area: Amount
    rate: Amount
    snow_share: Amount | None


@dataclass(frozen=True)
class RainOverMap:
    """Rain over the map.

    Attributes
    ----------
    heading : Words
    sentences : tuple of Words
    difference : tuple of str
        Crossing against map, and why.
    limits : tuple of str
        Where the case breaks the theory.
    catchments : tuple of CatchmentRow
    gauges : tuple of GaugeRow
    gauge_sentences : tuple of Words
    estimates : tuple of EstimateRow
    bands : tuple of BandRow
        Both empty where no rain to speak of falls.
    duration : Amount or None
        Of the totals; None where there are none.
    """

    heading: Words
    sentences: tuple[Words, ...]
    difference: tuple[str, ...]
    limits: tuple[str, ...]
    catchments: tuple[CatchmentRow, ...]
    gauges: tuple[GaugeRow, ...]
    gauge_sentences: tuple[Words, ...]
    estimates: tuple[EstimateRow, ...]
    bands: tuple[BandRow, ...]
    duration: Amount | None


def rain_over_map(mapped: Mapped, units: Units = "metric") -> RainOverMap:
    """Rain over the map of a crossing.

    Parameters
    ----------
    mapped : Mapped
    units : 'metric' or 'us'
        In which the bands of height are round.

    Returns
    -------
    RainOverMap
    """
    rain = mapped.rain
    return RainOverMap(
        heading=_heading(mapped),
        sentences=_sentences(mapped),
        difference=rain.on_line.difference,
        limits=rain.limits,
        catchments=tuple(_catchment(one, mapped.members, i) for i, one in enumerate(rain.catchments)),
        gauges=_gauges(rain, mapped.members),
        gauge_sentences=(*_comparison(rain), *_fit(rain.fit)),
        estimates=() if rain.is_dry else _estimates(rain),
        bands=() if rain.is_dry else _bands(bands_of_map(rain, band_step(units))),
        duration=_duration(rain) if rain.catchments or rain.gauges is not None else None,
    )


def _duration(rain: MapRain) -> Amount:
    return Amount(rain.duration, "hours", 0 if rain.duration % 3600.0 == 0.0 else 1)


def _span(members: RainMembers | None, name: str) -> Ends | None:
    """Range of a number of the map; None without members."""
    return None if members is None else range_of(members.values[name])


def _heading(mapped: Mapped) -> Words:
    rain = mapped.rain
    if rain.windward_share is None or rain.is_dry:
        return ("No rain to speak of falls anywhere on the map",)
    part = f"{fraction_in_words(rain.windward_share)} of the rain on the map"
    most = ranged(Amount(rain.peak_rate, "rain_rate", 1), _span(mapped.members, "peak_rate"))
    return (*sentence((part,)), " falls on the windward side; the most is ", *most)


def _sentences(mapped: Mapped) -> tuple[Words, ...]:
    rain, members, north = mapped.rain, mapped.members, mapped.inputs.placed.north
    p, column = rain.column.parameters, rain.column
    drift = p.wind_speed * (p.cloud_time + p.fall_time)
    theory: Words = (
        "Linear theory (Smith and Barstad 2004) with one wind, ",
        *ranged(Amount(p.wind_speed, "wind"), _span(members, "wind_speed")),
        " from ",
        Amount((p.bearing - north + math.pi) % (2.0 * math.pi), "bearing"),
        ", and the air of the crossing: vapour ",
        *ranged(Amount(p.vapour_height, "distance", 1), _span(members, "vapour_height")),
        " deep, water that drifts ",
        *ranged(Amount(drift, "distance"), _span(members, "drift")),
        " before it lands. The map takes ",
        *ranged(Amount(rain.drying_ratio, "share"), _span(members, "drying_ratio")),
        " of the vapour that flows in over its whole width.",
    )
    if rain.windward_share is not None and not rain.is_dry:
        share = ranged(Amount(rain.windward_share, "share"), _span(members, "windward_share"))
        theory = (*theory, " On its windward side falls ", *share, " of the rain.")
    floor: Words = (
        "Ground below ",
        *ranged(Amount(rain.reference + column.dry_lift, "height", -1), _span(members, "floor")),
        " makes no rain and is taken off: its air stays, or does not condense yet.",
    )
    snow: Words = (
        "In the incoming air half of what falls is snow at ",
        *ranged(Amount(rain.snow.snow_level, "height", -1), _span(members, "snow_level")),
        ", and snow begins to melt at ",
        *ranged(Amount(rain.snow.melting_level, "height", -1), _span(members, "melting_level")),
        ".",
    )
    found = (theory, floor, *((snow,) if rain.snowing_share and not rain.is_dry else ()))
    return found if members is None else (*found, (WHAT_RANGES_ARE,))


def _catchment(one: RainOnCatchment, members: RainMembers | None, number: int) -> CatchmentRow:
    rain = one.rain

    def maybe(value: float | None, kind: str, digits: int = 0) -> Amount | None:
        return None if value is None else Amount(value, kind, digits)  # type: ignore[arg-type]  # names of kinds

    row = CatchmentRow(
        name=one.catchment.name,
        remark=" ".join(rain.notes),
        area=Amount(rain.area, "area"),
        mean_elevation=maybe(rain.mean_elevation, "height"),
        rate=maybe(rain.rate, "rain_rate", 1),
        total=maybe(rain.total, "water_depth", 1),
        volume=maybe(rain.volume, "volume", 2),
        snow_share=maybe(rain.snow_share, "share"),
        windward_share=maybe(rain.windward_share, "share"),
        spans={},
    )
    if members is None or not rain.rate:
        return row
    mean = rain.rate
    rate, snow, windward = (range_of(members.catchments[name][:, number]) for name in _OF_CATCHMENT)

    def grown(whole: float | None) -> Ends | None:
        return None if whole is None or rate is None else (rate[0] * whole / mean, rate[1] * whole / mean)

    ends = {"rate": rate, "total": grown(rain.total), "volume": grown(rain.volume)}
    ends |= {"snow_share": snow, "windward_share": windward}
    return replace(row, spans={name: span_of(getattr(row, name), found) for name, found in ends.items()})


_OF_CATCHMENT = ("rate", "snow_share", "windward_share")


def _gauges(rain: MapRain, members: RainMembers | None) -> tuple[GaugeRow, ...]:
    if rain.gauges is None or rain.comparison is None:
        return ()
    rows = []
    places = zip(rain.gauges.name, rain.gauges.total, rain.comparison.modelled, strict=True)
    for i, (name, caught, there) in enumerate(places):
        known = math.isfinite(there)
        on_map = Amount(float(there), "water_depth", 1) if known else None
        ends = None if members is None else range_of(members.gauges[:, i])
        apart = None if ends is None else (ends[0] - caught, ends[1] - caught)
        difference = Amount(float(there - caught), "water_depth", 1) if known else None
        rows.append(
            GaugeRow(
                name=name,
                caught=Amount(float(caught), "water_depth", 1),
                on_map=on_map,
                difference=difference,
                spans={"on_map": span_of(on_map, ends), "difference": span_of(difference, apart)},
            )
        )
    return tuple(rows)


def _comparison(rain: MapRain) -> tuple[Words, ...]:
    found = rain.comparison
    if found is None:
        return ()
    notes: tuple[Words, ...] = tuple((note,) for note in found.notes)
    if found.used < FEW_GAUGES or found.bias is None or found.rms_error is None or found.mean_error is None:
        return notes
    bias = Amount(abs(found.bias), "water_depth", 1)
    words: Words = (
        f"At {counted(found.used, 'gauge', 'gauges')} the map has ",
        bias,
        " too little" if found.bias < 0.0 else " too much",
        " on average; a single gauge is ",
        Amount(found.mean_error, "water_depth", 1),
        " off (root mean square ",
        Amount(found.rms_error, "water_depth", 1),
        ")",
    )
    if found.correlation is not None:
        words = (*words, ", correlation ", Amount(found.correlation, "plain", 2))
    caught: Words = (". Gauges catch too little in wind, snow above all; nothing is corrected.",)
    return ((*words, *caught), *notes)


def _fit(fit: RainFit | None) -> tuple[Words, ...]:
    if fit is None:
        return ()

    def with_doubt(found: Fitted, kind: str, digits: int = 0) -> Words:
        low, high = (Amount(value, kind, digits, bare=True) for value in (found.low, found.high))  # type: ignore[arg-type]
        return (Amount(found.value, kind, digits), " (", low, " to ", high, ")")  # type: ignore[arg-type]

    values: Words = (
        f"Fitted to {counted(fit.gauges, 'gauge', 'gauges')}, as the case asks: cloud time ",
        *with_doubt(fit.cloud_time, "duration"),
        ", fall time ",
        *with_doubt(fit.fall_time, "duration"),
        ", background ",
        *with_doubt(fit.background, "rain_rate", 1),
        "; in brackets the range when one gauge is left out. The map above does not use them.",
    )
    errors: Words = (
        "The error falls from ",
        Amount(fit.rms_before, "water_depth", 1),
        " to ",
        Amount(fit.rms_fitted, "water_depth", 1),
        "; at a gauge left out of the fit it is ",
        Amount(fit.rms_left_out, "water_depth", 1),
        ", with the mean of the other gauges ",
        Amount(fit.rms_of_mean, "water_depth", 1),
        ".",
    )
    return (values, errors, *((note,) for note in fit.notes))


def _estimates(rain: MapRain) -> tuple[EstimateRow, ...]:
    one = rain.estimates

    def rate(value: float | None) -> Amount | None:
        return None if value is None else Amount(value, "rain_rate", 1)

    return (
        EstimateRow(
            "crossing",
            rate(one.crossing_rate),
            Amount(one.crossing_drying, "share"),
            "rain that forms, drifts, evaporates and lands along the line",
        ),
        EstimateRow(
            "map", rate(one.map_rate), Amount(one.map_drying, "share"), "linear theory, on the same line and swath"
        ),
        EstimateRow(
            "laminar",
            rate(one.laminar_rate),
            None,
            "water balance of layers between streamlines (form of WMO-No. 1045), all that condenses falls on the "
            "slope; for this situation, no probable maximum",
        ),
        EstimateRow(
            "raw upslope",
            rate(one.upslope_rate),
            Amount(one.upslope_drying, "share"),
            "all vapour rises with the ground below it and falls where it condenses: an upper estimate",
        ),
        EstimateRow(
            "drying bound",
            None,
            Amount(one.largest_drying, "share"),
            "all air lifted by the height of the range, saturated, and all that condenses lost: cannot be passed",
        ),
    )


def _bands(found: ElevationBands | None) -> tuple[BandRow, ...]:
    if found is None:
        return ()
    rows = []
    for low, high, area, rate, snow in zip(
        found.edge[:-1], found.edge[1:], found.area, found.rate, found.snow_rate, strict=True
    ):
        if area > 0.0:
            rows.append(
                BandRow(
                    lower=Amount(float(low), "height", bare=True),
                    upper=Amount(float(high), "height"),
                    area=Amount(float(area), "area"),
                    rate=Amount(float(rate), "rain_rate", 1),
                    snow_share=Amount(float(snow / rate), "share") if rate > 0.0 else None,
                )
            )
    return tuple(rows)
