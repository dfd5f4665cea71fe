"""What the reader must bear in mind: always, in this form of the computation, and in this case."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.report.inputs import PROFILE
from orolift.report.quantities import Amount
from orolift.report.spans import Spans, ranged
from orolift.report.story import (
    is_blocked,
    rains,
    reaches_the_ground_or_not,
    removal_words,
    starts_saturated,
)

if TYPE_CHECKING:
    from datetime import datetime

    from orolift.crossing.result import Crossing
    from orolift.report.words import Words

WEAK_WIND = 5.0
"""Wind across the crest below this [m s-1] gets a caution; a judgement."""

_NO_WARNING = (
    "This is an estimate for trained people, not a warning. Official warning services, fire agencies, local codes and "
    "licensed practice decide."
)
_RANGE_OF_FLOW = (
    "How much low air is blocked and how much of it goes round decides the lee temperature, and real ranges scatter "
    "about the thresholds. The range in brackets runs from no blocking to full blocking; errors of input and "
    "method come on top and are not in it."
)
_LINEAR = (
    "Streamlines are those of linear waves: position and size of single waves and of the strongest wind are less sure "
    "than how high the air comes from."
)
RANGE_OF_MEMBERS = (
    "How much low air is blocked and how much of it goes round decides the lee temperature, and real ranges scatter "
    "about the thresholds. The ranges in brackets hold the middle eight tenths of the members, that scatter among "
    "what they differ in; for rain, cloud and heights the error of the method comes on top and is not in them."
)
_NOT_WORKED_OUT = (
    "Not worked out: showers, flow along the range and through single gaps, and the shade of cloud other than the "
    "crossing's own where it rains."
)
_NO_MEMBERS = "The range that uncertain input gives the numbers is not worked out: the case has no members."
ALWAYS: tuple[Words, ...] = ((_NO_WARNING,), (_LINEAR,), (_NOT_WORKED_OUT,))
"""Cautions of every report in this form of the computation."""


@dataclass(frozen=True)
class Cautions:
    """What to bear in mind.

    Attributes
    ----------
    heading : Words
    always : tuple of Words
    here : tuple of Words
        Limits that apply to this case.
    notes : tuple of str
        Assumptions made on the way, as the computation says them.
    """

    heading: Words
    always: tuple[Words, ...]
    here: tuple[Words, ...]
    notes: tuple[str, ...]


def cautions(spans: Spans, valid_time: datetime | None) -> Cautions:
    """Cautions and notes of a crossing.

    Parameters
    ----------
    spans : Spans
        With its members, where there are any; else the ranges are the ends of blocking.
    valid_time : datetime or None

    Returns
    -------
    Cautions
    """
    crossing = spans.crossing
    here = (*((text,) for text in crossing.cautions), *_flow(spans), *_water(crossing))
    if valid_time is None:
        here = (*here, ("The case names no valid time: heat from the ground, by day and by night, is left out.",))
    return Cautions(
        heading=("An estimate, to be judged by a trained reader",),
        always=(*ALWAYS, (RANGE_OF_MEMBERS,))
        if spans.spread is not None
        else (*ALWAYS, (_RANGE_OF_FLOW,), (_NO_MEMBERS,)),
        here=here,
        notes=tuple(dict.fromkeys(crossing.notes)),
    )


def _flow(spans: Spans) -> tuple[Words, ...]:
    """Limits that wind, blocking and the lee set."""
    crossing, flow = spans.crossing, spans.crossing.flow
    out: list[Words] = []
    if flow.crest_wind < WEAK_WIND:
        out.append(
            (
                "The wind across the crest is weak, ",
                *ranged(Amount(flow.crest_wind, "wind", 1), spans.of("cross_range_wind")),
                ": little air comes over.",
            )
        )
    if is_blocked(crossing) and flow.going_round_source == "assumed":
        out.append(
            (
                "What share of the low air goes round, ",
                *ranged(Amount(flow.going_round_share, "share"), spans.of("going_round_share")),
                ", is assumed; the lowest pass of the range (pass_m) or an elevation raster would tell more.",
            )
        )
    lee = next((air for air in crossing.lee if air.side == "lee"), None)
    if flow.breaks_through is None and lee is not None:
        chance = Amount(flow.break_through_chance, "share")
        which = "open" if reaches_the_ground_or_not(crossing, lee) else "likely"
        words = f"that the crossing air reaches the ground is {which} ("
        out.append(("Nothing is known of the air lying in the lee: ", words, chance, ", by hour and wind)."))
    if not PROFILE & set(crossing.incoming.origin):
        out.append(
            ("Only the ground of the incoming air was measured; all above it is assumed (see the notes below).",)
        )
    return tuple(out)


def _water(crossing: Crossing) -> tuple[Words, ...]:
    """Limits that cloud and rain set."""
    if crossing.cloud.base is None:
        return ()
    out: list[Words] = []
    if rains(crossing) and crossing.settings.removed_share is not None:
        out.append(
            (
                "The share of water that leaves is prescribed; it decides how warm and dry the lee is: ",
                *removal_words(crossing),
                ".",
            )
        )
    if starts_saturated(crossing):
        out.append(("The air is saturated at the upwind end: how much fog or cloud it brings is not known.",))
    wet = [air.name for air in crossing.lee if air.side == "lee" and air.relative_humidity > 0.995]
    if wet:
        out.append((f"Cloud reaches the ground at {', '.join(wet)}.",))
    return tuple(out)
