"""What the onset test of a comparison says, in words."""

from __future__ import annotations

from datetime import UTC, datetime
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.quantities import Amount

if TYPE_CHECKING:
    from orolift.crossing.onset import OnsetRule, Spell
    from orolift.report.words import Words
    from orolift.spread.compared import Compared
    from orolift.spread.onset_series import OnsetAtPlace


def hour_words(time: float) -> str:
    """Day and hour in UTC; empty for an unknown time."""
    return "" if np.isnan(time) else f"{datetime.fromtimestamp(time, UTC):%d %b %H:%M}"


def rule_words(rule: OnsetRule) -> Words:
    """The rule of the onset test in words."""
    words: Words = (
        "Air counts as air from over the crest when its potential temperature is at least that at the crest",
    )
    if rule.offset:
        sign = "less" if rule.offset > 0.0 else "plus"
        words = (*words, f" {sign} ", Amount(abs(rule.offset), "temperature_difference", 1))
    words = (*words, " and it blows with at least ", Amount(rule.least_speed, "wind"))
    if rule.sector is not None:
        start, end = (Amount(x % (2.0 * np.pi), "bearing") for x in rule.sector)
        words = (*words, " from between ", start, " and ", end)
    bridge = Amount(rule.bridge, "hours")
    return (
        *words,
        " (Vergeiner 2004; Drechsel and Mayr 2008). Interruptions of up to ",
        bridge,
        " are bridged.",
    )


def onset_words(found: Compared) -> tuple[Words, ...]:
    """What the onset test says at every place.

    Parameters
    ----------
    found : Compared

    Returns
    -------
    tuple of Words
    """
    return tuple(_onset_at(one, found.names[one.place]) for one in found.onset)


def _onset_at(one: OnsetAtPlace, name: str) -> Words:
    known = one.estimated[np.isfinite(one.estimated)]
    words: Words
    if one.estimated.size == 1:
        excess = Amount(abs(float(one.excess[0])), "temperature_difference", 1)
        word = "above" if one.excess[0] > 0.0 else "below"
        holds = "met" if known.size and known[0] > 0.5 else "not met"
        words = (
            f"{name}: by the estimate the rule is {holds} (potential temperature ",
            excess,
            f" {word} that over the crest)",
        )
    else:
        words = (f"{name}: by the estimates the rule is met at {int((known > 0.5).sum())} of {known.size} times",)
        words = (*words, *_spell_words(one.estimated_spells))
    if not one.times:
        return (*words, "; observations do not tell.")
    if not one.observed_spells:
        return (*words, f"; it is met at none of {one.times} observed times.")
    words = (*words, "; observed, it is met", *_spell_words(one.observed_spells))
    if one.table is not None and one.table.count > 1:
        table = one.table
        words = (
            *words,
            (
                f". Hits {table.hits}, misses {table.misses}, false alarms {table.false_alarms}, "
                f"rightly not met {table.correct_rejections}"
            ),
        )
    return (*words, ".")


def _spell_words(spells: tuple[Spell, ...]) -> Words:
    parts = []
    for spell in spells[:6]:
        start, end = hour_words(spell.start), hour_words(spell.end)
        if spell.start == spell.end:
            parts.append(f"at {start} UTC")
            continue
        first = f"from before {start}" if spell.open_start else f"from {start}"
        last = f"at least to {end}" if spell.open_end else f"to {end}"
        parts.append(f"{first} {last} UTC")
    more = f" and {len(spells) - 6} more times" if len(spells) > 6 else ""
    return (f" {'; '.join(parts)}{more}",) if parts else ()


def onset_heading(found: Compared) -> Words:
    """The heading of the section."""
    met = [one for one in found.onset if np.any(one.estimated > 0.5)]
    seen = [one for one in found.onset if one.observed_spells]
    if seen:
        first = min(one.observed_spells[0].start for one in seen)
        return (f"Air from over the crest reached the lee at {hour_words(first)} UTC",)
    if not found.onset:
        return ("No place in the lee to test for air from over the crest",)
    return (
        "By the estimate air from over the crest reaches the lee"
        if met
        else "By the estimate air from over the crest does not reach the lee",
    )
