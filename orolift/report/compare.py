"""The page of a comparison as data: raw numbers and words, no HTML."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC, datetime
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.compare_explained import Explanation, explanation
from orolift.report.compare_onset import hour_words, onset_heading, onset_words, rule_words
from orolift.report.compare_words import ANSWER_NAMES, QUANTITY_KINDS, QUANTITY_NAMES, magnitude, signed
from orolift.report.figures.compare_scatter import compare_scatter
from orolift.report.figures.compare_sources import compare_sources
from orolift.report.figures.compare_timeline import compare_timeline
from orolift.report.quantities import Amount
from orolift.report.words import Words, counted, moment
from orolift.spread.comparison import averaged
from orolift.spread.estimates import QUANTITIES, REFERENCES

if TYPE_CHECKING:
    from orolift.report.figures.compare_scatter import ScatterDrawing
    from orolift.report.figures.compare_sources import SourcesDrawing
    from orolift.report.figures.compare_timeline import TimelineDrawing
    from orolift.report.figures.drawing import Figure
    from orolift.report.quantities import Units
    from orolift.spread.compared import Compared
    from orolift.spread.comparison import Verdict
    from orolift.spread.estimates import Reference
    from orolift.spread.verification import Contingency

MOST_ROWS = 40
"""Rows of values on the page, those farthest from the middle of their range; the table as CSV has all."""
CAUTIONS = (
    (
        "This is an estimate for trained people, not a warning. Official warning services, fire agencies, local codes "
        "and licensed practice decide."
    ),
    (
        "A station says what the air is like at its own spot: shelter, buildings, snow and the height of the sensor "
        "are in the difference."
    ),
    "Observations near one estimate are not independent of each other: more rows do not make the scores surer.",
)


@dataclass(frozen=True)
class ValueRow:
    """One estimate against what was observed near it.

    Attributes
    ----------
    name, time, quantity : str
    estimate, observed, difference : Words
    inside : str
        In words.
    is_inside : bool or None
    away : float
        Distance from the middle of the range in units of half of it; 0 without one.
    """

    name: str
    time: str
    quantity: str
    estimate: Words
    observed: Words
    difference: Words
    inside: str
    is_inside: bool | None
    away: float


@dataclass(frozen=True)
class ScoreRow:
    """Scores of one quantity.

    Attributes
    ----------
    quantity : str
    count : Amount
    bias, error, coverage : Words
    unchanged, popular_picture, crest_air : Words
        Mean absolute error of the simple answer, and the skill against it; empty where it says nothing.
    """

    quantity: str
    count: Amount
    bias: Words
    error: Words
    coverage: Words
    unchanged: Words
    popular_picture: Words
    crest_air: Words


@dataclass(frozen=True)
class EventRow:
    """Hits and false alarms of one event."""

    name: str
    hits: Amount
    false_alarms: Amount
    misses: Amount
    correct_rejections: Amount
    detected: Amount | None
    false_alarm_ratio: Amount | None


@dataclass(frozen=True)
class LayerRow:
    """Estimate minus lee sounding in a layer."""

    low: Amount
    high: Amount
    temperature: Words
    mixing_ratio: Words


@dataclass(frozen=True)
class ComparePage:
    """Everything the page of a comparison shows."""

    title: str
    when: str
    made: str
    version: str
    units: Units
    heading: Words
    sentences: tuple[Words, ...]
    rows: tuple[ValueRow, ...]
    rows_left_out: int
    values_heading: Words
    scatter: Figure[ScatterDrawing] | None
    timeline: Figure[TimelineDrawing] | None
    scores: tuple[ScoreRow, ...]
    scores_heading: Words
    events: tuple[EventRow, ...]
    onset_heading: Words
    onset: tuple[Words, ...]
    explanation: Explanation | None
    sources: Figure[SourcesDrawing] | None
    layers: tuple[LayerRow, ...]
    profile_heading: Words
    always: tuple[str, ...]
    cautions: tuple[str, ...]
    notes: tuple[str, ...]


def compare_page(
    found: Compared,
    *,
    title: str,
    observed: str,
    made_at: datetime,
    version: str,
    units: Units = "metric",
) -> ComparePage:
    """The page of a comparison.

    Parameters
    ----------
    found : Compared
    title : str
        Of the case.
    observed : str
        Name of the file of observations.
    made_at : datetime
    version : str
    units : 'metric' or 'us'

    Returns
    -------
    ComparePage
    """
    rows = value_rows(found)
    cautions = dict.fromkeys(found.cautions)
    return ComparePage(
        title=f"{title}: against what was observed",
        when=_when(found, observed),
        made=moment(made_at),
        version=version,
        units=units,
        heading=_heading(found, rows),
        sentences=_sentences(found),
        rows=_farthest(rows),
        rows_left_out=max(len(rows) - MOST_ROWS, 0),
        values_heading=_values_heading(rows),
        scatter=compare_scatter(found, units),
        timeline=compare_timeline(found, units),
        scores=tuple(_score_row(one) for one in found.verdicts if one.score.count > 1),
        scores_heading=_scores_heading(found),
        events=tuple(_event_row(words, table) for words, table in found.events),
        onset_heading=onset_heading(found),
        onset=(rule_words(found.rule), *onset_words(found)),
        explanation=explanation(found),
        sources=compare_sources(found, units),
        layers=_layers(found),
        profile_heading=_profile_heading(found),
        always=CAUTIONS,
        cautions=tuple(cautions),
        notes=found.notes,
    )


def value_rows(found: Compared) -> tuple[ValueRow, ...]:
    """One row for each estimate, place and quantity; observations near one estimate are averaged.

    Parameters
    ----------
    found : Compared

    Returns
    -------
    tuple of ValueRow
    """
    rows: list[tuple[int, int, int, ValueRow]] = []
    for order, quantity in enumerate(QUANTITIES):
        pairs = found.pairs.get(quantity)
        if pairs is None:
            continue
        means, count = averaged(pairs)
        kinds = QUANTITY_KINDS[quantity]
        kind, digits = kinds.value
        for i in range(means.row.size):
            which, place = int(means.which[i]), int(means.place[i])
            estimate: Words = (Amount(float(means.estimated[i]), kind, digits),)
            inside = float(means.inside[i])
            if np.isfinite(inside):
                low, high = (Amount(float(x[i]), kind, digits, bare=True) for x in (means.low, means.high))
                estimate = (*estimate, " (", low, " to ", high, ")")
            several = f", mean of {int(count[i])}" if count[i] > 1 else ""
            rows.append(
                (
                    which,
                    place,
                    order,
                    ValueRow(
                        name=found.names[place],
                        time=hour_words(float(found.estimates[which].arrival[place])),
                        quantity=QUANTITY_NAMES[quantity],
                        estimate=estimate,
                        observed=(Amount(float(means.observed[i]), kind, digits), several),
                        difference=signed(float(means.estimated[i] - means.observed[i]), *kinds.difference),
                        inside="" if np.isnan(inside) else "inside" if inside > 0.5 else "outside",
                        is_inside=None if np.isnan(inside) else inside > 0.5,
                        away=_away(float(means.low[i]), float(means.high[i]), float(means.observed[i])),
                    ),
                )
            )
    return tuple(row for _, _, _, row in sorted(rows, key=lambda item: item[:3]))


def _away(low: float, high: float, value: float) -> float:
    """Distance from the middle of a range in units of half of it; 0 without a range."""
    half = 0.5 * (high - low)
    return abs(value - 0.5 * (low + high)) / half if half > 0.0 else 0.0


def _farthest(rows: tuple[ValueRow, ...]) -> tuple[ValueRow, ...]:
    """As many rows as the page has room for, in their order: those farthest from the middle of their range."""
    order = sorted(range(len(rows)), key=lambda i: -rows[i].away)
    return tuple(rows[i] for i in sorted(order[:MOST_ROWS]))


def _when(found: Compared, observed: str) -> str:
    times = [one.time for one in found.estimates if one.time is not None]
    rows = counted(found.seen.time.size, "row", "rows")
    if not times:
        return f"{rows} of {observed}; the case names no valid time."
    first, last = (moment(datetime.fromtimestamp(time, UTC)) for time in (times[0], times[-1]))
    span = first if len(times) == 1 else f"{len(times)} times from {first} to {last}"
    return f"{span}; {rows} of {observed}, compared within {found.within / 60.0:.0f} minutes."


def _heading(found: Compared, rows: tuple[ValueRow, ...]) -> Words:
    warm = next((one for one in found.verdicts if one.quantity == "temperature"), None)
    if warm is None:
        return (
            f"{counted(len(rows), 'value', 'values')} held against an estimate"
            if rows
            else "Only a sounding to compare with",
        )
    bias = Amount(abs(warm.score.bias), "temperature_difference", 1)
    word = "too warm" if warm.score.bias > 0.0 else "too cold"
    if warm.score.count == 1:
        inside = "inside" if warm.coverage == 1.0 else "outside"
        return ("The estimate is ", bias, f" {word}, {inside} its range")
    off = Amount(warm.score.mean_absolute_error, "temperature_difference", 1)
    within = round((warm.coverage or 0.0) * warm.score.count)
    return (
        "Temperatures in the lee are ",
        off,
        " off on average, ",
        bias,
        f" {word}; {within} of {warm.score.count} lie inside the range",
    )


def _sentences(found: Compared) -> tuple[Words, ...]:
    out: list[Words] = []
    for one in found.verdicts:
        if one.quantity not in {"temperature", "mixing_ratio"}:
            continue
        kind, digits = QUANTITY_KINDS[one.quantity].difference
        name = {"temperature": "temperature", "mixing_ratio": "the vapour of the air"}[one.quantity]
        words: Words = (
            f"For {name}, orolift is ",
            Amount(one.score.mean_absolute_error, magnitude(kind), digits),
            " off",
        )
        others = [(other.mean_absolute_error, key) for key, other in one.references.items()]
        if others:
            best, key = min(others)
            words = (
                *words,
                f"; the best of the simple answers, {ANSWER_NAMES[key]}, is ",
                Amount(best, magnitude(kind), digits),
                " off",
            )
        out.append((*words, "."))
    if found.explained is not None:
        seen = explanation(found)
        if seen is not None:
            out.append((*seen.heading, "."))
    return tuple(out)


def _values_heading(rows: tuple[ValueRow, ...]) -> Words:
    judged = [row.is_inside for row in rows if row.is_inside is not None]
    if not judged:
        return ("What was estimated, and what was observed",)
    inside = sum(judged)
    if inside == len(judged):
        return ("Every value lies inside the range it was given",)
    return (f"{inside} of {len(judged)} values lie inside the range they were given",)


def _score_row(one: Verdict) -> ScoreRow:
    kind, digits = QUANTITY_KINDS[one.quantity].difference
    if kind == "wind":
        kind = "wind_alone"  # knots beside every number would run the table off the page

    def against(name: Reference) -> Words:
        other = one.references.get(name)
        if other is None:
            return ()
        words: Words = (Amount(other.mean_absolute_error, magnitude(kind), digits),)
        gain = one.skill.get(name)
        return words if gain is None else (*words, "; ", *signed(gain, "share", 0))

    return ScoreRow(
        quantity=QUANTITY_NAMES[one.quantity],
        count=Amount(float(one.score.count), "plain"),
        bias=signed(one.score.bias, kind, digits),
        error=(Amount(one.score.mean_absolute_error, magnitude(kind), digits),),
        coverage=() if one.coverage is None else (Amount(one.coverage, "share"),),
        **{name: against(name) for name in REFERENCES},
    )


def _scores_heading(found: Compared) -> Words:
    warm = next((one for one in found.verdicts if one.quantity == "temperature"), None)
    if warm is None or not warm.skill:
        return ("Errors over all comparisons in the lee",)
    name, gain = min(warm.skill.items(), key=lambda item: item[1])
    if gain > 0.0:
        return ("Temperature is nearer than every simple answer",)
    return (
        f"{ANSWER_NAMES[name][:1].upper()}{ANSWER_NAMES[name][1:]} is nearer to the temperature observed than orolift",
    )


def _event_row(words: str, table: Contingency) -> EventRow:
    def share(value: float | None) -> Amount | None:
        return None if value is None else Amount(value, "share")

    return EventRow(
        name=words,
        hits=Amount(float(table.hits), "plain"),
        false_alarms=Amount(float(table.false_alarms), "plain"),
        misses=Amount(float(table.misses), "plain"),
        correct_rejections=Amount(float(table.correct_rejections), "plain"),
        detected=share(table.detected),
        false_alarm_ratio=share(table.false_alarm_ratio),
    )


def _layers(found: Compared) -> tuple[LayerRow, ...]:
    if found.profile is None:
        return ()
    return tuple(
        LayerRow(
            Amount(layer.low, "height"),
            Amount(layer.high, "height"),
            signed(layer.temperature, "temperature_change", 1),
            signed(layer.mixing_ratio, "mixing_ratio", 1),
        )
        for layer in found.profile.layers
    )


def _profile_heading(found: Compared) -> Words:
    if found.profile is None or not found.profile.layers:
        return ("The lee sounding does not reach the estimated profile",)
    first = found.profile.layers[0]
    word = "too warm" if first.temperature > 0.0 else "too cold"
    return (
        f"Against the sounding at {found.profile.place} the lowest air is ",
        Amount(abs(first.temperature), "temperature_difference", 1),
        f" {word}",
    )
