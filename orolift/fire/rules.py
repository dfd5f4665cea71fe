"""Thresholds of a region: rules over the values of a site, and whether, by how much and how likely they are met."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Literal

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Collection, Mapping

    from numpy.typing import ArrayLike, NDArray

    from orolift.fire.winds import WindMeant

Status = Literal["met", "met at the upper end of the wind", "not met", "cannot be judged"]

MOST_UNJUDGED = 0.1
"""Share of the members that may not be judged where a chance is still given: it is then at most so much off."""


@dataclass(frozen=True)
class Condition:
    """One condition of a rule; exactly one of the two limits is given.

    Attributes
    ----------
    quantity : str or WindMeant
        A name of `values.QUANTITIES`, or the wind that is meant.
    at_least, at_most : float or None [SI]
        The limit itself meets the condition.
    """

    quantity: str | WindMeant
    at_least: float | None = None
    at_most: float | None = None

    @property
    def limit(self) -> float:
        """The limit, whichever it is."""
        limit = self.at_least if self.at_least is not None else self.at_most
        return float("nan") if limit is None else limit


@dataclass(frozen=True)
class Rule:
    """Conditions that must all be met, for some hours without a break.

    Attributes
    ----------
    name : str
    conditions : tuple of Condition
    hours : int
        1 where a rule asks for no duration.
    """

    name: str
    conditions: tuple[Condition, ...]
    hours: int = 1


@dataclass(frozen=True)
class RuleSet:
    """The thresholds of a region.

    Attributes
    ----------
    region, authority : str
        For where they hold, and who set them.
    taken : str
        When they were taken over from the authority, ISO date.
    rules : tuple of Rule
    """

    region: str
    authority: str
    taken: str
    rules: tuple[Rule, ...]


@dataclass(frozen=True)
class JudgedCondition:
    """One condition against the value of a site.

    Attributes
    ----------
    condition : Condition
    value : float or None
        None where it is not known.
    margin : float or None
        By how much it is met; negative: by how much it is missed.
    chance : float or None [1]
        Share of members that meet it; None without members.
    """

    condition: Condition
    value: float | None
    margin: float | None
    chance: float | None

    @property
    def met(self) -> bool | None:
        """Whether it is met; None where it cannot be judged."""
        return None if self.margin is None else self.margin >= 0.0


@dataclass(frozen=True)
class JudgedRule:
    """A rule against the values of a site.

    Attributes
    ----------
    rule : Rule
    status : str
        Met, met only with winds at the upper end of their range, not met, or not to be judged.
    conditions : tuple of JudgedCondition
    chance : float or None [1]
        Share of members that meet all conditions; None without members or where none can be judged.
    lasts : bool or None
        Whether it is met for the hours it asks for; None where that cannot be judged, as from one hour.
    """

    rule: Rule
    status: Status
    conditions: tuple[JudgedCondition, ...]
    chance: float | None
    lasts: bool | None


def margins(condition: Condition, value: ArrayLike) -> NDArray[np.float64]:
    """By how much values meet a condition, negative where they miss it.

    Parameters
    ----------
    condition : Condition
    value : array_like, any shape [SI]
        NaN where it is not known.

    Returns
    -------
    ndarray, same shape [SI]
        0 exactly at the limit, which meets it; NaN where the value is.
    """
    found = np.asarray(value, np.float64)
    return np.asarray(found - condition.limit if condition.at_least is not None else condition.limit - found)


def rule_met(rule: Rule, values: Mapping[str | WindMeant, ArrayLike]) -> tuple[NDArray[np.bool_], NDArray[np.bool_]]:
    """Whether members or hours meet all conditions of a rule, its duration apart.

    Parameters
    ----------
    rule : Rule
    values : mapping of quantity to array_like (...)

    Returns
    -------
    met, judged : ndarray of bool (...)
        A rule can be judged where every value is known, or a known one already misses its limit.
    """
    met, missed = rule_parts(rule, values)
    return met, np.asarray(met | missed)


def rule_parts(
    rule: Rule, values: Mapping[str | WindMeant, ArrayLike], *, without: Collection[str | WindMeant] = ()
) -> tuple[NDArray[np.bool_], NDArray[np.bool_]]:
    """Whether members or hours meet some conditions of a rule, and whether they miss one of them.

    Parameters
    ----------
    rule : Rule
    values : mapping of quantity to array_like (...)
    without : collection of quantities
        Those whose conditions are left out.

    Returns
    -------
    met, missed : ndarray of bool (...)
        Neither where a value is not known. A rule of which nothing is left is met, with the shape ().
    """
    met, missed = np.asarray(True), np.asarray(False)  # noqa: FBT003 (an array of one truth)
    for one in rule.conditions:
        if one.quantity not in without:
            margin = margins(one, values.get(one.quantity, np.nan))
            met, missed = np.asarray(met & (margin >= 0.0)), np.asarray(missed | (margin < 0.0))
    return met, missed


def judged(
    rule: Rule,
    values: Mapping[str | WindMeant, ArrayLike],
    *,
    windiest: Mapping[str | WindMeant, ArrayLike] | None = None,
    members: Mapping[str | WindMeant, ArrayLike] | None = None,
    lasts: bool | None = None,
) -> JudgedRule:
    """A rule judged at a site.

    Parameters
    ----------
    rule : Rule
    values : mapping of quantity to float
        The answer.
    windiest : mapping of quantity to float, optional
        The same with all winds at the upper end of the range of methods.
    members : mapping of quantity to array_like (m,), optional
        Of a spread.
    lasts : bool, optional
        From hours, whether it is met long enough; a rule that asks for one hour needs none.

    Returns
    -------
    JudgedRule

    Examples
    --------
    >>> dry = Rule("dry", (Condition("relative_humidity", at_most=0.15),))
    >>> found = judged(dry, {"relative_humidity": 0.12}, members={"relative_humidity": [0.1, 0.14, 0.2, 0.3]})
    >>> found.status, round(found.conditions[0].margin, 3), found.chance
    ('met', 0.03, 0.5)
    """
    conditions = tuple(_condition(one, values) for one in rule.conditions)
    status = _status(rule, values, windiest)
    if rule.hours == 1:
        lasts = status == "met" if status != "cannot be judged" else None
    elif status == "not met" and lasts is None:
        lasts = False
    found = JudgedRule(rule, status, conditions, None, lasts)
    return found if members is None else with_chance(found, members)


def with_chance(found: JudgedRule, members: Mapping[str | WindMeant, ArrayLike]) -> JudgedRule:
    """A judged rule with the share of members that meet it, and each of its conditions.

    Parameters
    ----------
    found : JudgedRule
    members : mapping of quantity to array_like (m,)
        Of a spread; NaN where a member does not know a value.

    Returns
    -------
    JudgedRule
        Members that cannot be judged do not count. Those that can be without the unknown value are the ones that
        miss another limit: where more than `MOST_UNJUDGED` cannot, there is no chance.
    """
    met, known = rule_met(found.rule, members)
    enough = bool(known.any()) and float((~known).mean()) <= MOST_UNJUDGED
    conditions = tuple(
        replace(one, chance=_share(margins(one.condition, members.get(one.condition.quantity, np.nan))))
        for one in found.conditions
    )
    return replace(found, conditions=conditions, chance=float(met[known].mean()) if enough else None)


def _share(margin: NDArray[np.float64]) -> float | None:
    """Of the known margins, the share that is met."""
    known = margin[np.isfinite(margin)]
    return float((known >= 0.0).mean()) if known.size else None


def _status(
    rule: Rule, values: Mapping[str | WindMeant, ArrayLike], windiest: Mapping[str | WindMeant, ArrayLike] | None
) -> Status:
    met, known = rule_met(rule, values)
    if not known:
        return "cannot be judged"
    if met:
        return "met"
    if windiest is not None and bool(rule_met(rule, windiest)[0]):
        return "met at the upper end of the wind"
    return "not met"


def _condition(condition: Condition, values: Mapping[str | WindMeant, ArrayLike]) -> JudgedCondition:
    value = float(np.asarray(values.get(condition.quantity, np.nan)))
    margin = float(margins(condition, value))
    known = np.isfinite(value)
    return JudgedCondition(condition, value if known else None, margin if known else None, None)
