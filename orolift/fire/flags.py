"""Thresholds that are met, in sentences: which rule, what met it and by how much, never more than that."""

from __future__ import annotations

from typing import TYPE_CHECKING

from orolift.constants import MELTING_POINT
from orolift.fire.words import limit_words, named

if TYPE_CHECKING:
    from orolift.fire.rules import JudgedCondition, JudgedRule, RuleSet
    from orolift.fire.sites import SiteFire
    from orolift.fire.words import Measure

MOST_NAMES = 8
"""Sites that are named in one sentence."""
_WRITTEN: dict[Measure, tuple[float, str]] = {
    "share": (100.0, " %"),
    "temperature": (1.0, " °C"),
    "temperature_change": (1.0, " °C"),
    "vapour_pressure": (0.01, " hPa"),
    "wind": (1.0, " m/s"),
    "height": (1.0, " m"),
    "rain_rate": (3600.0, " mm/h"),
    "plain": (1.0, ""),
}


def fire_flags(sites: tuple[SiteFire, ...], rules: RuleSet | None) -> tuple[str, ...]:
    """Thresholds met at the sites.

    Parameters
    ----------
    sites : tuple of SiteFire
    rules : RuleSet or None

    Returns
    -------
    tuple of str
        One sentence for each rule met at a site, those met only with winds at the upper end of their range too.
    """
    if rules is None:
        return ()
    return tuple(
        _sentence(site, threshold.judged, rules)
        for site in sites
        for threshold in site.thresholds
        if threshold.judged.status in {"met", "met at the upper end of the wind"}
    )


def windward_cautions(sites: tuple[SiteFire, ...], rules: RuleSet | None) -> tuple[str, ...]:
    """What to know where thresholds are judged before the crest, or in air whose wind is not known.

    Parameters
    ----------
    sites : tuple of SiteFire
    rules : RuleSet or None

    Returns
    -------
    tuple of str
    """
    if rules is None:
        return ()
    out = []
    windward = [site.name for site in sites if site.side == "windward"]
    if windward:
        where = f"{_listed(windward)} {'lies' if len(windward) == 1 else 'lie'} on the windward side"
        out.append(f"Fire thresholds: {where}; what is judged there is air before the crest, not lee air.")
    still = [site.name for site in sites if site.in_pool or site.in_blocked_air]
    if still:
        out.append(
            f"Fire thresholds: the wind at {_listed(still)} is not known (cold pool or blocked air), so rules with "
            "a wind cannot be judged there."
        )
    return tuple(out)


def _listed(names: list[str]) -> str:
    """Names, the first ones of very many."""
    more = f" and {len(names) - MOST_NAMES} more" if len(names) > MOST_NAMES else ""
    return ", ".join(names[:MOST_NAMES]) + more


def _sentence(site: SiteFire, judged: JudgedRule, rules: RuleSet) -> str:
    """One threshold that is met."""
    parts = [_condition(one) for one in judged.conditions]
    side = " (windward side)" if site.side == "windward" else ""
    how = "met" if judged.status == "met" else "met only with winds at the upper end of their range"
    text = f"Fire threshold {how} at {site.name}{side}: {judged.rule.name} ({rules.region}): {'; '.join(parts)}."
    if judged.chance is not None:
        text += f" Chance within the spread: {100.0 * judged.chance:.0f} %."
    if judged.rule.hours > 1 and judged.lasts is None:
        text += f" Whether it lasts {judged.rule.hours} h cannot be judged from one hour."
    elif judged.rule.hours > 1:
        text += f" It {'lasts' if judged.lasts else 'does not last'} {judged.rule.hours} h."
    return text


def _condition(one: JudgedCondition) -> str:
    """A value beside its limit."""
    words, measure, digits = named(one.condition.quantity)
    limit = f"threshold {limit_words(one.condition)} {_written(one.condition.limit, measure, digits)}"
    if one.value is None or one.margin is None:
        return f"{words} not known ({limit})"
    kind: Measure = "temperature_change" if measure == "temperature" else measure
    by = f"{'met' if one.margin >= 0.0 else 'missed'} by {_written(abs(one.margin), kind, max(digits, 1))}"
    return f"{words} {_written(one.value, measure, digits)} ({limit}, {by})"


def _written(value: float, measure: Measure, digits: int) -> str:
    factor, unit = _WRITTEN[measure]
    zero = MELTING_POINT if measure == "temperature" else 0.0
    return f"{(value - zero) * factor:.{digits}f}{unit}"
