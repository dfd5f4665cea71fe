"""Why it is warm or cold at each site: the parts of the warming, and which of them explains it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.report.key_numbers import before
from orolift.report.quantities import Amount
from orolift.report.spans import Spans, changed, ranged, span_of
from orolift.report.story import SAME, rains, removal_words, source_words, where_words

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing, LeeAir, WarmingParts
    from orolift.report.words import Words

PARTS = {
    "descent": "descent",
    "latent": "condensation",
    "going_round": "went round",
    "mixing": "mixing",
    "surface_heating": "sun and night",
    "pressure": "lee pressure",
}
"""Parts of the warming and their short names, in the order in which they are added up."""
SLIGHT = 0.5
"""A warming smaller than this [K] is called slight (design choice)."""
TELLING = 0.3
"""A part that makes at least this share of the larger one beside it is named too (design choice)."""
COUNTS = 0.5
"""A part at least so large [K] on the other side is named too (design choice)."""


@dataclass(frozen=True)
class CauseRow:
    """The parts of the warming of one site.

    Attributes
    ----------
    number : int
    name, side, remark : str
    descent, latent, going_round, mixing, surface_heating, pressure : Amount or None
        None in a pool that stays.
    total : Amount
        Site minus incoming air at the same height.
    spans : dict of str to Words
        Ranges of the parts by the inputs, and of the total, by their names.
    """

    number: int
    name: str
    side: str
    remark: str
    descent: Amount | None
    latent: Amount | None
    going_round: Amount | None
    mixing: Amount | None
    surface_heating: Amount | None
    pressure: Amount | None
    total: Amount
    spans: dict[str, Words]


@dataclass(frozen=True)
class Causes:
    """A conclusion, the parts of every site, and what they mean."""

    heading: Words
    explanation: tuple[Words, ...]
    rows: tuple[CauseRow, ...]


def causes(spans: Spans) -> Causes:
    """Why it is warm or cold at the sites.

    Parameters
    ----------
    spans : Spans

    Returns
    -------
    Causes
    """
    rows = tuple(_row(site, spans) for site in spans.crossing.lee)
    site = spans.main
    return Causes(heading=cause_heading(spans.crossing, site), explanation=_explanation(spans, site), rows=rows)


def _row(site: LeeAir, spans: Spans) -> CauseRow:
    def part(key: str) -> Amount | None:
        return None if site.parts is None else Amount(getattr(site.parts, key), "temperature_change", 1)

    total = Amount(site.warming, "temperature_change", 1)
    return CauseRow(
        number=site.number,
        name=site.name,
        side=site.side,
        remark=where_words(site),
        descent=part("descent"),
        latent=part("latent"),
        going_round=part("going_round"),
        mixing=part("mixing"),
        surface_heating=part("surface_heating"),
        pressure=part("pressure"),
        total=total,
        spans={key: span_of(part(key), spans.part(site, key)) for key in PARTS}
        | {"total": span_of(total, spans.warming(site))},
    )


def sorted_parts(parts: WarmingParts) -> list[tuple[str, float]]:
    """Parts from the most warming to the most cooling."""
    return sorted(((key, float(getattr(parts, key))) for key in PARTS), key=lambda pair: -pair[1])


def main_cause(site: LeeAir) -> tuple[str, float] | None:
    """The part that does most in the direction of the total; None without a budget or without any change."""
    if site.parts is None or site.in_blocked_air:
        return None
    ordered = sorted_parts(site.parts)
    key, part = ordered[0] if site.warming >= 0.0 else ordered[-1]
    return None if abs(part) < SAME else (key, part)


def cause_noun(crossing: Crossing, site: LeeAir, key: str, *, source: bool = True) -> Words:
    """A cause as the subject of a sentence; with the height the air comes from where `source` asks for it."""
    if key == "descent" and site.went_round > 0.0:  # its source level is that of both ways together
        return ("descent from aloft",)
    if key == "descent":
        if site.source_level is not None and site.source_level > site.elevation + 50.0:
            return ("descent from ", *source_words(site)) if source else ("descent",)
        return ("air from other heights",)
    if key == "latent":
        return ("heat of condensation, kept because water fell out," if rains(crossing) else "condensation",)
    nouns = {
        "going_round": "low air that went round the range",
        "mixing": "mixing on the way",
        "surface_heating": "the sun on the ground" if site.parts and site.parts.surface_heating > 0.0 else "the night",
        "pressure": "the pressure in the lee",
    }
    return (nouns[key],)


def cause_heading(crossing: Crossing, site: LeeAir) -> Words:
    """What explains the warmth of a site, in one line."""
    if site.in_pool:
        return (f"{site.name} lies in cold air that stays; the crossing air passes over it",)
    if site.in_blocked_air:
        return (f"{site.name} lies in air that is stopped before the range, unchanged",)
    found = main_cause(site)
    if found is None or site.parts is None:
        return (f"Nothing makes {site.name} warmer or colder than the air that came",)
    key, _ = found
    subject = _capital(cause_noun(crossing, site, key))
    if abs(site.warming) < SLIGHT:
        return (f"{site.name} is about as warm as the air that came: the causes are small or cancel",)
    what = "warmth" if site.warming > 0.0 else "cold"
    second = _second(site.parts, key, warm=site.warming > 0.0)
    if second is not None:
        other = cause_noun(crossing, site, second)
        return (
            *plain_end(subject),
            " and ",
            *plain_end(other),
            f" explain the {what} together{'' if second == 'latent' else _rain_clause(crossing, key)}",
        )
    return (*subject, f" explains the {what}{_rain_clause(crossing, key)}")


def plain_end(words: Words) -> Words:
    """Words without a comma at their end."""
    last = words[-1]
    return (*words[:-1], last.rstrip(",") if isinstance(last, str) else last)


def _capital(words: Words) -> Words:
    first, *rest = words
    return (f"{first[:1].upper()}{first[1:]}" if isinstance(first, str) else first, *rest)


def _second(parts: WarmingParts, key: str, *, warm: bool) -> str | None:
    """The next part in the same direction, when it counts beside the first."""
    ordered = sorted_parts(parts) if warm else sorted_parts(parts)[::-1]
    first, second = ordered[0][1], ordered[1]
    same_way = second[1] > 0.0 if warm else second[1] < 0.0
    return second[0] if same_way and abs(second[1]) > TELLING * abs(first) and second[0] != key else None


def _rain_clause(crossing: Crossing, key: str) -> str:
    if key == "latent":
        return ""
    return "; rain plays no part" if not rains(crossing) else "; rain plays a small part"


def _explanation(spans: Spans, site: LeeAir) -> tuple[Words, ...]:
    """The budget of the main site in sentences."""
    if site.parts is None or site.in_blocked_air:
        return ()
    first: Words = (
        f"{site.name} is ",
        *changed(site.warming, spans.warming(site), "warmer than", "cooler than", "as warm as"),
        " the incoming air at its height: ",
        *ranged(Amount(site.temperature, "temperature", 1), spans.temperature(site)),
        " against ",
        *before(spans, site),
        ".",
    )
    if site.parts.descent > COUNTS and site.source_level is not None:
        by = ranged(Amount(site.parts.descent, "temperature_difference", 1), spans.part(site, "descent"))
        first = (*first, " Brought down dry, the air that crosses would be ", *by, " warmer than that air.")
    return (first, *_remarks(spans, site))


def _remarks(spans: Spans, site: LeeAir) -> list[Words]:
    """What the parts do not say by themselves."""
    crossing, parts = spans.crossing, site.parts
    if parts is None:
        return []
    out: list[Words] = []
    if parts.going_round < -COUNTS:
        out.append(
            (
                *ranged(Amount(site.went_round, "share"), spans.at(site, "went_round")),
                " of the air there went round the range at its own height, neither lifted nor warmed; that share is ",
                f"{crossing.flow.going_round_source}.",
            )
        )
    if parts.latent > COUNTS:
        why = "The heat of condensation stays with the air as far as the water that gave it falls out: "
        out.append((why, *removal_words(crossing), "."))
    return out
