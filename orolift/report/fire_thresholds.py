"""Thresholds at the sites as rows: value, limit, by how much, what would turn it, how likely."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.fire.movers import REACH
from orolift.fire.winds import WindMeant
from orolift.fire.words import limit_words, named, wind_words
from orolift.report.quantities import Amount
from orolift.report.spans import second_line
from orolift.report.story import where_words
from orolift.report.words import counted

if TYPE_CHECKING:
    from orolift.crossing.result import LeeAir
    from orolift.fire.movers import Mover
    from orolift.fire.rules import JudgedCondition, JudgedRule, Status
    from orolift.fire.sites import SiteFire
    from orolift.report.quantities import Kind
    from orolift.report.words import Words

MOST_ROWS = 60
"""Thresholds shown on the page; the results file has all (design choice)."""
SHOWN_MOVERS = 2
ORDER: tuple[Status, ...] = ("met", "met at the upper end of the wind", "not met", "cannot be judged")
_DIFFERENCES: dict[str, Kind] = {
    "temperature": "temperature_difference",
    "temperature_change": "temperature_difference",
}


@dataclass(frozen=True)
class ConditionRow:
    """One condition: what, its limit, the value and its range, by how much, what would turn it."""

    what: Words
    limit: Words
    value: Amount | None
    span: Words
    margin: Words
    met: bool
    movers: Words
    chance: Amount | None


@dataclass(frozen=True)
class ThresholdRow:
    """One rule at one site.

    Attributes
    ----------
    number : int
    name, side, remark : str
        Of the site.
    rule : str
    status : str
        In words, with what is said of its duration.
    met : bool
        Whether it is met, not only with the strongest winds.
    chance : Amount or None
    conditions : tuple of ConditionRow
    """

    number: int
    name: str
    side: str
    remark: str
    rule: str
    status: str
    met: bool
    chance: Amount | None
    conditions: tuple[ConditionRow, ...]


def threshold_rows(found: tuple[SiteFire, ...], lee: tuple[LeeAir, ...]) -> tuple[ThresholdRow, ...]:
    """Every rule at every site, those met first.

    Parameters
    ----------
    found : tuple of SiteFire
    lee : tuple of LeeAir
        The same sites.

    Returns
    -------
    tuple of ThresholdRow
        At most `MOST_ROWS`.
    """
    rows = [
        (
            ORDER.index(threshold.judged.status),
            air.number,
            place,
            _row(site, air, air.number, threshold.judged, threshold.movers),
        )
        for site, air in zip(found, lee, strict=True)
        for place, threshold in enumerate(site.thresholds)
    ]
    rows.sort(key=lambda row: row[:3])
    return tuple(row[3] for row in rows[:MOST_ROWS])


@dataclass(frozen=True)
class Headline:
    """What the thresholds come to: words for the heading, and the sites it speaks of; both empty without rules."""

    words: str
    sites: tuple[str, ...]


def headline(found: tuple[SiteFire, ...]) -> Headline:
    """What is met and where.

    Parameters
    ----------
    found : tuple of SiteFire

    Returns
    -------
    Headline
    """
    judged = [(site.name, one.judged) for site in found for one in site.thresholds]
    if not judged:
        return Headline("", ())
    for status, how in ((ORDER[0], ""), (ORDER[1], " with the strongest winds only")):
        here = [(name, one) for name, one in judged if one.status == status]
        if here:
            rules = list(dict.fromkeys(one.rule.name for _, one in here))
            names = tuple(dict.fromkeys(name for name, _ in here))
            before = {site.name for site in found if site.side == "windward"}
            one_name = f"{names[0]}, before the crest" if names[0] in before else names[0]
            where = one_name if len(names) == 1 else counted(len(names), "site", "sites").lower()
            many = counted(len(rules), "threshold", "thresholds").capitalize()
            what = f"“{rules[0]}” is" if len(rules) == 1 else f"{many} are"
            return Headline(f"{what} met at {where}{how}", names)
    if all(one.status == ORDER[3] for _, one in judged):
        return Headline("No threshold can be judged", ())
    if any(one.status == ORDER[3] for _, one in judged):
        return Headline("No threshold is met where it can be judged", ())
    return Headline("No threshold is met", ())


def likeliest(found: tuple[SiteFire, ...]) -> str:
    """Which threshold is met in most members, where and in how many; empty where no chance is known or all are none.

    Parameters
    ----------
    found : tuple of SiteFire

    Returns
    -------
    str
    """
    known = [
        (one.judged.chance, one.judged.rule.name, site.name)
        for site in found
        for one in site.thresholds
        if one.judged.chance is not None
    ]
    chance, rule, site = max(known, key=lambda one: one[0], default=(0.0, "", ""))
    return f"“{rule}” at {site} in {100.0 * chance:.0f} % of the members" if chance > 0.0 else ""


def _row(
    site: SiteFire, air: LeeAir, number: int, judged: JudgedRule, movers: tuple[tuple[Mover, ...], ...]
) -> ThresholdRow:
    conditions = tuple(
        _condition(one, moves, site.rule_ranges.get(one.condition.quantity))
        for one, moves in zip(judged.conditions, movers, strict=True)
    )
    return ThresholdRow(
        number=number,
        name=site.name,
        side=site.side,
        remark=where_words(air),
        rule=judged.rule.name,
        status=_status(judged),
        met=judged.status == ORDER[0],
        chance=None if judged.chance is None else Amount(judged.chance, "share"),
        conditions=conditions,
    )


def _status(judged: JudgedRule) -> str:
    """Met or not, with its duration."""
    hours = judged.rule.hours
    if judged.status == "cannot be judged":
        return "cannot be judged: a value is not known"
    words = "met with winds at the upper end of their range" if judged.status == ORDER[1] else judged.status
    if hours == 1 or judged.status == "not met":
        return words
    if judged.lasts is None:
        return f"{words} at this hour; {hours} h cannot be judged from one hour"
    return f"{words}, and lasts {hours} h" if judged.lasts else f"{words} at this hour, not for {hours} h"


def _condition(one: JudgedCondition, moves: tuple[Mover, ...], ends: tuple[float, float] | None) -> ConditionRow:
    _, measure, digits = named(one.condition.quantity)
    kind: Kind = measure
    apart: Words = ("not known",)
    if one.margin is not None:
        by = Amount(abs(one.margin), _DIFFERENCES.get(measure, kind), max(digits, 1))
        apart = ("met by " if one.margin >= 0.0 else "missed by ", by)
    return ConditionRow(
        what=_what(one.condition.quantity),
        limit=(
            f"{limit_words(one.condition)} ",
            Amount(one.condition.limit, "rain_limit" if kind == "rain_rate" else kind, digits),
        ),
        value=None if one.value is None else Amount(one.value, kind, digits),
        span=() if one.value is None else second_line(Amount(one.value, kind, digits), ends),
        margin=apart,
        met=one.met is True,
        movers=_movers(moves),
        chance=None if one.chance is None else Amount(one.chance, "share"),
    )


def _what(quantity: str | WindMeant) -> Words:
    """Name of a quantity; of a wind with its height as an amount."""
    if not isinstance(quantity, WindMeant):
        return (named(quantity).words,)
    digits = 0 if quantity.height == round(quantity.height) else 1
    kind, average = wind_words(quantity)
    return (f"{kind} at ", Amount(quantity.height, "height", digits), f", mean of {average}")


def _movers(moves: tuple[Mover, ...]) -> Words:
    """The changes that take least, in words."""
    nearest = sorted(moves, key=lambda move: abs(move.amount) / REACH[move.what][0])[:SHOWN_MOVERS]
    out: list[str | Amount] = []
    for move in nearest:
        out += [*([" or "] if out else []), *_mover(move)]
    return tuple(out)


def _mover(move: Mover) -> Words:
    up, size = move.amount > 0.0, abs(move.amount)
    if move.what == "wind across the crest":
        return (Amount(size, "wind", 1), f" {'more' if up else 'less'} wind across the crest")
    if move.what == "source level":
        return ("air from ", Amount(size, "height", -1), " higher" if up else " lower")
    change = Amount(size, "temperature_difference", 1)
    if move.what == "temperature":
        return (change, " warmer" if up else " cooler")
    return ("a dew point ", change, " higher" if up else " lower")
