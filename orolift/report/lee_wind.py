"""The wind in the lee: how strong by several methods, at the sites, and what favours a downslope windstorm."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.report.quantities import Amount
from orolift.report.story import where_words
from orolift.report.words import counted

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing, LeeAir
    from orolift.report.words import Words

ANSWERS = {True: "yes", False: "no", None: "not known"}
KINDS = {
    "estimate": "an estimate",
    "upper end": "may be reached",
    "limit": "cannot be passed",
}


@dataclass(frozen=True)
class MethodRow:
    """One method's wind in the lee."""

    method: str
    wind: Amount
    what: str
    source: str


@dataclass(frozen=True)
class WindRow:
    """The wind at one site; None where no crossing air blows.

    Attributes
    ----------
    number : int
    name, side : str
    remark : str
        Why there is none, else empty.
    wind, low, high : Amount or None
        In the lowest 300 m, and the range of the methods.
    at_10m, gust_low, gust_high : Amount or None
    """

    number: int
    name: str
    side: str
    remark: str
    wind: Amount | None
    low: Amount | None
    high: Amount | None
    at_10m: Amount | None
    gust_low: Amount | None
    gust_high: Amount | None


@dataclass(frozen=True)
class ConditionRow:
    """One condition that favours a downslope windstorm, and whether it holds."""

    statement: str
    holds: str
    source: str


@dataclass(frozen=True)
class LeeWind:
    """A conclusion, then methods, sites and conditions."""

    heading: Words
    remarks: tuple[Words, ...]
    methods: tuple[MethodRow, ...]
    sites: tuple[WindRow, ...]
    conditions: tuple[ConditionRow, ...]


def lee_wind(crossing: Crossing) -> LeeWind:
    """The wind in the lee.

    Parameters
    ----------
    crossing : Crossing

    Returns
    -------
    LeeWind
    """
    winds = crossing.winds
    first = MethodRow(
        "spacing of the streamlines", Amount(winds.strongest, "wind"), "this page", "linear waves of the layered column"
    )
    others = tuple(
        MethodRow(one.method, Amount(one.wind, "wind"), KINDS[one.kind], one.source) for one in winds.estimates
    )
    return LeeWind(
        heading=_heading(crossing),
        remarks=_remarks(crossing),
        methods=(first, *others),
        sites=tuple(_row(site, site.number) for site in crossing.lee),
        conditions=tuple(ConditionRow(one.statement, ANSWERS[one.met], one.source) for one in winds.conditions),
    )


def range_words(low: float, high: float) -> Words:
    """A range of wind, or nothing when its ends read alike."""
    if round(low) == round(high):
        return ()
    return (Amount(low, "wind", bare=True), " to ", Amount(high, "wind"))


def _heading(crossing: Crossing) -> Words:
    winds = crossing.winds
    met = sum(one.met is True for one in winds.conditions)
    of = counted(len(winds.conditions), "condition", "conditions").split()[0]
    number = counted(met, "", "").strip()
    verb = "holds" if met == 1 else "hold"
    return (
        "The wind down the lee reaches ",
        Amount(winds.strongest, "wind"),
        f"; {number} of {of} conditions for a windstorm {verb}",
    )


def _remarks(crossing: Crossing) -> tuple[Words, ...]:
    winds, line = crossing.winds, crossing.transect
    where: Words = (
        "That is a mean over the lowest 300 m and over 5 km along the slope, at ",
        Amount(winds.strongest_distance + line.origin, "distance", 1),
        " on the line. ",
    )
    span = range_words(winds.low, winds.high)
    if span:
        where = (*where, "The methods together span ", *span, "; at the sites this range is taken in proportion.")
    else:
        where = (*where, "The methods agree.")
    gusts = (
        "; gusts are the mean with 2.5 to 3.5 standard deviations of turbulence, or the strongest wind of the lowest "
        "1 km brought down whole where that is more."
    )
    start = "Wind at 10 m by the logarithmic law over ground of roughness length "
    roughness: Words = (start, Amount(crossing.settings.roughness, "height", 2), gusts)
    drop = crossing.flow.pressure_difference
    pressure = (
        "The pressure at the height of the lee foot is ",
        Amount(abs(drop), "pressure_difference", 1),
        " lower in the lee than in the incoming air." if drop > 0.0 else " higher in the lee than in the incoming air.",
    )
    return (where, roughness, pressure)


def _row(site: LeeAir, number: int) -> WindRow:
    wind = site.wind

    def speed(name: str) -> Amount | None:
        return None if wind is None else Amount(getattr(wind, name), "wind")

    return WindRow(
        number=number,
        name=site.name,
        side=site.side,
        remark=where_words(site),
        wind=speed("wind"),
        low=speed("low"),
        high=speed("high"),
        at_10m=speed("at_10m"),
        gust_low=speed("gust_low"),
        gust_high=speed("gust_high"),
    )
