"""Three answers side by side: the popular picture, descent only, and this page; and why they differ."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.report.causes import cause_noun, plain_end
from orolift.report.quantities import Amount
from orolift.report.spans import Spans, changed, inside, ranged, sized, span_of
from orolift.report.story import SAME, ends_of, source_words, where_words

if TYPE_CHECKING:
    from orolift.crossing.result import LeeAir
    from orolift.report.words import Words

TELLING = 2.0
"""Answers further apart than this [K] are explained (design)."""


@dataclass(frozen=True)
class AnswerRow:
    """The answers for one site; None where an answer says nothing of it.

    Attributes
    ----------
    number : int
    name, side, remark : str
    incoming, popular_picture, descent_only, own, no_blocking, full_blocking : Amount or None
        Temperatures.
    own_dew_point, no_blocking_dew_point, full_blocking_dew_point : Amount or None
    spans : dict of str to Words
        Ranges by column; the two ends of blocking have none.
    """

    number: int
    name: str
    side: str
    remark: str
    incoming: Amount
    popular_picture: Amount | None
    descent_only: Amount | None
    own: Amount
    no_blocking: Amount | None
    full_blocking: Amount | None
    own_dew_point: Amount
    no_blocking_dew_point: Amount | None
    full_blocking_dew_point: Amount | None
    spans: dict[str, Words]


@dataclass(frozen=True)
class Answers:
    """A conclusion, the rows, and why the answers differ."""

    heading: Words
    rows: tuple[AnswerRow, ...]
    remarks: tuple[Words, ...]


def answers(spans: Spans) -> Answers:
    """The answers for every site.

    Parameters
    ----------
    spans : Spans

    Returns
    -------
    Answers
    """
    site = spans.main
    return Answers(
        heading=_heading(spans, site),
        rows=tuple(_row(air, spans) for air in spans.crossing.lee),
        remarks=(*_differences(spans, site), *_ends(spans, site)),
    )


def _row(site: LeeAir, spans: Spans) -> AnswerRow:
    over = site.side != "windward"

    def warm(value: float | None) -> Amount | None:
        return None if value is None else Amount(value, "temperature", 1)

    ends = ends_of(site)
    least, most = (None, None) if ends is None else ends
    ranges = {
        "incoming": span_of(warm(site.upwind_temperature), spans.at(site, "upwind_temperature")),
        "popular_picture": span_of(warm(site.popular_picture), spans.at(site, "popular_picture")) if over else (),
        "descent_only": span_of(warm(site.descent_only), spans.at(site, "descent_only")) if over else (),
        "own": span_of(warm(site.temperature), spans.at(site, "temperature")),
        "own_dew_point": span_of(warm(site.dew_point), spans.at(site, "dew_point")),
    }
    return AnswerRow(
        number=site.number,
        name=site.name,
        side=site.side,
        remark=where_words(site),
        incoming=Amount(site.upwind_temperature, "temperature", 1),
        popular_picture=warm(site.popular_picture if over else None),
        descent_only=warm(site.descent_only if over else None),
        own=Amount(site.temperature, "temperature", 1),
        no_blocking=warm(None if least is None else least.temperature),
        full_blocking=warm(None if most is None else most.temperature),
        own_dew_point=Amount(site.dew_point, "temperature", 1),
        no_blocking_dew_point=warm(None if least is None else least.dew_point),
        full_blocking_dew_point=warm(None if most is None else most.dew_point),
        spans=ranges,
    )


def _popular(spans: Spans, site: LeeAir) -> Words:
    return ranged(Amount(site.popular_picture, "temperature", 1), spans.at(site, "popular_picture"))


def _heading(spans: Spans, site: LeeAir) -> Words:
    if site.side == "windward":
        return (f"The popular picture says nothing of {site.name}, which lies before the crest",)
    gap = site.popular_picture - site.temperature
    if site.in_pool:
        return (
            f"The popular picture gives {site.name} ",
            *_popular(spans, site),
            " and knows no cold pool",
        )
    if abs(gap) < SAME:
        return (f"The popular picture gives the same temperature for {site.name}",)
    return (
        f"The popular picture gives {site.name} ",
        *_popular(spans, site),
        ", ",
        *changed(
            gap, spans.gap(site, "popular_picture", "temperature"), "more than this page", "less than this page", ""
        ),
    )


def _differences(spans: Spans, site: LeeAir) -> list[Words]:
    """A sentence for each answer that is more than 2 K off."""
    if site.side == "windward" or site.in_pool:
        return []
    out: list[Words] = []
    gap = site.popular_picture - site.temperature
    if abs(gap) > TELLING:
        size = sized(gap, spans.gap(site, "popular_picture", "temperature"))
        side = "less" if gap < 0.0 else "more"
        out.append(("The popular picture gives ", *size, f" {side} because ", *_why_popular(spans, site, gap), "."))
    if site.descent_only is not None and site.parts is not None:
        gap = site.descent_only - site.temperature
        if abs(gap) > TELLING:
            size = sized(gap, spans.gap(site, "descent_only", "temperature"))
            side = "less" if gap < 0.0 else "more"
            out.append(
                ("Descent only gives ", *size, f" {side} because it leaves out ", *_left_out(spans, site, gap), ".")
            )
    if not out:
        out.append(
            (
                "The answers lie within ",
                Amount(TELLING, "temperature_difference"),
                " of this page: the simple pictures serve here.",
            )
        )
    return out


def _why_popular(spans: Spans, site: LeeAir, gap: float) -> Words:
    """What makes the popular picture differ, the largest reason first."""
    parts = site.parts
    if gap < 0.0 and site.source_level is not None and parts is not None and parts.descent > parts.latent:
        return (
            "it lifts the air of the upwind ground, which does not get over here: what arrives comes from ",
            *source_words(site),
            " and is warmer once it is down",
        )
    if parts is not None and parts.going_round < -0.5 * gap and gap > 0.0:
        return (
            "all its air comes over the crest, while here ",
            *ranged(Amount(site.went_round, "share"), spans.at(site, "went_round")),
            " went round and stayed cool",
        )
    if gap > 0.0:
        return (
            "it lets every drop fall out, while here water stays in the air and takes its heat back on the way down",
        )
    return ("it starts with the air of the upwind ground alone and lifts it over the highest ground",)


def _left_out(spans: Spans, site: LeeAir, gap: float) -> Words:
    """The largest of the parts that descent alone leaves out, in the direction of the gap."""
    parts = site.parts
    if parts is None:
        return ("everything else",)
    others = {key: getattr(parts, key) for key in ("latent", "going_round", "mixing", "surface_heating", "pressure")}
    key = max(others, key=lambda name: -others[name] * gap)
    words = plain_end(cause_noun(spans.crossing, site, key))
    if key == "latent":
        words = ("the heat of condensation",)
    return (*words, " (", *inside(Amount(others[key], "temperature_change", 1), spans.part(site, key)), ")")


def _ends(spans: Spans, site: LeeAir) -> list[Words]:
    """The two ends between which the answer lies."""
    ends = ends_of(site)
    if ends is None:
        return []
    least, most = ends
    if abs(least.temperature - most.temperature) < SAME:
        return [("No layer is stopped, so that no blocking and full blocking give the same: it decides nothing here.",)]
    return [
        (
            f"What blocking may do at {site.name}: ",
            Amount(least.temperature, "temperature", 1),
            " with no blocking (all the low air comes over) and ",
            Amount(most.temperature, "temperature", 1),
            " with full blocking (nothing below ",
            *ranged(Amount(spans.crossing.flow.dividing_height, "height", -1), spans.of("dividing_height")),
            " comes over, nothing goes round).",
        )
    ]
