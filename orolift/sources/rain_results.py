"""Rain over the map, catchments and gauges as blocks of the results file."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from pydantic import Field

from orolift.sources.rain_ranges import catchment_ranges, gauge_ranges, map_ranges
from orolift.sources.result_block import Block, Range

if TYPE_CHECKING:
    from orolift.rain.catchments import ElevationBands
    from orolift.rain.gauge_fit import Fitted, RainFit
    from orolift.rain.over_map import MapRain, RainOnCatchment
    from orolift.sources.map_inputs import Mapped

HOUR = 3600.0


class ParametersBlock(Block):
    """What the linear theory was run with."""

    wind_ms: float = Field(description="mean over the vapour")
    wind_from_deg: float = Field(description="clockwise from true north")
    stability_per_s: float = Field(description="of saturated air")
    vapour_height_m: float
    uplift_sensitivity_kg_m3: float
    cloud_time_s: float
    fall_time_s: float
    background_mm_per_h: float
    floor_m: float = Field(description="lower ground counts as this high: air that stays, and lift before it condenses")


class OnLineBlock(Block):
    """The map along the line of the crossing; the background is in the peak only."""

    total_kg_per_m_s: float
    windward_share: float | None
    peak_mm_per_h: float
    peak_km: float | None
    ratio: float | None = Field(description="its total over that of the crossing")
    difference: list[str] = Field(description="how far the two are apart, and why")


class EstimatesBlock(Block):
    """Simple estimates for the windward slope of the line, without the background."""

    relief_m: float
    slope_length_km: float
    crossing_mm_per_h: float
    map_mm_per_h: float
    upslope_mm_per_h: float
    laminar_mm_per_h: float | None = Field(description="for this situation; no probable maximum precipitation")
    crossing_drying_ratio: float
    map_drying_ratio: float
    upslope_drying_ratio: float
    largest_drying_ratio: float


class BandBlock(Block):
    """Rain and snow between two heights of the ground."""

    from_m: float
    to_m: float
    area_km2: float
    mm_per_h: float | None
    snow_mm_per_h: float | None = Field(description="of it, as snow, in water")


class MapBlock(Block):
    """Rain over the map by the linear theory, steady; the background included unless said otherwise."""

    duration_h: float
    cell_m: float
    total_kg_per_s: float
    volume_m3: float = Field(description="over the duration")
    mean_mm_per_h: float
    peak_mm_per_h: float
    peak_longitude: float
    peak_latitude: float
    windward_share: float | None
    divide: str = Field(description="where the windward side ends: crest of each strip, or the given line")
    snow_share: float | None
    snow_level_m: float = Field(description="above it more than half is snow, in the incoming air")
    drying_ratio: float = Field(description="without the background, over the vapour that flows in across the map")
    parameters: ParametersBlock
    on_line: OnLineBlock
    estimates: EstimatesBlock
    bands: list[BandBlock]
    limits: list[str] = Field(description="where the case breaks the theory")
    range: Range = Field(default_factory=dict, description="key: [10 %, 90 %], by the inputs; empty without members")
    input_range: Range = Field(default_factory=dict, description="the same: no error of the theory is known")


class CatchmentBlock(Block):
    """Rain and snow on one catchment; null where it lies off the map."""

    name: str
    area_km2: float
    covered_percent: float
    mean_mm_per_h: float | None
    total_mm: float | None = Field(description="over duration_h")
    volume_m3: float | None
    snow_share: float | None
    snow_area_share: float | None
    windward_share: float | None
    lowest_m: float | None
    mean_elevation_m: float | None
    highest_m: float | None
    bands: list[BandBlock]
    notes: list[str]
    range: Range = Field(default_factory=dict, description="key: [10 %, 90 %], by the inputs; empty without members")
    input_range: Range = Field(default_factory=dict, description="the same: no error of the theory is known")


class GaugeBlock(Block):
    """One gauge; the map is null where the gauge lies off it."""

    name: str
    observed_mm: float
    map_mm: float | None
    range: Range = Field(default_factory=dict, description="key: [10 %, 90 %], by the inputs; empty without members")
    input_range: Range = Field(default_factory=dict, description="the same: no error of the theory is known")


class FittedBlock(Block):
    """A fitted value with its doubt."""

    value: float
    standard_error: float
    low: float = Field(description="of the fits that leave out one gauge")
    high: float
    at_bound: bool = Field(description="the gauges do not determine it")


class FitBlock(Block):
    """Times and background rain fitted to the gauges; nothing else in the file uses them."""

    cloud_time_s: FittedBlock
    fall_time_s: FittedBlock
    total_time_s: FittedBlock
    background_mm_per_h: FittedBlock
    gauges: int
    rms_before_mm: float
    rms_fitted_mm: float
    rms_left_out_mm: float = Field(description="each gauge predicted by the fit to the others")
    rms_of_mean_mm: float = Field(description="each gauge predicted by the mean of the others")
    notes: list[str]


class GaugesBlock(Block):
    """Map minus gauges over the duration; null where no gauge lies on the map."""

    used: int
    bias_mm: float | None
    ratio: float | None
    mean_error_mm: float | None
    rms_error_mm: float | None
    correlation: float | None
    places: list[GaugeBlock]
    fit: FitBlock | None
    notes: list[str]


def map_block(mapped: Mapped, origin: float) -> MapBlock:
    """Rain over the map.

    Parameters
    ----------
    mapped : Mapped
    origin : float [m]
        Distance of the upwind end of the line in the user's numbers.

    Returns
    -------
    MapBlock
    """
    from rasterio.warp import transform

    rain = mapped.rain
    longitude, latitude = transform(mapped.inputs.placed.crs, "OGC:CRS84", [rain.peak[0]], [rain.peak[1]])
    return MapBlock(
        duration_h=rain.duration / HOUR,
        cell_m=rain.found.spacing[0],
        total_kg_per_s=rain.total,
        volume_m3=rain.total * rain.duration / 1000.0,
        mean_mm_per_h=HOUR * rain.mean_rate,
        peak_mm_per_h=HOUR * rain.peak_rate,
        peak_longitude=float(longitude[0]),
        peak_latitude=float(latitude[0]),
        windward_share=rain.windward_share,
        divide="given line" if rain.drawn_divide else "crest of each strip along the wind",
        snow_share=rain.snowing_share,
        snow_level_m=rain.snow.snow_level,
        drying_ratio=rain.drying_ratio,
        parameters=_parameters(rain, mapped.inputs.placed.north),
        on_line=_on_line(rain, origin),
        estimates=_estimates(rain),
        bands=_bands(rain.bands),
        limits=[*rain.limits],
        **_both(map_ranges(mapped)),
    )


def _both(found: Range) -> dict[str, Range]:
    """Range and input range: no error of the theory is known."""
    return {"range": found, "input_range": found}


def _parameters(rain: MapRain, north: float) -> ParametersBlock:
    p = rain.column.parameters
    return ParametersBlock(
        wind_ms=p.wind_speed,
        wind_from_deg=math.degrees(p.bearing - north + math.pi) % 360.0,
        stability_per_s=p.stability,
        vapour_height_m=p.vapour_height,
        uplift_sensitivity_kg_m3=p.uplift_sensitivity,
        cloud_time_s=p.cloud_time,
        fall_time_s=p.fall_time,
        background_mm_per_h=HOUR * p.background,
        floor_m=rain.reference + rain.column.dry_lift,
    )


def _on_line(rain: MapRain, origin: float) -> OnLineBlock:
    line = rain.on_line
    return OnLineBlock(
        total_kg_per_m_s=line.total,
        windward_share=line.windward_share,
        peak_mm_per_h=HOUR * line.peak_rate,
        peak_km=None if line.peak_distance is None else (line.peak_distance + origin) / 1000.0,
        ratio=line.ratio,
        difference=[*line.difference],
    )


def _estimates(rain: MapRain) -> EstimatesBlock:
    one = rain.estimates
    return EstimatesBlock(
        relief_m=one.relief,
        slope_length_km=one.slope_length / 1000.0,
        crossing_mm_per_h=HOUR * one.crossing_rate,
        map_mm_per_h=HOUR * one.map_rate,
        upslope_mm_per_h=HOUR * one.upslope_rate,
        laminar_mm_per_h=_per_hour(one.laminar_rate),
        crossing_drying_ratio=one.crossing_drying,
        map_drying_ratio=one.map_drying,
        upslope_drying_ratio=one.upslope_drying,
        largest_drying_ratio=one.largest_drying,
    )


def _bands(found: ElevationBands | None) -> list[BandBlock]:
    """Bands that have any area."""
    if found is None:
        return []
    rows = zip(found.edge[:-1], found.edge[1:], found.area, found.rate, found.snow_rate, strict=True)
    return [
        BandBlock(
            from_m=float(low),
            to_m=float(high),
            area_km2=float(area) / 1e6,
            mm_per_h=_per_hour(float(rate)),
            snow_mm_per_h=_per_hour(float(snow)),
        )
        for low, high, area, rate, snow in rows
        if area > 0.0
    ]


def _per_hour(rate: float | None) -> float | None:
    """A rate in mm/h; None where it is not known."""
    return None if rate is None or math.isnan(rate) else HOUR * rate


def catchment_blocks(mapped: Mapped) -> list[CatchmentBlock]:
    """Rain on every catchment, in the order of the file.

    Parameters
    ----------
    mapped : Mapped

    Returns
    -------
    list of CatchmentBlock
    """
    return [_catchment(one, catchment_ranges(mapped, i)) for i, one in enumerate(mapped.rain.catchments)]


def _catchment(one: RainOnCatchment, ranges: Range) -> CatchmentBlock:
    rain = one.rain
    return CatchmentBlock(
        name=one.catchment.name,
        area_km2=rain.area / 1e6,
        covered_percent=100.0 * rain.covered_share,
        mean_mm_per_h=_per_hour(rain.rate),
        total_mm=rain.total,
        volume_m3=rain.volume,
        snow_share=rain.snow_share,
        snow_area_share=rain.snow_area_share,
        windward_share=rain.windward_share,
        lowest_m=rain.lowest,
        mean_elevation_m=rain.mean_elevation,
        highest_m=rain.highest,
        bands=_bands(one.bands),
        notes=[*rain.notes],
        **_both(ranges),
    )


def gauges_block(mapped: Mapped) -> GaugesBlock | None:
    """Map against gauges; None without gauges.

    Parameters
    ----------
    mapped : Mapped

    Returns
    -------
    GaugesBlock or None
    """
    rain = mapped.rain
    gauges, found = rain.gauges, rain.comparison
    if gauges is None or found is None:
        return None
    ranges = gauge_ranges(mapped) or [{}] * len(gauges.name)
    places = [
        GaugeBlock(
            name=name,
            observed_mm=float(caught),
            map_mm=None if math.isnan(there) else float(there),
            **_both(ends),
        )
        for name, caught, there, ends in zip(gauges.name, gauges.total, found.modelled, ranges, strict=True)
    ]
    return GaugesBlock(
        used=found.used,
        bias_mm=found.bias,
        ratio=found.ratio,
        mean_error_mm=found.mean_error,
        rms_error_mm=found.rms_error,
        correlation=found.correlation,
        places=places,
        fit=None if rain.fit is None else _fit(rain.fit),
        notes=[*found.notes],
    )


def _fit(fit: RainFit) -> FitBlock:
    return FitBlock(
        cloud_time_s=_fitted(fit.cloud_time, 1.0),
        fall_time_s=_fitted(fit.fall_time, 1.0),
        total_time_s=_fitted(fit.total_time, 1.0),
        background_mm_per_h=_fitted(fit.background, HOUR),
        gauges=fit.gauges,
        rms_before_mm=fit.rms_before,
        rms_fitted_mm=fit.rms_fitted,
        rms_left_out_mm=fit.rms_left_out,
        rms_of_mean_mm=fit.rms_of_mean,
        notes=[*fit.notes],
    )


def _fitted(found: Fitted, factor: float) -> FittedBlock:
    return FittedBlock(
        value=factor * found.value,
        standard_error=factor * found.error,
        low=factor * found.low,
        high=factor * found.high,
        at_bound=found.at_bound,
    )
