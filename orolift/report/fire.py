"""Fire weather at the sites: what is met, how dry air and fuel are, what would move them, the night."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.fire.chances import CODES_AFTER
from orolift.fire.dryness import angstroem_words
from orolift.fire.indices import HOURS
from orolift.report.fire_thresholds import ThresholdRow, headline, threshold_rows
from orolift.report.quantities import Amount
from orolift.report.spans import ranged, second_line
from orolift.report.story import first_sites, where_words
from orolift.report.words import day

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from orolift.crossing.result import Crossing, LeeAir
    from orolift.fire.rules import RuleSet
    from orolift.fire.sites import SiteFire
    from orolift.report.quantities import Kind
    from orolift.report.words import Words

MOST_SITES = 24
"""Sites that the tables hold (design choice)."""
FAST_WIND = 40.0 / 3.6
"""Wind [m s-1] up to which the spread index was fitted: Van Wagner (1987)."""
SOME_RAIN = 0.1 / 3600.0
"""Rain at a site [kg m-2 s-1] that is remarked on: a tenth of a millimetre an hour."""


Cells = dict[str, "Words"]
"""Ranges of some of the columns of a row, by their names; empty without members."""


@dataclass(frozen=True)
class FireRow:
    """Dryness and fuel at one site; None where something they need is not known."""

    number: int
    name: str
    side: str
    remark: str
    relative_humidity: Amount
    deficit: Amount
    angstroem: Amount
    fuel: Amount
    fosberg: Amount | None
    drought: Amount | None
    hot_dry_windy: Amount | None
    spans: Cells


@dataclass(frozen=True)
class CodeRow:
    """Fine Fuel Moisture Code at one site; None where the wind is not known."""

    number: int
    name: str
    side: str
    remark: str
    day: Amount | None
    spread: Amount | None
    hour_1: Amount | None
    hour_3: Amount | None
    hour_6: Amount | None
    hour_12: Amount | None
    spans: Cells


@dataclass(frozen=True)
class NightRow:
    """Highest humidity of the night by place, and depth of mixing."""

    number: int
    name: str
    side: str
    remark: str
    windy: Amount
    still: Amount
    mid_slope_height: Amount | None
    mid_slope: Amount | None
    ridge_height: Amount | None
    ridge: Amount | None
    mixing: Amount
    mixing_by_day: Amount
    spans: Cells


@dataclass(frozen=True)
class FireWeather:
    """Fire weather.

    Attributes
    ----------
    heading : Words
    source : str
        Whose thresholds they are; empty without any.
    thresholds : tuple of ThresholdRow
        Those met first.
    rows : tuple of FireRow
    nights : tuple of NightRow
    codes : tuple of CodeRow
        Empty without yesterday's code.
    has_drought, has_chances : bool
        Whether the drought index was given, and members to say how likely a threshold is.
    second_line : str
        What the second line of a cell is; empty without members.
    remarks : tuple of Words
        How to read the numbers.
    night_remark : Words
    cautions : tuple of str
        What no index knows, and who decides.
    """

    heading: Words
    source: str
    thresholds: tuple[ThresholdRow, ...]
    rows: tuple[FireRow, ...]
    nights: tuple[NightRow, ...]
    codes: tuple[CodeRow, ...]
    has_drought: bool
    has_chances: bool
    second_line: str
    remarks: tuple[Words, ...]
    night_remark: Words
    cautions: tuple[str, ...]


def fire_weather(crossing: Crossing, found: tuple[SiteFire, ...], rules: RuleSet | None) -> FireWeather:
    """Fire weather of a crossing for the page.

    Parameters
    ----------
    crossing : Crossing
    found : tuple of SiteFire
        Of its sites, in their order.
    rules : RuleSet or None
        That it was judged by.

    Returns
    -------
    FireWeather
    """
    pairs = _shown(list(zip(found, crossing.lee, strict=True)), crossing)
    source = ""
    if rules is not None:
        source = f"Thresholds of {rules.region}, set by {rules.authority}, taken over on {day(rules.taken)}."
    return FireWeather(
        heading=_heading(found),
        source=source,
        thresholds=threshold_rows(found, crossing.lee),
        rows=tuple(_row(site, air, air.number) for site, air in pairs),
        nights=tuple(_night(site, air, air.number) for site, air in pairs),
        codes=tuple(_codes(site, air, air.number) for site, air in pairs)
        if any(_known(site.indices.fine_fuel_code) for site in found)
        else (),
        has_drought=any(_known(site.indices.fosberg_index_with_drought) for site in found),
        has_chances=any(one.judged.chance is not None for site in found for one in site.thresholds),
        second_line=_SECOND_LINE if any(site.ranges for site in found) else "",
        remarks=_remarks(found),
        night_remark=_night_remark(found[0]),
        cautions=CAUTIONS,
    )


def _shown(pairs: list[tuple[SiteFire, LeeAir]], crossing: Crossing) -> list[tuple[SiteFire, LeeAir]]:
    """The sites of the tables, in the order of the case: of very many those where most is met, and the first dozen."""
    if len(pairs) <= MOST_SITES:
        return pairs

    def met(site: SiteFire) -> int:
        return sum(one.judged.status == "met" for one in site.thresholds)

    first = {air.number for air in first_sites(crossing).lee}
    ordered = sorted(pairs, key=lambda pair: (-met(pair[0]), pair[1].number not in first, pair[1].number))
    return sorted(ordered[:MOST_SITES], key=lambda pair: pair[1].number)


CAUTIONS = (
    (
        "A threshold met on this page is not a warning. Fire agencies and weather services weigh forecasts, fuels and "
        "what else burns; their warnings, burn bans and local rules decide. Do not decide on evacuation or a burn "
        "permit by this page."
    ),
    (
        "The indices know weather only: not the kind of fuel and how much of it there is, its drought beyond what is "
        "given, live moisture, slope, sun on the ground, nor anybody who lights a fire."
    ),
    (
        "The wind is that across the range along one line. What bends round spurs, pours through gaps and follows "
        "single valleys can be stronger and drier than here; so can gusts under breaking waves."
    ),
    "Warmth is no condition: air that comes down a range can dry fuel and drive a fire on a cold night.",
)
"""Cautions of fire weather, whatever the case."""


def _known(value: ArrayLike) -> bool:
    return bool(np.all(np.isfinite(value)))


def _amount(value: ArrayLike, kind: Kind, digits: int = 0) -> Amount | None:
    number = float(np.asarray(value))
    return Amount(number, kind, digits) if math.isfinite(number) else None


def _heading(found: tuple[SiteFire, ...]) -> Words:
    """The threshold that is met, and how dry the driest site is: where it is met, else in the lee."""
    what = headline(found)
    chosen = [site for site in found if site.name in what.sites]
    chosen = chosen or [site for site in found if site.side == "lee"] or list(found)
    driest = min(chosen, key=lambda site: float(site.indices.relative_humidity))
    air, ends = driest.indices, driest.ranges
    humidity = ranged(Amount(float(air.relative_humidity), "share"), ends.get("relative_humidity"))
    fuel = ranged(Amount(float(air.equilibrium_fuel_moisture), "share", 1), ends.get("equilibrium_fuel_moisture"))
    if len(what.sites) == 1:
        return (f"{what.words}, with a humidity of ", *humidity, " and fine dead fuel at ", *fuel)
    start = f"{what.words}; {driest.name}" if what.words else driest.name
    return (f"{start} has a humidity of ", *humidity, " and fine dead fuel at ", *fuel)


def _spans(row: dict[str, Amount | None], names: dict[str, str], site: SiteFire) -> Cells:
    """Second lines of the columns of a row that have a value, from the ranges of the site."""
    shown = {column: (row[column], site.ranges.get(name)) for column, name in names.items()}
    return {column: second_line(value, ends) for column, (value, ends) in shown.items() if value is not None}


_DRYNESS = {
    "relative_humidity": "relative_humidity",
    "deficit": "vapour_pressure_deficit",
    "angstroem": "angstroem_index",
    "fuel": "equilibrium_fuel_moisture",
    "fosberg": "fosberg_index",
    "drought": "fosberg_index_with_drought",
    "hot_dry_windy": "hot_dry_windy",
}
"""Columns of dryness and fuel, and the ranges they take."""


def _row(site: SiteFire, air: LeeAir, number: int) -> FireRow:
    one = site.indices
    found = {
        "relative_humidity": Amount(float(one.relative_humidity), "share"),
        "deficit": Amount(float(one.vapour_pressure_deficit), "vapour_pressure", 1),
        "angstroem": Amount(float(one.angstroem_index), "plain", 1),
        "fuel": Amount(float(one.equilibrium_fuel_moisture), "share", 1),
    }
    windy = {
        "fosberg": _amount(one.fosberg_index, "plain"),
        "drought": _amount(one.fosberg_index_with_drought, "plain"),
        "hot_dry_windy": _amount(one.hot_dry_windy, "plain"),
    }
    spans = _spans({**found, **windy}, _DRYNESS, site)
    return FireRow(
        number=number,
        name=site.name,
        side=site.side,
        remark=where_words(air),
        spans=spans,
        fosberg=windy["fosberg"],
        drought=windy["drought"],
        hot_dry_windy=windy["hot_dry_windy"],
        **found,
    )


_CODES_OF = {"day": "fine_fuel_code", "spread": "initial_spread_index"} | {
    f"hour_{hours}": name for hours, name in zip(HOURS, CODES_AFTER, strict=True)
}
"""Columns of codes, and the ranges they take."""


def _codes(site: SiteFire, air: LeeAir, number: int) -> CodeRow:
    one = site.indices
    after = np.ravel(one.fine_fuel_code_hours)
    found = {
        "day": _amount(one.fine_fuel_code, "plain", 1),
        "spread": _amount(one.initial_spread_index, "plain", 1),
        **{f"hour_{hours}": _amount(value, "plain", 1) for hours, value in zip(HOURS, after, strict=True)},
    }
    spans = _spans(found, _CODES_OF, site)
    return CodeRow(number=number, name=site.name, side=site.side, remark=where_words(air), spans=spans, **found)


_NIGHTS = {
    "windy": "floor_windy",
    "still": "floor_still",
    "mid_slope": "mid_slope",
    "ridge": "ridge",
    "mixing": "mixing_height",
    "mixing_by_day": "mixing_height_by_day",
}
"""Columns of the night, and the ranges they take."""


def _night(site: SiteFire, air: LeeAir, number: int) -> NightRow:
    night = site.night
    slope, ridge = _amount(night.mid_slope, "share"), _amount(night.ridge, "share")
    found = {
        "windy": Amount(night.floor_windy, "share"),
        "still": Amount(night.floor_still, "share"),
        "mixing": Amount(night.mixing_height, "height", -1),
        "mixing_by_day": Amount(night.mixing_height_by_day, "height", -1),
    }
    return NightRow(
        number=number,
        name=site.name,
        side=site.side,
        remark=where_words(air),
        mid_slope_height=None if slope is None else Amount(night.mid_slope_height, "height"),
        mid_slope=slope,
        ridge_height=None if ridge is None else Amount(night.ridge_height, "height"),
        ridge=ridge,
        spans=_spans({**found, "mid_slope": slope, "ridge": ridge}, _NIGHTS, site),
        **found,
    )


_SECOND_LINE = (
    "The second line of a cell is the range: 10 and 90 % of the members, with the error of the method in temperature, "
    "humidity and wind. No error of the indices themselves is in it."
)
_FUEL = (
    "Fuel is the moisture that grass and needles come to in this air (Simard 1968). The Fosberg index adds the wind at "
    "10 m; 100 is bone-dry fuel in 30 mph, and 50 is a lot. Hot-Dry-Windy takes the driest and the windiest air of the "
    "lowest 500 m and says something only beside what is usual at the place and season. Ångström's index, without "
    "wind, "
)
_ANGSTROEM = {
    "unlikely": "finds a fire unlikely to start",
    "unfavourable": "finds the air unfavourable to fire",
    "favourable": "finds the air favourable to fire",
    "very likely": "finds a fire very likely to start",
}
_CODES = (
    "The Fine Fuel Moisture Code goes on from yesterday's: of the day, as if this were the air of noon, and after "
    "hours of this air. "
)
_NIGHT = (
    " if this air goes on coming. The valley floor is the site: with wind the night takes its heat from 800 m of air, "
    "at rest from 100 m. Slope and ridge keep the free air over the site and do not cool: humidity there may stay low "
    "all night. Mixing is by the heat of the ground alone; wind mixes deeper."
)


def _remarks(found: tuple[SiteFire, ...]) -> tuple[Words, ...]:
    """How to read the numbers in this case."""
    lowest = min(float(site.indices.angstroem_index) for site in found)
    out: list[Words] = [(_FUEL, _ANGSTROEM[angstroem_words(lowest)], ".")]
    if any(_known(site.indices.fine_fuel_code) for site in found):
        fast = [site.name for site in found if _known(site.weather.wind) and float(site.weather.wind) > FAST_WIND]
        beyond = (
            f"At {', '.join(fast)} the wind is beyond that of the fires the spread index was fitted to, up to some "
            "40 km/h; take it as very high, not by its number."
        )
        out.append((_CODES + (beyond if fast else ""),))
    wet = [site.name for site in found if float(site.weather.rain) >= SOME_RAIN]
    if wet:
        out.append((f"Rain or snow falls at {', '.join(wet)}: fuel is wetter there than the air alone makes it.",))
    return tuple(out)


def _night_remark(site: SiteFire) -> Words:
    night = site.night
    how = "" if night.length_known else " (assumed: time or place is not known)"
    return ("Highest relative humidity of the coming night, ", Amount(night.length, "hours", 1), f" long{how},", _NIGHT)
