"""Hours worked out as a results file and as a table: numbers by site and hour, unrounded."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC, datetime
from typing import TYPE_CHECKING

import numpy as np

from orolift.sources.hours_blocks import (
    CatchmentHoursBlock,
    HourColumns,
    HoursResults,
    Numbers,
    SeriesBlock,
    SiteHoursBlock,
    StretchBlock,
    ThresholdBlock,
    Times,
)
from orolift.sources.results import case_block, program
from orolift.sources.state_ranges import StateRangesBlock, members_block, range_columns
from orolift.spread.hour_members import RANGED
from orolift.spread.timeline import values_of

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.sources.hours_case import HourSetup
    from orolift.spread.stretches import Stretch
    from orolift.spread.timeline import Hours, RuleStretches, SiteTimeline
    from orolift.spread.timeline_members import HappensRange, MaybeEnds, SiteRanges, StretchRange

    Array = NDArray[np.float64]

HOURS_VERSION = "1"


@dataclass(frozen=True)
class Quantity:
    """One number of a site and hour, as every file has it.

    Attributes
    ----------
    key : str
        In JSON and CSV, with its unit.
    of : str
        Of a state; see `orolift.spread.timeline.values_of`.
    factor, offset : float
        Value in the file = SI value x factor + offset.
    unit : str
        As CF conventions write it.
    words : str
    standard_name : str
        Of the CF table; empty where it has none.
    """

    key: str
    of: str
    unit: str
    words: str
    factor: float = 1.0
    offset: float = 0.0
    standard_name: str = ""


QUANTITIES = (
    Quantity(
        "temperature_c", "temperature", "degC", "air temperature", offset=-273.15, standard_name="air_temperature"
    ),
    Quantity("dew_point_c", "dew_point", "degC", "dew point", offset=-273.15, standard_name="dew_point_temperature"),
    Quantity(
        "relative_humidity_percent",
        "relative_humidity",
        "percent",
        "relative humidity over liquid water",
        100.0,
        standard_name="relative_humidity",
    ),
    Quantity("wind_10m_ms", "wind_10m", "m s-1", "wind at 10 m, across the range", standard_name="wind_speed"),
    Quantity("gust_ms", "gust", "m s-1", "gust, middle of its range", standard_name="wind_speed_of_gust"),
    Quantity("warming_c", "warming", "K", "site minus incoming air at its height"),
    *(
        Quantity(f"warming_{part}_c", f"parts.{part}", "K", f"part of the warming: {part.replace('_', ' ')}")
        for part in ("descent", "latent", "going_round", "mixing", "surface_heating", "pressure")
    ),
    Quantity("source_level_m", "source_level", "m", "median height above sea level the air comes from"),
    Quantity(
        "rain_mm_per_h", "rain", "mm h-1", "rain and snow at the site", 3600.0, standard_name="precipitation_rate"
    ),
    Quantity("snow_mm_per_h", "snow", "mm h-1", "snow at the site, as water", 3600.0),
    Quantity("crest_wind_ms", "crest_wind", "m s-1", "wind component across the range at the crest"),
)
"""Numbers of a site and hour; the fine fuel code and the times come from the timeline."""
RANGED_KEYS = tuple((one, name) for one in QUANTITIES if (name := one.of.replace("parts.", "warming_")) in RANGED)
"""Of them those with ranges, and the name of each among the members."""


def hours_results(hours: Hours, setup: HourSetup) -> HoursResults:
    """The results file of hours worked out.

    Parameters
    ----------
    hours : Hours
    setup : HourSetup

    Returns
    -------
    HoursResults
    """
    case, time = setup.inputs.case, hours.time
    return HoursResults(
        schema_version=HOURS_VERSION,
        orolift=program(),
        case=case_block(case),
        series=SeriesBlock(
            file=setup.series.name,
            kind=setup.series.kind,
            first_time=iso(time[0]) if time.size else None,
            last_time=iso(time[-1]) if time.size else None,
            step_s=hours.step,
            hours=hours.planned,
            worked=time.size,
        ),
        members=members_block(setup.drawn),
        interrupted=hours.interrupted,
        sites=[_site(site, hours) for site in hours.sites],
        catchments=[
            CatchmentHoursBlock(
                name=one.name,
                rain_mm_per_h=numbers(3600.0 * one.rate),
                rain_mm=one.total,
                rain_range_mm=one.total_range,
                known_hours=one.known_hours,
            )
            for one in hours.catchments
        ],
        notes=[*notes_of(hours, setup)],
    )


def notes_of(hours: Hours, setup: HourSetup) -> tuple[str, ...]:
    """What was assumed, with a first sentence when the work was interrupted."""
    if not hours.interrupted:
        return setup.notes
    note = f"Interrupted: {hours.time.size} of {hours.planned} hours were worked out, and only they are here."
    return (note, *setup.notes)


def iso(seconds: float) -> str:
    """A time as text, in UTC.

    Examples
    --------
    >>> iso(0.0)
    '1970-01-01T00:00:00Z'
    """
    return datetime.fromtimestamp(round(float(seconds)), UTC).strftime("%Y-%m-%dT%H:%M:%SZ")


def numbers(values: Array) -> Numbers:
    """Values with None for NaN.

    Examples
    --------
    >>> numbers(np.array([1.5, np.nan]))
    [1.5, None]
    """
    return [value if value == value else None for value in values.tolist()]  # noqa: PLR0124 (NaN is not itself)


def columns_of(site: SiteTimeline) -> dict[str, Array]:
    """Numbers of a site by the key of the files, NaN where there are none.

    Parameters
    ----------
    site : SiteTimeline

    Returns
    -------
    dict of str to ndarray (n,)
    """
    found = {one.key: values_of(site.states, one.of) * one.factor + one.offset for one in QUANTITIES}
    return {**found, "fine_fuel_code": site.fine_fuel_code}


def _site(site: SiteTimeline, hours: Hours) -> SiteHoursBlock:
    states, ranges = site.states, site.ranges
    arrives = np.isfinite(site.arrival_error).tolist()
    lasts = None if ranges is None else ranges.dry_wind.lasts
    return SiteHoursBlock(
        name=site.name,
        hours=HourColumns(
            time=[iso(time) for time in hours.time],
            status=[state.status for state in states],
            reason=[state.reason for state in states],
            arrival_time=[iso(time) if there else None for time, there in zip(site.arrival, arrives, strict=True)],
            arrival_error_h=numbers(site.arrival_error / 3600.0),
            side=[state.side for state in states],
            in_cold_pool=[state.in_pool for state in states],
            breaks_through=[state.breaks_through for state in states],
            descending_warm_dry=[state.descending for state in states],
            **{key: numbers(values) for key, values in columns_of(site).items()},
        ),
        dry_winds=_stretches(site.dry_winds, None if ranges is None else ranges.dry_wind),
        thresholds=[
            _threshold(one, None if ranges is None else ranges.thresholds[number])
            for number, one in enumerate(site.thresholds)
        ],
        dry_wind_hours=site.dry_hours / 3600.0,
        dry_wind_hours_range=None if lasts is None else (lasts[0] / 3600.0, lasts[1] / 3600.0),
        dry_wind_chance=None if ranges is None else ranges.dry_wind.ever,
        rain_mm=site.rain,
        rain_range_mm=None if ranges is None else ranges.total_rain,
        crossing_hours=site.crossing_hours,
        caught_up_hours=site.overtaken,
        ranges=None if ranges is None else _ranges(ranges),
    )


def _threshold(one: RuleStretches, ranges: HappensRange | None) -> ThresholdBlock:
    return ThresholdBlock(
        rule=one.rule.name,
        hours_asked=one.rule.hours,
        met=[met if judged else None for met, judged in zip(one.met.tolist(), one.judged.tolist(), strict=True)],
        stretches=_stretches(one.stretches, ranges),
        chance=None if ranges is None else numbers(ranges.chance),
        chance_of_any=None if ranges is None else ranges.ever,
    )


def _ranges(ranges: SiteRanges) -> StateRangesBlock:
    full, inputs = (
        {one.key: _pairs(found[name] * one.factor + one.offset) for one, name in RANGED_KEYS}
        for found in (ranges.full, ranges.inputs)
    )
    return StateRangesBlock(
        range={**full, "fine_fuel_code": _pairs(ranges.fine_fuel_code)},
        input_range=inputs,
        chance={key: numbers(values) for key, values in chances_of(ranges).items()},
    )


def chances_of(ranges: SiteRanges) -> dict[str, Array]:
    """Chances of every hour, by their names in the files; NaN where there is none.

    Parameters
    ----------
    ranges : SiteRanges

    Returns
    -------
    dict of str to ndarray (n,) [1]
    """
    return {
        "crosses": ranges.crosses,
        "rain": ranges.rain,
        "in_pool": ranges.in_pool,
        "descending_warm_dry": ranges.dry_wind.chance,
    }


def _pairs(ends: Array) -> list[tuple[float, float] | None]:
    return [None if low != low else (low, high) for low, high in ends.tolist()]  # noqa: PLR0124 (NaN is not itself)


def _stretches(found: tuple[Stretch, ...], ranges: HappensRange | None) -> list[StretchBlock]:
    return [_stretch(one, None if ranges is None else ranges.stretches[i]) for i, one in enumerate(found)]


def _stretch(one: Stretch, members: StretchRange | None) -> StretchBlock:
    return StretchBlock(
        first_hour=one.first,
        last_hour=one.last,
        onset=None if one.onset is None else iso(one.onset),
        onset_error_h=None if one.onset_error is None else one.onset_error / 3600.0,
        end=None if one.end is None else iso(one.end),
        end_error_h=None if one.end_error is None else one.end_error / 3600.0,
        unknown_hours=one.unknown,
        chance=None if members is None else members.chance,
        onset_range=None if members is None else _times(members.onset),
        end_range=None if members is None else _times(members.end),
    )


def _times(ends: MaybeEnds | None) -> Times | None:
    if ends is None:
        return None
    low, high = (None if end is None else iso(end) for end in ends)
    return low, high


def hour_rows(results: HoursResults) -> tuple[list[str], list[list[object]]]:
    """Header and one row for each site and hour, for the CSV table.

    Parameters
    ----------
    results : HoursResults

    Returns
    -------
    header : list of str
    rows : list of lists
        All hours of the first site, then of the next; columns of ranges and chances where one of them has any.
    """
    keys = list(HourColumns.model_fields)
    more = next((list(range_columns(site.ranges)) for site in results.sites if site.ranges is not None), [])
    header = ["site", "upwind_time", *keys[1:], "thresholds_met", *more, *(["threshold_chances"] if more else [])]
    rows: list[list[object]] = []
    for site in results.sites:
        columns: list[list[object]] = [getattr(site.hours, key) for key in keys]
        count = len(columns[0])
        columns.append(["; ".join(one.rule for one in site.thresholds if one.met[i]) for i in range(count)])
        found = {} if site.ranges is None else range_columns(site.ranges)
        columns += [list(found.get(key, [None] * count)) for key in more]
        if more:
            columns.append([_threshold_chances(site, i) for i in range(count)])
        rows += [[site.name, *map(said, row)] for row in zip(*columns, strict=True)]
    return header, rows


def _threshold_chances(site: SiteHoursBlock, i: int) -> str:
    """Chance of each threshold in an hour, as text."""
    found = [(one.rule, one.chance[i]) for one in site.thresholds if one.chance is not None]
    return "; ".join(f"{rule}: {chance:.3f}" for rule, chance in found if chance is not None)


def said(value: object) -> object:
    """Truth as a word, for a table."""
    if isinstance(value, bool):
        return "true" if value else "false"
    return value
